package convex

import (
	"math"
	"sort"
)

// sparseRows is a matrix by rows.
type sparseRows struct {
	rows, cols int
	start      []int
	col        []int32
	val        []float64
}

func (a *sparseRows) row(i int) ([]int32, []float64) {
	return a.col[a.start[i]:a.start[i+1]], a.val[a.start[i]:a.start[i+1]]
}

func (a *sparseRows) append(col int32, v float64) {
	a.col = append(a.col, col)
	a.val = append(a.val, v)
}

func (a *sparseRows) endRow() {
	a.rows++
	a.start = append(a.start, len(a.col))
}

// times sets y to A x.
func (a *sparseRows) times(y, x []float64) {
	for i := range y[:a.rows] {
		y[i] = a.rowTimes(i, x)
	}
}

// rowTimes returns row i times x. Entries of a row are in the order of the columns, so that as many as there are columns are all of
// them.
func (a *sparseRows) rowTimes(i int, x []float64) float64 {
	col, val := a.row(i)
	if len(col) == a.cols {
		return dot(val, x)
	}
	sum := 0.0
	for k, j := range col {
		sum += val[k] * x[j]
	}
	return sum
}

// addRow adds t times row i to x.
func (a *sparseRows) addRow(x []float64, i int, t float64) {
	col, val := a.row(i)
	if len(col) == a.cols {
		addScaled(x[:len(val)], t, val)
		return
	}
	for k, j := range col {
		x[j] += val[k] * t
	}
}

// addTransposed adds f A'y to x.
func (a *sparseRows) addTransposed(x []float64, f float64, y []float64) {
	for i, v := range y[:a.rows] {
		if v == 0 {
			continue
		}
		a.addRow(x, i, v*f)
	}
}

// addSymmetric adds f H x to y, for H given by its lower triangle.
func (a *sparseRows) addSymmetric(y []float64, f float64, x []float64) {
	for i := 0; i < a.rows; i++ {
		col, val := a.row(i)
		xi, sum := x[i], 0.0
		for k, j := range col {
			if int(j) == i {
				sum += val[k] * xi
				continue
			}
			sum += val[k] * x[j]
			y[j] += f * val[k] * xi
		}
		y[i] += f * sum
	}
}

// interiorForm is a problem as the interior-point method takes it: minimise c'x + 1/2 x'Hx + 1/2 sum w_i s_i², A x - s = 0, with
// bounds on x and s. Fixed columns and rows without bounds are left out, an equation has s fixed, a factor of the Hessian is a row
// whose s is free and has the weight w. Columns, rows and costs are scaled by powers of two.
type interiorForm struct {
	p            *Problem
	n, m         int
	column       []int // by x: column of the problem
	row          []int // by row: row of the problem, or -1 for a factor
	a, h         sparseRows
	c            []float64
	weight       []float64 // by row
	lower, upper []float64 // by x, then by s
	rowScale     []float64
	colScale     []float64
	costScale    float64 // negative for a maximisation
}

// buildForm takes p, whose Hessian is h or nil. The bound at the given share of the sorted list of bounds is scaled to one.
func buildForm(p *Problem, h *hessian, typical float64) *interiorForm {
	f := &interiorForm{p: p, costScale: 1}
	if p.sense == Maximise {
		f.costScale = -1
	}
	at := make([]int32, p.allColumns()) // place of a column, -1 when fixed
	fixed := make([]float64, p.allColumns())
	for j := range at {
		c := p.anyColumn(j)
		at[j] = -1
		if c.Lower == c.Upper {
			fixed[j] = c.Lower
			continue
		}
		at[j] = int32(f.n)
		f.n++
		f.column = append(f.column, j)
		f.c = append(f.c, c.Cost*f.costScale)
		f.lower = append(f.lower, c.Lower)
		f.upper = append(f.upper, c.Upper)
	}
	f.a = sparseRows{cols: f.n, start: []int{0}}
	f.h = sparseRows{cols: f.n, start: []int{0}}
	f.takeRows(at, fixed)
	f.takeHessian(h, at, fixed)
	f.m = f.a.rows
	f.equilibrate(typical)
	return f
}

func (f *interiorForm) takeRows(at []int32, fixed []float64) {
	p := f.p
	entries := len(p.unit)
	for _, row := range p.a {
		for _, v := range row {
			if v != 0 {
				entries++
			}
		}
	}
	f.a.col, f.a.val = make([]int32, 0, entries), make([]float64, 0, entries)
	for i := range p.rowName {
		if !finite(p.rowLower[i]) && !finite(p.rowUpper[i]) {
			continue
		}
		var shift twofold
		p.eachEntry(i, func(j int, a float64) {
			if at[j] >= 0 {
				f.a.append(at[j], a)
			} else if fixed[j] != 0 {
				shift.addProduct(a, fixed[j])
			}
		})
		f.a.endRow()
		f.row = append(f.row, i)
		f.weight = append(f.weight, 0)
		f.lower = append(f.lower, p.rowLower[i]-shift.value())
		f.upper = append(f.upper, p.rowUpper[i]-shift.value())
	}
}

