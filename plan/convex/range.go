package convex

import (
	"context"
	"errors"
	"fmt"
	"math"
)

// BothSides stands for both bounds of a row or column, moved together: the right-hand side of an equation.
const BothSides Side = 0

// SideOf names a bound of a row or of a column, or both bounds with BothSides.
type SideOf struct {
	Column bool // a column; otherwise a row
	Index  int
	Side   Side
}

// String names the bound, as in "upper bound of row 3".
func (s SideOf) String() string {
	kind, side := partRow, "both bounds"
	if s.Column {
		kind = partColumn
	}
	if s.Side != BothSides {
		side = s.Side.String() + " bound"
	}
	return fmt.Sprintf("%s of %s %d", side, kind, s.Index)
}

// EndKind says why a slope of the optimum holds no further.
type EndKind int

// The kinds of end.
const (
	Endless          EndKind = iota + 1 // the slope holds for ever
	SlopeChanges                        // the optimum goes on with another slope
	InfeasibleBeyond                    // nothing is feasible beyond
)

// String returns the name of the kind.
func (k EndKind) String() string {
	switch k {
	case Endless:
		return "endless"
	case SlopeChanges:
		return "slope changes"
	case InfeasibleBeyond:
		return "infeasible beyond"
	}
	return fmt.Sprintf("EndKind(%d)", int(k))
}

// End is one end of the interval over which a slope holds.
type End struct {
	Kind EndKind
	// Binds is the bound that is reached there and forces the change; no meaning for Endless. Where several are reached at once it
	// is the one that takes the largest part in the change.
	Binds SideOf
	// Leaves tells that Binds is left there, its price at zero, and not reached; quadratic programmes only.
	Leaves bool
}

// Range is what the optimum does when one bound moves: v(b) is concave for a maximisation, convex for a minimisation, and made of
// straight pieces. Left holds on [From, At] and Right on [At, To]; where the two are equal the one slope holds on all of
// [From, To]. Both are properties of v, not of a basis: a degenerate optimum does not change them.
//
// A slope is an infinity when nothing is feasible on that side of the present bound; the interval on that side is then empty.
type Range struct {
	Of    SideOf
	At    float64 // the present bound [-]
	Value float64 // the present optimum [-]
	Left  float64 // slope of v just below the bound: what the last unit of it is worth [-]
	Right float64 // slope of v just above the bound: what one more unit of it is worth [-]
	From  float64 // -Inf when Left holds for ever [-]
	To    float64 // +Inf when Right holds for ever [-]
	Below End     // what ends Left at From
	Above End     // what ends Right at To
}

// Kink tells that the price to the left differs from the price to the right.
func (r Range) Kink() bool { return r.Left != r.Right }

// ErrNotOptimal tells that a function was given a solution that is not an optimum of the problem.
var ErrNotOptimal = errors.New("convex: the solution is not optimal")

// StatusError carries the status of a solve inside another function that stopped it.
type StatusError struct {
	Doing  string
	Status Status
}

// Error says what stopped, and how.
func (e *StatusError) Error() string { return fmt.Sprintf("convex: %s: %v", e.Doing, e.Status) }

// AllSides lists every bound of p that is finite, rows first. Where the two are equal they are listed once, as BothSides.
func AllSides(p *Problem) []SideOf {
	var list []SideOf
	add := func(column bool, i int, lower, upper float64) {
		if lower == upper {
			list = append(list, SideOf{column, i, BothSides})
			return
		}
		for _, b := range sidesOf(i, lower, upper) {
			list = append(list, SideOf{column, i, b.Side})
		}
	}
	for i := range p.rowName {
		add(false, i, p.rowLower[i], p.rowUpper[i])
	}
	for j, c := range p.columns {
		add(true, j, c.Lower, c.Upper)
	}
	return list
}

// ErrQuadratic tells that a problem has a quadratic objective, whose optimum is not made of straight pieces.
var ErrQuadratic = errors.New("convex: the objective is quadratic; slopes, curves and ties are those of linear programmes")

// PriceRange is Ranges for one bound.
func PriceRange(ctx context.Context, p *Problem, s *Solution, side SideOf) (Range, error) {
	list, err := Ranges(ctx, p, s, []SideOf{side})
	if err != nil {
		return Range{}, err
	}
	return list[0], nil
}

