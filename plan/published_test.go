package plan

import (
	"context"
	"math"
	"testing"

	"springbound/plan/convex"
	"springbound/wells"
)

// canalStrip is the problem of a strip between two canals, 3000 m by 2000 m, T = 800 m²/d, three wells and two springs: closed-form
// responses from image wells (computed for this project; an independent grid agrees to 3e-6 m per 1000 m³/d).
func canalStrip(aim Aim, largest float64) *site {
	s := newSite(aim, decidedWell("W1", 0, largest), decidedWell("W2", 0, largest), decidedWell("W3", 0, largest))
	s.receptor("P1", wells.PointLevel, 20, 2.712079621525e-4, 3.842560390817e-4, 2.069615201665e-4)
	s.receptor("P2", wells.PointLevel, 20, 1.469348697956e-4, 4.305805866293e-4, 2.910185545674e-4)
	return s
}

// printed is half a unit of the last digit of the reference values, which have six decimals for rates and prices, unless another
// is named.
const printed = 5e-7

func TestCanalStripMostYield(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25)
	r := s.plan(t)
	if r.Status != StatusOptimal || !r.ModelValid {
		t.Fatalf("status %s, valid %v: %v", r.Status, r.ModelValid, r.Invalid)
	}
	near(t, "total", r.TotalRate, 1221.986123, printed)
	near(t, "W1", r.Wells[0].Rate, 733.050625, printed)
	near(t, "W2", r.Wells[1].Rate, 0, printed)
	near(t, "W3", r.Wells[2].Rate, 488.935498, printed)
	l1, l2 := limitOf(t, r, "L1"), limitOf(t, r, "L2")
	if !l1.Binds || !l2.Binds {
		t.Errorf("both springs bind: %v %v", l1.Binds, l2.Binds)
	}
	near(t, "price of P1", l1.ShadowPrice, 2969.775953, printed)
	near(t, "price of P2", l2.ShadowPrice, 1324.213347, printed)
	exact(t, "sum of price times limit", 0.30*l1.ShadowPrice+0.25*l2.ShadowPrice, r.TotalRate)
	if r.Wells[1].AtBound != "min" || r.NotUnique {
		t.Errorf("W2 at bound %q, other plans as good %v", r.Wells[1].AtBound, r.NotUnique)
	}
	want := "Binds. W1 contributes 66 %, W3 34 %. One more centimetre is worth 30 m³/d, up to 16 cm more; then W3 stands still."
	if l1.Sentence != want {
		t.Errorf("sentence %q, want %q", l1.Sentence, want)
	}
	if s.table.calls != 2 {
		t.Errorf("linear rows took %d linearisations, want 2", s.table.calls)
	}
}

func TestCanalStripWithCaps(t *testing.T) {
	s := canalStrip(MostYield, 600)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25)
	r := s.plan(t)
	near(t, "total", r.TotalRate, 1156.112576, printed)
	for i, want := range []float64{600, 0, 556.112576} {
		near(t, r.Wells[i].ID, r.Wells[i].Rate, want, printed)
	}
	l1, l2 := limitOf(t, r, "L1"), limitOf(t, r, "L2")
	near(t, "slack of P1", l1.Headroom, 0.02218132, 5e-9) // printed with eight decimals
	near(t, "price of P2", l2.ShadowPrice, 3436.207019, printed)
	near(t, "price of W1's cap", r.Wells[0].ShadowPrice, 0.49510137, 5e-9)
	if r.Wells[0].AtBound != "max" || l1.Binds || l1.ShadowPrice != 0 {
		t.Errorf("W1 at %q, P1 binds %v at price %v", r.Wells[0].AtBound, l1.Binds, l1.ShadowPrice)
	}
}

// The least drawdown at P1 for a total of 1000 m³/d is 0.23266010 m at (400, 0, 600): with one limit of size X on P1, the largest
// share of headroom is 1 - 0.23266010/X.
func TestCanalStripLeastDrawdownAsHeadroom(t *testing.T) {
	s := canalStrip(MostHeadroom, 600)
	s.brief.Demand = number(1000)
	s.limit("L1", "P1", 0.30)
	r := s.plan(t)
	for i, want := range []float64{400, 0, 600} {
		near(t, r.Wells[i].ID, r.Wells[i].Rate, want, 1e-6)
	}
	l := limitOf(t, r, "L1")
	near(t, "drawdown at P1", l.Value, 0.23266010, 5e-9)
	near(t, "share", *l.RoomShare, 1-0.23266010/0.30, 5e-9/0.30)
	near(t, "worst", *r.WorstMargin, *l.RoomShare, 0)
	// t = 1 - s/X: dt/dX = s/X², dt/dD = -slope of the marginal well W1 / X
	exact(t, "price", l.ShadowPrice, l.Value/0.09)
	near(t, "price of demand", *r.DemandPrice, -2.712079621525e-4/0.30, 1e-12)
	if !l.Binds {
		t.Error("the limit that sets the headroom binds")
	}
}

// The share of headroom against a bisection: the largest t for which a programme with limits reduced by t still gives the demand.
func TestMostHeadroomAgainstBisection(t *testing.T) {
	for _, demand := range []float64{300, 800, 1100} {
		s := canalStrip(MostHeadroom, 900)
		s.brief.Demand = number(demand)
		s.limit("L1", "P1", 0.30, func(l *wells.Limit) { l.Reserve = 0.05 })
		s.limit("L2", "P2", 0.25)
		r := s.plan(t)
		largest := func(t float64) float64 {
			columns := []convex.Column{{Cost: 1, Upper: 900}, {Cost: 1, Upper: 900}, {Cost: 1, Upper: 900}}
			p, _ := convex.NewProblem(convex.Maximise, columns)
			for k, x := range []float64{0.30 * (0.95 - t), 0.25 * (1 - t)} {
				if _, err := p.AddRow(convex.Row{Coefficients: s.table.response.Rows[k].Slope, Lower: math.Inf(-1), Upper: x}); err != nil {
					panic(err)
				}
			}
			sol, err := convex.Solve(context.Background(), p, convex.Options{})
			if err != nil || sol.Status != convex.Optimal {
				return math.Inf(-1)
			}
			return sol.Objective
		}
		low, high := 0.0, 1.0
		for range 50 {
			middle := (low + high) / 2
			if largest(middle) >= demand {
				low = middle
			} else {
				high = middle
			}
		}
		got := math.Min(*limitOf(t, r, "L1").RoomShare-0.05, *limitOf(t, r, "L2").RoomShare)
		near(t, "share", got, low, 1e-8)
		exact(t, "total", r.TotalRate, demand)
	}
}
