package convex

import "math"

// rangeRate is the rate of change, relative to its terms, that is rounding.
const rangeRate = 1e-11

// optimal tells whether no bound is passed and no price has the wrong sign.
func (a *activePiece) optimal() bool {
	for v, place := range a.places {
		lower, upper := boundsAt(a.p, a.side(v, BothSides))
		near := rangeReach * (1 + a.size[v])
		switch {
		case place == Basic:
			if !(a.x[v] >= lower-near && a.x[v] <= upper+near) {
				return false
			}
		case lower == upper:
		case place == AtLower && !(a.d[v] >= -rangeReach*a.cost[v]), place == AtUpper && !(a.d[v] <= rangeReach*a.cost[v]):
			return false
		}
	}
	return true
}

// pieceStep is the rates of change of a piece in one direction.
type pieceStep struct {
	lower, upper []float64 // of the bounds
	x, d         []float64
	xSize, dSize []float64 // of the terms
}

// stepAlong is what values and prices do per unit of way times the moves; false where that is not known.
func (a *activePiece) stepAlong(g []Move, way float64) (*pieceStep, bool) {
	n := a.p.Columns()
	s := &pieceStep{lower: make([]float64, len(a.places)), upper: make([]float64, len(a.places))}
	bounds := make([]float64, len(a.places))
	for _, m := range g {
		v := m.Of.Index
		if !m.Of.Column {
			v += n
		}
		lower, upper := boundsAt(a.p, m.Of)
		if lower == upper && m.Of.Side != BothSides {
			return nil, false // one side of an equation: the active set says nothing of the other
		}
		if m.Of.Side != UpperSide {
			s.lower[v] += way * m.Rate
		}
		if m.Of.Side != LowerSide {
			s.upper[v] += way * m.Rate
		}
	}
	for v, place := range a.places {
		switch place {
		case AtLower:
			bounds[v] = s.lower[v]
		case AtUpper:
			bounds[v] = s.upper[v]
		}
	}
	var ok bool
	if s.x, s.d, ok = a.solve(bounds, make([]float64, n)); !ok {
		return nil, false
	}
	a.measureStep(s)
	return s, true
}

func (a *activePiece) measureStep(s *pieceStep) {
	n := a.p.Columns()
	s.xSize, s.dSize = make([]float64, len(a.places)), make([]float64, len(a.places))
	largest := 0.0 // of a step, relative to the columns' own scale
	for i, j := range a.free {
		largest = math.Max(largest, math.Abs(s.x[j])/a.scale[i])
	}
	for i, j := range a.free {
		s.xSize[j] = largest * a.scale[i]
	}
	for j := range n {
		if a.places[j] != Basic {
			s.xSize[j] = math.Abs(s.x[j])
		}
	}
	for i := range a.p.rowName {
		for j, v := range a.p.row(i) {
			s.xSize[n+i] += math.Abs(v) * s.xSize[j]
		}
	}
	if a.p.hessian != nil {
		h := a.p.hessian.assembled()
		for i := range h.n {
			for k := h.start[i]; k < h.start[i+1]; k++ {
				j, v := int(h.column[k]), math.Abs(h.value[k])
				s.dSize[i] += v * s.xSize[j]
				s.dSize[j] += v * s.xSize[i]
			}
		}
	}
	for _, r := range a.rows {
		for j, v := range a.p.row(r) {
			if a.places[j] == Basic && v != 0 {
				s.dSize[n+r] = math.Max(s.dSize[n+r], s.dSize[j]/math.Abs(v))
			}
		}
		s.dSize[n+r] = math.Max(s.dSize[n+r], math.Abs(s.d[n+r]))
		for j, v := range a.p.row(r) {
			if a.places[j] != Basic {
				s.dSize[j] += math.Abs(v * s.d[n+r])
			}
		}
	}
}

