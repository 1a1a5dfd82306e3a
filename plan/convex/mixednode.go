package convex

import (
	"context"
	"math"
)

// lpEnd says how the linear programme of a node ended.
type lpEnd int

const (
	lpOptimal lpEnd = iota + 1
	lpEmpty         // no values meet all bounds
	lpBeaten        // the cost is above the cutoff
	lpCut           // the pivots allowed are used up
	lpHalted        // context
	lpEndless       // the cost falls without end
	lpTrouble       // rounding prevented a trustworthy answer
)

// nodeRounds is how often a node goes from the dual to the primal method and back before the full method takes over.
const nodeRounds = 3

// beatenEvery is the number of pivots between two looks at the cutoff.
const beatenEvery = 8

// nodeLP is the linear programme of the tree: one engine whose bounds move from node to node.
type nodeLP struct {
	t     *undertaking
	e     *engine
	stale bool // the weights do not belong to the basis
	kept  []float64
}

func newNodeLP(p *Problem) *nodeLP {
	l := &nodeLP{t: newUndertaking(p)}
	l.e = l.t.e
	l.e.startFromRows()
	return l
}

// setBounds moves the bounds of column j.
func (l *nodeLP) setBounds(j int, lower, upper float64) { l.t.setColumn(j, lower, upper) }

// value returns the value of column j, reduced its price.
func (l *nodeLP) value(j int) float64   { return l.t.value(j) }
func (l *nodeLP) reduced(j int) float64 { return l.e.d[j] / (l.t.s.col[j] * l.t.s.costFactor) }

// objective returns the cost at the present values.
func (l *nodeLP) objective() float64 {
	return dot(l.t.s.cost, l.e.x[:l.e.n]) / l.t.s.costFactor
}

// first solves by the full method, with its last polish.
func (l *nodeLP) first(ctx context.Context) lpEnd {
	l.stale = true
	e := l.e
	switch l.t.solve(ctx, Options{}.iterationLimit(e.rows, e.n)) {
	case Optimal:
		return lpOptimal
	case Infeasible:
		return lpEmpty
	case Unbounded:
		return lpEndless
	case Interrupted:
		return lpHalted
	}
	return lpTrouble
}

// costMoved tells that working costs differ from the true ones.
func (l *nodeLP) costMoved() bool {
	e := l.e
	for j, c := range e.trueCost {
		if e.cost[j] != c {
			return true
		}
	}
	for _, c := range e.cost[e.n:] {
		if c != 0 {
			return true
		}
	}
	return false
}

// solve goes on from the present basis after bounds have moved, with the given number of pivots at most, until the cost is known or
// known to be above cutoff.
func (l *nodeLP) solve(ctx context.Context, pivots int, cutoff float64) lpEnd {
	e := l.e
	e.limit = e.iterations + pivots
	e.feasible, e.optimal = feasibilityTolerance, optimalityTolerance
	e.unwiden()
	for v := range e.place {
		if e.place[v] != Basic {
			e.settle(v)
		}
	}
	if l.costMoved() {
		e.unshift()
	}
	e.computeValues()
	e.makePricesRight()
	if l.stale {
		e.exactWeights()
		l.stale = false
	}
	for round := 0; round < nodeRounds; round++ {
		end := l.dual(ctx, cutoff)
		if end == lpTrouble {
			break
		}
		if end != lpOptimal {
			return end
		}
		if l.costMoved() {
			e.unshift()
		}
		if !e.pricesRight() {
			l.keepWeights()
			switch end, _, status := e.primal(ctx, false); end {
			case halted:
				l.stale = true
				return haltedBy(status)
			case lostAccuracy, noEnd:
				return l.afresh(ctx)
			}
			l.returnWeights()
			if e.widened {
				e.unwiden()
				e.refactor()
			}
		}
		e.computeValues()
		e.computePrices()
		if e.allWithin() && e.pricesRight() {
			return lpOptimal
		}
		e.refactor()
		e.makePricesRight()
	}
	return l.afresh(ctx)
}

// keepWeights puts the dual weights aside while the primal method uses their place; returnWeights brings them back. Variables that
// have become basic meanwhile get the weight one, which is valid: weights guide, they prove nothing.
func (l *nodeLP) keepWeights() { l.kept = append(l.kept[:0], l.e.weight...) }

func (l *nodeLP) returnWeights() { copy(l.e.weight, l.kept) }

// afresh lets the full method decide where the quick one failed.
func (l *nodeLP) afresh(ctx context.Context) lpEnd { return l.first(ctx) }

func haltedBy(s Status) lpEnd {
	if s == Interrupted {
		return lpHalted
	}
	return lpCut
}

