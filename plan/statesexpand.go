package plan

import (
	"fmt"
	"strconv"
	"strings"

	"springbound/wells"
)

// The days of all operating states are to add up to a year; whole days leave it between these.
const (
	leastDays = 365
	mostDays  = 366
)

// DaysError says how the days of several operating states miss a year.
type DaysError struct {
	Found, Wanted string
	Needed        bool // something in the brief counts by the year; false: only the mean over the year does
}

// Error says what to write.
func (e *DaysError) Error() string {
	return "the operating states have " + e.Found + "; write " + e.Wanted
}

// CheckDays holds the days of several operating states against the year. It returns a *DaysError or nil. Only States, Licences and Quotas
// of the brief are looked at.
func CheckDays(b Brief) error {
	if len(b.States) < 2 {
		return nil
	}
	yearly := ""
	for _, l := range b.Licences {
		if l.PerYear != nil && yearly == "" {
			yearly = "licence " + l.ID
		}
	}
	for _, q := range b.Quotas {
		if q.PerYear != nil && yearly == "" {
			yearly = "quota " + q.Name
		}
	}
	sum := 0.0
	var without []string
	for _, s := range b.States {
		sum += s.Days
		if !(s.Days > 0) {
			without = append(without, fmt.Sprintf("%q", s.Name))
		}
	}
	e := &DaysError{Wanted: "the days a year of every state, adding up to 365.25 (365 to 366)", Needed: yearly != ""}
	if e.Needed {
		e.Wanted += ", as " + yearly + " counts by the year"
	}
	switch {
	case len(without) == len(b.States):
		if e.Needed {
			e.Found = "no days"
			return e
		}
	case len(without) > 0:
		e.Found, e.Needed = "no days in "+list(without), true
		return e
	case !(sum >= leastDays && sum <= mostDays):
		e.Found = strconv.FormatFloat(sum, 'f', -1, 64) + " days in all"
		return e
	}
	return nil
}

// InState returns the brief of one operating state alone: the others, and limits that name them, are left out; licences for other
// months let their wells stand still. A yearly quantity is then held as if the state lasted all year. It fails for a name that is no
// state of the brief.
func (b Brief) InState(name string) (Brief, error) {
	for k, s := range b.States {
		if s.Name != name {
			continue
		}
		if len(b.States) == 1 {
			return b, nil
		}
		p := b.part(k)
		b.Wells, b.WellTerms, b.Licences, b.Quotas, b.Limits, b.Demand = p.wells, p.terms, p.licences, p.quotas, p.limits, p.demand
		s.Default, s.Demand = true, nil
		b.States, b.StateTerms = []wells.OperatingState{s}, nil
		return b, nil
	}
	var names []string
	for _, s := range b.States {
		names = append(names, fmt.Sprintf("%q", s.Name))
	}
	return b, &DataError{Problems: []string{fmt.Sprintf("no operating state %q; there are %s", name, list(names))}}
}

// part takes what holds in state k. Months are dropped from what is taken: they are settled.
func (b Brief) part(k int) statePart {
	st := b.States[k]
	p := statePart{name: st.Name, demand: st.Demand, wells: append([]wells.Well(nil), b.Wells...), terms: b.WellTerms}
	if b.StateTerms != nil {
		p.terms = b.StateTerms[k]
	}
	if p.demand == nil && st.Default {
		p.demand = b.Demand
	}
	for _, l := range b.Limits {
		if l.State == "" || l.State == st.Name {
			l.State = ""
			p.limits = append(p.limits, l)
		}
	}
	for _, l := range b.Licences {
		if anyMonth(st.Months, l.Months) {
			l.Months = nil
			p.licences = append(p.licences, l)
		}
	}
	for _, q := range b.Quotas {
		if anyMonth(st.Months, q.Months) {
			q.Months = nil
			p.quotas = append(p.quotas, q)
		}
	}
	for i, w := range p.wells {
		if w.Mode == wells.Decided && !b.licensedIn(w.ID, st.Months) {
			p.wells[i].Mode = wells.Off
			p.standing = append(p.standing, w.ID)
		}
	}
	return p
}

// anyMonth tells whether two lists of months share one; an empty list is every month.
func anyMonth(a, b []int) bool {
	if len(a) == 0 || len(b) == 0 {
		return true
	}
	for _, m := range a {
		if hasMonth(b, m) {
			return true
		}
	}
	return false
}

// allMonths tells whether each of some months is in a list; an empty list is every month.
func allMonths(some, months []int) bool {
	for _, m := range some {
		if !hasMonth(months, m) {
			return false
		}
	}
	return true
}

