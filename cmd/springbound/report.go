package main

import (
	"context"
	"fmt"
	"math"
	"sort"
	"strings"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/plan"
	"springbound/wells"
)

// Tolerances of the checks that only the whole chain can make.
const (
	// balanceTolerance: in and out are sums of up to a million terms of a direct solve; a lost term is larger by far.
	balanceTolerance = 1e-9
	// atRest is the throughflow below which no water moves but by rounding [m³/d]: a millilitre a day.
	atRest = 1e-6
	// residualTolerance is a few hundred units of rounding, scaled: what a backward stable direct solve leaves.
	residualTolerance = 1e-12
	// reciprocityTolerance: a symmetric matrix gives equal pairs up to the rounding of two solves.
	reciprocityTolerance = 1e-10
	// captureTolerance: the shares of a well sum to 1 up to the rounding of the adjoint solves.
	captureTolerance = 1e-9
	// handTolerance: Thiem's difference between two circles is exact in a uniform disc; what is left is the mesh.
	handTolerance = 0.02
)

// complete fills the parts of the report that need the model: mesh, balances, capture, checks, places, inputs.
func (j *job) complete(ctx context.Context, r *plan.Report) (*adjoint.State, error) {
	rates := ratesOf(r)
	state, err := j.field.Changes(ctx, rates)
	if err != nil {
		return nil, err
	}
	if j.field.Switching {
		if err := j.sensitivities(ctx, state, j.onField); err != nil {
			return nil, err
		}
	}
	j.headings(r)
	j.meshInfo(r)
	j.wellPlaces(r)
	j.capture(r, rates)
	j.balances(r, state)
	j.audit(r, state)
	if err := j.observations(ctx, r); err != nil {
		return nil, err
	}
	j.confined(r, state)
	j.switching(r, state)
	j.turned(r, state)
	if err := j.hand(ctx, r, rates); err != nil {
		return nil, err
	}
	if err := j.discretisation(ctx, r, state); err != nil {
		return nil, err
	}
	if err := j.completeStates(ctx, r); err != nil {
		return nil, err
	}
	j.timeScale(r)
	j.notDone(r)
	return state, nil
}

func (j *job) headings(r *plan.Report) {
	p := j.project
	r.Schema, r.Version, r.Program = plan.SchemaName, plan.SchemaVersion, "springbound "+version()
	r.Title, r.Plane, r.Datum = p.Title, p.PlaneNote, p.Datum
	r.PreparedFor, r.PreparedBy, r.Reference = p.Report.PreparedFor, p.Report.PreparedBy, p.Report.Reference
	r.RateUnit, r.Period = p.Report.Units, "steady"
	r.Inputs, r.Assumptions = p.Inputs, p.Assumptions
	for _, f := range j.findings.Warnings() {
		r.Findings = append(r.Findings, f.String())
	}
	for _, o := range j.field.Model.Overlaps {
		r.Findings = append(r.Findings, o.String())
	}
}

func (j *job) meshInfo(r *plan.Report) {
	m := j.field.Model
	q := m.Mesh.Quality
	r.Mesh = plan.MeshInfo{Nodes: q.Nodes, Triangles: q.Triangles, MinAngle: q.MinAngleDeg, SharpInput: q.PoorAtSharpInput,
		FinestM: m.FinestSize, CoarsestM: q.Coarsest, Growth: j.growth(), BudgetHit: q.BudgetHit, Notes: []string{}}
	for _, n := range m.Mesh.Notes {
		r.Mesh.Notes = append(r.Mesh.Notes, fmt.Sprintf("%s, at x %.1f m, y %.1f m", n.Text, n.At[0], n.At[1]))
	}
	if q.BudgetHit {
		r.Findings = append(r.Findings, fmt.Sprintf("the mesh stopped at its budget of nodes (%d): the result is coarser than asked for", q.Nodes))
	}
}

func (j *job) growth() float64 {
	if g := j.project.Mesh.Growth; g > 0 {
		return g
	}
	return aquifer.DefaultGrowth
}

