package plan

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"springbound/wells"
)

// moved is the site with one of its limits at another value.
type moved func(b *Brief, v float64)

func limitAt(k int) moved {
	return func(b *Brief, v float64) {
		b.Limits = append([]wells.Limit(nil), b.Limits...)
		b.Limits[k].Value = v
	}
}

func largestRateAt(i int) moved {
	return func(b *Brief, v float64) {
		b.Wells = append([]wells.Well(nil), b.Wells...)
		b.Wells[i].Max = v
	}
}

// aimAt plans with a limit at another value; false: no plan.
func (s *site) aimAt(t *testing.T, move moved, v float64) (float64, *Report, bool) {
	t.Helper()
	other := &site{brief: s.brief, table: &table{response: s.table.response}}
	move(&other.brief, v)
	r, err := Make(context.Background(), other.brief, other.table, Options{})
	if err != nil {
		t.Fatal(err)
	}
	return aimOf(r, other), r, r.Status == StatusOptimal
}

// confirm re-plans within a range, at its ends and beyond them: within, the aim is on the line; beyond, below it or no plan.
func (s *site) confirm(t *testing.T, what string, r *Report, at float64, x *PriceRange, way float64, move moved) {
	t.Helper()
	base := aimOf(r, s)
	for _, side := range []struct {
		name      string
		price, to *float64
		then      string
		direction float64
	}{{"looser", x.Looser, x.LooserTo, x.LooserThen, way}, {"tighter", x.Tighter, x.TighterTo, x.TighterThen, -way}} {
		name := what + ", " + side.name
		if side.price == nil {
			if _, _, feasible := s.aimAt(t, move, at+side.direction*1e-3*math.Abs(at)); feasible {
				t.Errorf("%s: there is a plan", name)
			}
			continue
		}
		end := at + side.direction*2*math.Max(math.Abs(at), 1)
		if side.to != nil {
			end = *side.to
		}
		length := math.Abs(end - at)
		line := func(v float64) float64 { return base + way*(v-at)**side.price }
		// the programme is solved to rounding of its total; a tenth of it per price is what an end may be off
		allowed := rounding * math.Max(1, math.Abs(base))
		for _, share := range []float64{0.5, 1 - 1e-6} {
			v := at + share*(end-at)
			got, _, feasible := s.aimAt(t, move, v)
			if !feasible {
				t.Errorf("%s: no plan at %v, within the range to %v", name, v, end)
				continue
			}
			near(t, name+" within", got, line(v), allowed)
		}
		if side.to == nil {
			continue
		}
		step := 0.02 * math.Max(length, 0.1*math.Abs(at)) * side.direction
		if at > 0 && end+step < 0 {
			continue // a quota below zero is no quota
		}
		got, _, feasible := s.aimAt(t, move, end+step)
		beyond := strings.HasPrefix(side.then, "no rates")
		if feasible == beyond {
			t.Errorf("%s: beyond %v, where %q: plan %v", name, end, side.then, feasible)
		}
		if feasible && !(got < line(end+step)-allowed) {
			t.Errorf("%s: at %v the slope still holds: %v on %v, then %q", name, end+step, got, line(end+step), side.then)
		}
	}
}

