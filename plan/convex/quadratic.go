package convex

import "context"

// solveQuadratic chooses the method for a problem with a Hessian.
func solveQuadratic(ctx context.Context, p *Problem, o Options) *Solution {
	c := p.curvature()
	if !c.convex {
		return notConvex(p, c)
	}
	if c.strict {
		if sol := activeOptimum(ctx, p, c.form, o); sol != nil {
			return sol
		}
	}
	sol := interiorOptimum(ctx, p, c.form, o)
	if sol.Status != NumericalTrouble {
		return sol
	}
	if rest := simplexRest(ctx, p, o); rest.Status != NumericalTrouble {
		rest.Iterations += sol.Iterations
		return rest
	}
	return sol
}

// From sparseFrom places on, rows with fewer than sparseShare of them filled are left to the interior method: its sparse factor is
// then much smaller than the dense ones of the active-set method.
const (
	sparseFrom  = 200_000
	sparseShare = 0.05
)

// activeOptimum runs the active-set method. The result is nil when the method does not take the Hessian or came to no trustworthy end.
func activeOptimum(ctx context.Context, p *Problem, h *hessian, o Options) *Solution {
	f := buildForm(p, h, typicalShares[0])
	if f.n*f.m > sparseFrom && float64(len(f.a.val)) < sparseShare*float64(f.n*f.m) {
		return nil
	}
	s := newActiveSet(f)
	if s == nil && len(h.weight) > 0 && f.n <= denseFreeColumns {
		f = buildForm(p, h.assembled(), typicalShares[0])
		s = newActiveSet(f)
	}
	if s == nil {
		return nil
	}
	s.progress, s.limit = o.Progress, o.iterationLimit(f.m, f.n)
	status := s.run(ctx, o.Start)
	switch status {
	case Infeasible:
		if sol := simplexRest(ctx, p, o); sol.Status == Infeasible {
			sol.Iterations += s.iterations
			return sol
		}
		return nil
	case NumericalTrouble:
		return nil
	}
	sol := f.solution(status, s.x, s.y, s.place)
	sol.Iterations = s.iterations
	if status == Optimal {
		sol.PrimalDegenerate = sol.PrimalDegenerate || sol.DualDegenerate // a definite Hessian leaves one plan
		sol.DualDegenerate = false
		if !Certify(p, sol).Accepted {
			return nil
		}
	}
	return sol
}

// simplexRest looks by the simplex method for a proof that the rows and bounds of p cannot be met, or for a direction along which
// its objective improves without end. The status is NumericalTrouble when there is neither.
func simplexRest(ctx context.Context, p *Problem, o Options) *Solution {
	point := p.Clone()
	point.hessian = nil
	for j := range point.columns {
		point.columns[j].Cost = 0
	}
	solve := func(q *Problem) *Solution {
		t := newUndertaking(q)
		t.e.startFromRows()
		return report(t, t.solve(ctx, o.iterationLimit(t.e.rows, t.e.n)))
	}
	s := solve(point)
	switch s.Status {
	case Infeasible:
		if !Certify(p, s).Accepted {
			s.Status, s.Ray = NumericalTrouble, nil
		}
		return s
	case Optimal:
	default:
		return emptySolution(p, s.Status)
	}
	d := solve(recession(p))
	if d.Status != Optimal {
		return emptySolution(p, d.Status)
	}
	out := unboundedSolution(p, s.X, d.X)
	out.Iterations = s.Iterations + d.Iterations
	if !Certify(p, out).Accepted {
		out.Status, out.Ray = NumericalTrouble, nil
	}
	return out
}
