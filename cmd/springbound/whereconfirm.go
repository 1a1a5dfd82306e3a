package main

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"

	"springbound/adjoint"
	"springbound/plan"
	"springbound/wells"
)

// confirmationRates are the largest rates of the further well that confirm the best place: both small beside a wellfield, the larger still
// of a size that matters, the smaller so that the same limits go on binding [m³/d].
var confirmationRates = [2]float64{50, 1}

// whereConfirmation compares the predicted gain at the best place with plans made afresh on a new mesh that follows a well there.
type whereConfirmation struct {
	Done     bool        `json:"done"`
	Without  *float64    `json:"plan_total_without_on_the_new_mesh_m3_per_d"`
	Steps    []whereStep `json:"steps"`
	Sentence string      `json:"sentence"`
	Invalid  []string    `json:"invalid_because"` // of a plan with the well
}

// whereStep is one plan with the further well.
type whereStep struct {
	Most      float64 `json:"largest_rate_of_the_further_well_m3_per_d"`
	Planned   float64 `json:"planned_rate_of_the_further_well_m3_per_d"`
	Total     float64 `json:"plan_total_m3_per_d"`
	Predicted float64 `json:"predicted_gain_m3_per_d"`
	Confirmed float64 `json:"confirmed_gain_m3_per_d"`
}

// confirm plans on a new mesh with a well at the best place, with the well off and at small rates. A failure is told, not returned; only
// an interruption is an error.
func (w *where) confirm(ctx context.Context, workers int) error {
	c := &w.result.Confirmation
	c.Steps, c.Invalid = []whereStep{}, []string{}
	switch {
	case w.value == nil:
		c.Sentence = "Not confirmed: a gain is predicted for the aim most-yield only."
		return nil
	case len(w.places) == 0:
		c.Sentence = "Nothing to confirm."
		return nil
	}
	err := w.replan(ctx, workers, c)
	if ctx.Err() != nil {
		return ctx.Err()
	}
	if err != nil {
		c.Sentence = "The best place could not be confirmed: " + err.Error() + "."
		return nil
	}
	c.Done = len(c.Invalid) == 0
	c.Sentence = "Place 1, planned anew on a new mesh with a well there:"
	for _, s := range c.Steps {
		c.Sentence += fmt.Sprintf(" at most %.4g m³/d: gain predicted %.3f m³/d, confirmed %.3f m³/d;", s.Most, s.Predicted, s.Confirmed)
	}
	c.Sentence = strings.TrimSuffix(c.Sentence, ";") + "."
	if !c.Done {
		c.Sentence += " A plan with the well is not valid."
	}
	return nil
}

// replan builds the site anew with a well at the best place and plans without it and with it.
func (w *where) replan(ctx context.Context, workers int, c *whereConfirmation) error {
	p := *w.job.project
	zero, last, place := 0.0, len(p.Wells), w.places[0]
	p.Wells = append(slices.Clone(p.Wells), wells.Well{ID: w.freeID(), Name: "further well", At: w.job.field.Model.At(place), Radius: w.ask.radius, Present: &zero,
		MaxSource: "confirmation of a place", DutyHours: 24, LowestLevel: w.ask.lowest, Mode: wells.Off})
	p.Site.Nodes, p.Site.Outlines = adjoint.Requests(p.Wells, p.Receptors)
	if err := p.Site.Check(); err != nil {
		return err
	}
	j := &job{project: &p, findings: w.job.findings, progress: w.job.progress, relativeRecharge: w.job.relativeRecharge}
	if err := j.build(ctx, workers); err != nil {
		return err
	}
	for _, rate := range append([]float64{0}, confirmationRates[:]...) {
		if rate > 0 {
			if w.ask.rate != nil {
				rate = math.Min(rate, *w.ask.rate)
			}
			p.Wells[last].Mode, p.Wells[last].Max = wells.Decided, rate
		}
		r, err := j.makePlan(ctx)
		if err != nil {
			return err
		}
		if r.Status != plan.StatusOptimal {
			return fmt.Errorf("the plan on the new mesh ended as %s", r.Status)
		}
		if rate == 0 {
			c.Without = &r.TotalRate
			continue
		}
		if _, err := j.complete(ctx, r); err != nil {
			return err
		}
		c.Invalid = append(c.Invalid, r.Invalid...)
		c.Steps = append(c.Steps, whereStep{Most: rate, Planned: r.Wells[last].Rate, Total: r.TotalRate, Predicted: rate * w.value[place], Confirmed: r.TotalRate - *c.Without})
	}
	return nil
}

// freeID is an id that no well has.
func (w *where) freeID() string {
	for id := "further-well"; ; id += "-" {
		if !slices.ContainsFunc(w.job.project.Wells, func(x wells.Well) bool { return x.ID == id }) {
			return id
		}
	}
}
