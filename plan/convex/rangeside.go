package convex

import (
	"context"
	"math"
)

// extent is how far one slope holds in one direction, in the units of the problem.
type extent struct {
	slope  float64 // per unit of the direction [-]
	scaled float64 // the same in the scaled problem
	at     float64 // the bound at its end [-]
	end    End
	closed bool // infeasible at once: there is no slope
}

// oneWay follows one bound up (1) or down (-1) until the slope changes.
func (w *walk) oneWay(ctx context.Context, of SideOf, direction float64) (extent, error) {
	w.setMoves([]Move{{Of: of, Rate: direction}})
	if x, ok := w.atOnce(of, direction); ok {
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
			x.end, x.closed = End{Kind: InfeasibleBeyond, Binds: w.last}, k == 0
			x.at = w.present(of)
			return x, nil
		case status != Optimal:
			return x, &StatusError{"following a bound", status}
		case k == 0:
			x.scaled, x.slope = slope, w.toUnits(slope)
		case w.differ(slope, x.scaled):
			x.end = End{Kind: SlopeChanges, Binds: w.culprit()}
			x.at = w.present(of)
			return x, nil
		}
		by, _, _ := w.step(w.e)
		if !(by <= math.MaxFloat64) {
			x.end.Kind, x.at = Endless, math.Inf(int(direction))
			return x, nil
		}
		w.advance(by)
	}
	return x, &StatusError{"following a bound", NumericalTrouble}
}

// present returns where the moving bound is, the lower one for BothSides.
func (w *walk) present(of SideOf) float64 {
	v := of.Index
	if !of.Column {
		v += w.e.n
	}
	if of.Side == UpperSide {
		return w.inUnits(v, w.e.trueUp[v])
	}
	return w.inUnits(v, w.e.trueLow[v])
}

// inUnits takes a value of variable v to the units of the problem.
func (w *walk) inUnits(v int, value float64) float64 {
	if v < w.base.n {
		return value * w.t.s.col[v]
	}
	return value / w.t.s.row[v-w.base.n]
}

// atOnce answers from the base alone where that is certain: no bound that is reached is left behind, and at the next one the pivot
// raises the dual objective, so that the slope does change there.
func (w *walk) atOnce(of SideOf, direction float64) (extent, bool) {
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
	x.at, x.end = boundAt(w.t.p, of)+direction*by/w.unit, End{Kind: SlopeChanges, Binds: w.last}
	if !(by <= math.MaxFloat64) {
		x.at, x.end = math.Inf(int(direction)), End{Kind: Endless}
		return x, true
	}
	if p < 0 {
		x.end.Kind = InfeasibleBeyond
		return x, true
	}
	if w.own(p) && w.last.Side == of.Side { // exact even when the bound comes from far away
		x.at = w.inUnits(p, e.x[p]+by*w.rate[p])
	}
	towards := 1.0
	if w.last.Side == UpperSide {
		towards = -1
	}
	e.pivotRow(p)
	e.gatherBreakpoints(towards)
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
