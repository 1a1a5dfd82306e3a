package main

import (
	"context"
	"fmt"
	"path/filepath"
	"strings"

	"springbound/adjoint"
	"springbound/plan"
	"springbound/plan/workbook"
	"springbound/wells"
)

// runAudit makes the plan and the evidence for it.
func runAudit(ctx context.Context, c solving, s streams) error {
	j, err := newJob(ctx, c, s)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	e, err := j.evidence(ctx, auditOptions{workers: c.Workers, mostNodes: mostRefinedNodes})
	if err != nil {
		return err
	}
	data, err := plan.MarshalEvidence(e)
	if err != nil {
		return err
	}
	book, err := workbook.WriteEvidence(e)
	if err != nil {
		return err
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	dir := c.Out
	if dir == "" {
		dir = filepath.Join(j.project.Dir, "out-audit")
	}
	if err := writeOutputs(dir, []outputFile{{"audit.json", data}, {"audit.txt", evidenceText(e)}, {"audit.xlsx", book}}); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		if _, err := s.out.Write(data); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
	} else {
		printEvidence(s.out, e, dir)
	}
	if e.Failed > 0 {
		return &noPlanError{fmt.Sprintf("%d of %d checks fail; the files say what to do", e.Failed, len(e.Lines))}
	}
	return nil
}

// auditOptions steer an audit.
type auditOptions struct {
	workers   int // processors to use; 0: all
	mostNodes int // of the finest mesh of the refinement study
}

// audit is the work on one plan's evidence.
type audit struct {
	auditOptions
	j      *job
	e      *plan.Evidence
	report *plan.Report
	rates  []float64
	state  *adjoint.State
	rows   []plan.Row // at the plan, in the order of state.Rows
	booked []booking  // by operating state: without pumping, at the plan
}

// evidence makes the plan and checks it and the model behind it, each by other means than those that it was made with.
func (j *job) evidence(ctx context.Context, o auditOptions) (*plan.Evidence, error) {
	a := &audit{auditOptions: o, j: j}
	j.withoutFirm, j.keepProblem = true, true
	var err error
	if a.report, err = j.planAccurately(ctx); err != nil {
		return nil, err
	}
	if a.state, err = j.complete(ctx, a.report); err != nil {
		return nil, err
	}
	a.rates = ratesOf(a.report)
	response, err := j.Linearise(ctx, a.rates)
	if err != nil {
		return nil, err
	}
	a.rows = response.Rows
	a.begin()
	for _, step := range []struct {
		name string
		run  func(context.Context) error
	}{
		{"water balance", a.balance}, {"reciprocity", a.reciprocity}, {"differences", a.differences}, {"superposition", a.superposition},
		{"refined meshes", a.convergence}, {"hand formula", a.handFormula}, {"sources of water", a.waterSources}, {"boundaries", a.boundaries}, {"salt water", a.saltWater},
		{"confined condition", a.confinedLine}, {"optimum", a.optimum}, {"second method", a.secondMethod}, {"files", a.files}, {"the plan on file", a.onFile},
	} {
		if err := ctx.Err(); err != nil {
			return nil, fmt.Errorf("stopped before the check of %s: %w", step.name, err)
		}
		j.progress.report("checking: "+step.name, 0, 1)
		if err := step.run(ctx); err != nil {
			return nil, err
		}
	}
	a.e.Conclude()
	return a.e, nil
}

// begin fills the headings.
func (a *audit) begin() {
	r, p := a.report, a.j.project
	a.e = &plan.Evidence{Program: r.Program, Title: r.Title, Reference: r.Reference, PreparedFor: r.PreparedFor, PreparedBy: r.PreparedBy,
		PlanStatus: r.Status, Plan: r.Headline, TotalRate: r.TotalRate, Capture: r.Capture, HandFormula: r.HandFormula, Inputs: r.Inputs}
	set := func(name, value string) {
		a.e.Settings = append(a.e.Settings, plan.EvidenceSetting{Name: name, Value: value})
	}
	set("program", r.Program)
	set("aim", r.Aim)
	set("mesh of the plan", fmt.Sprintf("%d nodes, %d triangles, smallest angle %.1f degrees", r.Mesh.Nodes, r.Mesh.Triangles, r.Mesh.MinAngle))
	set("edge length at wells, springs and receptors", fmt.Sprintf("%.4g m, growing by %.3g per distance to %.4g m", r.Mesh.FinestM, r.Mesh.Growth, r.Mesh.CoarsestM))
	set("accuracy asked of the mesh", fmt.Sprintf("%.3g %%%s", 100*a.accuracy(), statedWords(p.Mesh.Accuracy > 0)))
	if len(r.States) > 1 {
		set("operating state", r.State+": the default one; water balance, salt water, confined condition and optimum are checked for every state, the other checks look at this one")
	}
	set("coordinates", r.Plane)
	set("vertical datum", r.Datum)
}

func statedWords(stated bool) string {
	if stated {
		return ", as stated in [mesh]"
	}
	return ", not stated in [mesh], so the default"
}

// accuracy is the relative error asked of the mesh.
func (a *audit) accuracy() float64 { return a.j.accuracy() }

// add appends a line that compares a figure with what is allowed.
func (a *audit) add(l plan.EvidenceLine, figure, allowed float64) {
	l.Figure, l.Allowed = finiteOrNil(figure), &allowed
	if l.Result == "" {
		l.Result = plan.Verdict(figure, allowed)
	}
	a.e.Add(l)
}

// fromCheck appends lines for checks that the plan's own report holds, found by the beginning of their names.
func (a *audit) fromCheck(l plan.EvidenceLine, names ...string) {
	l.Result = plan.NotDone
	var words []string
	for _, c := range a.report.Checks {
		for _, n := range names {
			if !strings.HasPrefix(c.Name, n) {
				continue
			}
			words = append(words, c.Name+": "+c.Detail)
			if c.Result == plan.Fail || l.Result == plan.NotDone {
				l.Result = c.Result
			}
		}
	}
	l.Sentence = strings.Join(words, ". ")
	if len(words) == 0 {
		l.Sentence = "The plan's report holds no such check."
	}
	l.Sentence = sentence(l.Sentence)
	a.e.Add(l)
}

// sentence begins with a capital and ends with a point.
func sentence(s string) string {
	if s == "" {
		return s
	}
	s = strings.ToUpper(s[:1]) + s[1:]
	if !strings.HasSuffix(s, ".") {
		s += "."
	}
	return s
}

// receptorWords names a row's receptor, or the well whose level it is.
func (a *audit) receptorWords(i int) string {
	if r := a.rows[i]; r.Receptor != "" {
		return r.Receptor
	}
	return "level in " + a.rows[i].Well
}

// limited tells which receptors carry a limit.
func (a *audit) limited() map[string]bool {
	out := map[string]bool{}
	for _, l := range a.j.project.Limits {
		out[l.Receptor] = true
	}
	return out
}

// wellLevel is the level in a running well's bore, with every loss, at heads h [m].
func wellLevel(f *adjoint.Field, w int, h, rates []float64) float64 {
	var well wells.Well = f.Wells[w]
	return h[f.Node(w)] - f.Below(w)*rates[w] - well.Loss(rates[w])
}
