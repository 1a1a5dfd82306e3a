package convex

import (
	"context"
	"fmt"
	"math"
)

// Alone finds for each listed row of the list the least weighted relaxation of it that makes the problem feasible when no other gives
// way, and its amount: zero where the problem is feasible, +Inf when none does, NaN from where the search was stopped. The status is
// Optimal or what stopped it.
//
// A proof that nothing is feasible stays one when a row gives way that it does not use, so that every proof settles the rows outside it
// at once. Of the others, an optimum with one row giving way settles those that meet all bounds when they take its place along an edge
// of the optimum: what is left of the one falls along a line of which the prices say that nothing is below it. Only the rest is solved for.
func (r *Relaxer) Alone(ctx context.Context, which []int) (weighted, amount []float64, status Status) {
	a := &aloneSearch{r: r, which: which, helper: make([]int, len(r.relaxable)), done: make([]bool, len(which))}
	a.weighted, a.amount = make([]float64, len(which)), make([]float64, len(which))
	for k, i := range which {
		if i < 0 || i >= len(r.relaxable) {
			panic(fmt.Sprintf("convex: Relaxer.Alone: no row %d in a list of %d", i, len(r.relaxable)))
		}
		a.weighted[k], a.amount[k] = math.NaN(), math.NaN()
	}
	status = a.run(ctx)
	return a.weighted, a.amount, status
}

// aloneSearch is the state of Alone. It works on the bare form: of a bound that gives way the value of the column is made small, or large,
// which ends beyond the bound because nothing is feasible within.
type aloneSearch struct {
	r                *Relaxer
	e                *elastic
	t                *undertaking
	which            []int
	weighted, amount []float64
	done             []bool // by place in which
	helper           []int  // by row of the list: the helper that may do, noHelper where a proof rules it out
}

const (
	// noHelper stands for none.
	noHelper = -1
	// nobody stands for no row.
	nobody = -1
	// exchangeLeast is the scaled relaxation below which its rounding would count.
	exchangeLeast = 1e-3
)

func (a *aloneSearch) run(ctx context.Context) Status {
	a.e = newElastic(a.r.original, a.r.relaxable, true)
	a.t = newUndertaking(a.e.p)
	a.t.e.startFromRows()
	defer func() { a.r.pivots += a.t.e.iterations }()
	switch status := a.solve(ctx, noHelper); status {
	case Infeasible:
		a.firstProof()
	case Optimal: // feasible, or by so little that it does not count alone
		return a.eachInFull(ctx)
	default:
		return status
	}
	for k, row := range a.which {
		if a.helper[row] == noHelper && !a.done[k] {
			a.settle(k, math.Inf(1), math.Inf(1))
		}
		if a.done[k] {
			continue
		}
		h := &a.e.helpers[a.helper[row]]
		switch status := a.solve(ctx, a.helper[row]); status {
		case Infeasible:
			a.settle(k, math.Inf(1), math.Inf(1))
			a.useProof()
		case Optimal:
			by := math.Max(0, a.excess(h)) * a.t.s.col[h.column] * h.size
			a.settle(k, by*h.weight, by)
			a.exchange(a.helper[row])
		case Interrupted:
			return status
		default:
			if status := a.inFull(ctx, k); status != Optimal {
				return status
			}
		}
	}
	return Optimal
}

func (a *aloneSearch) settle(k int, weighted, amount float64) {
	a.weighted[k], a.amount[k], a.done[k] = weighted, amount, true
}

// eachInFull solves for every row with the copies of columns.
func (a *aloneSearch) eachInFull(ctx context.Context) Status {
	for k := range a.which {
		if status := a.inFull(ctx, k); status != Optimal {
			return status
		}
	}
	return Optimal
}

// inFull solves for one row with the copies of columns.
func (a *aloneSearch) inFull(ctx context.Context, k int) Status {
	switch status := a.r.solveOne(ctx, a.which[k]); status {
	case Infeasible:
		a.settle(k, math.Inf(1), math.Inf(1))
	case Optimal:
		weighted, amount := 0.0, 0.0
		for _, h := range a.r.e.helpers {
			if h.owner == a.which[k] {
				by := math.Max(0, a.r.t.value(h.column)) * h.size
				weighted, amount = weighted+by*h.weight, amount+by
			}
		}
		a.settle(k, weighted, amount)
	default:
		return status
	}
	return Optimal
}

