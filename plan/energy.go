package plan

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
	"springbound/wells"
)

// EnergyPerLift is the work of lifting a cubic metre of water by a metre [kWh/m⁴]: density 1000 kg/m³ times gravity 9.80665 m/s²
// over 3.6e6 J/kWh.
const EnergyPerLift = 1000 * 9.80665 / 3.6e6

// symmetryShare is the largest difference of two mirrored drawdowns of wells, as a share of what either well draws down in itself,
// with which they count as equal: two direct solves of a symmetric matrix of 1e5 nodes differ by about 1e-12.
const symmetryShare = 1e-9

// energyAim is the pumping energy in a day of the decided wells, and of the field's own wells with fixed rates as far as it is known:
//
//	f(Q) = sum_i k_i Q_i (z_i + sum_j G_ij Q_j + c_i Q_i²) + sum_fixed k_f Q_f (z_f + sum_j G_fj Q_j + c_f Q_f²)   [kWh/d]
//
// k = EnergyPerLift/efficiency; z the lift to the delivery level with the decided wells at rest; G the drawdown in well i per rate of
// well j, with i's own logarithm and linear loss on the diagonal; c = C (24/duty hours)², as the turbulent loss is that of the running
// rate. G is symmetric (reciprocity), so that the quadratic part is convex where the efficiencies do not differ too much; the
// cubic part is convex for rates that are not negative.
type energyAim struct {
	energy []float64   // k [kWh/m⁴]
	lift   []float64   // z [m]
	mutual [][]float64 // G [d/m²]
	loss   []float64   // c [d²/m⁵]
	fixed  fixedEnergy // of own wells whose rates are not decided
	moving bool        // a drawdown is not linear in the rates: lifts are those of a tangent
}

// at takes the lifts from the tangents of the wells' rows at the given rates.
func (e *energyAim) at(ctx context.Context, p *planner, rates []float64) error {
	s := p.setup
	*e = energyAim{}
	for _, i := range s.decided {
		w := s.Wells[i]
		if w.Max == 0 {
			e.energy, e.lift, e.loss = append(e.energy, 0), append(e.lift, 0), append(e.loss, 0)
			e.mutual = append(e.mutual, make([]float64, len(s.decided)))
			continue
		}
		tan, err := p.oracle.tangent(ctx, target{receptor: -1, well: i}, rates)
		if err != nil {
			return err
		}
		e.moving = e.moving || !p.oracle.known[0].well[i].Linear
		run := w.RunningRate(1)
		e.energy = append(e.energy, s.weight(i)*EnergyPerLift / *w.PumpEfficiency)
		e.lift = append(e.lift, *w.DeliveryLevel-s.WellTerms[i].StaticLevel+tan.constant+dot(tan.slope, s.standing))
		e.loss = append(e.loss, w.QuadraticLoss*run*run)
		row := make([]float64, len(s.decided))
		for k, j := range s.decided {
			if s.Wells[j].Max > 0 { // a well that cannot pump has no lift of its own, and would bend the energy one way only
				row[k] = tan.slope[j]
			}
		}
		e.mutual = append(e.mutual, row)
	}
	fixed, moving, err := p.fixedEnergyAt(ctx, rates)
	e.fixed, e.moving = fixed, e.moving || moving
	return err
}

func (e *energyAim) value(x []float64) float64 {
	sum := e.fixed.constant + dot(e.fixed.slope, x)
	for i, q := range x {
		sum += e.energy[i] * q * (e.lift[i] + dot(e.mutual[i], x) + e.loss[i]*q*q)
	}
	return sum
}

func (e *energyAim) gradient(x []float64) []float64 {
	out := append([]float64(nil), e.fixed.slope...)
	for i, q := range x {
		out[i] += e.energy[i] * (e.lift[i] + dot(e.mutual[i], x) + 3*e.loss[i]*q*q)
		for j, g := range e.mutual[i] {
			out[j] += e.energy[i] * q * g
		}
	}
	return out
}

