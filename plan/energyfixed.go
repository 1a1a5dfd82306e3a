package plan

import (
	"context"

	"springbound/wells"
)

// fixedEnergy is what the field's own wells with fixed rates take: constant but for their lifts, which answer to the wells up for decision.
// It is linear in the rates, and so leaves the energy convex.
type fixedEnergy struct {
	constant float64   // [kWh/d]
	slope    []float64 // by column [kWh/m³]
}

// fixedCounts tells whether a well with a fixed rate is counted: it is the field's own, pumps, and its efficiency, its delivery level and the
// level in it are known.
func (p *planner) fixedCounts(i int) bool {
	return p.setup.fixedPumps(i) && p.setup.tellsEnergy(i) && p.oracle.known[0].well[i] != nil
}

// fixedPumps tells whether a well is the field's own and pumps at a fixed rate.
func (s *setup) fixedPumps(i int) bool {
	w := s.Wells[i]
	return w.Mode == wells.Fixed && !w.Others && s.column[i] < 0 && s.standing[i] > 0
}

func (s *setup) tellsEnergy(i int) bool {
	w := s.Wells[i]
	return w.DeliveryLevel != nil && finite(*w.DeliveryLevel) && w.PumpEfficiency != nil && *w.PumpEfficiency > 0 && *w.PumpEfficiency <= 1
}

// fixedEnergyAt takes the lifts of the wells with fixed rates from the tangents of their rows at the given rates.
func (p *planner) fixedEnergyAt(ctx context.Context, rates []float64) (f fixedEnergy, moving bool, err error) {
	s := p.setup
	f.slope = make([]float64, len(s.decided))
	for i := range s.Wells {
		if !p.fixedCounts(i) {
			continue
		}
		tan, err := p.oracle.tangent(ctx, target{receptor: -1, well: i}, rates)
		if err != nil {
			return f, false, err
		}
		moving = moving || !p.oracle.known[0].well[i].Linear
		w, rate := s.Wells[i], s.standing[i]
		each := s.energyPerLift(i) * rate
		f.constant += each * (*w.DeliveryLevel - s.WellTerms[i].StaticLevel + tan.constant + dot(tan.slope, s.standing) + quadraticLoss(w, rate))
		for k, j := range s.decided {
			f.slope[k] += each * tan.slope[j]
		}
	}
	return f, moving, nil
}

// energyPerLift is the energy of a well per rate and lift, by its share of the year [kWh/m⁴].
func (s *setup) energyPerLift(i int) float64 {
	return s.weight(i) * EnergyPerLift / *s.Wells[i].PumpEfficiency
}

// fixedAmong keeps the wells with fixed rates.
func (p *planner) fixedAmong(ids []string) []string {
	var out []string
	for _, id := range ids {
		if p.setup.column[p.setup.wellIndex[id]] < 0 {
			out = append(out, id)
		}
	}
	return out
}
