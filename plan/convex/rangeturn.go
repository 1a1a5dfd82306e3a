package convex

import (
	"context"
	"math"
)

// turn makes the basis right for what lies just beyond the present theta by solving the programme of rates: least c'u with
// r = A u, u at least (at most) the rate of each lower (upper) bound that is reached.
func (w *walk) turn(ctx context.Context) Status {
	e, q := w.e, w.rates
	for v := range e.x {
		lo, up := math.Inf(-1), math.Inf(1)
		if b := e.lower[v]; e.place[v] == AtLower || (finite(b) && reachedBound(e.x[v]-b, b)) {
			lo = w.lowerRate[v]
		}
		if b := e.upper[v]; e.place[v] == AtUpper || (finite(b) && reachedBound(b-e.x[v], b)) {
			up = w.upperRate[v]
		}
		if lo > up {
			w.last = w.named(v, UpperSide)
			if w.upperRate[v] != 0 {
				w.last = w.named(v, LowerSide)
			}
			return Infeasible
		}
		q.trueLow[v], q.trueUp[v] = lo, up
	}
	q.unwiden()
	copy(q.place, e.place)
	q.adoptPlaces()
	for v, p := range q.place {
		if p != Basic {
			q.settle(v)
		}
	}
	copy(q.cost, q.trueCost)
	clear(q.cost[q.n:])
	q.draw = w.base.draw
	q.limit = q.iterations + Options{}.iterationLimit(q.rows, q.n)
	switch status, _ := q.optimise(ctx); status {
	case Optimal:
	case Infeasible, Interrupted:
		return status
	default:
		return NumericalTrouble
	}
	for v, p := range q.place {
		if p == AtZero && (finite(e.lower[v]) || finite(e.upper[v])) {
			return NumericalTrouble
		}
	}
	copy(w.placed, q.place)
	if !w.adopt(w.placed) {
		return NumericalTrouble
	}
	for v, p := range e.place {
		if p != Basic {
			continue
		}
		by, bound := outside(e.x[v], e.lower[v], e.upper[v])
		if !(by <= walkViolation*math.Max(1, math.Abs(bound))) {
			return NumericalTrouble
		}
	}
	return Optimal
}

// face makes the basis right for what lies just beyond theta and returns the slope there.
func (w *walk) face(ctx context.Context) (slope float64, status Status) {
	slope = w.computeRates(w.e)
	copy(w.before, w.rate)
	if !(w.outward(w.e) > 0) && !w.opening() {
		return slope, Optimal
	}
	if status = w.turn(ctx); status != Optimal {
		return 0, status
	}
	slope = w.computeRates(w.e)
	if !(w.outward(w.e) <= turnTolerance*w.top) {
		return 0, NumericalTrouble
	}
	return slope, Optimal
}

// opening tells that a moving bound parts from the other one of its variable, or crosses it, at the present theta, so that its place
// must be chosen anew.
func (w *walk) opening() bool {
	for _, v := range w.moved {
		e := w.e
		if w.lowerRate[v] != w.upperRate[v] && reachedBound(e.upper[v]-e.lower[v], e.lower[v]) {
			return true
		}
	}
	return false
}

// culprit returns the bound that adds most to the change of slope of the last turn, which is the sum over all bounds of their new
// price times the rate at which the old basis would have left them.
func (w *walk) culprit() SideOf {
	best, most := w.last, 0.0
	for v, d := range w.e.d {
		if w.e.place[v] == Basic || d == 0 {
			continue
		}
		if part := d * (w.rate[v] - w.before[v]); part > most {
			side := LowerSide
			if w.e.place[v] == AtUpper {
				side = UpperSide
			}
			best, most = w.named(v, side), part
		}
	}
	return best
}
