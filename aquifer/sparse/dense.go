package sparse

import "math"

// blockColumns is the number of columns that a front eliminates before it updates the rest: large enough to use each
// entry of the rest often, small enough for a block of a thousand rows to stay in the second-level cache.
const blockColumns = 64

// minimumPivotShare is the least pivot accepted, as a share of the diagonal entry that it started from. A pivot is left
// over when products are taken from that entry, each with an error of half a unit of rounding; what is below
// four units is error alone, and its sign means nothing.
const minimumPivotShare = 4 * 0x1p-52

// update subtracts a bᵀ from four columns of c: c[i+ldc q] -= Σk a[i+lda k] b[4k+q] for m rows and depth k, the sum in the
// order of k.
func update(c []float64, ldc int, a []float64, lda int, b []float64, m, depth int) {
	if !wide {
		updatePlain(c, ldc, a, lda, b, m, depth)
		return
	}
	_, _, _ = c[3*ldc+m-1], a[(depth-1)*lda+m-1], b[4*depth-1]
	updateAVX(&c[0], ldc, &a[0], lda, &b[0], m, depth)
}

// updateNarrow does the same for w < 4 columns, by way of a copy in spare.
func updateNarrow(c []float64, ldc int, a []float64, lda int, b []float64, m, depth, w int, spare []float64) {
	for q := range w {
		copy(spare[q*m:(q+1)*m], c[q*ldc:q*ldc+m])
	}
	clear(spare[w*m : 4*m])
	update(spare, m, a, lda, b, m, depth)
	for q := range w {
		copy(c[q*ldc:q*ldc+m], spare[q*m:(q+1)*m])
	}
}

// updatePlain is the portable form of update.
func updatePlain(c []float64, ldc int, a []float64, lda int, b []float64, m, depth int) {
	c0, c1, c2, c3 := c[:m], c[ldc:ldc+m], c[2*ldc:2*ldc+m], c[3*ldc:3*ldc+m]
	i := 0
	for ; i+2 <= m; i += 2 {
		s00, s01, s02, s03 := c0[i], c1[i], c2[i], c3[i]
		s10, s11, s12, s13 := c0[i+1], c1[i+1], c2[i+1], c3[i+1]
		at := i
		for k := 0; k < 4*depth; k += 4 {
			f, v := b[k:k+4:k+4], a[at:at+2:at+2]
			s00 -= float64(v[0] * f[0])
			s01 -= float64(v[0] * f[1])
			s02 -= float64(v[0] * f[2])
			s03 -= float64(v[0] * f[3])
			s10 -= float64(v[1] * f[0])
			s11 -= float64(v[1] * f[1])
			s12 -= float64(v[1] * f[2])
			s13 -= float64(v[1] * f[3])
			at += lda
		}
		c0[i], c1[i], c2[i], c3[i] = s00, s01, s02, s03
		c0[i+1], c1[i+1], c2[i+1], c3[i+1] = s10, s11, s12, s13
	}
	for ; i < m; i++ {
		s0, s1, s2, s3 := c0[i], c1[i], c2[i], c3[i]
		for k := range depth {
			v := a[i+k*lda]
			s0 -= float64(v * b[4*k])
			s1 -= float64(v * b[4*k+1])
			s2 -= float64(v * b[4*k+2])
			s3 -= float64(v * b[4*k+3])
		}
		c0[i], c1[i], c2[i], c3[i] = s0, s1, s2, s3
	}
}

// packRows copies w rows from row r of depth columns into b, four a column, zeros where w < 4.
func packRows(b, a []float64, lda, r, w, depth int) {
	if w == 4 {
		for k := range depth {
			*(*[4]float64)(b[4*k:]) = *(*[4]float64)(a[k*lda+r:])
		}
		return
	}
	for k := range depth {
		var row [4]float64
		copy(row[:w], a[k*lda+r:k*lda+r+w])
		copy(b[4*k:4*k+4], row[:])
	}
}

// eliminate factors w <= 4 columns of rows entries each, ld apart, whose first w rows are their triangle. scale holds the
// diagonal entries that the pivots started from. It returns the first column whose pivot is refused and the pivot, or -1.
func eliminate(c []float64, ld, rows, w int, scale []float64) (int, float64) {
	var inverse [4]float64
	for q := range w {
		col := c[q*ld : q*ld+w]
		pivot := col[q]
		if !(pivot > minimumPivotShare*scale[q] && pivot <= math.MaxFloat64) {
			return q, pivot
		}
		col[q] = math.Sqrt(pivot)
		inverse[q] = 1 / col[q]
		for i := q + 1; i < w; i++ {
			col[i] *= inverse[q]
		}
		for r := q + 1; r < w; r++ {
			for i := r; i < w; i++ {
				c[r*ld+i] -= float64(col[i] * col[r])
			}
		}
	}
	if w < 4 {
		for q := range w {
			for i := w; i < rows; i++ {
				sum := c[q*ld+i]
				for k := range q {
					sum -= float64(c[k*ld+i] * c[k*ld+q])
				}
				c[q*ld+i] = sum * inverse[q]
			}
		}
		return -1, 0
	}
	l10, l20, l30, l21, l31, l32 := c[1], c[2], c[3], c[ld+2], c[ld+3], c[2*ld+3]
	c0, c1, c2, c3 := c[4:rows], c[ld+4:ld+rows], c[2*ld+4:2*ld+rows], c[3*ld+4:3*ld+rows]
	for i := range c0 {
		v0 := c0[i] * inverse[0]
		v1 := (c1[i] - float64(v0*l10)) * inverse[1]
		v2 := (c2[i] - float64(v0*l20) - float64(v1*l21)) * inverse[2]
		v3 := (c3[i] - float64(v0*l30) - float64(v1*l31) - float64(v2*l32)) * inverse[3]
		c0[i], c1[i], c2[i], c3[i] = v0, v1, v2, v3
	}
	return -1, 0
}
