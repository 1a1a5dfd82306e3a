package plan

import (
	"context"
	"fmt"
	"math"
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
// The mixed programme finds which wells run, for an aim that is not linear the search of switchingsearch.go; the plan, its prices and its certificate are those of the linear programme with the
// standing wells held at zero and the running ones within their ranges.

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
	if n := s.AtMostRunning; n != nil {
		switch {
		case *n < 0:
			faults.addf("at most %d wells running: the number is below zero", *n)
		default:
			for k := range s.stateCount() {
				s.readAtMost(*n, k)
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

// readAtMost adds the rule that at most n wells run, in operating state k where there are several.
func (s *setup) readAtMost(n, k int) {
	r := runningRule{kind: atMostRunning, most: float64(n), source: "brief"}
	for i := range s.Wells {
		if s.isYield(i) && (s.expanded == nil || s.expanded.stateOf(i) == k) {
			r.wells = append(r.wells, i)
		}
	}
	r.words = fmt.Sprintf("at most %d of the %d wells up for decision pump", n, len(r.wells))
	if s.expanded != nil {
		r.words += mark(k)
	}
	if n < len(r.wells) {
		s.rules = append(s.rules, r)
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

// switched tells whether a well is off or within a range that leaves zero out.
func (s *setup) switched(i int) bool {
	return s.column[i] >= 0 && (s.Wells[i].Min > 0 || s.Wells[i].Max < 0)
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
