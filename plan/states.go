package plan

import (
	"context"
	"errors"
	"fmt"
	"strings"

	"springbound/wells"
)

// Operating states planned together.
//
// A plan for the states s = 1 ... S has a rate Q_ws for each well in each state. The steady states do not act on each other, so that the
// change of a receptor in state s is a function of that state's rates alone, and what joins them is the year:
//
//	most-yield      maximise  sum_s (d_s/D) sum_w Q_ws         d_s days a year, D their sum
//	limits, levels in wells, hourly and daily quotas, demands and rules about running wells in each state
//	yearly quotas   sum_s d_s sum_w Q_ws <= volume
//
// The brief is expanded into one over virtual wells (well, state) and receptors (receptor, state), whose model answers state by state, and
// planned like any other; the report is folded back. A limit that names a state holds in it, one that names none in every state.

// StateModel answers for several operating states.
type StateModel interface {
	Model
	// InState returns the model of state k of Brief.States.
	InState(k int) Model
}

// expansion is what a brief with several operating states was expanded from.
type expansion struct {
	outer   Brief
	parts   []statePart
	first   int // the default state
	hasDays bool
	firm    func(ctx context.Context) (*FirmCapacity, error)
	largest int // the state whose firm capacity is asked for

	headroom float64 // the share of every limit that the plan keeps free
	demands  []demand

	findings, notAssessed notes
	unlicensed            notes // wells that stand still for want of a licence for a state's months
}

// statePart is what one operating state takes of a brief.
type statePart struct {
	name     string
	share    float64 // of the aim: its days over those of all states; equal where no days are given [-]
	year     float64 // its days over those of a year of 365.25 [-]
	demand   *float64
	wells    []wells.Well
	terms    []WellTerm
	licences []wells.Licence // in use in this state
	quotas   []Quota
	limits   []wells.Limit
	standing []string // wells that stand still because no licence of theirs is for these months
}

// stateOf returns the state of a virtual well.
func (e *expansion) stateOf(i int) int { return i / len(e.outer.Wells) }

// total is a state's total of the decided wells' pumped rates [m³/d].
func (e *expansion) total(s *setup, rates []float64, k int) float64 {
	sum := 0.0
	for _, i := range s.decided {
		if e.stateOf(i) == k && rates[i] > 0 {
			sum += rates[i]
		}
	}
	return sum
}

// weight is what a rate counts in the aim: 1, or with several operating states the share of days of its state.
func (s *setup) weight(i int) float64 {
	if s.expanded == nil {
		return 1
	}
	return s.expanded.parts[s.expanded.stateOf(i)].share
}

// partOfYear is for how much of a year of 365.25 days a rate is pumped.
func (s *setup) partOfYear(i int) float64 {
	if s.expanded == nil {
		return 1
	}
	return s.expanded.parts[s.expanded.stateOf(i)].year
}

func (s *setup) stateCount() int {
	if s.expanded == nil {
		return 1
	}
	return len(s.expanded.parts)
}

// meanWords is what is said behind an amount of the aim most-yield.
func (s *setup) meanWords() string {
	if s.expanded == nil {
		return ""
	}
	return " of the yearly mean"
}

// inStateOf tells whether a well's rate is one of the operating state that a bound is about.
func (s *setup) inStateOf(b *bound, i int) bool {
	if s.expanded == nil {
		return true
	}
	k := b.target.receptor / max(1, len(s.expanded.outer.Receptors))
	if b.target.receptor < 0 {
		k = s.expanded.stateOf(b.target.well)
	}
	return s.expanded.stateOf(i) == k
}

// inWords names the state of a bound within its sentence.
func (s *setup) inWords(b *bound) string {
	if s.expanded == nil || b.target.receptor < 0 {
		return ""
	}
	return " in " + fmt.Sprintf("%q", s.expanded.parts[b.target.receptor/len(s.expanded.outer.Receptors)].name)
}

