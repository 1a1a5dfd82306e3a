package convex

import (
	"context"
	"math"
)

// Solve finds the least or largest cost of p.
//
//	minimise or maximise c'x + 1/2 x'Hx  subject to  rowLower <= A x <= rowUpper,  lower <= x <= upper
//
// How it ended is in Solution.Status, which is never more than the arithmetic supports: Certify checks it from the data alone. The
// error is not nil only for bad options. On a cancelled context the status is Interrupted.
//
// Method without H: dual simplex with bound flipping and steepest-edge prices, primal simplex to finish where costs had to be shifted;
// where rounding stands in the way a second attempt in other units, whose answer counts when its certificate is accepted.
// With a definite H: dual active set; with a semidefinite one, or where that fails: interior point. A Hessian that bends the wrong
// way gives NotConvex. See the package comment for the sources.
func Solve(ctx context.Context, p *Problem, o Options) (*Solution, error) {
	if err := o.Validate(); err != nil {
		return nil, err
	}
	if p.hessian != nil {
		return solveQuadratic(ctx, p, o), nil
	}
	first := solveLinear(ctx, p, scale(p), o)
	endless := first.Status == IterationLimit && o.MaxIterations == 0
	if first.Status != NumericalTrouble && !endless {
		return first, nil
	}
	o.Start = first.Basis
	if second := solveLinear(ctx, p, scaleAbout(p, typicalLargest), o); second.Status != NumericalTrouble && Certify(p, second).Accepted {
		second.Iterations += first.Iterations
		second.Primal += first.Primal
		return second, nil
	}
	return first, nil
}

// solveLinear solves a linear programme in the given scales.
func solveLinear(ctx context.Context, p *Problem, s *scaled, o Options) *Solution {
	t := newUndertakingOf(p, s)
	t.e.progress = o.Progress
	t.e.start(o.Start)
	return t.answer(ctx, o)
}

// answer solves and reports. A proof of infeasibility that the data do not support is none.
func (t *undertaking) answer(ctx context.Context, o Options) *Solution {
	limit := o.iterationLimit(t.e.rows, t.e.n)
	out := report(t, t.zoom(ctx, limit, t.solve(ctx, limit)))
	if out.Status == Infeasible && !Certify(t.p, out).Accepted {
		out.Status, out.Ray = NumericalTrouble, nil
	}
	return out
}

// start adopts a basis, or the rows when there is none or its number of columns differs.
func (e *engine) start(b *Basis) {
	if b == nil || len(b.columns) != e.n || len(b.rows) > e.rows {
		e.startFromRows()
		return
	}
	copy(e.place, b.columns)
	copy(e.place[e.n:], b.rows)
	e.adoptPlaces()
	for v := range e.place {
		if e.place[v] != Basic {
			e.settle(v)
		}
	}
}

// basis returns the present places.
func (e *engine) basis() *Basis {
	return &Basis{
		columns: append([]Place(nil), e.place[:e.n]...),
		rows:    append([]Place(nil), e.place[e.n:]...),
	}
}

// report takes the state back to the units of the problem; the factors are powers of two, so that nothing is rounded.
func report(t *undertaking, status Status) *Solution {
	p, s, e := t.p, t.s, t.e
	n, m := e.n, e.rows
	sol := &Solution{
		Status: status, X: make([]float64, n), RowValue: make([]float64, m), RowPrice: make([]float64, m),
		ReducedCost: make([]float64, n), Basis: e.basis(), Iterations: e.iterations, Primal: e.primalIterations, Scaling: s.report,
	}
	var objective twofold
	for j := range sol.X {
		sol.X[j] = plain(e.x[j] * s.col[j])
		c := p.anyColumn(j)
		if e.place[j] == AtLower && finite(c.Lower) {
			sol.X[j] = plain(c.Lower)
		}
		if e.place[j] == AtUpper && finite(c.Upper) {
			sol.X[j] = plain(c.Upper)
		}
		sol.ReducedCost[j] = plain(e.d[j] / (s.col[j] * s.costFactor))
		objective.addProduct(c.Cost, sol.X[j])
	}
	sol.Objective = plain(objective.value())
	for i := range sol.RowValue {
		sol.RowValue[i] = plain(e.x[n+i] / s.row[i])
		sol.RowPrice[i] = plain(e.d[n+i] * s.row[i] / s.costFactor)
	}
	e.markDegenerate(sol)
	switch status {
	case Infeasible:
		sol.Ray = proofRay(p, s, e.proof)
	case Unbounded:
		sol.Ray = directionRay(s, e, t.q)
	}
	return sol
}

// plain turns a negative zero, which would print as -0, into zero.
func plain(v float64) float64 {
	if v == 0 {
		return 0
	}
	return v
}

// markDegenerate sets the two flags that warn of prices or values that are not the only ones.
func (e *engine) markDegenerate(sol *Solution) {
	for v := range e.place {
		if e.place[v] == Basic {
			sol.PrimalDegenerate = sol.PrimalDegenerate || e.onBound(v)
			continue
		}
		if !e.fixed(v) && math.Abs(e.d[v]) <= optimalityTolerance {
			sol.DualDegenerate = true
		}
	}
}

// onBound tells that the value of v equals one of its bounds within the tolerance.
func (e *engine) onBound(v int) bool {
	near := func(b float64) bool {
		return finite(b) && math.Abs(e.x[v]-b) <= feasibilityTolerance*math.Max(1, math.Abs(b))
	}
	return near(e.lower[v]) || near(e.upper[v])
}

// proofRay takes the multipliers of the proof back to the units of the problem.
func proofRay(p *Problem, s *scaled, proof []float64) *Ray {
	r := &Ray{Rows: make([]float64, len(s.row)), Columns: make([]float64, len(s.col))}
	for i, y := range proof {
		r.Rows[i] = y * s.row[i]
	}
	for j := range p.columns {
		var z twofold
		for i, y := range r.Rows {
			if y != 0 {
				z.addProduct(-y, p.a[i][j])
			}
		}
		r.Columns[j] = z.value()
	}
	for k, i := range p.unitRow {
		r.Columns[len(p.columns)+k] = -r.Rows[i] * p.unitSign[k]
	}
	return r
}

// directionRay takes the direction along the pivot column of q back to the units of the problem.
func directionRay(s *scaled, e *engine, q int) *Ray {
	r := &Ray{Rows: make([]float64, e.rows), Columns: make([]float64, e.n)}
	e.pivotColumn(q)
	sign := 1.0
	if e.d[q] > 0 {
		sign = -1
	}
	step := make([]float64, e.n+e.rows)
	e.eachBasic(func(v int, a float64) { step[v] = sign * a })
	step[q] = sign
	for j := range r.Columns {
		r.Columns[j] = step[j] * s.col[j]
	}
	for i := range r.Rows {
		r.Rows[i] = step[e.n+i] / s.row[i]
	}
	return r
}
