package plan

import (
	"fmt"
	"math/rand/v2"
	"testing"
	"time"
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

// BenchmarkFirm plans, and plans with the firm capacity: per outage is what each well out of service costs beside the plan.
func BenchmarkFirm(b *testing.B) {
	for _, size := range [][2]int{{300, 40}, {1000, 200}} {
		s := randomSite(rand.New(rand.NewPCG(3, 5)), size[0], size[1])
		b.Run(fmt.Sprintf("%d wells, %d limits", size[0], size[1]), func(b *testing.B) {
			var plain, firm time.Duration
			outages := 0
			for b.Loop() {
				begin := time.Now()
				if _, err := Make(b.Context(), s.brief, s.table, Options{}); err != nil {
					b.Fatal(err)
				}
				plain += time.Since(begin)
				begin = time.Now()
				r, err := Make(b.Context(), s.brief, s.table, Options{Firm: true})
				if err != nil || r.Firm == nil {
					b.Fatal(err)
				}
				firm += time.Since(begin)
				outages += len(r.Firm.Lines)
			}
			b.ReportMetric(float64(plain.Microseconds())/1000/float64(b.N), "plan-ms")
			b.ReportMetric(float64((firm-plain).Microseconds())/1000/float64(outages+b.N), "per-outage-ms")
		})
	}
}
