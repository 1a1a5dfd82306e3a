package plan

import (
	"context"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// curvedCost is the aim that is made small.
func curvedCost(r *Report) float64 {
	if r.Requests != nil {
		return r.Requests.Squares
	}
	return r.PumpingEnergy.Energy
}

// curvedTolerance is the difference of two costs, relative, that rounding of two plans makes.
const curvedTolerance = 1e-9

// confirmCurved plans again with the limit elsewhere: the cost lies on one parabola while the same limits hold, whose slope is the price,
// and leaves it beyond. It returns how many ends it saw the parabola left at.
func confirmCurved(t *testing.T, s *site, what string, r *Report, at float64, x *PriceRange, way float64, move moved) (left int) {
	t.Helper()
	base := curvedCost(r)
	cost := func(v float64) (float64, bool) {
		other := &site{brief: s.brief, table: &table{response: s.table.response}}
		move(&other.brief, v)
		q, err := Make(context.Background(), other.brief, other.table, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if q.Status != StatusOptimal {
			return 0, false
		}
		return curvedCost(q), true
	}
	for _, side := range []struct {
		price, to *float64
		then      string
		sign      float64 // of the way in which it goes
	}{{x.Looser, x.LooserTo, x.LooserThen, 1}, {x.Tighter, x.TighterTo, x.TighterThen, -1}} {
		direction := way * side.sign
		if side.price == nil {
			if _, feasible := cost(at + direction*1e-3*math.Abs(at)); feasible {
				t.Errorf("%s %+v: there is a plan", what, side)
			}
			continue
		}
		end := at + direction*math.Max(math.Abs(at), 1)
		if side.to != nil {
			end = *side.to
		}
		length := math.Abs(end - at)
		if !(length > 0) {
			t.Errorf("%s: no length", what)
			continue
		}
		// cost(step) = base - sign price step + bend step²/2; the bend comes from the middle, and must do for the rest
		middle, feasible := cost(at + direction*length/2)
		if !feasible {
			t.Errorf("%s: no plan in the middle of the range to %v", what, end)
			continue
		}
		bend := (middle - base + side.sign**side.price*length/2) * 8 / (length * length)
		parabola := func(step float64) float64 { return base - side.sign**side.price*step + bend*step*step/2 }
		near9 := func(a, b float64) bool { return math.Abs(a-b) <= curvedTolerance*math.Max(1e-3, math.Abs(base)) }
		for _, share := range []float64{0.05, 0.3, 0.95} {
			got, feasible := cost(at + direction*share*length)
			if !feasible || !near9(got, parabola(share*length)) {
				t.Errorf("%s at %v of the way to %v (%s): %.12g, the parabola says %.12g", what, share, end, side.then, got, parabola(share*length))
			}
		}
		if side.to == nil {
			continue
		}
		step := length + 0.05*math.Max(length, 0.1*math.Abs(at))
		if at > 0 && at+direction*step < 0 {
			continue
		}
		got, feasible := cost(at + direction*step)
		if beyond := strings.HasPrefix(side.then, "no rates"); feasible == beyond {
			t.Errorf("%s: beyond %v, where %q: plan %v", what, end, side.then, feasible)
		}
		if feasible && !near9(got, parabola(step)) {
			left++
		}
	}
	return left
}

// Random requests, and energies without turbulent loss: every range of a limit, of the demand and of a well is confirmed by new plans.
func TestCurvedRangesAgainstNewPlans(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 13))
	seen, left := 0, 0
	for trial := range 8 {
		s := randomSite(rng, 4, 3)
		s.brief.Aim = ClosestToRequests
		for i := range s.brief.Wells {
			s.brief.Wells[i].Min = 0
			s.brief.Wells[i].Requested = number(s.brief.Wells[i].Max * (0.3 + 0.8*rng.Float64()))
		}
		r := s.plan(t)
		for k := range s.brief.Limits {
			l := limitOf(t, r, s.brief.Limits[k].ID)
			if l.Range == nil || l.Range.HoldsFor != PriceMoves {
				t.Fatalf("trial %d, %s: %+v", trial, l.ID, l.Range)
			}
			if l.Binds {
				seen++
				way := 1.0
				if l.Sense == "at_least" {
					way = -1
				}
				left += confirmCurved(t, s, l.ID, r, s.brief.Limits[k].Value, l.Range, way, limitAt(k))
			}
		}
	}
	e := canalEnergy(1100, 0.65)
	r := e.plan(t)
	for k, id := range []string{"L1", "L2"} {
		seen++
		left += confirmCurved(t, e, id, r, e.brief.Limits[k].Value, limitOf(t, r, id).Range, 1, limitAt(k))
	}
	left += confirmCurved(t, e, "demand", r, 1100, r.DemandRange, -1, func(b *Brief, v float64) { b.Demand = &v })
	if seen < 8 || left < seen/2 {
		t.Errorf("%d limits, %d ends", seen, left)
	}
	if l := limitOf(t, r, "L2"); !strings.Contains(l.Sentence, " at first, with the same limits up to ") {
		t.Errorf("%q", l.Sentence)
	}
	turbulent := turbulentPair(600, 4e-6, 3e-6)
	turbulent.brief.Limits[0].Value = 0.2
	r = turbulent.plan(t)
	if r.DemandRange == nil || r.DemandRange.HoldsFor != PriceMoves+" and "+lastQuadratic {
		t.Errorf("%+v", r.DemandRange)
	}
}
