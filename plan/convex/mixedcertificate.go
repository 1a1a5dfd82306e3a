package convex

import (
	"fmt"
	"math"
)

// MixedCertificate is what the data say about a mixed solution. Every number is computed from the problem and the values and prices
// of the solution.
type MixedCertificate struct {
	Status   MixedStatus // the claim that was checked
	Accepted bool
	Reason   string // why it was not accepted, empty otherwise

	Wholeness  float64     // largest distance of a whole column from a whole number, or of a zero-or-within column from both, relative to max(1, |value|) [-]
	Objective  float64     // recomputed [-]
	Linear     Certificate // of the linear programme at the switching, which is built anew from the values
	BoundKnown bool        // the bound was recomputed from the tree, which takes MixedOptions.Proof
	Bound      float64     // the recomputed bound [-]
	Leaves     int         // leaves of the tree that it is made from
}

// CertifyMixed checks a mixed solution against the data of the problem: whole and zero-or-within columns, the linear programme at the
// switching (Certify), the objective; where the tree was kept, that its splits leave no allowed value out and that the prices of its
// leaves support the bound, or prove that there is no plan. Without the tree a bound is not checked, BoundKnown is false, and an
// infeasible problem is not accepted. An undecided end claims a bound at most. It panics when the sizes do not belong together.
func CertifyMixed(p *MixedProblem, s *MixedSolution) MixedCertificate {
	c := MixedCertificate{Status: s.Status}
	if s.X != nil && len(s.X) != p.Columns() {
		panic("convex: CertifyMixed: solution of another problem")
	}
	if s.proof != nil {
		c.checkTree(p, s.proof)
	}
	switch s.Status {
	case MixedOptimal, MixedFeasible:
		c.checkPlan(p, s)
		c.checkBound(p, s)
	case MixedUnbounded:
		c.checkPlanOnly(p, s.X)
		c.checkEndless(p, s)
	case MixedInfeasible:
		if !c.BoundKnown || !math.IsInf(c.Bound, worse(p.sense)) {
			c.refuse("there is no tree that proves it")
		}
	case MixedUndecided:
		if !c.BoundKnown {
			c.refuse("nothing is claimed that can be checked")
		}
		c.checkBound(p, s)
	default:
		c.refuse("nothing is claimed by the status " + s.Status.String())
	}
	c.Accepted = c.Reason == ""
	return c
}

func (c *MixedCertificate) refuse(reason string) {
	if c.Reason == "" {
		c.Reason = reason
	}
}

// worse is the sign of the infinity that no plan reaches.
func worse(s Sense) int {
	if s == Maximise {
		return -1
	}
	return 1
}

// switchingOf builds the problem at the switching of x from the data; wholeness is noted.
func (c *MixedCertificate) switchingOf(p *MixedProblem, x []float64) *Problem {
	q := p.Problem.Clone()
	off := func(j int, by float64) {
		c.Wholeness = largest(c.Wholeness, by/math.Max(1, math.Abs(x[j])))
	}
	for _, j := range p.SemiContinuous {
		col := &q.columns[j]
		if col.Lower <= 0 && col.Upper >= 0 {
			continue
		}
		within, _ := outside(x[j], col.Lower, col.Upper)
		if math.Abs(x[j]) < within {
			off(j, math.Abs(x[j]))
			col.Lower, col.Upper = 0, 0
		} else {
			off(j, within)
		}
	}
	for _, j := range p.Integer {
		v := math.Round(x[j])
		off(j, math.Abs(x[j]-v))
		q.columns[j].Lower, q.columns[j].Upper = v, v
	}
	return q
}

func (c *MixedCertificate) checkPlan(p *MixedProblem, s *MixedSolution) {
	if s.X == nil || s.Linear == nil {
		c.checkPlanOnly(p, s.X)
		c.refuse("the linear programme at the switching is missing")
		return
	}
	q := c.switchingOf(p, s.X)
	c.checkWholeness()
	c.Linear = Certify(q, s.Linear)
	if !c.Linear.Accepted {
		c.refuse("the linear programme at the switching: " + c.Linear.Reason)
	}
	for j, v := range s.X {
		if v != s.Linear.X[j] {
			c.refuse(fmt.Sprintf("column %d differs from the linear programme's", j))
		}
	}
	c.Objective = c.Linear.PrimalObjective
	if !(math.Abs(c.Objective-s.Objective) <= CertifiedGap*math.Max(math.Abs(c.Objective), math.Abs(s.Objective))) {
		c.refuse(fmt.Sprintf("the objective is %.12g, not %.12g", c.Objective, s.Objective))
	}
}

