package convex

import (
	"context"
	"math"
)

// SolveInterior solves p, which may be linear or quadratic, by a primal-dual interior-point method that shares no step with the
// simplex and active-set methods of Solve; it is there for semidefinite Hessians and as a second opinion.
//
// Where it reaches no optimum it looks for a proof of infeasibility or a direction without end by the same method on problems that
// always have an optimum. Statuses are those of Solve; an optimum is claimed only when Certify accepts it.
//
// Method: predictor-corrector (Mehrotra 1992) with centrality corrections (Gondzio 1996) on a regularised quasidefinite system
// (Vanderbei 1995), equilibrated (Ruiz 2001), and a finish on the bounds that bind.
func SolveInterior(ctx context.Context, p *Problem, o Options) (*Solution, error) {
	if err := o.Validate(); err != nil {
		return nil, err
	}
	h := p.hessian
	if h != nil {
		c := p.curvature()
		if !c.convex {
			return notConvex(p, c), nil
		}
		h = c.form
	}
	sol := interiorOptimum(ctx, p, h, o)
	if sol.Status != NumericalTrouble {
		return sol, nil
	}
	r := interiorRest(ctx, p, o)
	if r.Status != NumericalTrouble {
		r.Iterations += sol.Iterations
		return r, nil
	}
	return sol, nil
}

// notConvex is the answer for a Hessian that bends the wrong way.
func notConvex(p *Problem, c *curvature) *Solution {
	s := emptySolution(p, NotConvex)
	s.Ray = &Ray{Rows: make([]float64, p.Rows()), Columns: append([]float64(nil), c.direction...)}
	s.Ray.Columns = append(s.Ray.Columns, make([]float64, len(p.unit))...)
	return s
}

func emptySolution(p *Problem, status Status) *Solution {
	n, m := p.allColumns(), p.Rows()
	return &Solution{Status: status, X: make([]float64, n), RowValue: make([]float64, m), RowPrice: make([]float64, m),
		ReducedCost: make([]float64, n), Basis: &Basis{columns: make([]Place, n), rows: make([]Place, m)}}
}

// interiorOptimum returns an optimum, what stopped the method, or NumericalTrouble with the best point.
func interiorOptimum(ctx context.Context, p *Problem, h *hessian, o Options) *Solution {
	var first *Solution
	for _, middle := range typicalShares {
		s := interiorAttempt(ctx, buildForm(p, h, middle), o)
		if s.Status != NumericalTrouble {
			return s
		}
		if first == nil {
			first = s
		}
	}
	return first
}

// typicalShares are the places in the sorted list of bounds of those taken for typical, in the order tried: the middle, and for
// bounds of two very different sizes the larger.
var typicalShares = [2]float64{0.5, 0.9}

// interiorAttempt solves one scaled form.
func interiorAttempt(ctx context.Context, f *interiorForm, o Options) *Solution {
	p := f.p
	s := newInteriorPoint(f)
	s.progress = o.Progress
	if status := s.run(ctx, o.MaxIterations); status != 0 {
		return s.solution(status)
	}
	plain := s.solution(Optimal)
	if s.finish() {
		sol := s.solution(Optimal)
		if Certify(p, sol).Accepted {
			return sol
		}
	}
	if !Certify(p, plain).Accepted {
		plain.Status = NumericalTrouble
	}
	return plain
}

// solution takes the point back to the units of the problem.
func (s *interiorPoint) solution(status Status) *Solution {
	y := append([]float64(nil), s.y...)
	for i, v := range y {
		if k := s.f.n + i; !(s.equation[i] || v > 0 && s.hasLow[k] || v < 0 && s.hasUp[k]) {
			y[i] = 0 // the rounding of a price that no bound supports
		}
	}
	sol := s.f.solution(status, s.v[:s.f.n], y, s.place)
	sol.Iterations = s.iterations
	return sol
}

