package mesh

import (
	"context"
	"fmt"
	"math"
	"testing"

	"github.com/paulmach/orb"
)

// faultsOf lists what is wrong with a mesh of a domain: structure, orientation, Delaunay property, area, provenance.
func faultsOf(m *Mesh, d Domain, metricUsed bool) []string {
	var out []string
	say := func(format string, a ...any) {
		if len(out) < 12 {
			out = append(out, fmt.Sprintf(format, a...))
		}
	}
	edges := map[[2]int32]bool{}
	boundary := 0
	for t := range m.Region {
		v := m.Triangles[3*t : 3*t+3]
		if !(orient(m.X[v[0]], m.Y[v[0]], m.X[v[1]], m.Y[v[1]], m.X[v[2]], m.Y[v[2]]) > 0) {
			say("triangle %d is not counter-clockwise", t)
		}
		for k := range 3 {
			a, b := v[next3[k]], v[prev3[k]]
			edges[[2]int32{min(a, b), max(a, b)}] = true
			e := m.Neighbours[3*t+k]
			if e < 0 {
				boundary++
				if m.Constraint[t]>>k&1 == 0 {
					say("outer edge of triangle %d is not marked", t)
				}
				continue
			}
			j := m.backEdge(e, t, k)
			if m.Constraint[t]>>k&1 != m.Constraint[e]>>j&1 {
				say("edge of %d and %d marked on one side", t, e)
			}
			if m.Constraint[t]>>k&1 == 0 {
				if m.Region[t] != m.Region[e] {
					say("regions %d and %d touch without a line", m.Region[t], m.Region[e])
				}
				w := m.Triangles[3*int(e)+j]
				if !metricUsed && inCircle(m.X[v[0]], m.Y[v[0]], m.X[v[1]], m.Y[v[1]], m.X[v[2]], m.Y[v[2]], m.X[w], m.Y[w]) > 0 {
					say("edge between %d and %d is not Delaunay", t, e)
				}
			}
		}
	}
	if boundary != len(m.OutlineEdges) {
		say("%d outer edges, %d in OutlineEdges", boundary, len(m.OutlineEdges))
	}
	for _, e := range m.OutlineEdges {
		if !edges[[2]int32{min(e.A, e.B), max(e.A, e.B)}] {
			say("outline edge %d-%d is no edge", e.A, e.B)
		}
	}
	area := 0.0
	for _, r := range m.Regions {
		area += r.Area
	}
	want := math.Abs(ringArea(d.Outer))
	for _, h := range d.Holes {
		want -= math.Abs(ringArea(h))
	}
	// Tolerance: drawing vertices together moves each outline edge by at most the tolerance.
	length := 0.0
	for _, r := range allRings(d) {
		for i := range r {
			length += distance(r[i], r[(i+1)%len(r)])
		}
	}
	if slack := 4*m.Quality.Tolerance*length + 1e-12*want; !(math.Abs(area-want) <= slack) {
		say("area %v, want %v within %v", area, want, slack)
	}
	for i, p := range d.Points {
		v := m.PointNode[i]
		if dist := math.Hypot(m.X[v]-p.At[0], m.Y[v]-p.At[1]); !(dist <= m.Quality.Tolerance) {
			say("point %d is %v m from its node", i, dist)
		}
	}
	for i, l := range m.LineEdges {
		for j, e := range l {
			if !edges[[2]int32{min(e.A, e.B), max(e.A, e.B)}] {
				say("line %d: edge %d-%d is no edge", i, e.A, e.B)
			}
			if j > 0 && l[j-1].B != e.A && l[j-1].FractionB == e.FractionA && l[j-1].SegmentB == e.SegmentA && e.FractionA > 0 {
				say("line %d: edges %d and %d do not join", i, j-1, j)
			}
		}
	}
	return out
}

// ringArea is the signed area of a ring.
func ringArea(r orb.Ring) float64 {
	s := 0.0
	for i := range r {
		j := (i + 1) % len(r)
		s += (r[i][0]-r[0][0])*(r[j][1]-r[0][1]) - (r[j][0]-r[0][0])*(r[i][1]-r[0][1])
	}
	return s / 2
}

// mustBuild meshes a domain, and fails the test when the mesh is not sound.
func mustBuild(t *testing.T, d Domain, o Options) *Mesh {
	t.Helper()
	m, err := Build(context.Background(), d, o)
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range faultsOf(m, d, o.Metric != nil) {
		t.Error(f)
	}
	return m
}
