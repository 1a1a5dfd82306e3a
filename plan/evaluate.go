package plan

import (
	"context"
	"fmt"
)

// Evaluate fills the report at given rates, one a well in the order of the brief, without optimising: the same tables as Make's, no
// prices, status StatusGivenRates. Linear rows are superposed; other rows are taken from their tangent at r.At, which never says
// more than the true change, and a caution says so when the rates are not r.At. It panics when the number of rates is wrong; faults
// of the brief, the response or the rates come as a *DataError.
func Evaluate(b Brief, r *Response, rates []float64) (*Report, error) {
	if len(rates) != len(b.Wells) {
		panic("plan: Evaluate: one rate a well is needed")
	}
	s, err := newSetup(b)
	if err != nil {
		return nil, err
	}
	var faults problemList
	for i, q := range rates {
		faults.number(q, "the rate of well %s", b.Wells[i].ID)
	}
	if err := faults.err(); err != nil {
		return nil, err
	}
	first, err := s.align(r)
	if err != nil {
		return nil, err
	}
	p := &planner{setup: s, oracle: &oracle{setup: s, known: []*lines{first}}}
	if err := p.buildBounds(context.Background()); err != nil {
		return nil, err
	}
	for _, row := range append(append([]*Row(nil), first.receptor...), first.well...) {
		if row != nil && !row.Linear {
			s.cautions.addf("rows that are not linear (worst places, features that switch) are taken from their tangent at other rates; the true change may be larger")
			break
		}
	}
	return p.assemble(context.Background(), rates, StatusGivenRates)
}

// assemble writes the report at the given rates.
func (p *planner) assemble(ctx context.Context, rates []float64, status string) (*Report, error) {
	s := p.setup
	resolved, err := p.oracle.linearise(ctx, rates)
	if err != nil {
		return nil, err
	}
	if !sameRates(resolved.at, rates) {
		resolved = nil
	}
	r := &Report{Schema: SchemaName, Version: SchemaVersion, Aim: string(s.Aim), Status: status, ModelValid: true, State: s.state,
		Period: "steady", TotalRate: s.total(rates), Demand: s.demand, NotUnique: p.notUnique, DemandPrice: p.demandPrice, DemandRange: p.demandRange}
	if r.Wells, err = p.wellResults(ctx, rates, resolved); err != nil {
		return nil, err
	}
	if err := p.receptorResults(ctx, rates, resolved, r); err != nil {
		return nil, err
	}
	for k := range s.quotas {
		r.Quotas = append(r.Quotas, s.quotaResult(&s.quotas[k], rates))
	}
	if err := p.levelsByRecharge(ctx, rates, r.Wells); err != nil {
		return nil, err
	}
	r.PumpingEnergy, r.Requests = p.totalEnergy(r), p.totalRequests(r)
	p.worstMargin(r)
	p.audit(r, resolved)
	p.check(r, rates, resolved)
	r.Firm = p.firm
	if r.Switching = p.switchingResult(); r.Switching != nil {
		s.cautions.addf("%s", r.Switching.Sentence)
	}
	if s.expanded != nil {
		s.expanded.headroom, s.expanded.demands = p.share, s.demands
	}
	r.Headline = p.headline(r)
	r.Invalid, r.Cautions, r.Findings, r.NotAssessed = s.invalid, s.cautions, s.findings, s.notAssessed
	r.ModelValid = len(r.Invalid) == 0
	return r, nil
}

// levelsByRecharge adds cautions for lowest levels that hold only because a well recharges.
func (p *planner) levelsByRecharge(ctx context.Context, rates []float64, results []WellResult) error {
	for i, k := range p.boundOfWell {
		if k < 0 || results[i].LevelMargin == nil || *results[i].LevelMargin < 0 {
			continue
		}
		if _, err := p.heldByRecharge(ctx, p.bounds[k], rates); err != nil {
			return err
		}
	}
	return nil
}

// worstMargin finds the smallest headroom as a share of its limit's size, lowest levels in running wells included.
func (p *planner) worstMargin(r *Report) {
	s := p.setup
	take := func(share float64, words string) {
		if r.WorstMargin == nil || share < *r.WorstMargin {
			r.WorstMargin, r.WorstLimit = &share, words
		}
	}
	next := make([]int, len(r.Receptors)) // the limits of a receptor stand in the brief's order
	for _, l := range s.Limits {
		i := s.receptorIndex[l.Receptor]
		result := r.Receptors[i].Limits[next[i]]
		next[i]++
		if result.RoomShare != nil {
			take(*result.RoomShare, s.limitWords(l))
		}
	}
	for i, k := range p.boundOfWell {
		if k >= 0 && r.Wells[i].LevelMargin != nil && p.bounds[k].size > 0 && !(r.Wells[i].Rate == 0 && s.switched(i)) {
			take(tidy(*r.Wells[i].LevelMargin/p.bounds[k].size), s.levelWords(i))
		}
	}
}

// headline is the first sentence of the report.
func (p *planner) headline(r *Report) string {
	s := p.setup
	switch r.Status {
	case StatusOptimal:
		text := "Largest total rate that keeps the limits entered: " + flowText(r.TotalRate) + "."
		if s.Aim == MostHeadroom {
			text = "Rates that keep the largest share of every limit free at a total of " + flowText(r.TotalRate) + ": at least " +
				percentText(p.share) + " beyond each reserve."
			if p.share >= mostHeadroom {
				text = "Rates for a total of " + flowText(r.TotalRate) + ": no limit that has a size concerns the wells that run."
			}
		}
		switch s.Aim {
		case LeastEnergy:
			text = p.energyHeadline(r)
		case ClosestToRequests:
			text = requestHeadline(r)
		}
		if assessed, all := countAssessed(r); assessed < all {
			text += fmt.Sprintf(" Of %d limits entered, %d are assessed.", all, assessed)
		}
		if len(s.invalid) > 0 {
			text = "The plan is not valid: " + s.invalid[0] + ". " + text
		}
		return text
	case StatusInfeasible:
		return "No rates keep every limit entered. The table shows " + p.shownRates() + ", not a plan."
	case StatusNotConverged:
		return "No plan: the rounds did not settle. The table shows the rates of the last round."
	case StatusNumericalFailure:
		return "No plan: the solution did not pass its check. The table shows " + p.shownRates() + "."
	}
	passed := 0
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.Passed {
				passed++
			}
		}
	}
	text := "Given rates, not a plan: a total of " + flowText(r.TotalRate) + " "
	if passed == 0 {
		return text + "keeps the receptors' limits that were assessed."
	}
	return text + fmt.Sprintf("passes %d of the receptors' limits.", passed)
}

// countAssessed counts the receptors' limits, and those of them that the plan was made to keep.
func countAssessed(r *Report) (assessed, all int) {
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			all++
			if l.ResultState == "yes" {
				assessed++
			}
		}
	}
	return assessed, all
}

// shownRates says what the table shows where there is no plan.
func (p *planner) shownRates() string {
	if _, present := p.setup.startRates(); present {
		return "present pumping"
	}
	return "the state with the wells up for decision at rest"
}
