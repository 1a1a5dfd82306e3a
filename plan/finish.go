package plan

import (
	"context"
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// finish certifies the last solution, looks for other plans as good, and writes the report.
func (p *planner) finish(ctx context.Context, g *programme, sol *convex.Solution, rates []float64) (*Report, error) {
	c := convex.Certify(g.problem, sol)
	p.certificate = &c
	if !c.Accepted {
		return p.fail(ctx, fmt.Sprintf("the solution did not pass its check: %s", c.Reason))
	}
	if sol.PrimalDegenerate {
		p.setup.cautions.addf("more limits and bounds meet at the plan than fix it: what loosening one of them is worth may be less than its price says")
	}
	if sol.DualDegenerate {
		other, err := p.hasOther(ctx, g, sol)
		if err != nil {
			return nil, err
		}
		p.notUnique = other
	}
	return p.assemble(ctx, rates, StatusOptimal)
}

// fail returns a report at the start rates with the status of a numerical failure, and its error.
func (p *planner) fail(ctx context.Context, reason string) (*Report, error) {
	p.unprice()
	start, _ := p.setup.startRates()
	report, err := p.assemble(ctx, start, StatusNumericalFailure)
	return report, errors.Join(&NumericalError{Status: StatusNumericalFailure, Reason: reason}, err)
}

// unprice forgets the prices of a programme whose rates are not shown.
func (p *planner) unprice() {
	p.priced, p.share, p.wellPrice, p.minHolds, p.demandPrice, p.notUnique = false, 0, nil, nil, nil, false
	for _, b := range p.bounds {
		b.price = 0
	}
	for k := range p.setup.quotas {
		p.setup.quotas[k].price = 0
	}
}

// priceTolerance is the price that counts as none, as a share of the aim per range of the row or column: ten times what the
// solver leaves.
const priceTolerance = 1e-8

// otherTolerance is the difference between two plans' rates from which they count as different, as a share of the range.
const otherTolerance = 1e-6

// hasOther tells whether another plan is as good as the one found. On the optimal face every row and bound with a price stays where
// it is (Mangasarian 1979, Linear Algebra and its Applications 25); the plan found is a corner, so that any other plan of the face
// leaves one of the corner's rows and bounds without a price, and making the sum of these distances large finds it.
func (p *planner) hasOther(ctx context.Context, g *programme, sol *convex.Solution) (bool, error) {
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
		return false, fmt.Errorf("plan: the programme of plans as good: %w", err)
	}
	other, err := convex.Solve(ctx, face, convex.Options{Start: sol.Basis})
	if err != nil {
		return false, fmt.Errorf("plan: the programme of plans as good: %w", err)
	}
	p.iterations += other.Iterations
	if other.Status != convex.Optimal {
		return true, nil
	}
	for j := range p.setup.decided {
		if !(math.Abs(other.X[j]-sol.X[j]) <= otherTolerance*scale[j]) {
			return true, nil
		}
	}
	return false, nil
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
