package main

import (
	"context"
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/gisio"
	"springbound/plan"
	"springbound/wells"
)

// stateJob is one operating state of a job with several: the same matrix under another recharge. It is a plan.Model.
type stateJob struct {
	job    *job
	index  int // in the project's states
	name   string
	field  *adjoint.Field
	linear *adjoint.Linear // nil: slopes are those of the default state
}

// InState makes the job a plan.StateModel.
func (j *job) InState(k int) plan.Model {
	if s := j.states[k]; s != nil {
		return s
	}
	return j
}

// defaultFactor is the recharge factor that the model was built with.
func defaultFactor(p *gisio.Project) float64 {
	for _, s := range p.States {
		if s.Default {
			return s.RechargeFactor
		}
	}
	return 1
}

// buildStates makes the fields of the operating states beside the default one and settles each without pumping: one solve a state, with the
// factorisation that is there.
func (j *job) buildStates(ctx context.Context) error {
	j.states = make([]*stateJob, len(j.project.States))
	for k, s := range j.project.States {
		if s.Default {
			continue
		}
		field, err := j.field.InState(s.RechargeFactor / defaultFactor(j.project))
		if err != nil {
			return err
		}
		base, err := field.BaseState(ctx)
		if err != nil {
			return fmt.Errorf("operating state %q: %w", s.Name, err)
		}
		field.Switching = len(base.Off) > 0
		j.states[k] = &stateJob{job: j, index: k, name: s.Name, field: field}
	}
	return nil
}

// otherStates lists the states beside the default one.
func (j *job) otherStates() []*stateJob {
	var out []*stateJob
	for _, s := range j.states {
		if s != nil {
			out = append(out, s)
		}
	}
	return out
}

// Linearise answers in this state. Where no feature switches the slopes are those of the default state, solved once.
func (s *stateJob) Linearise(ctx context.Context, rates []float64) (*plan.Response, error) {
	state, err := s.field.Changes(ctx, rates)
	if err != nil {
		return nil, err
	}
	shared := s.job.linear
	switch {
	case s.field.Switching:
		if s.linear, err = s.solve(ctx, state); err != nil {
			return nil, err
		}
		return s.job.responseOf(s.field, state, s.linear.Rows, rates), nil
	case shared == nil || s.job.field.Switching: // the default state's slopes are those of its own features
		if s.linear == nil {
			if s.linear, err = s.solve(ctx, state); err != nil {
				return nil, err
			}
		}
		shared = s.linear
	}
	if err := s.field.Tangents(ctx, state.Rows); err != nil {
		return nil, err
	}
	return s.job.responseOf(s.field, state, shared.Rows, rates), nil
}

func (s *stateJob) solve(ctx context.Context, state *adjoint.State) (*adjoint.Linear, error) {
	return s.field.Sensitivities(ctx, state, adjoint.Options{Progress: func(done, total int) { s.job.progress.report("adjoint solves", done, total) }})
}

// ratesInState are the rates that a report has for a state.
func ratesInState(r *plan.Report, k int) []float64 {
	if len(r.States) == 0 {
		return ratesOf(r)
	}
	rates := make([]float64, len(r.States[k].Wells))
	for i, w := range r.States[k].Wells {
		rates[i] = w.Rate
	}
	return rates
}

// findSwitching tells whether some feature switches under a plan's rates in a state that was taken for linear, and notes it.
func (j *job) findSwitching(ctx context.Context, rates func(k int) []float64) (found bool, err error) {
	note := func(f *adjoint.Field, k int) error {
		if f.Switching {
			return nil
		}
		state, err := f.Changes(ctx, rates(k))
		if err != nil {
			return err
		}
		f.Switching = len(state.State.Off) > 0
		found = found || f.Switching
		return nil
	}
	for k, s := range j.project.States {
		if s.Default {
			if err := note(j.field, k); err != nil {
				return false, err
			}
		}
	}
	for _, s := range j.otherStates() {
		if err := note(s.field, s.index); err != nil {
			return false, fmt.Errorf("operating state %q: %w", s.name, err)
		}
	}
	return found, nil
}