func (j *job) wellPlaces(r *plan.Report) {
	tops := j.field.Model.Tops()
	for i := range r.Wells {
		w := &r.Wells[i]
		if lon, lat, err := j.project.Plane.Inverse(w.X, w.Y); err == nil {
			w.Longitude, w.Latitude = lon, lat
		}
		w.AquiferTop = finiteOrNil(tops[j.field.Node(i)])
	}
}

func (j *job) capture(r *plan.Report, rates []float64) {
	net := 0.0
	for i, q := range rates {
		net += q
		r.CaptureWells = append(r.CaptureWells, r.Wells[i].ID)
	}
	sums := make([]float64, len(rates))
	for _, c := range j.linear.Capture {
		line := plan.Capture{Feature: c.Feature.Name, Kind: string(c.Feature.Kind), ShareByWell: c.Share, Available: j.available(c.Feature)}
		for w, share := range c.Share {
			line.Flow += share * rates[w]
			sums[w] += share
		}
		if net > 0 {
			share := line.Flow / net
			line.Share = &share
		}
		r.Capture = append(r.Capture, line)
		if line.Available != nil && line.Flow > *line.Available*(1+captureTolerance) {
			invalid(r, fmt.Sprintf("%s %s would have to give %.0f m³/d more; only %.0f m³/d is available", line.Kind, line.Feature, line.Flow, *line.Available))
		}
	}
	for _, s := range sums {
		r.Audit.CaptureSumError = math.Max(r.Audit.CaptureSumError, math.Abs(s-1))
	}
	check(r, "Capture of every well sums to 1", r.Audit.CaptureSumError <= captureTolerance, fmt.Sprintf("largest difference %.1e", r.Audit.CaptureSumError))
}

// available is the flow that a feature can give at most, where stated.
func (j *job) available(o aquifer.Outlet) *float64 {
	s := j.field.Model.Site
	switch o.Kind {
	case aquifer.EdgeFeature:
		return s.Edges[o.Index].AvailableFlow
	case aquifer.RiverFeature:
		return s.Rivers[o.Index].AvailableFlow
	case aquifer.LakeFeature:
		return s.Lakes[o.Index].AvailableFlow
	}
	return nil
}

func invalid(r *plan.Report, text string) {
	r.ModelValid = false
	r.Invalid = append(r.Invalid, text)
}

func check(r *plan.Report, name string, ok bool, detail string) {
	result := "fail"
	if ok {
		result = "pass"
	} else {
		invalid(r, name+": failed ("+detail+")")
	}
	r.Checks = append(r.Checks, plan.Check{Name: name, Result: result, Detail: detail})
}

func notDone(r *plan.Report, name, why string) {
	r.Checks = append(r.Checks, plan.Check{Name: name, Result: "not done", Detail: why})
}

func (j *job) balances(r *plan.Report, state *adjoint.State) {
	m := j.field.Model
	worst := 0.0
	states := []struct {
		name  string
		state *aquifer.Settled
		sinks []aquifer.Sink
	}{{"without pumping", state.BaseState, nil}, {"at the plan", state.State, j.field.Sinks(state.Rates)}}
	throughflow := 0.0 // the larger of the two states: water at rest has none of its own
	for _, s := range states {
		b := m.Balance(s.state.Heads, s.sinks)
		throughflow = math.Max(throughflow, math.Max(b.In, b.Out))
	}
	for _, s := range states {
		b := m.Balance(s.state.Heads, s.sinks)
		out := plan.Balance{State: s.name, In: b.In, Out: b.Out}
		if throughflow > atRest {
			out.Error = (b.In - b.Out) / throughflow
		}
		for _, f := range append(b.Features, b.Wells) {
			kind := string(f.Kind)
			if kind == "" {
				kind = "wells"
			}
			out.Lines = append(out.Lines, plan.BalanceLine{Feature: f.Feature, Kind: kind, In: f.In, Out: f.Out})
		}
		r.Balances = append(r.Balances, out)
		worst = math.Max(worst, math.Abs(out.Error))
		r.Audit.LinearResidual = math.Max(r.Audit.LinearResidual, s.state.Residual(s.sinks))
	}
	r.Audit.BalanceError = worst
	check(r, "Water balance closes", worst <= balanceTolerance, fmt.Sprintf("largest error %.1e of the throughflow, in both states; allowed %.0e", worst, balanceTolerance))
	check(r, "Linear solver's residual", r.Audit.LinearResidual <= residualTolerance, fmt.Sprintf("%.1e, scaled; allowed %.0e", r.Audit.LinearResidual, residualTolerance))
	drawdown := make([]float64, len(state.Heads))
	for n := range drawdown {
		drawdown[n] = state.Base[n] - state.Heads[n]
	}
	for _, s := range m.NoFlowOutline(drawdown) {
		r.NoFlow = append(r.NoFlow, plan.NoFlowStretch{From: j.placeText(s.From), Length: s.Length, Drawdown: s.Worst})
	}
}

