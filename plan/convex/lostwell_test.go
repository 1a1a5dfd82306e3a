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
// basis: cold/warm is how often the second goes into the first.
func BenchmarkLostWell(b *testing.B) {
	for _, c := range []planningCase{{wells: 300, limits: 40, seed: 1}, {wells: 1000, limits: 200, seed: 1}, {wells: 5000, limits: 500, seed: 1}} {
		p := planningProblem(b, c)
		b.Run(fmt.Sprintf("%dx%d", c.wells, c.limits), func(b *testing.B) {
			var cold, warm time.Duration
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
			}
			if first.Status != Optimal || second.Status != Optimal || !(second.Objective < first.Objective) {
				b.Fatal(first.Status, second.Status)
			}
			b.ReportMetric(float64(cold)/float64(warm), "cold/warm")
			b.ReportMetric(float64(cold.Microseconds())/float64(b.N)/1000, "cold-ms")
			b.ReportMetric(float64(warm.Microseconds())/float64(b.N)/1000, "warm-ms")
			b.ReportMetric(float64(second.Iterations), "warm-pivots")
			b.ReportMetric(float64(first.Iterations), "cold-pivots")
		})
	}
}