func (f *interiorForm) takeHessian(h *hessian, at []int32, fixed []float64) {
	if h == nil {
		for range f.n {
			f.h.endRow()
		}
		return
	}
	f.h.col, f.h.val = make([]int32, 0, len(h.value)), make([]float64, 0, len(h.value))
	for i := 0; i < h.n; i++ {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			j, v := int(h.column[k]), h.value[k]*f.costScale
			switch {
			case at[i] >= 0 && at[j] >= 0:
				f.h.append(at[j], v)
			case at[i] >= 0:
				f.c[at[i]] += v * fixed[j]
			case at[j] >= 0:
				f.c[at[j]] += v * fixed[i]
			}
		}
		if at[i] >= 0 {
			f.h.endRow()
		}
	}
	for f.h.rows < f.n { // helper columns
		f.h.endRow()
	}
	for k, v := range h.factor {
		shift := 0.0
		for j, a := range v {
			if at[j] < 0 {
				shift += a * fixed[j]
			}
		}
		for j, a := range v {
			if at[j] >= 0 && a != 0 {
				f.a.append(at[j], a)
				f.c[at[j]] += f.costScale * h.weight[k] * a * shift
			}
		}
		f.a.endRow()
		f.row = append(f.row, -1)
		f.weight = append(f.weight, h.weight[k]*f.costScale)
		f.lower = append(f.lower, math.Inf(-1))
		f.upper = append(f.upper, math.Inf(1))
	}
}

// ruizPasses is the most sweeps of the equilibration; each takes the root of what is left, so that ten bring a spread of 1e6 within two
// per cent of one.
const ruizPasses = 10

// equilibrate scales rows and columns of the matrix of H and A together by roots of their largest entries (Ruiz 2001), then the
// values by their typical bound and the objective by its largest coefficient.
func (f *interiorForm) equilibrate(typical float64) {
	f.rowScale, f.colScale = ones(f.m), ones(f.n)
	for range ruizPasses {
		row, col := make([]float64, f.m), make([]float64, f.n)
		for i := 0; i < f.m; i++ {
			cols, vals := f.a.row(i)
			top, scale := 0.0, f.rowScale[i]
			for k, j := range cols {
				v := math.Abs(vals[k]) * scale * f.colScale[j]
				if v > top {
					top = v
				}
				if v > col[j] {
					col[j] = v
				}
			}
			row[i] = top
		}
		for i := 0; i < f.n; i++ {
			cols, vals := f.h.row(i)
			top, scale := col[i], f.colScale[i]
			for k, j := range cols {
				v := math.Abs(vals[k]) * scale * f.colScale[j]
				if v > top {
					top = v
				}
				if v > col[j] {
					col[j] = v
				}
			}
			col[i] = math.Max(top, col[i])
		}
		rootScale(f.rowScale, row)
		rootScale(f.colScale, col)
		if even(row) && even(col) {
			break
		}
	}
	for i := range f.rowScale {
		f.rowScale[i] = powerOfTwo(f.rowScale[i])
	}
	for j := range f.colScale {
		f.colScale[j] = powerOfTwo(f.colScale[j])
	}
	f.centre(typical)
	f.applyScale()
}

// even tells that the largest entries, where there are any, are within a factor of two of one, so that another sweep changes no power
// of two by more than one step.
func even(largest []float64) bool {
	for _, v := range largest {
		if v != 0 && !(v >= 0.5 && v <= 2) {
			return false
		}
	}
	return true
}

func rootScale(scale, largest []float64) {
	for i, v := range largest {
		if v > 0 {
			scale[i] /= math.Sqrt(v)
		}
	}
}

// centre multiplies columns, and divides rows, by one factor so that the typical bound is one, among those that are neither
// zero nor missing.
func (f *interiorForm) centre(typical float64) {
	var sizes []float64
	note := func(b, s float64) {
		if b != 0 && finite(b) {
			sizes = append(sizes, math.Abs(b)*s)
		}
	}
	for j, s := range f.colScale {
		note(f.lower[j], 1/s)
		note(f.upper[j], 1/s)
	}
	for i, s := range f.rowScale {
		note(f.lower[f.n+i], s)
		if f.lower[f.n+i] != f.upper[f.n+i] {
			note(f.upper[f.n+i], s)
		}
	}
	if len(sizes) == 0 {
		return
	}
	sort.Float64s(sizes)
	g := powerOfTwo(sizes[int(typical*float64(len(sizes)-1))])
	for j := range f.colScale {
		f.colScale[j] *= g
	}
	for i := range f.rowScale {
		f.rowScale[i] /= g
	}
}

func (f *interiorForm) applyScale() {
	for i := 0; i < f.m; i++ {
		cols, vals := f.a.row(i)
		for k, j := range cols {
			vals[k] *= f.rowScale[i] * f.colScale[j]
		}
		f.lower[f.n+i] *= f.rowScale[i]
		f.upper[f.n+i] *= f.rowScale[i]
	}
	largest := 0.0
	for i := 0; i < f.n; i++ {
		f.c[i] *= f.colScale[i]
		largest = math.Max(largest, math.Abs(f.c[i]))
		f.lower[i] /= f.colScale[i]
		f.upper[i] /= f.colScale[i]
		cols, vals := f.h.row(i)
		for k, j := range cols {
			vals[k] *= f.colScale[i] * f.colScale[j]
			largest = math.Max(largest, math.Abs(vals[k]))
		}
	}
	for i := range f.weight {
		f.weight[i] /= f.rowScale[i] * f.rowScale[i]
		largest = math.Max(largest, math.Abs(f.weight[i]))
	}
	if !(largest > 0) {
		return
	}
	g := powerOfTwo(1 / largest)
	f.costScale *= g
	for i := range f.c {
		f.c[i] *= g
	}
	for k := range f.h.val {
		f.h.val[k] *= g
	}
	for i := range f.weight {
		f.weight[i] *= g
	}
}
