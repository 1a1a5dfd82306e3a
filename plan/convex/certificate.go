package convex

import (
	"fmt"
	"math"
)

// Tolerances of Certify. Each is a share of the sum of the absolute terms that the checked number is made of, or of the natural
// unit of the row or column where that is larger (see yardstick), so that none depends on units of measurement. The solver ends at
// violations of 1e-9 in its scaled problem; ten times that leaves room for the difference between the two scales.
const (
	CertifiedPrimal          = 1e-8 // violation of a row or a bound
	CertifiedDual            = 1e-8 // price with a sign that no bound supports
	CertifiedStationarity    = 1e-9 // cost less the prices of the rows less the reduced cost
	CertifiedComplementarity = 1e-9 // price times distance from its bound, per objective
	CertifiedGap             = 1e-9 // primal less dual objective
	CertifiedProof           = 1e-9 // margin of a proof: what the solver's tolerance on the bounds in it could explain
	CertifiedNegligible      = 1e-9 // part of a proof or direction that meets an infinite bound
	// CertifiedStray is the share of the margin of a proof that its parts at infinite bounds, and the rounding of all others, may explain
	// with values as large as the largest bound: a thousandth, for values that a system of condition 1e3 makes of that bound.
	CertifiedStray = 1e-3
)

// worthShare is the share of the worth of the dearest column to which the objective may cancel before its gap is rated by that share: a
// column that is not in use says nothing about the objective, except by its rounding.
const worthShare = 1e-3

// priceRounding is the error that prices rounded to a float64 leave in a reduced cost, relative to its terms.
const priceRounding = 0x1p-51

// twofoldRounding is the relative rounding of a sum in twofold precision: 2^-106 per term, for a million terms.
const twofoldRounding = 0x1p-86

// Certificate is what the data say about a solution. Every number is computed from the problem and the values and prices of the
// solution, in twofold precision where terms cancel, by code that shares nothing with the solver.
type Certificate struct {
	Status   Status // the claim that was checked
	Accepted bool
	Reason   string // why it was not accepted, empty otherwise

	PrimalViolation       float64 // largest violation of a row or bound, in the units of the row or column [-]
	PrimalViolationScaled float64 // largest violation relative to its terms [-]
	DualViolation         float64 // largest price, or reduced cost, of unsupported sign [-]
	DualViolationScaled   float64 // the same relative to the terms of the columns concerned [-]
	Stationarity          float64 // largest |cost - prices'column - reduced cost| relative to its terms [-]
	Complementarity       float64 // largest price times distance from its bound, relative to the objective's terms [-]
	PrimalObjective       float64 // [-]
	DualObjective         float64 // [-]
	Gap                   float64 // |primal - dual objective|, and what the errors of reduced costs may add, relative to the objective's terms [-]
	ProofMargin           float64 // Infeasible: distance of the combined rows and bounds from what they can reach, relative to its terms [-]
	ProofStray            float64 // Infeasible: share of the margin that values as large as the largest bound could explain [-]
	DirectionGain         float64 // Unbounded: gain along the direction relative to its terms [-]
	DirectionViolation    float64 // Unbounded: largest move towards a bound along the direction, relative to its terms [-]
	Curvature             float64 // NotConvex: d'Hd relative to its terms [-]
}

// Certify checks a solution against the data of the problem: an optimum by its violations, the signs of its prices, stationarity
// of c + Hx, complementary slackness and the gap to the dual objective, which loses 1/2 x'Hx; infeasibility by its proof (Farkas 1902); unboundedness by a feasible point and a direction.
// Other statuses are never accepted. It panics when the sizes do not belong together.
func Certify(p *Problem, s *Solution) Certificate {
	if len(s.X) != p.allColumns() || len(s.RowPrice) != p.Rows() || len(s.ReducedCost) != p.allColumns() {
		panic("convex: Certify: solution of another problem")
	}
	c := Certificate{Status: s.Status}
	switch s.Status {
	case Optimal:
		u := measure(p)
		terms := c.checkPrimal(p, s.X, u)
		c.checkDual(p, s, terms, u)
		c.judgeOptimal()
	case Infeasible:
		c.checkProof(p, s.Ray, measure(p))
	case Unbounded:
		u := measure(p)
		c.checkPrimal(p, s.X, u)
		c.require("the relative violation of a limit", c.PrimalViolationScaled, CertifiedPrimal)
		c.checkDirection(p, s.Ray, u)
	case NotConvex:
		c.checkCurvature(p, s.Ray)
	default:
		c.Reason = "nothing is claimed by the status " + s.Status.String()
	}
	c.Accepted = c.Reason == ""
	return c
}

