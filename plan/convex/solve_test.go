package convex

import (
	"context"
	"math"
	"testing"
)

var inf = math.Inf(1)

func mustSolve(t testing.TB, p *Problem, o Options) *Solution {
	t.Helper()
	s, err := Solve(context.Background(), p, o)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func mustProblem(t testing.TB, sense Sense, columns []Column, rows ...Row) *Problem {
	t.Helper()
	p, err := NewProblem(sense, columns)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range rows {
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

// mustOptimal solves, demands an optimum and an accepted certificate, and returns the solution.
func mustOptimal(t testing.TB, p *Problem, o Options) *Solution {
	t.Helper()
	s := mustSolve(t, p, o)
	if s.Status != Optimal {
		t.Fatalf("status %v", s.Status)
	}
	mustCertify(t, p, s)
	return s
}

func mustCertify(t testing.TB, p *Problem, s *Solution) {
	t.Helper()
	if c := Certify(p, s); !c.Accepted {
		t.Fatalf("certificate of %v refused: %s", s.Status, c.Reason)
	}
}

// near compares relative to the larger of the two.
func near(a, b, relative float64) bool {
	return math.Abs(a-b) <= relative*math.Max(math.Abs(a), math.Abs(b))
}

func atMost(limit float64, coefficients ...float64) Row {
	return Row{Coefficients: coefficients, Lower: -inf, Upper: limit}
}

func atLeast(limit float64, coefficients ...float64) Row {
	return Row{Coefficients: coefficients, Lower: limit, Upper: inf}
}

func equal(value float64, coefficients ...float64) Row {
	return Row{Coefficients: coefficients, Lower: value, Upper: value}
}

// rounding is the relative difference allowed where two computations of one number differ by rounding only.
const rounding = 1e-12

func TestKleeMinty(t *testing.T) {
	for n := 2; n <= 12; n++ {
		columns := make([]Column, n)
		for j := range columns {
			columns[j] = Column{Cost: math.Pow(2, float64(n-1-j)), Upper: inf}
		}
		p := mustProblem(t, Maximise, columns)
		for i := 0; i < n; i++ {
			row := make([]float64, n)
			for j := 0; j < i; j++ {
				row[j] = math.Pow(2, float64(i-j+1))
			}
			row[i] = 1
			if _, err := p.AddRow(atMost(math.Pow(5, float64(i+1)), row...)); err != nil {
				t.Fatal(err)
			}
		}
		s := mustOptimal(t, p, Options{})
		if want := math.Pow(5, float64(n)); !near(s.Objective, want, rounding) {
			t.Errorf("n = %d: %v, want %v", n, s.Objective, want)
		}
	}
}

// TestBeale is the classical example on which the plain simplex method cycles (Beale 1955).
func TestBeale(t *testing.T) {
	p := mustProblem(t, Minimise, []Column{{Cost: -0.75, Upper: inf}, {Cost: 150, Upper: inf}, {Cost: -0.02, Upper: inf}, {Cost: 6, Upper: inf}},
		atMost(0, 0.25, -60, -0.04, 9), atMost(0, 0.5, -90, -0.02, 3), atMost(1, 0, 0, 1, 0))
	if s := mustOptimal(t, p, Options{}); !near(s.Objective, -0.05, rounding) {
		t.Errorf("objective %v", s.Objective)
	}
}

func TestSmallShapes(t *testing.T) {
	cases := []struct {
		name      string
		sense     Sense
		columns   []Column
		rows      []Row
		status    Status
		objective float64
		reason    string
	}{
		{"nothing at all", Minimise, nil, nil, Optimal, 0, "an empty problem has the empty plan"},
		{"rows without columns", Minimise, nil, []Row{atMost(1), atLeast(-1)}, Optimal, 0, "0 lies within both"},
		{"impossible rows without columns", Minimise, nil, []Row{atLeast(1)}, Infeasible, 0, "0 is not 1"},
		{"no rows", Maximise, []Column{{Cost: 2, Lower: -1, Upper: 3}, {Cost: -1, Lower: -4, Upper: inf}}, nil, Optimal, 10, "each at its better bound"},
		{"no rows, no end", Maximise, []Column{{Cost: 2, Lower: -1, Upper: inf}}, nil, Unbounded, 0, "no upper bound"},
		{"no rows, free", Minimise, []Column{{Cost: 1e-3, Lower: -inf, Upper: inf}}, nil, Unbounded, 0, "free with a cost"},
		{"no rows, free without cost", Minimise, []Column{{Lower: -inf, Upper: inf}}, nil, Optimal, 0, "free without a cost"},
		{"zero row within", Maximise, []Column{{Cost: 1, Upper: 5}}, []Row{atMost(0, 0), equal(0, 0)}, Optimal, 5, "0 = 0 says nothing"},
		{"zero row outside", Maximise, []Column{{Cost: 1, Upper: 5}}, []Row{atLeast(1, 0)}, Infeasible, 0, "0 is not at least 1"},
		{"row that only reports", Maximise, []Column{{Cost: 1, Upper: 5}}, []Row{{Coefficients: []float64{1}, Lower: -inf, Upper: inf}}, Optimal, 5, "no bound"},
		{"equation", Minimise, []Column{{Cost: 1, Upper: 4}, {Cost: 2, Upper: 4}}, []Row{equal(5, 1, 1)}, Optimal, 6, "4 + 2 x 1"},
		{"range", Maximise, []Column{{Cost: 1, Lower: -inf, Upper: inf}}, []Row{{Coefficients: []float64{2}, Lower: -4, Upper: 8}}, Optimal, 4, "8 / 2"},
		{"free", Minimise, []Column{{Cost: 1, Lower: -inf, Upper: inf}, {Cost: 1, Lower: -inf, Upper: inf}},
			[]Row{atLeast(1, 2, 1), atLeast(1, 1, 2)}, Optimal, 2.0 / 3, "corner (1/3, 1/3)"},
		{"fixed", Maximise, []Column{{Cost: 1, Lower: 2, Upper: 2}, {Cost: 1, Upper: inf}}, []Row{atMost(5, 1, 1)}, Optimal, 5, "2 + 3"},
		{"upper bound only", Maximise, []Column{{Cost: 1, Lower: -inf, Upper: -3}}, nil, Optimal, -3, "the bound"},
		{"two rows apart", Maximise, []Column{{Cost: 1, Upper: inf}}, []Row{atMost(1, 1), atLeast(2, 1)}, Infeasible, 0, "1 < 2"},
		{"equations apart", Minimise, []Column{{Lower: -inf, Upper: inf}, {Lower: -inf, Upper: inf}},
			[]Row{equal(1, 1, 1), equal(3, 2, 2)}, Infeasible, 0, "twice the first is 2"},
		{"dependent equations", Minimise, []Column{{Cost: 1, Upper: inf}, {Cost: 3, Upper: inf}},
			[]Row{equal(2, 1, 1), equal(4, 2, 2), equal(2, 1, 1)}, Optimal, 2, "one equation three times"},
		{"ray behind a row", Minimise, []Column{{Cost: -1, Upper: inf}, {Cost: 0, Upper: inf}}, []Row{atMost(1, 1, -1)}, Unbounded, 0, "x1 = x2 + 1"},
		{"no point and a ray", Minimise, []Column{{Cost: -1, Upper: inf}, {Upper: 1}}, []Row{atLeast(2, 0, 1)}, Infeasible, 0, "infeasible first"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			p := mustProblem(t, c.sense, c.columns, c.rows...)
			s := mustSolve(t, p, Options{})
			if s.Status != c.status {
				t.Fatalf("status %v, want %v (%s)", s.Status, c.status, c.reason)
			}
			mustCertify(t, p, s)
			if c.status == Optimal && math.Abs(s.Objective-c.objective) > rounding*math.Max(1, math.Abs(c.objective)) {
				t.Errorf("objective %v, want %v (%s)", s.Objective, c.objective, c.reason)
			}
		})
	}
}

// TestSignsOfPrices fixes the rule on the smallest cases, by both senses and both sides.
func TestSignsOfPrices(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 3, Upper: 10}}, atMost(8, 2))
	if s := mustOptimal(t, p, Options{}); s.RowPrice[0] != 1.5 || s.ReducedCost[0] != 0 {
		t.Errorf("a binding upper limit of a maximisation: price %v, reduced cost %v, want 1.5 and 0", s.RowPrice[0], s.ReducedCost[0])
	}
	p = mustProblem(t, Maximise, []Column{{Cost: 3, Upper: 10}}, atMost(80, 2))
	if s := mustOptimal(t, p, Options{}); s.RowPrice[0] != 0 || s.ReducedCost[0] != 3 {
		t.Errorf("a binding cap of a maximisation: price %v, reduced cost %v, want 0 and 3", s.RowPrice[0], s.ReducedCost[0])
	}
	p = mustProblem(t, Minimise, []Column{{Cost: 3, Upper: 10}}, atLeast(8, 2))
	if s := mustOptimal(t, p, Options{}); s.RowPrice[0] != 1.5 || s.ReducedCost[0] != 0 {
		t.Errorf("a binding demand of a minimisation: price %v, reduced cost %v, want 1.5 and 0", s.RowPrice[0], s.ReducedCost[0])
	}
	p = mustProblem(t, Minimise, []Column{{Cost: -3, Upper: 10}}, atMost(8, 2))
	if s := mustOptimal(t, p, Options{}); s.RowPrice[0] != -1.5 {
		t.Errorf("a binding upper limit of a minimisation: price %v, want -1.5", s.RowPrice[0])
	}
}

