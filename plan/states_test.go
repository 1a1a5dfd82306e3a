package plan

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"springbound/wells"
)

// stateTables answers for several operating states, each by a table of its own.
type stateTables struct{ tables []*table }

func (m *stateTables) Linearise(ctx context.Context, rates []float64) (*Response, error) {
	return m.tables[0].Linearise(ctx, rates)
}
func (m *stateTables) InState(k int) Model { return m.tables[k] }

// twoStates gives a site the states average, the default one, and peak.
func (s *site) twoStates(average, peak float64) {
	s.brief.States = []wells.OperatingState{{Name: "average", Default: true, Days: average, RechargeFactor: 1}, {Name: "peak", Days: peak, RechargeFactor: 1}}
}

func rateIn(t *testing.T, r *Report, state, well string) float64 {
	t.Helper()
	for _, s := range r.States {
		for _, w := range s.Wells {
			if s.Name == state && w.ID == well {
				return w.Rate
			}
		}
	}
	t.Fatalf("no well %s in %s", well, state)
	return 0
}

func limitIn(t *testing.T, r *Report, state, id string) LimitResult {
	t.Helper()
	for _, s := range r.States {
		if s.Name == state {
			return limitOf(t, &Report{Receptors: s.Receptors}, id)
		}
	}
	t.Fatalf("no state %s", state)
	return LimitResult{}
}

// halfSpace is a·x <= b.
type halfSpace struct {
	a []float64
	b float64
}

// bestVertex finds the largest c·x over half spaces by trying every corner: no solver of the project has a part in it.
func bestVertex(c []float64, rows []halfSpace) float64 {
	n, best := len(c), math.Inf(-1)
	pick := make([]int, n)
	var try func(k, from int)
	try = func(k, from int) {
		if k < n {
			for i := from; i < len(rows); i++ {
				pick[k] = i
				try(k+1, i+1)
			}
			return
		}
		x := corner(rows, pick)
		if x == nil {
			return
		}
		for _, r := range rows {
			scale := math.Abs(r.b)
			for j := range x {
				scale = math.Max(scale, math.Abs(r.a[j]*x[j]))
			}
			if !(dot(r.a, x) <= r.b+1e-9*scale) {
				return
			}
		}
		best = math.Max(best, dot(c, x))
	}
	try(0, 0)
	return best
}

// corner solves the picked rows as equations by elimination; nil where they do not meet in a point.
func corner(rows []halfSpace, pick []int) []float64 {
	n := len(pick)
	m := make([][]float64, n)
	for i, k := range pick {
		m[i] = append(append([]float64(nil), rows[k].a...), rows[k].b)
		size := 0.0
		for _, v := range rows[k].a {
			size = math.Max(size, math.Abs(v))
		}
		for j := range m[i] {
			m[i][j] /= size
		}
	}
	for c := range n {
		p := c
		for i := c; i < n; i++ {
			if math.Abs(m[i][c]) > math.Abs(m[p][c]) {
				p = i
			}
		}
		if !(math.Abs(m[p][c]) > 1e-10) {
			return nil
		}
		m[c], m[p] = m[p], m[c]
		for i := range n {
			if f := m[i][c] / m[c][c]; i != c && f != 0 {
				for j := c; j <= n; j++ {
					m[i][j] -= f * m[c][j]
				}
			}
		}
	}
	x := make([]float64, n)
	for i := range x {
		x[i] = m[i][n] / m[i][i]
	}
	return x
}

