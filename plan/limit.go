package plan

import (
	"context"
	"math"

	"springbound/wells"
)

// limitTolerance is by how much a limit may be passed, or left, and still count as kept exactly: a share of the limit's own size.
// The programme is solved to about 1e-9 of its rows; two more digits cover rows that are mostly cancellation.
const limitTolerance = 1e-7

// cutTolerance is by how much the true change of a row that is not linear may pass what the programme allowed before a further
// tangent is added, as a share of the limit's size. A tenth of limitTolerance, so that the loop's end never shows as a passed limit.
const cutTolerance = 1e-8

// bound is a limit on a receptor or on the level in a well, written as a bound on the change that the counted wells cause:
//
//	side (change - edge) + (reserve + t) size <= 0
//
// change is counted against no pumping; edge is the limit as entered, moved by the change of the limit's baseline.
type bound struct {
	limit    int // index into Brief.Limits; -1: the lowest level in a well
	target   target
	counted  []bool
	linear   bool    // the change is linear in the decided rates
	kept     bool    // where it is not: tangents never allow too little, so that they are kept as cuts
	value    bool    // a bound on the value, not on its change
	side     float64 // +1: the change may not be larger than edge; -1: not smaller
	edge     float64
	size     float64 // the limit's own size, in the unit of the change; 0: a hard limit
	reserve  float64
	baseline float64 // change of the baseline, in the unit of the change
	bore     int     // the well whose turbulent loss is part of the change; -1: none
	unit     float64 // one unit of the limit in the unit of the change: the undisturbed value for a share, 1 otherwise
	grow     float64 // change of size when the limit is loosened by one unit of the change: -1, 0, 1
	cuts     []tangent
	price    float64 // change of the aim per unit by which the limit is loosened

	priceRange *PriceRange // nil when not known
}

// slack is how much further the change may go before the limit with its reserve, and with a share t kept free, is reached.
func (b *bound) slack(change, t float64) float64 {
	return b.side*(b.edge-change) - (b.reserve+t)*b.size
}

// headroom is the distance to the limit as entered, in the limit's own unit.
func (b *bound) headroom(change float64) float64 { return b.side * (b.edge - change) / b.unit }

// allowed is the change at which the limit with its reserve is reached.
func (b *bound) allowed() float64 { return b.edge - b.side*b.reserve*b.size }

// scale is what tolerances on the bound are relative to: its size, or for a hard limit the largest change that one well can cause.
func (b *bound) scale(s *setup, slope []float64) float64 {
	if b.size > 0 {
		return b.size
	}
	scale := 0.0
	for i, v := range slope {
		if b.counted[i] {
			scale = math.Max(scale, math.Abs(v)*s.rateScale(i))
		}
	}
	return scale
}

// bounds turns the brief's limits and the wells' lowest levels into bounds. assessed[i] says of limit i 'yes' or why not.
func (p *planner) buildBounds(ctx context.Context) error {
	s := p.setup
	p.assessed = make([]string, len(s.Limits))
	p.boundOfLimit = make([]int, len(s.Limits))
	p.boundOfWell = make([]int, len(s.Wells))
	for i, l := range s.Limits {
		p.boundOfLimit[i] = -1
		b, why, err := p.limitBound(ctx, i, l)
		if err != nil {
			return err
		}
		p.assessed[i] = "yes"
		if why != "" {
			p.assessed[i] = "not assessed: " + why
			s.notAssessed.addf("limit %s on %s: %s", l.ID, s.receptorName(l.Receptor), why)
			continue
		}
		p.boundOfLimit[i] = len(p.bounds)
		p.bounds = append(p.bounds, b)
	}
	for i := range s.Wells {
		p.boundOfWell[i] = -1
		if b := p.levelBound(i); b != nil {
			p.boundOfWell[i] = len(p.bounds)
			p.bounds = append(p.bounds, b)
		}
	}
	return nil
}

