package convex

import (
	"context"
	"fmt"
	"testing"
)

func BenchmarkPlanning(b *testing.B) {
	for _, c := range []planningCase{
		{wells: 200, limits: 50, seed: 1},
		{wells: 300, limits: 40, seed: 1},
		{wells: 1000, limits: 200, seed: 1},
		{wells: 5000, limits: 500, seed: 1},
		{wells: 2000, limits: 2000, seed: 1},
	} {
		p := planningProblem(b, c)
		b.Run(fmt.Sprintf("%dx%d", c.wells, c.limits), func(b *testing.B) {
			var s *Solution
			for b.Loop() {
				s, _ = Solve(context.Background(), p, Options{})
			}
			if s.Status != Optimal {
				b.Fatal(s.Status)
			}
			b.ReportMetric(float64(s.Iterations), "pivots")
		})
	}
}

func BenchmarkCertify(b *testing.B) {
	p := planningProblem(b, planningCase{wells: 1000, limits: 200, seed: 1})
	s := mustSolve(b, p, Options{})
	for b.Loop() {
		Certify(p, s)
	}
}
