package plan

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// elastic asks by how much members give way. Where no wells may be off convex.Relaxer answers, which takes ends of ranges for bounds
// of columns; otherwise, and where rounding stops it, one programme with a column for each side of a member's row by which that side gives
// way, in shares of the member's size: columns that may not give way are held at zero, and each solve starts where the last one ended.
type elastic struct {
	strict  *convex.MixedProblem
	members []member
	relaxer *convex.Relaxer // nil: none

	problem *convex.MixedProblem // nil: not written yet
	first   int                  // the first column of relaxation
	owner   []int                // the member of each column of relaxation
	basis   *convex.Basis
}

func newElastic(strict *convex.MixedProblem, members []member) (*elastic, error) {
	e := &elastic{strict: strict, members: members, first: strict.Columns()}
	if len(strict.Integer) > 0 {
		return e, e.write()
	}
	list := make([]convex.Relaxable, len(members))
	for k, m := range members {
		list[k].Row = m.row
		if m.effect > 0 {
			list[k].LowerWeight, list[k].UpperWeight = 1/m.effect, 1/m.effect
		}
	}
	var err error
	if e.relaxer, err = convex.NewRelaxer(strict.Problem, list); err != nil {
		return nil, fmt.Errorf("plan: the programme of the relaxation: %w", err)
	}
	return e, nil
}

// write writes the programme with a column for each side.
func (e *elastic) write() error {
	strict := e.strict
	memberOfRow := map[int]int{}
	for k, m := range e.members {
		memberOfRow[m.row] = k
	}
	var columns []convex.Column
	whole := append([]int(nil), strict.Integer...)
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
				effect[entry{i, len(columns)}] = side.way * e.members[k].effect
				columns = append(columns, convex.Column{Name: "relaxation of " + e.members[k].words, Cost: 1, Upper: math.Inf(1)})
				if e.members[k].wells > 0 {
					whole = append(whole, len(columns)-1)
				}
				e.owner = append(e.owner, k)
			}
		}
	}
	problem, err := convex.NewProblem(convex.Minimise, columns)
	if err != nil {
		return fmt.Errorf("plan: the programme of the relaxation: %w", err)
	}
	e.problem = &convex.MixedProblem{Problem: problem, Integer: whole}
	for i := 0; i < strict.Rows(); i++ {
		r := strict.Row(i)
		a := make([]float64, len(columns))
		copy(a, r.Coefficients)
		for c := range e.owner {
			a[e.first+c] = effect[entry{i, e.first + c}]
		}
		r.Coefficients = a
		if _, err := e.problem.AddRow(r); err != nil {
			return fmt.Errorf("plan: the programme of the relaxation: %w", err)
		}
	}
	return nil
}

// addRow adds a row over the columns of the conflict's programme.
func (e *elastic) addRow(r convex.Row) error {
	_, err := e.strict.AddRow(r)
	if err == nil && e.relaxer != nil {
		err = e.relaxer.AddRow(r)
	}
	if err == nil && e.problem != nil {
		a := make([]float64, e.problem.Columns())
		copy(a, r.Coefficients)
		r.Coefficients = a
		_, err = e.problem.AddRow(r)
	}
	if err != nil {
		return fmt.Errorf("plan: the programme of the relaxation: %w", err)
	}
	return nil
}

// each returns the relaxation of every listed member when it alone gives way, as a share of its size; +Inf where that does not do.
func (e *elastic) each(ctx context.Context, p *planner, list []int) ([]float64, error) {
	shares := make([]float64, len(list))
	linear := e.relaxer != nil
	for _, m := range e.members {
		linear = linear && (m.bound == nil || m.bound.linear)
	}
	if linear {
		before := e.relaxer.Iterations()
		weighted, _, status := e.relaxer.Alone(ctx, list)
		p.iterations += e.relaxer.Iterations() - before
		switch status {
		case convex.Interrupted:
			return nil, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
		case convex.Optimal:
			for n, share := range weighted {
				if shares[n] = share; !(share > relaxedShare) {
					shares[n] = 0
				}
			}
			return shares, nil
		}
	}
	for n, k := range list {
		alone, possible, err := e.relax(ctx, p, func(other int) bool { return other == k })
		if err != nil {
			return nil, err
		}
		if shares[n] = alone[k]; !possible {
			shares[n] = math.Inf(1)
		}
	}
	return shares, nil
}