// require notes a failed condition; NaN fails.
func (c *Certificate) require(what string, value, most float64) {
	if !(value <= most) && c.Reason == "" {
		c.Reason = fmt.Sprintf("%s %.3g is above %.3g", what, value, most)
	}
}

func (c *Certificate) judgeOptimal() {
	c.require("the relative violation of a limit", c.PrimalViolationScaled, CertifiedPrimal)
	c.require("the relative size of a price with a wrong sign", c.DualViolationScaled, CertifiedDual)
	c.require("the relative error of a reduced cost", c.Stationarity, CertifiedStationarity)
	c.require("the complementary slackness", c.Complementarity, CertifiedComplementarity)
	c.require("the relative gap", c.Gap, CertifiedGap)
}

func (p *Problem) allColumns() int { return len(p.columns) + len(p.unit) }

// eachEntry calls f with the entries of row i that are not zero.
func (p *Problem) eachEntry(i int, f func(j int, a float64)) {
	for j, a := range p.row(i) {
		if a != 0 {
			f(j, a)
		}
	}
	for k, r := range p.unitRow {
		if r == i {
			f(len(p.columns)+k, p.unitSign[k])
		}
	}
}

// activity returns row i times x and the sum of the absolute terms.
func (p *Problem) activity(i int, x []float64) (value, terms float64) {
	var sum twofold
	row := p.row(i)
	for j, v := range x[:len(row)] {
		if v != 0 {
			sum.addProduct(row[j], v)
			terms += math.Abs(row[j] * v)
		}
	}
	for k, r := range p.unitRow {
		if r == i {
			v := p.unitSign[k] * x[len(row)+k]
			sum.add(v)
			terms += math.Abs(v)
		}
	}
	return sum.value(), terms
}

// outside returns by how much v lies outside its bounds, and the bound.
func outside(v, lower, upper float64) (by, bound float64) {
	switch {
	case v < lower:
		return lower - v, lower
	case v > upper:
		return v - upper, upper
	case math.IsNaN(v):
		return v, 0
	}
	return 0, 0
}

// largest keeps the larger of two numbers, and NaN when there is one.
func largest(a, b float64) float64 { return math.Max(a, b) }

// share returns part / whole, zero when part is zero and infinite when only whole is.
func share(part, whole float64) float64 {
	if part == 0 {
		return 0
	}
	return part / whole
}

// primalTerms is what the dual checks need of the primal ones.
type primalTerms struct {
	objective     float64   // sum of absolute terms
	quadratic     float64   // 1/2 x'Hx
	gradient      []twofold // by column: c + Hx
	gradientTerms []float64 // by column: sum of its absolute terms
	activity      []float64 // by row
}

// checkPrimal computes the violations and the objective.
func (c *Certificate) checkPrimal(p *Problem, x []float64, u yardstick) primalTerms {
	t := primalTerms{activity: make([]float64, p.Rows())}
	for i := range t.activity {
		value, terms := p.activity(i, x)
		by, bound := outside(value, p.rowLower[i], p.rowUpper[i])
		t.activity[i] = value
		c.PrimalViolation = largest(c.PrimalViolation, by)
		c.PrimalViolationScaled = largest(c.PrimalViolationScaled, share(by, math.Max(u.value/u.row[i], terms+math.Abs(bound))))
	}
	var objective twofold
	t.gradient, t.gradientTerms, t.quadratic, t.objective = p.slope(x)
	objective.add(t.quadratic)
	for j, v := range x {
		column := p.anyColumn(j)
		objective.addProduct(column.Cost, v)
		t.objective += math.Abs(column.Cost * v)
		by, bound := outside(v, column.Lower, column.Upper)
		c.PrimalViolation = largest(c.PrimalViolation, by)
		c.PrimalViolationScaled = largest(c.PrimalViolationScaled, share(by, math.Max(u.value*u.col[j], math.Abs(bound))))
	}
	c.PrimalObjective = objective.value()
	return t
}

