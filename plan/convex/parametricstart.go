package convex

import (
	"context"
	"math"
)

const (
	// firstNudge is the first step beyond the computed beginning of feasibility, relative to the span, when rounding leaves nothing
	// feasible there; further ones are ten times as long, nudges at most.
	firstNudge = 1e-13
	nudges     = 5
	// meeting is how far, relative to their size, two moving bounds may cross where they meet: rounding of base plus rate times
	// parameter.
	meeting = 1e-14
	// atZero is the size of a moving bound, relative to how far it moves over the span, that is rounding of zero. As a bound it would
	// be taken for the size of all bounds.
	atZero = 1e-14
)

// boundLine is a problem with bounds that move along a line, theta units from where it begins.
type boundLine struct {
	moves       []Move
	base        *Problem // its bounds may cross
	rows, cols  []boundRate
	span        float64  // largest theta, when known
	atParameter *Problem // scratch
}

// boundRate is the change of two bounds per unit of theta.
type boundRate struct{ lower, upper float64 }

// newBoundLine begins the line at the given parameter: bounds of p plus parameter times rate.
func newBoundLine(p *Problem, moves []Move, from float64) *boundLine {
	l := &boundLine{moves: moves, base: p.Clone(), rows: make([]boundRate, p.Rows()), cols: make([]boundRate, p.Columns())}
	for _, m := range moves {
		r := &l.rows
		if m.Of.Column {
			r = &l.cols
		}
		if m.Of.Side != UpperSide {
			(*r)[m.Of.Index].lower += m.Rate
		}
		if m.Of.Side != LowerSide {
			(*r)[m.Of.Index].upper += m.Rate
		}
	}
	l.atParameter = p.Clone()
	l.move(l.base, from)
	return l
}

// start puts the bound of a side where the line begins.
func (l *boundLine) start(side SideOf, v float64) {
	lower, upper := l.bounds(l.base, side.Column, side.Index)
	if side.Side != UpperSide {
		*lower = v
	}
	if side.Side != LowerSide {
		*upper = v
	}
}

// bounds points to the bounds of a row or column.
func (l *boundLine) bounds(p *Problem, column bool, i int) (lower, upper *float64) {
	if column {
		return &p.columns[i].Lower, &p.columns[i].Upper
	}
	return &p.rowLower[i], &p.rowUpper[i]
}

// move gives q the bounds at theta and tells whether they are in order.
func (l *boundLine) move(q *Problem, theta float64) bool {
	ordered := true
	each := func(column bool, rates []boundRate) {
		for i, r := range rates {
			if r == (boundRate{}) {
				continue
			}
			baseLower, baseUpper := l.bounds(l.base, column, i)
			lower, upper := l.bounds(q, column, i)
			*lower, *upper = *baseLower, *baseUpper
			l.carry(lower, theta, r.lower)
			l.carry(upper, theta, r.upper)
			if *lower > *upper && *lower-*upper <= meeting*(math.Abs(*lower)+math.Abs(*upper)) {
				*upper = *lower
			}
			ordered = ordered && *lower <= *upper
		}
	}
	each(false, l.rows)
	each(true, l.cols)
	return ordered
}

// carry moves one bound.
func (l *boundLine) carry(bound *float64, theta, rate float64) {
	if rate == 0 {
		return
	}
	*bound += theta * rate
	if math.Abs(*bound) <= atZero*l.span*math.Abs(rate) {
		*bound = 0
	}
}

// at returns the problem at theta, which is valid until the next call; false when its bounds cross.
func (l *boundLine) at(theta float64) (*Problem, bool) {
	return l.atParameter, l.move(l.atParameter, theta)
}

// solve solves at theta.
func (l *boundLine) solve(ctx context.Context, theta float64, start *Basis) (*undertaking, Status) {
	q, ok := l.at(theta)
	if !ok {
		return nil, Infeasible
	}
	t := newUndertaking(q)
	t.e.start(start)
	return t, t.solve(ctx, Options{}.iterationLimit(t.e.rows, t.e.n))
}

// firstFeasible returns the least theta in [0, span] at which anything is feasible and a solved undertaking there; no undertaking when
// there is none.
func (l *boundLine) firstFeasible(ctx context.Context, s *Solution, span float64) (float64, *undertaking, error) {
	var start *Basis
	if s != nil {
		start = s.Basis
	}
	t, status := l.solve(ctx, 0, start)
	if status == Optimal {
		return 0, t, nil
	}
	if status != Infeasible {
		return 0, nil, startError(status)
	}
	theta, status := l.leastFeasible(ctx, span)
	if status == Infeasible {
		return 0, nil, nil
	}
	if status != Optimal {
		return 0, nil, startError(status)
	}
	for k, by := 0, 0.0; k <= nudges; k++ {
		at := math.Min(theta+by*span, span)
		t, status = l.solve(ctx, at, nil)
		if status == Optimal {
			return at, t, nil
		}
		if status != Infeasible {
			break
		}
		by = math.Max(firstNudge, 10*by)
	}
	if status == Infeasible {
		status = NumericalTrouble
	}
	return 0, nil, startError(status)
}

func startError(status Status) error {
	if status == Unbounded {
		return ErrUnbounded
	}
	return &StatusError{"solving at the beginning of a curve", status}
}

// leastFeasible makes theta a column, in units of the span, and asks for its least value.
func (l *boundLine) leastFeasible(ctx context.Context, span float64) (float64, Status) {
	n := l.base.Columns()
	columns := append(append([]Column(nil), l.base.columns...), Column{Cost: 1, Upper: 1})
	var list []Row
	add := func(a []float64, lower, upper float64, r boundRate) {
		extended := func(rate float64) []float64 { return append(append(make([]float64, 0, n+1), a...), -rate*span) }
		if r.lower == r.upper {
			list = append(list, Row{Coefficients: extended(r.lower), Lower: lower, Upper: upper})
			return
		}
		list = append(list, Row{Coefficients: extended(r.lower), Lower: lower, Upper: math.Inf(1)},
			Row{Coefficients: extended(r.upper), Lower: math.Inf(-1), Upper: upper})
	}
	for i, r := range l.rows {
		add(l.base.row(i), l.base.rowLower[i], l.base.rowUpper[i], r)
	}
	for j, r := range l.cols {
		columns[j].Cost = 0
		if r == (boundRate{}) {
			continue
		}
		a := make([]float64, n)
		a[j] = 1
		add(a, columns[j].Lower, columns[j].Upper, r)
		columns[j].Lower, columns[j].Upper = math.Inf(-1), math.Inf(1)
	}
	p, err := NewProblem(Minimise, columns)
	if err != nil {
		return 0, NumericalTrouble
	}
	for _, r := range list {
		if r.Lower > r.Upper {
			return 0, Infeasible // two bounds that cross and move alike
		}
		if _, err := p.AddRow(r); err != nil {
			return 0, NumericalTrouble
		}
	}
	s, err := Solve(ctx, p, Options{})
	if err != nil {
		return 0, NumericalTrouble
	}
	return s.X[n] * span, s.Status
}