// firmDemand is the demand that the firm capacity is held against.
func (s *setup) firmDemand() *float64 {
	if s.expanded == nil {
		return s.demand
	}
	return s.expanded.parts[s.expanded.largest].demand
}

// firmOf computes the firm capacity: with several states that of the one with the largest demand alone.
func (p *planner) firmOf(ctx context.Context, rates []float64) (*FirmCapacity, error) {
	if e := p.setup.expanded; e != nil {
		return e.firm(ctx)
	}
	return p.firmCapacity(ctx, rates)
}

// makeStates plans all operating states of a brief together.
func makeStates(ctx context.Context, b Brief, m Model, o Options) (*Report, error) {
	e, err := expand(b)
	if err != nil {
		return nil, err
	}
	block, err := e.model(m)
	if err != nil {
		return nil, err
	}
	e.firm = func(ctx context.Context) (*FirmCapacity, error) { return e.firmCapacity(ctx, block.models[e.largest]) }
	if take := o.Problem; take != nil {
		o.Problem = func(f *ProblemFile) {
			for i, line := range f.Comments {
				f.Comments[i] = e.words(strings.Replace(line, "minus the total rate", "minus the mean of the states' total rates, weighted by their days", 1), -1)
			}
			take(f)
		}
	}
	report, err := Make(ctx, e.brief(), block, o)
	if report == nil {
		return nil, e.explainError(err)
	}
	return e.fold(report), e.explainError(err)
}

// firmCapacity is that of the state with the largest demand, alone. Yearly quantities are left out: an outage passes.
func (e *expansion) firmCapacity(ctx context.Context, m Model) (*FirmCapacity, error) {
	name := e.parts[e.largest].name
	b, err := e.outer.InState(name)
	if err != nil {
		return nil, err
	}
	b.Licences, b.Quotas = append([]wells.Licence(nil), b.Licences...), append([]Quota(nil), b.Quotas...)
	for i := range b.Licences {
		b.Licences[i].PerYear = nil
	}
	for i := range b.Quotas {
		b.Quotas[i].PerYear = nil
	}
	firm, err := Firm(ctx, b, m, Options{})
	switch {
	case ctx.Err() != nil:
		return nil, err
	case err != nil || firm == nil:
		return nil, nil
	}
	firm.Note += fmt.Sprintf("; in the operating state %q alone, whose demand is the largest, and without the yearly quantities, as an outage passes", name)
	if e.parts[e.largest].demand == nil {
		firm.Note = strings.Replace(firm.Note, ", whose demand is the largest,", ", the default one,", 1)
	}
	return firm, nil
}

// EvaluateStates is Evaluate for several operating states: rates and responses are one a state, in the order of the brief's states.
func EvaluateStates(b Brief, responses []*Response, rates [][]float64) (*Report, error) {
	if len(rates) != len(b.States) || len(responses) != len(b.States) {
		panic("plan: EvaluateStates: one response and one list of rates a state are needed")
	}
	e, err := expand(b)
	if err != nil {
		return nil, err
	}
	var flat []float64
	for _, q := range rates {
		if len(q) != len(b.Wells) {
			panic("plan: EvaluateStates: one rate a well is needed")
		}
		flat = append(flat, q...)
	}
	response, err := e.join(responses)
	if err != nil {
		return nil, err
	}
	report, err := Evaluate(e.brief(), response, flat)
	if err != nil {
		return nil, e.explainError(err)
	}
	return e.fold(report), nil
}

// explainError turns the marks of an error's texts into words.
func (e *expansion) explainError(err error) error {
	var data *DataError
	var numerical *NumericalError
	switch {
	case errors.As(err, &data):
		return &DataError{Problems: e.foldNotes(data.Problems)}
	case errors.As(err, &numerical):
		return &NumericalError{Status: numerical.Status, Reason: e.words(numerical.Reason, -1)}
	case err != nil && strings.Contains(err.Error(), "\x1f"):
		return fmt.Errorf("%s", e.words(err.Error(), -1))
	}
	return err
}
