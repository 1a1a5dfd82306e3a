package plan

import (
	"context"
	"errors"
	"fmt"

	"springbound/plan/convex"
)

// finish certifies the plan shown, ranges its prices, and writes the report. vertex is the solution of the programme, sol the plan
// taken among those as good.
func (p *planner) finish(ctx context.Context, g *programme, vertex, sol *convex.Solution, rates []float64) (*Report, error) {
	c := convex.Certify(g.problem, sol)
	p.certificate = &c
	if !c.Accepted {
		return p.fail(ctx, fmt.Sprintf("the solution did not pass its check: %s", c.Reason))
	}
	if err := p.proveRunning(ctx); err != nil {
		return nil, err
	}
	if err := p.findRanges(ctx, g, vertex); err != nil {
		return nil, err
	}
	if p.twoPrices() {
		p.setup.cautions.addf("more limits and bounds meet at the plan than fix it: tightening and loosening one of them have different prices")
	}
	if p.notUnique {
		p.setup.cautions.addf("%s", p.tieWords())
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
	p.runs = nil
	p.priced, p.share, p.wellPrice, p.minHolds, p.demandPrice, p.notUnique = false, 0, nil, nil, nil, false
	p.trading = nil
	p.setup.dropDemandPrices()
	p.dropRanges()
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
