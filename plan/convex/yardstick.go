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
}

// yardstickSweeps is the number of sweeps of the equilibration; after two the largest entries of rows and columns are one within
// a small factor, which is all that a unit needs.
const yardstickSweeps = 2

// measure equilibrates by roots of the largest entries (Ruiz 2001).
func measure(p *Problem) yardstick {
	m, n := p.Rows(), p.allColumns()
	u := yardstick{row: ones(m), col: ones(n), value: 1, cost: 1}
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
			if top > 0 {
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
		c := p.anyColumn(j)
		note(1, c.Lower, 1/f)
		note(1, c.Upper, 1/f)
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

// setCost takes the largest cost, or what the natural unit of a column makes of its own curvature.
func (u *yardstick) setCost(p *Problem) {
	top := 0.0
	for j, f := range u.col {
		top = math.Max(top, math.Abs(p.anyColumn(j).Cost)*f)
	}
	if p.hessian != nil {
		for j, v := range p.hessian.diagonal() {
			top = math.Max(top, math.Abs(v)*u.col[j]*u.col[j]*u.value)
		}
	}
	if top > 0 {
		u.cost = top
	}
}
