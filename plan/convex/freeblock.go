package convex

import "math"

// freeBlock is the part of the Hessian between the columns that are free to move, factored and kept up to date. Vectors have one
// entry for each column; entries of columns that are not free are not read and become zero.
type freeBlock interface {
	// reset factors for the columns that are marked; false when the block is not definite.
	reset(free []bool) bool
	add(j int) bool
	remove(j int)
	solve(v []float64)
}

// newFreeBlock chooses the form: diagonal plus factors where the matrix has it, dense up to denseFreeColumns, else nil.
func newFreeBlock(f *interiorForm) freeBlock {
	if b := newLowRankBlock(f); b != nil {
		return b
	}
	for _, w := range f.weight {
		if w != 0 {
			return nil
		}
	}
	if f.n > denseFreeColumns {
		return nil
	}
	return newDenseBlock(f)
}

// denseFreeColumns is the number of columns up to which the Hessian is kept dense, 72 MB; the interior method takes larger ones.
const denseFreeColumns = 3000

// denseBlock holds a factor of the block itself.
type denseBlock struct {
	h      [][]float64 // the whole matrix, row by row
	list   []int       // free columns in the order of the factor
	factor growingFactor
	work   []float64
}

func newDenseBlock(f *interiorForm) *denseBlock {
	n := f.n
	b := &denseBlock{h: make([][]float64, n), work: make([]float64, n)}
	all := make([]float64, n*n)
	for i := range b.h {
		b.h[i] = all[i*n : i*n+n]
	}
	for i := range b.h {
		col, val := f.h.row(i)
		for k, j := range col {
			b.h[i][j], b.h[j][i] = val[k], val[k]
		}
	}
	return b
}

func (b *denseBlock) reset(free []bool) bool {
	b.list = b.list[:0]
	for j, ok := range free {
		if ok {
			b.list = append(b.list, j)
		}
	}
	k := len(b.list)
	rows := make([][]float64, k)
	all := make([]float64, k*(k+1)/2)
	for i, r := range b.list {
		rows[i], all = all[:i+1:i+1], all[i+1:]
		for t, j := range b.list[:i+1] {
			rows[i][t] = b.h[r][j]
		}
	}
	return b.factor.factorSquare(rows)
}

func (b *denseBlock) add(j int) bool {
	for k, i := range b.list {
		b.work[k] = b.h[j][i]
	}
	b.work = append(b.work[:len(b.list)], b.h[j][j])
	ok := b.factor.append(b.work)
	b.work = b.work[:cap(b.work)]
	if ok {
		b.list = append(b.list, j)
	}
	return ok
}

func (b *denseBlock) remove(j int) {
	for p, i := range b.list {
		if i == j {
			b.factor.delete(p)
			b.list = append(b.list[:p], b.list[p+1:]...)
			return
		}
	}
}

func (b *denseBlock) solve(v []float64) {
	k := len(b.list)
	for t, j := range b.list {
		b.work[t] = v[j]
	}
	b.factor.solve(b.work[:k])
	clear(v)
	for t, j := range b.list {
		v[j] = b.work[t]
	}
}

// lowRankBlock is D + F'WF with a positive diagonal D: its inverse needs only a factor of W^-1 + F D^-1 F', as large as the number of
// factors (Woodbury 1950).
type lowRankBlock struct {
	d      []float64
	byCol  [][]float64 // by column: its entries in the factors, times the roots of their weights
	free   []bool
	small  growingFactor
	spoilt bool
	t      []float64
}

func newLowRankBlock(f *interiorForm) *lowRankBlock {
	b := &lowRankBlock{d: make([]float64, f.n), free: make([]bool, f.n)}
	for i := range b.d {
		col, val := f.h.row(i)
		if len(col) != 1 || int(col[0]) != i || !(val[0] > 0) {
			return nil
		}
		b.d[i] = val[0]
	}
	var rows []int
	for i, w := range f.weight {
		if w > 0 {
			rows = append(rows, i)
		}
	}
	k := len(rows)
	if k > f.n/2 {
		return nil
	}
	b.t = make([]float64, k)
	b.byCol = make([][]float64, f.n)
	all := make([]float64, f.n*k)
	for j := range b.byCol {
		b.byCol[j] = all[j*k : j*k+k]
	}
	for t, i := range rows {
		col, val := f.a.row(i)
		root := math.Sqrt(f.weight[i])
		for s, j := range col {
			b.byCol[j][t] = val[s] * root
		}
	}
	return b
}

func (b *lowRankBlock) reset(free []bool) bool {
	copy(b.free, free)
	b.spoilt = false
	k := len(b.t)
	rows := make([][]float64, k)
	for i := range rows {
		rows[i] = make([]float64, i+1)
		rows[i][i] = 1
	}
	for j, v := range b.byCol {
		if !free[j] {
			continue
		}
		for i, x := range v {
			if x != 0 {
				addScaled(rows[i], x/b.d[j], v)
			}
		}
	}
	return b.small.factorSquare(rows)
}

func (b *lowRankBlock) change(j int, sign float64) {
	if len(b.t) == 0 {
		return
	}
	root := math.Sqrt(b.d[j])
	for i, x := range b.byCol[j] {
		b.t[i] = x / root
	}
	if !b.small.change(sign, b.t) {
		b.spoilt = true
	}
}

func (b *lowRankBlock) add(j int) bool {
	b.free[j] = true
	b.change(j, 1)
	return true
}

func (b *lowRankBlock) remove(j int) {
	b.free[j] = false
	b.change(j, -1)
}

func (b *lowRankBlock) solve(v []float64) {
	if b.spoilt {
		b.reset(append([]bool(nil), b.free...))
	}
	clear(b.t)
	for j, ok := range b.free {
		if !ok {
			v[j] = 0
			continue
		}
		v[j] /= b.d[j]
		if v[j] != 0 {
			addScaled(b.t, v[j], b.byCol[j])
		}
	}
	b.small.solve(b.t)
	for j, ok := range b.free {
		if ok {
			v[j] -= dot(b.t, b.byCol[j]) / b.d[j]
		}
	}
}
