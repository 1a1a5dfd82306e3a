package convex

import (
	"context"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
)

// agreement of two methods: each is certified to a gap of CertifiedGap.
const methodsAgree = 2 * CertifiedGap

// randomQuadratic makes a problem with a definite Hessian: a product of a random factor plus a diagonal, rows and bounds of all kinds.
// A point inside all of them exists unless tight.
func randomQuadratic(t testing.TB, rng *rand.Rand, n, m int) *Problem {
	t.Helper()
	point := make([]float64, n)
	columns := make([]Column, n)
	for j := range columns {
		point[j] = rng.NormFloat64()
		columns[j] = Column{Cost: 3 * rng.NormFloat64(), Lower: -inf, Upper: inf}
		switch rng.IntN(6) {
		case 0:
			columns[j].Lower, columns[j].Upper = point[j], point[j]
		case 1:
			columns[j].Lower = point[j] - rng.Float64()
		case 2:
			columns[j].Upper = point[j] + rng.Float64()
		case 3, 4:
			columns[j].Lower, columns[j].Upper = point[j]-rng.Float64(), point[j]+rng.Float64()
		}
	}
	p := mustProblem(t, Minimise, columns)
	equations := 0
	for i := 0; i < m; i++ {
		a := make([]float64, n)
		value := 0.0
		for j := range a {
			if rng.IntN(3) > 0 {
				a[j] = rng.NormFloat64()
				value += a[j] * point[j]
			}
		}
		r := Row{Coefficients: a, Lower: -inf, Upper: value + rng.Float64()/2}
		switch k := rng.IntN(5); {
		case k == 0 && equations < n/4:
			r.Lower, r.Upper = value, value
			equations++
		case k == 1:
			r.Lower, r.Upper = value-rng.Float64()/2, inf
		case k == 2:
			r.Lower = value - rng.Float64()
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	h := Hessian{Diagonal: make([]float64, n)}
	for j := range h.Diagonal {
		h.Diagonal[j] = 0.05 + rng.Float64()
	}
	for range rng.IntN(n) {
		f := HessianFactor{Weight: rng.Float64(), Coefficients: make([]float64, n)}
		for j := range f.Coefficients {
			f.Coefficients[j] = rng.NormFloat64()
		}
		h.Factors = append(h.Factors, f)
	}
	if err := p.SetHessian(h); err != nil {
		t.Fatal(err)
	}
	return p
}

// TestRandomDefinite solves by the active set, with the Hessian as factors and multiplied out, and by the interior method.
func TestRandomDefinite(t *testing.T) {
	cases, steps := 150, 0
	if long() {
		cases = 3000
	}
	for seed := 0; seed < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 11))
		p := randomQuadratic(t, rng, 2+rng.IntN(25), rng.IntN(30))
		d := denseCopy(t, p)
		var answers [3]*Solution
		answers[0] = activeOptimum(context.Background(), p, p.curvature().form, Options{})
		answers[1] = activeOptimum(context.Background(), d, d.curvature().form, Options{})
		answers[2], _ = SolveInterior(context.Background(), p, Options{})
		for k, s := range answers {
			if s == nil || s.Status != Optimal {
				t.Fatalf("seed %d: method %d: %+v", seed, k, s)
			}
			mustCertify(t, p, s)
			steps += s.Iterations * (1 - k/2)
			if !near(s.Objective, answers[0].Objective, methodsAgree) && math.Abs(s.Objective-answers[0].Objective) > methodsAgree {
				t.Errorf("seed %d: method %d finds %.15g, the first %.15g", seed, k, s.Objective, answers[0].Objective)
			}
		}
	}
	if steps < cases {
		t.Errorf("only %d dual steps in %d problems: the method proper was hardly tried", steps, cases)
	}
}

// TestStartFromActiveSet restarts from the active set of the answer, from that of a neighbour, and from the basis of the linear
// programme; the answer is the same.
func TestStartFromActiveSet(t *testing.T) {
	for seed := uint64(0); seed < 40; seed++ {
		rng := rand.New(rand.NewPCG(seed, 12))
		p := randomQuadratic(t, rng, 12, 10)
		s := mustOptimal(t, p, Options{})
		again := mustOptimal(t, p, Options{Start: s.Basis})
		if again.Iterations != 0 || !near(again.Objective, s.Objective, 1e-12) {
			t.Errorf("seed %d: %d steps from the answer's own active set, objective %.15g and %.15g", seed, again.Iterations, again.Objective, s.Objective)
		}
		linear := p.Clone()
		linear.hessian = nil
		for j := range linear.columns {
			linear.columns[j].Lower = math.Max(linear.columns[j].Lower, -50)
			linear.columns[j].Upper = math.Min(linear.columns[j].Upper, 50)
		}
		from := mustOptimal(t, p, Options{Start: mustSolve(t, linear, Options{}).Basis})
		if !near(from.Objective, s.Objective, methodsAgree) {
			t.Errorf("seed %d: %.15g from the basis of the linear programme, %.15g from nothing", seed, from.Objective, s.Objective)
		}
	}
}

