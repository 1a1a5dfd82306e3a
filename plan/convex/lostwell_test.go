package convex

import (
	"context"
	"fmt"
	"testing"
	"time"
)

// lostWell returns the well with the largest rate.
func lostWell(s *Solution) int {
	lost := 0
	for j, x := range s.X {
		if x > s.X[lost] {
			lost = j
		}
	}
	return lost
}

// BenchmarkLostWell compares, in one run, the cold solve with the new plan after the well with the largest rate is lost, from the old
// basis and by a Solver kept from before: cold/warm and cold/kept are how often these go into the first.
func BenchmarkLostWell(b *testing.B) {
	for _, c := range []planningCase{{wells: 300, limits: 40, seed: 1}, {wells: 1000, limits: 200, seed: 1}, {wells: 5000, limits: 500, seed: 1}} {
		p := planningProblem(b, c)
		b.Run(fmt.Sprintf("%dx%d", c.wells, c.limits), func(b *testing.B) {
			var cold, warm, kept time.Duration
			solver := NewSolver(p)
			var first, second *Solution
			for b.Loop() {
				begin := time.Now()
				first, _ = Solve(context.Background(), p, Options{})
				cold += time.Since(begin)
				q := p.Clone()
				lost := lostWell(first)
				if err := q.SetBounds(lost, 0, 0); err != nil {
					b.Fatal(err)
				}
				begin = time.Now()
				second, _ = Solve(context.Background(), q, Options{Start: first.Basis})
				warm += time.Since(begin)
				set := func(upper float64) *Solution {
					if err := solver.SetBounds(lost, 0, upper); err != nil {
						b.Fatal(err)
					}
					s, _ := solver.Solve(context.Background(), Options{})
					return s
				}
				set(p.Column(lost).Upper)
				begin = time.Now()
				third := set(0)
				kept += time.Since(begin)
				if !near(third.Objective, second.Objective, rounding) {
					b.Fatal(third.Objective, second.Objective)
				}
			}
			if first.Status != Optimal || second.Status != Optimal || !(second.Objective < first.Objective) {
				b.Fatal(first.Status, second.Status)
			}
			b.ReportMetric(float64(cold)/float64(warm), "cold/warm")
			b.ReportMetric(float64(cold.Microseconds())/float64(b.N)/1000, "cold-ms")
			b.ReportMetric(float64(warm.Microseconds())/float64(b.N)/1000, "warm-ms")
			b.ReportMetric(float64(cold)/float64(kept), "cold/kept")
			b.ReportMetric(float64(kept.Microseconds())/float64(b.N)/1000, "kept-ms")
			b.ReportMetric(float64(second.Iterations), "warm-pivots")
			b.ReportMetric(float64(first.Iterations), "cold-pivots")
		})
	}
}

// TestSolver loses one well after another, and all of a group of limits, and compares with solves from nothing.
func TestSolver(t *testing.T) {
	for seed := uint64(0); seed < 6; seed++ {
		p := planningProblem(t, planningCase{wells: 40, limits: 20, degenerate: seed%2 == 1, seed: 900 + seed})
		solver := NewSolver(p)
		compare := func(what string) {
			t.Helper()
			s, err := solver.Solve(t.Context(), Options{})
			if err != nil {
				t.Fatal(err)
			}
			want := mustSolve(t, p, Options{})
			if s.Status != want.Status || !Certify(p, s).Accepted || !near(s.Objective, want.Objective, rounding) && s.Status == Optimal {
				t.Errorf("seed %d, %s: %v %.15g, from nothing %v %.15g", seed, what, s.Status, s.Objective, want.Status, want.Objective)
			}
		}
		compare("first")
		for j := 0; j < p.Columns(); j += 3 {
			upper := p.Column(j).Upper
			for _, u := range []float64{0, upper} {
				if err := p.SetBounds(j, 0, u); err != nil {
					t.Fatal(err)
				}
				if err := solver.SetBounds(j, 0, u); err != nil {
					t.Fatal(err)
				}
				compare("well")
			}
		}
		for i := 0; i < p.Rows(); i += 4 {
			for _, u := range []float64{0, -1, p.Row(i).Upper} {
				if err := p.SetRowBounds(i, -inf, u); err != nil {
					t.Fatal(err)
				}
				if err := solver.SetRowBounds(i, -inf, u); err != nil {
					t.Fatal(err)
				}
				compare("limit")
			}
		}
	}
}
