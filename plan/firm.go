package plan

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sort"

	"springbound/plan/convex"
)

// Firm capacity: what the field gives with one well out of service.
//
// For each well in turn the largest total that keeps every limit is planned without it, the demand left out, so that the total says
// by how much a demand is met or missed. The response is the same: an outage holds a rate at zero, and drops the lowest level of the
// well that is out.

// firmWells is up to how many pumping wells each is taken out in turn; above it, the ten that pump the most.
const firmWells, firmLargest = 40, 10

// firmCurved is the same where rows are not linear: every round then takes a solve of the aquifer, ten wells of a field of thirty about two
// seconds at 20,000 nodes where features switch.
const firmCurved = 10

// firmRounds bounds the rounds of one outage where rows are not linear; the cuts of the plan are there already.
const firmRounds = 20

// Firm returns the firm capacity of a brief. Errors are those of Make.
func Firm(ctx context.Context, b Brief, m Model, o Options) (*FirmCapacity, error) {
	o.Firm = true
	r, err := Make(ctx, b, m, o)
	if err != nil {
		return nil, err
	}
	return r.Firm, nil
}

// firmCapacity plans with every well in service and with each one out. rates are those of the plan: they say which wells are the largest.
func (p *planner) firmCapacity(ctx context.Context, rates []float64) (*FirmCapacity, error) {
	s := *p.setup
	s.Aim, s.demand, s.demands = MostYield, nil, nil
	q := &planner{setup: &s, oracle: p.oracle, bounds: p.bounds, boundOfLimit: p.boundOfLimit, boundOfWell: p.boundOfWell,
		cuts: append([]cut(nil), p.cuts...), lastRates: rates}
	all, err := q.outage(ctx, -1, nil)
	switch {
	case ctx.Err() != nil:
		return nil, err
	case err != nil || all == nil:
		return nil, nil
	}
	out := &FirmCapacity{AllInService: all.total, Lines: []FirmLine{}}
	pumping, recharging := p.outages(rates)
	out.Note = "each well up for decision that pumps, one at a time"
	most := firmWells
	if !q.linearRows() {
		most = firmCurved
	}
	if len(pumping) > most {
		pumping = pumping[:min(most, firmLargest)]
		out.Note = fmt.Sprintf("the %d wells that pump the most, one at a time", len(pumping))
	}
	for _, i := range append(pumping, recharging...) {
		one, err := q.outage(ctx, i, all.basis)
		switch {
		case ctx.Err() != nil:
			return nil, err
		case err != nil:
			out.Note += "; without " + s.Wells[i].ID + " not settled: " + err.Error()
			continue
		}
		line := FirmLine{Well: s.Wells[i].ID, Recharges: rates[i] < 0, Binds: []string{}}
		if one != nil {
			line.Feasible, line.Settled, line.Binds = true, one.settled, one.binds
			total := one.total
			change := tidy(total - all.total)
			line.Total, line.Change = &total, &change
		}
		if !line.Recharges && (out.Well == "" || !line.Feasible || (out.Total != nil && line.Total != nil && *line.Total < *out.Total)) {
			out.Well, out.Total = line.Well, line.Total
		}
		out.Lines = append(out.Lines, line)
	}
	return out, nil
}

// outages lists the decided wells that pump, largest first, and the wells that recharge.
func (p *planner) outages(rates []float64) (pumping, recharging []int) {
	for i := range rates {
		switch {
		case rates[i] > 0 && p.setup.isYield(i):
			pumping = append(pumping, i)
		case rates[i] < 0:
			recharging = append(recharging, i)
		}
	}
	sort.SliceStable(pumping, func(a, b int) bool { return rates[pumping[a]] > rates[pumping[b]] })
	return pumping, recharging[:min(len(recharging), firmLargest)]
}

// linearRows tells whether every row of the response is linear, so that no further state has to be solved.
func (p *planner) linearRows() bool {
	for _, list := range [][]*Row{p.oracle.known[0].receptor, p.oracle.known[0].well} {
		for _, row := range list {
			if row != nil && !row.Linear {
				return false
			}
		}
	}
	return true
}

// outageOutcome is the plan with one well out.
type outageOutcome struct {
	total   float64
	binds   []string
	settled bool
	basis   *convex.Basis
}

// outage plans the largest total with well i out of service, -1: none. It returns nil when no rates keep every limit.
func (p *planner) outage(ctx context.Context, i int, basis *convex.Basis) (*outageOutcome, error) {
	standing := p.setup.standing
	defer func() { p.setup.standing, p.outOfService = standing, nil }()
	p.outOfService = nil
	if i >= 0 {
		p.outOfService = make([]bool, len(p.setup.Wells))
		p.outOfService[i] = true
		p.setup.standing = append([]float64(nil), standing...)
		p.setup.standing[i] = 0
	}
	for round := 1; ; round++ {
		g, sol, err := p.solveOutage(ctx, basis)
		switch {
		case ctx.Err() != nil:
			return nil, fmt.Errorf("plan: stopped while planning without one well: %w", ctx.Err())
		case err == nil && g == nil:
			return nil, nil
		case err != nil:
			return nil, fmt.Errorf("plan: the programme without one well: %w", err)
		case sol.Status == convex.Interrupted:
			return nil, fmt.Errorf("plan: stopped while planning without one well: %w", ctx.Err())
		case sol.Status != convex.Optimal:
			return nil, nil
		}
		basis = sol.Basis
		rates := p.rates(sol.X)
		cuts, err := p.addCuts(ctx, rates, false)
		if err != nil {
			return nil, err
		}
		if cuts == 0 || round == firmRounds {
			return &outageOutcome{total: p.setup.total(rates), binds: p.binding(g, sol), settled: cuts == 0 && !p.local, basis: basis}, nil
		}
	}
}

