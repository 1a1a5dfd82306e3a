package convex

import (
	"context"
	"math"
)

// outcome says how a run of the dual or the primal method ended.
type outcome int

const (
	reached      outcome = iota + 1 // no violation is left (dual), no wrong price is left (primal)
	noPoint                         // a row of the basis proves that no values meet all bounds
	noEnd                           // the cost falls without end along the pivot column
	halted                          // context or iteration limit
	lostAccuracy                    // rounding leaves no trustworthy pivot
)

// makePricesRight moves boxed variables with a wrong price to their other bound and shifts the cost of the others, so that the
// dual method may start.
func (e *engine) makePricesRight() {
	moved := false
	for v := range e.place {
		if e.place[v] == Basic || !(e.wrong(v) > e.optimal) {
			continue
		}
		if e.boxed(v) {
			e.flip(v)
			moved = true
			continue
		}
		e.shift(v)
	}
	if moved {
		e.computeValues()
	}
}

// flip moves a boxed variable to its other bound.
func (e *engine) flip(v int) {
	if e.place[v] == AtLower {
		e.place[v] = AtUpper
	} else {
		e.place[v] = AtLower
	}
	e.x[v] = e.rest(v)
}

// shift changes the working cost of a variable that is not basic so that its price is zero.
func (e *engine) shift(v int) {
	e.cost[v] -= e.d[v]
	e.d[v] = 0
}

// perturb moves every price of a variable that can move away from zero, each by another amount, so that ties end.
func (e *engine) perturb(size float64) {
	for v := range e.place {
		if e.place[v] == Basic || e.fixed(v) || e.place[v] == AtZero {
			continue
		}
		by := size * (1 + math.Abs(e.cost[v])) * (1 + e.random())
		if e.place[v] == AtUpper {
			by = -by
		}
		e.cost[v] += by
		e.d[v] += by
	}
}

// unshift goes back to the true costs.
func (e *engine) unshift() {
	clear(e.cost)
	copy(e.cost, e.trueCost)
	e.computePrices()
}

// dual runs the dual simplex method from a basis whose prices are right until no basic value violates a bound. On noPoint the
// second result is the basic variable whose row is the proof. careful turns to smallest indices from the start.
func (e *engine) dual(ctx context.Context, careful bool) (outcome, int, Status) {
	e.exactWeights()
	e.watch(careful)
	defer e.unwatch()
	stall, size, tabu := 0, perturbation, map[int]bool{}
	smallest := careful
	for {
		if s := e.stopped(ctx); s != 0 {
			return halted, 0, s
		}
		if e.age >= refactorEvery {
			e.refactor()
			e.makePricesRight()
		}
		p, by := e.leaving(smallest, tabu)
		if p < 0 {
			if e.lookAtAll() {
				continue
			}
			if len(tabu) > 0 {
				return lostAccuracy, 0, 0
			}
			return reached, 0, 0
		}
		pick := e.longStep
		if smallest {
			pick = e.firstStep
		}
		step, verdict := e.dualStep(p, by, pick)
		if verdict == noPoint {
			if e.proves(p, by) {
				return noPoint, p, 0
			}
			step, verdict = e.dualStep(p, by, e.retreat)
		}
		switch verdict {
		case noPoint, lostAccuracy:
			tabu[p] = true
			continue
		case 0:
			continue // factored afresh: look again
		}
		clear(tabu)
		e.report("dual")
		if stall++; step > 0 {
			stall = 0
			smallest = careful
		}
		if stall > stallLength && !smallest {
			if size <= perturbationLargest {
				e.perturb(size)
				size *= 10
			} else {
				smallest = true
				e.unwatch()
			}
			stall = 0
		}
	}
}

// leaving picks the basic variable with the largest squared violation per weight, or the violated one with the smallest index.
func (e *engine) leaving(smallest bool, tabu map[int]bool) (p int, by float64) {
	p, best := -1, 0.0
	try := func(v int) {
		d := e.violation(v)
		if d == 0 || (len(tabu) > 0 && tabu[v]) {
			return
		}
		if smallest {
			if p < 0 || v < p {
				p, by = v, d
			}
			return
		}
		if merit := d * d / e.weight[v]; merit > best || (merit == best && v < p) {
			p, by, best = v, d, merit
		}
	}
	for _, j := range e.jList {
		try(j)
	}
	for i := range e.posR {
		if e.posR[i] < 0 && e.follows(i) {
			try(e.n + i)
		}
	}
	return p, by
}

