package convex

import (
	"context"
	"fmt"
	"math"
)

// QuadraticRange is a Range of a quadratic programme, whose optimum is made of pieces of parabolas: Left and Right are the slopes at the
// present bound, each changes by its bend per unit of the bound, and [From, At] and [At, To] are where the same set of bounds stays
// active. A side that rounding does not settle is not known; its numbers are then NaN.
type QuadraticRange struct {
	Range
	LeftBend, RightBend   float64 // change of the slope per unit of the bound, on either side [-]
	LeftKnown, RightKnown bool
}

const (
	// rangeReach is the value beyond a bound, per one plus the size of the variable's terms, at which it counts as reached.
	rangeReach = 1e-9
	// rangeSingular is the residual of a solve with the active bounds, relative to its right-hand side, from which they depend on each other.
	rangeSingular = 1e-7
	// rangeDense is the largest system of columns and active rows that is factored.
	rangeDense = 800
)

// rangeSteps are how far a bound is moved, relative to its variable's terms, to see which bounds are active beside a degenerate optimum: from
// well above the tolerance of the solver, the next one where the set changes within.
var rangeSteps = [...]float64{1e-3, 1e-5, 1e-7}

// QuadraticRanges computes, for each group of bounds that move together, the prices to both sides and how far the same bounds stay active. s
// is an optimum of p; the price of a group is that of its common amount, in units of which Move.Rate tells.
//
// Method: with the active set fixed the conditions of Karush, Kuhn and Tucker are linear in the bound, so that values and prices move along
// straight lines until a bound is reached or a price becomes zero (Best 1996, in Applied Mathematics and Parallel Computing). Where the
// optimum is degenerate, the problem is solved a little to the side, and the set found there is taken if it is valid back to the present bound.
//
// Range.Of is the first bound of the group and Range.At its value. The error is ErrNotOptimal, says which bound does not exist or is infinite,
// or is a *StatusError when a solve was stopped.
func QuadraticRanges(ctx context.Context, p *Problem, s *Solution, groups [][]Move) ([]QuadraticRange, error) {
	if s.Status != Optimal {
		return nil, ErrNotOptimal
	}
	for _, g := range groups {
		if len(g) == 0 {
			return nil, fmt.Errorf("convex: a group of bounds that move together is empty")
		}
		for _, m := range g {
			if err := checkSide(p, m.Of); err != nil {
				return nil, err
			}
		}
	}
	here := newActivePiece(p, placesOf(p, s))
	list := make([]QuadraticRange, len(groups))
	for k, g := range groups {
		r := QuadraticRange{Range: Range{Of: g[0].Of, At: boundAt(p, g[0].Of), Value: s.Objective}}
		down, err := oneSide(ctx, p, s, here, g, -1)
		if err != nil {
			return nil, err
		}
		up, err := oneSide(ctx, p, s, here, g, 1)
		if err != nil {
			return nil, err
		}
		r.LeftKnown, r.Left, r.LeftBend, r.From, r.Below = down.known, down.price, down.bend, r.At-down.reach*g[0].Rate, down.end
		if r.LeftKnown && r.RightKnown && math.Abs(r.Left-r.Right) <= rangeSingular*math.Max(math.Abs(r.Left), math.Abs(r.Right)) {
			r.Right = r.Left // the two differ by rounding
		}
		r.RightKnown, r.Right, r.RightBend, r.To, r.Above = up.known, up.price, up.bend, r.At+up.reach*g[0].Rate, up.end
		list[k] = r
	}
	return list, nil
}

// quadraticSide is what one direction of a group of moving bounds finds.
type quadraticSide struct {
	known       bool
	price, bend float64
	reach       float64
	end         End
	crowded     bool // more than one bound is reached at the end
}

func unknownSide() quadraticSide {
	nan := math.NaN()
	return quadraticSide{price: nan, bend: nan, reach: nan}
}

