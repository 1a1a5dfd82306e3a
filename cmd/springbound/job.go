package main

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/gisio"
	"springbound/plan"
	"springbound/wells"
)

// job is a project with its model: what every solving command starts from.
type job struct {
	project  *gisio.Project
	findings gisio.Findings
	field    *adjoint.Field
	linear   *adjoint.Linear // sensitivities and capture, solved once
	progress *progress
	workers  int // processors to use, 0: all
	onField  func(row int, influence []float64) error

	states           []*stateJob // where several operating states are planned together: one each, nil for the default one
	relativeRecharge float64     // of the one state that the job is about, against the default one; 0: it is that
	stateNote        string      // says what a job about one state of several leaves out

	allErrors   bool             // the mesh's errors are estimated for all sensitivities, whatever it costs
	errors      *adjoint.Errors  // of the mesh ...
	errorsAt    []float64        // ... at these rates ...
	errorsOn    *adjoint.Field   // ... on this field's mesh
	errorsOfAll bool             // of the sensitivities and with bounds
	rounds      []plan.MeshRound // the meshes that were planned on
	refinedOut  bool             // refining leads no further: the budget of nodes, or wells and springs resolved down to their bores

	alter       func(aquifer.Terms) // plants a fault in the flow model, to prove that the audit sees it; tests only
	withoutFirm bool                // the firm capacity is not asked for
	keepProblem bool                // the plan's programme is asked for
	problem     *plan.ProblemFile   // ... and found
}

// projectFile resolves what the user named.
func projectFile(name string) (string, error) {
	info, err := os.Stat(name)
	if err != nil {
		return "", usagef("cannot find the project %q: %v", name, err)
	}
	if info.IsDir() {
		name = filepath.Join(name, "project.toml")
		if _, err := os.Stat(name); err != nil {
			return "", usagef("the folder holds no project.toml: %v", err)
		}
	}
	return name, nil
}

// readProject reads a project and prints its findings.
func readProject(ctx context.Context, c common, s streams) (*gisio.Project, gisio.Findings, error) {
	name, err := projectFile(c.Project)
	if err != nil {
		return nil, nil, err
	}
	p, findings := gisio.ReadProject(ctx, name)
	if err := ctx.Err(); err != nil {
		return nil, findings, err
	}
	if err := findings.Err(); err != nil {
		return nil, findings, err
	}
	limitSources(p)
	p.Site.Nodes, p.Site.Outlines = adjoint.Requests(p.Wells, p.Receptors)
	return p, findings, p.Site.Check()
}

func printWarnings(findings gisio.Findings, s streams) {
	for _, f := range findings.Warnings() {
		fmt.Fprintln(s.err, "warning:", f)
	}
}

// newJob reads, meshes, assembles and factors.
func newJob(ctx context.Context, c solving, s streams) (*job, error) {
	return newJobAbout(ctx, c, s, func(*job) error { return nil })
}

// newJobInState is newJob for one operating state alone, the default one where name is empty.
func newJobInState(ctx context.Context, c solving, s streams, name string) (*job, error) {
	return newJobAbout(ctx, c, s, func(j *job) error { return j.onlyState(name) })
}

// newJobAbout is newJob after a change of the project as read.
func newJobAbout(ctx context.Context, c solving, s streams, change func(*job) error) (*job, error) {
	j := &job{progress: newProgress(s, c.Quiet)}
	if info, err := os.Stat(c.Out); c.Out != "" && err == nil && !info.IsDir() {
		return nil, usagef("--out %s is a file; name a folder", c.Out)
	}
	j.progress.report("reading", 0, 1)
	p, findings, err := readProject(ctx, c.common, s)
	if err != nil {
		j.progress.clear()
		return nil, err
	}
	j.project, j.findings = p, findings
	if !c.Quiet {
		j.progress.clear()
		printWarnings(findings, s)
	}
	scaleRecharge(p)
	if err := change(j); err != nil {
		j.progress.clear()
		return nil, err
	}
	if err := j.build(ctx, c.Workers); err != nil {
		return nil, err
	}
	return j, nil
}

// build meshes, assembles, factors and settles the state without pumping.
func (j *job) build(ctx context.Context, workers int) error {
	j.workers = workers
	model, err := aquifer.Build(ctx, &j.project.Site, j.modelOptions(workers))
	if err != nil {
		return err
	}
	return j.watch(ctx, model)
}

// modelOptions are the wishes for the mesh.
func (j *job) modelOptions(workers int) aquifer.Options {
	m := j.project.Mesh
	return aquifer.Options{Nodes: m.Nodes, Finest: m.Finest, Growth: m.Growth, Workers: workers, Memory: availableMemory(), Progress: j.progress.report, Alter: j.alter}
}

// watch puts wells and receptors into a model and settles the state without pumping.
func (j *job) watch(ctx context.Context, model *aquifer.Model) (err error) {
	p := j.project
	if j.field, err = adjoint.NewField(model, p.Wells, p.Receptors); err != nil {
		return err
	}
	if p.Brief.Aim == plan.LeastEnergy { // every lift answers to every rate
		j.field.WatchLevels(func(w wells.Well) bool {
			fixed := w.Mode == wells.Fixed && !w.Others && w.FixedRate > 0 && w.PumpEfficiency != nil && w.DeliveryLevel != nil
			return !w.Outage && (w.Mode == wells.Decided || fixed)
		})
	}
	if r := j.relativeRecharge; r != 0 && r != 1 {
		if j.field, err = j.field.InState(r); err != nil {
			return err
		}
	}
	base, err := j.field.BaseState(ctx)
	if err != nil {
		return err
	}
	j.field.Switching = len(base.Off) > 0
	if len(p.States) > 1 {
		return j.buildStates(ctx)
	}
	return nil
}