// solveOutage solves the programme of the present outage from a basis. The programme is nil where no choice of running wells keeps every
// limit.
func (p *planner) solveOutage(ctx context.Context, basis *convex.Basis) (*programme, *convex.Solution, error) {
	if !p.setup.switches() {
		return p.inService.solve(ctx, p, basis)
	}
	g, err := p.buildRound(ctx)
	if err != nil || g == nil {
		return nil, nil, err
	}
	sol, err := convex.Solve(ctx, g.problem, convex.Options{Start: basis})
	if err == nil && sol.Status == convex.NumericalTrouble {
		sol, err = convex.Solve(ctx, g.problem, convex.Options{})
	}
	return g, sol, err
}

// inService keeps the programme with every well in service. An outage holds a rate at zero and lets go the lowest level of the well:
// bounds only, so that each starts from the factors and the scales of the last. Cuts ask for a programme written anew.
type inService struct {
	g      *programme
	solver *convex.Solver
	cuts   int // in the programme
}

// solve changes the bounds for the present outage, solves from a basis and changes them back.
func (k *inService) solve(ctx context.Context, p *planner, basis *convex.Basis) (*programme, *convex.Solution, error) {
	if k.g == nil || k.cuts != len(p.cuts) {
		out := p.outOfService
		p.outOfService, p.runs = nil, nil
		g, err := p.build(true)
		p.outOfService = out
		if err != nil {
			return nil, nil, err
		}
		k.g, k.cuts, k.solver = g, len(p.cuts), convex.NewSolver(g.problem)
	}
	if err := k.take(p, true); err != nil {
		return nil, nil, err
	}
	sol, err := k.solver.Solve(ctx, convex.Options{Start: basis})
	return k.g, sol, errors.Join(err, k.take(p, false))
}

// take takes the wells that are out of service out of the solver's programme, or puts them back.
func (k *inService) take(p *planner, out bool) error {
	if p.outOfService == nil {
		return nil
	}
	var errs []error
	for j, i := range p.setup.decided {
		if !p.isOut(i) {
			continue
		}
		c := k.g.problem.Column(j)
		if out {
			c.Lower, c.Upper = p.rangeOf(i)
		}
		errs = append(errs, k.solver.SetBounds(j, c.Lower, c.Upper))
	}
	for r, o := range k.g.owners {
		if o.kind != ofBound || !p.idle(p.bounds[o.index]) {
			continue
		}
		upper := math.Inf(1)
		if !out {
			upper = k.g.problem.Row(r).Upper
		}
		errs = append(errs, k.solver.SetRowBounds(r, math.Inf(-1), upper))
	}
	return errors.Join(errs...)
}

// binding names what holds the total: limits, levels and quotas with a price; largest rates where nothing else has one.
func (p *planner) binding(g *programme, sol *convex.Solution) []string {
	out, seen := []string{}, map[string]bool{}
	scale := p.aimScale()
	for r, o := range g.owners {
		if sol.RowPrice[r] == 0 {
			continue
		}
		size := p.rowSize(g, r)
		if name := g.name[r]; math.Abs(sol.RowPrice[r])*size > priceTolerance*scale && !seen[name] {
			seen[name] = true
			if o.kind != ofDemand {
				out = append(out, name)
			}
		}
	}
	if len(out) == 0 {
		out = append(out, "the wells' largest rates")
	}
	return out
}

// rowSize is the largest change that one decided well causes in a row; it is kept for the next outage.
func (p *planner) rowSize(g *programme, r int) float64 {
	for len(g.size) <= r {
		g.size = append(g.size, math.NaN())
		g.name = append(g.name, "")
	}
	if math.IsNaN(g.size[r]) {
		row, size := g.problem.Row(r), 0.0
		for k, i := range p.setup.decided {
			size = math.Max(size, math.Abs(row.Coefficients[k])*p.setup.rateScale(i))
		}
		g.size[r], g.name[r] = size, row.Name
	}
	return g.size[r]
}

// checkFirm judges the demand with one well out of service.
func (p *planner) checkFirm(r *Report, add func(name, result, detail string)) {
	const name = "Demand with the largest well out of service"
	f, demand := p.firm, p.setup.firmDemand()
	switch {
	case f == nil || len(f.Lines) == 0:
		add(name, notDone, "one plan is computed, with the wells that the brief has in service")
		return
	case f.Well == "":
		add(name, notDone, "no well up for decision pumps")
		return
	case f.Total == nil:
		add(name, failed, "with "+f.Well+" out of service no rates keep every limit")
		return
	}
	detail := "with " + f.Well + " out of service, the well whose loss costs the most, the others give " + flowText(*f.Total)
	switch {
	case demand == nil:
		add(name, notDone, "no demand is stated; "+detail)
	case *f.Total >= *demand*(1-limitTolerance):
		add(name, pass, detail+" for a demand of "+flowText(*demand))
	default:
		add(name, failed, detail+", short of the demand of "+flowText(*demand)+" by "+flowText(*demand-*f.Total))
	}
}
