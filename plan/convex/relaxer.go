package convex

import (
	"context"
	"math"
)

// Relaxer keeps the elastic programme of a problem, so that a series of questions about the same rows that may give way, all of them
// or one alone, pays for the setup once and each solve starts where the last one ended.
type Relaxer struct {
	original  *Problem
	relaxable []Relaxable
	e         *elastic
	t         *undertaking
	pivots    int // of undertakings before the present one

	cost       []float64 // by helper, in the scale of the undertaking
	costFactor float64
}

// NewRelaxer copies p. Errors are those of LeastRelaxation.
func NewRelaxer(p *Problem, relaxable []Relaxable) (*Relaxer, error) {
	if err := checkRelaxable(p, relaxable); err != nil {
		return nil, err
	}
	r := &Relaxer{original: p.Clone(), relaxable: append([]Relaxable(nil), relaxable...)}
	r.build()
	return r, nil
}

func (r *Relaxer) build() {
	r.e = newElastic(r.original, r.relaxable, false)
	r.t = newUndertaking(r.e.p)
	r.t.e.startFromRows()
	r.cost, r.costFactor = make([]float64, len(r.e.helpers)), r.t.s.costFactor
	for k, h := range r.e.helpers {
		r.cost[k] = r.t.s.cost[h.column]
	}
}

// AddRow adds a row that always holds; the next solve starts from the basis of the last. Errors are those of Problem.AddRow.
func (r *Relaxer) AddRow(row Row) error {
	if _, err := r.original.AddRow(row); err != nil {
		return err
	}
	basis := r.t.e.basis()
	r.pivots += r.t.e.iterations
	r.build()
	r.t.e.start(basis)
	return nil
}

// Iterations is the number of pivots so far.
func (r *Relaxer) Iterations() int { return r.pivots + r.t.e.iterations }

// Least finds the least weighted sum of relaxations of those rows of the list for which takes is true. Alone and AloneAmount are NaN
// in the result, or +Inf where not even all of these rows together do.
func (r *Relaxer) Least(ctx context.Context, takes func(k int) bool) *Relaxation {
	out := &Relaxation{Status: r.solve(ctx, takes), Rows: make([]RowRelaxation, len(r.relaxable))}
	nothing := math.NaN()
	if out.Status == Infeasible {
		nothing = math.Inf(1)
	}
	for k := range out.Rows {
		out.Rows[k] = RowRelaxation{Row: r.relaxable[k].Row, Alone: nothing, AloneAmount: nothing}
	}
	if out.Status != Optimal {
		return out
	}
	x := report(r.t, Optimal).X
	out.X = append([]float64(nil), x[:r.original.Columns()]...)
	for _, h := range r.e.helpers {
		value := math.Max(0, x[h.column])
		by := value * h.size
		out.Total += h.weight * by
		if row := &out.Rows[h.owner]; h.upper {
			row.Upper = by
		} else {
			row.Lower = by
		}
		switch {
		case h.of < 0:
		case h.upperOf:
			out.X[h.of] += value
		default:
			out.X[h.of] -= value
		}
	}
	return out
}

// solve lets the rows give way for which takes is true.
func (r *Relaxer) solve(ctx context.Context, takes func(k int) bool) Status {
	dearest := 0.0
	for k, h := range r.e.helpers {
		upper := 0.0
		if takes(h.owner) {
			upper = h.most
			dearest = math.Max(dearest, math.Abs(r.cost[k]))
		}
		r.t.setColumn(h.column, 0, upper)
		r.t.s.cost[h.column] = r.cost[k]
	}
	r.t.s.costFactor = r.costFactor
	if dearest > 0 {
		r.t.multiplyCost(powerOfTwo(1 / dearest))
	}
	return r.optimise(ctx)
}

func (r *Relaxer) optimise(ctx context.Context) Status {
	limit := Options{}.iterationLimit(r.e.p.Rows(), r.e.p.allColumns())
	return r.t.zoom(ctx, limit, r.t.solve(ctx, limit))
}

// solveOne lets one row give way, at the same cost on both sides: the values that it can take lie on one side of its bounds.
func (r *Relaxer) solveOne(ctx context.Context, row int) Status {
	for _, h := range r.e.helpers {
		upper, cost := 0.0, 0.0
		if h.owner == row {
			upper, cost = h.most, 1
		}
		r.t.setColumn(h.column, 0, upper)
		r.t.s.cost[h.column] = cost
	}
	return r.optimise(ctx)
}