// Two wells in two states, with a yearly quota that both share, a daily one in each, a limit in both and one in the peak: every corner of
// the four rates is tried, and the best one is the plan's.
func TestStatesAgainstEveryCorner(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 1))
	shared := 0
	for trial := range 40 {
		within := func(from, to float64) float64 { return from + (to-from)*random.Float64() }
		most := []float64{within(500, 1500), within(500, 1500)}
		slope := [][]float64{{within(2e-4, 1e-3), within(2e-4, 1e-3)}, {within(2e-4, 1e-3), within(2e-4, 1e-3)}}
		days := []float64{within(200, 350), 0}
		days[1] = 365.25 - days[0]
		bound, own, day := within(0.3, 1), within(0.1, 0.6), within(600, 1600)
		year := within(0.3, 1) * 365.25 * day
		s := newSite(MostYield, decidedWell("A", 0, most[0]), decidedWell("B", 0, most[1]))
		s.receptor("P", wells.PointLevel, 10, slope[0]...)
		s.receptor("Q", wells.PointLevel, 10, slope[1]...)
		s.twoStates(days[0], days[1])
		s.limit("L", "P", bound)
		s.limit("S", "Q", own, func(l *wells.Limit) { l.State = "peak" })
		s.brief.Quotas = []Quota{{Name: "field", Wells: []string{"A", "B"}, PerDay: &day, PerYear: &year}}
		r := s.plan(t)
		var rows []halfSpace
		for j := range 4 {
			a, b := make([]float64, 4), make([]float64, 4)
			a[j], b[j] = 1, -1
			rows = append(rows, halfSpace{a, most[j%2]}, halfSpace{b, 0})
		}
		rows = append(rows, halfSpace{[]float64{slope[0][0], slope[0][1], 0, 0}, bound}, halfSpace{[]float64{0, 0, slope[0][0], slope[0][1]}, bound},
			halfSpace{[]float64{0, 0, slope[1][0], slope[1][1]}, own}, halfSpace{[]float64{1, 1, 0, 0}, day}, halfSpace{[]float64{0, 0, 1, 1}, day},
			halfSpace{[]float64{days[0], days[0], days[1], days[1]}, year})
		weight := []float64{days[0] / 365.25, days[0] / 365.25, days[1] / 365.25, days[1] / 365.25}
		got := 0.0
		for k, state := range []string{"average", "peak"} {
			got += days[k] / 365.25 * (rateIn(t, r, state, "A") + rateIn(t, r, state, "B"))
		}
		exact(t, fmt.Sprintf("trial %d: yearly mean", trial), got, bestVertex(weight, rows))
		if len(r.YearQuotas) != 1 || len(r.Quotas) != 1 || !(r.YearQuotas[0].Quota.Sum <= r.YearQuotas[0].Quota.Limit*(1+rounding)) {
			t.Fatalf("quotas %+v and %+v", r.Quotas, r.YearQuotas)
		}
		exact(t, "yearly sum", r.YearQuotas[0].Quota.Sum, got)
		if r.YearQuotas[0].Quota.Binds {
			shared++
		}
	}
	if shared < 5 || shared > 35 { // else one of the two cases is not seen
		t.Errorf("the yearly quota binds in %d of 40 plans", shared)
	}
}

// The peak's demand comes first, and what is left of the year's water goes to the average state.
func TestDemandInPeakYearInAverage(t *testing.T) {
	w := decidedWell("A", 0, 1000)
	w.Requested = number(500)
	s := newSite(ClosestToRequests, w)
	s.twoStates(325.25, 40)
	s.brief.States[1].Demand = number(900)
	year := 100000.0
	s.brief.Quotas = []Quota{{Name: "field", Wells: []string{"A"}, PerYear: &year}}
	r := s.plan(t)
	exact(t, "peak", rateIn(t, r, "peak", "A"), 900)
	exact(t, "average", rateIn(t, r, "average", "A"), (year-40*900)/325.25)
	exact(t, "main total", r.TotalRate, (year-40*900)/325.25)
	if !r.YearQuotas[0].Quota.Binds || r.Demand != nil || *r.States[1].Demand != 900 {
		t.Errorf("%+v, demand %v", r.YearQuotas[0], r.Demand)
	}
	if got := r.Wells[0].Request.Sentence; !strings.Contains(got, "pumped by field at most 100 000 m³ per year takes") {
		t.Errorf("%q", got)
	}
}

