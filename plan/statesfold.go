package plan

import (
	"math"
	"reflect"
	"strings"
)

// fold turns the report of an expanded brief into one whose main sections are those of the default state, with a section for each state.
func (e *expansion) fold(in *Report) *Report {
	out := *in
	out.State = e.parts[e.first].name
	var parts []*Report
	for k := range e.parts {
		part := e.sliced(in, k)
		parts = append(parts, part)
		out.States = append(out.States, e.stateResult(part, k))
	}
	main := parts[e.first]
	st := out.States[e.first]
	out.Wells, out.Receptors, out.Sensitivities, out.Contributions, out.Quotas = main.Wells, main.Receptors, main.Sensitivities, main.Contributions, main.Quotas
	out.TotalRate, out.Demand, out.DemandPrice, out.DemandRange = st.Total, st.Demand, st.DemandPrice, st.DemandRange
	out.PumpingEnergy, out.Requests = st.PumpingEnergy, e.requests(main)
	out.YearQuotas = []YearQuota{}
	for _, q := range in.Quotas {
		if len(marksIn(q.Name)) > 0 {
			continue
		}
		y := YearQuota{States: []string{}}
		for _, k := range marksIn(strings.Join(q.Wells, "")) {
			y.States = append(y.States, e.parts[k].name)
		}
		q.Wells = append([]string{}, unmarkedNames(q.Wells)...)
		q.Range = e.rangeWords(q.Range, -1)
		y.Quota = q
		out.YearQuotas = append(out.YearQuotas, y)
	}
	out.Headline = e.headline(in, &out)
	out.WorstLimit = e.words(in.WorstLimit, -1)
	out.Findings = append(append([]string(nil), e.findings...), e.foldNotes(in.Findings)...)
	out.NotAssessed = append(append([]string(nil), e.notAssessed...), e.foldNotes(in.NotAssessed)...)
	out.Cautions, out.Invalid = append(e.foldNotes(in.Cautions), e.unlicensed...), e.foldNotes(in.Invalid)
	out.Audit.NegativeSensitivities = e.foldNotes(in.Audit.NegativeSensitivities)
	out.Checks = e.foldChecks(in.Checks)
	e.reword(reflect.ValueOf(&out.Switching), -1)
	e.reword(reflect.ValueOf(&out.Conflict), -1)
	if out.Conflict != nil {
		for _, text := range e.unlicensed { // else a demand seems to fail for no reason
			out.Conflict.Sentence += " " + text + "."
		}
	}
	return &out
}

// foldChecks turns the marks of checks into words; a line that every state has alike stands once.
func (e *expansion) foldChecks(in []Check) []Check {
	var out []Check
	lines := map[Check]int{}
	for _, c := range in {
		if len(marksIn(c.Name)) > 0 {
			lines[Check{unmarked(c.Name), c.Result, unmarked(c.Detail)}]++
		}
	}
	for _, c := range in {
		plain := Check{unmarked(c.Name), c.Result, unmarked(c.Detail)}
		switch n := lines[plain]; {
		case n == 0:
			out = append(out, Check{c.Name, c.Result, e.words(c.Detail, -1)})
		case n != len(e.parts):
			out = append(out, Check{e.words(c.Name, -1), c.Result, e.words(c.Detail, -1)})
		default:
			out = append(out, plain)
			lines[plain] = -1
		}
	}
	return e.firstOnly(out)
}

// firstOnly drops repetitions.
func (e *expansion) firstOnly(in []Check) []Check {
	seen := map[Check]bool{}
	var out []Check
	for _, c := range in {
		if !seen[c] {
			out = append(out, c)
		}
		seen[c] = true
	}
	return out
}

// sliced takes state k's wells, receptors, tables and hourly and daily quotas out of a report of all, with words of its own.
func (e *expansion) sliced(in *Report, k int) *Report {
	n, m := len(e.outer.Wells), len(e.outer.Receptors)
	out := &Report{Wells: append([]WellResult(nil), in.Wells[k*n:(k+1)*n]...), Receptors: append([]ReceptorResult(nil), in.Receptors[k*m:(k+1)*m]...)}
	for i := range out.Wells {
		w := &out.Wells[i]
		if len(w.DrawdownByWell) > 0 {
			w.DrawdownByWell = append([]float64(nil), w.DrawdownByWell[k*n:(k+1)*n]...)
		}
		w.RateRange, w.LevelRange = e.rangeWords(w.RateRange, k), e.rangeWords(w.LevelRange, k)
	}
	for i := range out.Receptors {
		r := &out.Receptors[i]
		r.Name = e.outer.Receptors[i].Name
		r.Limits = append([]LimitResult{}, r.Limits...)
		for j := range r.Limits {
			l := &r.Limits[j]
			l.State, l.Range = e.parts[k].name, e.rangeWords(l.Range, k)
		}
	}
	out.Sensitivities, out.Contributions = e.slicedTable(in.Sensitivities, k), e.slicedTable(in.Contributions, k)
	out.Quotas = []QuotaResult{}
	for _, q := range in.Quotas {
		if marks := marksIn(q.Name); len(marks) == 1 && marks[0] == k {
			q.Wells, q.Range = append([]string(nil), q.Wells...), e.rangeWords(q.Range, k)
			out.Quotas = append(out.Quotas, q)
		}
	}
	e.reword(reflect.ValueOf(out), k)
	return out
}

