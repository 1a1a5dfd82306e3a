package plan

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"

	"springbound/plan/convex"
)

// Which wells run.
//
// A well whose range leaves zero out is off or within it (a semi-continuous column). Rules about which wells run (at most so many,
// together, at most one of a group) need a column y, 1 where the well runs and 0 where it is off, with
//
//	x <= Max y,  x >= Min y                     (recharge: the same with the signs turned)
//	sum y <= N         at most N run
//	sum y - k z = 0    k wells together, z in {0, 1}
//	sum y <= 1         at most one of a group
//
// The mixed programme finds which wells run; the plan, its prices and its certificate are those of the linear programme with the
// standing wells held at zero and the running ones within their ranges.

// switchingNodes bounds the linear programmes of a search over which wells run; fields of fifty wells settle within a few hundred.
const switchingNodes = 5000

// switchingGap is by how much, as a share of the aim, a better choice of running wells may be overlooked: as exact as limits are kept.
const switchingGap = limitTolerance

// proofWells is up to how many switched wells the bound over all choices is proven again with a tree that is kept and recomputed.
const proofWells = 16

// proofNodes bounds that second search.
const proofNodes = 2000

// runningRule is a rule about which wells run.
type runningRule struct {
	kind   ruleKind
	words  string
	wells  []int // with a column
	most   float64
	source string
}

type ruleKind int

const (
	atMostRunning ruleKind = iota
	runTogether
	runExcluding
)

// readRules looks up the rules about which wells run. Wells that the plan does not decide count as they stand.
func (s *setup) readRules(faults *problemList) {
	if !s.linearAim() && (s.AtMostRunning != nil || len(s.Together)+len(s.Exclude) > 0) {
		faults.addf("rules about which wells run need the aim %s or %s", MostYield, MostHeadroom)
		return
	}
	if n := s.AtMostRunning; n != nil {
		switch {
		case *n < 0:
			faults.addf("at most %d wells running: the number is below zero", *n)
		default:
			r := runningRule{kind: atMostRunning, most: float64(*n), source: "brief"}
			for i := range s.Wells {
				if s.isYield(i) {
					r.wells = append(r.wells, i)
				}
			}
			r.words = fmt.Sprintf("at most %d of the %d wells up for decision pump", *n, len(r.wells))
			if *n < len(r.wells) {
				s.rules = append(s.rules, r)
			}
		}
	}
	for k, g := range s.Together {
		s.readGroup(faults, runTogether, "wells that run together", k, g)
	}
	for k, g := range s.Exclude {
		s.readGroup(faults, runExcluding, "wells that exclude each other", k, g)
	}
}

func (s *setup) readGroup(faults *problemList, kind ruleKind, what string, k int, g WellGroup) {
	what = fmt.Sprintf("%s, group %d", what, k+1)
	r := runningRule{kind: kind, source: g.Source, most: 1}
	listed, standing, running := map[string]bool{}, []string{}, []string{}
	if len(g.Wells) < 2 {
		faults.addf("%s: it needs at least two wells", what)
	}
	for _, id := range g.Wells {
		i, known := s.wellIndex[id]
		switch {
		case !known:
			faults.addf("%s: no well %q", what, id)
		case listed[id]:
			faults.addf("%s: well %q is listed twice", what, id)
		case s.column[i] >= 0 && kind == runTogether && s.Wells[i].Min <= 0 && s.Wells[i].Max >= 0:
			faults.addf("%s: well %s has no least rate, so that at a rate of zero it would count as running; enter its least rate", what, id)
		case s.column[i] >= 0:
			r.wells = append(r.wells, i)
		case s.standing[i] != 0:
			running = append(running, id)
		default:
			standing = append(standing, id)
		}
		listed[id] = true
	}
	switch {
	case kind == runTogether && len(running) > 0 && len(standing) > 0:
		faults.addf("%s: %s %s fixed and %s while %s", what, list(running), plural(len(running), "is", "are"), plural(len(running), "runs", "run"), list(standing)+plural(len(standing), " is off", " are off"))
	case kind == runTogether:
		r.words = list(g.Wells) + " run together or not at all"
		if len(standing) > 0 {
			r.most = 0
		}
		if len(running) > 0 {
			r.most = math.Inf(1)
		}
	default:
		r.words = "at most one of " + list(g.Wells) + " runs"
		if len(running) > 1 {
			faults.addf("%s: %s are fixed and run", what, list(running))
		}
		r.most -= float64(len(running))
	}
	if len(r.wells) > 0 {
		s.rules = append(s.rules, r)
	}
}

