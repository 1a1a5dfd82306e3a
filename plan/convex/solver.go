package convex

import "context"

// Solver keeps a linear programme in its scales and the basis of its last solve, so that a series of solves with other bounds, a well
// lost or a limit moved, pays for the setup once and each starts where the last one ended.
type Solver struct {
	p *Problem
	t *undertaking
}

// NewSolver copies p. It panics when p has a Hessian, for which Solve with Options.Start is the way.
func NewSolver(p *Problem) *Solver {
	if p.hessian != nil {
		panic("convex: NewSolver: the problem has a Hessian")
	}
	s := &Solver{p: p.Clone()}
	s.t = newUndertaking(s.p)
	s.t.e.startFromRows()
	return s
}

// SetBounds changes the bounds of column j. It panics when there is no such column.
func (s *Solver) SetBounds(j int, lower, upper float64) error {
	if err := s.p.SetBounds(j, lower, upper); err != nil {
		return err
	}
	s.t.setColumn(j, lower, upper)
	return nil
}

// SetRowBounds changes the bounds of row i. It panics when there is no such row.
func (s *Solver) SetRowBounds(i int, lower, upper float64) error {
	if err := s.p.SetRowBounds(i, lower, upper); err != nil {
		return err
	}
	s.t.setRow(i, lower, upper)
	return nil
}

// Solve solves the problem with its present bounds, from the basis of the last solve or from Options.Start when given. The answer is as
// good as that of the function Solve, by the same methods; where rounding stands in the way, that function is asked.
func (s *Solver) Solve(ctx context.Context, o Options) (*Solution, error) {
	if err := o.Validate(); err != nil {
		return nil, err
	}
	s.t.e.progress = o.Progress
	if o.Start != nil {
		s.t.e.start(o.Start)
	}
	before := [2]int{s.t.e.iterations, s.t.e.primalIterations}
	out := s.t.answer(ctx, o)
	out.Iterations -= before[0]
	out.Primal -= before[1]
	if out.Status == NumericalTrouble {
		return Solve(ctx, s.p, o)
	}
	return out, nil
}
