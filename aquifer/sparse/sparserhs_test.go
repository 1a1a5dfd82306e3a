package sparse

import (
	"math"
	"testing"
)

// A right-hand side with few entries is solved by the same sums as a full one, alone or in a block, whoever its neighbours are and
// whatever the number of workers: supernodes are passed over only where everything is zero.
func TestSparseRightHandSidesGiveTheSameBits(t *testing.T) {
	for _, coordinates := range []bool{true, false} {
		p := jitteredMesh(97, 83, 50, 21) // several subtrees and rows that they share
		if !coordinates {
			p.x, p.y = nil, nil
		}
		n := p.Pattern.N
		const k = 37
		block := make([]float64, n*k)
		for c := range k {
			column := block[c*n : (c+1)*n]
			switch c % 4 {
			case 0: // one place
				column[(c*7919)%n] = 1 + float64(c)
			case 1: // full
				copy(column, randomVector(n, uint64(c)))
			case 2: // a few, among zeros of both signs
				for i := range column {
					column[i] = math.Copysign(0, float64(i%3)-1)
				}
				column[(c*104729)%n], column[n-1-c] = -2, 3
			} // and nothing at all
		}
		var first []float64
		for _, workers := range []int{1, 2, 5} {
			f := mustFactor(t, p, Options{Workers: workers})
			if len(f.symbolic.schedule.runs) == 1 {
				t.Fatal("the mesh is one subtree; the test says nothing")
			}
			whole := mustSolve(t, f, block, k)
			if first == nil {
				first = whole
			}
			for i, v := range whole {
				if math.Float64bits(v) != math.Float64bits(first[i]) {
					t.Fatalf("%d workers: column %d row %d is %v, by one worker %v", workers, i/n, i%n, v, first[i])
				}
			}
			for c := range k {
				alone := mustSolve(t, f, block[c*n:(c+1)*n], 1)
				for i, v := range alone {
					if math.Float64bits(v) != math.Float64bits(whole[c*n+i]) {
						t.Fatalf("%d workers: column %d row %d is %v alone, %v in the block", workers, c, i, v, whole[c*n+i])
					}
				}
			}
		}
		for c := range k {
			// Backward stable substitution: some units of rounding for each of the ten or so entries of a row.
			if r := p.Residual(first[c*n:(c+1)*n], block[c*n:(c+1)*n]); !(r <= 100*0x1p-53) {
				t.Errorf("column %d: residual %g", c, r)
			}
		}
	}
}