// checkDual computes signs, stationarity, slackness and the gap. Prices are turned to those of a minimisation. The gap is rated by the terms
// of the objective, not by those of the prices, which are huge where two rows are nearly the same and then hide an error of any size.
func (c *Certificate) checkDual(p *Problem, s *Solution, t primalTerms, u yardstick) {
	sign := 1.0
	if p.sense == Maximise {
		sign = -1
	}
	residual, terms, astray := make([]twofold, len(s.X)), make([]float64, len(s.X)), 0.0
	for j := range residual {
		residual[j].add(sign * t.gradient[j].high)
		residual[j].add(sign * t.gradient[j].low)
		residual[j].add(-sign * s.ReducedCost[j])
		terms[j] = t.gradientTerms[j]
	}
	for i, price := range s.RowPrice {
		if price == 0 {
			continue
		}
		p.eachEntry(i, func(j int, a float64) {
			residual[j].addProduct(-sign*price, a)
			terms[j] += math.Abs(price * a)
		})
	}
	for j := range residual {
		terms[j] = math.Max(terms[j]+math.Abs(s.ReducedCost[j]), u.cost/u.col[j])
		off := math.Abs(residual[j].value())
		c.Stationarity = largest(c.Stationarity, share(off, terms[j]))
		astray += math.Max(0, off-priceRounding*terms[j]) * math.Max(math.Abs(s.X[j]), u.natural(j, p.anyColumn(j)))
	}
	d := dualSum{}
	for i, price := range s.RowPrice {
		if d.take(sign*price, t.activity[i], p.rowLower[i], p.rowUpper[i]) {
			continue
		}
		c.DualViolation = largest(c.DualViolation, math.Abs(price))
		c.DualViolationScaled = largest(c.DualViolationScaled, share(math.Abs(price), u.cost*u.row[i]))
	}
	for j, price := range s.ReducedCost {
		column := p.anyColumn(j)
		if !d.take(sign*price, s.X[j], column.Lower, column.Upper) {
			c.DualViolation = largest(c.DualViolation, math.Abs(price))
			c.DualViolationScaled = largest(c.DualViolationScaled, share(math.Abs(price), terms[j]))
		}
	}
	c.DualObjective = sign*d.sum.value() - t.quadratic
	scale := math.Max(math.Max(t.objective, math.Abs(c.DualObjective)), worthShare*u.worth)
	c.Gap = share(math.Abs(c.PrimalObjective-c.DualObjective)+astray, scale)
	c.Complementarity = share(d.slackness, scale)
}

// dualSum collects the dual objective.
type dualSum struct {
	sum       twofold
	slackness float64
}

// take adds the term of one price; false when no finite bound supports its sign.
func (d *dualSum) take(price, value, lower, upper float64) bool {
	if price == 0 {
		return true
	}
	bound := lower
	if price < 0 {
		bound = upper
	}
	if !finite(bound) {
		return false
	}
	d.sum.addProduct(price, bound)
	d.slackness = largest(d.slackness, math.Abs(price*(value-bound)))
	return true
}