// TestPricesAreDerivatives moves the binding bounds a little each way: the objective follows the price.
func TestPricesAreDerivatives(t *testing.T) {
	p := benchmarkFour(t, 1000)
	s := mustOptimal(t, p, Options{})
	const step = 1e-3
	for i := range p.Rows() {
		r := p.Row(i)
		if s.RowPrice[i] == 0 {
			continue
		}
		h := step * math.Abs(r.Upper)
		value := func(by float64) float64 {
			q := p.Clone()
			lower := r.Lower
			if lower == r.Upper {
				lower += by
			}
			if err := q.SetRowBounds(i, lower, r.Upper+by); err != nil {
				t.Fatal(err)
			}
			return mustOptimal(t, q, Options{}).Objective
		}
		// The objective is quadratic in the bound while the active set stays, so that the central difference is exact.
		if got := (value(h) - value(-h)) / (2 * h); !near(got, s.RowPrice[i], 1e-7) {
			t.Errorf("row %d: difference %.12g, price %.12g", i, got, s.RowPrice[i])
		}
	}
}

// TestUnitsOfQuadratic changes the units of rates, limits and cost by factors of a million: the same plan in other units.
func TestUnitsOfQuadratic(t *testing.T) {
	for seed := uint64(0); seed < 20; seed++ {
		rng := rand.New(rand.NewPCG(seed, 13))
		p := randomQuadratic(t, rng, 10, 8)
		want := mustOptimal(t, p, Options{})
		for _, f := range [][3]float64{{1e6, 1, 1}, {1e-6, 1, 1}, {1, 1e6, 1}, {1, 1e-6, 1}, {1, 1, 1e6}, {1, 1, 1e-6}, {1e6, 1e-6, 1e6}} {
			q := inUnits(t, p, f[0], f[1], f[2])
			for name, solve := range bothMethods {
				s, err := solve(context.Background(), q, Options{})
				if err != nil || s.Status != Optimal {
					t.Fatalf("seed %d, units %v, %s: %v %v", seed, f, name, s.Status, err)
				}
				mustCertify(t, q, s)
				if !near(s.Objective/f[2], want.Objective, 1e-7) {
					t.Errorf("seed %d, units %v, %s: %.12g, want %.12g", seed, f, name, s.Objective/f[2], want.Objective)
				}
			}
		}
	}
}

// inUnits writes p with columns counted in units 1/x as large, rows in 1/r, the objective in 1/c.
func inUnits(t testing.TB, p *Problem, x, r, c float64) *Problem {
	t.Helper()
	columns := make([]Column, p.Columns())
	for j := range columns {
		v := p.Column(j)
		columns[j] = Column{Cost: v.Cost * c / x, Lower: v.Lower * x, Upper: v.Upper * x}
	}
	q := mustProblem(t, p.Sense(), columns)
	for i := range p.Rows() {
		v := p.Row(i)
		for j := range v.Coefficients {
			v.Coefficients[j] *= r / x
		}
		v.Lower, v.Upper = v.Lower*r, v.Upper*r
		if _, err := q.AddRow(v); err != nil {
			t.Fatal(err)
		}
	}
	entries := p.HessianEntries()
	for k := range entries {
		entries[k].Value *= c / x / x
	}
	if err := q.SetHessian(Hessian{Entries: entries}); err != nil {
		t.Fatal(err)
	}
	return q
}

// TestDependentRows repeats rows and adds sums of rows: prices are no longer the only ones, the plan is.
func TestDependentRows(t *testing.T) {
	for seed := uint64(0); seed < 30; seed++ {
		rng := rand.New(rand.NewPCG(seed, 14))
		p := randomQuadratic(t, rng, 8, 6)
		want := mustOptimal(t, p, Options{})
		q := p.Clone()
		for i := range p.Rows() {
			if _, err := q.AddRow(p.Row(i)); err != nil {
				t.Fatal(err)
			}
		}
		for name, solve := range bothMethods {
			s, err := solve(context.Background(), q, Options{})
			if err != nil || s.Status != Optimal {
				t.Fatalf("seed %d, %s: %v %v", seed, name, s.Status, err)
			}
			mustCertify(t, q, s)
			if !near(s.Objective, want.Objective, methodsAgree) {
				t.Errorf("seed %d, %s: %.15g, want %.15g", seed, name, s.Objective, want.Objective)
			}
		}
	}
}

