package convex

import (
	"fmt"
	"math"
)

// pricedShare is the price, relative to the natural unit of its row or column, above which CheckTie takes a bound for held by its
// price: above rounding of the prices, some 1e-15.
const pricedShare = 1e-13

// CheckTie checks from the data alone that the plan of tie is the nearest optimum: a weighted sum of rows and bounds with the right
// signs, none away from its bound, is the gradient of the distance; bounds with a price count as equations. With a convex
// feasible set this is enough. That the plan is an optimum at all is for Certify to say.
func CheckTie(p *Problem, tie *Tie, target, scale []float64) error {
	s := tie.Solution
	if tie.Unique {
		return nil
	}
	unit := measure(p)
	terms, top, square := 0.0, 0.0, 0.0
	off := make([]twofold, len(s.X))
	own := make([]float64, len(s.X))
	for j, x := range s.X {
		u := (x - target[j]) / scale[j]
		off[j].add(u)
		own[j] = math.Abs(u)
		top = math.Max(top, math.Abs(u))
		square += u * u
		terms = math.Max(terms, math.Abs(target[j])/scale[j])
	}
	top = math.Max(top, terms*1e-15/CertifiedTie)
	worst, what := 0.0, ""
	note := func(by float64, format string, k int) {
		if !(by <= worst) {
			worst, what = by, fmt.Sprintf(format, k)
		}
	}
	for i, pull := range tie.RowPull {
		if pull == 0 {
			continue
		}
		for j, a := range p.row(i) {
			off[j].addProduct(-pull*scale[j], a)
			own[j] += math.Abs(pull * scale[j] * a)
		}
		if math.Abs(s.RowPrice[i]) > pricedShare*unit.cost*unit.row[i] {
			continue
		}
		bound := p.rowLower[i]
		if pull < 0 {
			bound = p.rowUpper[i]
		}
		note(share(math.Abs(pull*(s.RowValue[i]-bound)), math.Max(square, top*top)), "row %d pulls away from its bound", i)
	}
	for j, x := range s.X {
		c := p.columns[j]
		if c.Lower == c.Upper || math.Abs(s.ReducedCost[j]) > pricedShare*unit.cost/unit.col[j] {
			continue
		}
		by := off[j].value()
		switch {
		case x == c.Lower:
			by = math.Max(0, -by)
		case x == c.Upper:
			by = math.Max(0, by)
		}
		note(share(math.Abs(by), math.Max(own[j], top)), "column %d is drawn towards the target", j)
	}
	if !(worst <= CertifiedTie) {
		return fmt.Errorf("convex: not the nearest optimum: %s, off by %.3g", what, worst)
	}
	return nil
}