func hasMonth(months []int, m int) bool {
	for _, x := range months {
		if x == m {
			return true
		}
	}
	return len(months) == 0
}

// licensedIn tells whether each of the months is one of use of some licence of the well; so it is where the well has no licence, or
// where the months are not known.
func (b Brief) licensedIn(id string, months []int) bool {
	for _, m := range months {
		licensed, covered := false, false
		for _, l := range b.Licences {
			for _, w := range l.Wells {
				if w == id {
					licensed = true
					covered = covered || hasMonth(l.Months, m)
				}
			}
		}
		if licensed && !covered {
			return false
		}
	}
	return true
}

// expand checks what only several states can have wrong, and takes the brief apart.
func expand(b Brief) (*expansion, error) {
	one := b
	one.States, one.StateTerms, one.Demand = nil, nil, nil
	if _, err := newSetup(one); err != nil { // faults that have nothing to do with states, said once
		return nil, err
	}
	if b.StateTerms != nil && len(b.StateTerms) != len(b.States) {
		panic("plan: Brief.StateTerms and Brief.States differ in length")
	}
	e := &expansion{outer: b, first: -1}
	var faults problemList
	names := map[string]bool{}
	for k, s := range b.States {
		if names[s.Name] || s.Name == "" {
			faults.addf("operating state %d: its name %q is blank or not its own", k+1, s.Name)
		}
		names[s.Name] = true
		if s.Default {
			if e.first >= 0 {
				faults.addf("the operating states %q and %q are both marked as the default; one may be", b.States[e.first].Name, s.Name)
			}
			e.first = k
		}
		faults.optional(s.Demand, "operating state %s: the demand", s.Name)
		faults.number(s.Days, "operating state %s: the days", s.Name)
		if s.Demand != nil && *s.Demand < 0 {
			faults.addf("operating state %s: the demand is %v m³/d, below zero", s.Name, *s.Demand)
		}
	}
	if e.first < 0 {
		faults.addf("none of the %d operating states is marked as the default", len(b.States))
	}
	for _, l := range b.Limits {
		if l.State != "" && !names[l.State] {
			faults.addf("limit %s names the operating state %q, which is none", l.ID, l.State)
		}
	}
	e.checkYear(&faults)
	if err := faults.err(); err != nil {
		return nil, err
	}
	e.takeApart(&faults)
	return e, faults.err()
}

// checkYear judges the days.
func (e *expansion) checkYear(faults *problemList) {
	for _, s := range e.outer.States {
		e.hasDays = e.hasDays || s.Days > 0
	}
	err := CheckDays(e.outer)
	if err == nil {
		if !e.hasDays {
			e.findings.addf("no operating state has days: each counts alike in the mean over the year")
		}
		return
	}
	if err.(*DaysError).Needed {
		faults.addf("%v", err)
		return
	}
	e.findings.addf("%v: the mean over the year is that over these days", err)
}

// takeApart makes the parts and says what follows from months and demands.
func (e *expansion) takeApart(faults *problemList) {
	b := e.outer
	days := 0.0
	for _, s := range b.States {
		days += s.Days
	}
	e.largest = e.first
	for k, s := range b.States {
		p := b.part(k)
		p.share, p.year = 1/float64(len(b.States)), s.Days/daysPerYear
		if e.hasDays {
			p.share = s.Days / days
		}
		if p.demand == nil && (b.Aim == MostHeadroom || b.Aim == LeastEnergy) {
			faults.addf("operating state %s: the aim %s needs its demand; write 0 where nothing is asked for", s.Name, b.Aim)
		}
		e.parts = append(e.parts, p)
		if len(p.standing) > 0 {
			e.unlicensed.addf("%s: %s %s still, as no licence of %s is for all of its months", s.Name, list(p.standing), plural(len(p.standing), "stands", "stand"), plural(len(p.standing), "it", "them"))
		}
		if s.Default && s.Demand != nil && b.Demand != nil && *s.Demand != *b.Demand {
			e.findings.addf("the demand of %s of operating state %q is used, not the %s of the brief", flowText(*s.Demand), s.Name, flowText(*b.Demand))
		}
	}
	for k := range e.parts {
		if e.parts[k].demandOr(0) > e.parts[e.largest].demandOr(0) {
			e.largest = k
		}
	}
	e.sayMonths()
}

func (p *statePart) demandOr(otherwise float64) float64 { return valueOr(p.demand, otherwise) }