// TestSmallQuadratics are worked by hand.
func TestSmallQuadratics(t *testing.T) {
	cases := []struct {
		name      string
		sense     Sense
		columns   []Column
		rows      []Row
		hessian   Hessian
		status    Status
		objective float64
		reason    string
	}{
		{"no rows", Minimise, []Column{{Cost: -4, Lower: -inf, Upper: inf}}, nil, Hessian{Diagonal: []float64{2}}, Optimal, -4, "x = 2"},
		{"at a bound", Minimise, []Column{{Cost: -4, Upper: 1}}, nil, Hessian{Diagonal: []float64{2}}, Optimal, -3, "x = 1"},
		{"concave, largest", Maximise, []Column{{Cost: 4, Upper: 9}}, nil, Hessian{Diagonal: []float64{-2}}, Optimal, 4, "x = 2"},
		{"semidefinite", Minimise, []Column{{Lower: -inf, Upper: inf}, {Lower: -inf, Upper: inf}}, []Row{equal(2, 1, 0)},
			Hessian{Dense: []float64{1, -1, -1, 1}}, Optimal, 0, "the difference is free to vanish"},
		{"semidefinite, no end", Minimise, []Column{{Cost: -1, Upper: inf}, {Upper: inf}}, nil, Hessian{Dense: []float64{1, -1, -1, 1}}, Unbounded, 0, "both grow alike"},
		{"flat part, no end", Minimise, []Column{{Upper: inf}, {Cost: -1, Upper: inf}}, nil, Hessian{Diagonal: []float64{1, 0}}, Unbounded, 0, "the second grows"},
		{"flat part, bounded", Minimise, []Column{{Cost: -1, Upper: inf}, {Cost: -1, Upper: 3}}, nil, Hessian{Diagonal: []float64{1, 0}}, Optimal, -3.5, "1 and 3"},
		{"infeasible", Minimise, []Column{{Upper: 1}, {Upper: 1}}, []Row{atLeast(3, 1, 1)}, Hessian{Diagonal: []float64{1, 1}}, Infeasible, 0, "two at most"},
		{"infeasible, semidefinite", Minimise, []Column{{Upper: 1}, {Upper: 1}}, []Row{atLeast(3, 1, 1)}, Hessian{Diagonal: []float64{1, 0}}, Infeasible, 0, "two at most"},
		{"empty row that cannot be", Minimise, []Column{{Upper: 1}}, []Row{atLeast(3, 0)}, Hessian{Diagonal: []float64{1}}, Infeasible, 0, "zero is not three"},
		{"concave, least", Minimise, []Column{{Upper: 1}}, nil, Hessian{Diagonal: []float64{-1}}, NotConvex, 0, "negative diagonal"},
		{"convex, largest", Maximise, []Column{{Upper: 1}}, nil, Hessian{Diagonal: []float64{1}}, NotConvex, 0, "positive diagonal"},
		{"saddle", Minimise, []Column{{Upper: 1}, {Upper: 1}}, nil, Hessian{Entries: []HessianEntry{{0, 1, 1}}}, NotConvex, 0, "zero diagonal"},
		{"flat saddle", Minimise, []Column{{Upper: 1}, {Upper: 1}}, nil, Hessian{Dense: []float64{2, 1, 1, 0}}, NotConvex, 0, "zero on the diagonal beside an entry"},
		{"hidden saddle", Minimise, []Column{{Upper: 1}, {Upper: 1}}, nil, Hessian{Dense: []float64{1, 2, 2, 1}}, NotConvex, 0, "eigenvalues 3 and -1"},
		{"factors that cancel", Minimise, []Column{{Cost: -2, Upper: 9}}, nil,
			Hessian{Diagonal: []float64{3}, Factors: []HessianFactor{{-1, []float64{1}}}}, Optimal, -1, "3 - 1 = 2"},
		{"negative diagonal, outweighed", Minimise, []Column{{Cost: -2, Upper: 9}}, nil,
			Hessian{Diagonal: []float64{-1}, Factors: []HessianFactor{{3, []float64{1}}}}, Optimal, -1, "3 - 1 = 2"},
		{"all fixed", Minimise, []Column{{Cost: 1, Lower: 2, Upper: 2}}, []Row{atMost(3, 1)}, Hessian{Diagonal: []float64{1}}, Optimal, 4, "2 + 4/2"},
		{"no columns", Minimise, nil, []Row{atMost(3)}, Hessian{}, Optimal, 0, "nothing to decide"},
	}
	for _, c := range cases {
		p := mustProblem(t, c.sense, c.columns, c.rows...)
		if err := p.SetHessian(c.hessian); err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		for name, solve := range bothMethods {
			s, err := solve(context.Background(), p, Options{})
			if err != nil || s.Status != c.status {
				t.Errorf("%s, %s: %v %v, want %v (%s)", c.name, name, s.Status, err, c.status, c.reason)
				continue
			}
			if v := Certify(p, s); !v.Accepted {
				t.Errorf("%s, %s: certificate refused: %s", c.name, name, v.Reason)
			}
			if c.status == Optimal && math.Abs(s.Objective-c.objective) > methodsAgree*math.Max(1, math.Abs(c.objective)) {
				t.Errorf("%s, %s: %.15g, want %v (%s)", c.name, name, s.Objective, c.objective, c.reason)
			}
		}
	}
}

