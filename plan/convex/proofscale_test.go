package convex

import (
	"context"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// TestSmallBoundSetsNoScale is feasible at (0.5, -0.5). A bound of 1e-12 must not make a multiplier that meets the free column look like
// nothing when the margin of the proof is as small.
func TestSmallBoundSetsNoScale(t *testing.T) {
	p := mustProblem(t, Minimise, []Column{{Upper: inf}, {Lower: -inf, Upper: inf}},
		atLeast(1, 1, -1), atMost(0, -1, 1), atLeast(0, 1, 1), equal(0, 1, 1), atMost(1e-12, 1, 1))
	mustOptimal(t, p, Options{})
	s, err := SolveInterior(t.Context(), p, Options{})
	if err != nil || s.Status == Infeasible || s.Status == Unbounded {
		t.Errorf("interior method: %v %v", s.Status, err)
	}
}

// TestThinProof claims the same problem infeasible by the multipliers that fell for the small bound: what meets the two columns without
// bound is nothing beside the largest multiplier, and yet a half in each of them makes more of it than the whole margin.
func TestThinProof(t *testing.T) {
	p := mustProblem(t, Minimise, []Column{{Upper: inf}, {Lower: -inf, Upper: inf}},
		atLeast(1, 1, -1), atMost(0, -1, 1), atLeast(0, 1, 1), equal(0, 1, 1), atMost(1e-12, 1, 1))
	for _, large := range []float64{1, 1e6, 1e9, 1e12, 1e15} {
		s := emptySolution(p, Infeasible)
		s.Ray = &Ray{Rows: []float64{-1, 0, -large, large, 0}, Columns: []float64{1, -1}}
		if c := Certify(p, s); c.Accepted || !(c.ProofStray > CertifiedStray) {
			t.Errorf("multipliers of %g: a proof against a feasible problem: %+v", large, c)
		}
	}
}

// magnitude returns a power of two between about 1e-12 and 1e12, most often one.
func magnitude(rng *rand.Rand) float64 {
	if rng.IntN(2) == 0 {
		return 1
	}
	return math.Ldexp(1, rng.IntN(81)-40)
}

// exactActivity returns the row times x, and whether a float64 holds it.
func exactActivity(a, x []float64) (v float64, exact bool) {
	sum := new(big.Rat)
	for j := range a {
		term := new(big.Rat).SetFloat64(a[j])
		sum.Add(sum, term.Mul(term, new(big.Rat).SetFloat64(x[j])))
	}
	return sum.Float64()
}

// feasibleByDesign makes a problem around a point that meets all of it exactly: bounds from 1e-12 to 1e12, free columns, tight rows,
// equations that repeat or add up.
func feasibleByDesign(t testing.TB, rng *rand.Rand, n, m int) *Problem {
	columns, x := make([]Column, n), make([]float64, n)
	mixed := rng.IntN(3) > 0
	size := func() float64 {
		if mixed {
			return magnitude(rng)
		}
		return 1
	}
	room := func() float64 { // zero, little or much
		return float64(rng.IntN(3)) * size()
	}
	for j := range columns {
		x[j] = float64(rng.IntN(9)-4) / 2 * size()
		c := Column{Cost: float64(rng.IntN(3) - 1), Lower: x[j] - room(), Upper: x[j] + room()}
		switch rng.IntN(6) {
		case 0:
			c.Lower, c.Upper = -inf, inf
		case 1:
			c.Upper = inf
		case 2:
			c.Lower = -inf
		case 3:
			c.Lower, c.Upper = math.Min(0, x[j]), inf
		}
		columns[j] = c
	}
	if rng.IntN(2) == 0 {
		for j := range columns {
			columns[j].Cost = 0
		}
	}
	p := mustProblem(t, Minimise, columns)
	add := func(a []float64, kind int) {
		v, exact := exactActivity(a, x)
		r := Row{Coefficients: a, Lower: v, Upper: v}
		if !exact {
			r.Lower, r.Upper = math.Nextafter(v, -inf), math.Nextafter(v, inf)
		}
		switch kind {
		case 0:
			r.Lower, r.Upper = r.Lower-room(), inf
		case 1:
			r.Lower, r.Upper = -inf, r.Upper+room()
		case 2:
			r.Lower, r.Upper = r.Lower-room(), r.Upper+room()
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	for p.Rows() < m {
		a := make([]float64, n)
		f := size()
		for j := range a {
			if rng.IntN(3) > 0 {
				a[j] = float64(rng.IntN(5)-2) * f
			}
		}
		if i := p.Rows(); i > 0 && rng.IntN(3) == 0 { // a twin, or a sum of two
			other, f := p.Row(rng.IntN(i)).Coefficients, math.Ldexp(1, rng.IntN(5)-2)
			if rng.IntN(2) == 0 {
				a = p.Row(rng.IntN(i)).Coefficients
			} else {
				clear(a)
			}
			for j := range a {
				a[j] -= f * other[j]
			}
		}
		add(a, rng.IntN(5))
	}
	return p
}

// TestFeasibleIsNeverInfeasible: whatever the sizes of bounds, no problem with a point is called infeasible, by either method; small ones
// are checked in rational arithmetic to have one.
func TestFeasibleIsNeverInfeasible(t *testing.T) {
	cases := 4000
	if long() {
		cases = 100_000
	}
	count, interior, certified := map[Status]int{}, map[Status]int{}, 0
	for seed := 0; seed < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 311))
		n, m := 1+rng.IntN(5), 1+rng.IntN(6)
		if seed%8 == 7 {
			n, m = 5+rng.IntN(25), 5+rng.IntN(25)
		}
		p := feasibleByDesign(t, rng, n, m)
		if seed%8 == 0 {
			if status, _ := exactSolve(p); status == Infeasible {
				t.Fatalf("seed %d: the problem was meant to be feasible", seed)
			}
		}
		s := mustSolve(t, p, Options{})
		count[s.Status]++
		if s.Status == Infeasible {
			t.Errorf("seed %d: called infeasible; certificate %+v", seed, Certify(p, s))
		}
		if Certify(p, s).Accepted {
			certified++
		}
		if seed%4 == 0 {
			s, err := SolveInterior(context.Background(), p, Options{})
			if err != nil {
				t.Fatal(err)
			}
			interior[s.Status]++
			if s.Status == Infeasible {
				t.Errorf("seed %d: called infeasible by the interior method; certificate %+v", seed, Certify(p, s))
			}
		}
	}
	t.Logf("simplex: %v, %d certified; interior: %v", count, certified, interior)
	if !(float64(certified) >= 0.99*float64(cases)) { // bounds twenty-four orders apart may defeat the arithmetic, now and then
		t.Errorf("only %d of %d certified", certified, cases)
	}
}
