package convex

import (
	"context"
	"math"
)

// plansAgree is the violation, relative to the natural units of Certify, that a plan found on the way may show without being solved
// afresh: a tenth of what the certificate accepts.
const plansAgree = CertifiedPrimal / 10

// incumbent holds the best plan of the whole problem and judges new ones by its data.
type incumbent struct {
	p     *MixedProblem
	c     *core // the problem as given
	unit  yardstick
	x     []float64
	value float64 // minimised; +Inf without a plan
	scale float64 // size of the objective by which gaps are measured
	exact *nodeLP // the linear programme of the problem as given, made when first needed
	pivot int     // pivots of exact
	found int     // plans accepted
}

func newIncumbent(p *MixedProblem) *incumbent {
	return &incumbent{p: p, c: newCore(p), unit: measure(p.Problem), value: math.Inf(1)}
}

// offer takes a plan of the problem as given whose discrete values may be a little off. They are rounded; where the rest does not
// meet the limits then it is solved for. It tells whether the plan became the best one.
func (b *incumbent) offer(ctx context.Context, x []float64) bool {
	y := append([]float64(nil), x...)
	for j := range y {
		if b.c.isDiscrete(j) {
			if _, _, _, between := b.c.split(j, y[j]); between {
				return false
			}
			y[j] = b.c.nearest(j, y[j])
		}
		y[j] = math.Max(b.c.lower[j], math.Min(b.c.upper[j], y[j]))
	}
	if b.meets(y) {
		return b.take(y)
	}
	if b.allWhole() {
		return false
	}
	return b.offerSwitching(ctx, y)
}

// allWhole tells that nothing is left to solve for once discrete columns are rounded.
func (b *incumbent) allWhole() bool {
	for _, w := range b.c.whole {
		if !w {
			return false
		}
	}
	return true
}

// offerSwitching rounds the discrete columns of x and solves for the rest.
func (b *incumbent) offerSwitching(ctx context.Context, x []float64) bool {
	if b.exact == nil {
		b.exact = newNodeLP(b.p.Problem)
		b.exact.stale = true
	}
	l := b.exact
	for j, v := range x {
		lower, upper := b.switched(j, v)
		l.setBounds(j, lower, upper)
	}
	before := l.e.iterations
	end := l.solve(ctx, Options{}.iterationLimit(l.e.rows, l.e.n), math.Inf(1))
	b.pivot += l.e.iterations - before
	if end != lpOptimal {
		return false
	}
	y := make([]float64, len(x))
	for j := range y {
		lower, upper := b.switched(j, x[j])
		y[j] = math.Max(lower, math.Min(upper, l.value(j)))
	}
	return b.meets(y) && b.take(y)
}

// switched returns the bounds of column j once its discrete value is settled as near to v as may be.
func (b *incumbent) switched(j int, v float64) (lower, upper float64) {
	c := b.c
	if !c.isDiscrete(j) {
		return c.lower[j], c.upper[j]
	}
	v = c.nearest(j, v)
	switch {
	case c.whole[j]:
		return v, v
	case v <= c.gapLow[j]:
		return c.lower[j], c.gapLow[j]
	}
	return c.gapHigh[j], c.upper[j]
}

// meets tells that x meets all rows of the data.
func (b *incumbent) meets(x []float64) bool {
	for i := range b.p.rowName {
		value, terms := b.p.activity(i, x)
		by, bound := outside(value, b.p.rowLower[i], b.p.rowUpper[i])
		if !(by <= plansAgree*math.Max(b.unit.value/b.unit.row[i], terms+math.Abs(bound))) {
			return false
		}
	}
	return true
}

// take keeps x when it is better.
func (b *incumbent) take(x []float64) bool {
	v := b.cost(x)
	if !(v < b.value) {
		return false
	}
	b.x, b.value, b.scale = x, v, b.sizeOf(x, v)
	b.found++
	return true
}

// cancelled is the share of its terms to which an objective may cancel before the terms are what its gap is measured by.
const cancelled = 1e-6

// sizeOf returns |value|, or a share of the terms that it is made of where that is larger.
func (b *incumbent) sizeOf(x []float64, value float64) float64 {
	terms := b.unit.worth
	sum := 0.0
	for j, v := range x {
		sum += math.Abs(b.c.cost[j] * v)
	}
	return math.Max(math.Abs(value), cancelled*math.Max(terms, sum))
}

// cost returns the minimised cost of a plan.
func (b *incumbent) cost(x []float64) float64 {
	var sum twofold
	for j, v := range x {
		sum.addProduct(b.c.cost[j], v)
	}
	return sum.value()
}

// switching returns the problem at the switching of x.
func (b *incumbent) switching(x []float64) *Problem {
	q := b.p.Problem.Clone()
	for j := range x {
		q.columns[j].Lower, q.columns[j].Upper = b.switched(j, x[j])
	}
	return q
}