// scaleRecharge applies the default operating state's recharge factor.
func scaleRecharge(p *gisio.Project) {
	for _, s := range p.States {
		if !s.Default || s.RechargeFactor == 1 {
			continue
		}
		scaled := func(r *aquifer.Parameter) *aquifer.Parameter {
			if r == nil {
				return nil
			}
			out := *r
			out.Best *= s.RechargeFactor
			return &out
		}
		p.Site.Background.Recharge = scaled(p.Site.Background.Recharge)
		for i := range p.Site.Zones {
			p.Site.Zones[i].Recharge = scaled(p.Site.Zones[i].Recharge)
		}
		p.Assumptions = append(p.Assumptions, plan.Assumption{What: "recharge factor of operating state " + s.Name, Value: fmt.Sprintf("%g", s.RechargeFactor), Basis: "not stated"})
	}
}

// switchTexts names the features that a state takes past the level where their exchange changes, one a feature at its worst place.
func switchTexts(m *aquifer.Model, heads []float64, state string) []string {
	what := map[aquifer.FeatureKind]string{
		aquifer.SpringFeature:  "its outlet: it gives nothing",
		aquifer.RiverFeature:   "its bed: it has lost contact there and gives what it gives at that level",
		aquifer.LakeFeature:    "its bed: it has lost contact there and gives what it gives at that level",
		aquifer.LeakageFeature: "the confining layer's base: leakage does not grow any more there",
	}
	var out []string
	for _, sw := range m.Switches(heads) {
		out = append(out, fmt.Sprintf("%s %s: %s the head at (%.0f, %.0f) is %.2f m, below %.2f m, %s", sw.Kind, sw.Name, state, sw.At[0], sw.At[1], sw.Head, sw.Lowest, what[sw.Kind]))
	}
	return out
}

// Linearise makes the job a plan.Model: the aquifer as the planner sees it.
func (j *job) Linearise(ctx context.Context, rates []float64) (*plan.Response, error) {
	state, err := j.field.Changes(ctx, rates)
	if err != nil {
		return nil, err
	}
	if j.linear != nil && !j.field.Switching {
		if err := j.field.Tangents(ctx, state.Rows); err != nil {
			return nil, err
		}
		return j.response(state, j.linear.Rows, rates), nil
	}
	onField := j.onField
	if j.field.Switching {
		onField = nil // influence fields move with the rates; those at the plan are made when it is found
	}
	if err := j.sensitivities(ctx, state, onField); err != nil {
		return nil, err
	}
	return j.response(state, j.linear.Rows, rates), nil
}

// sensitivities makes the adjoint solves in a state and keeps them.
func (j *job) sensitivities(ctx context.Context, state *adjoint.State, onField func(row int, influence []float64) error) error {
	lin, err := j.field.Sensitivities(ctx, state, adjoint.Options{Capture: true, Field: onField,
		Progress: func(done, total int) { j.progress.report("adjoint solves", done, total) }})
	if err == nil {
		j.linear = lin
	}
	return err
}

func (j *job) response(state *adjoint.State, slopes []adjoint.Row, rates []float64) *plan.Response {
	return j.responseOf(j.field, state, slopes, rates)
}

// responseOf is the response of a field, the default state's or another's.
func (j *job) responseOf(f *adjoint.Field, state *adjoint.State, slopes []adjoint.Row, rates []float64) *plan.Response {
	r := &plan.Response{At: append([]float64(nil), rates...)}
	for w, well := range f.Wells {
		r.Wells = append(r.Wells, well.ID)
		r.WellHeads = append(r.WellHeads, state.Heads[f.Node(w)])
	}
	for i, row := range state.Rows {
		out := plan.Row{Base: row.Base, Change: row.Change, Slope: row.Slope, Linear: row.Linear, Local: row.Local, Unit: "m"}
		if out.Slope == nil {
			out.Slope = slopes[i].Slope
		}
		if row.Receptor >= 0 {
			out.Receptor, out.Unit = f.Receptors[row.Receptor].ID, f.Receptors[row.Receptor].Kind.Unit()
		} else {
			out.Well = f.Wells[row.Well].ID
		}
		if row.Place >= 0 {
			at := f.Model.At(row.Place)
			out.Place = j.placeText(at)
		}
		r.Rows = append(r.Rows, out)
	}
	return r
}

// placeText names a place in the working plane and on the globe.
func (j *job) placeText(at [2]float64) string {
	text := fmt.Sprintf("x %.0f m, y %.0f m", at[0], at[1])
	if lon, lat, err := j.project.Plane.Inverse(at[0], at[1]); err == nil {
		text += fmt.Sprintf(" (%.5f, %.5f)", lon, lat)
	}
	return text
}

// brief is what the planner is asked for.
func (j *job) brief(ctx context.Context) (plan.Brief, error) {
	p := j.project
	b := plan.Brief{Aim: p.Brief.Aim, Demand: p.Brief.Demand, Quotas: p.Brief.Quotas, AtMostRunning: p.Brief.AtMostRunning, Together: p.Brief.Together, Exclude: p.Brief.Exclude, Wells: p.Wells, Receptors: p.Receptors,
		Limits: p.Limits, Licences: p.Licences, States: p.States}
	base, err := j.field.Base(ctx)
	if err != nil {
		return b, err
	}
	for w := range p.Wells {
		b.WellTerms = append(b.WellTerms, plan.WellTerm{OwnDrawdown: j.field.Below(w), StaticLevel: base[j.field.Node(w)]})
	}
	b.StateTerms, err = j.stateTerms(ctx, b.WellTerms)
	return b, err
}

func finiteOrNil(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}
