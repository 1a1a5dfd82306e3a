package convex

import (
	"context"
	"errors"
	"fmt"
	"math"
)

// Move is one bound that changes with a parameter.
type Move struct {
	Of   SideOf
	Rate float64 // change of the bound per unit of the parameter [-]
}

// Breakpoint is a corner, or an end, of the optimum as a function of a parameter.
type Breakpoint struct {
	At    float64 // the parameter: for Parametric the bound itself [-]
	Value float64 // the optimum [-]
	// Slope is the slope of the piece to the right; at the last point that of the piece to the left [-]
	Slope float64
	// Binds and Frees list the bounds whose price becomes other than zero, or zero, on passing to the right. At a degenerate optimum
	// they belong to one choice of prices among several. Empty at both ends.
	Binds, Frees []SideOf
}

// Curve is the optimum between two values of a parameter: convex for a minimisation, concave for a maximisation, and linear between
// its points.
type Curve struct {
	// Status is Optimal, or Infeasible when nothing is feasible anywhere between the two values; then Points is empty.
	Status Status
	Points []Breakpoint
	// InfeasibleBefore and InfeasibleAfter tell that the first, or last, point is not the value asked for but where feasibility
	// begins, or ends.
	InfeasibleBefore, InfeasibleAfter bool
	Last                              SideOf // with InfeasibleAfter: the bound that cannot be kept beyond the last point
	// Checked is the largest difference between the curve and a fresh solve at the middle of each piece, relative to the terms of
	// the objective [-]
	Checked float64
}

// pieceAgreement is the difference that the check of a piece allows, relative to the terms of the objective: what Certify allows
// for a gap.
const pieceAgreement = CertifiedGap

// ErrUnbounded tells that the objective can be improved without end.
var ErrUnbounded = errors.New("convex: the objective is unbounded")

// ErrPieceRefused tells that a fresh solve in the middle of a piece did not give the value on the curve.
var ErrPieceRefused = errors.New("convex: a piece of the curve does not agree with a fresh solve")

// Parametric computes the optimum as a function of one bound between two values of that bound. s may be nil, or an optimum of p to
// start from. See ParametricAlong.
func Parametric(ctx context.Context, p *Problem, s *Solution, side SideOf, from, to float64) (*Curve, error) {
	if p.Quadratic() {
		return nil, ErrQuadratic
	}
	if err := checkSide(p, side); err != nil {
		return nil, err
	}
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	if lower, upper := boundsAt(p, side); side.Side == BothSides && lower != upper {
		return nil, fmt.Errorf("convex: Parametric: the %v differ; use ParametricAlong", side)
	}
	l := newBoundLine(p, []Move{{side, 1}}, 0)
	l.start(side, from)
	return l.curve(ctx, s, from, to)
}

// ParametricAlong computes the optimum as a function of a parameter t that moves any number of bounds at once: each bound is its
// value in p plus t times its rate. s may be nil, or an optimum of p to start from.
//
// Method: parametric right-hand sides (Gass & Saaty 1955; Gal 1979) with the programme of rates of Ranges at every breakpoint, so
// that degeneracy cannot stall it. Where nothing is feasible at the beginning the least feasible t is found first. Every piece is
// checked by a solve from nothing at its middle.
//
// The error is ErrQuadratic, or not nil for bounds that do not exist or are infinite, for an empty span, ErrUnbounded, ErrPieceRefused, or a
// *StatusError.
func ParametricAlong(ctx context.Context, p *Problem, s *Solution, moves []Move, from, to float64) (*Curve, error) {
	if p.Quadratic() {
		return nil, ErrQuadratic
	}
	for _, m := range moves {
		if err := checkSide(p, m.Of); err != nil {
			return nil, err
		}
		if !finite(m.Rate) {
			return nil, fmt.Errorf("convex: ParametricAlong: rate %v of the %v is not a finite number", m.Rate, m.Of)
		}
	}
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	return newBoundLine(p, moves, from).curve(ctx, s, from, to)
}

func checkSpan(from, to float64) error {
	if !(from < to && finite(from) && finite(to) && finite(to-from)) {
		return fmt.Errorf("convex: Parametric: from %v to %v is no span of finite numbers", from, to)
	}
	return nil
}

// shift adds the beginning of the span to every parameter and joins points that rounding then makes one.
func (c *Curve) shift(from, to float64) {
	for k := range c.Points {
		c.Points[k].At += from
	}
	if n := len(c.Points); n > 0 && !c.InfeasibleAfter {
		c.Points[n-1].At = to
	}
	kept := c.Points[:0]
	for k, b := range c.Points {
		last := len(kept) - 1
		switch {
		case last < 0 || b.At > kept[last].At:
			kept = append(kept, b)
		case k < len(c.Points)-1:
			kept[last].Slope = b.Slope
			kept[last].Binds, kept[last].Frees = append(kept[last].Binds, b.Binds...), append(kept[last].Frees, b.Frees...)
		case last > 0:
			kept[last].Slope = kept[last-1].Slope
		}
	}
	c.Points = kept
}

