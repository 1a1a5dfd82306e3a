package plan

import (
	"bytes"
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"springbound/wells"
)

// aimOf is the aim's value at a plan.
func aimOf(r *Report, s *site) float64 {
	if s.brief.Aim == MostYield {
		return r.TotalRate
	}
	worst := math.Inf(1)
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			worst = math.Min(worst, *l.RoomShare-l.Reserve)
		}
	}
	return worst
}

// both runs a check for either aim; most-headroom asks for the given share of the largest yield.
func both(t *testing.T, random *rand.Rand, trials, n, m int, check func(trial int, s *site, r *Report)) {
	t.Helper()
	for trial := 0; trial < trials; trial++ {
		s := randomSite(random, n, m)
		r := s.plan(t)
		check(trial, s, r)
		s.brief.Aim, s.brief.Demand = MostHeadroom, number(r.TotalRate*(0.3+0.5*random.Float64()))
		check(trial, s, s.plan(t))
	}
}

func TestTighteningNeverImproves(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	both(t, random, 60, 6, 6, func(trial int, s *site, r *Report) {
		before := aimOf(r, s)
		tight := *s
		tight.brief.Limits = append([]wells.Limit(nil), s.brief.Limits...)
		tight.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
		tight.brief.Limits[random.IntN(len(tight.brief.Limits))].Value *= 0.9
		tight.brief.Wells[random.IntN(len(tight.brief.Wells))].Max *= 0.9
		after := tight.plan(t)
		if after.Status == StatusOptimal && !(aimOf(after, &tight) <= before*(1+rounding)+rounding) {
			t.Errorf("trial %d: tightening improved %v to %v", trial, before, aimOf(after, &tight))
		}
	})
}

// Prices are the difference quotients of the aim where left and right ones agree.
func TestPricesAreDifferenceQuotients(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	compared := 0
	both(t, random, 30, 5, 5, func(trial int, s *site, r *Report) {
		quotient := func(what string, price, size float64, move func(*Brief, float64)) {
			step := 1e-4 * size
			var aims [2]float64
			for k, d := range []float64{-step, step} {
				moved := *s
				moved.brief.Limits = append([]wells.Limit(nil), s.brief.Limits...)
				moved.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
				move(&moved.brief, d)
				aims[k] = aimOf(moved.plan(t), &moved)
			}
			base := aimOf(r, s)
			left, right := (base-aims[0])/step, (aims[1]-base)/step
			// the aim of most-headroom is smooth, not linear, in a limit: curvature is below the slope over the size
			allowed := 1e-3*math.Max(math.Abs(left), math.Abs(right)) + rounding*math.Abs(base)/step
			if math.Abs(left-right) > allowed {
				return
			}
			compared++
			near(t, what, price, (left+right)/2, allowed)
		}
		for k, l := range s.brief.Limits {
			quotient("price of limit "+l.ID, limitOf(t, r, l.ID).ShadowPrice, l.Value, func(b *Brief, d float64) { b.Limits[k].Value += d })
		}
		for i, w := range r.Wells {
			if w.AtBound == "max" {
				quotient("price of the largest rate of "+w.ID, w.ShadowPrice, w.Max, func(b *Brief, d float64) { b.Wells[i].Max += d })
			}
		}
		if s.brief.Aim == MostHeadroom {
			quotient("price of the demand", *r.DemandPrice, *s.brief.Demand, func(b *Brief, d float64) { b.Demand = number(*b.Demand + d) })
		}
	})
	if compared < 250 {
		t.Errorf("only %d prices were compared", compared)
	}
}

// Rates a thousand times larger with slopes a thousand times smaller give the same plan a thousand times larger.
func TestScaleOfRates(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 6))
	both(t, random, 20, 6, 6, func(trial int, s *site, r *Report) {
		for _, factor := range []float64{1e-4, 1e4} {
			scaled := &site{brief: s.brief, table: &table{response: s.table.response}}
			scaled.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
			for i := range scaled.brief.Wells {
				scaled.brief.Wells[i].Max *= factor
			}
			if s.brief.Demand != nil {
				scaled.brief.Demand = number(*s.brief.Demand * factor)
			}
			scaled.table.response.Rows = append([]Row(nil), s.table.response.Rows...)
			for k, row := range s.table.response.Rows {
				slope := make([]float64, len(row.Slope))
				for i, v := range row.Slope {
					slope[i] = v / factor
				}
				scaled.table.response.Rows[k].Slope = slope
			}
			got := scaled.plan(t)
			for i, w := range got.Wells {
				near(t, "rate", w.Rate/factor, r.Wells[i].Rate, rounding*r.Wells[i].Max)
			}
		}
	})
}