// errUndecided is a search that found no plan and did not show that there is none.
var errUndecided = errors.New("the search over which wells run found no plan and no proof that there is none")

// linearAim tells whether the aim leaves a choice of running wells: mixed programmes are linear.
func (s *setup) linearAim() bool { return s.Aim == MostYield || s.Aim == MostHeadroom }

// switched tells whether a well is off or within a range that leaves zero out.
func (s *setup) switched(i int) bool {
	return s.column[i] >= 0 && s.linearAim() && (s.Wells[i].Min > 0 || s.Wells[i].Max < 0)
}

// switches tells whether the plan has to choose which wells run.
func (s *setup) switches() bool {
	if len(s.rules) > 0 {
		return true
	}
	for _, i := range s.decided {
		if s.switched(i) {
			return true
		}
	}
	return false
}

// ruled tells of each well whether a rule or a lowest level needs to know that it runs.
func (p *planner) ruled() []bool {
	s := p.setup
	out := make([]bool, len(s.Wells))
	for _, r := range s.rules {
		for _, i := range r.wells {
			out[i] = true
		}
	}
	for i := range s.Wells {
		out[i] = out[i] || (s.switched(i) && p.boundOfWell[i] >= 0)
	}
	return out
}

// rangeOf is the range of a decided well's column: that of a well that is off, of one that runs, or, where that is open, both.
func (p *planner) rangeOf(i int) (lower, upper float64) {
	w := p.setup.Wells[i]
	lower, upper = w.Min, w.Max
	switch {
	case p.isOut(i) || (p.runs != nil && !p.runs[i]):
		return 0, 0
	case p.runs == nil && p.setup.switched(i):
		return math.Min(0, lower), math.Max(0, upper)
	}
	return lower, upper
}

// mixedProgramme is a programme with the choice of running wells in it.
type mixedProgramme struct {
	*convex.MixedProblem
	indicator []int // column of y of each well; -1: none
}

// mixed adds the choice of running wells to a programme that was built with that choice open.
func (p *planner) mixed(g *programme) (*mixedProgramme, error) {
	s := p.setup
	m := &mixedProgramme{indicator: make([]int, len(s.Wells))}
	var columns []convex.Column
	var semi, whole []int
	for j := 0; j < g.problem.Columns(); j++ {
		columns = append(columns, g.problem.Column(j))
	}
	ruled := p.ruled()
	for i := range s.Wells {
		m.indicator[i] = -1
		if s.column[i] < 0 || p.isOut(i) {
			continue
		}
		if s.switched(i) {
			columns[s.column[i]].Lower, columns[s.column[i]].Upper = s.Wells[i].Min, s.Wells[i].Max
			semi = append(semi, s.column[i])
		}
		if ruled[i] {
			m.indicator[i] = len(columns)
			whole = append(whole, len(columns))
			columns = append(columns, convex.Column{Name: s.Wells[i].ID + " runs", Upper: 1})
		}
	}
	together := make([]int, len(s.rules))
	for k, r := range s.rules {
		if r.kind == runTogether {
			together[k] = len(columns)
			whole = append(whole, len(columns))
			z := convex.Column{Name: r.words, Upper: 1}
			switch {
			case r.most == 0 || p.anyOut(r.wells):
				z.Upper = 0
			case math.IsInf(r.most, 1):
				z.Lower = 1
			}
			columns = append(columns, z)
		}
	}
	problem, err := convex.NewProblem(g.problem.Sense(), columns)
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of running wells: %w", err)
	}
	m.MixedProblem = &convex.MixedProblem{Problem: problem, Integer: whole, SemiContinuous: semi}
	for r := 0; r < g.problem.Rows(); r++ {
		row := g.problem.Row(r)
		a := make([]float64, len(columns))
		copy(a, row.Coefficients)
		if o := g.owners[r]; o.kind == ofBound {
			if i := p.idleBore(p.bounds[o.index]); i >= 0 && m.indicator[i] >= 0 {
				big := p.largestPass(g, row)
				a[m.indicator[i]] = big
				row.Upper += big
			}
		}
		row.Coefficients = a
		if _, err := problem.AddRow(row); err != nil {
			return nil, fmt.Errorf("plan: the programme of running wells: %w", err)
		}
	}
	return m, p.addRules(m, together)
}

