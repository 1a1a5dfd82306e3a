package plan

import (
	"fmt"
	"math/rand/v2"
	"testing"
	"time"

	"springbound/plan/convex"
)

// BenchmarkMake plans with as many limits as wells, and explains the same brief with a demand that cannot be met.
func BenchmarkMake(b *testing.B) {
	for _, n := range []int{10, 50, 200} {
		s := randomSite(rand.New(rand.NewPCG(1, 2)), n, n)
		b.Run(fmt.Sprintf("plan of %d wells", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := Make(b.Context(), s.brief, s.table, Options{}); err != nil {
					b.Fatal(err)
				}
			}
		})
		infeasible := *s
		infeasible.brief.Demand = number(1e6)
		b.Run(fmt.Sprintf("conflict of %d wells", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := Make(b.Context(), infeasible.brief, s.table, Options{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkExplain explains a demand just above what there is, with which nearly everything is in conflict.
func BenchmarkExplain(b *testing.B) {
	for _, size := range [][2]int{{200, 200}, {1000, 200}} {
		s := randomSite(rand.New(rand.NewPCG(3, 5)), size[0], size[1])
		r, err := Make(b.Context(), s.brief, s.table, Options{})
		if err != nil {
			b.Fatal(err)
		}
		infeasible := *s
		infeasible.brief.Demand = number(1.001 * r.TotalRate)
		b.Run(fmt.Sprintf("%d wells, %d limits", size[0], size[1]), func(b *testing.B) {
			members := 0
			for b.Loop() {
				r, err := Make(b.Context(), infeasible.brief, s.table, Options{})
				if err != nil || r.Conflict == nil {
					b.Fatal(err)
				}
				members = len(r.Conflict.Members)
			}
			b.ReportMetric(float64(members), "members")
		})
	}
}

// BenchmarkLostWell compares, in one run, the largest total planned from nothing with the new total after each of the ten largest wells is
// lost, one at a time, both with writing the programme: cold/lost is how often the second goes into the first.
func BenchmarkLostWell(b *testing.B) {
	for _, size := range [][2]int{{300, 40}, {1000, 200}} {
		s := randomSite(rand.New(rand.NewPCG(3, 5)), size[0], size[1])
		b.Run(fmt.Sprintf("%d wells, %d limits", size[0], size[1]), func(b *testing.B) {
			ctx := b.Context()
			setup, err := newSetup(s.brief)
			if err != nil {
				b.Fatal(err)
			}
			var cold, lost time.Duration
			outages := 0
			for b.Loop() {
				p := &planner{setup: setup, oracle: &oracle{setup: setup, model: s.table}}
				start, _ := setup.startRates()
				if _, err := p.oracle.linearise(ctx, start); err != nil {
					b.Fatal(err)
				}
				if err := p.buildBounds(ctx); err != nil {
					b.Fatal(err)
				}
				begin := time.Now()
				g, err := p.build(true)
				if err != nil {
					b.Fatal(err)
				}
				sol, err := convex.Solve(ctx, g.problem, convex.Options{})
				if err != nil || sol.Status != convex.Optimal {
					b.Fatal(err, sol.Status)
				}
				cold += time.Since(begin)
				all, err := p.outage(ctx, -1, nil)
				if err != nil || all == nil {
					b.Fatal(err)
				}
				pumping, _ := p.outages(p.rates(sol.X))
				begin = time.Now()
				for _, i := range pumping[:firmLargest] {
					if one, err := p.outage(ctx, i, all.basis); err != nil || one == nil {
						b.Fatal(err)
					}
				}
				lost += time.Since(begin)
				outages += firmLargest
			}
			b.ReportMetric(cold.Seconds()*1000/float64(b.N), "cold-ms")
			b.ReportMetric(lost.Seconds()*1000/float64(outages), "lost-ms")
			b.ReportMetric(cold.Seconds()/float64(b.N)/(lost.Seconds()/float64(outages)), "cold/lost")
		})
	}
}
