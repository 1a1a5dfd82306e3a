package main

import (
	"context"
	"encoding/json"
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/gisio"
	"springbound/plan"
)

// siting are the flags of where.
type siting struct {
	solving
	Rate        string `placeholder:"\"10 L/s\"" help:"A rate: where it fits beside the rates kept is mapped as an area."`
	Spacing     string `default:"200 m" help:"Least distance between the places listed."`
	Count       int    `default:"10" help:"How many places to list."`
	Keep        string `enum:"plan,present,others" default:"plan" help:"Which rates are kept for the largest further rate: those of the plan, the present ones, or those of the wells that the plan does not decide alone, the others off."`
	LowestLevel string `name:"lowest-level" placeholder:"\"-12 m\"" help:"Lowest level allowed in the further well, an elevation; left out: its own level is not looked at."`
	Radius      string `default:"0.2 m" help:"Radius of the further well."`
	State       string `placeholder:"NAME" help:"Operating state; left out: the default one. The other states are left out."`
}

// request is what the flags of where ask for, in metres and days.
type request struct {
	rate    *float64 // [m³/d]
	spacing float64  // [m]
	count   int
	keep    string   // plan, present or others
	lowest  *float64 // [m]
	radius  float64  // [m]
}

// read parses the flags.
func (c siting) read() (q request, err error) {
	quantity := func(flag, text string, kind gisio.Kind, positive bool) (float64, error) {
		v, _, err := gisio.ParseQuantity(text, kind)
		if err != nil {
			return 0, usagef("--%s: %v", flag, err)
		}
		if positive && !(v > 0) {
			return 0, usagef("--%s is %q; it must be above 0", flag, text)
		}
		return v, nil
	}
	optional := func(flag, text string, kind gisio.Kind, positive bool) (*float64, error) {
		if text == "" {
			return nil, nil
		}
		v, err := quantity(flag, text, kind, positive)
		return &v, err
	}
	if q.rate, err = optional("rate", c.Rate, gisio.Rate, true); err != nil {
		return q, err
	}
	if q.spacing, err = quantity("spacing", c.Spacing, gisio.Length, true); err != nil {
		return q, err
	}
	if q.lowest, err = optional("lowest-level", c.LowestLevel, gisio.Length, false); err != nil {
		return q, err
	}
	if q.radius, err = quantity("radius", c.Radius, gisio.Length, true); err != nil {
		return q, err
	}
	if c.Count < 1 {
		return q, usagef("--count is %d; it must be at least 1", c.Count)
	}
	q.count, q.keep = c.Count, c.Keep
	return q, nil
}

// runWhere makes the plan and maps what a further well would meet anywhere.
func runWhere(ctx context.Context, c siting, s streams) error {
	q, err := c.read()
	if err != nil {
		return err
	}
	j, err := newJobInState(ctx, c.solving, s, c.State)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	w, err := j.where(ctx, q)
	if err != nil {
		return err
	}
	maps := newMaps(j)
	if err := w.draw(maps); err != nil {
		return err
	}
	if err := w.confirm(ctx, c.Workers); err != nil {
		return err
	}
	data, err := json.MarshalIndent(w.result, "", "  ")
	if err != nil {
		return fmt.Errorf("where: %w", err)
	}
	data = append(data, '\n')
	if err := ctx.Err(); err != nil {
		return err
	}
	j.progress.report("writing", 0, 1)
	dir := c.outDir(j)
	drawn, err := maps.wait()
	if err != nil {
		return err
	}
	files := append([]outputFile{{"where.json", data}, {"where.csv", w.result.csv()}}, drawn...)
	if err := writeOutputs(dir, files); err != nil {
		return err
	}
	if err := dropStale(dir, "siting", files); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		if _, err := s.out.Write(data); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
		return nil
	}
	w.result.print(s.out, dir)
	return nil
}

// where is a siting run: the plan, the rates kept, and the reduced influence fields.
type where struct {
	job       *job
	ask       request
	report    *plan.Report
	kept      *plan.Report
	keptState *adjoint.State
	limits    []plan.SitingLimit
	siting    *adjoint.Siting // beside the rates kept
	value     []float64       // per node; nil for aims without one [m³/d per m³/d]
	relief    []float64       // the part of the value that comes from easing limits
	open      []bool
	places    []int32
	result    *whereResult
}

// where plans, solves the adjoints at the plan and picks the places. The factorisations are those of the plan.
func (j *job) where(ctx context.Context, q request) (*where, error) {
	w := &where{job: j, ask: q}
	var err error
	if w.report, err = j.makePlan(ctx); err != nil {
		return nil, err
	}
	state, err := j.complete(ctx, w.report)
	if err != nil {
		return nil, err
	}
	if err := verdict(w.report); err != nil {
		return nil, &noPlanError{"there is no valid plan to site a further well beside, and nothing was written; 'springbound plan' tells why (" + w.report.Status + ")"}
	}
	w.kept, w.keptState = w.report, state
	if q.keep != "plan" {
		if err := w.keepOther(ctx); err != nil {
			return nil, err
		}
	}
	if err := w.reduce(ctx, state); err != nil {
		return nil, err
	}
	w.pick()
	w.result = w.describe()
	return w, w.ownLevels(ctx)
}