// rangeWords copies a range, which several lines may share, with its marks in words.
func (e *expansion) rangeWords(r *PriceRange, own int) *PriceRange {
	if r == nil {
		return nil
	}
	out := *r
	out.LooserThen, out.TighterThen = e.words(r.LooserThen, own), e.words(r.TighterThen, own)
	return &out
}

func (e *expansion) slicedTable(in Table, k int) Table {
	n := len(e.outer.Wells)
	out := Table{Receptors: []string{}, Units: []string{}, Wells: append([]string(nil), in.Wells[k*n:(k+1)*n]...), Values: [][]float64{}}
	for i, id := range in.Receptors {
		if marks := marksIn(id); len(marks) == 1 && marks[0] == k {
			out.Receptors, out.Units = append(out.Receptors, id), append(out.Units, in.Units[i])
			out.Values = append(out.Values, append([]float64(nil), in.Values[i][k*n:(k+1)*n]...))
		}
	}
	return out
}

// stateResult is the section of state k.
func (e *expansion) stateResult(part *Report, k int) StateResult {
	s, p := e.outer.States[k], e.parts[k]
	r := StateResult{Name: s.Name, Default: s.Default, Months: append([]int{}, s.Months...), Weight: p.share, RechargeFactor: s.RechargeFactor, Demand: p.demand,
		Binds: []string{}, Receptors: part.Receptors, Sensitivities: part.Sensitivities, Quotas: part.Quotas, Wells: []StateWell{}}
	if s.Days > 0 {
		r.Days = &e.outer.States[k].Days
	}
	for _, d := range e.demands {
		if d.state == k {
			r.DemandPrice, r.DemandRange = d.price, e.rangeWords(d.priceRange, k)
		}
	}
	for _, w := range part.Wells {
		line := StateWell{ID: w.ID, Mode: w.Mode, Rate: w.Rate, Running: w.Running, AtBound: w.AtBound, ShadowPrice: w.ShadowPrice, StaticLevel: w.StaticLevel,
			PumpingLevel: w.PumpingLevel, LowestLevel: w.LowestLevel, LevelMargin: w.LevelMargin, LevelShadowPrice: w.LevelShadowPrice, RateRange: w.RateRange, LevelRange: w.LevelRange}
		if r.Days != nil {
			volume := w.Rate * s.Days
			line.Volume = &volume
		}
		r.Wells = append(r.Wells, line)
		if w.Mode == "decided" && w.Rate > 0 && !e.outOfService(w.ID) {
			r.Total += w.Rate
		}
	}
	e.binds(part, &r)
	r.PumpingEnergy = energyOf(part.Wells)
	return r
}

func (e *expansion) outOfService(id string) bool {
	for _, w := range e.outer.Wells {
		if w.ID == id {
			return w.Outage
		}
	}
	return false
}

// binds names what holds a state's rates, and its worst margin.
func (e *expansion) binds(part *Report, r *StateResult) {
	worst := func(share float64, words string) {
		if r.WorstMargin == nil || share < *r.WorstMargin {
			r.WorstMargin, r.WorstLimit = &share, words
		}
	}
	for _, rec := range part.Receptors {
		name := rec.Name
		if name == "" {
			name = rec.ID
		}
		for _, l := range rec.Limits {
			switch words := "limit " + l.ID + " at " + name; {
			case l.Passed:
				r.Binds = append(r.Binds, words+" (passed)")
			case l.Binds:
				r.Binds = append(r.Binds, words)
			}
			if l.RoomShare != nil && l.ResultState == "yes" {
				worst(*l.RoomShare, "limit "+l.ID+" at "+name)
			}
		}
	}
	for _, w := range part.Wells {
		if w.LevelMargin == nil || w.Rate == 0 {
			continue
		}
		size := math.Abs(w.StaticLevel - *w.LowestLevel)
		if w.LevelShadowPrice > 0 || math.Abs(*w.LevelMargin) <= limitTolerance*size {
			r.Binds = append(r.Binds, "lowest level in well "+w.ID)
		}
		if size > 0 {
			worst(tidy(*w.LevelMargin/size), "lowest level in well "+w.ID)
		}
	}
	for _, q := range part.Quotas {
		if q.Binds {
			r.Binds = append(r.Binds, q.Name+" "+q.Basis)
		}
	}
	if d := r.Demand; d != nil && *d > 0 && math.Abs(r.Total-*d) <= limitTolerance**d {
		r.Binds = append(r.Binds, "its demand")
	}
}

// requests sums the requests of the default state; nil for another aim.
func (e *expansion) requests(main *Report) *RequestTotal {
	if e.outer.Aim != ClosestToRequests {
		return nil
	}
	t := &RequestTotal{}
	for _, w := range main.Wells {
		if w.Request == nil {
			continue
		}
		t.Wells++
		if w.Request.Sentence == "Met." {
			t.Met++
		}
		t.Asked += *w.Requested
		t.Short += math.Max(0, w.Request.Short)
		if size := math.Max(math.Abs(w.Min), math.Abs(w.Max)); size > 0 {
			t.Squares += (w.Request.Short / size) * (w.Request.Short / size)
		}
	}
	return t
}