// A limit that names a state holds in it, one that names none in every one; a main section is the default state's.
func TestLimitsByState(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.twoStates(300, 65)
	s.limit("all", "R", 0.5)
	s.limit("dry", "R", 0.2, func(l *wells.Limit) { l.State = "peak" })
	r := s.plan(t)
	exact(t, "average", rateIn(t, r, "average", "A"), 500)
	exact(t, "peak", rateIn(t, r, "peak", "A"), 200)
	exact(t, "main", r.Wells[0].Rate, 500)
	if n := len(r.Receptors[0].Limits); n != 1 || len(r.States[1].Receptors[0].Limits) != 2 {
		t.Errorf("%d limits in the main section", n)
	}
	peak := limitIn(t, r, "peak", "dry")
	exact(t, "price per metre", peak.ShadowPrice, 1000*65./365)
	if !strings.HasPrefix(peak.Sentence, `Binds in "peak". A contributes 100 %. One more centimetre is worth 1.8 m³/d of the yearly mean, up to 30 cm more; then the limit all at R binds.`) {
		t.Errorf("%q", peak.Sentence)
	}
	if got := strings.Join(r.States[1].Binds, ";"); got != "limit dry at R" || peak.State != "peak" {
		t.Errorf("%q, %q", got, peak.State)
	}
	s.limit("lost", "R", 0.2, func(l *wells.Limit) { l.State = "winter" })
	if _, err := Make(t.Context(), s.brief, s.table, Options{}); err == nil || !strings.Contains(err.Error(), `limit lost names the operating state "winter"`) {
		t.Errorf("%v", err)
	}
}

// Two states that are alike, and one state alone, have one plan; a report about one state has no sections for several.
func TestStatesAlike(t *testing.T) {
	make := func() *site {
		s := canalStrip(MostYield, 0)
		s.brief.Demand = nil
		s.limit("L1", "P1", 0.30)
		s.limit("L2", "P2", 0.25, func(l *wells.Limit) { l.Reserve = 0.1 })
		return s
	}
	one := make().plan(t)
	if one.States != nil || one.YearQuotas != nil || one.State != "" {
		t.Errorf("one state: %v, %v, %q", one.States, one.YearQuotas, one.State)
	}
	s := make()
	s.twoStates(165, 200)
	r := s.plan(t)
	exact(t, "total", r.TotalRate, one.TotalRate)
	for i := range one.Wells {
		exact(t, one.Wells[i].ID, r.States[1].Wells[i].Rate, one.Wells[i].Rate)
	}
	exact(t, "price", limitIn(t, r, "peak", "L2").ShadowPrice+limitOf(t, r, "L2").ShadowPrice, limitOf(t, one, "L2").ShadowPrice)
	if !strings.Contains(r.Headline, "Largest yearly mean") || !strings.Contains(r.Headline, "peak") {
		t.Errorf("%q", r.Headline)
	}
	data, err := Marshal(r)
	if err != nil {
		t.Fatal(err)
	}
	if strings.Contains(string(data), "\\u001f") || strings.Contains(string(data), "\x1f") {
		t.Error("marks are left in the report")
	}
	again, err := Marshal(s.plan(t))
	if err != nil || string(again) != string(data) {
		t.Error("the same brief gives another report")
	}
}