// stateTerms are the levels in the wells without pumping, by state; nil where there is one state.
func (j *job) stateTerms(ctx context.Context, first []plan.WellTerm) ([][]plan.WellTerm, error) {
	if len(j.states) == 0 {
		return nil, nil
	}
	var out [][]plan.WellTerm
	for _, s := range j.states {
		if s == nil {
			out = append(out, first)
			continue
		}
		base, err := s.field.Base(ctx)
		if err != nil {
			return nil, err
		}
		terms := append([]plan.WellTerm(nil), first...)
		for w := range terms {
			terms[w].StaticLevel = base[s.field.Node(w)]
		}
		out = append(out, terms)
	}
	return out, nil
}

// completeStates makes the checks that need the model in every state beside the default one.
func (j *job) completeStates(ctx context.Context, r *plan.Report) error {
	if len(r.States) == 0 {
		return nil
	}
	for _, s := range j.otherStates() {
		state, err := s.field.Changes(ctx, ratesInState(r, s.index))
		if err != nil {
			return fmt.Errorf("operating state %q: %w", s.name, err)
		}
		s.checkBalance(r, state)
		s.checkSources(r, state)
		s.checkConfined(r, state)
		s.checkSwitching(r, state)
		r.Audit.Factorisations += s.field.Model.Factorisations
		r.Audit.Solves += s.field.Model.Solves()
	}
	return nil
}

func (s *stateJob) checkBalance(r *plan.Report, state *adjoint.State) {
	worst, residual, throughflow := 0.0, 0.0, 0.0
	for _, x := range []struct {
		settled *aquifer.Settled
		sinks   []aquifer.Sink
	}{{state.BaseState, nil}, {state.State, s.field.Sinks(state.Rates)}} {
		b := s.field.Model.Balance(x.settled.Heads, x.sinks)
		throughflow = math.Max(throughflow, math.Max(b.In, b.Out))
		worst = math.Max(worst, math.Abs(b.In-b.Out))
		residual = math.Max(residual, x.settled.Residual(x.sinks))
	}
	if throughflow > atRest {
		worst /= throughflow
	} else {
		worst = 0
	}
	r.Audit.BalanceError, r.Audit.LinearResidual = math.Max(r.Audit.BalanceError, worst), math.Max(r.Audit.LinearResidual, residual)
	check(r, "Water balance closes ("+s.name+")", worst <= balanceTolerance, fmt.Sprintf("largest error %.1e of the throughflow, with and without pumping; allowed %.0e", worst, balanceTolerance))
	check(r, "Linear solver's residual ("+s.name+")", residual <= residualTolerance, fmt.Sprintf("%.1e, scaled; allowed %.0e", residual, residualTolerance))
}

// checkSources holds what features give against what they can, and flags edges where water flows in.
func (s *stateJob) checkSources(r *plan.Report, state *adjoint.State) {
	before := state.BaseState.Outlets()
	for i, o := range state.State.Outlets() {
		available := s.job.available(o)
		if available == nil {
			continue
		}
		if more := before[i].Outflow.Value(state.Base) - o.Outflow.Value(state.Heads); more > *available*(1+captureTolerance) {
			invalid(r, fmt.Sprintf("in the operating state %q %s %s would have to give %.0f m³/d more; only %.0f m³/d is available", s.name, o.Kind, o.Name, more, *available))
		}
	}
	for _, t := range s.field.Model.InwardFlow(state.Heads) {
		r.Cautions = append(r.Cautions, fmt.Sprintf("in the operating state %q %s", s.name, s.job.inwardText(t)))
	}
}

