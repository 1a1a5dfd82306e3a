package convex

import "context"

// solveQuadratic chooses the method for a problem with a Hessian.
func solveQuadratic(ctx context.Context, p *Problem, o Options) *Solution {
	c := p.curvature()
	if !c.convex {
		return notConvex(p, c)
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

// simplexRest looks by the simplex method for a proof that the rows and bounds of p cannot be met, or for a direction along which
// its objective improves without end. The status is NumericalTrouble when there is neither.
func simplexRest(ctx context.Context, p *Problem, o Options) *Solution {
	point := p.Clone()
	point.hessian = nil
	for j := range point.columns {
		point.columns[j].Cost = 0
	}
	solve := func(q *Problem) *Solution {
		t := newSession(q)
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
