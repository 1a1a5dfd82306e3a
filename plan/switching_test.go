package plan

import (
	"bytes"
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"springbound/wells"
)

// bestSwitching plans once for every choice of running wells, with the others off, and returns the largest aim; -1 when none has a plan.
func bestSwitching(t *testing.T, s *site, allowed func(runs []bool) bool) float64 {
	t.Helper()
	n, best := len(s.brief.Wells), -1.0
	for mask := 1; mask < 1<<n; mask++ {
		one := *s
		one.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
		one.brief.AtMostRunning, one.brief.Together, one.brief.Exclude = nil, nil, nil
		runs := make([]bool, n)
		for i := range runs {
			runs[i] = mask>>i&1 == 1
			w := &one.brief.Wells[i]
			if !runs[i] {
				w.Mode = wells.Off
			}
		}
		if !allowed(runs) {
			continue
		}
		p := forced(t, &one)
		best = math.Max(best, p)
	}
	return best
}

// forced is the largest total with every decided well at its least rate at least: rates are shifted by the least ones, which a fixed
// twin pumps.
func forced(t *testing.T, s *site) float64 {
	t.Helper()
	shifted := site{brief: s.brief, table: &table{}}
	shifted.brief.Wells, shifted.brief.WellTerms = nil, nil
	base := 0.0
	order := []int{}
	for i, w := range s.brief.Wells {
		if w.Mode == wells.Decided && w.Min > 0 {
			twin := fixedWell(w.ID+" twin", w.Min)
			base += w.Min
			shifted.brief.Wells = append(shifted.brief.Wells, twin)
			order = append(order, i)
			w.Max -= w.Min
			w.Min = 0
		}
		shifted.brief.Wells = append(shifted.brief.Wells, w)
		order = append(order, i)
	}
	shifted.brief.WellTerms = make([]WellTerm, len(shifted.brief.Wells))
	for _, w := range shifted.brief.Wells {
		shifted.table.response.Wells = append(shifted.table.response.Wells, w.ID)
	}
	for _, row := range s.table.response.Rows {
		slope := make([]float64, len(order))
		for k, i := range order {
			slope[k] = row.Slope[i]
		}
		row.Slope = slope
		shifted.table.response.Rows = append(shifted.table.response.Rows, row)
	}
	if d := shifted.brief.Demand; d != nil {
		shifted.brief.Demand = number(math.Max(0, *d-base))
	}
	r, err := Make(context.Background(), shifted.brief, shifted.table, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Status != StatusOptimal {
		return -1
	}
	return r.TotalRate + base
}

// Random briefs with least rates and rules: the plan is the best over all choices of running wells.
func TestSwitchingAgainstEveryChoice(t *testing.T) {
	random := rand.New(rand.NewPCG(21, 5))
	rested := 0
	for trial := 0; trial < 40; trial++ {
		s := randomSite(random, 4, 3)
		for i := range s.brief.Wells {
			s.brief.Wells[i].Min = s.brief.Wells[i].Max * (0.2 + 0.6*random.Float64())
		}
		most := 4
		if random.IntN(2) == 0 {
			most = 1 + random.IntN(3)
			s.brief.AtMostRunning = &most
		}
		if random.IntN(2) == 0 {
			s.brief.Together = []WellGroup{{Wells: []string{"A", "C"}}}
		}
		if random.IntN(2) == 0 {
			s.brief.Exclude = []WellGroup{{Wells: []string{"B", "C", "D"}}}
		}
		want := bestSwitching(t, s, func(runs []bool) bool {
			n, excluded := 0, 0
			for i, r := range runs {
				if r {
					n++
					if i > 0 {
						excluded++
					}
				}
			}
			return n <= most && (s.brief.Together == nil || runs[0] == runs[2]) && (s.brief.Exclude == nil || excluded <= 1)
		})
		r := s.plan(t)
		if !r.ModelValid || r.Switching == nil || !r.Switching.Proven || (r.TotalRate > 0 && !r.Switching.Recomputed) {
			t.Fatalf("trial %d: %s %q %+v", trial, r.Status, r.Invalid, r.Switching)
		}
		// an aim may be overlooked by the gap of the search
		near(t, "total", r.TotalRate, math.Max(0, want), 2*switchingGap*math.Max(1, want))
		rested += len(r.Switching.StandStill)
		for i, w := range r.Wells {
			if w.Rate != 0 && !(w.Rate >= s.brief.Wells[i].Min*(1-rounding) && w.Rate <= s.brief.Wells[i].Max*(1+rounding)) {
				t.Errorf("trial %d: well %s at %v", trial, w.ID, w.Rate)
			}
		}
	}
	if rested < 20 {
		t.Errorf("only %d wells stood still", rested)
	}
}

// Five wells with a least rate of 5 L/s each and a limit that two of them use up: two run, three stand still, and nothing is forced.
func TestTwoOfFiveRun(t *testing.T) {
	const least = 432.0 // 5 L/s
	var list []wells.Well
	for i := 0; i < 5; i++ {
		list = append(list, decidedWell(letters(i), least, 900))
	}
	s := newSite(MostYield, list...)
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001, 0.001, 0.001, 0.001)
	s.limit("L", "R", 0.001*1000) // 1000 m³/d in all: two at 432 and above, not three
	r := s.plan(t)
	exact(t, "total", r.TotalRate, 1000)
	if len(r.Switching.StandStill) != 3 || !strings.Contains(r.Switching.Sentence, "stand still") || !strings.Contains(r.Switching.Sentence, "at this switching") {
		t.Errorf("%+v", r.Switching)
	}
	exact(t, "price of the limit at this switching", limitOf(t, r, "L").ShadowPrice, 1000)
	first, err := Marshal(r)
	if err != nil {
		t.Fatal(err)
	}
	again, _ := Marshal(s.plan(t))
	if !bytes.Equal(first, again) {
		t.Error("the same brief gave other bytes")
	}
	// a demand that the limit forbids is explained, whichever wells run
	s.brief.Demand = number(1100)
	c := s.plan(t).Conflict
	if c == nil || len(c.Members) != 2 {
		t.Fatalf("%+v", c)
	}
	// 1000 m³/d from at most one well: its largest rate is 900
	one := 1
	s.brief.Demand, s.brief.AtMostRunning = number(1000), &one
	r = s.plan(t)
	if r.Status != StatusInfeasible || !strings.Contains(r.Conflict.Sentence, "at most 1 of the 5 wells up for decision pump") {
		t.Fatalf("%s: %+v", r.Status, r.Conflict)
	}
	for _, check := range r.Checks {
		if strings.Contains(check.Name, "conflict left out") && check.Result != pass {
			t.Errorf("%+v", check)
		}
		if strings.Contains(check.Name, "proof recomputed") && check.Result != pass {
			t.Errorf("%+v", check)
		}
	}
}

// Plans without least rates and rules say nothing of switching.
func TestNothingToSwitch(t *testing.T) {
	if r := canalStrip(MostYield, 2500).plan(t); r.Switching != nil {
		t.Errorf("%+v", r.Switching)
	}
}

func TestRulesAreChecked(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 100), decidedWell("B", 10, 100), fixedWell("C", 50))
	n := -1
	s.brief.AtMostRunning = &n
	s.brief.Together = []WellGroup{{Wells: []string{"A", "B"}}, {Wells: []string{"B", "X"}}}
	s.brief.Exclude = []WellGroup{{Wells: []string{"B"}}, {Wells: []string{"B", "B"}}}
	_, err := Make(context.Background(), s.brief, s.table, Options{})
	data, is := err.(*DataError)
	if !is || len(data.Problems) != 5 {
		t.Fatalf("%v", err)
	}
}
