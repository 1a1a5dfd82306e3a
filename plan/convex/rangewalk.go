package convex

import (
	"context"
	"math"
)

// Tolerances of the walk along moving bounds, in the scaled problem with the fastest bound moving by one per unit.
const (
	// rateTolerance is the rate towards a bound that counts as none, per max(1, largest rate): rates come from one solve with the
	// kernel and carry some 1e-13 of the largest.
	rateTolerance = 1e-11
	// turnTolerance is the rate by which a bound that is reached may be left behind after the programme of rates was solved, per
	// max(1, largest rate): ten times what that solve itself leaves.
	turnTolerance = 1e-8
	// slopeFloor and slopeTolerance tell two slopes apart: above the wrong price that the solver leaves, and above the relative
	// rounding of prices of a kernel with condition 1e6.
	slopeFloor     = sharpTolerance
	slopeTolerance = 1e-9
	// slopeNoise is the slope that is rounding of zero: costs, entries and the fastest bound are near one.
	slopeNoise = 1e-14
	// walkViolation is the violation on the way that shows the walk to be lost, per max(1, |bound|); bounds nearer than
	// feasibilityTolerance count as reached, and a thousand times that is left for what kernels make of it.
	walkViolation = 1e-6
	// walkSteps bounds the pieces of one walk, per row and column.
	walkSteps = 50
)

// walk follows the optimum while bounds move: lower + theta lowerRate, upper + theta upperRate in the scaled problem.
type walk struct {
	t         *session
	base      *engine // at the optimum of theta = 0; never changed
	e         *engine // where the walk is
	rates     *engine // the programme of rates
	placed    []Place // scratch
	lowerRate []float64
	upperRate []float64
	moved     []int   // variables of which a bound moves
	unit      float64 // theta per unit of the caller's parameter
	theta     float64
	rate      []float64 // dx/dtheta of the present basis, by variable
	before    []float64 // the rates before the last turn
	top       float64   // largest rate
	last      SideOf    // the bound reached last
}

// newWalk starts from a solved session.
func newWalk(t *session) *walk {
	v := t.e.n + t.e.rows
	return &walk{
		t: t, base: t.e, placed: make([]Place, v), lowerRate: make([]float64, v), upperRate: make([]float64, v),
		rate: make([]float64, v), before: make([]float64, v),
	}
}

// extent is how far one slope holds in one direction, in the units of the problem.
type extent struct {
	slope  float64 // per unit of the direction [-]
	scaled float64 // the same in the scaled problem
	reach  float64 // [-]
	end    End
	closed bool // infeasible at once: there is no slope
}

// setMoves gives each bound its rate per unit of the caller's parameter. False when nothing moves.
func (w *walk) setMoves(moves []Move) bool {
	for _, v := range w.moved {
		w.lowerRate[v], w.upperRate[v] = 0, 0
	}
	w.moved = w.moved[:0]
	for _, m := range moves {
		v, f := w.base.n+m.Of.Index, 0.0
		if m.Of.Column {
			v = m.Of.Index
			f = 1 / w.t.s.col[v]
		} else {
			f = w.t.s.row[m.Of.Index]
		}
		if w.lowerRate[v] == 0 && w.upperRate[v] == 0 {
			w.moved = append(w.moved, v)
		}
		if m.Of.Side != UpperSide {
			w.lowerRate[v] += m.Rate * f
		}
		if m.Of.Side != LowerSide {
			w.upperRate[v] += m.Rate * f
		}
	}
	top := 0.0
	for _, v := range w.moved {
		top = math.Max(top, math.Max(math.Abs(w.lowerRate[v]), math.Abs(w.upperRate[v])))
	}
	if !(top > 0) {
		return false
	}
	w.unit = powerOfTwo(top)
	for _, v := range w.moved {
		w.lowerRate[v] /= w.unit
		w.upperRate[v] /= w.unit
	}
	return true
}

// begin puts the walk at theta = 0 on the base.
func (w *walk) begin() {
	b := w.base
	if w.e == nil {
		s := w.t.s
		w.e = newEngine(s.matrix, s.cost, append([]float64(nil), s.lower...), append([]float64(nil), s.upper...))
		w.rates = newEngine(s.matrix, s.cost, make([]float64, len(s.lower)), make([]float64, len(s.upper)))
	}
	copy(w.e.trueLow, b.trueLow)
	copy(w.e.trueUp, b.trueUp)
	w.theta = 0
	w.adopt(b.place)
}

