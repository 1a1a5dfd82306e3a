package plan

import (
	"math"

	"springbound/wells"
)

// setup is the brief with everything looked up: indices instead of ids, one list of quotas, the default operating state.
type setup struct {
	Brief
	wellIndex     map[string]int
	receptorIndex map[string]int
	state         string    // name of the default operating state; may be empty
	demand        *float64  // required total of the decided wells' pumped rates [m³/d]
	demands       []demand  // the same, one an operating state that has one
	decided       []int     // wells with a column in the programme
	column        []int     // column of each well; -1: none
	standing      []float64 // rates of the wells that are not decided, zero for the decided ones [m³/d]
	quotas        []quota
	rules         []runningRule // which wells may run

	findings    notes
	cautions    notes
	notAssessed notes
	invalid     notes
}

// newSetup checks the brief and looks everything up. All faults are reported at once in a *DataError.
func newSetup(b Brief) (*setup, error) {
	if len(b.WellTerms) != len(b.Wells) {
		panic("plan: Brief.WellTerms and Brief.Wells differ in length")
	}
	s := &setup{Brief: b, wellIndex: map[string]int{}, receptorIndex: map[string]int{}, demand: b.Demand}
	var faults problemList
	for i, w := range b.Wells {
		if _, twice := s.wellIndex[w.ID]; twice {
			faults.addf("two wells have the id %q", w.ID)
		}
		s.wellIndex[w.ID] = i
		checkWell(&faults, w, b.WellTerms[i])
	}
	for i, r := range b.Receptors {
		if _, twice := s.receptorIndex[r.ID]; twice {
			faults.addf("two receptors have the id %q", r.ID)
		}
		s.receptorIndex[r.ID] = i
	}
	for _, l := range b.Limits {
		s.checkLimit(&faults, l)
	}
	s.readState(&faults)
	faults.optional(s.demand, "the demand")
	if s.demand != nil && *s.demand < 0 {
		faults.addf("the demand is %v m³/d, below zero", *s.demand)
	}
	s.readQuotas(&faults)
	if err := faults.err(); err != nil {
		return nil, err
	}
	s.standing = make([]float64, len(b.Wells))
	s.column = make([]int, len(b.Wells))
	for i, w := range b.Wells {
		s.column[i] = -1
		switch {
		case w.Mode == wells.Off || w.Outage:
		case w.Mode == wells.Fixed:
			s.standing[i] = w.FixedRate
		default:
			s.column[i] = len(s.decided)
			s.decided = append(s.decided, i)
		}
	}
	s.readDemands()
	s.readRules(&faults)
	if err := faults.err(); err != nil {
		return nil, err
	}
	return s, nil
}

func checkWell(faults *problemList, w wells.Well, term WellTerm) {
	faults.optional(w.Present, "well %s: the present rate", w.ID)
	faults.optional(w.Recent, "well %s: the recent rate", w.ID)
	faults.optional(w.Licensed, "well %s: the licensed rate", w.ID)
	faults.optional(w.Requested, "well %s: the requested rate", w.ID)
	faults.optional(w.Intake, "well %s: the pump intake", w.ID)
	faults.optional(w.LowestLevel, "well %s: the lowest allowed level", w.ID)
	for _, v := range []struct {
		value float64
		name  string
	}{
		{w.FixedRate, "fixed rate"}, {w.LinearLoss, "linear loss"}, {w.QuadraticLoss, "quadratic loss"}, {w.Radius, "radius"},
		{w.At[0], "x"}, {w.At[1], "y"}, {term.OwnDrawdown, "own drawdown"}, {term.StaticLevel, "static level"},
	} {
		faults.number(v.value, "well %s: the %s", w.ID, v.name)
	}
	if !(w.DutyHours > 0 && w.DutyHours <= 24) {
		faults.addf("well %s: %v duty hours; they must be above 0 and at most 24", w.ID, w.DutyHours)
	}
	if w.Mode != wells.Decided {
		return
	}
	switch {
	case !finite(w.Min) || !finite(w.Max):
		faults.addf("well %s: the range from %v to %v m³/d is not two finite numbers", w.ID, w.Min, w.Max)
	case w.Min > w.Max:
		faults.addf("well %s: the least rate %v m³/d is above the largest %v m³/d", w.ID, w.Min, w.Max)
	case w.Min < 0 && w.Max > 0:
		faults.addf("well %s: the range from %v to %v m³/d mixes recharge and pumping; enter two wells", w.ID, w.Min, w.Max)
	}
}

