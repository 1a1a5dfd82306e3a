package plan

import (
	"context"
	"math"
)

// rateTolerance is how near a rate must be to its bound to stand at it, as a share of the largest rate of the well; the programme
// puts a rate on its bound exactly, so this only covers given rates with rounded digits.
const rateTolerance = 1e-9

// wellResults fills the lines of the wells. resolved is the full solve at these rates, or nil.
func (p *planner) wellResults(ctx context.Context, rates []float64, resolved *lines) ([]WellResult, error) {
	s := p.setup
	out := make([]WellResult, len(s.Wells))
	var unknown []string
	for i, w := range s.Wells {
		rate := tidy(rates[i])
		term := s.WellTerms[i]
		r := WellResult{ID: w.ID, Name: w.Name, Owner: w.Owner, Mode: w.Mode.String(), Others: w.Others, X: w.At[0], Y: w.At[1],
			RadiusM: w.Radius, Rate: rate, Running: w.RunningRate(rate), DutyHours: w.DutyHours, Yearly: rate * daysPerYear,
			Min: w.Min, Max: w.Max, MaxSource: w.MaxSource, Present: w.Present, Recent: w.Recent, Licensed: w.Licensed,
			Requested: w.Requested, StaticLevel: term.StaticLevel, OwnPerRate: term.OwnDrawdown, OwnLogarithm: tidy(term.OwnDrawdown * rate),
			LinearLoss: w.LinearLoss, QuadraticLoss: w.QuadraticLoss, WellLoss: tidy(w.Loss(rate)), Source: w.Source,
			DrawdownByWell: []float64{}}
		if s.column[i] < 0 {
			r.Min, r.Max = s.standing[i], s.standing[i]
		}
		r.AtBound = p.atBound(i, rate)
		if p.wellPrice != nil {
			r.ShadowPrice = tidy(p.wellPrice[i])
		}
		if p.wellRange != nil && r.AtBound != "" {
			r.RateRange = p.wellRange[i]
		}
		known, err := p.levels(ctx, i, rates, resolved, &r)
		if err != nil {
			return nil, err
		}
		if !known {
			unknown = append(unknown, w.ID)
		}
		r.PumpingEnergy, r.Request = p.wellEnergy(i, known, &r), p.wellRequest(i, rate)
		out[i] = r
	}
	if len(unknown) > 0 {
		s.notAssessed.addf("level in %s %s: the response does not tell it", plural(len(unknown), "well", "wells"), list(unknown))
	}
	return out, nil
}

// levels fills the heads and levels of well i. Where the well has a row, its heads are superposed from it, so that a table of
// formulas gives the same figures; otherwise they are those of the full solve. It returns false when neither is at hand: the
// static level then stands in for the head.
func (p *planner) levels(ctx context.Context, i int, rates []float64, resolved *lines, r *WellResult) (known bool, err error) {
	s := p.setup
	w := s.Wells[i]
	r.NodeLevel = r.StaticLevel
	if p.oracle.known[0].well[i] != nil {
		tan, err := p.oracle.tangent(ctx, target{receptor: -1, well: i}, rates)
		if err != nil {
			return false, err
		}
		own := r.OwnPerRate + w.LinearLossSlope()
		r.DrawdownByWell = append([]float64(nil), tan.slope...)
		r.DrawdownByWell[i] -= own
		r.NodeLevel -= tan.at(rates) - own*r.Rate
		known = true
	} else if resolved != nil && resolved.heads != nil {
		r.NodeLevel = resolved.heads[i]
		known = true
	}
	r.PumpingLevel = r.NodeLevel - r.OwnLogarithm - r.WellLoss
	lowest, reason := lowestLevel(w)
	if lowest == nil {
		return known, nil
	}
	r.LowestLevel, r.LowestReason = lowest, reason
	if known {
		margin := tidy(r.PumpingLevel - *lowest)
		r.LevelMargin = &margin
	}
	if k := p.boundOfWell[i]; k >= 0 {
		r.LevelShadowPrice, r.LevelRange = tidy(p.bounds[k].price), p.bounds[k].priceRange
	}
	return known, nil
}

// atBound tells whether a decided well's rate stands at a bound: min, max or nothing. Where both are equal the price decides.
func (p *planner) atBound(i int, rate float64) string {
	s := p.setup
	if s.column[i] < 0 {
		return ""
	}
	w := s.Wells[i]
	near := rateTolerance * s.rateScale(i)
	if rate == 0 && s.switched(i) {
		return ""
	}
	atMin, atMax := math.Abs(rate-w.Min) <= near, math.Abs(rate-w.Max) <= near
	switch {
	case atMin && atMax && p.minHolds != nil && p.minHolds[i]:
		return "min"
	case atMax:
		return "max"
	case atMin:
		return "min"
	}
	return ""
}

// checkLevels compares every running well's level, with its full loss, with the lowest one allowed. A plan that fails is not valid.
func (p *planner) checkLevels(results []WellResult) (passed []string) {
	s := p.setup
	for i, r := range results {
		k := p.boundOfWell[i]
		if k < 0 || r.LevelMargin == nil || (r.Rate == 0 && s.switched(i)) {
			continue
		}
		b := p.bounds[k]
		if *r.LevelMargin >= -limitTolerance*b.scale(s, p.oracle.known[0].well[i].Slope) {
			continue
		}
		text := "well " + r.ID + ": the level in the well is " + lengthText(-*r.LevelMargin) + " below the lowest allowed " +
			lengthText(*r.LowestLevel) + " (" + r.LowestReason + ")"
		if turbulent := quadraticLoss(s.Wells[i], r.Rate); turbulent > 0 {
			text += ", of which the turbulent loss makes " + lengthText(turbulent)
		}
		passed = append(passed, text)
	}
	return passed
}