func TestDegeneracyFlags(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 1}, {Cost: 1, Upper: 1}}, atMost(1, 1, 1))
	if s := mustOptimal(t, p, Options{}); !s.DualDegenerate {
		t.Error("two equal wells under one quota: the plan is not the only one")
	}
	p = mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 1}, {Cost: 2, Upper: 1}}, atMost(1.5, 1, 1))
	if s := mustOptimal(t, p, Options{}); s.DualDegenerate || s.PrimalDegenerate {
		t.Error("a plain optimum is called degenerate")
	}
	p = mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 5}}, atMost(2, 1), atMost(4, 2))
	if s := mustOptimal(t, p, Options{}); !s.PrimalDegenerate {
		t.Error("two rows binding one well: prices are not the only ones")
	}
}

func TestCancelled(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	p := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 5}}, atMost(2, 1))
	s, err := Solve(ctx, p, Options{})
	if err != nil || s.Status != Interrupted {
		t.Errorf("status %v, error %v", s.Status, err)
	}
	if Certify(p, s).Accepted {
		t.Error("an interrupted solve was certified")
	}
}

func TestIterationLimit(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 40, limits: 20, seed: 5})
	full := mustOptimal(t, p, Options{})
	if full.Iterations < 3 {
		t.Fatalf("only %d pivots: the case is too easy", full.Iterations)
	}
	if s := mustSolve(t, p, Options{MaxIterations: 2}); s.Status != IterationLimit || s.Iterations > 2 {
		t.Errorf("status %v after %d pivots", s.Status, s.Iterations)
	}
	if _, err := Solve(context.Background(), p, Options{MaxIterations: -1}); err == nil {
		t.Error("a negative limit was taken")
	}
}

func TestSameBytes(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 60, limits: 30, sparse: true, seed: 9})
	a, b := mustSolve(t, p, Options{}), mustSolve(t, p.Clone(), Options{})
	for j := range a.X {
		if math.Float64bits(a.X[j]) != math.Float64bits(b.X[j]) {
			t.Fatalf("column %d: %v and %v", j, a.X[j], b.X[j])
		}
	}
}
