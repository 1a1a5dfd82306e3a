package convex

import (
	"context"
	"fmt"
	"math"
)

// Relaxable is a row whose bounds may give way, with the cost of each unit by which they do. A weight of zero keeps that side.
type Relaxable struct {
	Row         int
	LowerWeight float64 // cost per unit by which the lower bound is lowered [-]
	UpperWeight float64 // cost per unit by which the upper bound is raised [-]
}

// RowRelaxation is how far the bounds of one row give way.
type RowRelaxation struct {
	Row   int
	Lower float64 // the lower bound is lowered by this [-]
	Upper float64 // the upper bound is raised by this [-]
	// Alone is the least weighted relaxation of this row that makes the problem feasible when no other gives way: +Inf when none
	// does, NaN when the search was stopped before.
	Alone float64 // [-]
	// AloneAmount is the same in the units of the row, without the weight.
	AloneAmount float64 // [-]
}

// Relaxation is the least change of rows that makes a problem feasible.
type Relaxation struct {
	// Status is Optimal, Infeasible when even with every listed row given way nothing is feasible, or what stopped the search.
	Status Status
	Total  float64         // weighted sum of all relaxations; zero when the problem is feasible [-]
	Rows   []RowRelaxation // one for each Relaxable, in order
	X      []float64       // values that meet the relaxed rows [-]
}

// LeastRelaxation finds the least weighted sum of changes to the listed rows that makes p feasible (an elastic programme; Brown &
// Graves 1975), and for each listed row the least change of it alone that does. The error is not nil for an index out of range or a
// weight that is negative or not finite.
func LeastRelaxation(ctx context.Context, p *Problem, relaxable []Relaxable) (*Relaxation, error) {
	if err := checkRelaxable(p, relaxable); err != nil {
		return nil, err
	}
	e := newElastic(p, relaxable)
	t := newSession(e.p)
	t.e.startFromRows()
	limit := Options{}.iterationLimit(e.p.Rows(), e.p.allColumns())
	out := &Relaxation{Status: t.zoom(ctx, limit, t.solve(ctx, limit)), Rows: make([]RowRelaxation, len(relaxable))}
	for r := range out.Rows {
		out.Rows[r] = RowRelaxation{Row: relaxable[r].Row, Alone: math.NaN(), AloneAmount: math.NaN()}
	}
	if out.Status == Infeasible {
		for r := range out.Rows {
			out.Rows[r].Alone, out.Rows[r].AloneAmount = math.Inf(1), math.Inf(1)
		}
	}
	if out.Status != Optimal {
		return out, nil
	}
	out.X = report(t, Optimal).X[:p.Columns()]
	for k, u := range e.p.unit {
		by := math.Max(0, t.value(p.Columns()+k))
		out.Total += u.Cost * by
		e.amount(&out.Rows[e.owner[k]], k, by)
	}
	if status := e.eachAlone(ctx, t, limit, out); status != Optimal {
		out.Status = status
	}
	return out, nil
}

// eachAlone finds for each listed row how far it must give way when no other does. A proof that nothing is feasible stays one when a
// row gives way that it does not use, so that every proof settles the rows outside it at once; only the rows in all proofs found so far
// are solved for. The result is Optimal or what stopped it.
func (e *elastic) eachAlone(ctx context.Context, t *session, limit int, out *Relaxation) Status {
	if out.Total == 0 {
		for r := range out.Rows {
			out.Rows[r].Alone, out.Rows[r].AloneAmount = 0, 0
		}
		return Optimal
	}
	hopeless := make([]bool, len(out.Rows))
	use := func(proof []float64) {
		for r := range hopeless {
			hopeless[r] = hopeless[r] || !e.usedBy(proof, r)
		}
	}
	switch status := e.alone(ctx, t, limit, nobody, &RowRelaxation{}); status {
	case Infeasible:
		use(t.e.proof)
	case Optimal: // by so little that it does not count alone
	default:
		return status
	}
	for r := range out.Rows {
		if hopeless[r] {
			out.Rows[r].Alone, out.Rows[r].AloneAmount = math.Inf(1), math.Inf(1)
			continue
		}
		switch status := e.alone(ctx, t, limit, r, &out.Rows[r]); status {
		case Infeasible:
			use(t.e.proof)
		case Optimal:
		default:
			return status
		}
	}
	return Optimal
}

// nobody stands for no row.
const nobody = -1

// usedBy tells that a proof uses a side of row r of the list that may give way.
func (e *elastic) usedBy(proof []float64, r int) bool {
	for k, owner := range e.owner {
		if y := proof[e.p.unitRow[k]]; owner == r && y*e.p.unitSign[k] < 0 {
			return true
		}
	}
	return false
}

func checkRelaxable(p *Problem, relaxable []Relaxable) error {
	for _, r := range relaxable {
		if r.Row < 0 || r.Row >= p.Rows() {
			return fmt.Errorf("convex: LeastRelaxation: no row %d among %d", r.Row, p.Rows())
		}
		for _, w := range [2]float64{r.LowerWeight, r.UpperWeight} {
			if !(w >= 0 && finite(w)) {
				return fmt.Errorf("convex: LeastRelaxation: weight %v of row %d is not a finite number of at least zero", w, r.Row)
			}
		}
	}
	return nil
}

// elastic is a problem with a helper column for each side that may give way.
type elastic struct {
	p     *Problem
	owner []int // by helper column: index in the list of relaxable rows
}

func newElastic(p *Problem, relaxable []Relaxable) *elastic {
	e := &elastic{p: p.Clone()}
	e.p.sense, e.p.hessian = Minimise, nil
	for j := range e.p.columns {
		e.p.columns[j].Cost = 0
	}
	add := func(r, row int, weight, bound, sign float64) {
		if weight == 0 || !finite(bound) {
			return
		}
		e.p.unit = append(e.p.unit, Column{Cost: weight, Lower: 0, Upper: math.Inf(1)})
		e.p.unitRow = append(e.p.unitRow, row)
		e.p.unitSign = append(e.p.unitSign, sign)
		e.owner = append(e.owner, r)
	}
	for r, v := range relaxable {
		add(r, v.Row, v.LowerWeight, p.rowLower[v.Row], 1)
		add(r, v.Row, v.UpperWeight, p.rowUpper[v.Row], -1)
	}
	return e
}

// amount books the value of helper column k.
func (e *elastic) amount(r *RowRelaxation, k int, by float64) {
	if e.p.unitSign[k] > 0 {
		r.Lower = by
	} else {
		r.Upper = by
	}
}

// alone solves with the helper columns of one row only.
func (e *elastic) alone(ctx context.Context, t *session, limit, r int, out *RowRelaxation) Status {
	n, dearest := len(e.p.columns), 0.0
	for k, owner := range e.owner {
		upper := 0.0
		if owner == r {
			upper = math.Inf(1)
		}
		t.setColumn(n+k, 0, upper)
		if owner == r {
			dearest = math.Max(dearest, math.Abs(t.s.cost[n+k]))
		}
	}
	if dearest > 0 {
		t.multiplyCost(powerOfTwo(1 / dearest))
	}
	status := t.zoom(ctx, limit, t.solve(ctx, limit))
	switch status {
	case Infeasible:
		out.Alone, out.AloneAmount = math.Inf(1), math.Inf(1)
	case Optimal:
		out.Alone, out.AloneAmount = 0, 0
		for k, owner := range e.owner {
			if owner == r {
				by := math.Max(0, t.value(n+k))
				out.Alone += by * e.p.unit[k].Cost
				out.AloneAmount += by
			}
		}
	}
	return status
}