// follow moves the bounds as far as the active set stays the same; false when that is not even as far as least, or not at all.
func (a *activePiece) follow(g []Move, way, least float64) (quadraticSide, bool) {
	n := a.p.Columns()
	s, ok := a.stepAlong(g, way)
	if !ok {
		return unknownSide(), false
	}
	out := quadraticSide{known: true, reach: math.Inf(1), end: End{Kind: Endless}}
	for _, m := range g {
		v := m.Of.Index
		if !m.Of.Column {
			v += n
		}
		if held(a.places[v], m.Of.Side) {
			out.price += a.sign * m.Rate * a.d[v]
			out.bend += a.sign * way * m.Rate * s.d[v]
		}
	}
	stuck, reached := false, 0
	type gap struct{ room, rate, near float64 }
	var gaps []gap // of values
	at, side, leaving := -1, Side(0), false
	look := func(v int, which Side, room, rate, near, tiny float64, leaves bool) {
		if !leaves {
			gaps = append(gaps, gap{room, rate, near})
		}
		switch {
		case !(rate < -tiny):
		case room <= near:
			stuck = true
		case room/-rate < out.reach:
			out.reach, leaving = room/-rate, leaves
			at, side = v, which
		}
	}
	for v, place := range a.places {
		lower, upper := boundsAt(a.p, a.side(v, BothSides))
		near, tiny := rangeReach*(1+a.size[v]), rangeRate*(s.xSize[v]+math.Abs(s.lower[v])+math.Abs(s.upper[v]))
		switch {
		case place == Basic:
			look(v, LowerSide, a.x[v]-lower, s.x[v]-s.lower[v], near, tiny, false)
			look(v, UpperSide, upper-a.x[v], s.upper[v]-s.x[v], near, tiny, false)
		case lower == upper:
		default:
			price, rate, which := a.d[v], s.d[v], LowerSide
			other := UpperSide
			if place == AtUpper {
				price, rate, which, other = -price, -rate, UpperSide, LowerSide
			}
			look(v, which, price, rate, rangeReach*a.cost[v], rangeRate*s.dSize[v], true)
			look(v, other, upper-lower, s.upper[v]-s.lower[v], near, tiny, false)
		}
	}
	if stuck || !(out.reach >= least) {
		return unknownSide(), false
	}
	if at >= 0 {
		for _, g := range gaps {
			if g.room+out.reach*g.rate <= g.near {
				reached++
			}
		}
		out.crowded = reached > 1
		out.end = End{Kind: SlopeChanges, Binds: a.side(at, side), Leaves: leaving}
		if !leaving && a.places[at] == Basic && a.blocked(at, side) || !leaving && a.places[at] != Basic {
			out.end.Kind = InfeasibleBeyond
		}
	}
	return out, true
}

// held tells whether a variable at a place is held by the bound.
func held(place Place, s Side) bool {
	return place != Basic && (s == BothSides || place == AtLower && s == LowerSide || place == AtUpper && s == UpperSide)
}

// blocked tells that nothing is feasible once variable v has reached the bound and is pushed on: no value gives way, and no price of the
// active set falls while that of v grows.
func (a *activePiece) blocked(v int, side Side) bool {
	n := a.p.Columns()
	push := 1.0
	if side == UpperSide {
		push = -1
	}
	pull := make([]float64, n) // the gradient of v, as a cost
	if v < n {
		pull[v] = -push
	} else {
		for j, c := range a.p.row(v - n) {
			pull[j] = -push * c
		}
	}
	x, d, ok := a.solve(make([]float64, len(a.places)), pull)
	if !ok {
		return false
	}
	// unprojected, the value of v would move by this
	alone, size := 0.0, 0.0
	for i, j := range a.free {
		alone += pull[j] * pull[j] * a.scale[i] * a.scale[i]
		size = math.Max(size, math.Abs(pull[j]))
	}
	if push*x[v] > rangeSingular*alone {
		return false
	}
	for u, place := range a.places {
		lower, upper := boundsAt(a.p, a.side(u, BothSides))
		if place == Basic || lower == upper {
			continue
		}
		price := d[u]
		if place == AtUpper {
			price = -price
		}
		if price < -rangeReach*math.Max(size, math.Abs(pull[min(u, n-1)])) {
			return false
		}
	}
	return true
}