func (c *MixedCertificate) checkWholeness() {
	if !(c.Wholeness <= CertifiedPrimal) {
		c.refuse(fmt.Sprintf("a value is %.3g away from what is allowed", c.Wholeness))
	}
}

// checkPlanOnly checks the limits for a plan that comes without a linear programme.
func (c *MixedCertificate) checkPlanOnly(p *MixedProblem, x []float64) {
	if x == nil {
		c.refuse("there is no plan")
		return
	}
	q := c.switchingOf(p, x)
	c.checkWholeness()
	c.Linear.checkPrimal(q, x, measure(q))
	c.Objective = c.Linear.PrimalObjective
	if !(c.Linear.PrimalViolationScaled <= CertifiedPrimal) {
		c.refuse(fmt.Sprintf("the relative violation of a limit is %.3g", c.Linear.PrimalViolationScaled))
	}
}

// checkEndless checks the direction of an unbounded problem.
func (c *MixedCertificate) checkEndless(p *MixedProblem, s *MixedSolution) {
	q := p.Problem.Clone()
	for _, j := range p.SemiContinuous {
		q.columns[j].Lower, q.columns[j].Upper = math.Min(0, q.columns[j].Lower), math.Max(0, q.columns[j].Upper)
	}
	var d Certificate
	d.checkDirection(q, s.Direction, measure(q))
	if d.Reason != "" {
		c.refuse(d.Reason)
	}
}

// checkBound compares the claimed bound with the recomputed one.
func (c *MixedCertificate) checkBound(p *MixedProblem, s *MixedSolution) {
	if !c.BoundKnown {
		return
	}
	better := s.Bound - c.Bound // how much less a minimisation could cost than is claimed
	if p.sense == Maximise {
		better = -better
	}
	if s.Bound == c.Bound {
		return
	}
	if !(better <= mixedRounding*math.Max(math.Abs(s.Bound), math.Abs(c.Bound))) {
		c.refuse(fmt.Sprintf("the tree supports the bound %.12g, not %.12g", c.Bound, s.Bound))
	}
}

// checkTree recomputes the bound from the leaves.
func (c *MixedCertificate) checkTree(p *MixedProblem, t *proofTree) {
	if len(t.nodes) == 0 {
		return
	}
	whole := make([]bool, p.Columns())
	gapLow, gapHigh := make([]float64, p.Columns()), make([]float64, p.Columns())
	b := &box{}
	for _, col := range p.columns {
		b.lo, b.hi = append(b.lo, col.Lower), append(b.hi, col.Upper)
	}
	for _, j := range p.SemiContinuous {
		gapLow[j], gapHigh[j] = math.Min(0, b.hi[j]), math.Max(0, b.lo[j])
		b.lo[j], b.hi[j] = math.Min(0, b.lo[j]), math.Max(0, b.hi[j])
	}
	for _, j := range p.Integer {
		whole[j] = true
		b.lo[j], b.hi[j] = math.Ceil(b.lo[j]), math.Floor(b.hi[j])
	}
	least, complete, unit := math.Inf(1), true, measure(p.Problem)
	var walk func(k int)
	walk = func(k int) {
		n := &t.nodes[k]
		if n.down == 0 {
			c.Leaves++
			for j := range b.lo {
				if b.lo[j] > b.hi[j] {
					return
				}
			}
			least = math.Min(least, leafBound(p.Problem, t.sign, n, b, unit))
			return
		}
		j := n.column
		skipsNothing := whole[j] && n.low == math.Floor(n.low) && n.high <= n.low+1 || n.high <= n.low || n.low >= gapLow[j] && n.high <= gapHigh[j]
		if whole[j] && !skipsNothing { // the rounded edges of a gap
			skipsNothing = n.low >= math.Floor(gapLow[j]) && n.high <= math.Ceil(gapHigh[j])
		}
		complete = complete && skipsNothing
		lo, hi := b.lo[j], b.hi[j]
		b.hi[j] = math.Min(hi, n.low)
		walk(n.down)
		b.hi[j] = hi
		b.lo[j] = math.Max(lo, n.high)
		walk(n.up)
		b.lo[j] = lo
	}
	walk(0)
	c.BoundKnown, c.Bound = complete, t.sign*least
	if !complete {
		c.refuse("a split of the tree leaves allowed values out")
	}
}