// tight returns the bound that a helper lets give way.
func (a *aloneSearch) tight(h *elasticHelper) float64 {
	switch c := a.e.p.anyColumn(h.column); {
	case h.of < 0:
		return 0
	case h.upperOf:
		return c.Upper
	default:
		return c.Lower
	}
}

// way is the direction in which the column of a helper passes its bound.
func (h *elasticHelper) way() float64 {
	if h.of >= 0 && !h.upperOf {
		return -1
	}
	return 1
}

// excess returns by how much the bound is passed, in the scale of the undertaking.
func (a *aloneSearch) excess(h *elasticHelper) float64 {
	return h.way() * (a.t.e.x[h.column] - a.tight(h)/a.t.s.col[h.column])
}

// solve lets one helper give way and makes that small.
func (a *aloneSearch) solve(ctx context.Context, helper int) Status {
	for k := range a.e.helpers {
		h := &a.e.helpers[k]
		c := a.e.p.anyColumn(h.column)
		if h.of < 0 {
			c.Upper = 0
		}
		a.t.setColumn(h.column, c.Lower, c.Upper)
		a.t.s.cost[h.column] = 0
	}
	if helper != noHelper {
		h := &a.e.helpers[helper]
		c := a.e.p.anyColumn(h.column)
		switch {
		case h.of < 0:
			c.Upper = h.most
		case h.upperOf:
			c.Upper += h.most
		default:
			c.Lower -= h.most
		}
		a.t.setColumn(h.column, c.Lower, c.Upper)
		a.t.s.cost[h.column] = h.way()
	}
	limit := Options{}.iterationLimit(a.e.p.Rows(), a.e.p.allColumns())
	return a.t.zoom(ctx, limit, a.t.solve(ctx, limit))
}

// firstProof finds for each row the side that takes from the proof, if any; the other side would not.
func (a *aloneSearch) firstProof() {
	for row := range a.helper {
		a.helper[row] = noHelper
	}
	a.combineProof()
	for k := range a.e.helpers {
		if h := &a.e.helpers[k]; a.takes(h) {
			a.helper[h.owner] = k
		}
	}
}

// useProof leaves out the rows that the last proof does not use.
func (a *aloneSearch) useProof() {
	a.combineProof()
	for row, k := range a.helper {
		if k != noHelper && !a.takes(&a.e.helpers[k]) {
			a.helper[row] = noHelper
		}
	}
}

func (a *aloneSearch) combineProof() {
	e := a.t.e
	e.m.combineRows(e.byCol, e.everyRow(e.proof), e.dr, e.byRow)
}

// takes tells that the combined proof uses the bound of a helper: its multiplier is minus what was combined.
func (a *aloneSearch) takes(h *elasticHelper) bool { return h.way()*a.t.e.byCol[h.column] < 0 }

// exchange lets each open row take the place of the one that gives way in the present optimum.
func (a *aloneSearch) exchange(helper int) {
	e, of := a.t.e, &a.e.helpers[helper]
	p, excess := of.column, a.excess(of)
	if e.place[p] != Basic || !(excess > exchangeLeast) {
		return
	}
	e.pivotRow(p)
	rate := append([]float64(nil), e.alpha[:e.n]...)
	for k, row := range a.which {
		if a.done[k] || a.helper[row] == noHelper {
			continue
		}
		h := &a.e.helpers[a.helper[row]]
		fall := -of.way() * h.way() * rate[h.column]
		if e.place[h.column] == Basic || e.x[h.column] != a.tight(h)/a.t.s.col[h.column] || !(fall > steadyPivot) {
			continue
		}
		if t := excess / fall; t*a.t.s.col[h.column] <= h.most && a.reaches(p, h.column, h.way()*t, rate[h.column]) {
			by := t * a.t.s.col[h.column] * h.size
			a.settle(k, by*h.weight, by)
		}
	}
}

// reaches moves column q by t, with which p, which changes by rate for each unit of it, comes to its bound, and tells whether all else
// stays within its bounds.
func (a *aloneSearch) reaches(p, q int, t, rate float64) bool {
	e := a.t.e
	e.pivotColumn(q)
	ok := math.Abs(e.stepOf(p)-rate) <= sharpTolerance*math.Abs(rate)
	e.eachBasic(func(v int, step float64) {
		if v == p {
			return
		}
		by, bound := outside(e.x[v]+t*step, e.lower[v], e.upper[v])
		ok = ok && by <= sharpTolerance*math.Max(1, math.Abs(bound))
	})
	return ok
}
