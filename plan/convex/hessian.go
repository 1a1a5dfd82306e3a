package convex

import (
	"fmt"
	"math"
	"slices"
	"sync"
)

// HessianEntry is one entry of a symmetric matrix. An entry off the diagonal stands for both of its places and is given once.
type HessianEntry struct {
	Row, Column int
	Value       float64 // [-]
}

// HessianFactor adds Weight f f', with f the Coefficients.
type HessianFactor struct {
	Weight       float64   // [-]
	Coefficients []float64 // one for each column [-]
}

// Hessian is the symmetric matrix H of the objective c'x + 1/2 x'Hx: the sum of the parts that are given. Parts may be missing.
type Hessian struct {
	Dense    []float64       // columns x columns numbers, row after row [-]
	Diagonal []float64       // one for each column [-]
	Entries  []HessianEntry  // no place twice
	Factors  []HessianFactor // few of them, for a matrix that is a diagonal plus a low rank
}

// symmetryTolerance is the difference of two mirrored entries of Hessian.Dense, relative to the larger, that counts as rounding of
// a matrix computed by two routes; their mean is used.
const symmetryTolerance = 1e-12

// SetHessian gives the problem its quadratic part, once: a second call is an error, as are entries that are not finite, not
// symmetric or out of range; all faults are reported at once in a *DataError. Whether the matrix makes the problem convex (positive
// semidefinite for a minimisation, negative for a maximisation) is found out by Solve.
func (p *Problem) SetHessian(h Hessian) error {
	var faults faultList
	if p.hessian != nil {
		faults.add(BadHessian, partProblem, 0, "", 0, "the Hessian is given twice")
	}
	n := len(p.columns)
	if len(h.Dense) != 0 && len(h.Dense) != n*n {
		faults.add(BadSize, partProblem, 0, "", float64(len(h.Dense)), fmt.Sprintf("the dense Hessian has %d entries for %d columns", len(h.Dense), n))
		h.Dense = nil
	}
	if len(h.Diagonal) != 0 && len(h.Diagonal) != n {
		faults.add(BadSize, partProblem, 0, "", float64(len(h.Diagonal)), fmt.Sprintf("the Hessian's diagonal has %d entries for %d columns", len(h.Diagonal), n))
		h.Diagonal = nil
	}
	b := hessianBuilder{n: n, faults: &faults}
	b.dense(h.Dense)
	for j, v := range h.Diagonal {
		b.add(j, j, v, p.columns[j].Name)
	}
	b.entries(h.Entries)
	out := b.finish()
	for k, f := range h.Factors {
		if len(f.Coefficients) != n {
			faults.add(BadSize, partProblem, k, "", float64(len(f.Coefficients)), fmt.Sprintf("factor %d of the Hessian has %d coefficients for %d columns", k, len(f.Coefficients), n))
			continue
		}
		ok := finite(f.Weight)
		for _, v := range f.Coefficients {
			ok = ok && finite(v)
		}
		if !ok {
			faults.add(NotFinite, partProblem, k, "", f.Weight, fmt.Sprintf("factor %d of the Hessian has a number that is not finite", k))
			continue
		}
		if f.Weight != 0 {
			out.weight = append(out.weight, f.Weight)
			out.factor = append(out.factor, append([]float64(nil), f.Coefficients...))
		}
	}
	if err := faults.err(); err != nil {
		return err
	}
	if len(out.value) > 0 || len(out.weight) > 0 {
		p.hessian = out
	}
	return nil
}

// Quadratic tells that the problem has a Hessian that is not zero.
func (p *Problem) Quadratic() bool { return p.hessian != nil }

// HessianEntries returns the entries of the lower triangle, rows in order, factors multiplied out.
func (p *Problem) HessianEntries() []HessianEntry {
	if p.hessian == nil {
		return nil
	}
	h := p.hessian.assembled()
	out := make([]HessianEntry, 0, len(h.value))
	for i := 0; i < h.n; i++ {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			out = append(out, HessianEntry{Row: i, Column: int(h.column[k]), Value: h.value[k]})
		}
	}
	return out
}

// hessian is the stored matrix: the lower triangle by rows, columns rising, and factors. It is never changed.
type hessian struct {
	n      int
	start  []int
	column []int32
	value  []float64
	weight []float64
	factor [][]float64

	once  sync.Once
	shape curvature
}

type hessianBuilder struct {
	n      int
	faults *faultList
	list   []HessianEntry
}

func (b *hessianBuilder) add(i, j int, v float64, name string) {
	if !finite(v) {
		b.faults.add(NotFinite, partColumn, i, name, v, fmt.Sprintf("the Hessian's entry (%d, %d) is not a finite number", i, j))
		return
	}
	if v != 0 {
		b.list = append(b.list, HessianEntry{max(i, j), min(i, j), v})
	}
}