func TestRangesOfCanalStripLimits(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25)
	r := s.plan(t)
	// with W1 and W3 the prices solve two equations, and the range of P1 ends where W3, or W1, reaches zero: the ratio of the two slopes
	l1, l2 := limitOf(t, r, "L1"), limitOf(t, r, "L2")
	exact(t, "P1 up to W3 at rest", *l1.Range.LooserTo, 0.25*2.712079621525e-4/1.469348697956e-4)
	// W1 at rest would be at 0.25 x 2.0696/2.9102 = 0.178, but W2 enters before only if it earned more: it does not at these prices
	exact(t, "P1 down to W1 at rest", *l1.Range.TighterTo, 0.25*2.069615201665e-4/2.910185545674e-4)
	if l1.Range.LooserThen != "W3 stands still" || l1.Range.TighterThen != "W1 stands still" {
		t.Errorf("%q, %q", l1.Range.LooserThen, l1.Range.TighterThen)
	}
	near(t, "left price", *l1.Range.Tighter, 2969.775953, printed)
	near(t, "right price", *l2.Range.Looser, 1324.213347, printed)
	s.confirm(t, "LP-1, L1", r, 0.30, l1.Range, 1, limitAt(0))
	s.confirm(t, "LP-1, L2", r, 0.25, l2.Range, 1, limitAt(1))

	s = canalStrip(MostYield, 600)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25)
	r = s.plan(t)
	l1, l2 = limitOf(t, r, "L1"), limitOf(t, r, "L2")
	near(t, "P1 is slack down to its value", *l1.Range.TighterTo, 0.30-0.02218132, 5e-9) // printed with eight decimals
	if *l1.Range.Looser != 0 || *l1.Range.Tighter != 0 || l1.Range.LooserTo != nil || l1.Range.TighterThen != "it binds" {
		t.Errorf("a limit with room: %+v", l1.Range)
	}
	near(t, "price of the cap", *r.Wells[0].RateRange.Looser, 0.49510137, 5e-9)
	s.confirm(t, "LP-2, L1", r, 0.30, l1.Range, 1, limitAt(0))
	s.confirm(t, "LP-2, L2", r, 0.25, l2.Range, 1, limitAt(1))
	s.confirm(t, "LP-2, W1", r, 600, r.Wells[0].RateRange, 1, largestRateAt(0))
	if x := r.Wells[1].RateRange; x == nil || x.Looser != nil || x.Tighter == nil || !(*x.Tighter > 0) {
		t.Errorf("W2 at rest: %+v", x)
	}
}

// LP-3 as headroom: t = 1 - 0.23266010/X, which ends at X = 0.23266010, where nothing is left, and never from above.
func TestRangesOfHeadroom(t *testing.T) {
	s := canalStrip(MostHeadroom, 600)
	s.brief.Demand = number(1000)
	s.limit("L1", "P1", 0.30)
	r := s.plan(t)
	x := limitOf(t, r, "L1").Range
	near(t, "end", *x.TighterTo, 0.23266010, 5e-9)
	near(t, "price", *x.Tighter, 0.23266010/0.09, 5e-9/0.09)
	if x.LooserTo != nil || x.TighterThen != "no rates keep every limit" {
		t.Errorf("%+v", x)
	}
	// more demand goes to W1 until it is full at 600: 1200; less until W1 is at rest: 600
	d := r.DemandRange
	exact(t, "demand up to", *d.TighterTo, 1200)
	exact(t, "demand down to", *d.LooserTo, 600)
	if d.LooserThen != "W1 stands still" || d.TighterThen != "W1 runs at its largest rate" {
		t.Errorf("%+v", d)
	}
	s.confirm(t, "demand", r, 1000, d, -1, func(b *Brief, v float64) { b.Demand = number(v) })
}

// Two limits on which the range of a third ends move the share; its end is confirmed by the limits that hold the plan on both sides.
func TestRangeOfHeadroomWithTwoLimits(t *testing.T) {
	s := canalStrip(MostHeadroom, 900)
	s.brief.Demand = number(1100)
	s.limit("L1", "P1", 0.30, func(l *wells.Limit) { l.Reserve = 0.05 })
	s.limit("L2", "P2", 0.25)
	r := s.plan(t)
	for k, id := range []string{"L1", "L2"} {
		l := limitOf(t, r, id)
		checked := 0
		for _, end := range []*float64{l.Range.LooserTo, l.Range.TighterTo} {
			if end == nil {
				continue
			}
			slope := func(v float64) float64 {
				_, q, feasible := s.aimAt(t, limitAt(k), v)
				if !feasible {
					return math.NaN()
				}
				m := limitOf(t, q, id)
				return m.ShadowPrice / (1 - *m.RoomShare) // the price of the row, which is constant on a piece, less what moves along
			}
			// a row's price is the slope times X, so that it is compared at one place only: it jumps at the end and nowhere else
			inside, outside := slope(l.Limit+0.999*(*end-l.Limit)), slope(l.Limit+1.001*(*end-l.Limit))
			middle := slope(l.Limit + 0.5*(*end-l.Limit))
			if !(math.Abs(inside/middle-1) < 0.9) || (!math.IsNaN(outside) && math.Abs(outside/inside-1) < 0.01) {
				t.Errorf("%s at %v: %v, %v, %v", id, *end, middle, inside, outside)
			}
			checked++
		}
		if checked == 0 {
			t.Errorf("%s has no end: %+v", id, l.Range)
		}
	}
}

