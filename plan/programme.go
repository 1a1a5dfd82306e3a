package plan

import (
	"fmt"
	"math"

	"springbound/plan/convex"
)

// build writes the linear programme over the rates of the decided wells:
//
//	most-yield      maximise  sum of pumped rates
//	most-headroom   maximise  t                        with every limit of nonzero size kept with a share t of its size free
//	least-energy, closest-to-requests                  no linear aim: solve adds the quadratic one
//
// subject to limits, levels, quotas, demand and the wells' ranges. withShare false leaves t and the aim out of most-headroom; the
// limits are then those of a plan with no headroom at all, which is what a conflict is about.
func (p *planner) build(withShare bool) (*programme, error) {
	s := p.setup
	g := &programme{share: -1}
	var columns []convex.Column
	for _, i := range s.decided {
		c := convex.Column{Name: s.Wells[i].ID}
		c.Lower, c.Upper = p.rangeOf(i)
		if s.Aim == MostYield && s.isYield(i) {
			c.Cost = s.weight(i)
		}
		columns = append(columns, c)
	}
	if s.Aim == MostHeadroom && withShare {
		g.share = len(columns)
		columns = append(columns, convex.Column{Name: "share of every limit kept free", Cost: 1, Lower: 0, Upper: math.Inf(1)})
		if s.switches() {
			columns[g.share].Upper = mostHeadroom // the only limits with a size may be levels of wells that stand still
		}
	}
	var err error
	if g.problem, err = convex.NewProblem(convex.Maximise, columns); err != nil {
		return nil, fmt.Errorf("plan: the programme's columns: %w", err)
	}
	if err := p.addQuotas(g); err != nil {
		return nil, err
	}
	for k, d := range s.demands {
		a := g.coefficients()
		for _, i := range s.decided {
			if s.meets(d, i) {
				a[s.column[i]] = 1
			}
		}
		upper := math.Inf(1)
		if s.Aim == MostHeadroom || s.Aim == LeastEnergy {
			upper = d.amount
		}
		if err := g.add(owner{ofDemand, k}, d.words, a, d.amount, upper); err != nil {
			return nil, err
		}
	}
	for k, b := range p.bounds {
		if b.linear {
			// standing wells' losses are constants: the tangent at the standing rates has them
			tan := s.withLoss(b, tangent{slope: p.oracle.known[0].row(b.target).Slope}, s.standing)
			if err := p.addBound(g, k, tan); err != nil {
				return nil, err
			}
		}
	}
	for _, c := range p.cuts {
		if err := p.addBound(g, p.indexOf(c.bound), c.tangent); err != nil {
			return nil, err
		}
	}
	return g, nil
}

// addQuotas adds one row a quota over the pumped rates.
func (p *planner) addQuotas(g *programme) error {
	s := p.setup
	for k := range s.quotas {
		q := &s.quotas[k]
		a, standing := g.coefficients(), 0.0
		for m, i := range q.wells {
			switch {
			case s.isYield(i):
				a[s.column[i]] = q.weight[m]
			case s.column[i] < 0 && s.standing[i] > 0:
				standing += q.weight[m] * s.standing[i]
			}
		}
		if err := g.add(owner{ofQuota, k}, s.quotaWords(q), a, math.Inf(-1), remainder(q.limit-standing, q.limit+standing)); err != nil {
			return err
		}
	}
	return nil
}

func (p *planner) indexOf(b *bound) int {
	if b.limit >= 0 {
		return p.boundOfLimit[b.limit]
	}
	return p.boundOfWell[b.target.well]
}

// addBound adds one row: side (constant + slope·Q - edge) + (reserve + t) size <= 0 over the counted wells.
func (p *planner) addBound(g *programme, k int, tan tangent) error {
	b := p.bounds[k]
	row, upper := p.boundRow(b, tan)
	if p.idle(b) {
		upper = math.Inf(1)
	}
	a := g.coefficients()
	copy(a, row)
	if g.share >= 0 {
		a[g.share] = b.size
	}
	return g.add(owner{ofBound, k}, p.setup.boundWords(b), a, math.Inf(-1), upper)
}