// checkProof computes the margin of a proof of infeasibility: with z = -A'y, y'r + z'x is zero for r = A x, so that a largest
// value below zero within all bounds excludes every x. What a multiplier contributes at an infinite bound has no limit; it is rounding
// only when values as large as the largest bound of the problem make nothing of it beside the margin, however small that is beside
// the other multipliers.
func (c *Certificate) checkProof(p *Problem, ray *Ray, u yardstick) {
	if ray == nil || len(ray.Rows) != p.Rows() {
		c.Reason = "there is no proof"
		return
	}
	var s proofSum
	z, own := make([]twofold, p.allColumns()), make([]float64, p.allColumns())
	size := 0.0
	for i, y := range ray.Rows {
		size = largest(size, math.Abs(y)/u.row[i])
	}
	for i, y := range ray.Rows {
		s.take(y, p.rowLower[i], p.rowUpper[i], size*u.row[i], 0, u.most/u.row[i])
		if y == 0 {
			continue
		}
		p.eachEntry(i, func(j int, a float64) {
			z[j].addProduct(-a, y)
			own[j] += math.Abs(a * y)
		})
	}
	for j := range z {
		column := p.anyColumn(j)
		s.take(z[j].value(), column.Lower, column.Upper, math.Max(own[j], size/u.col[j]), own[j]*twofoldRounding, u.most*u.col[j])
	}
	c.ProofMargin = -share(s.top.value(), math.Max(s.terms, size*u.value))
	c.ProofStray = share(s.explained, -s.top.value())
	c.require("the part of the proof that meets an infinite bound", s.stray, CertifiedNegligible)
	if !(c.ProofMargin >= CertifiedProof) && c.Reason == "" {
		c.Reason = fmt.Sprintf("the margin of the proof %.3g is below %.3g", c.ProofMargin, CertifiedProof)
	}
	c.require("the share of the margin that values without bound could explain", c.ProofStray, CertifiedStray)
}

// proofSum collects the terms of a proof.
type proofSum struct {
	top       twofold // largest value within the bounds
	terms     float64 // sum of absolute terms
	stray     float64 // largest multiplier at an infinite bound, relative to its own terms
	explained float64 // what values of the given sizes and rounding could add to top
}

// take adds the term of one multiplier: own is the size of the terms that it is made of, rounding its own error and value the
// size that the row or column may have.
func (s *proofSum) take(price, lower, upper, own, rounding, value float64) {
	bound := upper
	if price < 0 {
		bound = lower
	}
	if finite(lower) && finite(upper) {
		value = math.Max(math.Abs(lower), math.Abs(upper))
	}
	s.explained += rounding * value
	switch {
	case price == 0:
	case finite(bound):
		s.top.addProduct(price, bound)
		s.terms += math.Abs(price * bound)
	default:
		s.stray = largest(s.stray, share(math.Abs(price), own))
		s.explained += math.Abs(price) * value
	}
}

// checkDirection checks that the cost improves along the direction and that no bound is approached.
func (c *Certificate) checkDirection(p *Problem, ray *Ray, u yardstick) {
	if ray == nil || len(ray.Columns) != p.allColumns() {
		c.Reason = "there is no direction"
		return
	}
	var gain twofold
	terms := 0.0
	scale := 0.0
	for j, v := range ray.Columns {
		column := p.anyColumn(j)
		gain.addProduct(column.Cost, v)
		terms += math.Abs(column.Cost * v)
		scale = math.Max(scale, math.Abs(v)/u.col[j])
	}
	c.DirectionGain = share(gain.value(), terms)
	if p.sense == Minimise {
		c.DirectionGain = -c.DirectionGain
	}
	for j, v := range ray.Columns {
		column := p.anyColumn(j)
		c.approach(v, column.Lower, column.Upper, scale*u.col[j])
	}
	c.require("the curvature along the direction", p.flatness(ray.Columns, scale, u), CertifiedNegligible)
	for i := 0; i < p.Rows(); i++ {
		value, own := p.activity(i, ray.Columns)
		c.approach(value, p.rowLower[i], p.rowUpper[i], math.Max(own, scale/u.row[i]))
	}
	c.require("the move towards a bound along the direction", c.DirectionViolation, CertifiedNegligible)
	if !(c.DirectionGain > CertifiedNegligible) && c.Reason == "" {
		c.Reason = fmt.Sprintf("the gain along the direction %.3g is not above %.3g", c.DirectionGain, CertifiedNegligible)
	}
}

func (c *Certificate) approach(v, lower, upper, scale float64) {
	if (v < 0 && finite(lower)) || (v > 0 && finite(upper)) || math.IsNaN(v) {
		c.DirectionViolation = largest(c.DirectionViolation, share(math.Abs(v), scale))
	}
}