// curve follows the optimum from one parameter to another.
func (l *boundLine) curve(ctx context.Context, s *Solution, from, to float64) (*Curve, error) {
	c := &Curve{Status: Optimal}
	l.span = to - from
	start, t, err := l.firstFeasible(ctx, s, l.span)
	if err != nil {
		return nil, err
	}
	if t == nil {
		c.Status = Infeasible
		return c, nil
	}
	c.InfeasibleBefore = start > 0
	if err := c.follow(ctx, newWalk(t), l.moves, start, l.span); err != nil {
		return nil, err
	}
	if err := c.check(ctx, l); err != nil {
		return nil, err
	}
	c.shift(from, to)
	return c, nil
}

// follow walks over all pieces.
func (c *Curve) follow(ctx context.Context, w *walk, moves []Move, start, span float64) error {
	value := func() float64 { return valueOf(w.t.p, w.t.s, w.e) }
	moving := w.setMoves(moves)
	w.begin()
	if !moving {
		c.Points = []Breakpoint{{At: 0, Value: value()}, {At: span, Value: value()}}
		return nil
	}
	end, slope := (span-start)*w.unit, 0.0
	for k := 0; k < w.maxSteps(); k++ {
		if ctx.Err() != nil {
			return &StatusError{"following a curve", Interrupted}
		}
		old := w.priced()
		next, status := w.face(ctx)
		at := start + w.theta/w.unit
		switch {
		case status == Infeasible:
			last := 0.0
			if k > 0 {
				last = w.toUnits(slope)
			}
			c.Points = append(c.Points, Breakpoint{At: at, Value: value(), Slope: plain(last)})
			c.InfeasibleAfter, c.Last = true, w.last
			return nil
		case status != Optimal:
			return &StatusError{"following a curve", status}
		case k == 0:
			c.Points = append(c.Points, Breakpoint{At: at, Value: value(), Slope: plain(w.toUnits(next))})
			slope = next
		case w.differ(next, slope):
			b := Breakpoint{At: at, Value: value(), Slope: plain(w.toUnits(next))}
			b.Binds, b.Frees = w.changes(old)
			c.Points = append(c.Points, b)
			slope = next
		}
		by, _, _ := w.step(w.e)
		if !(w.theta+by < end) {
			w.hit = false
			w.advance(end - w.theta)
			c.Points = append(c.Points, Breakpoint{At: span, Value: value(), Slope: plain(w.toUnits(slope))})
			return nil
		}
		w.advance(by)
	}
	return &StatusError{"following a curve", NumericalTrouble}
}

// priced returns the place of every variable that has a price, Basic for the others.
func (w *walk) priced() []Place {
	list := make([]Place, len(w.e.place))
	for v, p := range w.e.place {
		if p != Basic && math.Abs(w.e.d[v]) > slopeFloor {
			list[v] = p
		}
	}
	return list
}

// changes lists the bounds that have a price now and had none, and the other way round.
func (w *walk) changes(old []Place) (binds, frees []SideOf) {
	name := func(v int, p Place) SideOf {
		if p == AtUpper {
			return w.named(v, UpperSide)
		}
		return w.named(v, LowerSide)
	}
	for v, now := range w.priced() {
		if now == old[v] {
			continue
		}
		if now != Basic {
			binds = append(binds, name(v, now))
		}
		if old[v] != Basic {
			frees = append(frees, name(v, old[v]))
		}
	}
	return binds, frees
}

// check solves at the middle of every piece from nothing.
func (c *Curve) check(ctx context.Context, l *boundLine) error {
	for k := 0; k+1 < len(c.Points); k++ {
		a, b := c.Points[k], c.Points[k+1]
		middle := a.At + (b.At-a.At)/2
		if !(middle > a.At && middle < b.At) {
			continue
		}
		q, ok := l.at(middle)
		if !ok {
			return fmt.Errorf("%w: bounds cross at %v", ErrPieceRefused, middle)
		}
		s, err := Solve(ctx, q, Options{})
		if err != nil {
			return err
		}
		if s.Status == Interrupted || s.Status == IterationLimit {
			return &StatusError{"checking a curve", s.Status}
		}
		if s.Status != Optimal {
			return fmt.Errorf("%w: %v at %v", ErrPieceRefused, s.Status, middle)
		}
		off := math.Abs(s.Objective - (a.Value + (b.Value-a.Value)/2))
		along := math.Abs(s.Objective - (a.Value + a.Slope*(middle-a.At)))
		off = share(math.Max(off, along), objectiveTerms(q, s.X)+math.Abs(a.Slope*(b.At-a.At)))
		c.Checked = largest(c.Checked, off)
		if !(off <= pieceAgreement) {
			return fmt.Errorf("%w: off by %.3g of the objective's terms at %v", ErrPieceRefused, off, middle)
		}
	}
	return nil
}

// objectiveTerms returns the sum of the absolute terms of the objective, or its natural unit where that is larger (see Certify).
func objectiveTerms(p *Problem, x []float64) float64 {
	sum, unit := 0.0, measure(p)
	for j, c := range p.columns {
		sum += math.Abs(c.Cost * x[j])
	}
	return math.Max(sum, unit.worth)
}
