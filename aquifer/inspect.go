package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

// DefaultGrowth is the growth of edge length per distance where none is asked for [-].
const DefaultGrowth = defaultGrowth

// Interpolate reads a nodal field at a place by the triangle's linear interpolant; false outside the domain.
func (m *Model) Interpolate(field []float64, p orb.Point) (float64, bool) {
	t, ok := m.Mesh.Locate(p)
	if !ok {
		return math.NaN(), false
	}
	a, b, c := m.Mesh.Triangles[3*t], m.Mesh.Triangles[3*t+1], m.Mesh.Triangles[3*t+2]
	pa, pb, pc := m.At(a), m.At(b), m.At(c)
	twice := func(p, q, r orb.Point) float64 { return (q[0]-p[0])*(r[1]-p[1]) - (q[1]-p[1])*(r[0]-p[0]) }
	all := twice(pa, pb, pc)
	return (twice(p, pb, pc)*field[a] + twice(pa, p, pc)*field[b] + twice(pa, pb, p)*field[c]) / all, true
}

// circlePoints is how many places a circle's mean is taken over: the mean of a smooth periodic function converges faster than any
// power of their number.
const circlePoints = 72

// CircleMean is the mean of a nodal field over a circle around a node; NaN where part of the circle is outside.
func (m *Model) CircleMean(field []float64, node int32, radius float64) float64 {
	sum := 0.0
	c := m.At(node)
	for i := range circlePoints {
		sin, cos := math.Sincos(2 * math.Pi * (float64(i) + 0.5) / circlePoints)
		v, ok := m.Interpolate(field, orb.Point{c[0] + radius*cos, c[1] + radius*sin})
		if !ok {
			return math.NaN()
		}
		sum += v
	}
	return sum / circlePoints
}

// UniformRadius is the distance from a node to the nearest place where the ground is not that of the node any more: another
// transmissivity, an exchange along a line or at a spring, the outline. Zero under anisotropy [m].
func (m *Model) UniformRadius(node int32) float64 {
	want := m.tensorAt(node)
	if want.Txx != want.Tyy || want.Txy != 0 {
		return 0
	}
	special := make([]bool, len(m.Mesh.X))
	for t, r := range m.Mesh.Region {
		if m.regions[r].tensor != want {
			for k := 0; k < 3; k++ {
				special[m.Mesh.Triangles[3*t+k]] = true
			}
		}
	}
	for _, e := range m.Exchanges {
		if e.Kind == LeakageFeature {
			continue
		}
		for _, n := range e.Nodes {
			special[n] = true
		}
	}
	return m.nearest(node, func(n int) bool { return special[n] || m.onOutline[n] })
}

// DistanceToSource is the distance from a node to the nearest place that fixes the head: a prescribed-head or head-dependent edge, a river,
// a lake, a spring or leakage [m].
func (m *Model) DistanceToSource(node int32) float64 {
	source := append([]bool(nil), m.isPrescribed...)
	for _, e := range m.Exchanges {
		for _, n := range e.Nodes {
			source[n] = true
		}
	}
	return m.nearest(node, func(n int) bool { return source[n] })
}

func (m *Model) nearest(node int32, is func(n int) bool) float64 {
	best := math.Inf(1)
	at := m.At(node)
	for n := range m.Mesh.X {
		if is(n) {
			best = math.Min(best, math.Hypot(m.Mesh.X[n]-at[0], m.Mesh.Y[n]-at[1]))
		}
	}
	return best
}

// Storage is the storage coefficient stated at a node, that of its first triangle; NaN where none is [-].
func (m *Model) Storage(node int32) float64 {
	return m.regions[m.Mesh.Region[m.Mesh.NodeTriangles(node)[0]]].storage
}

// LeakageLength is sqrt(T c) of the leakage at a node, the least of its triangles; infinite where there is none [m].
func (m *Model) LeakageLength(node int32) float64 {
	shortest := math.Inf(1)
	for _, t := range m.Mesh.NodeTriangles(node) {
		if r := &m.regions[m.Mesh.Region[t]]; r.leak > 0 {
			shortest = math.Min(shortest, math.Sqrt(r.mean/r.leak))
		}
	}
	return shortest
}
