package plan

import (
	"context"
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// curved is an aim that is not linear: a convex function of the decided rates x, in the order of the programme's columns, to be made
// small.
type curved interface {
	value(x []float64) float64
	gradient(x []float64) []float64
	hessian(x []float64) convex.Hessian
	quadratic() bool // the Hessian is the same everywhere
	changes() bool   // it depends on the state of the aquifer beyond what is linear in the rates
	at(ctx context.Context, p *planner, rates []float64) error
}

const (
	// settledStep is the largest move of a rate, as a share of the well's largest, after which a further quadratic problem is not
	// worth while: Newton's steps square their error, so that what is left is far below the 1e-9 of the objective that is promised.
	settledStep = 1e-6
	// quadraticRounds bounds the quadratic problems in a row; Newton's method takes about ten.
	quadraticRounds = 60
)

// makesSmall tells whether an aim is a cost: its prices are savings.
func (a Aim) makesSmall() bool { return a == LeastEnergy || a == ClosestToRequests }

// newCurved returns the aim as a function of the decided rates; nil for a linear one.
func (p *planner) newCurved() curved {
	switch p.setup.Aim {
	case LeastEnergy:
		return &energyAim{}
	case ClosestToRequests:
		return newRequestAim(p.setup)
	}
	return nil
}

// startCurved sets up a curved aim from the first response.
func (p *planner) startCurved(ctx context.Context, rates []float64) error {
	if p.curved = p.newCurved(); p.curved == nil {
		return nil
	}
	if err := p.checkLevelRows(); err != nil {
		return err
	}
	return p.curved.at(ctx, p, rates)
}

// solve solves the programme of one round. A curved aim f is written as the largest -f, so that every price keeps its meaning: what
// one more unit of a limit is worth. Where its Hessian changes with the rates it is solved by successive quadratic problems (Newton's
// method with the rows kept; Wilson 1963), each step shortened to the least value along it; the last problem, which gives the prices,
// stays in g.
func (p *planner) solve(ctx context.Context, g *programme, basis *convex.Basis) (*convex.Solution, error) {
	if p.curved == nil {
		sol, err := p.solveFrom(ctx, g.problem, basis)
		if sol != nil {
			p.aimValue = sol.Objective
		}
		return sol, err
	}
	s, base := p.setup, g.problem
	x := make([]float64, len(s.decided))
	start, _ := s.startRates()
	for k, i := range s.decided {
		x[k] = math.Max(s.Wells[i].Min, math.Min(s.Wells[i].Max, start[i]))
	}
	if p.near != nil {
		copy(x, p.near)
	}
	for round := 1; ; round++ {
		problem, err := p.curvedProblem(base, x)
		if err != nil {
			return nil, err
		}
		sol, err := p.solveFrom(ctx, problem, basis)
		if err == nil && sol.Status == convex.NotConvex {
			return nil, errors.New(p.notConvexWords())
		}
		if err != nil || sol.Status != convex.Optimal {
			return sol, err
		}
		g.problem, basis = problem, sol.Basis
		step := 1.0
		if round > 1 {
			step = leastAlong(p.curved, x, sol.X)
		}
		moved := 0.0
		for k, i := range s.decided {
			d := sol.X[k] - x[k]
			if size := s.rateScale(i); size > 0 {
				moved = math.Max(moved, math.Abs(d)/size)
			}
			x[k] += step * d
		}
		if p.curved.quadratic() || (moved <= settledStep && step == 1) {
			p.aimValue = -p.curved.value(sol.X)
			return sol, nil
		}
		if round == quadraticRounds {
			return nil, fmt.Errorf("%d successive quadratic problems, whose last moved a rate by %.2g of its range", round, moved)
		}
	}
}

// solveFrom solves from a basis, and afresh where that came to no end.
func (p *planner) solveFrom(ctx context.Context, problem *convex.Problem, basis *convex.Basis) (*convex.Solution, error) {
	sol, err := convex.Solve(ctx, problem, convex.Options{Start: basis})
	if err == nil && basis != nil && (sol.Status == convex.NumericalTrouble || sol.Status == convex.IterationLimit) {
		sol, err = convex.Solve(ctx, problem, convex.Options{})
	}
	if sol != nil {
		p.iterations += sol.Iterations
	}
	return sol, err
}

// curvedProblem is the programme with the quadratic function that touches -f to second order at x.
func (p *planner) curvedProblem(base *convex.Problem, x []float64) (*convex.Problem, error) {
	problem := base.Clone()
	h := p.curved.hessian(x)
	cost := p.curved.gradient(x)
	n := len(x)
	for i := range h.Dense {
		cost[i/n] -= h.Dense[i] * x[i%n]
		h.Dense[i] = -h.Dense[i]
	}
	for i := range h.Diagonal {
		cost[i] -= h.Diagonal[i] * x[i]
		h.Diagonal[i] = -h.Diagonal[i]
	}
	var errs []error
	for k, c := range cost {
		errs = append(errs, problem.SetCost(k, tidy(-c)))
	}
	errs = append(errs, problem.SetHessian(h))
	if err := errors.Join(errs...); err != nil {
		return nil, fmt.Errorf("plan: the programme's objective: %w", err)
	}
	return problem, nil
}

// leastAlong returns the step from x towards y, at most 1, at which f is least. The slope along the line is a quadratic function of
// the step for a cubic f, so that three values give its root.
func leastAlong(f curved, x, y []float64) float64 {
	n := len(x)
	d, at := make([]float64, n), make([]float64, n)
	for k := range x {
		d[k] = y[k] - x[k]
	}
	slope := func(step float64) float64 {
		for k := range x {
			at[k] = x[k] + step*d[k]
		}
		return dot(f.gradient(at), d)
	}
	first, middle, last := slope(0), slope(0.5), slope(1)
	if last <= 0 {
		return 1
	}
	if first >= 0 {
		return 1 // no descent is left but rounding
	}
	c := 2 * (first + last - 2*middle)
	b := last - first - c
	// the root of first + b t + c t² between 0 and 1 in the form without cancellation
	root := 2 * -first / (b + math.Sqrt(math.Max(0, b*b-4*c*first)))
	if root > 0 && root < 1 {
		return root
	}
	return 1
}

func (p *planner) notConvexWords() string {
	if p.setup.Aim == LeastEnergy {
		return "an energy that is not convex in the rates: the wells' efficiencies differ too much for how strongly they draw on each other"
	}
	return "not convex"
}

// refreshAim takes the aim again at the state under the given rates, where it changes with the state, and tells whether its value moved
// enough for another round.
func (p *planner) refreshAim(ctx context.Context, rates, x []float64) (moved bool, err error) {
	if p.curved == nil || !p.curved.changes() {
		return false, nil
	}
	if err := p.curved.at(ctx, p, rates); err != nil {
		return false, err
	}
	before := p.aimValue
	p.aimValue = -p.curved.value(x)
	return !(math.Abs(p.aimValue-before) <= localTolerance*math.Abs(before)), nil
}