func TestRangesByPlanningAgain(t *testing.T) {
	random := rand.New(rand.NewPCG(21, 22))
	for trial := 0; trial < 12; trial++ {
		s := randomSite(random, 5, 5)
		r := s.plan(t)
		if r.Status != StatusOptimal {
			t.Fatal(r.Status)
		}
		for k, l := range s.brief.Limits {
			s.confirm(t, l.ID, r, l.Value, limitOf(t, r, l.ID).Range, 1, limitAt(k))
		}
		for i, w := range r.Wells {
			if w.AtBound == "max" {
				s.confirm(t, w.ID, r, w.Max, w.RateRange, 1, largestRateAt(i))
			}
		}
	}
}

// Two limits through one plan: A alone, both at 300 m³/d. Tightening either costs, loosening one alone brings nothing.
func TestTwoPrices(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.receptor("U", wells.PointLevel, 10, 0.002)
	s.limit("L", "R", 0.3)
	s.limit("M", "U", 0.6)
	r := s.plan(t)
	l := limitOf(t, r, "L")
	exact(t, "tighter", *l.Range.Tighter, 1000)
	exact(t, "looser", *l.Range.Looser, 0)
	if want := "Binds. A contributes 100 %. Tightening by one centimetre costs 10 m³/d, loosening alone brings nothing."; l.Sentence != want {
		t.Errorf("%q", l.Sentence)
	}
	if !strings.Contains(strings.Join(r.Cautions, " "), "different prices") {
		t.Errorf("%q", r.Cautions)
	}
	s.confirm(t, "L", r, 0.3, l.Range, 1, limitAt(0))
	// three limits in the plane of two wells: both prices above zero. At (100, 100) x + 2 y <= 300, 2 x + y <= 300, x + y <= 200
	s = newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 0, 1000))
	for k, slope := range [][]float64{{0.001, 0.002}, {0.0017, 0.001}, {0.0013, 0.0014}} {
		id := string(rune('R' + k))
		s.receptor(id, wells.PointLevel, 10, slope...)
		s.limit("L"+id, id, 100*(slope[0]+slope[1]))
	}
	r = s.plan(t)
	for k, id := range []string{"LR", "LS", "LT"} {
		l := limitOf(t, r, id)
		s.confirm(t, id, r, l.Limit, l.Range, 1, limitAt(k))
		if !(*l.Range.Tighter > *l.Range.Looser) {
			t.Errorf("%s: tighter %v, looser %v", id, *l.Range.Tighter, *l.Range.Looser)
		}
	}
}

// Quotas, a level in a well, a limit on a value and one with a reserve.
func TestRangesOfOtherLimits(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 5000), decidedWell("B", 0, 700))
	s.receptor("R", wells.PointLevel, 10, 0.0002, 0.001)
	s.level(0, 40, 30, 0.01, 0.001)
	s.limit("L", "R", 9.5, func(l *wells.Limit) { l.Quantity, l.Sense, l.Reserve = wells.Value, wells.AtLeast, 0.2 })
	s.brief.Quotas = []Quota{{Name: "G", Wells: []string{"A", "B"}, PerDay: number(1100)}}
	r := s.plan(t)
	l := limitOf(t, r, "L")
	s.confirm(t, "value", r, 9.5, l.Range, -1, limitAt(0))
	s.confirm(t, "level", r, 30, r.Wells[0].LevelRange, -1, func(b *Brief, v float64) {
		b.Wells = append([]wells.Well(nil), b.Wells...)
		b.Wells[0].LowestLevel = &v
	})
	s.confirm(t, "quota", r, 1100, r.Quotas[0].Range, 1, func(b *Brief, v float64) {
		b.Quotas = []Quota{{Name: "G", Wells: []string{"A", "B"}, PerDay: &v}}
	})
}