func (j *job) audit(r *plan.Report, state *adjoint.State) {
	m := j.field.Model
	r.Audit.Factorisations, r.Audit.Solves, r.Audit.Functionals = m.Factorisations, m.Solves(), j.linear.Distinct
	r.Audit.WrongSigns = m.CountWrongSigns()
	if math.IsNaN(j.linear.Reciprocity) {
		notDone(r, "Reciprocity of wells and receptors", "fewer than two watched points")
	} else {
		r.Audit.Reciprocity = j.linear.Reciprocity
		check(r, "Reciprocity of wells and receptors", j.linear.Reciprocity <= reciprocityTolerance, fmt.Sprintf("largest difference of a pair %.1e; allowed %.0e", j.linear.Reciprocity, reciprocityTolerance))
	}
	if r.Audit.WrongSigns > 0 {
		r.Findings = append(r.Findings, fmt.Sprintf("%d couplings between nodes have the wrong sign (a line faces an obtuse angle at a sharp corner, or strong anisotropy): a small negative sensitivity is possible near them", r.Audit.WrongSigns))
	}
}

// observations compares with the state under present pumping.
func (j *job) observations(ctx context.Context, r *plan.Report) error {
	p := j.project
	if len(p.Observations) == 0 {
		r.NotAssessed = append(r.NotAssessed, "not calibrated: no observations were given")
		notDone(r, "Comparison with observations", "none were given")
		return nil
	}
	rates := make([]float64, len(p.Wells))
	unknown := 0
	for i, w := range p.Wells {
		switch {
		case w.Present != nil:
			rates[i] = *w.Present
		case w.Mode != wells.Off:
			unknown++
		}
	}
	state, err := j.field.Changes(ctx, rates)
	if err != nil {
		return err
	}
	for _, o := range p.Observations {
		fit := plan.ObservationFit{ID: o.ID, Kind: o.Kind.String(), Unit: o.Kind.Unit(), Observed: o.Value, Date: o.Date, Source: o.Source}
		value, ok := j.observed(o, state.Heads)
		if !ok {
			r.Findings = append(r.Findings, "observation "+o.ID+" lies outside the model or names no feature of it; it is not compared")
			continue
		}
		fit.Modelled = value
		r.Observations = append(r.Observations, fit)
	}
	detail := fmt.Sprintf("%d observations beside the model's steady state under present pumping", len(r.Observations))
	if unknown > 0 {
		detail += fmt.Sprintf("; %d wells without a known present rate count as 0", unknown)
	}
	r.Checks = append(r.Checks, plan.Check{Name: "Comparison with observations", Result: "not done", Detail: detail + "; the fit is for the reviewer to judge, nothing was adjusted"})
	r.NotAssessed = append(r.NotAssessed, "not calibrated: observations are shown beside the model, nothing was fitted to them")
	return nil
}

func (j *job) observed(o wells.Observation, h []float64) (float64, bool) {
	if o.Kind == wells.PointLevel {
		return j.field.Model.Interpolate(h, o.At)
	}
	for _, out := range j.field.Model.Outlets() {
		if out.Name == o.Feature {
			return out.Outflow.Value(h), true
		}
	}
	return 0, false
}