// solution takes values and row prices back to the units of the problem; place, by columns and rows of the form, may be nil. Reduced
// costs are computed from the data.
func (f *interiorForm) solution(status Status, x, y []float64, place []Place) *Solution {
	p := f.p
	sol := emptySolution(p, status)
	for j := range sol.X {
		sol.X[j] = p.anyColumn(j).Lower // the fixed ones
		sol.Basis.columns[j] = AtLower
	}
	for k, j := range f.column {
		c := p.anyColumn(j)
		sol.X[j] = plain(math.Max(c.Lower, math.Min(c.Upper, x[k]*f.colScale[k])))
		sol.Basis.columns[j] = Basic
		if place == nil {
			continue
		}
		switch place[k] {
		case AtLower:
			sol.X[j], sol.Basis.columns[j] = c.Lower, AtLower
		case AtUpper:
			sol.X[j], sol.Basis.columns[j] = c.Upper, AtUpper
		}
	}
	for i, r := range f.row {
		if r < 0 {
			continue
		}
		sol.RowPrice[r] = plain(y[i] * f.rowScale[i] / f.costScale)
		if place != nil {
			sol.Basis.rows[r] = place[f.n+i]
		}
	}
	fillSolution(p, sol)
	if place != nil {
		markTies(p, sol)
	}
	return sol
}

// markTies sets the flags that warn of prices or values that are not the only ones: a value on its bound that is not held there, or a
// bound that is held without a price.
func markTies(p *Problem, sol *Solution) {
	u := measure(p)
	look := func(at Place, value, price, lower, upper, unit, cost float64) {
		near := func(b float64) bool {
			return finite(b) && math.Abs(value-b) <= feasibilityTolerance*math.Max(unit, math.Abs(b))
		}
		switch {
		case lower == upper:
		case at == Basic:
			sol.PrimalDegenerate = sol.PrimalDegenerate || near(lower) || near(upper)
		case math.Abs(price) <= optimalityTolerance*cost:
			sol.DualDegenerate = true
		}
	}
	for j, x := range sol.X {
		c := p.anyColumn(j)
		look(sol.Basis.columns[j], x, sol.ReducedCost[j], c.Lower, c.Upper, u.value*u.col[j], u.cost/u.col[j])
	}
	for i, r := range sol.RowValue {
		look(sol.Basis.rows[i], r, sol.RowPrice[i], p.rowLower[i], p.rowUpper[i], u.value/u.row[i], u.cost*u.row[i])
	}
}

// negligibleCost is the reduced cost, relative to its terms, that is taken for rounding where no bound supports it.
const negligibleCost = 1e-10

// fillSolution computes row values, objective and reduced costs from values and row prices.
func fillSolution(p *Problem, sol *Solution) {
	for i := range sol.RowValue {
		sol.RowValue[i], _ = p.activity(i, sol.X)
	}
	g, terms := p.gradient(sol.X)
	var objective twofold
	for j, x := range sol.X {
		cost := p.anyColumn(j).Cost
		objective.addProduct(cost, x)
		if p.hessian != nil {
			rest := g[j]
			rest.add(-cost)
			objective.addProduct(rest.value()/2, x)
		}
	}
	sol.Objective = plain(objective.value())
	for i, y := range sol.RowPrice {
		if y == 0 {
			continue
		}
		p.eachEntry(i, func(j int, a float64) {
			g[j].addProduct(-y, a)
			terms[j] += math.Abs(y * a)
		})
	}
	sign := 1.0
	if p.sense == Maximise {
		sign = -1
	}
	for j := range g {
		d, c := g[j].value(), p.anyColumn(j)
		sol.ReducedCost[j] = plain(d)
		supported := d*sign > 0 && finite(c.Lower) || d*sign < 0 && finite(c.Upper)
		if (!supported || sol.Basis.columns[j] == Basic) && math.Abs(d) <= negligibleCost*terms[j] {
			sol.ReducedCost[j] = 0
		}
	}
}

// gradient returns c + Hx and the sums of the absolute terms.
func (p *Problem) gradient(x []float64) (g []twofold, terms []float64) {
	g, terms = make([]twofold, len(x)), make([]float64, len(x))
	for j := range g {
		c := p.anyColumn(j).Cost
		g[j].add(c)
		terms[j] = math.Abs(c)
	}
	h := p.hessian
	if h == nil {
		return g, terms
	}
	add := func(i, j int, v float64) {
		g[i].addProduct(v, x[j])
		terms[i] += math.Abs(v * x[j])
	}
	for i := 0; i < h.n; i++ {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			j := int(h.column[k])
			add(i, j, h.value[k])
			if j != i {
				add(j, i, h.value[k])
			}
		}
	}
	for k, f := range h.factor {
		t := h.weight[k] * dotTwofold(f, x[:h.n])
		for j, v := range f {
			g[j].addProduct(t, v)
			terms[j] += math.Abs(t * v)
		}
	}
	return g, terms
}
