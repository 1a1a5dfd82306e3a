package plan

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"springbound/wells"
)

func TestDemandAboveTheLimits(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	s.brief.Demand = number(9000)
	s.limit("L1", "P1", 0.30, func(l *wells.Limit) { l.Source = "permit" })
	s.limit("L2", "P2", 0.25)
	s.brief.Receptors[0].Name = "Fen wetland"
	s.brief.Wells[0].Present = number(100)
	r := s.plan(t)
	if r.Status != StatusInfeasible || r.Conflict == nil || !strings.Contains(r.Headline, "present pumping") {
		t.Fatalf("status %s, headline %q", r.Status, r.Headline)
	}
	exact(t, "rates shown are the present ones", r.TotalRate, 100)
	c := r.Conflict
	if len(c.Members) < 2 || c.ExistingAlone {
		t.Fatalf("%+v", c)
	}
	for _, m := range c.Members {
		switch m.Limit {
		case "required total 9 000 m³/d":
			near(t, "demand alone", *m.Alone, 9000-1221.986123, 1e-6)
		case "drawdown at Fen wetland at most 0.30 m":
			if m.Receptor != "P1" || m.Unit != "m" || m.Source != "permit" {
				t.Errorf("%+v", m)
			}
		}
	}
	if r.Wells[0].ShadowPrice != 0 || r.Receptors[0].Limits[0].ShadowPrice != 0 || r.DemandPrice != nil {
		t.Error("prices without a plan")
	}
	if !strings.Contains(c.Sentence, "required total 9 000 m³/d") {
		t.Errorf("%q", c.Sentence)
	}
}

// The least total relaxation of one limit and the demand, in closed form: A's drawdown is 0.001 Q. With limit 0.2 m (200 m³/d) and
// demand 1000 m³/d, a share e of the limit gives 200 e, a share of the demand 1000 e: lowering the demand by 800 (0.8) is cheapest.
func TestLeastRelaxation(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 5000))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.limit("L", "R", 0.2)
	s.brief.Demand = number(1000)
	c := s.plan(t).Conflict
	if len(c.Members) != 2 || len(c.Relaxation) != 1 {
		t.Fatalf("%+v", c)
	}
	exact(t, "relaxation", c.Relaxation[0].By, 800)
	exact(t, "demand alone", *c.Members[0].Alone, 800)
	exact(t, "limit alone", *c.Members[1].Alone, 0.8)
}

func TestExistingUsersAlone(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 5000), fixedWell("B", 600))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("L", "R", 0.5)
	r := s.plan(t)
	c := r.Conflict
	if c == nil || !c.ExistingAlone || len(c.Members) != 1 || !strings.HasPrefix(c.Sentence, "Existing users alone, with all own wells at rest, pass: drawdown at R at most 0.50 m (by 0.10 m).") {
		t.Fatalf("%+v", c)
	}
	exact(t, "relaxation", c.Relaxation[0].By, 0.1)
	if l := limitOf(t, r, "L"); !l.Passed || l.Sentence != "Passed by 0.10 m. B contributes 100 %." {
		t.Errorf("%+v", l)
	}
	// own fixed wells are not existing users
	s.brief.Wells[1].Others = false
	if c = s.plan(t).Conflict; c.ExistingAlone || !strings.HasPrefix(c.Sentence, "The wells with fixed rates alone pass") {
		t.Errorf("%+v", c)
	}
}

// A hard limit is not relaxed: a well with a least rate stands still instead, and a demand gives way.
func TestHardLimitAgainstLeastRate(t *testing.T) {
	s := newSite(MostYield, decidedWell("W3", 200, 500))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.limit("Z", "R", 0)
	r := s.plan(t)
	if r.Status != StatusOptimal || r.TotalRate != 0 || r.Switching == nil || len(r.Switching.StandStill) != 1 {
		t.Fatalf("%s, total %v, %+v", r.Status, r.TotalRate, r.Switching)
	}
	s.brief.Demand = number(200)
	c := s.plan(t).Conflict
	if len(c.Members) != 2 || len(c.Relaxation) != 1 || c.Relaxation[0].Limit != "required total 200 m³/d" {
		t.Fatalf("%+v", c)
	}
	exact(t, "demand lower by", c.Relaxation[0].By, 200)
	exact(t, "hard limit alone", *c.Members[1].Alone, 0.2)
	// only the hard limit can give way
	s = newSite(MostYield, decidedWell("W3", 0, 500), fixedWell("B", 100))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("Z", "R", 0)
	c = s.plan(t).Conflict
	if len(c.Members) != 1 || len(c.Relaxation) != 1 {
		t.Fatalf("%+v", c)
	}
	exact(t, "hard limit relaxed by", c.Relaxation[0].By, 0.1)
}

