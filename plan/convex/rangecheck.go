package convex

import (
	"context"
	"fmt"
	"math"
)

const (
	// rangeAgreement is the difference that CheckRange allows between a line and a fresh solve, relative to the terms of the
	// objective: what Certify allows for a gap.
	rangeAgreement = CertifiedGap
	// farBeyond is where CheckRange looks along a slope that holds for ever: this many times the present bound, or its natural unit.
	farBeyond = 10
	// justBeyond is the step beyond an end, relative to the length of the interval or the bound, at which feasibility is asked.
	justBeyond = 1e-6
	// searches bounds the steps of the search for the true end; each one leaves a piece of the optimum behind.
	searches = 200
)

// CheckRange confirms a range by solving from nothing: at the present bound and along both intervals, where the optimum must lie on
// the line, and beyond each end, where nothing may be feasible, or where the supporting line must meet the first one at the end. The
// error names what does not agree.
func CheckRange(ctx context.Context, p *Problem, r Range) error {
	if err := checkSide(p, r.Of); err != nil {
		return err
	}
	l := newBoundLine(p, []Move{{r.Of, 1}}, 0)
	c := rangeCheck{l: l, r: r}
	if err := c.expect(ctx, 0, 0); err != nil {
		return err
	}
	if err := c.side(ctx, -1, r.At-r.From, r.Left, r.Below); err != nil {
		return fmt.Errorf("below: %w", err)
	}
	if err := c.side(ctx, 1, r.To-r.At, r.Right, r.Above); err != nil {
		return fmt.Errorf("above: %w", err)
	}
	return nil
}

type rangeCheck struct {
	l *boundLine
	r Range
}

// look is the outcome of one solve.
type look struct {
	feasible bool
	value    float64
	price    float64 // of the moved bounds
	off      float64 // distance from the line
	allowed  float64 // distance that is rounding
}

// solve solves with the bound moved by the given amount and compares with the line.
func (c *rangeCheck) solve(ctx context.Context, by, slope float64) (look, error) {
	q, ordered := c.l.at(by)
	if !ordered {
		return look{}, nil
	}
	s, err := Solve(ctx, q, Options{})
	switch {
	case err != nil:
		return look{}, err
	case s.Status == Infeasible:
		return look{}, nil
	case s.Status != Optimal:
		return look{}, &StatusError{"checking a range", s.Status}
	}
	k := look{feasible: true, value: s.Objective}
	k.off = math.Abs(s.Objective - (c.r.Value + slope*by))
	k.allowed = rangeAgreement * (objectiveTerms(q, s.X) + math.Abs(c.r.Value) + math.Abs(slope*by))
	of, price, place := c.r.Of, 0.0, Basic
	if of.Column {
		price, place = s.ReducedCost[of.Index], s.Basis.Column(of.Index)
	} else {
		price, place = s.RowPrice[of.Index], s.Basis.Row(of.Index)
	}
	lower, upper := boundsAt(q, of)
	if lower == upper || of.Side == BothSides || (place == AtUpper) == (of.Side == UpperSide) {
		k.price = price
	}
	return k, nil
}

// expect asks for the optimum to be on the line.
func (c *rangeCheck) expect(ctx context.Context, by, slope float64) error {
	k, err := c.solve(ctx, by, slope)
	if err == nil && !(k.feasible && k.off <= k.allowed) {
		err = fmt.Errorf("convex: %v at %v: optimum %v (feasible: %v), the range says %v", c.r.Of, c.r.At+by, k.value, k.feasible, c.r.Value+slope*by)
	}
	return err
}

// side checks the interval of the given length on one side.
func (c *rangeCheck) side(ctx context.Context, sign, length, slope float64, end End) error {
	r, unit := c.r, math.Abs(c.r.At)
	if unit == 0 {
		unit = 1
	}
	if end.Kind == Endless {
		return c.expect(ctx, sign*farBeyond*unit, slope)
	}
	if length > 0 {
		for _, f := range []float64{0.5, 1 - justBeyond} {
			if err := c.expect(ctx, f*sign*length, slope); err != nil {
				return err
			}
		}
	}
	further := math.Max(length, unit)
	k, err := c.solve(ctx, sign*(length+justBeyond*further), 0)
	if err != nil {
		return err
	}
	if k.feasible != (end.Kind == SlopeChanges) {
		return fmt.Errorf("convex: %v beyond %v: feasible: %v, the range says %v", r.Of, r.At+sign*length, k.feasible, end.Kind)
	}
	if end.Kind == SlopeChanges {
		return c.corner(ctx, sign, length, slope, further)
	}
	return nil
}

// corner looks for the end of a slope from beyond: the supporting line at a point off the line meets the line nearer to the end,
// and at the end itself once the point lies on the next piece (Eisner & Severance 1976).
func (c *rangeCheck) corner(ctx context.Context, sign, length, slope, further float64) error {
	by, price, found := sign*(length+further), 0.0, false
	for n := 0; n < searches; n++ {
		k, err := c.solve(ctx, by, slope)
		switch {
		case err != nil:
			return err
		case !k.feasible:
			by = (by + sign*length) / 2
			continue
		case k.off <= k.allowed:
			if apart := math.Abs(by-sign*length) * math.Abs(price-slope); !found || !(apart <= 2*k.allowed) {
				return fmt.Errorf("convex: %v: slope %v goes on beyond %v to %v", c.r.Of, slope, c.r.At+sign*length, c.r.At+by)
			}
			return nil
		case k.price == slope:
			return fmt.Errorf("convex: %v: the optimum at %v is off the line with the same slope", c.r.Of, c.r.At+by)
		}
		found, price = true, k.price
		by = (k.value - price*by - c.r.Value) / (slope - price)
	}
	return fmt.Errorf("convex: %v: no end of the slope found near %v", c.r.Of, c.r.At+sign*length)
}
