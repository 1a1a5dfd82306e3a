package convex

import "math"

// kernel is an orthogonal factorisation of the square block K of a basis: the active rows by the basic columns, in the order in
// which the engine lists them. It keeps Q'K = R with R upper triangular. Every change of a row or a column is made by plane
// rotations in O(k²), which is backward stable, so that no growth of rounding has to be watched between factorisations.
//
// Source: Gill, Golub, Murray & Saunders (1974), Methods for modifying matrix factorizations; Golub & Van Loan, section 12.5.
type kernel struct {
	k      int
	stride int
	q      []float64 // Q' row after row: k rows, stride apart
	r      []float64 // R row after row; entries below the diagonal are zero
	work   []float64
}

// reserve makes room for k rows and columns and keeps the content.
func (f *kernel) reserve(k int) {
	if k <= f.stride {
		return
	}
	stride := max(8, k+k/2)
	q := make([]float64, stride*stride)
	r := make([]float64, stride*stride)
	for i := 0; i < f.k; i++ {
		copy(q[i*stride:i*stride+f.k], f.qRow(i))
		copy(r[i*stride:i*stride+f.k], f.rRow(i))
	}
	f.stride, f.q, f.r, f.work = stride, q, r, make([]float64, stride)
}

func (f *kernel) qRow(i int) []float64 { return f.q[i*f.stride : i*f.stride+f.k] }
func (f *kernel) rRow(i int) []float64 { return f.r[i*f.stride : i*f.stride+f.k] }

// rotation returns c and s with c a + s b = h and -s a + c b = 0.
func rotation(a, b float64) (c, s, h float64) {
	if b == 0 {
		return 1, 0, a
	}
	h = math.Hypot(a, b)
	return a / h, b / h, h
}

// rotate replaces x and y by c x + s y and -s x + c y.
func rotate(x, y []float64, c, s float64) {
	y = y[:len(x)]
	for i, xi := range x {
		yi := y[i]
		x[i] = c*xi + s*yi
		y[i] = c*yi - s*xi
	}
}

// clearBelow makes entry (i+1, col) zero by turning rows i and i+1.
func (f *kernel) clearBelow(i, col int) {
	a, b := f.rRow(i), f.rRow(i+1)
	if b[col] == 0 {
		return
	}
	c, s, h := rotation(a[col], b[col])
	rotate(a[col:], b[col:], c, s)
	a[col], b[col] = h, 0
	rotate(f.qRow(i), f.qRow(i+1), c, s)
}

// factor starts afresh from K, given row after row (k x k). K is not kept.
func (f *kernel) factor(k int, entries []float64) {
	f.k = 0
	f.reserve(k)
	f.k = k
	for i := 0; i < k; i++ {
		copy(f.rRow(i), entries[i*k:i*k+k])
		clear(f.qRow(i))
		f.qRow(i)[i] = 1
	}
	v := make([]float64, k)
	for col := 0; col < k-1; col++ {
		f.reflect(col, v)
	}
}

// reflect makes column col of R zero below the diagonal by a Householder reflection of the rows from col on.
func (f *kernel) reflect(col int, v []float64) {
	k, norm := f.k, 0.0
	for i := col; i < k; i++ {
		v[i] = f.r[i*f.stride+col]
		norm = math.Hypot(norm, v[i])
	}
	if !(norm > 0) {
		return
	}
	head := v[col]
	if head > 0 {
		norm = -norm
	}
	v[col] = head - norm
	beta := -1 / (norm * v[col]) // 2 / v'v
	f.applyReflection(f.r, v, col, col, beta)
	f.applyReflection(f.q, v, col, 0, beta)
	f.r[col*f.stride+col] = norm
	for i := col + 1; i < k; i++ {
		f.r[i*f.stride+col] = 0
	}
}

// applyReflection replaces M by (I - beta v v')M in rows from and beyond, columns left and beyond.
func (f *kernel) applyReflection(m, v []float64, from, left int, beta float64) {
	k := f.k
	w := f.work[left:k]
	clear(w)
	for i := from; i < k; i++ {
		addScaled(w, v[i], m[i*f.stride+left:i*f.stride+k])
	}
	for i := from; i < k; i++ {
		addScaled(m[i*f.stride+left:i*f.stride+k], -beta*v[i], w)
	}
}

// solve returns x with K x = b in x; b is indexed like the rows, x like the columns. x and b may be the same slice.
func (f *kernel) solve(x, b []float64) {
	k := f.k
	w := f.work[:k]
	for i := 0; i < k; i++ {
		w[i] = dot(f.qRow(i), b)
	}
	for i := k - 1; i >= 0; i-- {
		row := f.rRow(i)
		w[i] = (w[i] - dot(row[i+1:], w[i+1:])) / row[i]
	}
	copy(x, w)
}