// The states' responses differ: the base of each is its own, and most-headroom takes the smallest share over all of them.
func TestHeadroomOverStates(t *testing.T) {
	s := newSite(MostHeadroom, decidedWell("A", 0, 1000), decidedWell("B", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.0005)
	s.limit("L", "R", 9, func(l *wells.Limit) { l.Quantity, l.Sense = wells.Value, wells.AtLeast })
	s.twoStates(0, 0)
	s.brief.Demand = number(400)
	s.brief.States[1].Demand = number(600)
	s.brief.States[1].RechargeFactor = 0.5
	dry := *s.table
	dry.response.Rows = append([]Row(nil), s.table.response.Rows...)
	dry.response.Rows[0].Base = 9.6
	s.brief.StateTerms = [][]WellTerm{s.brief.WellTerms, s.brief.WellTerms}
	r, err := Make(t.Context(), s.brief, &stateTables{[]*table{s.table, &dry}}, Options{Firm: true})
	if err != nil {
		t.Fatal(err)
	}
	// in the peak 600 m³/d from B alone take 0.3 m of 0.6 m: half is left; the average state has 0.2 m of 1 m to lose
	exact(t, "peak B", rateIn(t, r, "peak", "B"), 600)
	exact(t, "room", *limitIn(t, r, "peak", "L").RoomShare, 0.5)
	exact(t, "no pumping", r.States[1].Receptors[0].NoPumping, 9.6)
	if *r.WorstMargin != *limitIn(t, r, "peak", "L").RoomShare || !strings.Contains(r.WorstLimit, "(peak)") {
		t.Errorf("%v at %q", *r.WorstMargin, r.WorstLimit)
	}
	if !strings.Contains(strings.Join(r.Findings, "\n"), "no operating state has days") || r.States[0].Days != nil {
		t.Errorf("%q", r.Findings)
	}
	if r.Firm == nil || !strings.Contains(r.Firm.Note, `in the operating state "peak" alone`) {
		t.Fatalf("firm capacity %+v", r.Firm)
	}
	exact(t, "firm: all", r.Firm.AllInService, 1000+0.1/0.001) // 0.6 m: all of B, then A
	exact(t, "firm", *r.Firm.Total, 0.6/0.001)
	if _, err := Make(t.Context(), s.brief, s.table, Options{}); err == nil || !strings.Contains(err.Error(), `"peak" has another recharge`) {
		t.Errorf("%v", err)
	}
}

// Prices are what planning anew gives: of a yearly quota, of a daily one in the peak, and of its demand.
func TestStatePricesByPlanningAnew(t *testing.T) {
	day, year := 700.0, 190000.0
	make := func() *site {
		s := newSite(MostYield, decidedWell("A", 0, 900), decidedWell("B", 0, 500))
		s.receptor("R", wells.PointLevel, 10, 0.001, 0.0004)
		s.limit("L", "R", 0.55)
		s.twoStates(305.25, 60)
		s.brief.Quotas = []Quota{{Name: "field", Wells: []string{"A", "B"}, PerDay: &day}, {Name: "A alone", Wells: []string{"A"}, PerYear: &year, Months: nil}}
		year = 100000
		return s
	}
	mean := func(s *site) float64 {
		r := s.plan(t)
		sum := 0.0
		for _, x := range r.States {
			sum += x.Weight * x.Total
		}
		return sum
	}
	s := make()
	r := s.plan(t)
	before := mean(s)
	for k, c := range []struct {
		what  string
		price float64
		by    float64
		edit  func()
	}{
		{"daily quota in both states", r.States[0].Quotas[0].ShadowPrice + r.States[1].Quotas[0].ShadowPrice, 1, func() { day++ }},
		{"yearly quota", r.YearQuotas[0].Quota.ShadowPrice / 365.25, 10, func() { year += 10 }},
		{"limit in both states", limitIn(t, r, "average", "L").ShadowPrice + limitIn(t, r, "peak", "L").ShadowPrice, 1e-3, func() { s.brief.Limits[0].Value += 1e-3 }},
	} {
		day, s = 700, make()
		c.edit()
		exact(t, fmt.Sprintf("%d, %s", k, c.what), mean(s)-before, c.price*c.by)
	}
}

// Months: a well pumps in a state only when some licence of it is for each of the state's months. A state without months is not judged.
func TestMonthsOfUse(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 100), decidedWell("B", 0, 100), decidedWell("C", 0, 100))
	s.twoStates(215.25, 150)
	s.brief.States[0].Months, s.brief.States[1].Months = []int{1, 2, 3, 4, 10, 11, 12}, []int{5, 6, 7, 8, 9}
	day, year := 70.0, 9000.0
	s.brief.Licences = []wells.Licence{
		{ID: "summer", Wells: []string{"A", "B"}, PerDay: &day, PerYear: &year, Months: []int{5, 6, 7, 8, 9}, StartDay: "06-01"},
		{ID: "early", Wells: []string{"B"}, PerDay: number(60), Months: []int{1, 2, 3, 4}},
		{ID: "late", Wells: []string{"B"}, PerDay: number(50), Months: []int{10, 11, 12}},
	}
	r := s.plan(t)
	exact(t, "A, average", rateIn(t, r, "average", "A"), 0)
	exact(t, "B, average: the stricter of two licences", rateIn(t, r, "average", "B"), 50)
	exact(t, "C, average", rateIn(t, r, "average", "C"), 100)
	exact(t, "A and B, peak: the summer licence's year", rateIn(t, r, "peak", "A")+rateIn(t, r, "peak", "B"), year/150)
	if r.Wells[0].Mode != "off" || len(r.YearQuotas) != 1 || !r.YearQuotas[0].Quota.Binds || len(r.YearQuotas[0].Quota.Wells) != 2 {
		t.Errorf("A is %s; %+v", r.Wells[0].Mode, r.YearQuotas)
	}
	said := strings.Join(slices.Concat(r.Findings, r.NotAssessed, r.Cautions), "\n")
	for _, want := range []string{"average: A stands still, as no licence of it is for all of its months", "licence summer: its year begins on 06-01",
		"licence early is for some of the months of average only; it is held for the whole of it"} {
		if !strings.Contains(said, want) {
			t.Errorf("no %q in\n%s", want, said)
		}
	}
	s.brief.States[0].Demand = number(1000)
	if c := s.plan(t).Conflict; c == nil || !strings.Contains(c.Sentence, "A stands still, as no licence of it is for all of its months") {
		t.Errorf("a demand that the licences' months forbid: %+v", c)
	}
	s.brief.States[0].Demand = nil
	s.brief.States[0].Months = nil
	r = s.plan(t)
	if !(rateIn(t, r, "average", "A") > 0) && !(rateIn(t, r, "average", "B") > 0) || !strings.Contains(strings.Join(r.NotAssessed, "\n"), "licence summer: its months, in average, whose months are not stated") {
		t.Errorf("%q", r.NotAssessed)
	}
}

