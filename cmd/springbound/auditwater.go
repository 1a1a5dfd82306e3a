package main

import (
	"context"
	"fmt"
	"math"
	"sort"
	"strings"

	"springbound/aquifer"
	"springbound/plan"
)

// mostNamed is how many sources, receptors or limits a sentence names.
const mostNamed = 6

// waterSources says where the pumped water comes from, whether every well's shares sum to all of it, and whether a feature would have to give more
// than is stated to be there.
func (a *audit) waterSources(context.Context) error {
	l := plan.EvidenceLine{Check: "Where the pumped water comes from", Unit: "share of a well's water", How: "change of every feature's flow per unit rate of each well, one adjoint solve a feature; the shares of a well sum to 1; flows beside the stated available ones",
		Reason: "water is neither made nor lost: rounding of the solves", Remedy: "a sum that is off: do not use the shares; a feature that would give more than is there: state the available flow, so that the plan keeps it"}
	lines := append([]plan.Capture(nil), a.e.Capture...)
	sort.SliceStable(lines, func(i, k int) bool { return lines[i].Flow > lines[k].Flow })
	var words, over []string
	for k, c := range lines {
		if c.Share != nil && k < mostNamed {
			words = append(words, fmt.Sprintf("%s %s %.0f %%", c.Kind, c.Feature, 100**c.Share))
		}
		if c.Available != nil && c.Flow > *c.Available*(1+captureTolerance) {
			over = append(over, fmt.Sprintf("%s %s would have to give %.0f m³/d and has %.0f", c.Kind, c.Feature, c.Flow, *c.Available))
		}
	}
	if len(words) == 0 {
		words = []string{"nothing is pumped on balance"}
	}
	l.Sentence = sentence(strings.Join(words, ", "))
	if len(over) > 0 {
		l.Result = plan.Fail
		l.Sentence += " " + sentence(strings.Join(over, "; "))
	}
	a.add(l, a.report.Audit.CaptureSumError, captureTolerance)
	return nil
}

// saltWater lists the stretches where water comes in through a prescribed head, and judges the saline ones.
func (a *audit) saltWater(context.Context) error {
	l := plan.EvidenceLine{Check: "Salt water drawn in", Unit: "m³/d", How: "flow into the aquifer through edges marked saline, without pumping and at the plan, found along the edge node by node",
		Reason: "no more than without pumping", Remedy: "lower the rates near the stretch named, or state a limit on the gradient there; a density study is another matter"}
	saline := 0
	for _, e := range a.j.project.Site.Edges {
		if e.Saline && e.Kind == aquifer.PrescribedHead {
			saline++
		}
	}
	more, worst := 0.0, ""
	for k := 0; k+1 < len(a.booked); k += 2 {
		if d, words := a.inward(&a.booked[k], &a.booked[k+1]); d > more {
			more, worst = d, words
		}
	}
	if saline == 0 {
		l.Result, l.Sentence = plan.NotDone, "No edge is marked saline."
		a.e.Add(l)
		return nil
	}
	l.Sentence = "No stretch of a saline edge takes in more than without pumping."
	if worst != "" {
		l.Sentence = sentence(worst)
	}
	a.add(l, more, balanceTolerance*math.Max(1, a.e.Balances[1].In))
	return nil
}

// inward lists where water comes in at the plan, and says by how much the worst saline edge takes in more than without pumping [m³/d].
func (a *audit) inward(base, planned *booking) (more float64, words string) {
	before, after, largest := map[int]float64{}, map[int]float64{}, map[int]int{}
	for _, t := range base.model.InwardStretches(base.heads) {
		before[t.Index] += t.Inflow
	}
	for _, t := range planned.model.InwardStretches(planned.heads) {
		if _, seen := largest[t.Index]; !seen || t.Inflow > a.e.Inward[largest[t.Index]].AtPlan {
			largest[t.Index] = len(a.e.Inward)
		}
		after[t.Index] += t.Inflow
		a.e.Inward = append(a.e.Inward, plan.InwardStretch{State: planned.name, Edge: t.Edge, Saline: t.Saline, NoPumping: before[t.Index], AtPlan: t.Inflow, Length: t.Length, Place: a.j.placeText(t.At)})
	}
	for i, e := range a.j.project.Site.Edges {
		if d := after[i] - before[i]; e.Saline && d > more {
			s := a.e.Inward[largest[i]]
			more, words = d, fmt.Sprintf("%s %.0f m³/d come in through edge %s, the largest part over %.0f m near %s; without pumping %.0f m³/d", planned.name, after[i], e.Name, s.Length, s.Place, before[i])
		}
	}
	return more, words
}