// Random infeasible briefs: the set is infeasible, and leaving out any one member makes it feasible.
func TestConflictIsIrreducible(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 11))
	found := 0
	for trial := 0; trial < 60; trial++ {
		s := randomSite(random, 4, 5)
		s.brief.Demand = number(s.plan(t).TotalRate * (1.05 + random.Float64()))
		s.brief.Wells[0].Min = 0.05 * s.brief.Wells[0].Max
		r := s.plan(t)
		if r.Status != StatusInfeasible {
			t.Fatalf("trial %d: %s", trial, r.Status)
		}
		found++
		inSet := map[string]bool{}
		for _, m := range r.Conflict.Members {
			inSet[m.Limit] = true
		}
		for _, left := range append([]ConflictMember{{}}, r.Conflict.Members...) {
			status := s.keepOnly(inSet, left.Limit).plan(t).Status
			if want := map[bool]string{true: StatusInfeasible, false: StatusOptimal}[left.Limit == ""]; status != want {
				t.Errorf("trial %d without %q: %s, want %s", trial, left.Limit, status, want)
			}
		}
		if relaxed := s.relaxed(r.Conflict.Relaxation, 1+1e-6); relaxed.plan(t).Status != StatusOptimal {
			t.Errorf("trial %d: the relaxation does not make a plan possible", trial)
		}
		if relaxed := s.relaxed(r.Conflict.Relaxation, 0.99); relaxed.plan(t).Status != StatusInfeasible {
			t.Errorf("trial %d: less than the least relaxation does too", trial)
		}
	}
	if found < 60 {
		t.Errorf("%d infeasible briefs", found)
	}
}

// keepOnly returns the site with only the members of a set, without one of them.
func (s *site) keepOnly(set map[string]bool, without string) *site {
	look, err := newSetup(s.brief)
	if err != nil {
		panic(err)
	}
	holds := func(words string) bool { return set[words] && words != without }
	out := *s
	out.brief.Limits = nil
	for _, l := range s.brief.Limits {
		if holds(look.limitWords(l)) {
			out.brief.Limits = append(out.brief.Limits, l)
		}
	}
	out.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
	for i, w := range s.brief.Wells {
		if !holds(w.ID + " at least " + flowText(w.Min) + " when it runs") {
			out.brief.Wells[i].Min = 0
		}
		if !holds(w.ID + " at most " + flowText(w.Max)) {
			out.brief.Wells[i].Max = 1e5
		}
	}
	if !holds("required total " + flowText(*s.brief.Demand)) {
		out.brief.Demand = nil
	}
	return &out
}

// relaxed returns the site with limits relaxed by a factor times the given amounts.
func (s *site) relaxed(by []ConflictMember, factor float64) *site {
	look, err := newSetup(s.brief)
	if err != nil {
		panic(err)
	}
	amount := func(words string) float64 {
		for _, m := range by {
			if m.Limit == words {
				return m.By * factor
			}
		}
		return 0
	}
	out := *s
	out.brief.Limits = append([]wells.Limit(nil), s.brief.Limits...)
	for i, l := range s.brief.Limits {
		out.brief.Limits[i].Value += amount(look.limitWords(l))
	}
	out.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
	for i, w := range s.brief.Wells {
		out.brief.Wells[i].Min -= amount(w.ID + " at least " + flowText(w.Min) + " when it runs")
		out.brief.Wells[i].Max += amount(w.ID + " at most " + flowText(w.Max))
	}
	out.brief.Demand = number(*s.brief.Demand - amount("required total "+flowText(*s.brief.Demand)))
	return &out
}

// letters names wells A to Z and on as A1, B1, ...
func letters(i int) string {
	if i < 26 {
		return string(rune('A' + i))
	}
	return fmt.Sprintf("%c%d", 'A'+i%26, i/26)
}

// randomSite has n wells up for decision and m receptors with one limit each, all different.
func randomSite(random *rand.Rand, n, m int) *site {
	var list []wells.Well
	for i := 0; i < n; i++ {
		w := decidedWell(letters(i), 0, 500+1500*random.Float64())
		list = append(list, w)
	}
	s := newSite(MostYield, list...)
	for k := 0; k < m; k++ {
		slope := make([]float64, n)
		for i := range slope {
			slope[i] = math.Exp(-9 + 3*random.Float64())
		}
		id := fmt.Sprint("R", k)
		s.receptor(id, wells.PointLevel, 20, slope...)
		s.limit("L"+id, id, 0.1+0.4*random.Float64(), func(l *wells.Limit) {
			if random.IntN(3) == 0 {
				l.Reserve = 0.1
			}
		})
	}
	return s
}

func TestInterrupted(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	ctx, stop := context.WithCancel(context.Background())
	stop()
	if _, err := Make(ctx, s.brief, s.table, Options{}); err == nil || !strings.Contains(err.Error(), "stopped") {
		t.Errorf("error %v", err)
	}
}
