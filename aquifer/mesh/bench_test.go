package mesh

import (
	"context"
	"fmt"
	"os"
	"strconv"
	"strings"
	"testing"
)

// BenchmarkBuild meshes a rectangle with a river and wells whose sizes suit the number of nodes. Besides time and allocations it reports
// nodes, nodes per second, the smallest angle, the share of obtuse triangles and, where the system tells it, the peak of memory held.
func BenchmarkBuild(b *testing.B) {
	for _, c := range []struct {
		nodes, wells int
		size         float64
	}{{20_000, 20, 10}, {200_000, 80, 4}, {1_000_000, 200, 2}} {
		b.Run(fmt.Sprint(c.nodes), func(b *testing.B) {
			d := wellfield(c.wells, c.size)
			b.ReportAllocs()
			forgetPeak()
			var m *Mesh
			for b.Loop() {
				var err error
				if m, err = Build(context.Background(), d, Options{Nodes: c.nodes}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(len(m.X)), "nodes")
			b.ReportMetric(float64(len(m.X))*float64(b.N)/b.Elapsed().Seconds(), "nodes/s")
			b.ReportMetric(m.Quality.MinAngleDeg, "deg")
			b.ReportMetric(100*m.Quality.ObtuseShare, "%obtuse")
			if mb := peakMemory(); mb > 0 {
				b.ReportMetric(mb, "peak-MB")
			}
		})
	}
}

// forgetPeak makes the system count the peak of memory anew.
func forgetPeak() {
	// Where this is not possible the peak is that of the whole process.
	_ = os.WriteFile("/proc/self/clear_refs", []byte("5"), 0o200)
}

// peakMemory is the most memory that the process held since the last forgetPeak [MB]; 0 when the system does not tell.
func peakMemory() float64 {
	raw, err := os.ReadFile("/proc/self/status")
	if err != nil {
		return 0
	}
	for _, line := range strings.Split(string(raw), "\n") {
		if f := strings.Fields(line); len(f) == 3 && f[0] == "VmHWM:" {
			kb, err := strconv.Atoi(f[1])
			if err == nil {
				return float64(kb) / 1024
			}
		}
	}
	return 0
}
