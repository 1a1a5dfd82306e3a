package convex

import "math"

// growingFactor is the Cholesky factor L of a symmetric definite matrix that gains and loses rows with their columns, and changes by
// products of a vector with itself. Rows of L are stored, each as long as its index plus one.
type growingFactor struct {
	rows [][]float64
	work []float64
}

// dependentPivot is the pivot, relative to the diagonal entry it comes from, below which a new row counts as dependent on the others:
// rounding of a sum of a thousand products is a hundred times smaller.
const dependentPivot = 1e-11

// append adds a row and column: entries against the present rows, then the diagonal. It is refused, with false, when the matrix would
// not be definite.
func (l *growingFactor) append(entries []float64) bool {
	k := len(l.rows)
	row := append(make([]float64, 0, k+1), entries[:k+1]...)
	for i, r := range l.rows {
		row[i] = (row[i] - dot(r[:i], row)) / r[i]
	}
	d := row[k] - dot(row[:k], row)
	if !(d > dependentPivot*row[k]) {
		return false
	}
	row[k] = math.Sqrt(d)
	l.rows = append(l.rows, row)
	return true
}

// delete takes row and column p out by plane rotations (Gill, Golub, Murray & Saunders 1974).
func (l *growingFactor) delete(p int) {
	k := len(l.rows)
	copy(l.rows[p:], l.rows[p+1:])
	l.rows = l.rows[:k-1]
	turns := make([]float64, 0, 2*(k-p))
	for i := p; i < k-1; i++ {
		row := l.rows[i]
		a := row[p]
		for q := p; q < i; q++ {
			c, s := turns[2*(q-p)], turns[2*(q-p)+1]
			b := row[q+1]
			row[q] = c*a + s*b
			a = c*b - s*a
		}
		b := row[i+1]
		h := math.Hypot(a, b)
		turns = append(turns, a/h, b/h)
		row[i] = h
		l.rows[i] = row[:i+1]
	}
}

// change adds sign v v' to the matrix; sign is +1 or -1. It reports whether the matrix stays definite; otherwise the factor is
// spoilt. v is overwritten.
func (l *growingFactor) change(sign float64, v []float64) bool {
	for j, r := range l.rows {
		d := r[j]*r[j] + sign*v[j]*v[j]
		if !(d > dependentPivot*r[j]*r[j]) {
			return false
		}
		d = math.Sqrt(d)
		c, s := d/r[j], v[j]/r[j]
		r[j] = d
		for i := j + 1; i < len(l.rows); i++ {
			w := l.rows[i]
			w[j] = (w[j] + sign*s*v[i]) / c
			v[i] = c*v[i] - s*w[j]
		}
	}
	return true
}

// solve overwrites b with the solution.
func (l *growingFactor) solve(b []float64) {
	for i, r := range l.rows {
		b[i] = (b[i] - dot(r[:i], b)) / r[i]
	}
	for i := len(l.rows) - 1; i >= 0; i-- {
		r := l.rows[i]
		b[i] /= r[i]
		addScaled(b[:i], -b[i], r)
	}
}

// factorSquare factors a whole matrix, given by its lower triangle in rows, in place: two rows at a time, so that each row read
// serves twice.
func (l *growingFactor) factorSquare(rows [][]float64) bool {
	l.rows = l.rows[:0]
	for i := 0; i < len(rows); i += 2 {
		if i+1 == len(rows) {
			if !l.append(rows[i]) {
				return false
			}
			break
		}
		a, b := rows[i], rows[i+1]
		for j, r := range l.rows {
			p, q := dotPair(r[:j], a, b)
			a[j] = (a[j] - p) / r[j]
			b[j] = (b[j] - q) / r[j]
		}
		d := a[i] - dot(a[:i], a)
		if !(d > dependentPivot*a[i]) {
			return false
		}
		a[i] = math.Sqrt(d)
		b[i] = (b[i] - dot(a[:i], b)) / a[i]
		d = b[i+1] - dot(b[:i+1], b)
		if !(d > dependentPivot*b[i+1]) {
			return false
		}
		b[i+1] = math.Sqrt(d)
		l.rows = append(l.rows, a[:i+1], b[:i+2])
	}
	return true
}

// dotPair returns x'a and x'b over the length of x.
func dotPair(x, a, b []float64) (p, q float64) {
	a, b = a[:len(x)], b[:len(x)]
	var p0, p1, q0, q1 float64
	i := 0
	for ; i+2 <= len(x); i += 2 {
		p0 += x[i] * a[i]
		q0 += x[i] * b[i]
		p1 += x[i+1] * a[i+1]
		q1 += x[i+1] * b[i+1]
	}
	if i < len(x) {
		p0 += x[i] * a[i]
		q0 += x[i] * b[i]
	}
	return p0 + p1, q0 + q1
}
