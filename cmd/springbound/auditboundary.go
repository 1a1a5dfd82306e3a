package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sort"
	"strings"

	"springbound/aquifer"
	"springbound/plan"
	"springbound/wells"
)

const (
	// decidesShare is by how much a limited receptor's change may grow when a source is taken away: a fifth is about what transmissivity and
	// recharge leave open anyway, so that a source below it decides nothing that is not open already.
	decidesShare = 0.20
	// passedShare is by how much of its size a limit kept with the source may be passed without it: the best plan stands at its limits, so that the
	// smallest change passes them, and a twentieth is less than any level or flow is measured to.
	passedShare = 0.05
	// noticedShare is the growth, as a share of what the limit allows, below which a larger factor means nothing: a millimetre where
	// decimetres are allowed.
	noticedShare = 0.01
	// mostSources bounds how many sources are taken away, those that give the most first; each costs a factorisation and a plan.
	mostSources = 12
)

// source is something that fixes the head and can be taken away.
type source struct {
	kind   aquifer.FeatureKind
	index  int
	name   string
	share  *float64 // of the pumped water
	flow   float64  // more into the aquifer than without pumping [m³/d]
	judged bool     // a prescribed head: a line of its own
}

// sources lists prescribed-head edges, then what exchanges water, each group by its share of the pumped water.
func (a *audit) sources() []source {
	var out []source
	for _, c := range a.j.linear.Capture {
		o := c.Feature
		if o.Kind != aquifer.EdgeFeature && o.Kind != aquifer.RiverFeature && o.Kind != aquifer.LakeFeature {
			continue
		}
		s := source{kind: o.Kind, index: o.Index, name: o.Name}
		s.judged = o.Kind == aquifer.EdgeFeature && a.j.project.Site.Edges[o.Index].Kind == aquifer.PrescribedHead
		for _, x := range a.report.Capture {
			if x.Feature == o.Name && x.Kind == string(o.Kind) {
				s.share, s.flow = x.Share, x.Flow
			}
		}
		out = append(out, s)
	}
	size := func(s source) float64 {
		if s.share == nil {
			return 0
		}
		return math.Abs(*s.share)
	}
	sort.SliceStable(out, func(i, k int) bool {
		if out[i].judged != out[k].judged {
			return out[i].judged
		}
		return size(out[i]) > size(out[k])
	})
	return out
}

// boundaries takes the sources of water away, one at a time: do they flatter the plan?
func (a *audit) boundaries(ctx context.Context) error {
	sources := a.sources()
	judged := 0
	for k, s := range sources {
		l := plan.EvidenceLine{Check: "Without " + string(s.kind) + " " + s.name, Unit: "growth of a change, share",
			How:    "replaced by no flow: the plan's rates again, then planned anew",
			Reason: fmt.Sprintf("a limited receptor's change may grow by %.0f %%, about what transmissivity and recharge leave open, and a limit may be passed by %.0f %% of its size", 100*decidesShare, 100*passedShare),
			Remedy: "this boundary decides the result: check that the water is physically there, or set it farther away, or give it a bed resistance or an available flow"}
		if s.judged {
			judged++
		}
		if k >= mostSources {
			if s.judged {
				l.Result, l.Sentence = plan.NotDone, fmt.Sprintf("Only the %d sources that give the most are taken away.", mostSources)
				a.e.Add(l)
			}
			continue
		}
		a.j.progress.report("checking: boundaries", k, len(sources))
		b, growth, err := a.without(ctx, s)
		if err != nil {
			return err
		}
		a.e.Boundaries = append(a.e.Boundaries, *b)
		if s.judged {
			a.boundaryLine(l, b, growth)
		}
	}
	if judged == 0 {
		a.e.Add(plan.EvidenceLine{Check: "Boundaries replaced by no flow", How: "each prescribed head in turn", Result: plan.NotDone, Sentence: "There is no edge with a prescribed head."})
	}
	return nil
}