// dualStep makes one pivot with p leaving, whose violation is by. It returns the length of the step in prices and reached, or
// noPoint, lostAccuracy, or zero after a new factorisation.
func (e *engine) dualStep(p int, by float64, pick func(gap float64) (breakpoint, bool)) (float64, outcome) {
	e.pivotRow(p)
	direction := 1.0 // the value must rise
	if by > 0 {
		direction = -1
	}
	e.gatherBreakpoints(direction)
	b, ok := pick(math.Abs(by) - e.slackOf(p, by))
	if !ok {
		if !e.fresh {
			e.refactor()
			e.makePricesRight()
			return 0, 0
		}
		return 0, noPoint
	}
	q := b.v
	pivot := e.alpha[q]
	e.pivotColumn(q)
	if !(math.Abs(pivot-e.stepOf(p)) <= pivotAgreement*(1+math.Abs(pivot))) || !(math.Abs(e.stepOf(p)) > pivotTolerance/10) {
		if !e.fresh {
			e.refactor()
			e.makePricesRight()
			return 0, 0
		}
		return 0, lostAccuracy
	}
	e.updateWeights(p, q)
	t := e.updatePrices(p, q, direction)
	e.passBounds()
	target := e.lower[p]
	e.place[p] = AtLower
	if direction < 0 {
		target, e.place[p] = e.upper[p], AtUpper
	}
	far := math.Abs(e.x[p]) > farAway*math.Max(1, math.Abs(target))
	theta := (target - e.x[p]) / e.stepOf(p)
	e.move(theta)
	e.x[q] += theta
	e.x[p] = target
	e.exchange(p, q)
	if far {
		e.computeValues()
	}
	e.iterations++
	return t, reached
}

// slackOf returns the tolerance of the bound that p violates.
func (e *engine) slackOf(p int, by float64) float64 {
	bound := e.lower[p]
	if by > 0 {
		bound = e.upper[p]
	}
	return e.feasible * math.Max(1, math.Abs(bound))
}

// updatePrices takes the step in prices that makes the price of q zero and lists the boxed variables that it sends to their other
// bound. Prices that rounding leaves wrong beyond the tolerance are shifted to zero.
func (e *engine) updatePrices(p, q int, direction float64) float64 {
	if e.d[q] != 0 && (e.d[q]/e.alpha[q] > 0) != (direction > 0) {
		e.shift(q)
	}
	t := e.d[q] / e.alpha[q]
	e.flips = e.flips[:0]
	for v, a := range e.alpha {
		if e.place[v] == Basic || v == q {
			continue
		}
		if a != 0 {
			e.d[v] -= t * a
		}
		if !(e.wrong(v) > e.optimal) {
			continue
		}
		if e.boxed(v) {
			e.flips = append(e.flips, v)
		} else {
			e.shift(v)
		}
	}
	e.d[q] = 0
	e.d[p] = t
	return math.Abs(t)
}

// passBounds moves the listed boxed variables to their other bound and carries the basic values along.
func (e *engine) passBounds() {
	if len(e.flips) == 0 {
		return
	}
	k := e.kern.k
	by := e.tau
	clear(by)
	z := e.zeta[:k]
	clear(z)
	delta := make([]float64, len(e.flips))
	for f, v := range e.flips {
		from := e.x[v]
		e.flip(v)
		delta[f] = e.x[v] - from
		if v >= e.n {
			z[e.posR[v-e.n]] += delta[f]
		}
	}
	e.addColumns(by, e.flips, delta)
	for t, i := range e.rList {
		z[t] -= by[i]
	}
	e.kern.solve(z, z)
	e.spread(by, z)
	for t, j := range e.jList {
		e.x[j] += z[t]
	}
	for i := range e.posR {
		if e.posR[i] < 0 {
			e.x[e.n+i] += by[i]
		}
	}
}