// relax returns the least total relaxation of the members that take part, as shares of their sizes, and false when no relaxation of
// them would do. Cuts that it needs are added to the planner's and to the programme.
func (e *elastic) relax(ctx context.Context, p *planner, takes func(k int) bool) (shares []float64, possible bool, err error) {
	for round := 1; ; round++ {
		var x []float64
		var status convex.Status
		shares, x, status, err = e.least(ctx, p, takes)
		switch {
		case err != nil:
			return nil, false, err
		case status == convex.Interrupted:
			return nil, false, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
		case status == convex.Infeasible:
			return shares, false, nil
		case status != convex.Optimal:
			p.setup.cautions.addf("rounding left part of the explanation open: relaxations may be missing from it")
			e.basis = nil
			return make([]float64, len(e.members)), false, nil
		}
		for k, share := range shares {
			if !(share > relaxedShare) {
				shares[k] = 0
			}
		}
		added, err := e.addCuts(ctx, p, shares, x)
		if err != nil {
			return nil, false, err
		}
		if added == 0 || round == defaultRounds {
			return shares, true, nil
		}
	}
}

// least solves for the least total relaxation of the members that take part, and the columns of the conflict's programme there.
func (e *elastic) least(ctx context.Context, p *planner, takes func(k int) bool) (shares, x []float64, status convex.Status, err error) {
	shares = make([]float64, len(e.members))
	if e.relaxer != nil {
		before := e.relaxer.Iterations()
		r := e.relaxer.Least(ctx, takes)
		p.iterations += e.relaxer.Iterations() - before
		if r.Status == convex.Optimal {
			for k, row := range r.Rows {
				if m := e.members[k]; m.effect > 0 {
					shares[k] = (row.Lower + row.Upper) / m.effect
				}
			}
		}
		if r.Status != convex.NumericalTrouble && r.Status != convex.IterationLimit {
			return shares, r.X, r.Status, nil
		}
	}
	if e.problem == nil {
		if err := e.write(); err != nil {
			return nil, nil, 0, err
		}
	}
	for c, k := range e.owner {
		upper := 0.0
		if takes(k) {
			upper = math.Inf(1)
			if n := e.members[k].wells; n > 0 {
				upper = float64(n)
			}
		}
		if err := e.problem.SetBounds(e.first+c, 0, upper); err != nil {
			return nil, nil, 0, fmt.Errorf("plan: the programme of the relaxation: %w", err)
		}
	}
	sol, err := e.solve(ctx)
	if err != nil {
		return nil, nil, 0, fmt.Errorf("plan: the programme of the relaxation: %w", err)
	}
	if sol.Status == convex.Optimal {
		p.iterations += sol.Iterations
		e.basis = sol.Basis
		for c, k := range e.owner {
			shares[k] += sol.X[e.first+c]
		}
	}
	return shares, sol.X, sol.Status, nil
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
		if m.runs > 0 && x[m.runs] < 0.5 {
			continue
		}
		if m.bound.slack(tan.at(counted), 0)+shares[k]*m.effect >= -relaxedTolerance*m.bound.scale(s, tan.slope) {
			continue
		}
		p.cuts = append(p.cuts, cut{bound: m.bound, tangent: tan})
		strict, standing := p.boundRow(m.bound, tan)
		a := make([]float64, e.strict.Columns())
		copy(a, strict)
		a[m.excess] = -1
		if m.runs > 0 {
			a[m.runs], standing = m.free, standing+m.free
		}
		if err := e.addRow(convex.Row{Name: "cut of " + m.words, Coefficients: a, Lower: math.Inf(-1), Upper: standing}); err != nil {
			return 0, err
		}
		added++
	}
	return added, nil
}

// relaxationNodes bounds a search for the least relaxation; where it ends there, the best one found is shown.
const relaxationNodes = 1000

// solve runs the programme from the last basis; where wells may be off it is a search, and its end is told as that of a programme.
func (e *elastic) solve(ctx context.Context) (*convex.Solution, error) {
	if len(e.problem.Integer) > 0 {
		mixed, err := convex.SolveMixed(ctx, e.problem, convex.MixedOptions{Gap: relaxedTolerance, NodeLimit: relaxationNodes})
		if err != nil {
			return nil, err
		}
		sol := &convex.Solution{Status: convex.Infeasible, X: mixed.X, Iterations: mixed.Pivots}
		switch {
		case ctx.Err() != nil:
			sol.Status = convex.Interrupted
		case mixed.X != nil:
			sol.Status = convex.Optimal
		case mixed.Status != convex.MixedInfeasible:
			sol.Status = convex.NumericalTrouble
		}
		return sol, nil
	}
	sol, err := convex.Solve(ctx, e.problem.Problem, convex.Options{Start: e.basis})
	if err == nil && e.basis != nil && (sol.Status == convex.NumericalTrouble || sol.Status == convex.IterationLimit) {
		sol, err = convex.Solve(ctx, e.problem.Problem, convex.Options{})
	}
	return sol, err
}
