package convex

import (
	"context"
	"math"
)

// interiorRest looks for a proof that p has no point or a direction along which its objective improves without end. The status is
// NumericalTrouble when neither is found.
func interiorRest(ctx context.Context, p *Problem, o Options) *Solution {
	solve := func(q *Problem) *Solution {
		s := interiorOptimum(ctx, q, nil, o)
		if s.Status == NumericalTrouble {
			// The proof is checked from the data whatever the accuracy of the point that it comes from.
			s.Status = Optimal
		}
		return s
	}
	e := solve(everyRowElastic(p))
	if e.Status != Optimal {
		return emptySolution(p, e.Status)
	}
	out := emptySolution(p, Infeasible)
	out.Iterations = e.Iterations
	out.Ray = farkas(p, e.RowPrice)
	if Certify(p, out).Accepted {
		return out
	}
	d := solve(recession(p))
	if d.Status != Optimal {
		return emptySolution(p, d.Status)
	}
	out = unboundedSolution(p, e.X[:p.allColumns()], d.X)
	out.Iterations = e.Iterations + d.Iterations
	if !Certify(p, out).Accepted {
		out.Status, out.Ray = NumericalTrouble, nil
	}
	return out
}

// everyRowElastic is p without costs, with columns that let every row give way, weighted by its largest entry.
func everyRowElastic(p *Problem) *Problem {
	e := &elastic{p: p.Clone()}
	e.p.sense, e.p.hessian = Minimise, nil
	for j := range e.p.columns {
		e.p.columns[j].Cost = 0
	}
	u := measure(p)
	for i := range p.rowName {
		e.addUnit(i, i, u.row[i], p.rowLower[i], 1)
		e.addUnit(i, i, u.row[i], p.rowUpper[i], -1)
	}
	return e.p
}

// farkas turns the row prices of the elastic problem into a proof.
func farkas(p *Problem, price []float64) *Ray {
	r := &Ray{Rows: make([]float64, p.Rows()), Columns: make([]float64, p.allColumns())}
	z := make([]twofold, len(r.Columns))
	for i, y := range price {
		r.Rows[i] = -y
		if y != 0 {
			p.eachEntry(i, func(j int, a float64) { z[j].addProduct(a, y) })
		}
	}
	for j := range z {
		r.Columns[j] = z[j].value()
	}
	return r
}

// recession is the linear programme of the directions of p: the objective per step, no bound approached, no curvature, every
// component at most the natural unit of its column.
func recession(p *Problem) *Problem {
	u := measure(p)
	q := &Problem{sense: p.sense}
	towards := func(lower, upper, size float64) (float64, float64) {
		lo, up := -size, size
		if finite(lower) {
			lo = 0
		}
		if finite(upper) {
			up = 0
		}
		return lo, up
	}
	all := p.allColumns()
	for j := range all {
		c := p.anyColumn(j)
		c.Lower, c.Upper = towards(c.Lower, c.Upper, u.col[j])
		q.columns = append(q.columns, c)
	}
	add := func(lower, upper float64) []float64 {
		q.a = append(q.a, make([]float64, all))
		q.rowName = append(q.rowName, "")
		q.rowLower = append(q.rowLower, lower)
		q.rowUpper = append(q.rowUpper, upper)
		return q.row(len(q.rowName) - 1)
	}
	for i := range p.rowName {
		lower, upper := towards(p.rowLower[i], p.rowUpper[i], math.Inf(1))
		row := add(lower, upper)
		p.eachEntry(i, func(j int, a float64) { row[j] = a })
	}
	if h := p.hessian; h != nil {
		flat := h
		if c := p.curvature(); c.convex {
			flat = c.form
		}
		lines := make([][]float64, flat.n)
		line := func(i int) []float64 {
			if lines[i] == nil {
				lines[i] = make([]float64, all)
			}
			return lines[i]
		}
		for i := 0; i < flat.n; i++ {
			for k := flat.start[i]; k < flat.start[i+1]; k++ {
				j := int(flat.column[k])
				line(i)[j] = flat.value[k]
				line(j)[i] = flat.value[k]
			}
		}
		for _, l := range append(lines, flat.factor...) {
			if l != nil {
				copy(add(0, 0), l)
			}
		}
	}
	return q
}

// unboundedSolution joins a point and a direction.
func unboundedSolution(p *Problem, x, d []float64) *Solution {
	out := emptySolution(p, Unbounded)
	copy(out.X, x)
	out.Ray = &Ray{Rows: make([]float64, p.Rows()), Columns: append([]float64(nil), d...)}
	for i := range out.Ray.Rows {
		out.Ray.Rows[i], _ = p.activity(i, out.Ray.Columns)
	}
	fillSolution(p, out)
	clear(out.ReducedCost)
	return out
}