// sayMonths tells which months could not be judged, and what the first day of a year means.
func (e *expansion) sayMonths() {
	b := e.outer
	var without []string
	for _, s := range b.States {
		if len(s.Months) == 0 {
			without = append(without, s.Name)
		}
	}
	say := func(what, day string, months []int) {
		if len(months) > 0 && len(months) < 12 && len(without) > 0 {
			e.notAssessed.addf("%s: its months, in %s, whose months are not stated; it is taken to hold there", what, list(without))
		}
		var partly []string
		for _, s := range b.States {
			if len(s.Months) > 0 && len(months) > 0 && anyMonth(s.Months, months) && !allMonths(s.Months, months) {
				partly = append(partly, s.Name)
			}
		}
		if len(partly) > 0 {
			e.findings.addf("%s is for some of the months of %s only; it is held for the whole of %s", what, list(partly), plural(len(partly), "it", "each"))
		}
		if day != "" {
			e.notAssessed.addf("%s: its year begins on %s; every year is taken to hold all operating states with their days, so that this day makes no difference", what, day)
		}
	}
	for _, l := range b.Licences {
		say("licence "+l.ID, l.StartDay, l.Months)
		e.sayFixed(l)
	}
	for _, q := range b.Quotas {
		say("quota "+q.Name, q.StartDay, q.Months)
	}
}

// sayFixed names fixed wells that pump in months for which they have no licence: their rates are the user's.
func (e *expansion) sayFixed(l wells.Licence) {
	for _, w := range e.outer.Wells {
		if w.Mode != wells.Fixed || w.Outage || w.FixedRate == 0 || !strings.Contains("\x00"+strings.Join(l.Wells, "\x00")+"\x00", "\x00"+w.ID+"\x00") {
			continue
		}
		for _, s := range e.outer.States {
			if !e.outer.licensedIn(w.ID, s.Months) {
				e.findings.addf("well %s is fixed and runs in the operating state %q, though no licence of it is for all of its months", w.ID, s.Name)
			}
		}
	}
}

// brief is the expanded brief: state by state every well, receptor, limit and quota with its mark; yearly quotas once.
func (e *expansion) brief() Brief {
	b := e.outer
	out := Brief{Aim: b.Aim, AtMostRunning: b.AtMostRunning, expanded: e}
	marked := func(ids []string, k int) []string {
		var to []string
		for _, id := range ids {
			to = append(to, id+mark(k))
		}
		return to
	}
	years, quotaYears := map[string]wells.Licence{}, map[string]Quota{}
	for k, p := range e.parts {
		for i, w := range p.wells {
			w.ID += mark(k)
			out.Wells, out.WellTerms = append(out.Wells, w), append(out.WellTerms, p.terms[i])
		}
		for _, r := range b.Receptors {
			if r.Name == "" {
				r.Name = r.ID
			}
			if r.Kind == wells.PumpingLevel {
				r.Feature += mark(k)
			}
			r.ID, r.Name = r.ID+mark(k), r.Name+mark(k)
			out.Receptors = append(out.Receptors, r)
		}
		for _, l := range p.limits {
			l.Receptor += mark(k)
			out.Limits = append(out.Limits, l)
		}
		for _, l := range p.licences {
			year := years[l.ID]
			year.Wells = append(year.Wells, marked(l.Wells, k)...)
			years[l.ID] = year
			l.ID, l.Wells, l.PerYear = l.ID+mark(k), marked(l.Wells, k), nil
			out.Licences = append(out.Licences, l)
		}
		for _, q := range p.quotas {
			year := quotaYears[q.Name]
			year.Wells = append(year.Wells, marked(q.Wells, k)...)
			quotaYears[q.Name] = year
			q.Name, q.Wells, q.PerYear = q.Name+mark(k), marked(q.Wells, k), nil
			out.Quotas = append(out.Quotas, q)
		}
		for _, g := range b.Together {
			out.Together = append(out.Together, WellGroup{marked(g.Wells, k), g.Source})
		}
		for _, g := range b.Exclude {
			out.Exclude = append(out.Exclude, WellGroup{marked(g.Wells, k), g.Source})
		}
	}
	for _, l := range b.Licences {
		if l.PerYear != nil {
			l.Wells, l.PerHour, l.PerDay, l.Months = years[l.ID].Wells, nil, nil, nil
			out.Licences = append(out.Licences, l)
		}
	}
	for _, q := range b.Quotas {
		if q.PerYear != nil {
			q.Wells, q.PerHour, q.PerDay, q.Months = quotaYears[q.Name].Wells, nil, nil, nil
			out.Quotas = append(out.Quotas, q)
		}
	}
	return out
}