// oneSide ranges a group in one direction: with the active set of the optimum where it holds, else with that of a solve a little to the side.
func oneSide(ctx context.Context, p *Problem, s *Solution, here *activePiece, g []Move, way float64) (quadraticSide, error) {
	if here != nil && here.optimal() {
		if side, ok := here.follow(g, way, 0); ok {
			err := side.lookBeyond(ctx, p, s, g, way)
			return side, err
		}
	}
	scale := sizeOf(p, s, g)
	infeasible := false
	for _, share := range rangeSteps {
		step := share * scale
		moved, ok := movedBy(p, g, way*step)
		if infeasible = !ok; !ok {
			continue
		}
		t, err := Solve(ctx, moved, Options{Start: s.Basis})
		if err != nil {
			return unknownSide(), err
		}
		switch t.Status {
		case Infeasible:
			infeasible = true
			continue
		case Interrupted:
			return unknownSide(), &StatusError{"ranging a price", t.Status}
		case Optimal:
		default:
			return unknownSide(), nil
		}
		beside := newActivePiece(p, placesOf(moved, t))
		if beside == nil {
			continue
		}
		if side, ok := beside.follow(g, way, step); ok && beside.optimal() {
			err := side.lookBeyond(ctx, p, s, g, way)
			return side, err
		}
	}
	if infeasible {
		worst := math.Inf(1)
		if (p.sense == Maximise) != (way < 0) {
			worst = math.Inf(-1)
		}
		return quadraticSide{known: true, price: worst, end: End{Kind: InfeasibleBeyond, Binds: g[0].Of}}, nil
	}
	return unknownSide(), nil
}

// lookBeyond solves once more beyond an end at which several bounds are reached, where only that tells whether anything is feasible.
func (q *quadraticSide) lookBeyond(ctx context.Context, p *Problem, s *Solution, g []Move, way float64) error {
	if !q.crowded || q.end.Kind != SlopeChanges {
		return nil
	}
	moved, ok := movedBy(p, g, way*(q.reach+rangeSteps[1]*sizeOf(p, s, g)))
	if ok {
		t, err := Solve(ctx, moved, Options{Start: s.Basis})
		if err != nil {
			return err
		}
		if t.Status == Interrupted {
			return &StatusError{"ranging a price", t.Status}
		}
		ok = t.Status != Infeasible
	}
	if !ok {
		q.end.Kind, q.end.Leaves = InfeasibleBeyond, false
	}
	return nil
}

// sizeOf is the amount of a group that is as much as the terms of its largest variable.
func sizeOf(p *Problem, s *Solution, g []Move) float64 {
	size := 0.0
	for _, m := range g {
		if m.Rate != 0 {
			size = math.Max(size, spread(p, m.Of, s.X)/math.Abs(m.Rate))
		}
	}
	return size
}

// spread is the size of a variable's terms: that of a row's products, of a column's range.
func spread(p *Problem, side SideOf, x []float64) float64 {
	lower, upper := boundsAt(p, side)
	size := 0.0
	for _, b := range [2]float64{lower, upper} {
		if finite(b) {
			size = math.Max(size, math.Abs(b))
		}
	}
	if side.Column {
		return math.Max(size, math.Abs(x[side.Index]))
	}
	sum := 0.0
	for j, a := range p.row(side.Index) {
		sum += math.Abs(a * x[j])
	}
	if size = math.Max(size, sum); size == 0 {
		size = 1
	}
	return size
}

// movedBy is the problem with the bounds moved; false where a lower bound would pass an upper one.
func movedBy(p *Problem, g []Move, step float64) (*Problem, bool) {
	q := p.Clone()
	for _, m := range g {
		lower, upper := boundsAt(q, m.Of)
		if m.Of.Side != UpperSide {
			lower += step * m.Rate
		}
		if m.Of.Side != LowerSide {
			upper += step * m.Rate
		}
		set := q.SetRowBounds
		if m.Of.Column {
			set = q.SetBounds
		}
		if !(lower <= upper) || set(m.Of.Index, lower, upper) != nil {
			return nil, false
		}
	}
	return q, true
}

// placesOf is the active set of an optimum: the bounds of its basis, and those of equations and fixed columns.
func placesOf(p *Problem, s *Solution) []Place {
	n := p.Columns()
	places := make([]Place, n+p.Rows())
	for v := range places {
		side := SideOf{Column: v < n, Index: v}
		if v >= n {
			side.Index = v - n
		}
		lower, upper := boundsAt(p, side)
		place := Basic
		switch {
		case lower == upper:
			place = AtLower
		case s.Basis == nil:
		case v < n:
			place = s.Basis.Column(v)
		default:
			place = s.Basis.Row(v - n)
		}
		if place == AtZero || place == AtLower && !finite(lower) || place == AtUpper && !finite(upper) {
			place = Basic
		}
		places[v] = place
	}
	return places
}