func (b *hessianBuilder) dense(a []float64) {
	if len(a) == 0 {
		return
	}
	n := b.n
	b.list = make([]HessianEntry, 0, n*(n+1)/2+n)
	for i := 0; i < n; i++ {
		for j := 0; j <= i; j++ {
			v, w := a[i*n+j], a[j*n+i]
			if finite(v) && finite(w) && !(math.Abs(v-w) <= symmetryTolerance*math.Max(math.Abs(v), math.Abs(w))) {
				b.faults.add(BadHessian, partColumn, i, "", v, fmt.Sprintf("the Hessian is not symmetric: (%d, %d) is %v and (%d, %d) is %v", i, j, v, j, i, w))
				continue
			}
			b.add(i, j, v/2+w/2, "")
		}
	}
}

// placeOrder orders entries by row and column.
func placeOrder(x, y HessianEntry) int {
	if x.Row != y.Row {
		return x.Row - y.Row
	}
	return x.Column - y.Column
}

func sortPlaces(list []HessianEntry) {
	if !slices.IsSortedFunc(list, placeOrder) {
		slices.SortStableFunc(list, placeOrder)
	}
}

func (b *hessianBuilder) entries(given []HessianEntry) {
	list := make([]HessianEntry, 0, len(given))
	for _, e := range given {
		if e.Row < 0 || e.Row >= b.n || e.Column < 0 || e.Column >= b.n {
			b.faults.add(BadSize, partProblem, 0, "", e.Value, fmt.Sprintf("the Hessian's entry (%d, %d) is outside its %d columns", e.Row, e.Column, b.n))
			continue
		}
		list = append(list, HessianEntry{max(e.Row, e.Column), min(e.Row, e.Column), e.Value})
	}
	sortPlaces(list)
	for k, e := range list {
		if k > 0 && placeOrder(e, list[k-1]) == 0 {
			b.faults.add(BadHessian, partColumn, e.Row, "", e.Value, fmt.Sprintf("the Hessian's entry (%d, %d) is given twice", e.Row, e.Column))
			continue
		}
		b.add(e.Row, e.Column, e.Value, "")
	}
}

// finish sorts the entries and adds up those of different parts at one place.
func (b *hessianBuilder) finish() *hessian {
	sortPlaces(b.list)
	h := &hessian{n: b.n, start: make([]int, b.n+1), column: make([]int32, 0, len(b.list)), value: make([]float64, 0, len(b.list))}
	for k, e := range b.list {
		if k > 0 && e.Row == b.list[k-1].Row && e.Column == b.list[k-1].Column {
			h.value[len(h.value)-1] += e.Value
			continue
		}
		h.column = append(h.column, int32(e.Column))
		h.value = append(h.value, e.Value)
		h.start[e.Row+1] = len(h.value)
	}
	for i := 1; i <= b.n; i++ {
		h.start[i] = max(h.start[i], h.start[i-1])
	}
	return h
}

// assembled returns the matrix without factors.
func (h *hessian) assembled() *hessian {
	if len(h.weight) == 0 {
		return h
	}
	n := h.n
	out := &hessian{n: n, start: make([]int, n+1), column: make([]int32, 0, n*(n+1)/2), value: make([]float64, 0, n*(n+1)/2)}
	row := make([]float64, n)
	for i := 0; i < n; i++ {
		clear(row)
		for k := h.start[i]; k < h.start[i+1]; k++ {
			row[h.column[k]] = h.value[k]
		}
		for k, f := range h.factor {
			if g := h.weight[k] * f[i]; g != 0 {
				addScaled(row[:i+1], g, f)
			}
		}
		for j, v := range row[:i+1] {
			if v != 0 {
				out.column = append(out.column, int32(j))
				out.value = append(out.value, v)
			}
		}
		out.start[i+1] = len(out.value)
	}
	return out
}

// times sets y to H x.
func (h *hessian) times(y, x []float64) {
	clear(y)
	for i := 0; i < h.n; i++ {
		xi, sum := x[i], 0.0
		for k := h.start[i]; k < h.start[i+1]; k++ {
			j, v := h.column[k], h.value[k]
			if int(j) == i {
				sum += v * xi
				continue
			}
			sum += v * x[j]
			y[j] += v * xi
		}
		y[i] += sum
	}
	for k, f := range h.factor {
		if g := h.weight[k] * dot(f, x); g != 0 {
			addScaled(y, g, f)
		}
	}
}

// diagonal returns the diagonal, factors included.
func (h *hessian) diagonal() []float64 {
	d := make([]float64, h.n)
	for i := range d {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			if int(h.column[k]) == i {
				d[i] = h.value[k]
			}
		}
		for k, f := range h.factor {
			d[i] += h.weight[k] * f[i] * f[i]
		}
	}
	return d
}