// boundaryLine judges a prescribed head; a growth that is not a number: nothing could be compared.
func (a *audit) boundaryLine(l plan.EvidenceLine, b *plan.BoundaryLine, growth float64) {
	l.Sentence = b.Outcome
	if math.IsNaN(growth) {
		l.Result = plan.NotDone
		a.e.Add(l)
		return
	}
	limited := false
	l.Result = plan.Pass
	for _, r := range b.Receptors {
		limited = limited || r.Limited
		if r.Decides {
			l.Result = plan.Fail
		}
	}
	if !limited {
		l.Result = plan.NotDone
		l.Sentence += " No receptor carries a limit to judge it by."
		a.e.Add(l)
		return
	}
	a.add(l, growth, decidesShare)
}

// without computes the plan with a source taken away, and the largest growth of a limited receptor's change as a share of it; NaN where the
// source cannot be taken away.
func (a *audit) without(ctx context.Context, s source) (*plan.BoundaryLine, float64, error) {
	b := &plan.BoundaryLine{Feature: s.name, Kind: string(s.kind), Share: s.share, Before: a.report.TotalRate}
	gives := givesWords(s)
	m, err := a.j.field.Model.Without(ctx, a.j.modelOptions(a.workers), s.kind, s.index)
	var only *aquifer.OnlySource
	if errors.As(err, &only) {
		b.Outcome = fmt.Sprintf("It is the only thing that fixes the head in its part of the aquifer and cannot be taken away: every result rests on it; %s. Check that the water is physically there.", gives)
		return b, math.NaN(), nil
	}
	if err != nil {
		return nil, 0, err
	}
	other := a.jobWithout(s)
	stopped := func(err error) (*plan.BoundaryLine, float64, error) {
		var none *aquifer.NoSteadyState
		if !errors.As(err, &none) {
			return nil, 0, err
		}
		b.Outcome = fmt.Sprintf("%s; without it there is no steady state at the plan's rates.", sentence(gives)[:len(sentence(gives))-1])
		b.Receptors = []plan.BoundaryChange{{Receptor: "all", Decides: true, Limited: true}}
		return b, math.Inf(1), nil
	}
	if err := other.watch(ctx, m); err != nil {
		return stopped(err)
	}
	other.field.Alter = a.j.field.Alter
	report, err := other.evaluate(ctx, a.ratesByState())
	if err != nil {
		return stopped(err)
	}
	growth := a.compare(b, report)
	after := "planned anew, no rates keep every limit"
	replanned, err := other.makePlan(ctx)
	var none *aquifer.NoSteadyState
	switch {
	case errors.As(err, &none):
		after = "planned anew, the search met rates without a steady state"
	case err != nil:
		return nil, 0, err
	case replanned.Status == plan.StatusOptimal:
		b.After = &replanned.TotalRate
		after = fmt.Sprintf("planned anew, the total is %.0f instead of %.0f m³/d", replanned.TotalRate, b.Before)
	case replanned.Status != plan.StatusInfeasible:
		after = "planned anew, the search did not settle"
	}
	b.Outcome = sentence(gives + "; " + boundaryWords(b.Receptors) + "; " + after)
	return b, growth, nil
}

// ratesByState are the plan's rates, one list an operating state.
func (a *audit) ratesByState() [][]float64 {
	if len(a.report.States) == 0 {
		return [][]float64{a.rates}
	}
	out := make([][]float64, len(a.report.States))
	for k := range out {
		out[k] = ratesInState(a.report, k)
	}
	return out
}

// givesWords says what a source has to do with the pumped water.
func givesWords(s source) string {
	switch {
	case s.flow < 0:
		return fmt.Sprintf("it takes %.0f m³/d more than without pumping", -s.flow)
	case s.share == nil:
		return fmt.Sprintf("it gives %.0f m³/d more than without pumping", s.flow)
	}
	return fmt.Sprintf("it gives %.0f %% of the pumped water", 100**s.share)
}