// hessian is symmetric to the last bit: each entry is the sum of the same two products.
func (e *energyAim) hessian(x []float64) convex.Hessian {
	n := len(x)
	h := convex.Hessian{Dense: make([]float64, n*n)}
	for i := range x {
		for j := range i + 1 {
			v := e.energy[i]*e.mutual[i][j] + e.energy[j]*e.mutual[j][i]
			h.Dense[i*n+j], h.Dense[j*n+i] = v, v
		}
		h.Dense[i*n+i] += 6 * e.energy[i] * e.loss[i] * math.Max(0, x[i])
	}
	return h
}

func (e *energyAim) quadratic() bool {
	for _, c := range e.loss {
		if c != 0 {
			return false
		}
	}
	return true
}

func (e *energyAim) changes() bool { return e.moving }

// asymmetry is the largest difference of two mirrored drawdowns as a share of the geometric mean of the two wells' own.
func (e *energyAim) asymmetry() float64 {
	worst := 0.0
	for i := range e.mutual {
		for j := range i {
			if own := math.Sqrt(e.mutual[i][i] * e.mutual[j][j]); own > 0 {
				worst = math.Max(worst, math.Abs(e.mutual[i][j]-e.mutual[j][i])/own)
			}
		}
	}
	return worst
}

// checkEnergy reports what least-energy lacks: a demand, and of every well up for decision that may pump its efficiency and the
// level that it delivers to. Wells that recharge cannot be decided: the energy is not convex in their rates.
func (s *setup) checkEnergy(faults *problemList) {
	if len(s.demands) == 0 {
		faults.addf("the aim %s needs a demand", s.Aim)
	}
	for _, i := range s.decided {
		w := s.Wells[i]
		if w.Min < 0 {
			faults.addf("well %s: the aim %s cannot decide a well that recharges; fix its rate", w.ID, s.Aim)
			continue
		}
		if w.Max == 0 {
			continue
		}
		switch {
		case w.PumpEfficiency == nil:
			faults.addf("well %s: the aim %s needs its pump efficiency", w.ID, s.Aim)
		case !(*w.PumpEfficiency > 0 && *w.PumpEfficiency <= 1):
			faults.addf("well %s: a pump efficiency of %v; it must be above 0 and at most 1", w.ID, *w.PumpEfficiency)
		}
		switch {
		case w.DeliveryLevel == nil:
			faults.addf("well %s: the aim %s needs its delivery level", w.ID, s.Aim)
		case !finite(*w.DeliveryLevel):
			faults.addf("well %s: the delivery level is %v, not a finite number", w.ID, *w.DeliveryLevel)
		}
		if !(w.QuadraticLoss >= 0) {
			faults.addf("well %s: a turbulent loss of %v d²/m⁵; the aim %s needs one of at least 0", w.ID, w.QuadraticLoss, s.Aim)
		}
	}
}

// checkLevelRows reports wells up for decision whose level the response does not tell.
func (p *planner) checkLevelRows() error {
	if p.setup.Aim != LeastEnergy {
		return nil
	}
	var faults problemList
	for _, i := range p.setup.decided {
		if p.setup.Wells[i].Max > 0 && p.oracle.known[0].well[i] == nil {
			faults.addf("well %s: the aim %s needs the level in it, and the response has no row for it", p.setup.Wells[i].ID, p.setup.Aim)
		}
	}
	return faults.err()
}

// WellEnergy is what pumping one well takes.
type WellEnergy struct {
	DeliveryLevel float64 `json:"delivery_level_m"`
	Lift          float64 `json:"lift_m"` // delivery level less pumping level
	Efficiency    float64 `json:"pump_efficiency_share"`
	Specific      float64 `json:"specific_energy_kwh_per_m3"`
	Energy        float64 `json:"energy_kwh_per_d"`
	Power         float64 `json:"power_while_running_kw"` // over the duty hours
}

// EnergyTotal sums the wells up for decision and the field's own wells with fixed rates.
type EnergyTotal struct {
	Counted  []string `json:"wells_counted"`
	Unknown  []string `json:"wells_not_counted"`     // own wells with fixed rates whose efficiency, delivery level or level is not known
	Rate     float64  `json:"counted_rate_m3_per_d"` // of the wells counted
	Energy   float64  `json:"energy_kwh_per_d"`
	Power    float64  `json:"power_while_running_kw"`     // all running at once
	Specific *float64 `json:"specific_energy_kwh_per_m3"` // null when nothing is pumped
	Demand   *float64 `json:"demand_price_kwh_per_m3"`    // what one more m³ costs; null but for least-energy
}

