package plan

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// elastic is the conflict's programme with a column for each side of a member's row by which that side gives way, in shares of the
// member's size. One programme serves the least total relaxation and each member's alone: columns that may not give way are held at
// zero, and each solve starts where the last one ended. (convex.LeastRelaxation would answer for every row alone, when only those of
// the set are wanted, and gives no rates at which rows that are not linear could be looked at.)
type elastic struct {
	problem *convex.Problem
	members []member
	first   int   // the first column of relaxation
	owner   []int // the member of each column of relaxation
	basis   *convex.Basis
}

func newElastic(strict *convex.Problem, members []member) (*elastic, error) {
	e := &elastic{members: members, first: strict.Columns()}
	memberOfRow := map[int]int{}
	for k, m := range members {
		memberOfRow[m.row] = k
	}
	var columns []convex.Column
	for j := 0; j < strict.Columns(); j++ {
		columns = append(columns, strict.Column(j))
	}
	type entry struct{ row, column int }
	effect := map[entry]float64{}
	for i := 0; i < strict.Rows(); i++ {
		k, is := memberOfRow[i]
		if !is {
			continue
		}
		r := strict.Row(i)
		for _, side := range []struct{ bound, way float64 }{{r.Lower, 1}, {r.Upper, -1}} {
			if finite(side.bound) {
				effect[entry{i, len(columns)}] = side.way * members[k].effect
				columns = append(columns, convex.Column{Name: "relaxation of " + members[k].words, Cost: 1, Upper: math.Inf(1)})
				e.owner = append(e.owner, k)
			}
		}
	}
	var err error
	if e.problem, err = convex.NewProblem(convex.Minimise, columns); err != nil {
		return nil, fmt.Errorf("plan: the programme of the relaxation: %w", err)
	}
	for i := 0; i < strict.Rows(); i++ {
		r := strict.Row(i)
		a := make([]float64, len(columns))
		copy(a, r.Coefficients)
		for c := range e.owner {
			a[e.first+c] = effect[entry{i, e.first + c}]
		}
		r.Coefficients = a
		if _, err := e.problem.AddRow(r); err != nil {
			return nil, fmt.Errorf("plan: the programme of the relaxation: %w", err)
		}
	}
	return e, nil
}

// relax returns the least total relaxation of the members that take part, as shares of their sizes, and false when no relaxation of
// them would do. Cuts that it needs are added to the planner's and to the programme.
func (e *elastic) relax(ctx context.Context, p *planner, takes func(k int) bool) (shares []float64, possible bool, err error) {
	for c, k := range e.owner {
		upper := 0.0
		if takes(k) {
			upper = math.Inf(1)
		}
		if err := e.problem.SetBounds(e.first+c, 0, upper); err != nil {
			return nil, false, fmt.Errorf("plan: the programme of the relaxation: %w", err)
		}
	}
	shares = make([]float64, len(e.members))
	for round := 1; ; round++ {
		sol, err := convex.Solve(ctx, e.problem, convex.Options{Start: e.basis})
		if err == nil && e.basis != nil && (sol.Status == convex.NumericalTrouble || sol.Status == convex.IterationLimit) {
			sol, err = convex.Solve(ctx, e.problem, convex.Options{})
		}
		switch {
		case err != nil:
			return nil, false, fmt.Errorf("plan: the programme of the relaxation: %w", err)
		case sol.Status == convex.Interrupted:
			return nil, false, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
		case sol.Status == convex.Infeasible:
			return shares, false, nil
		case sol.Status != convex.Optimal:
			p.setup.cautions.addf("rounding left part of the explanation open: relaxations may be missing from it")
			e.basis = nil
			return make([]float64, len(e.members)), false, nil
		}
		p.iterations += sol.Iterations
		e.basis = sol.Basis
		clear(shares)
		for c, k := range e.owner {
			shares[k] += sol.X[e.first+c]
		}
		for k, share := range shares {
			if !(share > relaxedShare) {
				shares[k] = 0
			}
		}
		added, err := e.addCuts(ctx, p, shares, sol.X)
		if err != nil {
			return nil, false, err
		}
		if added == 0 || round == defaultRounds {
			return shares, true, nil
		}
	}
}

// addCuts adds the tangents of rows that are not linear whose true change passes the relaxed limits at the given columns. Where the
// aquifer has no state at such rates, the relaxation found so far stands: it is then the least that could do.
func (e *elastic) addCuts(ctx context.Context, p *planner, shares, x []float64) (added int, err error) {
	s := p.setup
	rates := append([]float64(nil), s.standing...)
	for k, i := range s.decided {
		if !(math.Abs(x[k]) <= rateTolerance*s.rateScale(i)) {
			rates[i] = x[k]
		}
	}
	for k, m := range e.members {
		if m.bound == nil || m.bound.linear || !m.bound.kept {
			continue
		}
		tan, counted, err := p.oracle.tangentOf(ctx, m.bound, rates)
		if err != nil {
			return 0, ctx.Err()
		}
		if m.bound.slack(tan.at(counted), 0)+shares[k]*m.effect >= -relaxedTolerance*m.bound.scale(s, tan.slope) {
			continue
		}
		p.cuts = append(p.cuts, cut{bound: m.bound, tangent: tan})
		strict, standing := p.boundRow(m.bound, tan)
		a := make([]float64, e.problem.Columns())
		copy(a, strict)
		a[m.excess] = -1
		if _, err := e.problem.AddRow(convex.Row{Name: "cut of " + m.words, Coefficients: a, Lower: math.Inf(-1), Upper: standing}); err != nil {
			return 0, fmt.Errorf("plan: the programme of the relaxation: %w", err)
		}
		added++
	}
	return added, nil
}
