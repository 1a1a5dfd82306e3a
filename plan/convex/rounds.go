package convex

import (
	"context"
	"math"
)

// optimise is the whole method. Wrong prices that no change of bound can right are shifted away, the dual method then finds a basis
// without violations or a proof that there is none; with the true costs back, the primal method removes what prices are wrong, or
// finds the cost to fall without end. The basis reached is solved afresh; what this brings to light starts another round, and later
// rounds use smallest indices.
//
// The result is a status and, for Unbounded, the entering variable.
func (e *engine) optimise(ctx context.Context) (Status, int) {
	e.feasible, e.optimal = feasibilityTolerance, optimalityTolerance
	status, q := e.rounds(ctx, maxRounds)
	if status == Optimal && !(e.worst() <= sharpTolerance) {
		e.sharpen(ctx)
	}
	return status, q
}

// rounds repeats the two methods, at most as often as given.
func (e *engine) rounds(ctx context.Context, most int) (Status, int) {
	careful := false
	for round := 0; round < most; round++ {
		careful = careful || round >= maxRounds/2
		e.unwiden()
		e.refactor()
		e.makePricesRight()
		end, _, status := e.dual(ctx, careful)
		switch end {
		case halted:
			return status, 0
		case noPoint:
			return Infeasible, 0
		case lostAccuracy:
			e.unshift()
			careful = true
			continue
		}
		e.unshift()
		end, q, status := e.primal(ctx, careful)
		if e.widened {
			e.unwiden()
			e.refactor()
		}
		switch end {
		case halted:
			return status, 0
		case noEnd:
			if e.allWithin() {
				return Unbounded, q
			}
			continue
		case lostAccuracy:
			careful = true
			continue
		}
		if e.polish() && e.allWithin() && e.pricesRight() {
			return Optimal, 0
		}
	}
	return NumericalTrouble, 0
}

// sharpen goes on from an optimum with sharper tolerances and comes back to it when that leads nowhere.
func (e *engine) sharpen(ctx context.Context) {
	place := append([]Place(nil), e.place...)
	e.feasible, e.optimal = sharpTolerance, sharpTolerance
	status := Optimal // polished values often are that sharp already
	if !e.allWithin() || !e.pricesRight() {
		status, _ = e.rounds(ctx, sharpRounds)
	}
	e.feasible, e.optimal = feasibilityTolerance, optimalityTolerance
	if status == Optimal {
		return
	}
	copy(e.place, place)
	e.unwiden()
	e.adoptPlaces()
	copy(e.cost, e.trueCost)
	clear(e.cost[e.n:])
	e.refactor()
	e.polish()
}

// worst returns the largest violation, as rated by the tolerance, or wrong price.
func (e *engine) worst() float64 {
	most := 0.0
	for v := range e.place {
		if e.place[v] != Basic {
			most = math.Max(most, e.wrong(v))
			continue
		}
		most = math.Max(most, (e.lower[v]-e.x[v])/math.Max(1, math.Abs(e.lower[v])))
		most = math.Max(most, (e.x[v]-e.upper[v])/math.Max(1, math.Abs(e.upper[v])))
	}
	return most
}

// allWithin tells that no basic value violates a bound.
func (e *engine) allWithin() bool {
	for v := range e.place {
		if e.place[v] == Basic && e.violation(v) != 0 {
			return false
		}
	}
	return true
}

// pricesRight tells that no price is wrong beyond the tolerance.
func (e *engine) pricesRight() bool {
	for v := range e.place {
		if e.place[v] != Basic && e.wrong(v) > e.optimal {
			return false
		}
	}
	return true
}

// infeasibilitySum adds up the violations.
func (e *engine) infeasibilitySum() float64 {
	sum := 0.0
	for v := range e.place {
		if e.place[v] == Basic {
			sum += math.Abs(e.violation(v))
		}
	}
	return sum
}

// reportEvery is the number of pivots between two reports.
const reportEvery = 100

func (e *engine) report(stage string) {
	if e.progress != nil && e.iterations%reportEvery == 0 {
		e.progress(Progress{Stage: stage, Iterations: e.iterations, Infeasible: e.infeasibilitySum()})
	}
}
