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
	r, err := NewRelaxer(p, relaxable)
	if err != nil {
		return nil, err
	}
	out := r.Least(ctx, func(int) bool { return true })
	if out.Status != Optimal {
		return out, nil
	}
	if out.Total == 0 {
		for k := range out.Rows {
			out.Rows[k].Alone, out.Rows[k].AloneAmount = 0, 0
		}
		return out, nil
	}
	every := make([]int, len(relaxable))
	for k := range every {
		every[k] = k
	}
	weighted, amount, status := r.Alone(ctx, every)
	for k := range out.Rows {
		out.Rows[k].Alone, out.Rows[k].AloneAmount = weighted[k], amount[k]
	}
	out.Status = status
	return out, nil
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

// elastic is a problem without costs and with a helper column for each side of a row that may give way. A row with one entry is a bound
// of its column; where it may give way its helper is a copy of that column, which takes on what passes the bound, or, in the bare form for
// one row at a time, that column itself.
type elastic struct {
	p       *Problem
	helpers []elasticHelper
}

// elasticHelper is a column by which a side gives way.
type elasticHelper struct {
	column  int     // in the elastic problem
	owner   int     // index in the list of relaxable rows
	upper   bool    // of the row's upper side
	weight  float64 // per unit of the row
	size    float64 // units of the row per unit of the column
	most    float64 // of the column: what always holds allows no more
	of      int     // the column that it is a copy of, -1: none
	upperOf bool    // it adds to that column, otherwise it takes from it
}

func newElastic(p *Problem, relaxable []Relaxable, bare bool) *elastic {
	n := p.Columns()
	e := &elastic{p: &Problem{sense: Minimise, columns: append([]Column(nil), p.columns...)}}
	bounds := findRowBounds(p)
	weights := make([]Relaxable, p.Rows()) // by row: the sum of its entries in the list
	for _, v := range relaxable {
		weights[v.Row].LowerWeight += v.LowerWeight
		weights[v.Row].UpperWeight += v.UpperWeight
	}
	e.keepSeveral(p, bounds, relaxable)
	low, high := make([]float64, n), make([]float64, n)
	for j := range low {
		e.p.columns[j].Cost = 0
		low[j], high[j] = p.columns[j].Lower, p.columns[j].Upper
	}
	for i, w := range weights {
		if !bounds.is[i] {
			continue
		}
		j, lowerWeight, upperWeight := bounds.column[i], w.LowerWeight, w.UpperWeight
		if bounds.flipped[i] {
			lowerWeight, upperWeight = upperWeight, lowerWeight
		}
		if lowerWeight == 0 {
			low[j] = math.Max(low[j], bounds.lower[i])
		}
		if upperWeight == 0 {
			high[j] = math.Min(high[j], bounds.upper[i])
		}
	}
	for j := range low {
		e.p.columns[j].Lower, e.p.columns[j].Upper = low[j], high[j]
	}
	e.addCopies(bounds, relaxable, low, high, bare)
	place := make([]int, p.Rows())
	for i := range place {
		if !bounds.is[i] {
			place[i] = e.p.Rows()
			e.p.takeRow(p, i)
			e.extend(place[i])
		}
	}
	for k, v := range relaxable {
		if !bounds.is[v.Row] {
			e.addUnit(k, place[v.Row], v.LowerWeight, p.rowLower[v.Row], 1)
			e.addUnit(k, place[v.Row], v.UpperWeight, p.rowUpper[v.Row], -1)
		}
	}
	for k := range e.helpers {
		h := &e.helpers[k]
		if h.of < 0 {
			h.column += len(e.p.columns)
		}
	}
	return e
}

// keepSeveral leaves those rows that may give way as rows that share a side of a column with others that may.
func (e *elastic) keepSeveral(p *Problem, b *rowBounds, relaxable []Relaxable) {
	count := make([][2]int, p.Columns())
	each := func(v Relaxable, f func(c *int)) {
		if !b.is[v.Row] {
			return
		}
		if v.LowerWeight > 0 && finite(p.rowLower[v.Row]) {
			f(&count[b.column[v.Row]][b.side(v.Row, LowerSide)-LowerSide])
		}
		if v.UpperWeight > 0 && finite(p.rowUpper[v.Row]) {
			f(&count[b.column[v.Row]][b.side(v.Row, UpperSide)-LowerSide])
		}
	}
	for _, v := range relaxable {
		each(v, func(c *int) { *c++ })
	}
	var several []int
	for _, v := range relaxable {
		each(v, func(c *int) {
			if *c > 1 {
				several = append(several, v.Row)
			}
		})
	}
	for _, i := range several {
		b.is[i] = false
	}
}

// addCopies tightens the columns by the bounds that may give way and adds the copies, none in the bare form.
func (e *elastic) addCopies(b *rowBounds, relaxable []Relaxable, low, high []float64, bare bool) {
	add := func(owner int, upper bool, weight, size, most float64, of int, upperOf bool) {
		h := elasticHelper{column: len(e.p.columns), owner: owner, upper: upper, weight: weight, size: size, most: most, of: of, upperOf: upperOf}
		if bare {
			h.column = of
		} else {
			e.p.columns = append(e.p.columns, Column{Cost: weight * size, Upper: most})
		}
		e.helpers = append(e.helpers, h)
	}
	for k, v := range relaxable {
		if !b.is[v.Row] {
			continue
		}
		j := b.column[v.Row]
		lowerWeight, upperWeight := v.LowerWeight, v.UpperWeight
		if b.flipped[v.Row] {
			lowerWeight, upperWeight = upperWeight, lowerWeight
		}
		if bound := b.lower[v.Row]; lowerWeight > 0 && bound > low[j] {
			e.p.columns[j].Lower = bound
			add(k, b.flipped[v.Row], lowerWeight, b.size[v.Row], bound-low[j], j, false)
		}
		if bound := b.upper[v.Row]; upperWeight > 0 && bound < high[j] {
			e.p.columns[j].Upper = bound
			add(k, !b.flipped[v.Row], upperWeight, b.size[v.Row], high[j]-bound, j, true)
		}
	}
}

// extend lengthens row i by the entries of the copies.
func (e *elastic) extend(i int) {
	a := make([]float64, len(e.p.columns))
	copy(a, e.p.a[i])
	for _, h := range e.helpers {
		switch {
		case h.of < 0 || h.of == h.column:
		case h.upperOf:
			a[h.column] = a[h.of]
		default:
			a[h.column] = -a[h.of]
		}
	}
	e.p.a[i] = a
}

// addUnit adds a column with one entry in row i, for a side that may give way.
func (e *elastic) addUnit(owner, i int, weight, bound, sign float64) {
	if weight == 0 || !finite(bound) {
		return
	}
	e.helpers = append(e.helpers, elasticHelper{column: len(e.p.unit), owner: owner, upper: sign < 0, weight: weight, size: 1, most: math.Inf(1), of: -1})
	e.p.unit = append(e.p.unit, Column{Cost: weight, Lower: 0, Upper: math.Inf(1)})
	e.p.unitRow = append(e.p.unitRow, i)
	e.p.unitSign = append(e.p.unitSign, sign)
}
