package plan

import (
	"context"
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// nearest takes, of the plans as good as the one found, the one nearest to the present rates: least squares over the decided wells,
// each scaled by its largest rate, a blank present rate taken as zero (convex.Nearest). Prices are those of the programme and hold
// for all of them. Where the choice fails, the plan found is shown and the report says that the choice was not made.
func (p *planner) nearest(ctx context.Context, g *programme, sol *convex.Solution) (*convex.Solution, error) {
	p.notUnique, p.trading, p.tieChosen = false, nil, false
	if !sol.DualDegenerate || g.problem.Quadratic() {
		return sol, nil
	}
	s := p.setup
	start, _ := s.startRates()
	target, scale := append([]float64(nil), sol.X...), make([]float64, len(sol.X))
	for j := range scale {
		scale[j] = 1
		if j < len(s.decided) {
			target[j] = start[s.decided[j]]
			if size := s.rateScale(s.decided[j]); size > 0 {
				scale[j] = size
			}
		}
	}
	tie, err := convex.Nearest(ctx, g.problem, sol, target, scale)
	if ctx.Err() != nil {
		return nil, fmt.Errorf("plan: stopped among plans as good: %w", ctx.Err())
	}
	if err != nil {
		other, err := p.otherPlan(ctx, g, sol)
		if err != nil {
			return nil, err
		}
		p.trading = p.differing(sol.X, other)
		p.notUnique = len(p.trading) > 0
		return sol, nil
	}
	if tie.Unique {
		return sol, nil
	}
	if p.trading = p.differing(tie.Solution.X, tie.Other); len(p.trading) == 0 {
		other, err := p.otherPlan(ctx, g, sol)
		if err != nil {
			return nil, err
		}
		if p.trading = p.differing(tie.Solution.X, other); len(p.trading) == 0 {
			return sol, nil
		}
	}
	p.notUnique, p.tieChosen = true, true
	return tie.Solution, nil
}

// differing names the decided wells whose rates differ in another plan.
func (p *planner) differing(x, other []float64) []string {
	var names []string
	if other == nil {
		return nil
	}
	for j, i := range p.setup.decided {
		if !(math.Abs(other[j]-x[j]) <= otherTolerance*p.setup.rateScale(i)) {
			names = append(names, p.setup.Wells[i].ID)
		}
	}
	return names
}

// tieWords is the caution of a plan that is one of several as good.
func (p *planner) tieWords() string {
	text := "other plans are as good: " + list(p.trading) + plural(len(p.trading), " could run at another rate", " could trade places")
	if !p.tieChosen {
		return text + "; the choice among them was not made"
	}
	return text + "; of equally good plans the one nearest to the present rates is shown"
}

// twoPrices tells whether some limit that holds the plan is worth more to one side than to the other.
func (p *planner) twoPrices() bool {
	differ := func(r *PriceRange) bool {
		return r != nil && r.Looser != nil && r.Tighter != nil && *r.Looser != *r.Tighter
	}
	ranges := []*PriceRange{p.demandRange}
	for _, d := range p.setup.demands {
		ranges = append(ranges, d.priceRange)
	}
	for _, b := range p.bounds {
		if b.linear && (b.size > 0 || b.reserve == 0) {
			ranges = append(ranges, b.priceRange)
		}
	}
	for k := range p.setup.quotas {
		ranges = append(ranges, p.setup.quotas[k].priceRange)
	}
	for _, r := range ranges {
		if differ(r) {
			return true
		}
	}
	return false
}

// otherTolerance is the difference between two plans' rates from which they count as different, as a share of the range.
const otherTolerance = 1e-6

// otherPlan returns another plan as good as the one found, or nil. On the optimal face every row and bound with a price stays where
// it is (Mangasarian 1979, Linear Algebra and its Applications 25); the plan found is a corner, so that any other plan of the face
// leaves one of the corner's rows and bounds without a price, and making the sum of these distances large finds it.
func (p *planner) otherPlan(ctx context.Context, g *programme, sol *convex.Solution) ([]float64, error) {
	face := g.problem.Clone()
	n := face.Columns()
	scale := make([]float64, n)
	for j := range scale {
		scale[j] = 1
		if j < len(p.setup.decided) && p.setup.rateScale(p.setup.decided[j]) > 0 {
			scale[j] = p.setup.rateScale(p.setup.decided[j])
		}
	}
	aim := p.aimScale()
	cost := make([]float64, n)
	var errs []error
	for j := range cost {
		c := face.Column(j)
		switch {
		case math.Abs(sol.ReducedCost[j])*scale[j] > priceTolerance*aim:
			errs = append(errs, face.SetBounds(j, sol.X[j], sol.X[j]))
		case sol.X[j] == c.Lower:
			cost[j] += 1 / scale[j]
		case sol.X[j] == c.Upper:
			cost[j] -= 1 / scale[j]
		}
	}
	errs = append(errs, faceRows(face, sol, scale, aim, cost))
	for j, c := range cost {
		errs = append(errs, face.SetCost(j, c))
	}
	if err := errors.Join(errs...); err != nil {
		return nil, fmt.Errorf("plan: the programme of plans as good: %w", err)
	}
	other, err := convex.Solve(ctx, face, convex.Options{Start: sol.Basis})
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of plans as good: %w", err)
	}
	p.iterations += other.Iterations
	if other.Status != convex.Optimal {
		return nil, nil
	}
	return other.X, nil
}

// faceRows holds the rows with a price at their bounds, and adds to cost the distance from the bounds that are reached without one.
func faceRows(face *convex.Problem, sol *convex.Solution, scale []float64, aim float64, cost []float64) error {
	var errs []error
	for i := 0; i < face.Rows(); i++ {
		r := face.Row(i)
		size := 0.0
		for j, a := range r.Coefficients {
			size = math.Max(size, math.Abs(a)*scale[j])
		}
		atUpper := sol.RowValue[i] >= r.Upper-priceTolerance*size
		atLower := sol.RowValue[i] <= r.Lower+priceTolerance*size
		priced := math.Abs(sol.RowPrice[i])*size > priceTolerance*aim
		switch {
		case !atUpper && !atLower, size == 0:
		case priced && atUpper:
			errs = append(errs, face.SetRowBounds(i, r.Upper, r.Upper))
		case priced:
			errs = append(errs, face.SetRowBounds(i, r.Lower, r.Lower))
		case atUpper && atLower:
		default:
			way := -1.0
			if atLower {
				way = 1
			}
			for j, a := range r.Coefficients {
				cost[j] += way * a / size
			}
		}
	}
	return errors.Join(errs...)
}