// keepOther evaluates the limits with the decided wells at their present rates or off, beside the standing ones.
func (w *where) keepOther(ctx context.Context) error {
	j := w.job
	rates := ratesOf(w.report)
	for i, x := range j.field.Wells {
		if w.report.Wells[i].Mode == "decided" && !x.Outage {
			if rates[i] = 0; x.Present != nil && w.ask.keep == "present" {
				rates[i] = *x.Present
			}
		}
	}
	var err error
	if w.keptState, err = j.field.Changes(ctx, rates); err != nil {
		return err
	}
	j.field.Switching = j.field.Switching || len(w.keptState.State.Off) > 0
	response, err := j.Linearise(ctx, rates)
	if err != nil {
		return err
	}
	brief, err := j.brief(ctx)
	if err != nil {
		return err
	}
	w.kept, err = plan.Evaluate(brief, response, rates)
	return err
}

// reduce turns influence fields into what a further well meets.
func (w *where) reduce(ctx context.Context, planState *adjoint.State) error {
	j := w.job
	var priced *plan.Report
	if plan.Aim(w.report.Aim) == plan.MostYield {
		priced = w.report
	}
	w.limits = plan.SitingLimits(w.kept, priced)
	scale := 0.0
	if w.ask.rate != nil {
		scale = *w.ask.rate
	}
	for _, x := range w.report.Wells {
		scale = math.Max(scale, math.Max(math.Abs(x.Max), math.Abs(x.Rate)))
	}
	limits := make([]adjoint.SitingLimit, len(w.limits))
	for k, l := range w.limits {
		limits[k] = adjoint.SitingLimit{Row: j.rowOf(l), Side: l.Side, Room: l.Room, Price: l.Price, ByPlace: l.AllWells, Negligible: l.Negligible(scale)}
	}
	progress := func(done, total int) { j.progress.report("influence fields", done, total) }
	var err error
	if w.siting, err = j.field.Siting(ctx, w.keptState, limits, progress); err != nil {
		return err
	}
	w.open = j.field.OpenNodes()
	if priced == nil {
		return nil
	}
	atPlan := w.siting
	if w.ask.keep != "plan" {
		if atPlan, err = j.field.Siting(ctx, planState, limits, progress); err != nil {
			return err
		}
	}
	w.value, w.relief = make([]float64, len(atPlan.Cost)), atPlan.Relief
	for i, cost := range atPlan.Cost {
		w.value[i] = 1 - cost + atPlan.Relief[i]
	}
	return nil
}

func (j *job) rowOf(l plan.SitingLimit) int {
	for i, r := range j.field.Receptors {
		if l.Receptor != "" && r.ID == l.Receptor {
			return j.field.RowOf(i, -1)
		}
	}
	for i, x := range j.field.Wells {
		if l.Well != "" && x.ID == l.Well {
			return j.field.RowOf(-1, i)
		}
	}
	return -1
}

// pick chooses the places: largest value first, without one largest further rate first. Places not worth it are left out. What easing a limit
// is worth does not count here: it would send wells to the far side of a salt front.
func (w *where) pick() {
	score := make([]float64, len(w.open))
	for i := range score {
		switch {
		case w.value != nil && w.value[i]-w.relief[i] > 0:
			score[i] = w.value[i] - w.relief[i]
		case w.value == nil && !math.IsInf(w.siting.Use[i], 1):
			score[i] = -w.siting.Use[i]
		default:
			score[i] = math.NaN()
		}
	}
	w.places = w.job.field.Pick(w.open, score, w.ask.spacing, w.ask.count)
}

// ownLevels lowers the largest rates of the places listed to what the further well's own level allows.
func (w *where) ownLevels(ctx context.Context) error {
	if w.ask.lowest == nil {
		return nil
	}
	own, err := w.job.field.OwnDrawdowns(ctx, w.keptState, w.places, w.ask.radius)
	if err != nil {
		return err
	}
	for i, n := range w.places {
		p := &w.result.Places[i]
		rate := math.Max(0, (w.keptState.Heads[n]-*w.ask.lowest)/own[i])
		p.OwnLevelRate = finiteOrNil(rate)
		if p.LargestRate == nil || rate < *p.LargestRate {
			p.LargestRate, p.First = finiteOrNil(rate), "its own lowest level"
		}
		p.fit(w.ask.rate)
	}
	return nil
}