// With tangents the ranges are those of the programme and say so; the price of the worst place is that of both pieces together.
func TestRangesWithTangents(t *testing.T) {
	s := newSite(MostYield, decidedWell("X", 0, 10), decidedWell("Y", 0, 10))
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("L", "R", 10)
	m := &pieces{ids: []string{"X", "Y"}, slopes: [][]float64{{1, 1.2}, {2, 1.2}}, offset: []float64{0, -5}}
	r, err := Make(context.Background(), s.brief, m, Options{})
	if err != nil {
		t.Fatal(err)
	}
	l := limitOf(t, r, "L")
	if l.Range == nil || l.Range.HoldsFor != tangentsOnly || !strings.HasSuffix(l.Sentence, "for the tangents of this plan.") {
		t.Fatalf("%+v %q", l.Range, l.Sentence)
	}
	// both pieces are known, so that the range is exact here: X stays at 5 until Y = 10, at 17, or 0, at 5
	exact(t, "price", *l.Range.Looser, 1/1.2)
	exact(t, "up to", *l.Range.LooserTo, 17)
	exact(t, "down to", *l.Range.TighterTo, 5)
	if l.Range.LooserThen != "Y runs at its largest rate" {
		t.Errorf("%q", l.Range.LooserThen)
	}
}

// Identical wells share equally whatever a corner would do, deviations from the present rates are equal, and prices stand.
func TestNearestAmongPlansAsGood(t *testing.T) {
	for _, c := range []struct {
		present []*float64
		want    []float64
	}{
		{[]*float64{nil, nil, nil}, []float64{100, 100, 100}},
		{[]*float64{number(10), number(40), number(70)}, []float64{70, 100, 130}},
		{[]*float64{number(0), number(0), number(600)}, []float64{0, 0, 300}},
	} {
		s := newSite(MostYield, decidedWell("A", 0, 500), decidedWell("B", 0, 500), decidedWell("C", 0, 500))
		for i, p := range c.present {
			s.brief.Wells[i].Present = p
		}
		s.receptor("R", wells.PointLevel, 10, 0.001, 0.001, 0.001)
		s.limit("L", "R", 0.3)
		r := s.plan(t)
		for i, w := range r.Wells {
			near(t, w.ID, w.Rate, c.want[i], 1e-5) // the nearest plan is found to 1e-8 of the largest rate
		}
		exact(t, "price", limitOf(t, r, "L").ShadowPrice, 1000)
		text := strings.Join(r.Cautions, " ")
		if !r.NotUnique || !strings.Contains(text, "the one nearest to the present rates is shown") || !strings.Contains(text, "trade places") {
			t.Errorf("%v %q", r.NotUnique, r.Cautions)
		}
		if r.Checks[0].Result != pass || s.table.calls > 2 {
			t.Errorf("%+v after %d linearisations", r.Checks[0], s.table.calls)
		}
	}
	// each well is measured by its own largest rate
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 0, 500))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("L", "R", 0.3)
	r := s.plan(t)
	near(t, "A", r.Wells[0].Rate, 240, 1e-5) // a/1000² = b/500², a + b = 300
	near(t, "B", r.Wells[1].Rate, 60, 1e-5)
}

// A choice among plans as good keeps a row that is not linear: max(x, y) <= 10 with x + y fixed by a quota of 15.
func TestNearestKeepsCurvedRows(t *testing.T) {
	s := newSite(MostYield, decidedWell("X", 0, 20), decidedWell("Y", 0, 20))
	s.brief.Wells[0].Present = number(14)
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("L", "R", 10)
	s.brief.Quotas = []Quota{{Name: "G", Wells: []string{"X", "Y"}, PerDay: number(15)}}
	m := &pieces{ids: []string{"X", "Y"}, slopes: [][]float64{{1, 0}, {0, 1}}, offset: []float64{0, 0}}
	r, err := Make(context.Background(), s.brief, m, Options{})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "X", r.Wells[0].Rate, 10, 1e-5)
	near(t, "Y", r.Wells[1].Rate, 5, 1e-5)
	if !r.NotUnique || r.Status != StatusOptimal || !r.ModelValid {
		t.Errorf("%v %s %q", r.NotUnique, r.Status, r.Invalid)
	}
}
