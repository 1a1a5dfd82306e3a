package plan

import (
	"context"
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// The ways a report may end.
const (
	StatusOptimal          = "optimal"
	StatusInfeasible       = "infeasible"        // no rates keep every limit; Report.Conflict says why
	StatusNotConverged     = "not_converged"     // rows that are not linear still moved after Options.MaxRounds
	StatusNumericalFailure = "numerical_failure" // the solution did not pass its check
	StatusGivenRates       = "given_rates"       // Evaluate: nothing was optimised
)

// Make plans the rates of the decided wells.
//
// It linearises the aquifer at the present rates, solves the linear programme of the aim (response matrix method: Maddock 1972,
// Water Resources Research 8), and linearises again at the plan. Where every row is linear that second response only supplies the
// re-solved figures. Where a row is not, the tangent at the plan is added as a cut and kept (Kelley 1960, J. SIAM 8), until no
// limit is passed by more than cutTolerance of its size. A limit that bounds a convex row from below is kept by its latest tangent
// instead, which stays on the safe side; the plan is then locally best, and a caution says so.
//
// The limits mean:
//
//   - change: the change that the counted wells cause (cumulative: all; own: those of existing users left out), minus the change of
//     the baseline, is at most or at least the value. Baselines count the same wells: at no pumping, at present rates (blank: 0, with
//     a finding), or existing users at their licences (nothing, when own wells count).
//   - share_of_base: the same, with the value as a share of the undisturbed value's size.
//   - value: undisturbed value minus the change that all wells cause; no baseline, every well counts.
//   - size: |value| of a change, |undisturbed value - value| of a value. A reserve keeps that share of the size back. A limit of size
//     0 is hard: it has no reserve and no share of headroom.
//   - lowest level in a well: the higher of the lowest allowed level and the intake. The turbulent loss C Q|Q| is convex in the rate of
//     a pumping well and kept by cuts too; the plan's levels are checked with the full loss, and a plan that fails is not valid.
//   - yield, demand and quotas count pumped rates only; the first two those of the decided wells.
//
// Several operating states are planned together, as states.go says; the model then answers for each of them (StateModel).
//
// The report is filled but for what only the caller knows (title, inputs, mesh, balances, capture, places on the globe). Its status
// is StatusOptimal or StatusInfeasible when the error is nil. A *DataError comes with no report; a *NumericalError comes with one,
// at the rates where it happened. Work stops between rounds when ctx ends, with its error.
func Make(ctx context.Context, b Brief, m Model, o Options) (*Report, error) {
	if err := o.Validate(); err != nil {
		return nil, err
	}
	if len(b.States) > 1 {
		return makeStates(ctx, b, m, o)
	}
	s, err := newSetup(b)
	if err != nil {
		return nil, err
	}
	if err := s.checkAim(); err != nil {
		return nil, err
	}
	p := &planner{setup: s, oracle: &oracle{setup: s, model: m}}
	start, _ := s.startRates()
	if _, err := p.oracle.linearise(ctx, start); err != nil {
		return nil, err
	}
	if err := p.startCurved(ctx, start); err != nil {
		return nil, err
	}
	if err := p.buildBounds(ctx); err != nil {
		return nil, err
	}
	if err := p.checkSizes(); err != nil {
		return nil, err
	}
	if _, err := p.addCuts(ctx, start, true); err != nil {
		return nil, err
	}
	p.keepProblem = o.Problem != nil
	report, err := p.optimise(ctx, o)
	if report != nil && p.problem != nil {
		o.Problem(p.problem)
	}
	return report, err
}

// checkAim reports an aim that cannot be planned for.
func (s *setup) checkAim() error {
	var faults problemList
	switch s.Aim {
	case MostYield:
	case MostHeadroom:
		if len(s.demands) == 0 {
			faults.addf("the aim %s needs a demand", s.Aim)
		}
	case LeastEnergy:
		s.checkEnergy(&faults)
	case ClosestToRequests:
		s.checkRequests(&faults)
	default:
		faults.addf("no aim %q; the aims are %s, %s, %s and %s", s.Aim, MostYield, MostHeadroom, LeastEnergy, ClosestToRequests)
	}
	if len(s.decided) == 0 {
		faults.addf("no well is up for decision: all are fixed, off or out of service")
	}
	return faults.err()
}

// checkSizes reports most-headroom without a limit whose headroom could be made large.
func (p *planner) checkSizes() error {
	if p.setup.Aim != MostHeadroom {
		return nil
	}
	for _, b := range p.bounds {
		if b.size > 0 {
			return nil
		}
	}
	return &DataError{Problems: []string{"the aim " + string(MostHeadroom) + " needs at least one assessed limit that is not zero"}}
}

// optimise runs the rounds: programme, re-solve, cuts.
func (p *planner) optimise(ctx context.Context, o Options) (*Report, error) {
	var basis *convex.Basis
	last := math.Inf(-1)
	for round := 1; ; round++ {
		if err := ctx.Err(); err != nil {
			return nil, fmt.Errorf("plan: stopped after %d rounds: %w", round-1, err)
		}
		g, err := p.buildRound(ctx)
		switch {
		case ctx.Err() != nil:
			return nil, fmt.Errorf("plan: stopped after %d rounds: %w", round-1, ctx.Err())
		case errors.Is(err, errUndecided):
			return p.fail(ctx, err.Error())
		case err != nil:
			return nil, err
		case g == nil:
			return p.explain(ctx)
		}
		sol, err := p.solve(ctx, g, basis)
		switch {
		case ctx.Err() != nil:
			return nil, fmt.Errorf("plan: stopped after %d rounds: %w", round-1, ctx.Err())
		case sol != nil && sol.Status == convex.Infeasible:
			return p.explain(ctx)
		case err != nil, sol.Status != convex.Optimal:
			return p.fail(ctx, fmt.Sprintf("the programme with %d rows and %d columns ended as %s", g.problem.Rows(), g.problem.Columns(), outcome(sol, err)))
		}
		basis = sol.Basis
		shown, err := p.nearest(ctx, g, sol)
		if err != nil {
			return nil, err
		}
		rates := p.rates(shown.X)
		p.lastRates = rates
		p.readPrices(g, sol)
		if err := p.keep(g, p.search.problem, sol); err != nil {
			return nil, err
		}
		if _, err := p.oracle.linearise(ctx, rates); err != nil {
			return nil, err
		}
		cuts, err := p.addCuts(ctx, rates, false)
		if err != nil {
			return nil, err
		}
		if p.local {
			moved, err := p.moveTangents(ctx, rates, p.aimValue-last)
			if err != nil {
				return nil, err
			}
			cuts += moved
			last, basis = p.aimValue, nil
		}
		if moved, err := p.refreshAim(ctx, rates, sol.X); err != nil {
			return nil, err
		} else if moved {
			cuts++
		}
		if o.Progress != nil {
			o.Progress(Progress{Round: round, Total: p.setup.total(rates), Cuts: cuts})
		}
		if cuts == 0 {
			if o.Firm {
				if p.firm, err = p.firmOf(ctx, rates); err != nil {
					return nil, err
				}
			}
			return p.finish(ctx, g, sol, shown, rates)
		}
		if round == o.rounds() {
			report, err := p.assemble(ctx, rates, StatusNotConverged)
			if err != nil {
				return nil, err
			}
			return report, &NumericalError{Status: StatusNotConverged, Reason: fmt.Sprintf("after %d rounds %d limits on rows that are not linear were still passed", round, cuts)}
		}
	}
}

func outcome(sol *convex.Solution, err error) string {
	if sol == nil || sol.Status == convex.Optimal {
		return err.Error()
	}
	return sol.Status.String()
}

// addCuts adds the tangents at the given rates of the bounds whose true change is not allowed there; at the start, of every bound
// on a row that is not linear. It returns how many it added.
func (p *planner) addCuts(ctx context.Context, rates []float64, start bool) (int, error) {
	added := 0
	for _, b := range p.bounds {
		if b.linear || (!b.kept && !start) || (p.idle(b) && !start) {
			continue
		}
		tan, counted, err := p.oracle.tangentOf(ctx, b, rates)
		if err != nil {
			return 0, err
		}
		if !start && b.slack(tan.at(counted), p.share) >= -cutTolerance*b.scale(p.setup, tan.slope) {
			continue
		}
		if !b.kept {
			p.local = true
		}
		p.cuts = append(p.cuts, cut{bound: b, tangent: tan})
		added++
	}
	return added, nil
}

// localTolerance is the relative gain of the aim below which moving the tangents of bounds from below is not worth another round.
const localTolerance = 1e-9

// moveTangents replaces the tangents of bounds that hold a row from below by those at the given rates. Such a tangent lies below
// the row, so that keeping the tangent keeps the limit, and each round can only improve the aim. It returns 0 when the aim stands.
func (p *planner) moveTangents(ctx context.Context, rates []float64, gain float64) (moved int, err error) {
	for k := range p.cuts {
		c := &p.cuts[k]
		if c.bound.kept {
			continue
		}
		if c.tangent, _, err = p.oracle.tangentOf(ctx, c.bound, rates); err != nil {
			return 0, err
		}
		moved++
	}
	if !(gain > localTolerance*p.aimScale()) {
		moved = 0
	}
	return moved, nil
}

// aimScale is what tolerances on the aim are relative to: 1 for a share, its own value for a curved aim, the largest total of the decided wells for a yield [m³/d].
func (p *planner) aimScale() float64 {
	if p.setup.Aim == MostHeadroom {
		return 1
	}
	if p.curved != nil {
		return math.Abs(p.aimValue)
	}
	sum := 0.0
	for _, i := range p.setup.decided {
		sum += p.setup.weight(i) * p.setup.rateScale(i)
	}
	return sum
}