// wellEnergy is the energy of a well whose efficiency, delivery level and pumping level are known and that does not recharge.
func (p *planner) wellEnergy(i int, known bool, r *WellResult) *WellEnergy {
	w := p.setup.Wells[i]
	if !known || w.DeliveryLevel == nil || w.PumpEfficiency == nil || !(*w.PumpEfficiency > 0) || r.Rate < 0 {
		return nil
	}
	e := &WellEnergy{DeliveryLevel: *w.DeliveryLevel, Efficiency: *w.PumpEfficiency, Lift: tidy(*w.DeliveryLevel - r.PumpingLevel)}
	e.Specific = tidy(EnergyPerLift * e.Lift / e.Efficiency)
	e.Energy = tidy(r.Rate * e.Specific)
	e.Power = tidy(e.Energy / w.DutyHours)
	if e.Lift < 0 && r.Rate > 0 && p.setup.Aim == LeastEnergy {
		p.setup.cautions.addf("well %s: the water stands %s above the level that it is delivered to, and counts as energy gained: check the delivery level", w.ID, lengthText(-e.Lift))
	}
	return e
}

// energyOf sums the energy of the wells up for decision and of own wells with fixed rates; nil where a well up for decision that runs has
// no figure, or none has.
func energyOf(list []WellResult) *EnergyTotal {
	t := &EnergyTotal{Counted: []string{}, Unknown: []string{}}
	for _, w := range list {
		decided := w.Mode == wells.Decided.String()
		switch {
		case !decided && (w.Others || !(w.Rate > 0)):
		case w.PumpingEnergy != nil:
			t.Counted = append(t.Counted, w.ID)
			t.Energy += w.PumpingEnergy.Energy
			t.Power += w.PumpingEnergy.Power
			t.Rate += w.Rate
		case decided && w.Rate != 0:
			return nil
		case !decided:
			t.Unknown = append(t.Unknown, w.ID)
		}
	}
	if len(t.Counted) == 0 {
		return nil
	}
	if t.Rate > 0 {
		specific := t.Energy / t.Rate
		t.Specific = &specific
	}
	return t
}

// totalEnergy is the energy of the field.
func (p *planner) totalEnergy(r *Report) *EnergyTotal {
	t := energyOf(r.Wells)
	if t == nil {
		return nil
	}
	if p.setup.Aim == LeastEnergy && len(t.Unknown) > 0 {
		p.setup.notAssessed.addf("pumping energy of %s, whose rates are fixed: efficiency, delivery level or level in the well is not known", list(t.Unknown))
	}
	if p.setup.Aim == LeastEnergy {
		t.Demand = p.demandPrice
	}
	return t
}

// energyHeadline is the headline of least-energy.
func (p *planner) energyHeadline(r *Report) string {
	text := "Least pumping energy for the demand"
	if e := r.PumpingEnergy; e != nil {
		text += ": " + energyText(e.Energy) + " for " + flowText(e.Rate)
		if e.Specific != nil {
			text += ", " + plainNumber(*e.Specific, 3, 0, 6) + " kWh/m³"
		}
		if e.Demand != nil {
			text += "; one more m³ takes " + plainNumber(*e.Demand, 3, 0, 6) + " kWh"
		}
		if fixed := p.fixedAmong(e.Counted); len(fixed) > 0 {
			text += "; " + list(fixed) + plural(len(fixed), ", whose rate is fixed, is counted too", ", whose rates are fixed, are counted too")
		}
	}
	return text + "."
}

// checkSymmetry adds the check that the wells draw on each other alike both ways.
func (p *planner) checkSymmetry(add func(name, result, detail string)) {
	e, is := p.curved.(*energyAim)
	if !is {
		return
	}
	worst := e.asymmetry()
	result := pass
	if !(worst <= symmetryShare) {
		result = failed
	}
	add("Wells draw on each other alike both ways", result, fmt.Sprintf("largest difference %.2g of a well's own drawdown, at most %.0e", worst, symmetryShare))
}
