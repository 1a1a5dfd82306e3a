package sparse

import (
	"math"
	"slices"
	"testing"
)

// The assembly makes the operations of the portable code in the same order, so results are the same to the last bit.

func TestUpdateEqualsPlain(t *testing.T) {
	if !wide {
		t.Skip("no AVX: only the portable code exists here")
	}
	for m := 1; m <= 27; m++ {
		for _, depth := range []int{1, 2, 3, 7, 64} {
			ldc, lda := m+3, m+5
			a, b := randomVector(lda*depth, uint64(m)), randomVector(4*depth, 5)
			c := randomVector(4*ldc, uint64(depth))
			want := slices.Clone(c)
			update(c, ldc, a, lda, b, m, depth)
			updatePlain(want, ldc, a, lda, b, m, depth)
			if !sameBits(c, want) {
				t.Fatalf("%d rows, depth %d: assembly and portable code differ", m, depth)
			}
		}
	}
}

func TestSubstitutionEqualsPlain(t *testing.T) {
	if !wide {
		t.Skip("no AVX: only the portable code exists here")
	}
	for m := 1; m <= 21; m++ {
		for w := 1; w <= 4; w++ {
			ld := m + w
			l := randomVector(ld*w+kernelReach(ld), uint64(m))
			x := randomVector((ld+3)*panelWidth, uint64(w))
			for name, both := range map[string][2]func(x []float64){
				"forward rows": {
					func(x []float64) { forwardRows(x[w*panelWidth:], l[w:], ld, x, m, w) },
					func(x []float64) { forwardRowsPlain(x[w*panelWidth:], l[w:], ld, x, m, w) }},
				"backward rows": {
					func(x []float64) { backwardRows(x, l[w:], ld, x[w*panelWidth:], m, w) },
					func(x []float64) { backwardRowsPlain(x, l[w:], ld, x[w*panelWidth:], m, w) }},
				"forward triangle": {
					func(x []float64) { forwardTriangle(x, l, ld, w) },
					func(x []float64) { forwardTrianglePlain(x, l, ld, w) }},
				"backward triangle": {
					func(x []float64) { backwardTriangle(x, l, ld, w) },
					func(x []float64) { backwardTrianglePlain(x, l, ld, w) }},
			} {
				got, want := slices.Clone(x), slices.Clone(x)
				both[0](got)
				both[1](want)
				if !sameBits(got[:ld*panelWidth], want[:ld*panelWidth]) {
					t.Errorf("%s: %d rows, %d columns: assembly and portable code differ", name, m, w)
				}
			}
		}
	}
}

func TestGatherAndScatterRows(t *testing.T) {
	x := randomVector(9*panelWidth, 1)
	rows := []int32{0, 3, 4, 8}
	y := make([]float64, len(rows)*panelWidth)
	gatherRows(y, x, rows)
	out := make([]float64, len(x))
	scatterRows(out, y, rows)
	for i := range int32(9) {
		want := make([]float64, panelWidth)
		if k := slices.Index(rows, i); k >= 0 {
			copy(want, x[i*panelWidth:])
			if !sameBits(y[k*panelWidth:(k+1)*panelWidth], want) {
				t.Errorf("row %d is not gathered", i)
			}
		}
		if !sameBits(out[i*panelWidth:(i+1)*panelWidth], want) {
			t.Errorf("row %d is not scattered", i)
		}
	}
}

func sameBits(a, b []float64) bool {
	return slices.EqualFunc(a, b, func(x, y float64) bool { return math.Float64bits(x) == math.Float64bits(y) })
}
