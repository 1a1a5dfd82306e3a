package convex

import (
	"sort"
)

// coverItem is a column of a knapsack: weight times z, z being the column or one less it.
type coverItem struct {
	column int
	weight float64
	at     float64
	turned bool // z is one less the column
}

const (
	coverMargin = 1e-7 // by which a cover must exceed the knapsack, and by which lifting gives way, relative to the knapsack
	coverFound  = 1e-3 // violation that is worth lifting for
)

// covers looks for violated cover inequalities in each row and in its opposite.
func (k *cutter) covers() {
	for i := range k.c.rows {
		r := &k.c.rows[i]
		if finite(r.upper) {
			k.cover(r, 1, r.upper)
		}
		if finite(r.lower) {
			k.cover(r, -1, -r.lower)
		}
	}
}

// cover finds a cover of sign times the row <= limit, lifts it and keeps it.
//
// Source: Balas (1975), Facets of the knapsack polytope; Zemel (1989) for lifting in order by dynamic programming.
func (k *cutter) cover(r *coreRow, sign, limit float64) {
	var items []coverItem
	for _, e := range r.entries {
		j, a := e.at, sign*e.value
		if k.c.whole[j] && k.c.lower[j] == 0 && k.c.upper[j] == 1 {
			it := coverItem{column: j, weight: a, at: k.x[j]}
			if a < 0 {
				it.weight, it.at, it.turned = -a, 1-k.x[j], true
				limit -= a
			}
			items = append(items, it)
			continue
		}
		bound := k.c.lower[j]
		if a < 0 {
			bound = k.c.upper[j]
		}
		if !finite(bound) {
			return
		}
		limit -= a * bound
	}
	if len(items) < 2 || !(limit > 0) {
		return
	}
	chosen, rest := pickCover(items, limit)
	if len(chosen) == 0 {
		return
	}
	beyond := 1 - float64(len(chosen))
	for _, it := range chosen {
		beyond += it.at
	}
	lifted := liftCover(chosen, rest, limit)
	for i, it := range rest {
		beyond += float64(lifted[i]) * it.at
	}
	if !(beyond > coverFound) {
		return
	}
	right := float64(len(chosen) - 1)
	put := func(it coverItem, f float64) {
		if it.turned {
			right -= f
			f = -f
		}
		k.out[it.column] += f
	}
	for _, it := range chosen {
		put(it, 1)
	}
	for i, it := range rest {
		put(it, float64(lifted[i]))
	}
	k.keep(right)
}

// pickCover takes items that cost least to take whole until they exceed the knapsack, then drops those that are not needed.
func pickCover(items []coverItem, limit float64) (chosen, rest []coverItem) {
	order := append([]coverItem(nil), items...)
	sort.SliceStable(order, func(a, b int) bool {
		return (1-order[a].at)*order[b].weight < (1-order[b].at)*order[a].weight
	})
	need := limit * (1 + coverMargin)
	sum, n := 0.0, 0
	for n < len(order) && !(sum > need) {
		sum += order[n].weight
		n++
	}
	if !(sum > need) {
		return nil, nil
	}
	chosen, rest = order[:n:n], order[n:len(order):len(order)]
	sort.SliceStable(chosen, func(a, b int) bool { return chosen[a].at < chosen[b].at })
	kept := chosen[:0:0]
	for _, it := range chosen {
		if sum-it.weight > need {
			sum -= it.weight
			rest = append(rest, it)
			continue
		}
		kept = append(kept, it)
	}
	return kept, rest
}

// liftCover returns the largest whole coefficients of rest, one after the other in the order of their values, for which
// sum of chosen + coefficients times rest <= len(chosen) - 1 stays valid.
func liftCover(chosen, rest []coverItem, limit float64) []int {
	r := len(chosen) - 1
	weights := make([]float64, 0, len(chosen))
	for _, it := range chosen {
		weights = append(weights, it.weight)
	}
	sort.Float64s(weights)
	least := make([]float64, r+1) // least weight that reaches each sum of coefficients
	for h := 1; h <= r; h++ {
		least[h] = least[h-1] + weights[h-1]
	}
	order := make([]int, len(rest))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return rest[order[a]].at > rest[order[b]].at })
	lifted := make([]int, len(rest))
	for _, i := range order {
		w := rest[i].weight
		h := r
		for h > 0 && least[h] > limit*(1+coverMargin)-w {
			h--
		}
		f := r - h
		if f == 0 {
			continue
		}
		lifted[i] = f
		for h := r; h > 0; h-- {
			from := 0.0
			if h > f {
				from = least[h-f]
			}
			least[h] = min(least[h], from+w)
		}
	}
	return lifted
}
