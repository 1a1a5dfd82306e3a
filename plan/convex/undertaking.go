package convex

import (
	"context"
	"math"
)

// undertaking keeps a scaled problem and its engine, so that a series of solves with changed bounds or costs pays for the scaling once
// and each starts where the last one ended.
type undertaking struct {
	p *Problem
	s *scaled
	e *engine
	q int // entering variable of an unbounded solve
}

// newUndertaking scales p. The undertaking reads p again only to report, so that p must not change meanwhile.
func newUndertaking(p *Problem) *undertaking {
	return newUndertakingOf(p, scale(p))
}

func newUndertakingOf(p *Problem, s *scaled) *undertaking {
	return &undertaking{p: p, s: s, e: newEngine(s.matrix, s.cost, s.lower, s.upper)}
}

// setColumn changes the bounds of column j within the undertaking.
func (t *undertaking) setColumn(j int, lower, upper float64) {
	t.s.lower[j], t.s.upper[j] = lower/t.s.col[j], upper/t.s.col[j]
}

// setRow changes the bounds of row i within the undertaking.
func (t *undertaking) setRow(i int, lower, upper float64) {
	v := t.e.n + i
	t.s.lower[v], t.s.upper[v] = lower*t.s.row[i], upper*t.s.row[i]
}

// noCost makes the undertaking ask for feasibility only.
func (t *undertaking) noCost() { clear(t.s.cost) }

// solve runs from the present basis with the given number of pivots at most.
func (t *undertaking) solve(ctx context.Context, pivots int) Status {
	t.e.limit = t.e.iterations + pivots
	copy(t.e.cost, t.s.cost)
	clear(t.e.cost[t.e.n:])
	status, q := t.e.optimise(ctx)
	t.q = q
	return status
}

// value returns the value of column j.
func (t *undertaking) value(j int) float64 { return t.e.x[j] * t.s.col[j] }

// smallShare is the scaled cost of the dearest column in use below which the costs are scaled anew: what is left of a price near
// optimalityTolerance would be too few digits otherwise.
const smallShare = 0x1p-10

// zoomPasses bounds how often costs are scaled anew; two are the rule when any are needed.
const zoomPasses = 6

// zoom scales the costs by those of the columns in use and goes on from an optimum, as long as they are small, or large, beside the
// largest of all: the dearest column may be one that nobody uses.
func (t *undertaking) zoom(ctx context.Context, pivots int, status Status) Status {
	for pass := 0; pass < zoomPasses && status == Optimal; pass++ {
		top := 0.0
		for j, c := range t.s.cost {
			if t.e.x[j] != 0 {
				top = math.Max(top, math.Abs(c))
			}
		}
		if !(top > 0) || (top >= smallShare && top <= 1/smallShare) {
			return status
		}
		t.multiplyCost(powerOfTwo(1 / top))
		status = t.solve(ctx, pivots)
	}
	return status
}

// multiplyCost changes the unit of the cost, by a power of two.
func (t *undertaking) multiplyCost(f float64) {
	for j := range t.s.cost {
		t.s.cost[j] *= f
	}
	t.s.costFactor *= f
}
