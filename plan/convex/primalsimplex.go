package convex

import (
	"context"
	"math"
)

// primal runs the bounded primal simplex method on the true costs, from a basis whose values violate no bound, until no price is
// wrong. On noEnd the second result is the variable along which the cost falls for ever, and the pivot column holds the direction.
// Pricing is Devex with the pivot row that the prices need anyway (Forrest & Goldfarb 1992); the ratio test has two passes (Harris
// 1973). careful turns to smallest indices from the start.
func (e *engine) primal(ctx context.Context, careful bool) (outcome, int, Status) {
	for v := range e.weight {
		e.weight[v] = 1
	}
	stall, size, smallest := 0, boundPerturbation, careful
	tabu := map[int]bool{}
	for {
		if s := e.stopped(ctx); s != 0 {
			return halted, 0, s
		}
		if e.age >= refactorEvery {
			e.refactor()
		}
		q := e.entering(smallest, tabu)
		if q < 0 {
			if len(tabu) > 0 {
				return lostAccuracy, 0, 0
			}
			return reached, 0, 0
		}
		step, verdict := e.primalStep(q, smallest)
		switch verdict {
		case noEnd:
			return noEnd, q, 0
		case lostAccuracy:
			tabu[q] = true
			continue
		case 0:
			continue
		}
		clear(tabu)
		e.report("primal")
		if stall++; step > 0 {
			stall = 0
			smallest = careful
		}
		if stall > stallLength && !smallest {
			if size <= perturbationLargest {
				e.widen(size)
				size *= 10
			} else if stall > 10*stallLength {
				smallest = true
			}
		}
	}
}

// widen moves the bounds of every basic variable apart, each by another amount, so that ties end.
func (e *engine) widen(size float64) {
	for v := range e.place {
		if e.place[v] != Basic {
			continue
		}
		e.lower[v] -= size * (1 + math.Abs(e.lower[v])) * (1 + e.random())
		e.upper[v] += size * (1 + math.Abs(e.upper[v])) * (1 + e.random())
	}
	e.widened = true
}

// unwiden goes back to the true bounds.
func (e *engine) unwiden() {
	copy(e.lower, e.trueLow)
	copy(e.upper, e.trueUp)
	e.widened = false
}

// entering picks the variable with the largest squared wrong price per weight, or the wrong one with the smallest index.
func (e *engine) entering(smallest bool, tabu map[int]bool) int {
	q, best := -1, 0.0
	for v := range e.place {
		if e.place[v] == Basic {
			continue
		}
		d := e.wrong(v)
		if !(d > e.optimal) || (len(tabu) > 0 && tabu[v]) {
			continue
		}
		if smallest {
			return v
		}
		if merit := d * d / e.weight[v]; merit > best {
			q, best = v, merit
		}
	}
	return q
}

// primalStep makes one pivot, or one change of bound, with q entering. It returns the length of the step and reached, or noEnd,
// lostAccuracy, or zero after a new factorisation.
func (e *engine) primalStep(q int, smallest bool) (float64, outcome) {
	e.pivotColumn(q)
	direction := 1.0
	if e.d[q] > 0 {
		direction = -1
	}
	p, step := e.blocking(q, direction, smallest)
	own := e.upper[q] - e.lower[q]
	if p < 0 && !finite(own) {
		if !e.fresh {
			e.refactor()
			return 0, 0
		}
		return 0, noEnd
	}
	if p < 0 || own <= step {
		e.move(direction * own)
		e.flip(q)
		e.iterations++
		e.primalIterations++
		return own, reached
	}
	pivot := e.stepOf(p)
	column := append(e.zeta[:0], e.dxJ[:e.kern.k]...)
	e.pivotRow(p)
	copy(e.dxJ, column)
	if !(math.Abs(pivot-e.alpha[q]) <= pivotAgreement*(1+math.Abs(pivot))) {
		if !e.fresh {
			e.refactor()
			return 0, 0
		}
		return 0, lostAccuracy
	}
	e.priceAfter(p, q)
	theta := direction * step
	e.place[p] = AtLower
	if theta*pivot > 0 || (theta == 0 && direction*pivot > 0) {
		e.place[p] = AtUpper
	}
	e.move(theta)
	e.x[q] += theta
	e.x[p] = e.rest(p)
	e.exchange(p, q)
	e.iterations++
	e.primalIterations++
	return step, reached
}

// blocking finds the basic variable that stops q, moved in the given direction, and the step; -1 when none does. The first pass
// relaxes each bound by the tolerance, the second takes the largest entry within the relaxed step.
func (e *engine) blocking(q int, direction float64, smallest bool) (p int, step float64) {
	reach := math.Inf(1)
	relax := e.feasible
	if smallest {
		relax = 0
	}
	e.eachBasic(func(v int, a float64) {
		a *= direction
		if room, tol, ok := e.room(v, a); ok {
			reach = math.Min(reach, (math.Max(room, 0)+relax*tol)/math.Abs(a))
		}
	})
	p, size := -1, 0.0
	e.eachBasic(func(v int, a float64) {
		a *= direction
		room, _, ok := e.room(v, a)
		if !ok {
			return
		}
		ratio := math.Max(room, 0) / math.Abs(a)
		if ratio > reach {
			return
		}
		better := math.Abs(a) > size
		if smallest {
			better = p < 0 || v < p
		}
		if better {
			p, size, step = v, math.Abs(a), ratio
		}
	})
	return p, step
}

// room returns the distance of basic variable v to the bound it moves towards and the scale of the tolerance there.
func (e *engine) room(v int, a float64) (room, scale float64, ok bool) {
	switch {
	case a > pivotTolerance && finite(e.upper[v]):
		return e.upper[v] - e.x[v], math.Max(1, math.Abs(e.upper[v])), true
	case a < -pivotTolerance && finite(e.lower[v]):
		return e.x[v] - e.lower[v], math.Max(1, math.Abs(e.lower[v])), true
	}
	return 0, 0, false
}

// eachBasic calls f with each basic variable and its entry in the pivot column.
func (e *engine) eachBasic(f func(v int, a float64)) {
	for t, j := range e.jList {
		f(j, e.dxJ[t])
	}
	for i := range e.posR {
		if e.posR[i] < 0 {
			f(e.n+i, e.dr[i])
		}
	}
}

// priceAfter takes the prices and the Devex weights over the exchange of p for q.
func (e *engine) priceAfter(p, q int) {
	t := e.d[q] / e.alpha[q]
	own := e.weight[q]
	for v, a := range e.alpha {
		if a == 0 || e.place[v] == Basic {
			continue
		}
		e.d[v] -= t * a
		if ratio := a / e.alpha[q]; ratio*ratio*own > e.weight[v] {
			e.weight[v] = ratio * ratio * own
		}
	}
	e.d[q] = 0
	e.d[p] = t
	e.weight[p] = math.Max(own/(e.alpha[q]*e.alpha[q]), 1)
}