// Rules about running wells hold in each state by itself, and the least rate lets a well stand still in one of them.
func TestRunningInEachState(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 300, 900), decidedWell("B", 0, 400))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.0001)
	s.limit("dry", "R", 0.2, func(l *wells.Limit) { l.State = "peak" })
	s.twoStates(300, 65.25)
	one := 1
	s.brief.AtMostRunning = &one
	r := s.plan(t)
	for _, c := range []struct {
		state, well string
		want        float64
	}{{"average", "A", 900}, {"average", "B", 0}, {"peak", "A", 0}, {"peak", "B", 400}} {
		exact(t, c.well+" in "+c.state, rateIn(t, r, c.state, c.well), c.want)
	}
	if r.Switching == nil || !strings.Contains(r.Switching.Sentence, "B (average) and A (peak) stand still") {
		t.Errorf("%+v", r.Switching)
	}
}

// A limit that holds only because a well recharges names that well once, not the same well in other states.
func TestRechargeInOneState(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), wells.Well{ID: "R", Mode: wells.Fixed, FixedRate: -200, DutyHours: 24, Radius: 0.2})
	s.receptor("P", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("L", "P", 0.3)
	s.twoStates(300, 65)
	r := s.plan(t)
	exact(t, "rate", r.Wells[0].Rate, 500)
	for _, state := range []string{"average", "peak"} {
		if got := limitIn(t, r, state, "L").Sentence; !strings.HasSuffix(got, "Holds only because R recharges.") {
			t.Errorf("%q", got)
		}
	}
}

