package convex

import (
	"context"
	"math"
)

// mixedRounding is what the gap may exceed the one asked for by and still count as met: what Certify grants to a limit.
const mixedRounding = CertifiedPrimal

// conclude turns the end of a search into an answer in the sense of the problem.
func conclude(ctx context.Context, p *MixedProblem, s *search, did Tightenings) *MixedSolution {
	sign := 1.0
	if p.sense == Maximise {
		sign = -1
	}
	out := &MixedSolution{Nodes: s.nodes, Cuts: len(s.cuts), Presolve: did, Stopped: s.stopped, Objective: math.NaN(), Gap: math.Inf(1)}
	bound := s.leastBound(nil)
	if s.stopped != 0 && s.nodes == 0 {
		bound = s.rootBound
	}
	bound = math.Min(math.Min(bound, s.excluded)+s.c.offset, s.best.value)
	switch {
	case s.endless:
		s.concludeEndless(ctx, out)
	case s.best.x != nil:
		s.concludePlan(ctx, out)
	case s.stopped != 0:
		out.Status = MixedUndecided
	default:
		out.Status = MixedInfeasible
	}
	out.Pivots = s.pivots() + s.best.pivot
	if out.Linear != nil {
		out.Pivots += out.Linear.Iterations
	}
	out.proof = s.proof
	if out.Status == MixedInfeasible || out.Status == MixedUnbounded {
		return out
	}
	if out.X != nil {
		v := sign * out.Objective
		bound = math.Min(bound, v)
		out.Gap = share(v-bound, s.best.sizeOf(out.X, v))
		if out.Status == MixedFeasible && out.Gap <= s.o.Gap+mixedRounding {
			out.Status = MixedOptimal
		}
	}
	out.Bound = plain(sign * bound)
	return out
}

// concludePlan solves the linear programme at the switching of the best plan, from the data as given.
func (s *search) concludePlan(ctx context.Context, out *MixedSolution) {
	b := s.best
	out.Status = MixedFeasible
	out.Switching = b.switching(b.x)
	out.X = b.x
	var sum twofold
	take := func() {
		sum = twofold{}
		for j, v := range out.X {
			sum.addProduct(b.p.columns[j].Cost, v)
		}
		out.Objective = plain(sum.value())
	}
	take()
	linear, err := Solve(context.WithoutCancel(ctx), out.Switching, Options{})
	if err == nil && linear.Status == Optimal && b.meets(linear.X) {
		out.Linear, out.X = linear, linear.X
		take()
	} else if s.stopped == 0 {
		s.stopped, out.Stopped = NumericalTrouble, NumericalTrouble
	}
	if !math.IsInf(s.unresolved, 1) && s.unresolved+s.c.offset < b.value && s.stopped == 0 {
		s.stopped, out.Stopped = NumericalTrouble, NumericalTrouble
	}
}

// concludeEndless looks for any plan: with one, the endless direction of the relaxation makes the problem unbounded, since for
// data that are ratios of whole numbers, as all numbers in a computer are, a multiple of the direction is whole (Meyer 1974).
func (s *search) concludeEndless(ctx context.Context, out *MixedSolution) {
	q := &MixedProblem{Problem: s.best.p.Problem.Clone(), Integer: s.best.p.Integer, SemiContinuous: s.best.p.SemiContinuous}
	for j := range q.columns {
		q.columns[j].Cost = 0
	}
	any, err := SolveMixed(ctx, q, MixedOptions{NodeLimit: s.o.NodeLimit})
	if err != nil {
		out.Status = MixedUndecided
		return
	}
	out.Nodes += any.Nodes
	out.Stopped = any.Stopped
	switch any.Status {
	case MixedInfeasible:
		out.Status = MixedInfeasible
	case MixedUndecided:
		out.Status = MixedUndecided
	default:
		out.Status, out.X, out.Stopped = MixedUnbounded, any.X, 0
		if relaxed, err := Solve(ctx, s.best.c.problem(nil), Options{}); err == nil {
			out.Direction = relaxed.Ray
		}
		var sum twofold
		for j, v := range out.X {
			sum.addProduct(s.best.p.columns[j].Cost, v)
		}
		out.Objective = plain(sum.value())
		out.Bound = math.Inf(1)
		if s.best.p.sense == Minimise {
			out.Bound = math.Inf(-1)
		}
	}
}