// solveTransposed returns y with K'y = c; c is indexed like the columns, y like the rows. y and c may be the same slice.
func (f *kernel) solveTransposed(y, c []float64) {
	k := f.k
	w := f.work[:k]
	copy(w, c)
	for i := 0; i < k; i++ {
		row := f.rRow(i)
		w[i] /= row[i]
		if w[i] != 0 {
			addScaled(w[i+1:], -w[i], row[i+1:])
		}
	}
	y = y[:k]
	clear(y)
	for i := 0; i < k; i++ {
		if w[i] != 0 {
			addScaled(y, w[i], f.qRow(i))
		}
	}
}

// dropColumn removes column t, the later ones moving up; R keeps k rows, the last of them zero in the columns that remain.
func (f *kernel) dropColumn(t int) {
	k := f.k
	for i := 0; i < k; i++ {
		row := f.rRow(i)
		copy(row[t:], row[t+1:])
		row[k-1] = 0
	}
	for i := t; i < k-1; i++ {
		f.clearBelow(i, i)
	}
}

// replaceColumn drops column t and appends the column a.
func (f *kernel) replaceColumn(t int, a []float64) {
	f.dropColumn(t)
	k := f.k
	for i := 0; i < k; i++ {
		f.r[i*f.stride+k-1] = dot(f.qRow(i), a)
	}
}

// isolateRow turns the factor so that the first row of Q' is the unit vector of row s, and the first row of R is row s of K
// itself. R becomes upper Hessenberg.
func (f *kernel) isolateRow(s int) {
	k := f.k
	for i := k - 2; i >= 0; i-- {
		a, b := f.qRow(i), f.qRow(i+1)
		if b[s] == 0 {
			continue
		}
		c, sn, _ := rotation(a[s], b[s])
		rotate(a, b, c, sn)
		b[s] = 0
		rotate(f.rRow(i)[i:], f.rRow(i + 1)[i:], c, sn)
	}
	first := f.qRow(0)
	sign := math.Copysign(1, first[s])
	clear(first)
	first[s] = sign
}

// replaceRow puts the row a in place of row s.
func (f *kernel) replaceRow(s int, a []float64) {
	f.isolateRow(s)
	sign := f.qRow(0)[s]
	first := f.rRow(0)
	for j := range first {
		first[j] = sign * a[j]
	}
	for i := 0; i < f.k-1; i++ {
		f.clearBelow(i, i)
	}
}

// grow appends the row b and the column a, with corner where they meet.
func (f *kernel) grow(a, b []float64, corner float64) {
	k := f.k
	f.reserve(k + 1)
	for i := 0; i < k; i++ {
		f.r[i*f.stride+k] = dot(f.qRow(i), a)
		f.q[i*f.stride+k] = 0
	}
	f.k = k + 1
	copy(f.rRow(k), b[:k])
	f.rRow(k)[k] = corner
	clear(f.qRow(k))
	f.qRow(k)[k] = 1
	for i := 0; i < k; i++ {
		last, row := f.rRow(k), f.rRow(i)
		if last[i] == 0 {
			continue
		}
		c, s, h := rotation(row[i], last[i])
		rotate(row[i:], last[i:], c, s)
		row[i], last[i] = h, 0
		rotate(f.qRow(i), f.qRow(k), c, s)
	}
}

// shrink drops column t, the later ones moving up, and row s, whose place the last row takes.
func (f *kernel) shrink(t, s int) {
	k := f.k
	f.dropColumn(t)
	f.isolateRow(s)
	for i := 1; i < k; i++ {
		q := f.qRow(i)
		q[s] = q[k-1]
		copy(f.q[(i-1)*f.stride:(i-1)*f.stride+k-1], q[:k-1])
		copy(f.r[(i-1)*f.stride:(i-1)*f.stride+k-1], f.rRow(i)[:k-1])
	}
	f.k = k - 1
}

// conditionGuess returns the smallest over the largest diagonal entry of R in absolute value; 1 for an empty kernel.
func (f *kernel) conditionGuess() float64 {
	small, large := math.Inf(1), 0.0
	for i := 0; i < f.k; i++ {
		v := math.Abs(f.r[i*f.stride+i])
		small, large = math.Min(small, v), math.Max(large, v)
	}
	if f.k == 0 {
		return 1
	}
	return small / large
}
