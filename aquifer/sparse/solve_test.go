package sparse

import (
	"context"
	"testing"
)

// residualLimit bounds the scaled residual of a backward stable solve: the error of a row is at most about its number of
// terms in units of rounding (2^-53); no row of these problems has more than a few hundred terms, and errors average out.
const residualLimit = 100 * 0x1p-53

func mustFactor(t testing.TB, p problem, o Options) *Factor {
	t.Helper()
	s, err := Analyse(context.Background(), p.Pattern, p.x, p.y, o)
	if err != nil {
		t.Fatal(err)
	}
	f, err := s.Factor(context.Background(), p.Values)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestSolveMeshes(t *testing.T) {
	for _, grade := range []float64{1, 1000} {
		for _, side := range []int{1, 2, 3, 5, 11, 50, 120} {
			p := jitteredMesh(side, side+side/2, grade, uint64(side))
			for _, coordinates := range []bool{true, false} {
				if !coordinates {
					p.x, p.y = nil, nil
				}
				f := mustFactor(t, p, Options{})
				n := p.Pattern.N
				for _, k := range []int{0, 1, 3, 8, 19} {
					b := randomVector(n*k, 7)
					x := append([]float64(nil), b...)
					if err := f.Solve(context.Background(), x, k); err != nil {
						t.Fatal(err)
					}
					for c := range k {
						if r := p.Residual(x[c*n:(c+1)*n], b[c*n:(c+1)*n]); !(r <= residualLimit) {
							t.Errorf("side %d grade %g: column %d of %d has residual %g, limit %g", side, grade, c, k, r, residualLimit)
						}
					}
				}
			}
		}
	}
}
