package convex

import "context"

// session keeps a scaled problem and its engine, so that a series of solves with changed bounds or costs pays for the scaling once
// and each starts where the last one ended.
type session struct {
	p *Problem
	s *scaled
	e *engine
	q int // entering variable of an unbounded solve
}

// newSession scales p. The session reads p again only to report, so that p must not change meanwhile.
func newSession(p *Problem) *session {
	return newSessionOf(p, scale(p))
}

func newSessionOf(p *Problem, s *scaled) *session {
	return &session{p: p, s: s, e: newEngine(s.matrix, s.cost, s.lower, s.upper)}
}

// setColumn changes the bounds of column j within the session.
func (t *session) setColumn(j int, lower, upper float64) {
	t.s.lower[j], t.s.upper[j] = lower/t.s.col[j], upper/t.s.col[j]
}

// setRow changes the bounds of row i within the session.
func (t *session) setRow(i int, lower, upper float64) {
	v := t.e.n + i
	t.s.lower[v], t.s.upper[v] = lower*t.s.row[i], upper*t.s.row[i]
}

// noCost makes the session ask for feasibility only.
func (t *session) noCost() { clear(t.s.cost) }

// solve runs from the present basis with the given number of pivots at most.
func (t *session) solve(ctx context.Context, pivots int) Status {
	t.e.limit = t.e.iterations + pivots
	copy(t.e.cost, t.s.cost)
	clear(t.e.cost[t.e.n:])
	status, q := t.e.optimise(ctx)
	t.q = q
	return status
}

// value returns the value of column j.
func (t *session) value(j int) float64 { return t.e.x[j] * t.s.col[j] }