// TestQuadraticRepeats asks for the same bytes twice.
func TestQuadraticRepeats(t *testing.T) {
	p := randomQuadratic(t, rand.New(rand.NewPCG(3, 15)), 20, 20)
	for name, solve := range bothMethods {
		a, _ := solve(context.Background(), p, Options{})
		b, _ := solve(context.Background(), p.Clone(), Options{})
		if !reflect.DeepEqual(a, b) {
			t.Errorf("%s: two runs differ", name)
		}
	}
}

// pollContext is cancelled at its k-th poll.
type pollContext struct {
	context.Context
	left int
}

func (c *pollContext) Err() error {
	if c.left--; c.left < 0 {
		return context.Canceled
	}
	return nil
}

// TestCancelQuadratic cancels at every poll: the end is Interrupted or, with the polls used up, the optimum.
func TestCancelQuadratic(t *testing.T) {
	p := randomQuadratic(t, rand.New(rand.NewPCG(5, 16)), 15, 20)
	infeasible := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}}, atLeast(3, 1, 1))
	if err := infeasible.SetHessian(Hessian{Diagonal: []float64{1, 0}}); err != nil {
		t.Fatal(err)
	}
	for name, solve := range bothMethods {
		for k, q := range []*Problem{p, infeasible} {
			want, _ := solve(context.Background(), q, Options{})
			for polls := 0; ; polls++ {
				s, err := solve(&pollContext{context.Background(), polls}, q, Options{})
				if err != nil {
					t.Fatal(err)
				}
				if s.Status == want.Status {
					break
				}
				if s.Status != Interrupted {
					t.Fatalf("%s, problem %d, cancelled at poll %d: %v", name, k, polls, s.Status)
				}
				if polls > 1000 {
					t.Fatalf("%s: more than a thousand polls", name)
				}
			}
		}
	}
}

func TestIterationLimitOfQuadratic(t *testing.T) {
	p := randomQuadratic(t, rand.New(rand.NewPCG(6, 16)), 15, 20)
	s, err := SolveInterior(context.Background(), p, Options{MaxIterations: 2})
	if err != nil || s.Status != IterationLimit || s.Iterations != 2 {
		t.Errorf("%v after %d iterations, %v", s.Status, s.Iterations, err)
	}
	if _, err := SolveInterior(context.Background(), p, Options{MaxIterations: -1}); err == nil {
		t.Error("a negative limit was taken")
	}
}

// TestCertifyCatchesWrongQuadratics spoils an optimum in each way.
func TestCertifyCatchesWrongQuadratics(t *testing.T) {
	p := benchmarkFour(t, 1100)
	for _, c := range []struct {
		name  string
		spoil func(s *Solution)
	}{
		{"plan moved", func(s *Solution) { s.X[0] += 1e-3; s.X[1] -= 1e-3 }},
		{"price moved", func(s *Solution) { s.RowPrice[0] *= 1 + 1e-6 }},
		{"prices of the linear part", func(s *Solution) { s.RowPrice[1] = 0 }},
		{"wrong sign", func(s *Solution) { s.RowPrice[2] = -s.RowPrice[2] }},
		{"not a number", func(s *Solution) { s.X[2] = math.NaN() }},
		{"called unbounded", func(s *Solution) {
			s.Status = Unbounded
			s.Ray = &Ray{Rows: make([]float64, 3), Columns: []float64{-1, 0, 0}}
		}},
		{"called not convex", func(s *Solution) {
			s.Status = NotConvex
			s.Ray = &Ray{Rows: make([]float64, 3), Columns: []float64{1, 0, 0}}
		}},
		{"called infeasible", func(s *Solution) {
			s.Status = Infeasible
			s.Ray = &Ray{Rows: []float64{1, 1, 1}, Columns: make([]float64, 3)}
		}},
	} {
		s := mustOptimal(t, p, Options{})
		c.spoil(s)
		if Certify(p, s).Accepted {
			t.Errorf("%s: accepted", c.name)
		}
	}
}