// dual is the dual simplex method of the engine with weights kept from solve to solve and a look at the cutoff.
func (l *nodeLP) dual(ctx context.Context, cutoff float64) lpEnd {
	e := l.e
	stall, size, tabu, smallest := 0, perturbation, map[int]bool{}, false
	for count := 0; ; count++ {
		if s := e.stopped(ctx); s != 0 {
			return haltedBy(s)
		}
		if e.age >= refactorEvery {
			e.refactor()
			e.makePricesRight()
		}
		if count%beatenEvery == beatenEvery-1 && l.beaten(cutoff) {
			return lpBeaten
		}
		p, by := e.leaving(smallest, tabu)
		if p < 0 {
			if len(tabu) > 0 {
				return lpTrouble
			}
			return lpOptimal
		}
		pick := e.longStep
		if smallest {
			pick = e.firstStep
		}
		step, verdict := e.dualStep(p, by, pick)
		if verdict == noPoint {
			if e.proves(p, by) {
				return lpEmpty
			}
			step, verdict = e.dualStep(p, by, e.retreat)
		}
		switch verdict {
		case noPoint, lostAccuracy:
			tabu[p] = true
			continue
		case 0:
			continue
		}
		clear(tabu)
		if stall++; step > 0 {
			stall, smallest = 0, false
		}
		if stall > stallLength && !smallest {
			if size <= perturbationLargest {
				e.perturb(size)
				size *= 10
			} else {
				smallest = true
			}
			stall = 0
		}
	}
}

// beaten tells that the cost of the present basis, whose prices are right for the true costs, is above the cutoff; the optimum is
// then above it too.
func (l *nodeLP) beaten(cutoff float64) bool {
	if !(l.objective() > cutoff) || l.costMoved() {
		return false
	}
	l.e.computeValues()
	return l.objective() > cutoff && l.e.pricesRight()
}

// lpState is a basis with what is needed to go on from it.
type lpState struct {
	place  []Place
	weight []float32 // of all variables
}

// state copies the basis.
func (l *nodeLP) state() *lpState {
	s := &lpState{place: append([]Place(nil), l.e.place...), weight: make([]float32, len(l.e.weight))}
	for v, w := range l.e.weight {
		s.weight[v] = float32(w)
	}
	return s
}

// load goes to a basis copied before. Bounds must have been set.
func (l *nodeLP) load(s *lpState) {
	e := l.e
	e.unwiden()
	copy(e.cost, e.trueCost)
	clear(e.cost[e.n:])
	for v := range e.place {
		e.place[v] = Basic
		if v < len(s.place) {
			e.place[v] = s.place[v]
		}
	}
	e.adoptPlaces()
	e.refactor()
	for v := range e.weight {
		e.weight[v] = 1
		if v < len(s.weight) {
			e.weight[v] = math.Max(float64(s.weight[v]), weightFloor)
		}
	}
	l.stale = false
}

// lpSnapshot is a state with its factors, for short excursions.
type lpSnapshot struct {
	place              []Place
	x, d, weight, cost []float64
	jList, rList       []int
	q, r               []float64
	age                int
	fresh, stale       bool
	lower, upper       []float64
}

// save copies the state with its factors into s.
func (l *nodeLP) save(s *lpSnapshot) {
	e := l.e
	s.place = append(s.place[:0], e.place...)
	s.x, s.d = append(s.x[:0], e.x...), append(s.d[:0], e.d...)
	s.weight, s.cost = append(s.weight[:0], e.weight...), append(s.cost[:0], e.cost...)
	s.jList, s.rList = append(s.jList[:0], e.jList...), append(s.rList[:0], e.rList...)
	s.lower, s.upper = append(s.lower[:0], e.trueLow...), append(s.upper[:0], e.trueUp...)
	s.q, s.r = s.q[:0], s.r[:0]
	for i := 0; i < e.kern.k; i++ {
		s.q, s.r = append(s.q, e.kern.qRow(i)...), append(s.r, e.kern.rRow(i)...)
	}
	s.age, s.fresh, s.stale = e.age, e.fresh, l.stale
}

// restore goes back to a snapshot, bounds included.
func (l *nodeLP) restore(s *lpSnapshot) {
	e := l.e
	copy(e.place, s.place)
	copy(e.x, s.x)
	copy(e.d, s.d)
	copy(e.weight, s.weight)
	copy(e.cost, s.cost)
	copy(e.trueLow, s.lower)
	copy(e.trueUp, s.upper)
	e.unwiden()
	stored := make([][]float64, len(s.jList))
	for t, j := range s.jList {
		if at := e.posJ[j]; at >= 0 {
			stored[t], e.stored[at] = e.stored[at], nil
		}
	}
	for _, c := range e.stored {
		if c != nil {
			e.spare = append(e.spare, c)
		}
	}
	for j := range e.posJ {
		e.posJ[j] = -1
	}
	for i := range e.posR {
		e.posR[i] = -1
	}
	e.jList, e.rList = append(e.jList[:0], s.jList...), append(e.rList[:0], s.rList...)
	e.stored = stored
	for t, j := range e.jList {
		e.posJ[j] = t
		if stored[t] == nil {
			stored[t] = e.gather(j)
		}
	}
	for t, i := range e.rList {
		e.posR[i] = t
	}
	k := len(e.jList)
	e.kern.k = 0
	e.kern.reserve(k)
	e.kern.k = k
	for i := 0; i < k; i++ {
		copy(e.kern.qRow(i), s.q[i*k:i*k+k])
		copy(e.kern.rRow(i), s.r[i*k:i*k+k])
	}
	e.age, e.fresh, l.stale = s.age, s.fresh, s.stale
}