// adopt solves for the values and prices of the given places at the present bounds. False when they are no basis.
func (w *walk) adopt(place []Place) bool {
	e := w.e
	copy(e.place, place)
	e.unwiden()
	e.adoptPlaces()
	copy(e.cost, e.trueCost)
	clear(e.cost[e.n:])
	e.refactor()
	ok := e.polish()
	for v, p := range place {
		if (p == Basic) != (e.place[v] == Basic) {
			return false
		}
	}
	return ok
}

// computeRates fills rate with the change of every variable per unit of theta and returns the slope.
func (w *walk) computeRates(e *engine) float64 {
	clear(w.rate)
	slope, any := 0.0, false
	for _, v := range w.moved {
		by := 0.0
		switch e.place[v] {
		case AtLower:
			by = w.lowerRate[v]
		case AtUpper:
			by = w.upperRate[v]
		}
		if by != 0 {
			w.rate[v] = by
			slope += by * e.d[v]
			any = true
		}
	}
	w.top = 1
	if !any {
		return slope
	}
	x := e.x
	e.x = w.rate
	e.computeValues()
	e.x = x
	for _, r := range w.rate {
		w.top = math.Max(w.top, math.Abs(r))
	}
	return slope
}

// near tells that a distance to a bound counts as none.
func reachedBound(room, bound float64) bool {
	return room <= feasibilityTolerance*math.Max(1, math.Abs(bound))
}

// eachApproach calls f with every bound of a basic variable that its value approaches, how far it is and how fast.
func (w *walk) eachApproach(e *engine, f func(v int, side Side, bound, room, speed float64)) {
	try := func(v int) {
		if up := e.upper[v]; finite(up) {
			if s := w.rate[v] - w.upperRate[v]; s > rateTolerance*w.top {
				f(v, UpperSide, up, up-e.x[v], s)
			}
		}
		if lo := e.lower[v]; finite(lo) {
			if s := w.lowerRate[v] - w.rate[v]; s > rateTolerance*w.top {
				f(v, LowerSide, lo, e.x[v]-lo, s)
			}
		}
	}
	for _, j := range e.jList {
		try(j)
	}
	for i, at := range e.posR {
		if at < 0 {
			try(e.n + i)
		}
	}
}

// outward returns the largest speed by which a bound that is reached would be left behind, and notes that bound.
func (w *walk) outward(e *engine) float64 {
	most := 0.0
	w.eachApproach(e, func(v int, side Side, bound, room, speed float64) {
		if reachedBound(room, bound) && speed > most {
			most, w.last = speed, w.named(v, side)
		}
	})
	return most
}

// named returns the public name of a bound.
func (w *walk) named(v int, side Side) SideOf {
	if v < w.base.n {
		return SideOf{true, v, side}
	}
	return SideOf{false, v - w.base.n, side}
}

// step returns how far theta may grow until a further bound is reached, and the variable that reaches it; -1 when its own other
// bound stops a moving one. Ties go to the fastest.
func (w *walk) step(e *engine) (by float64, p int, speed float64) {
	by, p = math.Inf(1), -1
	w.eachApproach(e, func(v int, side Side, bound, room, s float64) {
		if reachedBound(room, bound) {
			return
		}
		if at := room / s; at < by || (at == by && s > speed) {
			by, p, speed = at, v, s
			w.last = w.named(v, side)
		}
	})
	for _, v := range w.moved {
		closing := w.lowerRate[v] - w.upperRate[v]
		if !(closing > 0) {
			continue
		}
		if at := math.Max(0, e.upper[v]-e.lower[v]) / closing; at <= by {
			by, p, speed = at, -1, closing
			side := UpperSide
			if w.upperRate[v] != 0 {
				side = LowerSide
			}
			w.last = w.named(v, side)
		}
	}
	return by, p, speed
}

// advance moves the bounds and the values.
func (w *walk) advance(by float64) {
	e := w.e
	w.theta += by
	for v, r := range w.rate {
		e.x[v] += by * r
	}
	for _, v := range w.moved {
		e.trueLow[v] = w.base.trueLow[v] + w.theta*w.lowerRate[v]
		e.trueUp[v] = w.base.trueUp[v] + w.theta*w.upperRate[v]
		if e.trueLow[v] > e.trueUp[v] {
			// rounding where the two meet
			e.trueUp[v] = e.trueLow[v]
		}
		e.lower[v], e.upper[v] = e.trueLow[v], e.trueUp[v]
		if e.place[v] != Basic {
			e.x[v] = e.rest(v)
		}
	}
}

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