// boundaryWords says what a missing source does to the receptors at the plan's rates.
func boundaryWords(changes []plan.BoundaryChange) string {
	var decided, passed []string
	for _, c := range changes {
		if !c.Decides {
			continue
		}
		if c.Factor != nil {
			decided = append(decided, fmt.Sprintf("%s times %.2f", c.Receptor, *c.Factor))
		} else {
			decided = append(decided, c.Receptor)
		}
		passed = append(passed, c.Passed...)
	}
	if len(decided) == 0 {
		return "without it no limited receptor changes by much at the plan's rates"
	}
	out := "without it, at the plan's rates, changes are other ones: " + firstNames(decided)
	if len(passed) > 0 {
		out += fmt.Sprintf("; %s passed", isAre(passed))
	}
	return out
}

func isAre(ids []string) string {
	if len(ids) == 1 {
		return "limit " + ids[0] + " is"
	}
	return "limits " + firstNames(ids) + " are"
}

// firstNames lists the first of many names and counts the rest; the tables hold all.
func firstNames(names []string) string {
	if len(names) <= mostNamed {
		return strings.Join(names, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(names[:mostNamed], ", "), len(names)-mostNamed)
}

// jobWithout is the job on a model without a source: receptors that watch the source itself, and their limits, are left out.
func (a *audit) jobWithout(s source) *job {
	p := *a.j.project
	watches := map[aquifer.FeatureKind]wells.Kind{aquifer.EdgeFeature: wells.EdgeFlow, aquifer.RiverFeature: wells.RiverReach}
	gone := map[string]bool{}
	p.Receptors = nil
	for _, r := range a.j.project.Receptors {
		if kind, ok := watches[s.kind]; ok && r.Kind == kind && r.Feature == s.name {
			gone[r.ID] = true
			continue
		}
		p.Receptors = append(p.Receptors, r)
	}
	p.Limits = nil
	for _, l := range a.j.project.Limits {
		if !gone[l.Receptor] {
			p.Limits = append(p.Limits, l)
		}
	}
	return &job{project: &p, progress: a.j.progress, withoutFirm: true, alter: a.j.alter}
}

// compare sets the receptors' changes at the same rates side by side and returns the largest growth of a limited one, as a share of its change.
func (a *audit) compare(b *plan.BoundaryLine, report *plan.Report) float64 {
	was := map[string]*plan.ReceptorResult{}
	for i := range a.report.Receptors {
		was[a.report.Receptors[i].ID] = &a.report.Receptors[i]
	}
	largest := 0.0
	for i := range report.Receptors {
		now := &report.Receptors[i]
		old := was[now.ID]
		if now.Outside || old == nil {
			continue
		}
		if now.Kind == wells.SpringFlow.String() { // a spring that stops loses all that it had, no more
			now.Change = math.Min(now.Change, math.Max(0, now.NoPumping))
		}
		c := plan.BoundaryChange{Receptor: now.ID, Unit: now.Unit, With: old.Change, Without: now.Change}
		if old.Change != 0 {
			c.Factor = finiteOrNil(now.Change / old.Change)
		}
		grown := math.Abs(now.Change) - math.Abs(old.Change)
		for k, l := range now.Limits {
			if l.ResultState != "yes" {
				continue
			}
			c.Limited = true
			if passedWithout(&old.Limits[k], &l) {
				c.Passed = append(c.Passed, l.ID)
				c.Decides = true
			}
			if old.Change != 0 && grown > noticedShare*math.Abs(old.Limits[k].ChangeRoom) {
				share := grown / math.Abs(old.Change)
				largest = math.Max(largest, share)
				c.Decides = c.Decides || !(share <= decidesShare)
			}
		}
		b.Receptors = append(b.Receptors, c)
	}
	return largest
}

// passedWithout tells whether a limit that the plan keeps is passed by more than what is allowed.
func passedWithout(with, without *plan.LimitResult) bool {
	if with.Passed || !without.Passed {
		return false
	}
	return without.RoomShare == nil || *without.RoomShare < -passedShare
}
