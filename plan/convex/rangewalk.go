package convex

import "math"

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
	t         *undertaking
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
	hit       bool      // it was reached by a value, not by another bound
}

// newWalk starts from a solved undertaking.
func newWalk(t *undertaking) *walk {
	v := t.e.n + t.e.rows
	return &walk{
		t: t, base: t.e, placed: make([]Place, v), lowerRate: make([]float64, v), upperRate: make([]float64, v),
		rate: make([]float64, v), before: make([]float64, v),
	}
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
	by, p, w.hit = math.Inf(1), -1, false
	w.eachApproach(e, func(v int, side Side, bound, room, s float64) {
		if reachedBound(room, bound) {
			return
		}
		if at := room / s; at < by || (at == by && s > speed) {
			by, p, speed = at, v, s
			w.last, w.hit = w.named(v, side), true
		}
	})
	for _, v := range w.moved {
		closing := w.lowerRate[v] - w.upperRate[v]
		if !(closing > 0) {
			continue
		}
		if at := math.Max(0, e.upper[v]-e.lower[v]) / closing; at < by {
			by, p, speed = at, -1, closing
			side := UpperSide
			if w.upperRate[v] != 0 {
				side = LowerSide
			}
			w.last, w.hit = w.named(v, side), false
		}
	}
	return by, p, speed
}

// advance moves the bounds and the values. A bound that was met by the value of its own variable takes that value, which it may have
// come to from far away.
func (w *walk) advance(by float64) {
	e := w.e
	w.theta += by
	for v, r := range w.rate {
		e.x[v] += by * r
	}
	for _, v := range w.moved {
		e.trueLow[v] += by * w.lowerRate[v]
		e.trueUp[v] += by * w.upperRate[v]
		if w.own(v) && w.last.Side == LowerSide && finite(e.trueLow[v]) {
			e.trueLow[v] = e.x[v]
		}
		if w.own(v) && w.last.Side == UpperSide && finite(e.trueUp[v]) {
			e.trueUp[v] = e.x[v]
		}
		if e.trueLow[v] > e.trueUp[v] {
			e.trueUp[v] = e.trueLow[v] // rounding where the two meet
		}
		e.lower[v], e.upper[v] = e.trueLow[v], e.trueUp[v]
		if e.place[v] != Basic {
			e.x[v] = e.rest(v)
		}
	}
}

// own tells that the bound reached last is a moving one of variable v, met by its value.
func (w *walk) own(v int) bool {
	rate := w.lowerRate[v]
	if w.last.Side == UpperSide {
		rate = w.upperRate[v]
	}
	return w.hit && rate != 0 && w.last == w.named(v, w.last.Side)
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
