package convex

import "math"

// yardstick holds the natural units by which Certify rates an error where the terms themselves vanish: with row i multiplied by
// row[i] and column j by col[j] all entries are near one; then value is the size of a typical bound and cost that of the largest
// cost. It is computed apart from the scaling of the solver and with another norm.
type yardstick struct {
	row, col    []float64
	value, cost float64
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
			p.eachEntry(i, func(j int, a float64) {
				v := math.Abs(a) * u.row[i] * u.col[j]
				top = math.Max(top, v)
				most[j] = math.Max(most[j], v)
			})
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

// setValue takes the geometric mean of the finite bounds that are not zero.
func (u *yardstick) setValue(p *Problem) {
	sum, count := 0.0, 0.0
	note := func(b, f float64) {
		if b != 0 && finite(b) {
			sum += math.Log(math.Abs(b)) + math.Log(f)
			count++
		}
	}
	for i, f := range u.row {
		note(p.rowLower[i], f)
		note(p.rowUpper[i], f)
	}
	for j, f := range u.col {
		c := p.anyColumn(j)
		note(c.Lower, 1/f)
		note(c.Upper, 1/f)
	}
	if count > 0 {
		u.value = math.Exp(sum / count)
	}
}

// setCost takes the largest cost.
func (u *yardstick) setCost(p *Problem) {
	top := 0.0
	for j, f := range u.col {
		top = math.Max(top, math.Abs(p.anyColumn(j).Cost)*f)
	}
	if top > 0 {
		u.cost = top
	}
}
