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
	for round := 0; round < maxRounds; round++ {
		careful := round >= maxRounds/2
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
			continue
		}
		e.unshift()
		end, q, status := e.primal(ctx, careful)
		switch end {
		case halted:
			return status, 0
		case noEnd:
			if e.feasible() {
				return Unbounded, q
			}
			continue
		case lostAccuracy:
			continue
		}
		if e.polish() && e.feasible() && e.pricesRight() {
			return Optimal, 0
		}
	}
	return NumericalTrouble, 0
}

// feasible tells that no basic value violates a bound.
func (e *engine) feasible() bool {
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
		if e.place[v] != Basic && e.wrong(v) > optimalityTolerance {
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