// confined flags where the head falls below the aquifer's top, at nodes and at well faces, without pumping and at the plan.
func (j *job) confined(r *plan.Report, state *adjoint.State) {
	tops := j.field.Model.Tops()
	stated, worst, at, where := 0, 0.0, int32(0), ""
	for _, s := range []struct {
		name  string
		heads []float64
	}{{"without pumping", state.Base}, {"at the plan", state.Heads}} {
		for n, top := range tops {
			if math.IsNaN(top) {
				continue
			}
			stated++
			if d := top - s.heads[n]; d > worst {
				worst, at, where = d, int32(n), s.name
			}
		}
	}
	const name = "Head above the top of the aquifer"
	if stated == 0 {
		r.NotAssessed = append(r.NotAssessed, "confined condition: not checked (no top of aquifer was given)")
		notDone(r, name, "no top of aquifer was given")
		return
	}
	detail := "at every node and well face where a top is given"
	if stated < 2*len(tops) {
		detail += fmt.Sprintf(" (%.0f %% of the nodes)", 50*float64(stated)/float64(len(tops)))
	}
	ok := worst == 0
	if !ok {
		detail = fmt.Sprintf("%s the head is %.2f m below the top at %s", where, worst, j.placeText(j.field.Model.At(at)))
	}
	for i, w := range r.Wells {
		if w.AquiferTop == nil || w.Rate <= 0 {
			continue
		}
		if face := w.NodeLevel - w.OwnLogarithm; face < *w.AquiferTop {
			ok = false
			detail += fmt.Sprintf("; at the face of well %s by %.2f m", r.Wells[i].ID, *w.AquiferTop-face)
		}
	}
	check(r, name, ok, detail)
}

// switching reports what switched, without pumping and at the plan, and shows no spring with less than nothing.
func (j *job) switching(r *plan.Report, state *adjoint.State) {
	const name = "Features that switch"
	texts := append(switchTexts(j.field.Model, state.Base, "without pumping"), switchTexts(j.field.Model, state.Heads, "at the plan")...)
	if len(texts) == 0 {
		r.Checks = append(r.Checks, plan.Check{Name: name, Result: "pass", Detail: "none: no spring below its outlet, no river or lake below its bed, no leakage below the confining layer's base"})
		return
	}
	r.Checks = append(r.Checks, plan.Check{Name: name, Result: "pass", Detail: strings.Join(texts, "; ") + "; the plan was found and solved again with these states"})
	r.Cautions = append(r.Cautions, texts...)
	r.Cautions = append(r.Cautions, "where features switch, sensitivities, contributions and capture are those near the plan: they do not hold for rates far from it, and prices hold near the plan only")
	clampSprings(r.Receptors)
}

// turned flags prescribed-head edges where the plan draws water in, salt water above all.
func (j *job) turned(r *plan.Report, state *adjoint.State) {
	for _, t := range j.field.Model.InwardFlow(state.Heads) {
		r.Cautions = append(r.Cautions, j.inwardText(t))
	}
}

func (j *job) inwardText(t aquifer.Turned) string {
	water := "water"
	if t.Saline {
		water = "salt water"
	}
	return fmt.Sprintf("%s flows in through edge %s: %.0f m³/d over %.0f m, most near %s", water, t.Edge, t.Inflow, t.Length, j.placeText(t.At))
}

// handCandidates is among how many of the largest rates the well for the hand formula is looked for.
const handCandidates = 6

// largestRates returns up to n wells that pump or recharge, largest first.
func largestRates(rates []float64, n int) []int {
	var out []int
	for w, q := range rates {
		if q != 0 {
			out = append(out, w)
		}
	}
	sort.SliceStable(out, func(a, b int) bool { return math.Abs(rates[out[a]]) > math.Abs(rates[out[b]]) })
	return out[:min(n, len(out))]
}