// checkConfined flags where the head falls below the aquifer's top in this state, at nodes and at well faces.
func (s *stateJob) checkConfined(r *plan.Report, state *adjoint.State) {
	tops, worst, at, stated := s.field.Model.Tops(), 0.0, 0, false
	for n, top := range tops {
		if math.IsNaN(top) {
			continue
		}
		stated = true
		if d := top - math.Min(state.Base[n], state.Heads[n]); d > worst {
			worst, at = d, n
		}
	}
	if !stated {
		return
	}
	detail, ok := "at every node and well face where a top is given", worst == 0
	if !ok {
		detail = fmt.Sprintf("the head is %.2f m below the top at %s", worst, s.job.placeText(s.field.Model.At(int32(at))))
	}
	for w, rate := range state.Rates {
		n := s.field.Node(w)
		if face := state.Heads[n] - s.field.Below(w)*rate; rate > 0 && face < tops[n] {
			ok = false
			detail += fmt.Sprintf("; at the face of well %s by %.2f m", s.field.Wells[w].ID, tops[n]-face)
		}
	}
	check(r, "Head above the top of the aquifer ("+s.name+")", ok, detail)
}

// checkSwitching says what switches in this state, and shows no spring with less than nothing.
func (s *stateJob) checkSwitching(r *plan.Report, state *adjoint.State) {
	name := "Features that switch (" + s.name + ")"
	texts := append(switchTexts(s.field.Model, state.Base, "without pumping"), switchTexts(s.field.Model, state.Heads, "at the plan")...)
	if len(texts) == 0 {
		r.Checks = append(r.Checks, plan.Check{Name: name, Result: "pass", Detail: "none"})
		return
	}
	for _, text := range texts {
		r.Cautions = append(r.Cautions, s.name+": "+text)
	}
	r.Checks = append(r.Checks, plan.Check{Name: name, Result: "pass", Detail: fmt.Sprintf("%d; the cautions name them; the plan was found and solved again with these states", len(texts))})
	clampSprings(r.States[s.index].Receptors)
}

// clampSprings shows no spring that has stopped with less than nothing.
func clampSprings(list []plan.ReceptorResult) {
	for i := range list {
		rec := &list[i]
		if rec.Kind != wells.SpringFlow.String() || rec.Outside {
			continue
		}
		for _, v := range []*float64{&rec.NoPumping, &rec.Value, rec.OthersRecent, rec.OthersLicensed} {
			if v != nil {
				*v = math.Max(0, *v)
			}
		}
		rec.Change = math.Min(rec.Change, rec.NoPumping)
		rec.ChangeResolved = math.Min(rec.ChangeResolved, rec.NoPumping)
	}
}

// onlyState leaves one operating state of a project: the default one where name is empty. The note says what was left out.
func (j *job) onlyState(name string) error {
	p := j.project
	if len(p.States) == 1 {
		if name != "" && name != p.States[0].Name {
			return usagef("no operating state %q; there is %q", name, p.States[0].Name)
		}
		return nil
	}
	b := plan.Brief{Wells: p.Wells, WellTerms: make([]plan.WellTerm, len(p.Wells)), Receptors: p.Receptors, Limits: p.Limits, Licences: p.Licences, Quotas: p.Brief.Quotas, Demand: p.Brief.Demand, States: p.States}
	if name == "" {
		for _, s := range p.States {
			if s.Default {
				name = s.Name
			}
		}
	}
	b, err := b.InState(name)
	if err != nil {
		return usagef("--state: %v", err)
	}
	j.relativeRecharge = b.States[0].RechargeFactor / defaultFactor(p)
	p.Wells, p.Limits, p.Licences, p.States = b.Wells, b.Limits, b.Licences, b.States
	p.Brief.Quotas, p.Brief.Demand = b.Quotas, b.Demand
	j.stateNote = fmt.Sprintf("For the operating state %q alone: the other states are left out, and yearly quantities are held as if it lasted all year.", name)
	return nil
}
