package plan

import (
	"context"

	"springbound/plan/convex"
)

// Prices of an aim that is not linear move along with the limit: a range then says what the first unit is worth, and up to which value the
// same limits hold the plan.

// PriceMoves is PriceRange.HoldsFor of such prices; for a cubic aim they are also those of the last quadratic problem.
const (
	PriceMoves    = "the same limits, along which the price moves"
	lastQuadratic = "the last quadratic problem"
)

// askQuadratic ranges the prices of a quadratic programme and hands them on; what rounding does not settle to both sides stays unknown.
func (p *planner) askQuadratic(ctx context.Context, g *programme, r *rangeProgramme, sides []convex.SideOf, take []func(convex.Range)) error {
	groups := make([][]convex.Move, len(sides))
	for k, side := range sides {
		groups[k] = []convex.Move{{Of: side, Rate: 1}}
		if side.Column || g.owners[side.Index].kind != ofBound {
			continue
		}
		for i, o := range g.owners { // all tangents of one bound move together
			if i != side.Index && o == g.owners[side.Index] {
				groups[k] = append(groups[k], convex.Move{Of: convex.SideOf{Index: i, Side: side.Side}, Rate: 1})
			}
		}
	}
	ranges, err := convex.QuadraticRanges(ctx, r.problem, r.solution, groups)
	if err != nil {
		return err
	}
	for k, x := range ranges {
		if x.LeftKnown && x.RightKnown {
			take[k](x.Range)
		}
	}
	return nil
}

// curvedHolds is what ranges of an aim that is not linear are conditional on.
func (p *planner) curvedHolds() []string {
	switch {
	case p.curved == nil:
		return nil
	case p.curved.quadratic():
		return []string{PriceMoves}
	}
	return []string{PriceMoves, lastQuadratic}
}

// upTo begins the part of a sentence about how far a price holds.
func (p *planner) upTo() string {
	switch {
	case p.curved == nil:
		return ", up to "
	case p.curved.quadratic():
		return " at first, with the same limits up to "
	}
	return " at first, with the same limits up to about "
}
