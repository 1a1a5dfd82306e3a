package plan

import (
	"fmt"
	"math/rand/v2"
	"testing"
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