// hand compares Thiem's formula between two circles around one well with the model.
func (j *job) hand(ctx context.Context, r *plan.Report, rates []float64) error {
	well, best := -1, 0.0
	for _, w := range largestRates(rates, handCandidates) {
		far := j.handRadius(w)
		if v := math.Abs(rates[w]); far*v > best && far > 6*j.field.Model.FinestSize {
			well, best = w, far*v
		}
	}
	const name = "Hand formula (Thiem) at one well"
	if well < 0 {
		notDone(r, name, "no pumped well has a uniform circle around it that is wide enough")
		return nil
	}
	m := j.field.Model
	node := j.field.Node(well)
	far := j.handRadius(well)
	near := far / 4
	h, err := m.Heads(ctx, []aquifer.Sink{{Node: node, Rate: rates[well]}})
	if err != nil {
		return err
	}
	base, err := j.field.Base(ctx)
	if err != nil {
		return err
	}
	s := make([]float64, len(h))
	for n := range s {
		s[n] = base[n] - h[n]
	}
	drop := m.CircleMean(s, node, near) - m.CircleMean(s, node, far)
	f := &plan.HandFormula{Well: r.Wells[well].ID, Transmissivity: m.Transmissivity(node), Rate: rates[well], Near: near, Far: far, ModelDrop: drop,
		Note: "difference of the well's own drawdown, averaged over two circles around it, within ground of one transmissivity"}
	r.HandFormula = f
	want := f.Rate * math.Log(f.Far/f.Near) / (2 * math.Pi * f.Transmissivity)
	result := "pass"
	if !(math.Abs(drop/want-1) <= handTolerance) {
		result = "fail" // a reason to look, not proof that the plan is wrong
	}
	r.Checks = append(r.Checks, plan.Check{Name: name, Result: result, Detail: fmt.Sprintf("well %s between %.0f m and %.0f m: formula %.4f m, model %.4f m", f.Well, near, far, want, drop)})
	return nil
}

// handLeakage is how far the outer circle may reach as a share of the leakage length: at a fifteenth the exact difference by de Glee's formula is
// half a per cent below Thiem's.
const handLeakage = 1.0 / 15

// handRadius is the outer circle for the hand formula at a well: within ground of one transmissivity and well within the leakage length [m].
func (j *job) handRadius(w int) float64 {
	m := j.field.Model
	node := j.field.Node(w)
	return math.Min(0.8*m.UniformRadius(node), handLeakage*m.LeakageLength(node))
}

// timeScale prints how long the way to the steady state is, S L²/T, or that it is unknown.
func (j *job) timeScale(r *plan.Report) {
	m := j.field.Model
	longest, who := 0.0, ""
	for i, w := range r.Wells {
		if w.Rate == 0 {
			continue
		}
		node := j.field.Node(i)
		storage := m.Storage(node)
		if math.IsNaN(storage) {
			r.Cautions = append(r.Cautions, "time to reach this steady state: unknown (no storage coefficient was given)")
			return
		}
		l := m.DistanceToSource(node)
		if t := storage * l * l / m.Transmissivity(node); t > longest {
			longest, who = t, fmt.Sprintf("well %s, %.0f m from its nearest source of water", w.ID, l)
		}
	}
	if who != "" {
		r.Cautions = append(r.Cautions, fmt.Sprintf("time scale S L²/T to this steady state: up to about %.2g days (%s); effects go on about as long after pumping stops, and far places take longer", longest, who))
	}
}

func (j *job) notDone(r *plan.Report) {
	resting, recharged := []string{}, 0.0
	for i, w := range j.project.Wells {
		if w.DutyHours < 24 && r.Wells[i].Rate != 0 {
			resting = append(resting, w.ID)
		}
		recharged -= math.Min(0, r.Wells[i].Rate)
	}
	if len(resting) > 0 {
		r.NotAssessed = append(r.NotAssessed, "levels while the pump runs: the aquifer's part is that of the daily mean, only the well loss is that of the running rate; while pumps run fewer than 24 hours ("+strings.Join(resting, ", ")+") levels near them are lower than shown")
	}
	if recharged > 0 {
		r.Cautions = append(r.Cautions, fmt.Sprintf("the plan counts on %.0f m³/d of water to recharge, which is not part of its total", recharged))
	}
	ranged := 0
	for _, a := range r.Assumptions {
		if a.Low != "" || a.High != "" {
			ranged++
		}
	}
	r.NotAssessed = append(r.NotAssessed,
		fmt.Sprintf("parameter uncertainty: not assessed (%d inputs state a range; only the best values are used)", ranged),
		"what a confined, steady, single-layer model leaves out: change with time and season, storage, other layers, unconfined flow, water quality, density, subsidence")
	notDone(r, "Boundaries replaced by no-flow, one at a time", "springbound audit does it")
}
