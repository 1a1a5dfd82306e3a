package convex

import (
	"math"
	"sort"
)

// Numbers of the cuts at the root.
const (
	cutRoundsMost   = 20   // rounds
	cutRoundsStall  = 4    // rounds without progress after which they end
	cutProgress     = 2e-3 // share of the rise so far that counts as progress
	cutEfficacy     = 1e-4 // least distance between the relaxation and a cut, in the scaled problem
	cutParallel     = 0.9  // largest cosine between two cuts of a round
	cutSpread       = 1e7  // largest ratio of two coefficients of a cut: more would not be met by rounded values
	cutNegligible   = 1e-9 // coefficient, relative to the largest, that is replaced by its bound
	cutPerRoundMost = 80

	// rootWeightWork caps the work on exact weights after each round [multiplications]; beyond it those of the round before guide.
	rootWeightWork = 20_000_000

	// cutRelief moves the right side of each cut outward, relative to its terms: a thousand times the rounding of its making, so
	// that no plan is lost.
	cutRelief = 1e-9
)

// cutter finds cuts for one optimum of the relaxation.
type cutter struct {
	c        *core
	lp       *nodeLP
	rows     []*coreRow // rows of the linear programme
	x        []float64
	activity []float64
	above    [][]variableBound // by column: x <= constant + slope y
	below    [][]variableBound // by column: x >= constant + slope y
	a, out   []float64         // dense work, zero between uses
	found    []foundCut

	terms     []roundTerm // work
	wholeList []int
}

// variableBound bounds a continuous column by a whole one.
type variableBound struct {
	column          int
	slope, constant float64
}

// foundCut is a cut entries'x <= upper with its distance from the relaxation.
type foundCut struct {
	row      coreRow
	efficacy float64
	norm     float64 // in the scaled problem
}

// cutRounds adds cuts to the linear programme of the root while they raise its cost. It returns false when nothing is left to search.
func (s *search) cutRounds() bool {
	start, last, stall := s.lp.objective(), s.lp.objective(), 0
	room := len(s.c.rows) + 60
	for round := 0; round < cutRoundsMost && stall < cutRoundsStall && s.ctx.Err() == nil; round++ {
		x := s.values()
		if len(s.fractional(x)) == 0 {
			break
		}
		chosen := s.findCuts(x, min(cutPerRoundMost, room-len(s.cuts)))
		if len(chosen) == 0 {
			break
		}
		kept, state := s.touched()
		s.extend(append(kept, chosen...), state)
		switch s.lp.solve(s.ctx, nodePivots, s.cutoff()) {
		case lpOptimal:
		case lpBeaten:
			s.exclude(s.raise(s.lp.objective()))
			return false
		case lpEmpty:
			return false
		default:
			s.withoutCuts()
			return true
		}
		cost := s.lp.objective()
		s.rootBound = math.Max(s.rootBound, s.raise(cost))
		if s.rootBound > s.cutoff() {
			s.exclude(s.rootBound)
			return false
		}
		stall++
		if cost-last > cutProgress*math.Max(cost-start, scoreFloor) {
			stall = 0
		}
		last = cost
		s.noteRoot()
		s.tightenRoot()
		s.local.copyFrom(s.global.lo, s.global.hi)
		s.quickRounding(s.values())
	}
	s.local.copyFrom(s.global.lo, s.global.hi)
	s.sync()
	s.dropSlack()
	switch s.lp.solve(s.ctx, nodePivots, s.cutoff()) {
	case lpOptimal:
		s.rootBound = math.Max(s.rootBound, s.raise(s.lp.objective()))
		s.noteRoot()
	case lpBeaten:
		s.exclude(s.raise(s.lp.objective()))
		return false
	case lpEmpty:
		return false
	case lpHalted:
	default:
		s.withoutCuts()
	}
	return true
}

// withoutCuts goes back to the linear programme as it was.
func (s *search) withoutCuts() {
	s.cuts = nil
	s.extend(nil, nil)
	s.lp.first(s.ctx)
	s.noteRoot()
}

// extend makes the linear programme anew with the given cuts and starts it from a basis of the former one; cuts that the basis
// does not know are basic.
func (s *search) extend(cuts []coreRow, from *lpState) {
	s.earlier += s.lp.e.iterations
	s.cuts = cuts
	s.lp = newNodeLP(s.c.problem(cuts))
	s.inLP.copyFrom(s.c.lpLower, s.c.lpUpper)
	s.sync()
	if from != nil {
		s.lp.load(from)
		k := s.lp.e.kern.k
		s.lp.stale = k*k*s.lp.e.rows <= rootWeightWork
	}
}

// touched returns the cuts that the present optimum touches and its basis without the others.
func (s *search) touched() ([]coreRow, *lpState) {
	first := s.lp.e.n + len(s.c.rows)
	state := s.lp.state()
	var kept []coreRow
	place, weight := state.place[:first:first], state.weight[:first:first]
	for k := range s.cuts {
		if v := first + k; state.place[v] != Basic {
			kept = append(kept, s.cuts[k])
			place, weight = append(place, state.place[v]), append(weight, state.weight[v])
		}
	}
	return kept, &lpState{place: place, weight: weight}
}