// addRules adds the rows that link rates with running and the rules themselves.
func (p *planner) addRules(m *mixedProgramme, together []int) error {
	s := p.setup
	add := func(name string, lower, upper float64, set func(a []float64)) error {
		a := make([]float64, m.Columns())
		set(a)
		if _, err := m.AddRow(convex.Row{Name: name, Coefficients: a, Lower: lower, Upper: upper}); err != nil {
			return fmt.Errorf("plan: the programme of running wells: %w", err)
		}
		return nil
	}
	for i, y := range m.indicator {
		if y < 0 {
			continue
		}
		w, x := s.Wells[i], s.column[i]
		if err := add(w.ID+" at most its largest rate when it runs", math.Inf(-1), 0, func(a []float64) { a[x], a[y] = 1, -w.Max }); err != nil {
			return err
		}
		if err := add(w.ID+" at least its least rate when it runs", 0, math.Inf(1), func(a []float64) { a[x], a[y] = 1, -w.Min }); err != nil {
			return err
		}
	}
	for k, r := range s.rules {
		lower, upper := math.Inf(-1), r.most
		if r.kind == runTogether {
			lower, upper = 0, 0
		}
		err := add(r.words, lower, upper, func(a []float64) {
			n := 0
			for _, i := range r.wells {
				if m.indicator[i] >= 0 {
					a[m.indicator[i]] = 1
					n++
				}
			}
			if r.kind == runTogether {
				a[together[k]] = -float64(n)
			}
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// idleBore is the well whose own lowest level a bound is, when that well may stand still: the level need not be kept then; -1: none.
func (p *planner) idleBore(b *bound) int {
	if b.limit < 0 && p.setup.switched(b.target.well) {
		return b.target.well
	}
	return -1
}

// mostHeadroom is more than any share of a limit that a plan keeps free: recharge can make it larger than 1, hardly than this.
const mostHeadroom = 100

// largestPass is by how much the rates, and a share kept free, can pass a row at most.
func (p *planner) largestPass(g *programme, row convex.Row) float64 {
	sum := 0.0
	if g.share >= 0 {
		sum = mostHeadroom * row.Coefficients[g.share]
	}
	for k, i := range p.setup.decided {
		w := p.setup.Wells[i]
		sum += math.Max(0, math.Max(row.Coefficients[k]*math.Max(0, w.Max), row.Coefficients[k]*math.Min(0, w.Min)))
	}
	return math.Max(0, sum-row.Upper)
}

// chooseRunning solves the mixed programme and keeps which wells run. It returns false when no choice keeps every limit.
func (p *planner) chooseRunning(ctx context.Context, g *programme) (possible bool, err error) {
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
	how := "No other choice of running wells is better by more than " + percentText(switchingGap) + " of the aim."
	if !r.Proven {
		how = "The search was ended before it was sure: another choice of running wells may be better by up to " + percentText(r.Gap) + " of the aim."
	}
	r.Sentence = strings.Join([]string{who, how, "Prices are those at this switching: they say nothing about starting or stopping a well."}, " ")
	return r
}

// isOut tells whether a well is out of service beyond the brief.
func (p *planner) isOut(i int) bool { return p.outOfService != nil && p.outOfService[i] }

func (p *planner) anyOut(wells []int) bool {
	for _, i := range wells {
		if p.isOut(i) {
			return true
		}
	}
	return false
}

// idle tells whether a bound is the lowest level of a well that stands still, or of one that is out of service: it need not be kept.
func (p *planner) idle(b *bound) bool {
	i := b.target.well
	return b.limit < 0 && (p.isOut(i) || (p.runs != nil && !p.runs[i] && p.setup.switched(i)))
}

// buildRound builds the programme of a round, at the switching that is best for it where there is a choice. It returns nil when no
// choice of running wells keeps every limit.
func (p *planner) buildRound(ctx context.Context) (*programme, error) {
	p.runs = nil
	g, err := p.build(true)
	if err != nil || !p.setup.switches() {
		return g, err
	}
	possible, err := p.chooseRunning(ctx, g)
	if err != nil || !possible {
		return nil, err
	}
	return p.build(true)
}

// checkRunning judges the rules about running wells at the rates shown.
func (p *planner) checkRunning(rates []float64, verdict func(string, []string, string)) {
	s := p.setup
	if len(s.rules) == 0 {
		return
	}
	var broken []string
	for _, r := range s.rules {
		running := []string{}
		for _, i := range r.wells {
			if rates[i] != 0 {
				running = append(running, s.Wells[i].ID)
			}
		}
		n := len(running)
		switch {
		case r.kind == runTogether && (n == len(r.wells) && r.most > 0 || n == 0 && !math.IsInf(r.most, 1)):
		case r.kind != runTogether && float64(n) <= r.most:
		default:
			broken = append(broken, fmt.Sprintf("%s: %s", r.words, list(running)+plural(n, " runs", " run")))
		}
	}
	verdict("Rules about which wells run are kept", broken, fmt.Sprintf("%d rules", len(s.rules)))
}