// negligibleShare is the change by a well's largest rate, as a share of the limit's size or of the largest such change in its row,
// that the programme takes for none. Influence dies out like exp(-distance/length) over leaky ground, and entries of 1e-30 beside
// others of 1e-3 would leave the programme without a sensible scale; this is a thousandth of what the solver's tolerance is.
const negligibleShare = 1e-12

// boundRow returns the coefficients of the decided wells in a bound's row, and what the standing wells leave.
func (p *planner) boundRow(b *bound, tan tangent) (a []float64, upper float64) {
	s := p.setup
	a = make([]float64, len(s.decided))
	standing, terms := tan.constant, math.Abs(tan.constant)+math.Abs(b.edge)
	for i, slope := range tan.slope {
		switch {
		case !b.counted[i]:
		case s.column[i] >= 0:
			a[s.column[i]] = b.side * slope
		default:
			standing += slope * s.standing[i]
			terms += math.Abs(slope * s.standing[i])
		}
	}
	largest := b.size
	for k, i := range s.decided {
		largest = math.Max(largest, math.Abs(a[k])*s.rateScale(i))
	}
	for k, i := range s.decided {
		if math.Abs(a[k])*s.rateScale(i) <= negligibleShare*largest {
			a[k] = 0
		}
	}
	return a, remainder(b.slack(standing, 0), terms)
}

// remainderShare is the remainder, as a share of the terms that it is the difference of, that is rounding: a hundred sums of a
// thousand terms.
const remainderShare = 1e-11

// remainder is what a limit leaves to the decided wells once the standing wells have taken their part; exactly zero where they take
// all of it, so that rounding cannot make a limit that just holds impossible.
func remainder(left, terms float64) float64 {
	if math.Abs(left) <= remainderShare*terms {
		return 0
	}
	return left
}

func (g *programme) coefficients() []float64 { return make([]float64, g.problem.Columns()) }

func (g *programme) add(o owner, name string, a []float64, lower, upper float64) error {
	if _, err := g.problem.AddRow(convex.Row{Name: name, Coefficients: a, Lower: lower, Upper: upper}); err != nil {
		return fmt.Errorf("plan: the programme's rows: %w", err)
	}
	g.owners = append(g.owners, o)
	return nil
}

// rates writes the programme's columns into a list of one rate a well. A rate within rateTolerance of an end of its range is put
// on it: the difference is rounding.
func (p *planner) rates(x []float64) []float64 {
	s := p.setup
	rates := append([]float64(nil), s.standing...)
	for k, i := range s.decided {
		w, near := s.Wells[i], rateTolerance*s.rateScale(i)
		rates[i] = tidy(x[k])
		switch {
		case p.isOut(i) || p.runs != nil && !p.runs[i]:
			rates[i] = 0
		case math.Abs(x[k]-w.Min) <= near:
			rates[i] = tidy(w.Min)
		case math.Abs(x[k]-w.Max) <= near:
			rates[i] = tidy(w.Max)
		}
	}
	return rates
}

// readPrices turns the programme's prices into the user's: the change of the aim per unit by which a limit is loosened.
func (p *planner) readPrices(g *programme, sol *convex.Solution) {
	s := p.setup
	p.priced = true
	p.share = 0
	if g.share >= 0 {
		p.share = sol.X[g.share]
	}
	p.wellPrice = make([]float64, len(s.Wells))
	p.minHolds = make([]bool, len(s.Wells))
	for k, i := range s.decided {
		p.wellPrice[i] = math.Abs(sol.ReducedCost[k])
		p.minHolds[i] = sol.ReducedCost[k] < 0
		if p.runs != nil && !p.runs[i] {
			p.wellPrice[i], p.minHolds[i] = 0, false // a well that stands still cannot start with one unit
		}
	}
	for _, b := range p.bounds {
		b.price = 0
	}
	for r, o := range g.owners {
		price := sol.RowPrice[r]
		switch o.kind {
		case ofQuota:
			s.quotas[o.index].price = price
		case ofDemand:
			if s.Aim.makesSmall() {
				price = -price // what one more m³/d costs
			}
			p.setDemandPrice(o.index, tidy(price))
		default:
			b := p.bounds[o.index]
			b.price += price * b.unit * (1 - (b.reserve+p.share)*b.grow)
		}
	}
	p.readRequests(g, sol)
}