func TestOrderOfWellsDoesNotMatter(t *testing.T) {
	random := rand.New(rand.NewPCG(8, 9))
	both(t, random, 30, 7, 6, func(trial int, s *site, r *Report) {
		order := random.Perm(len(s.brief.Wells))
		turned := &site{brief: s.brief, table: &table{response: s.table.response}}
		turned.brief.Wells = make([]wells.Well, len(order))
		turned.table.response.Wells = make([]string, len(order))
		turned.table.response.Rows = append([]Row(nil), s.table.response.Rows...)
		for m := range turned.table.response.Rows {
			turned.table.response.Rows[m].Slope = make([]float64, len(order))
		}
		for i, k := range order {
			turned.brief.Wells[i] = s.brief.Wells[k]
			turned.table.response.Wells[i] = s.brief.Wells[k].ID
			for m, row := range s.table.response.Rows {
				turned.table.response.Rows[m].Slope[i] = row.Slope[k]
			}
		}
		got := turned.plan(t)
		if r.NotUnique || got.NotUnique {
			t.Errorf("trial %d: %v and %v other plans as good, though the problem is random", trial, r.NotUnique, got.NotUnique)
		}
		for i, k := range order {
			near(t, "rate of "+got.Wells[i].ID, got.Wells[i].Rate, r.Wells[k].Rate, rounding*r.Wells[k].Max)
		}
	})
}

func TestSameInputSameBytes(t *testing.T) {
	random := rand.New(rand.NewPCG(10, 11))
	both(t, random, 3, 8, 8, func(trial int, s *site, r *Report) {
		first, err := Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		second, err := Marshal(s.plan(t))
		if err != nil {
			t.Fatal(err)
		}
		// the second plan reuses the model, whose count of calls is no part of the report
		if !bytes.Equal(first, second) {
			t.Errorf("trial %d: two runs differ", trial)
		}
	})
}

// Evaluate at the plan's rates gives the plan's table.
func TestEvaluateAtThePlan(t *testing.T) {
	random := rand.New(rand.NewPCG(12, 13))
	both(t, random, 10, 5, 5, func(trial int, s *site, r *Report) {
		rates := make([]float64, len(r.Wells))
		for i, w := range r.Wells {
			rates[i] = w.Rate
		}
		at, err := s.table.Linearise(context.Background(), rates)
		if err != nil {
			t.Fatal(err)
		}
		got, err := Evaluate(s.brief, at, rates)
		if err != nil {
			t.Fatal(err)
		}
		for k, rec := range got.Receptors {
			for m, l := range rec.Limits {
				want := r.Receptors[k].Limits[m]
				if l.Value != want.Value || l.Headroom != want.Headroom || l.ShadowPrice != 0 {
					t.Errorf("trial %d: %+v and %+v", trial, l, want)
				}
			}
		}
	})
}

// Two equal wells share the yield in any way: said so. Two different ones do not.
func TestOtherPlansAsGood(t *testing.T) {
	for _, c := range []struct {
		slope float64
		other bool
	}{{0.001, true}, {0.0011, false}} {
		s := newSite(MostYield, decidedWell("A", 0, 500), decidedWell("B", 0, 500))
		s.receptor("R", wells.PointLevel, 10, 0.001, c.slope)
		s.limit("L", "R", 0.3)
		if r := s.plan(t); r.NotUnique != c.other {
			t.Errorf("slope %v: other plans as good %v", c.slope, r.NotUnique)
		}
	}
	// three limits through one point: degenerate, but the plan is the only one
	s := newSite(MostYield, decidedWell("A", 0, 500), decidedWell("B", 0, 500))
	for k, slope := range [][]float64{{0.001, 0.002}, {0.002, 0.001}, {0.0015, 0.0015}} {
		id := string(rune('R' + k))
		s.receptor(id, wells.PointLevel, 10, slope...)
		s.limit("L"+id, id, []float64{0.3, 0.3, 0.3}[k])
	}
	s.limit("LA", "R", 0.3, func(l *wells.Limit) { l.Reserve = 0 })
	if r := s.plan(t); !r.NotUnique {
		// the third limit lies along the aim between the first two, which meet on it: the corner is the only point in common
		exact(t, "A", r.Wells[0].Rate, 100)
		exact(t, "B", r.Wells[1].Rate, 100)
	} else {
		t.Error("the corner is the only plan")
	}
}