func (s *setup) checkLimit(faults *problemList, l wells.Limit) {
	if _, known := s.receptorIndex[l.Receptor]; !known {
		faults.addf("limit %s: no receptor %q", l.ID, l.Receptor)
	}
	faults.number(l.Value, "limit %s: the value", l.ID)
	if !(l.Reserve >= 0 && l.Reserve < 1) {
		faults.addf("limit %s: a reserve of %v; it must be at least 0 and below 1", l.ID, l.Reserve)
	}
	if l.Quantity == wells.Value && l.Counts == wells.Own {
		s.findings.addf("limit %s bounds a value, which every well's pumping makes: counting own wells only has no meaning and is not done", l.ID)
	}
	if l.Quantity == wells.Value && l.Baseline != wells.NoPumping {
		s.findings.addf("limit %s bounds a value, which has no baseline: its baseline is not used", l.ID)
	}
}

// readState finds the default operating state and takes its demand; the brief's where it has none. A brief with several states comes
// here one state at a time, or expanded, with none.
func (s *setup) readState(faults *problemList) {
	defaults := 0
	for _, st := range s.States {
		if !st.Default {
			continue
		}
		defaults++
		s.state = st.Name
		if st.Demand == nil {
			continue
		}
		if s.demand != nil && *st.Demand != *s.demand {
			s.findings.addf("the demand of %s of operating state %q is used, not the %s of the brief", flowText(*st.Demand), st.Name, flowText(*s.demand))
		}
		s.demand = st.Demand
	}
	if defaults > 1 {
		faults.addf("%d operating states are marked as the default; one may be", defaults)
	}
}

// isState tells whether a limit or a row belongs to the default operating state.
func (s *setup) isState(name string) bool { return name == "" || name == s.state }

// isYield tells whether a well's pumped rate counts as yield: the plan decides it and it cannot recharge.
func (s *setup) isYield(i int) bool { return s.column[i] >= 0 && s.Wells[i].Min >= 0 }

// total returns the pumped rates of the decided wells, summed in the order of the wells; over several operating states their mean [m³/d].
func (s *setup) total(rates []float64) float64 {
	sum := 0.0
	for _, i := range s.decided {
		if rates[i] > 0 {
			sum += s.weight(i) * rates[i]
		}
	}
	return sum
}

// ratesOf returns one rate a well from the given column of the well table, zero where it is blank or where keep is false.
// The wells whose blank was taken for zero are returned too.
func (s *setup) ratesOf(get func(wells.Well) *float64, keep func(wells.Well) bool) (rates []float64, blank []string) {
	rates = make([]float64, len(s.Wells))
	for i, w := range s.Wells {
		if !keep(w) {
			continue
		}
		if v := get(w); v != nil {
			rates[i] = *v
		} else {
			blank = append(blank, w.ID)
		}
	}
	return rates, blank
}

func presentRate(w wells.Well) *float64  { return w.Present }
func recentRate(w wells.Well) *float64   { return w.Recent }
func licensedRate(w wells.Well) *float64 { return w.Licensed }
func everyWell(wells.Well) bool          { return true }
func existingUser(w wells.Well) bool     { return w.Others }

// startRates is where the first linearisation is asked for and what is shown when there is no plan: the present rates of the
// decided wells (blank: zero) beside the standing wells.
func (s *setup) startRates() (rates []float64, anyPresent bool) {
	rates = append([]float64(nil), s.standing...)
	for _, i := range s.decided {
		if p := s.Wells[i].Present; p != nil {
			rates[i] = *p
			anyPresent = anyPresent || *p != 0
		}
	}
	return rates, anyPresent
}

// lowestLevel returns the lowest allowed pumping level of a well, the higher of the stated level and the pump intake, with its
// reason; nil when neither is given.
func lowestLevel(w wells.Well) (*float64, string) {
	reason := w.LowestLevelReason
	if reason == "" {
		reason = "lowest allowed level"
	}
	switch {
	case w.LowestLevel == nil && w.Intake == nil:
		return nil, ""
	case w.LowestLevel == nil, w.Intake != nil && *w.Intake > *w.LowestLevel:
		return w.Intake, "pump intake"
	}
	return w.LowestLevel, reason
}

// quadraticLoss is the turbulent part of a well's loss at a daily mean rate [m].
func quadraticLoss(w wells.Well, rate float64) float64 {
	run := w.RunningRate(rate)
	return w.QuadraticLoss * run * math.Abs(run)
}

// tidy replaces the negative zero, which would be written as "-0".
func tidy(v float64) float64 {
	if v == 0 {
		return 0
	}
	return v
}

// dot is the sum of products in the order of the wells.
func dot(a, b []float64) float64 {
	sum := 0.0
	for i, v := range a {
		sum += v * b[i]
	}
	return sum
}