// limitBound makes the bound of one limit, or says why the limit is not assessed.
func (p *planner) limitBound(ctx context.Context, index int, l wells.Limit) (b *bound, why string, err error) {
	s := p.setup
	r := s.receptorIndex[l.Receptor]
	row := p.oracle.known[0].receptor[r]
	switch {
	case s.Receptors[r].Outside:
		return nil, "the receptor lies outside the model", nil
	case !s.isState(l.State):
		return nil, "the brief has no operating state \"" + l.State + "\"", nil
	case row == nil:
		return nil, "the response has no row for the receptor", nil
	case l.Quantity == wells.ShareOfBase && row.Base == 0:
		return nil, "the value without pumping is 0, of which a share has no meaning", nil
	}
	b = &bound{limit: index, target: target{receptor: r, well: -1}, side: 1, reserve: l.Reserve, unit: 1,
		counted: make([]bool, len(s.Wells))}
	own := l.Counts == wells.Own && l.Quantity != wells.Value
	for i, w := range s.Wells {
		b.counted[i] = !(own && w.Others)
	}
	bore := -1
	if i, known := s.wellIndex[s.Receptors[r].Feature]; known && s.Receptors[r].Kind == wells.PumpingLevel {
		bore = i
	}
	if (l.Quantity == wells.Value) == (l.Sense == wells.AtMost) {
		b.side = -1
	}
	s.setCurvature(b, row, bore)
	if l.Quantity == wells.Value {
		b.value = true
		b.edge = row.Base - l.Value
		b.size = math.Abs(b.edge)
		b.grow = sign(b.side * b.edge)
		return b, "", nil
	}
	if l.Quantity == wells.ShareOfBase {
		b.unit = math.Abs(row.Base)
	}
	b.edge = l.Value * b.unit
	b.size = math.Abs(b.edge)
	b.grow = sign(b.side * b.edge)
	if b.baseline, err = p.baselineChange(ctx, l, b); err != nil {
		return nil, "", err
	}
	b.edge += b.baseline
	return b, "", nil
}

// baselineChange is the change that the counted wells cause in the limit's baseline.
func (p *planner) baselineChange(ctx context.Context, l wells.Limit, b *bound) (float64, error) {
	s := p.setup
	var rates []float64
	var blank []string
	switch l.Baseline {
	case wells.NoPumping:
		return 0, nil
	case wells.PresentPumping:
		rates, blank = s.ratesOf(presentRate, everyWell)
	default:
		rates, blank = s.ratesOf(licensedRate, existingUser)
	}
	for _, id := range blank {
		if b.counted[s.wellIndex[id]] {
			s.findings.addf("limit %s counts from the baseline %s, but that rate of well %s is blank: taken as 0", l.ID, l.Baseline, id)
		}
	}
	tan, counted, err := p.oracle.tangentOf(ctx, b, rates)
	if err != nil {
		return 0, err
	}
	return tan.at(counted), nil
}

// setCurvature makes the turbulent loss of well i (-1: none) part of a bound and says how the bound is to be kept. A row that is not
// linear is convex, and so is the loss of a well that pumps; that of a well that recharges is concave. A convex change bounded from
// above and a concave one from below are kept by cuts; the others by their latest tangent, which stays on the safe side.
func (s *setup) setCurvature(b *bound, row *Row, i int) {
	convex, concave := !row.Linear, false
	b.bore = -1
	if i >= 0 && s.Wells[i].QuadraticLoss != 0 && b.counted[i] {
		b.bore = i
		convex = convex || s.isYield(i)
		concave = s.column[i] >= 0 && !s.isYield(i)
	}
	b.linear = !convex && !concave
	b.kept = (b.side > 0 && !concave || b.side < 0 && !convex) && !row.Local
}

// levelBound makes the bound on the level in a well; nil when the well has none.
func (p *planner) levelBound(i int) *bound {
	s := p.setup
	w := s.Wells[i]
	lowest, _ := lowestLevel(w)
	if lowest == nil || (s.column[i] < 0 && s.standing[i] == 0) {
		return nil
	}
	row := p.oracle.known[0].well[i]
	if row == nil {
		s.notAssessed.addf("level in well %s: the response has no row for it", w.ID)
		return nil
	}
	b := &bound{limit: -1, target: target{receptor: -1, well: i}, value: true, side: 1, unit: 1, counted: make([]bool, len(s.Wells))}
	for k := range b.counted {
		b.counted[k] = true
	}
	s.setCurvature(b, row, i)
	b.edge = s.WellTerms[i].StaticLevel - *lowest
	b.size = math.Abs(b.edge)
	b.grow = sign(b.edge)
	return b
}

func sign(v float64) float64 {
	switch {
	case v > 0:
		return 1
	case v < 0:
		return -1
	}
	return 0
}

func (s *setup) receptorName(id string) string {
	if i, known := s.receptorIndex[id]; known && s.Receptors[i].Name != "" {
		return s.Receptors[i].Name
	}
	return id
}
