package plan

import (
	"context"
	"math"
	"math/rand/v2"
	"os"
	"strings"
	"testing"
	"time"

	"springbound/wells"
)

// leastOverChoices plans once for every choice of running wells, each of them held to its range by two rows, and returns the least cost;
// infinite when none has a plan. Ranges are held by limits on receptors that one well alone bears on.
func leastOverChoices(t *testing.T, s *site, allowed func(runs []bool) bool) float64 {
	t.Helper()
	n, best := len(s.brief.Wells), math.Inf(1)
	for mask := range 1 << n {
		runs := make([]bool, n)
		for i := range runs {
			runs[i] = mask>>i&1 == 1
		}
		if !allowed(runs) {
			continue
		}
		one := &site{brief: s.brief, table: &table{response: s.table.response}}
		one.table.response.Rows = append([]Row(nil), s.table.response.Rows...)
		one.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
		one.brief.Receptors = append([]wells.Receptor(nil), s.brief.Receptors...)
		one.brief.Limits = append([]wells.Limit(nil), s.brief.Limits...)
		one.brief.AtMostRunning, one.brief.Together, one.brief.Exclude = nil, nil, nil
		rest := 0.0
		for i := range runs {
			w := &one.brief.Wells[i]
			least := w.Min
			w.Min = 0
			if !runs[i] {
				if w.Requested != nil { // a well that cannot run has no part in the sum of the plan
					rest += (*w.Requested / w.Max) * (*w.Requested / w.Max)
				}
				w.Max, w.LowestLevel = 0, nil
				continue
			}
			if least > 0 {
				slope := make([]float64, n)
				slope[i] = 1
				id := "range of " + w.ID
				one.receptor(id, wells.PointLevel, 0, slope...)
				one.limit(id, id, least, func(l *wells.Limit) { l.Sense = wells.AtLeast })
			}
		}
		r, err := Make(context.Background(), one.brief, one.table, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if r.Status == StatusOptimal {
			best = math.Min(best, curvedCost(r)+rest)
		}
	}
	return best
}

// runningBrief is a random field with least rates, rules and a curved aim.
func runningBrief(rng *rand.Rand, n int, energy bool) (*site, func(runs []bool) bool) {
	s := randomSite(rng, n, 3)
	capacity := 0.0
	for i := range s.brief.Wells {
		w := &s.brief.Wells[i]
		w.Min = w.Max * (0.2 + 0.5*rng.Float64())
		capacity += w.Max
	}
	if energy {
		s.brief.Aim = LeastEnergy
		slopes := make([][]float64, n)
		for i := range slopes {
			slopes[i] = make([]float64, n)
			for j := range i {
				v := 2e-4 * rng.Float64()
				slopes[i][j], slopes[j][i] = v, v
			}
			slopes[i][i] = 2e-3 * (1 + rng.Float64())
		}
		for i := range n {
			s.pumped(i, 15+10*rng.Float64(), 0.6+0.1*rng.Float64(), slopes[i]...)
			if rng.IntN(3) == 0 {
				s.brief.Wells[i].QuadraticLoss = 2e-6 * rng.Float64()
			}
			if rng.IntN(3) == 0 {
				s.brief.Wells[i].LowestLevel, s.brief.Wells[i].LowestLevelReason = number(100-slopes[i][i]*s.brief.Wells[i].Max*0.8), "screen"
			}
		}
		free := s.brief
		free.Aim, free.Demand = MostYield, nil
		r, err := Make(context.Background(), free, &table{response: s.table.response}, Options{})
		if err == nil {
			s.brief.Demand = number(r.TotalRate * (0.3 + 0.6*rng.Float64()))
		}
	} else {
		s.brief.Aim = ClosestToRequests
		for i := range s.brief.Wells {
			s.brief.Wells[i].Requested = number(s.brief.Wells[i].Max * rng.Float64())
		}
	}
	most := n
	if rng.IntN(2) == 0 {
		most = 1 + rng.IntN(n-1)
		s.brief.AtMostRunning = &most
	}
	together, exclude := rng.IntN(2) == 0, rng.IntN(2) == 0
	if together {
		s.brief.Together = []WellGroup{{Wells: []string{letters(0), letters(2)}}}
	}
	if exclude {
		s.brief.Exclude = []WellGroup{{Wells: []string{letters(1), letters(2), letters(3)}}}
	}
	return s, func(runs []bool) bool {
		count := 0
		for _, r := range runs {
			if r {
				count++
			}
		}
		excluded := 0
		for _, i := range []int{1, 2, 3} {
			if runs[i] {
				excluded++
			}
		}
		return count <= most && (!together || runs[0] == runs[2]) && (!exclude || excluded <= 1)
	}
}

// Random fields with least rates and rules: the plan is the best over all choices of running wells, and that is proven again.
func TestCurvedSwitchingAgainstEveryChoice(t *testing.T) {
	trials, largest := 16, 6
	if os.Getenv("SPRINGBOUND_LONG") == "1" {
		trials, largest = 60, 10
	}
	rng := rand.New(rand.NewPCG(77, 3))
	plans, rested, none := 0, 0, 0
	for trial := range trials {
		s, allowed := runningBrief(rng, 4+rng.IntN(largest-3), trial%2 == 0)
		want := leastOverChoices(t, s, allowed)
		r := s.plan(t)
		if math.IsInf(want, 1) {
			none++
			if r.Status != StatusInfeasible {
				t.Errorf("trial %d: %s, though no choice has a plan", trial, r.Status)
			}
			continue
		}
		if r.Status != StatusOptimal || !r.ModelValid || r.Switching == nil || !r.Switching.Proven || !r.Switching.Recomputed {
			t.Errorf("trial %d: %s %q %+v", trial, r.Status, r.Invalid, r.Switching)
			continue
		}
		plans++
		rested += len(r.Switching.StandStill)
		// a better choice may be overlooked by the gap of the search; rates within a tolerance of an end are put on it
		if got := curvedCost(r); !(math.Abs(got-want) <= 3*switchingGap*math.Max(want, 1e-3)) {
			t.Errorf("trial %d, %s: %.12g, the best of all choices has %.12g: %+v", trial, s.brief.Aim, got, want, r.Switching)
		}
		for i, w := range r.Wells {
			if w.Rate != 0 && !(w.Rate >= s.brief.Wells[i].Min*(1-rounding) && w.Rate <= s.brief.Wells[i].Max*(1+rounding)) {
				t.Errorf("trial %d: well %s at %v", trial, w.ID, w.Rate)
			}
		}
	}
	if plans < trials/2 || rested < plans {
		t.Errorf("%d plans, %d wells at rest, %d without a plan", plans, rested, none)
	}
	t.Logf("%d plans, %d wells at rest, %d without a plan", plans, rested, none)
}

// Thirty wells: the search comes to an end that is proven, or says by how much another choice may be better.
func TestCurvedSwitchingOfThirtyWells(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 30))
	for _, energy := range []bool{true, false} {
		s, _ := runningBrief(rng, 30, energy)
		most := 10
		s.brief.AtMostRunning = &most
		for k := range s.brief.Limits {
			s.brief.Limits[k].Value *= 12
		}
		if energy {
			s.brief.Demand = number(*s.brief.Demand * 4)
		}
		began := time.Now()
		r := s.plan(t)
		t.Logf("%s: %s after %d programmes in %v: %+v", s.brief.Aim, r.Status, r.Switching.Nodes, time.Since(began).Round(time.Millisecond), r.Switching)
		if r.Status != StatusOptimal || !(r.Switching.Gap <= 1e-2) || r.Switching.Proven != (r.Switching.Gap <= switchingGap) {
			t.Errorf("%s %+v", r.Status, r.Switching)
		}
		if !strings.Contains(r.Switching.Sentence, "at this switching") {
			t.Errorf("%q", r.Switching.Sentence)
		}
	}
}
