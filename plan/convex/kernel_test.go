package convex

import (
	"math"
	"math/rand/v2"
	"testing"
)

// rotationError bounds the residual |K x - b| / (|K| |x|) after some hundred updates: each adds a few units of rounding.
const rotationError = 1e-12

func checkKernel(t *testing.T, f *kernel, a [][]float64, rng *rand.Rand) {
	t.Helper()
	k := len(a)
	if f.k != k {
		t.Fatalf("kernel has size %d, want %d", f.k, k)
	}
	b, x := make([]float64, k), make([]float64, k)
	for i := range b {
		b[i] = rng.NormFloat64()
	}
	f.solve(x, b)
	scale := 1.0
	for i := range x {
		scale = math.Max(scale, math.Abs(x[i]))
	}
	for i := range a {
		if r := dot(a[i], x) - b[i]; !(math.Abs(r) <= rotationError*scale*float64(k)) {
			t.Fatalf("size %d: residual %g of row %d against scale %g", k, r, i, scale)
		}
	}
	f.solveTransposed(x, b)
	scale = 1
	for i := range x {
		scale = math.Max(scale, math.Abs(x[i]))
	}
	for j := 0; j < k; j++ {
		r := -b[j]
		for i := range a {
			r += a[i][j] * x[i]
		}
		if !(math.Abs(r) <= rotationError*scale*float64(k)) {
			t.Fatalf("size %d: transposed residual %g of column %d against scale %g", k, r, j, scale)
		}
	}
}

// TestKernelUpdates follows a long random walk of the four kinds of change and compares solves with the matrix itself.
func TestKernelUpdates(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 14))
	random := func(n int) []float64 {
		v := make([]float64, n)
		for i := range v {
			v[i] = rng.NormFloat64()
		}
		return v
	}
	var f kernel
	var a [][]float64
	for step := 0; step < 1500; step++ {
		k := len(a)
		switch kind := rng.IntN(4); {
		case k < 2 || (kind == 0 && k < 30):
			col, row, corner := random(k), random(k), rng.NormFloat64()+3
			f.grow(col, row, corner)
			for i := range a {
				a[i] = append(a[i], col[i])
			}
			a = append(a, append(row, corner))
		case kind == 1:
			c, col := rng.IntN(k), random(k)
			f.replaceColumn(c, col)
			for i := range a {
				a[i] = append(append(a[i][:c], a[i][c+1:]...), col[i])
			}
		case kind == 2:
			r := rng.IntN(k)
			a[r] = random(k)
			f.replaceRow(r, a[r])
		case kind == 3:
			c, r := rng.IntN(k), rng.IntN(k)
			f.shrink(c, r)
			a[r] = a[k-1]
			a = a[:k-1]
			for i := range a {
				a[i] = append(a[i][:c], a[i][c+1:]...)
			}
		}
		checkKernel(t, &f, a, rng)
	}
	flat := []float64{}
	for _, row := range a {
		flat = append(flat, row...)
	}
	f.factor(len(a), flat)
	checkKernel(t, &f, a, rng)
}
