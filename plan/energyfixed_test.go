package plan

import (
	"math"
	"strings"
	"testing"
)

// fixedField is two wells up for decision beside an own well with a fixed rate that the first one draws on hard, an own well that does not
// tell its efficiency, and a neighbour with all its figures, which is not the field's.
func fixedField(demand, loss float64) *site {
	own, silent, neighbour := fixedWell("F", 600), fixedWell("S", 100), fixedWell("N", 250)
	own.Others, silent.Others = false, false
	own.QuadraticLoss, own.DutyHours = 3e-6, 12
	a, b := decidedWell("A", 0, 900), decidedWell("B", 0, 900)
	a.QuadraticLoss = loss
	s := newSite(LeastEnergy, a, own, b, silent, neighbour)
	s.brief.Demand = number(demand)
	s.pumped(0, 20, 0.6, 2e-3, 9e-4, 1e-4, 2e-4, 1e-4)
	s.pumped(1, 25, 0.5, 9e-4, 2.5e-3, 1e-4, 3e-4, 1e-4)
	s.pumped(2, 21, 0.6, 1e-4, 1e-4, 2e-3, 1e-4, 1e-4)
	s.pumped(4, 30, 0.4, 1e-4, 1e-4, 1e-4, 1e-4, 3e-3)
	return s
}

// wholeEnergy is the field's energy in its own words, without the silent well.
func wholeEnergy(s *site, a, b float64) float64 {
	la := 20 + 2e-3*a + 9e-4*600 + 1e-4*b + 2e-4*100 + 1e-4*250 + s.brief.Wells[0].QuadraticLoss*a*a
	lf := 25 + 9e-4*a + 2.5e-3*600 + 1e-4*b + 3e-4*100 + 1e-4*250 + 3e-6*1200*1200
	lb := 21 + 1e-4*a + 1e-4*600 + 2e-3*b + 1e-4*100 + 1e-4*250
	return EnergyPerLift * (a*la/0.6 + 600*lf/0.5 + b*lb/0.6)
}

// The plan has the least energy of the whole field, found by trying every split of the demand; counting the decided wells alone would
// have split it otherwise.
func TestOwnWellsWithFixedRatesAreCounted(t *testing.T) {
	for _, loss := range []float64{0, 2e-6} {
		s := fixedField(800, loss)
		r := s.plan(t)
		if r.Status != StatusOptimal || !r.ModelValid {
			t.Fatalf("%s %v", r.Status, r.Invalid)
		}
		least, at := math.Inf(1), 0.0
		for a := 0.0; a <= 800; a += 0.01 {
			if e := wholeEnergy(s, a, 800-a); e < least {
				least, at = e, a
			}
		}
		// the scan's step of 0.01 m³/d at a curvature of about 2e-5 kWh/d per (m³/d)²
		near(t, "energy", r.PumpingEnergy.Energy, least, 1e-8)
		near(t, "rate of A", r.Wells[0].Rate, at, 0.01)
		exact(t, "energy at the plan", r.PumpingEnergy.Energy, wholeEnergy(s, r.Wells[0].Rate, r.Wells[2].Rate))
		exact(t, "rate counted", r.PumpingEnergy.Rate, 1400)
		if got := strings.Join(r.PumpingEnergy.Counted, " "); got != "A F B" {
			t.Errorf("counted: %s", got)
		}
		if got := strings.Join(r.PumpingEnergy.Unknown, " "); got != "S" {
			t.Errorf("not counted: %s", got)
		}
		if !strings.Contains(r.Headline, "F, whose rate is fixed, is counted too") {
			t.Errorf("%q", r.Headline)
		}
		if text := strings.Join(r.NotAssessed, "\n"); !strings.Contains(text, "pumping energy of S") {
			t.Errorf("%q", text)
		}
		// the price of the demand is the slope of the whole energy
		more := fixedField(801, loss).plan(t).PumpingEnergy.Energy
		less := fixedField(799, loss).plan(t).PumpingEnergy.Energy
		near(t, "price of the demand", *r.PumpingEnergy.Demand, (more-less)/2, 1e-7)
		alone := 0.0
		least = math.Inf(1)
		for a := 0.0; a <= 800; a += 0.1 {
			if e := wholeEnergy(s, a, 800-a) - EnergyPerLift*600*(9e-4*a+1e-4*(800-a))/0.5; e < least {
				least, alone = e, a
			}
		}
		if !(alone-r.Wells[0].Rate > 20) {
			t.Errorf("A at %v, and at %v for the decided wells alone", r.Wells[0].Rate, alone)
		}
	}
}