// What cannot be met names the state, and giving way by what is said makes a plan.
func TestConflictNamesTheState(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.limit("L", "R", 0.5)
	s.twoStates(300, 65)
	s.brief.States[1].Demand = number(600)
	r := s.plan(t)
	if r.Status != StatusInfeasible || r.Conflict == nil {
		t.Fatalf("%s", r.Status)
	}
	for _, want := range []string{"peak: These cannot all be kept", "required total 600 m³/d; drawdown at R at most 0.50 m"} {
		if !strings.Contains(r.Conflict.Sentence, want) {
			t.Errorf("no %q in %q", want, r.Conflict.Sentence)
		}
	}
	for _, m := range r.Conflict.Members {
		if m.Alone == nil || !strings.Contains(m.Limit, "(peak)") {
			t.Errorf("%+v", m)
		}
	}
	s.brief.States[1].Demand = number(500)
	if r := s.plan(t); r.Status != StatusOptimal {
		t.Errorf("%s", r.Status)
	}
}

// Rates given for every state are judged as the plan that has them.
func TestEvaluateStates(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 0, 300))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.0004)
	s.limit("L", "R", 0.5)
	s.twoStates(300, 65)
	year := 120000.0
	s.brief.Quotas = []Quota{{Name: "field", Wells: []string{"A", "B"}, PerYear: &year}}
	rates := [][]float64{{600, 0}, {100, 200}}
	var responses []*Response
	for _, q := range rates {
		r, err := s.table.Linearise(t.Context(), q)
		if err != nil {
			t.Fatal(err)
		}
		responses = append(responses, r)
	}
	r, err := EvaluateStates(s.brief, responses, rates)
	if err != nil {
		t.Fatal(err)
	}
	exact(t, "value", limitIn(t, r, "average", "L").Value, 0.6)
	exact(t, "peak", limitIn(t, r, "peak", "L").Value, 0.18)
	exact(t, "year", r.YearQuotas[0].Quota.Sum, (300*600+65*300)/365.25)
	if !limitOf(t, r, "L").Passed || limitIn(t, r, "peak", "L").Passed || r.Status != StatusGivenRates || !strings.Contains(r.Headline, "average 600 m³/d, peak 300 m³/d") {
		t.Errorf("%q", r.Headline)
	}
}

// Days and demands that are missing are named at once, in words that say what to write.
func TestDaysAndDemandsMissing(t *testing.T) {
	s := newSite(MostHeadroom, decidedWell("A", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.limit("L", "R", 0.5)
	year := 100000.0
	s.brief.Quotas = []Quota{{Name: "field", Wells: []string{"A"}, PerYear: &year}}
	s.twoStates(300, 0)
	for _, c := range []struct {
		days []float64
		want string
	}{
		{[]float64{300, 0}, `no days in "peak"; write the days a year of every state`},
		{[]float64{0, 0}, "no days; write the days a year of every state, adding up to 365.25 (365 to 366), as quota field counts by the year"},
		{[]float64{300, 40}, "340 days in all"},
		{[]float64{300, 66.01}, "366.01 days in all"},
		{[]float64{300, 65}, "operating state peak: the aim most-headroom needs its demand"},
	} {
		s.brief.States[0].Days, s.brief.States[1].Days = c.days[0], c.days[1]
		if _, err := Make(t.Context(), s.brief, s.table, Options{}); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v: %v", c.days, err)
		}
	}
	one, err := s.brief.InState("peak")
	if err != nil || len(one.States) != 1 || one.Demand != nil {
		t.Errorf("%+v, %v", one.States, err)
	}
	if _, err := s.brief.InState("flood"); err == nil || !strings.Contains(err.Error(), `there are "average" and "peak"`) {
		t.Errorf("%v", err)
	}
}
