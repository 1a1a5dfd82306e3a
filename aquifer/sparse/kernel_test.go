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
	for m := 1; m <= 21; m++ {
		for w := 1; w <= 4; w++ {
			ld := m + w
			l := append(randomVector(ld*4, uint64(m)), 0, 0, 0)
			x := randomVector((ld+3)*panelWidth, uint64(w))
			forward, backward := slices.Clone(x), slices.Clone(x)
			forwardRows(forward[w*panelWidth:], l[w:], ld, forward, m, w)
			backwardRows(backward, l[w:], ld, backward[w*panelWidth:], m, w)
			for c := range panelWidth {
				for i := range m {
					want := x[(w+i)*panelWidth+c]
					for k := range w {
						want -= float64(l[w+k*ld+i] * x[k*panelWidth+c])
					}
					if got := forward[(w+i)*panelWidth+c]; got != want {
						t.Fatalf("forward, %d rows, %d columns: %v, want %v", m, w, got, want)
					}
				}
				for j := range w {
					want := x[j*panelWidth+c]
					for i := range m {
						want -= float64(l[w+j*ld+i] * x[(w+i)*panelWidth+c])
					}
					if got := backward[j*panelWidth+c]; got != want {
						t.Fatalf("backward, %d rows, %d columns: %v, want %v", m, w, got, want)
					}
				}
			}
		}
	}
}

func sameBits(a, b []float64) bool {
	return slices.EqualFunc(a, b, func(x, y float64) bool { return math.Float64bits(x) == math.Float64bits(y) })
}
