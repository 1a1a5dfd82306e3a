package main

import (
	"context"
	"fmt"
	"io"
	"path/filepath"
	"strings"
	"text/tabwriter"

	"springbound/gisio"
	"springbound/plan"
	"springbound/plan/workbook"
)

// planningAid ends every printed result.
const planningAid = "A planning aid (steady, confined, single layer): to be reviewed and signed by a qualified person under local rules."

// runPlan is the main job.
func runPlan(ctx context.Context, c planning, s streams) error {
	if err := c.checkProblemPath(); err != nil {
		return err
	}
	j, err := newJob(ctx, c.solving, s)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	if err := c.checkProblemPlace(j); err != nil {
		return err
	}
	j.allErrors = c.Errors
	j.keepProblem = c.Problem != ""
	maps := newMaps(j)
	j.onField = maps.influence
	r, err := j.planAccurately(ctx)
	if err != nil {
		return err
	}
	state, err := j.complete(ctx, r)
	if err != nil {
		return err
	}
	if err := maps.heads(state); err != nil {
		return err
	}
	j.progress.report("writing", 0, 1)
	data, err := plan.Marshal(r)
	if err != nil {
		return err
	}
	book, err := workbook.Write(r)
	if err != nil {
		return err
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	dir := c.outDir(j)
	drawn, err := maps.wait()
	if err != nil {
		return err
	}
	files := append([]outputFile{{"plan.json", data}, {"plan.xlsx", book}, {"rates.csv", ratesTable(r)}}, drawn...)
	if j.problem != nil {
		text, err := problemText(j.problem)
		if err != nil {
			return err
		}
		files = append(files, outputFile{c.Problem, text})
	}
	if err := writeOutputs(dir, files); err != nil {
		return err
	}
	if err := dropStale(dir, "influence", files); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		if _, err := s.out.Write(data); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
	} else {
		printPlan(s.out, r, dir, "plan")
	}
	return verdict(r)
}

// makePlan asks the planner; a report that ends in numerical trouble is an error.
func (j *job) makePlan(ctx context.Context) (*plan.Report, error) {
	b, err := j.brief(ctx)
	if err != nil {
		return nil, err
	}
	make := func() (*plan.Report, error) {
		o := plan.Options{Firm: !j.withoutFirm, Progress: func(p plan.Progress) { j.progress.report("planning", p.Round, p.Round+1) }}
		if j.keepProblem {
			o.Problem = func(f *plan.ProblemFile) { j.problem = f }
		}
		return plan.Make(ctx, b, j, o)
	}
	r, err := make()
	// The first plan takes every feature as acting. Where the plan itself takes one past its limit, drawdown is larger than the linear rows
	// say: plan again with tangents at re-solved plans; with several operating states for as long as another one comes to that.
	for err == nil {
		found, failed := j.findSwitching(ctx, func(k int) []float64 { return ratesInState(r, k) })
		if failed != nil {
			return nil, failed
		}
		if !found {
			return r, nil
		}
		r, err = make()
	}
	return r, err
}

// ratesTable is the plan's rates as a table that try reads.
func ratesTable(r *plan.Report) []byte {
	ids := make([]string, len(r.Wells))
	for i, w := range r.Wells {
		ids[i] = w.ID
	}
	if len(r.States) == 0 {
		return gisio.WriteRates(ids, ratesOf(r))
	}
	var names []string
	var rates [][]float64
	for k, s := range r.States {
		names, rates = append(names, s.Name), append(rates, ratesInState(r, k))
	}
	return gisio.WriteStateRates(ids, names, rates)
}

func ratesOf(r *plan.Report) []float64 {
	rates := make([]float64, len(r.Wells))
	for i, w := range r.Wells {
		rates[i] = w.Rate
	}
	return rates
}

// verdict is the error that a written report ends with, if it holds no valid plan.
func verdict(r *plan.Report) error {
	switch {
	case r.Status == plan.StatusInfeasible:
		return &noPlanError{"no plan can meet the limits; the files explain which limits are in conflict and by how much"}
	case r.Status != plan.StatusOptimal:
		return &noPlanError{"the plan did not settle (" + r.Status + "); the files hold the last rates"}
	case !r.ModelValid:
		return &noPlanError{"the plan is not valid: " + strings.Join(r.Invalid, "; ")}
	}
	return nil
}

func (c solving) outDir(j *job) string {
	if c.Out != "" {
		return c.Out
	}
	return filepath.Join(j.project.Dir, "out")
}

// printPlan is the short result on standard output.
func printPlan(w io.Writer, r *plan.Report, dir, name string) {
	fmt.Fprintf(w, "%s\n%s\n\n", r.Title, r.Headline)
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "well\trate, m³/d\tfrom\tto\tholds at\twho")
	for _, x := range r.Wells {
		fmt.Fprintf(t, "%s\t%.1f\t%.0f\t%.0f\t%s\t%s\n", x.ID, x.Rate, x.Min, x.Max, x.AtBound, who(x))
	}
	t.Flush()
	fmt.Fprintln(w)
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			fmt.Fprintf(w, "%s, %s: %s\n", rec.ID, l.ID, l.Sentence)
		}
	}
	for _, q := range r.Quotas {
		if q.Binds {
			fmt.Fprintf(w, "%s, %s: Binds at %.1f m³/d.\n", q.Name, q.Basis, q.Limit)
		}
	}
	for _, x := range r.Wells {
		if x.LevelShadowPrice > 0 {
			fmt.Fprintf(w, "%s, lowest level: Binds at %.2f m (%s).\n", x.ID, *x.LowestLevel, x.LowestReason)
		}
	}
	if r.Switching != nil {
		fmt.Fprintln(w, r.Switching.Sentence)
	}
	if text := r.Firm.Sentence(); text != "" {
		fmt.Fprintln(w, text)
	}
	if r.Conflict != nil {
		fmt.Fprintf(w, "\n%s\n", r.Conflict.Sentence)
		for _, m := range r.Conflict.Members {
			alone := "giving way alone would not do"
			if m.Alone != nil {
				unit := " " + m.Unit
				if m.Unit == "1" { // a share or a gradient
					unit = ""
				}
				alone = fmt.Sprintf("giving way alone by %.4g%s would do", *m.Alone, unit)
			}
			fmt.Fprintf(w, "  in conflict: %s; %s\n", m.Limit, alone)
		}
	}
	printStates(w, r)
	bad := 0
	for _, c := range r.Checks {
		if c.Result == "fail" {
			bad++
			fmt.Fprintf(w, "check failed: %s: %s\n", c.Name, c.Detail)
		}
	}
	fmt.Fprintf(w, "\nchecks: %d, of which %d failed; not assessed: %d points, listed in the workbook\n", len(r.Checks), bad, len(r.NotAssessed))
	fmt.Fprintf(w, "written to %s: %s.xlsx, %s.json, contours\n", dir, name, name)
	fmt.Fprintln(w, planningAid)
}

func who(w plan.WellResult) string {
	switch {
	case w.Others:
		return "existing user, " + w.Mode
	case w.Mode == "decided":
		return "own"
	}
	return "own, " + w.Mode
}
