package convex

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The wide code gives the bits of the portable code for every length and with zeros and negative numbers among the entries.
func TestWideGivesTheSameBits(t *testing.T) {
	if !wide {
		t.Skip("only the portable code runs here")
	}
	rng := rand.New(rand.NewPCG(3, 9))
	random := func(n int) []float64 {
		v := make([]float64, n)
		for i := range v {
			if v[i] = rng.NormFloat64() * math.Exp(5*rng.NormFloat64()); rng.IntN(5) == 0 {
				v[i] = 0
			}
		}
		return v
	}
	same := func(what string, n int, a, b []float64) {
		for i := range a {
			if math.Float64bits(a[i]) != math.Float64bits(b[i]) {
				t.Fatalf("%s, length %d: entry %d is %v, portable %v", what, n, i, a[i], b[i])
			}
		}
	}
	for n := 0; n < 75; n++ {
		x, y, z, u, v := random(n), random(n), random(n), random(n), random(n)
		same("dot", n, []float64{dotWide(x, y)}, []float64{dotPlain(x, y)})
		a, b := append([]float64(nil), z...), append([]float64(nil), z...)
		addScaledWide(a, 1.7, x)
		addScaledPlain(b, 1.7, x)
		addScaled4Wide(a, 0.3, -1.1, 2.7, 1e-3, x, y, u, v)
		addScaled4Plain(b, 0.3, -1.1, 2.7, 1e-3, x, y, u, v)
		same("addScaled", n, a, b)
		for i := range y {
			y[i] = math.Abs(y[i])
		}
		low, high := extremesWide(x, y)
		lowPlain, highPlain := extremesPlain(x, y)
		same("extremes", n, []float64{low, high}, []float64{lowPlain, highPlain})
		small, large := append([]float64(nil), y...), append([]float64(nil), y...)
		smallPlain, largePlain := append([]float64(nil), y...), append([]float64(nil), y...)
		noteColumnsWide(x, 0.7, small, large)
		noteColumnsPlain(x, 0.7, smallPlain, largePlain)
		same("smallest", n, small, smallPlain)
		same("largest", n, large, largePlain)
	}
}

func TestAllFinite(t *testing.T) {
	for n := 1; n < 12; n++ {
		x := make([]float64, n)
		for i := range x {
			x[i] = math.MaxFloat64
		}
		if !allFinite(x) {
			t.Errorf("%d largest numbers are called infinite", n)
		}
		for i := range x {
			for _, bad := range []float64{math.Inf(1), math.Inf(-1), math.NaN()} {
				x[i] = bad
				if allFinite(x) {
					t.Errorf("%v in place %d of %d is called finite", bad, i, n)
				}
			}
			x[i] = 1
		}
	}
}