// differ tells that two slopes of the scaled problem are not the same.
func (w *walk) differ(a, b float64) bool {
	return !(math.Abs(a-b) <= math.Max(slopeFloor, slopeTolerance*math.Max(math.Abs(a), math.Abs(b))))
}

// toUnits returns a slope of the scaled problem in the units of the problem.
func (w *walk) toUnits(slope float64) float64 {
	if math.Abs(slope) <= slopeNoise {
		return 0
	}
	return slope * w.unit / w.t.s.costFactor
}

// maxSteps bounds the loop of a walk.
func (w *walk) maxSteps() int { return 1000 + walkSteps*(w.base.n+w.base.rows) }

// oneWay follows one bound up (1) or down (-1) until the slope changes.
func (w *walk) oneWay(ctx context.Context, of SideOf, direction float64) (extent, error) {
	w.setMoves([]Move{{Of: of, Rate: direction}})
	if x, ok := w.atOnce(); ok {
		return x, nil
	}
	w.begin()
	x := extent{}
	for k := 0; k < w.maxSteps(); k++ {
		if ctx.Err() != nil {
			return x, &StatusError{"following a bound", Interrupted}
		}
		slope, status := w.face(ctx)
		switch {
		case status == Infeasible:
			x.end, x.closed = End{InfeasibleBeyond, w.last}, k == 0
			x.reach = w.theta / w.unit
			return x, nil
		case status != Optimal:
			return x, &StatusError{"following a bound", status}
		case k == 0:
			x.scaled, x.slope = slope, w.toUnits(slope)
		case w.differ(slope, x.scaled):
			x.end = End{SlopeChanges, w.culprit()}
			x.reach = w.theta / w.unit
			return x, nil
		}
		by, _, _ := w.step(w.e)
		if !(by <= math.MaxFloat64) {
			x.end.Kind, x.reach = Endless, math.Inf(1)
			return x, nil
		}
		w.advance(by)
	}
	return x, &StatusError{"following a bound", NumericalTrouble}
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

// atOnce answers from the base alone where that is certain: no bound that is reached is left behind, and at the next one the pivot
// raises the dual objective, so that the slope does change there.
func (w *walk) atOnce() (extent, bool) {
	e, x := w.base, extent{}
	for _, v := range w.moved {
		if w.lowerRate[v] != w.upperRate[v] && reachedBound(e.upper[v]-e.lower[v], e.lower[v]) {
			return x, false
		}
	}
	x.scaled = w.computeRates(e)
	if w.outward(e) > 0 {
		return x, false
	}
	x.slope = w.toUnits(x.scaled)
	by, p, speed := w.step(e)
	x.reach, x.end = by/w.unit, End{SlopeChanges, w.last}
	if !(by <= math.MaxFloat64) {
		x.reach, x.end = math.Inf(1), End{Kind: Endless}
		return x, true
	}
	if p < 0 {
		x.end.Kind = InfeasibleBeyond
		return x, true
	}
	direction := 1.0
	if w.last.Side == UpperSide {
		direction = -1
	}
	e.pivotRow(p)
	e.gatherBreakpoints(direction)
	if len(e.ratio) == 0 {
		return x, false
	}
	return x, w.differ(x.scaled+e.ratio[0].ratio*speed, x.scaled) && w.alone(e, p, by)
}

// alone tells that no basic value but that of p is at a bound after a step, nor a moving bound at the other one. Then one pivot is all that p asks for, so that something
// is feasible beyond.
func (w *walk) alone(e *engine, p int, by float64) bool {
	for v, place := range e.place {
		if place != Basic || v == p {
			continue
		}
		x := e.x[v] + by*w.rate[v]
		if lo := e.lower[v] + by*w.lowerRate[v]; finite(lo) && reachedBound(x-lo, lo) {
			return false
		}
		if up := e.upper[v] + by*w.upperRate[v]; finite(up) && reachedBound(up-x, up) {
			return false
		}
	}
	for _, v := range w.moved {
		if closing := w.lowerRate[v] - w.upperRate[v]; closing > 0 && reachedBound(e.upper[v]-e.lower[v]-by*closing, e.lower[v]) {
			return false
		}
	}
	return true
}
