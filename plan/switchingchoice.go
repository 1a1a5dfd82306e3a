package plan

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"springbound/plan/convex"
)

// switchingNodes bounds the linear programmes of a search over which wells run; fields of fifty wells settle within a few hundred.
const switchingNodes = 5000

// switchingGap is by how much, as a share of the aim, a better choice of running wells may be overlooked: as exact as limits are kept.
const switchingGap = limitTolerance

// proofWells is up to how many switched wells the bound over all choices is proven again with a tree that is kept and recomputed.
const proofWells = 16

// proofNodes bounds that second search.
const proofNodes = 2000

// errUndecided is a search that found no plan and did not show that there is none.
var errUndecided = errors.New("the search over which wells run found no plan and no proof that there is none")

// chooseRunning solves the mixed programme and keeps which wells run. It returns false when no choice keeps every limit.
func (p *planner) chooseRunning(ctx context.Context, g *programme) (possible bool, err error) {
	if p.curved != nil {
		return p.chooseCurved(ctx, g)
	}
	m, err := p.mixed(g)
	if err != nil {
		return false, err
	}
	o := convex.MixedOptions{Gap: switchingGap, NodeLimit: switchingNodes}
	if len(p.lastRates) > 0 {
		o.Start = m.start(p, p.lastRates)
	}
	sol, err := convex.SolveMixed(ctx, m.MixedProblem, o)
	if err != nil {
		return false, fmt.Errorf("plan: the programme of running wells: %w", err)
	}
	p.iterations += sol.Pivots
	p.search.nodes += sol.Nodes
	switch {
	case ctx.Err() != nil:
		return false, ctx.Err()
	case sol.Status == convex.MixedInfeasible:
		return false, nil
	case sol.X == nil:
		return false, fmt.Errorf("%w: it ended as %s after %d programmes", errUndecided, sol.Status, sol.Nodes)
	}
	p.search.proven, p.search.gap, p.search.bound = sol.Status == convex.MixedOptimal, sol.Gap, sol.Bound
	p.search.problem, p.search.plan = m, sol
	p.runs = make([]bool, len(p.setup.Wells))
	for i := range p.setup.Wells {
		if s := p.setup; s.column[i] >= 0 && !p.isOut(i) {
			p.runs[i] = sol.X[s.column[i]] != 0
			if y := m.indicator[i]; y >= 0 {
				p.runs[i] = sol.X[y] > 0.5
			}
		}
	}
	return true, nil
}

// start turns rates into a plan to begin with.
func (m *mixedProgramme) start(p *planner, rates []float64) []float64 {
	x := make([]float64, m.Columns())
	for k, i := range p.setup.decided {
		if p.isOut(i) {
			continue
		}
		x[k] = rates[i]
		if y := m.indicator[i]; y >= 0 && rates[i] != 0 {
			x[y] = 1
		}
	}
	return x
}

// proveRunning searches once more with a tree that is kept, so that the bound over all choices is recomputed from the data. It is
// left out where the tree would be large.
func (p *planner) proveRunning(ctx context.Context) error {
	if p.curved != nil {
		p.proveCurved()
		return nil
	}
	m := p.search.problem
	if m == nil || !p.search.proven || len(m.SemiContinuous)+len(m.Integer) > 2*proofWells {
		return nil
	}
	sol, err := convex.SolveMixed(ctx, m.MixedProblem, convex.MixedOptions{Gap: switchingGap, NodeLimit: proofNodes, Proof: true, Start: p.search.plan.X})
	if err != nil {
		return fmt.Errorf("plan: the programme of running wells: %w", err)
	}
	if ctx.Err() != nil {
		return ctx.Err()
	}
	if sol.Status == convex.MixedOptimal {
		c := convex.CertifyMixed(m.MixedProblem, sol)
		p.search.certified = c.Accepted && c.BoundKnown
	}
	return nil
}

// search is how the choice of running wells came about.
type search struct {
	nodes     int
	proven    bool
	certified bool // the bound was recomputed from the tree
	gap       float64
	bound     float64
	none      bool // no choice keeps every limit although the relaxation would
	leaves    int  // of the tree that proves it
	problem   *mixedProgramme
	plan      *convex.MixedSolution
	tree      *runTree // for an aim that is not linear
}

// atRest names the decided wells that stand still although their least rate or a rule about running wells has to do with them.
func (p *planner) atRest() []string {
	out := []string{}
	ruled := p.ruled()
	for _, i := range p.setup.decided {
		if p.runs != nil && !p.runs[i] && (ruled[i] || p.setup.switched(i)) {
			out = append(out, p.setup.Wells[i].ID)
		}
	}
	return out
}

// switchingResult is the report's section on which wells run; nil when nothing was to be chosen.
func (p *planner) switchingResult() *Switching {
	if p.runs == nil || !p.priced {
		return nil
	}
	r := &Switching{StandStill: p.atRest(), Proven: p.search.proven, Recomputed: p.search.certified, Gap: p.search.gap, Nodes: p.search.nodes, Rules: []string{}}
	if math.IsInf(r.Gap, 0) || math.IsNaN(r.Gap) {
		r.Gap = 1
	}
	for _, rule := range p.setup.rules {
		r.Rules = append(r.Rules, rule.words)
	}
	who := "Every well that may stand still runs."
	if len(r.StandStill) > 0 {
		who = list(r.StandStill) + plural(len(r.StandStill), " stands still.", " stand still.")
	}
	how := "No other choice of running wells is better by more than a ten-millionth of the aim."
	if !r.Proven {
		how = "The search was ended before it was sure: another choice of running wells may be better by up to " + plainNumber(100*r.Gap, 2, 0, 6) + " % of the aim."
	}
	r.Sentence = strings.Join([]string{who, how, "Prices are those at this switching: they say nothing about starting or stopping a well."}, " ")
	return r
}
