package convex

import (
	"math"
	"sort"
)

// yardstick holds the natural units by which Certify rates an error where the terms themselves vanish: with row i multiplied by
// row[i] and column j by col[j] all entries are near one; then value is the size of a typical bound and cost that of the largest
// cost. It is computed apart from the scaling of the solver and with another norm.
type yardstick struct {
	row, col    []float64
	value, cost float64
	most        float64 // size of the largest finite bound, at least value
	worth       float64 // objective of the dearest column at a typical value
	empty       []bool  // columns without entries, which have no unit but their own bounds and cost
}

// yardstickSweeps is the number of sweeps of the equilibration; after two the largest entries of rows and columns are one within
// a small factor, which is all that a unit needs.
const yardstickSweeps = 2

// measure equilibrates by roots of the largest entries (Ruiz 2001).
func measure(p *Problem) yardstick {
	m, n := p.Rows(), p.allColumns()
	u := yardstick{row: ones(m), col: ones(n), value: 1, cost: 1, worth: 1, empty: make([]bool, n)}
	for sweep := 0; sweep < yardstickSweeps; sweep++ {
		most := make([]float64, n)
		for i := 0; i < m; i++ {
			top := 0.0
			row, f := p.row(i), u.row[i]
			for j, a := range row {
				v := math.Abs(a) * f * u.col[j]
				if v > top {
					top = v
				}
				if v > most[j] {
					most[j] = v
				}
			}
			for k, r := range p.unitRow {
				if r == i {
					v := f * u.col[len(row)+k]
					top, most[len(row)+k] = math.Max(top, v), math.Max(most[len(row)+k], v)
				}
			}
			if top > 0 {
				u.row[i] /= math.Sqrt(top)
			}
		}
		for j, top := range most {
			if u.empty[j] = !(top > 0); top > 0 {
				u.col[j] /= math.Sqrt(top)
			}
		}
	}
	u.setValue(p)
	u.setCost(p)
	return u
}

// setValue takes the smaller of the middle bounds of rows and of columns, so that a few, or even most columns with a huge number in
// place of "no bound" do not make it large.
func (u *yardstick) setValue(p *Problem) {
	var sizes [2][]float64
	note := func(kind int, b, f float64) {
		if b != 0 && finite(b) {
			sizes[kind] = append(sizes[kind], math.Abs(b)*f)
			u.most = math.Max(u.most, math.Abs(b)*f)
		}
	}
	for i, f := range u.row {
		note(0, p.rowLower[i], f)
		note(0, p.rowUpper[i], f)
	}
	for j, f := range u.col {
		if c := p.anyColumn(j); !u.empty[j] {
			note(1, c.Lower, 1/f)
			note(1, c.Upper, 1/f)
		}
	}
	least := math.Inf(1)
	for _, list := range sizes {
		if len(list) > 0 {
			sort.Float64s(list)
			least = math.Min(least, list[(len(list)-1)/2])
		}
	}
	if finite(least) {
		u.value = least
	}
	u.most = math.Max(u.most, u.value)
}

// setCost takes the largest cost, or what the natural unit of a column makes of its own curvature, and the worth of a typical value,
// or of the bounds of the column where they are nearer. Columns without entries count only where there are no others.
func (u *yardstick) setCost(p *Problem) {
	top, worth := u.dearest(p, false)
	if !(top > 0) {
		top, worth = u.dearest(p, true)
	}
	if top > 0 {
		u.cost = top
	}
	if worth > 0 {
		u.worth = worth
	}
}

func (u *yardstick) dearest(p *Problem, empty bool) (top, worth float64) {
	var curvature []float64
	if p.hessian != nil {
		curvature = p.hessian.diagonal()
	}
	for j, f := range u.col {
		if u.empty[j] != empty && curvature == nil {
			continue
		}
		c := p.anyColumn(j)
		cost := math.Abs(c.Cost) * f
		if j < len(curvature) {
			cost = math.Max(cost, math.Abs(curvature[j])*f*f*u.value)
		}
		top, worth = math.Max(top, cost), math.Max(worth, cost*u.natural(j, c)/f)
	}
	return top, worth
}

// natural returns a typical value of column j: of its bounds where they are nearer than the typical bound.
func (u *yardstick) natural(j int, c Column) float64 {
	value := u.value * u.col[j]
	if most := math.Max(math.Abs(c.Lower), math.Abs(c.Upper)); most > 0 {
		return math.Min(value, most)
	}
	return value
}
