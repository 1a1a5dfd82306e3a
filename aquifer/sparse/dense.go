package sparse

import "math"

// blockColumns is the number of columns that a front eliminates before it updates the rest: large enough to use each
// entry of the rest often, small enough for a block of a thousand rows to stay in the second-level cache.
const blockColumns = 64

// minimumPivotShare is the least pivot accepted, as a share of the diagonal entry that it started from. A pivot is left
// over when products are taken from that entry, each with an error of half a unit of rounding; what is below
// four units is error alone, and its sign means nothing.
const minimumPivotShare = 4 * 0x1p-52

// update subtracts a bᵀ from c: c[i+ldc q] -= Σk a[i+lda k] b[4k+q] for m rows, depth k and width w <= 4, the sum in the
// order of k.
func update(c []float64, ldc int, a []float64, lda int, b []float64, m, depth, w int) {
	if w == 4 {
		update4(c, ldc, a, lda, b, m, depth)
		return
	}
	for q := range w {
		col := c[q*ldc : q*ldc+m]
		for k := range depth {
			f := b[4*k+q]
			for i, v := range a[k*lda : k*lda+m] {
				col[i] -= float64(v * f)
			}
		}
	}
}

func update4(c []float64, ldc int, a []float64, lda int, b []float64, m, depth int) {
	c0, c1, c2, c3 := c[:m], c[ldc:ldc+m], c[2*ldc:2*ldc+m], c[3*ldc:3*ldc+m]
	i := 0
	for ; i+2 <= m; i += 2 {
		s00, s01, s02, s03 := c0[i], c1[i], c2[i], c3[i]
		s10, s11, s12, s13 := c0[i+1], c1[i+1], c2[i+1], c3[i+1]
		at := i
		for k := 0; k < 4*depth; k += 4 {
			f := b[k : k+4 : k+4]
			v := a[at : at+2 : at+2]
			v0, v1 := v[0], v[1]
			f0, f1, f2, f3 := f[0], f[1], f[2], f[3]
			s00 -= float64(v0 * f0)
			s01 -= float64(v0 * f1)
			s02 -= float64(v0 * f2)
			s03 -= float64(v0 * f3)
			s10 -= float64(v1 * f0)
			s11 -= float64(v1 * f1)
			s12 -= float64(v1 * f2)
			s13 -= float64(v1 * f3)
			at += lda
		}
		c0[i], c1[i], c2[i], c3[i] = s00, s01, s02, s03
		c0[i+1], c1[i+1], c2[i+1], c3[i+1] = s10, s11, s12, s13
	}
	for ; i < m; i++ {
		s0, s1, s2, s3 := c0[i], c1[i], c2[i], c3[i]
		for k := range depth {
			v := a[i+k*lda]
			f := b[4*k : 4*k+4 : 4*k+4]
			s0 -= float64(v * f[0])
			s1 -= float64(v * f[1])
			s2 -= float64(v * f[2])
			s3 -= float64(v * f[3])
		}
		c0[i], c1[i], c2[i], c3[i] = s0, s1, s2, s3
	}
}

// packRows copies w rows from row r of depth columns into b, four a column, zeros where w < 4.
func packRows(b, a []float64, lda, r, w, depth int) {
	if w == 4 {
		for k := range depth {
			copy(b[4*k:4*k+4], a[k*lda+r:k*lda+r+4])
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
	for q := range w {
		col := c[q*ld : q*ld+rows]
		pivot := col[q]
		if !(pivot > minimumPivotShare*scale[q] && pivot <= math.MaxFloat64) {
			return q, pivot
		}
		root := math.Sqrt(pivot)
		col[q] = root
		inverse := 1 / root
		below := col[q+1:]
		for i := range below {
			below[i] *= inverse
		}
		for r := q + 1; r < w; r++ {
			f := col[r]
			target := c[r*ld+r : r*ld+rows]
			for i, v := range col[r:] {
				target[i] -= float64(v * f)
			}
		}
	}
	return -1, 0
}
