package convex

import (
	"context"
	"fmt"
	"math"
)

// Tolerances of the choice among equal optima. Distances are in units of the scaled distance between the target and the plan that
// the linear programme found, rows have norm one, so that all numbers are near one.
const (
	// tiePrice is the price, in the scaled problem, that counts as none, so that its bound may be left without loss: what a sharp
	// solve leaves.
	tiePrice = sharpTolerance
	// tieMovement is the movement within the optimal face, in the scaled problem, that counts as none: what the solver calls
	// feasible.
	tieMovement = feasibilityTolerance
	// CertifiedTie is the error of stationarity, sign and slackness that CheckTie allows, relative to the largest scaled distance of
	// a column, or where that is smaller to rounding of the target.
	CertifiedTie = 1e-8
)

// Tie is the optimum nearest to a target.
type Tie struct {
	// Solution is the optimum with X, RowValue and Objective of the nearest plan. Prices are those of the problem and hold for all
	// optima; Basis is that of the linear programme, to start from, whose plan may be another one.
	Solution *Solution
	// Unique tells that there is no other optimum.
	Unique bool
	// Distance is the root of the sum of squares of (x - target) / scale.
	Distance float64 // [-]
	// Other is an optimum that differs, the vertex that the linear programme went to; nil when there is only one or the nearest is
	// that vertex.
	Other []float64 // [-]
	// RowPull is, for each row, by how much half the square of the distance would grow per unit of its value forced upwards: zero
	// where the row stands in the way of no smaller distance, and where the optimum is the only one.
	RowPull []float64 // [-]
	// Steps is the number of changes of the active set.
	Steps int
}

// Nearest finds, among all optima of p, the one with the least sum of ((x - target) / scale)². s is an optimum of p. A nil scale
// stands for ones.
//
// The optima are the feasible points that keep every bound with a price (complementary slackness, for which any one set of optimal
// prices serves). Over them the strictly convex sum of squares is minimised by a dual active-set method (Goldfarb & Idnani 1983),
// which cannot stall, from the target itself. The result is checked: Certify of the plan with the prices, and CheckTie.
//
// The error is ErrNotOptimal, ErrQuadratic, names the number at fault, or is a *StatusError. It panics when target or scale have a wrong length.
func Nearest(ctx context.Context, p *Problem, s *Solution, target, scale []float64) (*Tie, error) {
	n := p.Columns()
	if scale == nil {
		scale = ones(n)
	}
	if p.Quadratic() {
		return nil, ErrQuadratic
	}
	if len(target) != n || len(scale) != n {
		panic(fmt.Sprintf("convex: Nearest: target of %d and scale of %d for %d columns", len(target), len(scale), n))
	}
	for j := range target {
		if !finite(target[j]) {
			return nil, fmt.Errorf("convex: Nearest: target %v of column %d is not a finite number", target[j], j)
		}
		if !(scale[j] > 0 && finite(scale[j])) {
			return nil, fmt.Errorf("convex: Nearest: scale %v of column %d is not a finite number above zero", scale[j], j)
		}
	}
	t, err := restart(ctx, p, s)
	if err != nil {
		return nil, err
	}
	tie := &Tie{Solution: report(t, Optimal), RowPull: make([]float64, p.Rows())}
	vertex := append([]float64(nil), tie.Solution.X...)
	f := newFace(t)
	if tie.Unique, err = f.single(ctx); err != nil {
		return nil, err
	}
	if tie.Unique {
		tie.Distance = distance(vertex, target, scale)
		return tie, nil
	}
	if err := f.project(ctx, p, tie, target, scale); err != nil {
		return nil, err
	}
	tie.Distance = distance(tie.Solution.X, target, scale)
	for j, x := range vertex {
		if x != tie.Solution.X[j] {
			tie.Other = vertex
		}
	}
	if c := Certify(p, tie.Solution); !c.Accepted {
		return nil, fmt.Errorf("convex: Nearest: the plan is refused: %s", c.Reason)
	}
	return tie, CheckTie(p, tie, target, scale)
}

// distance returns the scaled distance between two plans.
func distance(x, target, scale []float64) float64 {
	sum := 0.0
	for j := range x {
		sum = math.Hypot(sum, (x[j]-target[j])/scale[j])
	}
	return sum
}
