package mesh

import (
	"math"
	"testing"

	"github.com/paulmach/orb"
)

// tensor of a ratio and an angle, with determinant 100².
func tensor(ratio, angleDeg float64) Tensor {
	major, minor := 100*math.Sqrt(ratio), 100/math.Sqrt(ratio)
	s, c := math.Sincos(angleDeg * math.Pi / 180)
	return Tensor{major*c*c + minor*s*s, (major - minor) * s * c, major*s*s + minor*c*c}
}

func TestMetricMap(t *testing.T) {
	for _, ratio := range []float64{1, 2, 10, 1000} {
		for _, angle := range []float64{0, 30, 90, 137} {
			tt := tensor(ratio, angle)
			m, ok := metricOf(tt)
			if !ok {
				t.Fatal("refused")
			}
			// M T M' must be a multiple of the identity: what the map is for. 1e-10: ratio times rounding, with room.
			a := m.a*(tt.Txx*m.a+tt.Txy*m.b) + m.b*(tt.Txy*m.a+tt.Tyy*m.b)
			b := m.b*(tt.Txx*m.a+tt.Txy*m.b) + m.c*(tt.Txy*m.a+tt.Tyy*m.b)
			c := m.b*(tt.Txx*m.b+tt.Txy*m.c) + m.c*(tt.Txy*m.b+tt.Tyy*m.c)
			if math.Abs(a-100) > 1e-8 || math.Abs(b) > 1e-8 || math.Abs(c-100) > 1e-8 {
				t.Errorf("ratio %v angle %v: %v %v %v", ratio, angle, a, b, c)
			}
			x, y := m.from(m.to(3, -7))
			if math.Abs(x-3) > 1e-10 || math.Abs(y+7) > 1e-10 {
				t.Errorf("there and back: %v %v", x, y)
			}
		}
	}
	for _, bad := range []Tensor{{}, {1, 2, 1}, {-1, 0, -1}, {math.NaN(), 0, 1}, {math.Inf(1), 0, 1}} {
		if _, ok := metricOf(bad); ok {
			t.Errorf("%v was taken", bad)
		}
	}
}

// TestAnisotropic: in each region the conductances by cotangents in its metric are not negative, whatever the ratio.
func TestAnisotropic(t *testing.T) {
	d := wellfield(10, 20)
	d.Lines = append(d.Lines, Line{Path: orb.LineString{{2000, 5000}, {6000, 5500}, {5000, 7500}, {2500, 7000}, {2000, 5000}}, Name: "zone"})
	for _, ratio := range []float64{1, 2, 5, 20, 100} {
		calls := 0
		tensors := map[int]Tensor{}
		m := mustBuild(t, d, Options{Nodes: 5000, Metric: func(at orb.Point) Tensor {
			tt := tensor([]float64{ratio, 1, math.Sqrt(ratio)}[calls%3], 40*float64(calls))
			tensors[calls] = tt
			calls++
			return tt
		}})
		if calls != len(m.Regions) {
			t.Errorf("%d calls for %d regions", calls, len(m.Regions))
		}
		negative := 0
		lowest := 0.0
		total := map[[2]int32]float64{}
		for tr := range m.Region {
			tt := tensors[int(m.Region[tr])]
			v := m.Triangles[3*tr : 3*tr+3]
			for k := range 3 {
				i, j := v[next3[k]], v[prev3[k]]
				ux, uy := m.X[i]-m.X[v[k]], m.Y[i]-m.Y[v[k]]
				wx, wy := m.X[j]-m.X[v[k]], m.Y[j]-m.Y[v[k]]
				// cot in the metric of T^-1: u' T^-1 w sqrt(det)/cross, T^-1 = adj/det
				cross := ux*wy - uy*wx
				det := tt.Txx*tt.Tyy - tt.Txy*tt.Txy
				dot := (ux*(tt.Tyy*wx-tt.Txy*wy) + uy*(-tt.Txy*wx+tt.Txx*wy)) / math.Sqrt(det)
				total[[2]int32{min(i, j), max(i, j)}] += math.Sqrt(det) * dot / cross / 2
			}
		}
		for _, c := range total {
			// 1e-6 of T: right angles at lines give zero but for rounding of coordinates.
			if c < -1e-6*100 {
				negative++
				lowest = min(lowest, c)
			}
		}
		t.Logf("ratio %v: %d nodes, angle %.2f free %.2f, at sharp %d, other %d, obtuse %.3f, encroached %d (%d), negative %d (%.3g)", ratio, len(m.X), m.Quality.MinAngleDeg, m.Quality.MinAngleFreeDeg,
			m.Quality.PoorAtSharpInput, m.Quality.PoorOther, m.Quality.ObtuseShare, m.Quality.EncroachedLeft, m.Quality.EncroachedAtSharp, negative, lowest)
		if negative > 0 || m.Quality.EncroachedLeft > 0 || m.Quality.PoorOther > 0 || m.Quality.BudgetHit {
			t.Errorf("ratio %v: %d negative conductances, quality %+v", ratio, negative, m.Quality)
		}
	}
}