// Ranges computes, for each of the given bounds, the slopes of the optimum to both sides and how far each holds. s is an optimum of
// p; only its basis is used, to start from.
//
// Method: the slope in a direction is the optimum of the linear programme of the rates of change, with the bounds that are reached
// at the present point; its dual ranges over all optimal prices, so that degeneracy does not matter (Gal 1979; Jansen, de Jong,
// Roos & Terlaky 1997). With that basis the bound moves until another one is reached, and so on until the slope changes. Where the
// first basis is right at once and its next pivot changes the prices for certain nothing has to be solved again.
//
// The error is ErrNotOptimal, ErrQuadratic, says which bound does not exist or is infinite, or is a *StatusError when a solve was stopped.
func Ranges(ctx context.Context, p *Problem, s *Solution, sides []SideOf) ([]Range, error) {
	if p.Quadratic() {
		return nil, ErrQuadratic
	}
	for _, side := range sides {
		if err := checkSide(p, side); err != nil {
			return nil, err
		}
	}
	t, err := restart(ctx, p, s)
	if err != nil {
		return nil, err
	}
	w := newWalk(t)
	value := valueOf(t.p, t.s, t.e)
	list := make([]Range, len(sides))
	for k, side := range sides {
		r := Range{Of: side, At: boundAt(p, side), Value: value}
		if err := w.both(ctx, &r); err != nil {
			return nil, err
		}
		list[k] = r
	}
	return list, nil
}

// checkSide tells what is wrong with a bound that is to move.
func checkSide(p *Problem, s SideOf) error {
	most := p.Rows()
	if s.Column {
		most = p.Columns()
	}
	switch {
	case s.Index < 0 || s.Index >= most:
		return fmt.Errorf("convex: there is no %v among %d", s, most)
	case s.Side != LowerSide && s.Side != UpperSide && s.Side != BothSides:
		return fmt.Errorf("convex: %v is no side", s.Side)
	}
	lower, upper := boundsAt(p, s)
	if (s.Side != UpperSide && !finite(lower)) || (s.Side != LowerSide && !finite(upper)) {
		return fmt.Errorf("convex: the %v is infinite and cannot move", s)
	}
	return nil
}

// boundsAt returns both bounds of the row or column.
func boundsAt(p *Problem, s SideOf) (lower, upper float64) {
	if s.Column {
		return p.columns[s.Index].Lower, p.columns[s.Index].Upper
	}
	return p.rowLower[s.Index], p.rowUpper[s.Index]
}

// boundAt returns the bound, the lower one for BothSides.
func boundAt(p *Problem, s SideOf) float64 {
	lower, upper := boundsAt(p, s)
	if s.Side == UpperSide {
		return upper
	}
	return lower
}

// restart solves p again from the basis of s, which costs a factorisation and no pivots when s is its optimum.
func restart(ctx context.Context, p *Problem, s *Solution) (*undertaking, error) {
	if s.Status != Optimal {
		return nil, ErrNotOptimal
	}
	t := newUndertaking(p)
	t.e.start(s.Basis)
	switch status := t.solve(ctx, Options{}.iterationLimit(t.e.rows, t.e.n)); status {
	case Optimal:
		return t, nil
	case Infeasible, Unbounded:
		return nil, ErrNotOptimal
	default:
		return nil, &StatusError{"solving again from a basis", status}
	}
}

// valueOf returns the objective in the units of p.
func valueOf(p *Problem, s *scaled, e *engine) float64 {
	var sum twofold
	for j, c := range p.columns {
		if x := e.x[j]; x != 0 {
			sum.addProduct(c.Cost, x*s.col[j])
		}
	}
	return plain(sum.value())
}

// both fills a range with the walks to both sides.
func (w *walk) both(ctx context.Context, r *Range) error {
	down, err := w.oneWay(ctx, r.Of, -1)
	if err != nil {
		return err
	}
	up, err := w.oneWay(ctx, r.Of, 1)
	if err != nil {
		return err
	}
	r.Left, r.From, r.Below = plain(-down.slope), plain(down.at), down.end
	r.Right, r.To, r.Above = plain(up.slope), plain(up.at), up.end
	worse := 1.0
	if w.t.p.sense == Maximise {
		worse = -1
	}
	if down.closed {
		r.Left = math.Inf(-int(worse))
	}
	if up.closed {
		r.Right = math.Inf(int(worse))
	}
	if !down.closed && !up.closed && !w.differ(down.scaled, -up.scaled) {
		r.Left = r.Right
	}
	return nil
}
