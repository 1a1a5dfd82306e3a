package mesh

import (
	"context"
	"fmt"
	"testing"
)

// BenchmarkBuild meshes a rectangle with a river and wells whose sizes suit the number of nodes.
func BenchmarkBuild(b *testing.B) {
	for _, c := range []struct {
		nodes, wells int
		size         float64
	}{{20000, 20, 10}, {100000, 40, 5}, {1000000, 200, 2}} {
		b.Run(fmt.Sprint(c.nodes), func(b *testing.B) {
			d := wellfield(c.wells, c.size)
			b.ReportAllocs()
			for b.Loop() {
				m, err := Build(context.Background(), d, Options{Nodes: c.nodes})
				if err != nil {
					b.Fatal(err)
				}
				b.ReportMetric(float64(len(m.X)), "nodes")
				b.ReportMetric(m.Quality.MinAngleDeg, "deg")
				b.ReportMetric(100*m.Quality.ObtuseShare, "%obtuse")
			}
			b.ReportMetric(float64(c.nodes)*float64(b.N)/b.Elapsed().Seconds(), "nodes/s")
		})
	}
}