// dropSlack leaves out the cuts that the present optimum does not touch.
func (s *search) dropSlack() {
	if kept, state := s.touched(); len(kept) < len(s.cuts) {
		s.extend(kept, state)
	}
}

// newCutter prepares the search for cuts at x.
func newCutter(c *core, lp *nodeLP, cuts []coreRow, x []float64) *cutter {
	n := len(c.cost)
	k := &cutter{c: c, lp: lp, x: x, a: make([]float64, n), out: make([]float64, n)}
	for i := range c.rows {
		k.rows = append(k.rows, &c.rows[i])
	}
	for i := range cuts {
		k.rows = append(k.rows, &cuts[i])
	}
	for _, r := range k.rows {
		sum := 0.0
		for _, e := range r.entries {
			sum += e.value * x[e.at]
		}
		k.activity = append(k.activity, sum)
	}
	k.findVariableBounds()
	return k
}

// findVariableBounds lists rows of the form a x + d y with x continuous and y whole.
func (k *cutter) findVariableBounds() {
	n := len(k.c.cost)
	k.above, k.below = make([][]variableBound, n), make([][]variableBound, n)
	for i := range k.c.rows {
		r := &k.c.rows[i]
		if len(r.entries) != 2 {
			continue
		}
		x, y := r.entries[0], r.entries[1]
		if k.c.whole[x.at] {
			x, y = y, x
		}
		if k.c.whole[x.at] || !k.c.whole[y.at] {
			continue
		}
		note := func(limit float64, above bool) {
			if finite(limit) {
				b := variableBound{column: y.at, slope: -y.value / x.value, constant: limit / x.value}
				if above == (x.value > 0) {
					k.above[x.at] = append(k.above[x.at], b)
				} else {
					k.below[x.at] = append(k.below[x.at], b)
				}
			}
		}
		note(r.upper, true)
		note(r.lower, false)
	}
}

// findCuts returns up to most cuts of the present optimum x.
func (s *search) findCuts(x []float64, most int) []coreRow {
	k := newCutter(s.c, s.lp, s.cuts, x)
	k.covers()
	k.roundRows()
	k.gomory(s.fractional(x))
	return k.selected(most)
}

// selected picks cuts far from the relaxation that are not nearly parallel.
func (k *cutter) selected(most int) []coreRow {
	sort.SliceStable(k.found, func(a, b int) bool { return k.found[a].efficacy > k.found[b].efficacy })
	var chosen []coreRow
	var picked []foundCut
	for _, f := range k.found {
		if len(chosen) >= most {
			break
		}
		alike := false
		for _, g := range picked {
			if k.cosine(f, g) > cutParallel {
				alike = true
				break
			}
		}
		if !alike {
			picked = append(picked, f)
			chosen = append(chosen, f.row)
		}
	}
	for i := range chosen {
		r := &chosen[i]
		r.whole = true
		for _, e := range r.entries {
			r.whole = r.whole && k.c.whole[e.at] && e.value == math.Trunc(e.value)
		}
	}
	return chosen
}

// cosine is that of the angle between two cuts in the scaled problem.
func (k *cutter) cosine(f, g foundCut) float64 {
	sum := 0.0
	a, b := f.row.entries, g.row.entries
	for i, j := 0, 0; i < len(a) && j < len(b); {
		switch {
		case a[i].at < b[j].at:
			i++
		case a[i].at > b[j].at:
			j++
		default:
			f := k.lp.t.s.col[a[i].at]
			sum += a[i].value * f * b[j].value * f
			i++
			j++
		}
	}
	return sum / (f.norm * g.norm)
}

// keep cleans the cut out'x <= limit, held in k.out, and keeps it when the relaxation is far enough beyond. k.out is zero afterwards.
func (k *cutter) keep(limit float64) bool {
	top := 0.0
	for j, v := range k.out {
		top = math.Max(top, math.Abs(v)*k.lp.t.s.col[j])
	}
	r := coreRow{lower: math.Inf(-1)}
	norm, value, terms, usable := 0.0, 0.0, math.Abs(limit), true
	for j, v := range k.out {
		if v == 0 {
			continue
		}
		k.out[j] = 0
		f := math.Abs(v) * k.lp.t.s.col[j]
		if f <= cutNegligible*top || f*cutSpread < top {
			bound := k.c.lower[j]
			if v < 0 {
				bound = k.c.upper[j]
			}
			if !finite(bound) {
				usable = false
			}
			limit -= v * bound
			continue
		}
		norm += f * f
		value += v * k.x[j]
		terms = math.Max(terms, math.Abs(v*k.x[j]))
		r.entries = append(r.entries, mixedEntry{j, v})
	}
	norm = math.Sqrt(norm)
	if !usable || !(norm > 0) || !finite(limit) {
		return false
	}
	r.upper = limit + cutRelief*math.Max(terms, top)
	efficacy := (value - r.upper) / norm
	if !(efficacy > cutEfficacy) {
		return false
	}
	k.found = append(k.found, foundCut{row: r, efficacy: efficacy, norm: norm})
	return true
}
