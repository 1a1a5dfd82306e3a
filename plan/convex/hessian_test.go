package convex

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

// TestHessianFaults gives every kind of bad data; the problem stays linear.
func TestHessianFaults(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name   string
		h      Hessian
		faults int
		kind   Fault
	}{
		{"wrong size", Hessian{Dense: []float64{1, 2, 3}}, 1, BadSize},
		{"wrong diagonal", Hessian{Diagonal: []float64{1}}, 1, BadSize},
		{"not symmetric", Hessian{Dense: []float64{1, 2, 3, 1}}, 1, BadHessian},
		{"not a number", Hessian{Dense: []float64{nan, 2, 2, 1}}, 1, NotFinite},
		{"infinite", Hessian{Diagonal: []float64{inf, -inf}}, 2, NotFinite},
		{"outside", Hessian{Entries: []HessianEntry{{0, 2, 1}, {-1, 0, 1}}}, 2, BadSize},
		{"mirrored", Hessian{Entries: []HessianEntry{{0, 1, 1}, {1, 0, 1}}}, 1, BadHessian},
		{"short factor", Hessian{Factors: []HessianFactor{{1, []float64{1}}}}, 1, BadSize},
		{"infinite factor", Hessian{Factors: []HessianFactor{{1, []float64{1, inf}}, {nan, []float64{1, 1}}}}, 2, NotFinite},
		{"all at once", Hessian{Dense: []float64{1}, Diagonal: []float64{nan, 1}, Entries: []HessianEntry{{5, 5, 1}}}, 3, BadSize},
	} {
		p := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}})
		err := p.SetHessian(c.h)
		var data *DataError
		if !errors.As(err, &data) || len(data.Faults) != c.faults || data.Faults[0].Kind != c.kind {
			t.Errorf("%s: %v", c.name, err)
		}
		if p.Quadratic() {
			t.Errorf("%s: a bad Hessian was kept", c.name)
		}
	}
	p := mustProblem(t, Minimise, []Column{{Upper: 1}})
	if err := p.SetHessian(Hessian{Diagonal: []float64{1}}); err != nil {
		t.Fatal(err)
	}
	if err := p.SetHessian(Hessian{Diagonal: []float64{1}}); err == nil {
		t.Error("a second Hessian was taken")
	}
}

// TestHessianParts compares the product with the sum of the parts, multiplied out.
func TestHessianParts(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 17))
	const n = 7
	h := Hessian{Dense: make([]float64, n*n), Diagonal: make([]float64, n), Entries: []HessianEntry{{2, 5, 0.5}, {6, 6, -1}, {3, 0, 2}}}
	full := make([]float64, n*n)
	for i := range n {
		for j := range i + 1 {
			v := rng.NormFloat64()
			h.Dense[i*n+j], h.Dense[j*n+i] = v, v
		}
		h.Diagonal[i] = rng.NormFloat64()
	}
	copy(full, h.Dense)
	for i := range n {
		full[i*n+i] += h.Diagonal[i]
	}
	for _, e := range h.Entries {
		full[e.Row*n+e.Column] += e.Value
		if e.Row != e.Column {
			full[e.Column*n+e.Row] += e.Value
		}
	}
	for k := range 3 {
		f := HessianFactor{Weight: float64(k) - 0.5, Coefficients: make([]float64, n)}
		for j := range f.Coefficients {
			f.Coefficients[j] = rng.NormFloat64()
		}
		h.Factors = append(h.Factors, f)
		for i := range n {
			for j := range n {
				full[i*n+j] += f.Weight * f.Coefficients[i] * f.Coefficients[j]
			}
		}
	}
	p := mustProblem(t, Minimise, make([]Column, n))
	if err := p.SetHessian(h); err != nil {
		t.Fatal(err)
	}
	x, y := make([]float64, n), make([]float64, n)
	for j := range x {
		x[j] = rng.NormFloat64()
	}
	for name, m := range map[string]*hessian{"with factors": p.hessian, "multiplied out": p.hessian.assembled()} {
		m.times(y, x)
		for i := range y {
			want := dot(full[i*n:i*n+n], x)
			if math.Abs(y[i]-want) > 1e-13*10 { // sums of about twenty terms near one
				t.Errorf("%s: row %d: %v, want %v", name, i, y[i], want)
			}
		}
	}
	for _, e := range p.HessianEntries() {
		if math.Abs(e.Value-full[e.Row*n+e.Column]) > 1e-14*10 {
			t.Errorf("entry %v, want %v", e, full[e.Row*n+e.Column])
		}
	}
}

// TestCurvatureOfRandomMatrices compares with the sign of the least eigenvalue, known by construction: Q diag Q' for a product of
// reflections Q.
func TestCurvatureOfRandomMatrices(t *testing.T) {
	for seed := uint64(0); seed < 60; seed++ {
		rng := rand.New(rand.NewPCG(seed, 18))
		n := 2 + rng.IntN(12)
		least := []float64{-1, -1e-6, 0, 1e-3}[rng.IntN(4)]
		h := make([]float64, n*n)
		for i := range n {
			h[i*n+i] = 1 + 9*rng.Float64()
		}
		h[0] = least
		for range 3 {
			reflect2(h, n, rng)
		}
		for i := range n {
			for j := range i {
				h[j*n+i] = h[i*n+j]
			}
		}
		p := mustProblem(t, Minimise, make([]Column, n))
		if err := p.SetHessian(Hessian{Dense: h}); err != nil {
			t.Fatal(err)
		}
		c := p.curvature()
		if c.convex != (least >= 0) {
			t.Errorf("seed %d: least eigenvalue %v called convex %v", seed, least, c.convex)
		}
		if !c.convex {
			mustCertify(t, p, notConvex(p, c))
		} else if c.strict != (least > 0) {
			t.Errorf("seed %d: least eigenvalue %v called definite %v", seed, least, c.strict)
		}
	}
}

// reflect2 replaces h by P h P with a random reflection P = 1 - 2 vv'/v'v.
func reflect2(h []float64, n int, rng *rand.Rand) {
	v := make([]float64, n)
	for i := range v {
		v[i] = rng.NormFloat64()
	}
	f := 2 / dot(v, v)
	for i := range n {
		row := h[i*n : i*n+n]
		addScaled(row, -f*dot(row, v), v)
	}
	for j := range n {
		sum := 0.0
		for i := range n {
			sum += h[i*n+j] * v[i]
		}
		for i := range n {
			h[i*n+j] -= f * sum * v[i]
		}
	}
}
