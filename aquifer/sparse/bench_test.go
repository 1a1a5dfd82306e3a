package sparse

import (
	"context"
	"fmt"
	"os"
	"testing"
)

// benchmarkSides are the sides of square meshes of about 20,000, 100,000 and a million nodes; the last runs only where
// SPRINGBOUND_LONG=1.
var benchmarkSides = []int{141, 316, 1000}

func forSides(b *testing.B, run func(b *testing.B, p problem)) {
	for _, side := range benchmarkSides {
		b.Run(fmt.Sprint(side*side), func(b *testing.B) {
			if side > 500 && os.Getenv("SPRINGBOUND_LONG") != "1" {
				b.Skip("a million nodes only where SPRINGBOUND_LONG=1")
			}
			p := jitteredMesh(side, side, 1, 1)
			b.ReportAllocs()
			run(b, p)
		})
	}
}

func BenchmarkAnalyse(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		var s *Symbolic
		for b.Loop() {
			s = mustAnalyse(b, p, Options{})
		}
		b.ReportMetric(float64(s.NonZeros()), "nnz(L)")
		b.ReportMetric(s.Flops(), "flops")
		b.ReportMetric(float64(s.PeakBytes()), "peak-bytes")
	})
}

// BenchmarkSmall makes a whole solution of some six hundred unknowns, as the equivalent radius of each well needs one.
func BenchmarkSmall(b *testing.B) {
	p := jitteredMesh(25, 25, 1, 1)
	right := randomVector(p.Pattern.N, 1)
	b.ReportAllocs()
	for b.Loop() {
		f := mustFactor(b, p, Options{Workers: 1})
		if err := f.Solve(context.Background(), right, 1); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFactor(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		s := mustAnalyse(b, p, Options{})
		for b.Loop() {
			if _, err := s.Factor(context.Background(), p.Values); err != nil {
				b.Fatal(err)
			}
		}
		b.ReportMetric(s.Flops()/1e9*float64(b.N)/b.Elapsed().Seconds(), "Gflop/s")
		b.ReportMetric(float64(s.FactorBytes()), "factor-bytes")
	})
}

func BenchmarkRefactor(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		f := mustFactor(b, p, Options{})
		for b.Loop() {
			if err := f.Refactor(context.Background(), p.Values); err != nil {
				b.Fatal(err)
			}
		}
	})
}

// BenchmarkSolve solves for full right-hand sides; the time for each falls as the block grows.
func BenchmarkSolve(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		benchmarkBlocks(b, p, func(block []float64, k int) { copy(block, randomVector(len(block), 1)) })
	})
}

// BenchmarkAdjoints solves for the influence of one place each, whole fields.
func BenchmarkAdjoints(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		benchmarkBlocks(b, p, func(block []float64, k int) {
			clear(block)
			for r := range k {
				block[r*p.Pattern.N+r*7919%p.Pattern.N] = 1
			}
		})
	})
}

func benchmarkBlocks(b *testing.B, p problem, fill func(block []float64, k int)) {
	f := mustFactor(b, p, Options{})
	for _, k := range []int{1, 16, 32, 100} {
		b.Run(fmt.Sprint(k), func(b *testing.B) {
			right := make([]float64, p.Pattern.N*k)
			fill(right, k)
			block := make([]float64, len(right))
			for b.Loop() {
				b.StopTimer()
				copy(block, right)
				b.StartTimer()
				if err := f.Solve(context.Background(), block, k); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*k), "ns/rhs")
			b.ReportMetric(float64(f.symbolic.SolveBytes(k)), "solve-bytes")
			b.ReportMetric(float64(8*len(block)), "block-bytes")
		})
	}
}

// BenchmarkSelected solves for the influence of 100 places at wells spread over the mesh, the costly case.
func BenchmarkSelected(b *testing.B) {
	forSides(b, func(b *testing.B, p problem) {
		f := mustFactor(b, p, Options{})
		n := int32(p.Pattern.N)
		rhs := make([]SparseVector, 100)
		for r := range rhs {
			rhs[r] = SparseVector{[]int32{int32(r) * 7919 % n}, []float64{1}}
		}
		for _, wells := range []int{30, 300, 1000, 3000} {
			b.Run(fmt.Sprint(wells), func(b *testing.B) {
				wanted := make([]int32, wells)
				for w := range wanted {
					wanted[w] = int32(int64(w) * 104729 % int64(n))
				}
				b.ReportAllocs()
				for b.Loop() {
					if _, err := f.SolveSelected(context.Background(), rhs, wanted); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*len(rhs)), "ns/rhs")
				b.ReportMetric(float64(f.symbolic.SolveBytes(len(rhs))), "solve-bytes")
			})
		}
	})
}
