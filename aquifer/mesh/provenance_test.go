package mesh

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand"
	"runtime"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// covered sums, per segment of a path, the fractions that a line's edges cover, and checks that they join.
func covered(t *testing.T, m *Mesh, line int, segments int) []float64 {
	t.Helper()
	sum := make([]float64, segments)
	for i, e := range m.LineEdges[line] {
		if e.SegmentA != e.SegmentB || !(e.FractionB > e.FractionA) {
			t.Errorf("line %d edge %d: %+v does not run forward on one segment", line, i, e)
		}
		sum[e.SegmentA] += e.FractionB - e.FractionA
		if i == 0 {
			continue
		}
		before := m.LineEdges[line][i-1]
		// 1e-9: fractions come from one projection each; nodes on a segment are off it by rounding only.
		if before.SegmentB == e.SegmentA && math.Abs(before.FractionB-e.FractionA) < 1e-9 && before.B != e.A {
			t.Errorf("line %d edge %d starts at node %d, the one before ends at %d", line, i, e.A, before.B)
		}
	}
	return sum
}

func TestLineEdgesCoverTheLine(t *testing.T) {
	inner := orb.LineString{{1000, 1000}, {4000, 2000}, {4000, 5000}, {9000, 7000}, {1000, 7000}, {1000, 1000}}
	d := Domain{
		Outer: orb.Ring{{0, 0}, {10000, 0}, {10000, 8000}, {0, 8000}},
		Holes: []orb.Ring{{{6000, 1000}, {7000, 1000}, {7000, 2000}, {6000, 2000}}},
		Lines: []Line{
			{Path: inner},
			{Path: orb.LineString{{500, 4000}, {9500, 4000}}, Size: 100},            // crosses the first twice
			{Path: orb.LineString{{2000, 0}, {8000, 0}}},                            // on the outline
			{Path: orb.LineString{{-5000, 6000}, {5000, 6000}}},                     // half outside
			{Path: orb.LineString{{5000, 1500}, {8000, 1500}}},                      // through the hole: a third is lost
			{Path: orb.LineString{{9500, 4000}, {500, 4000}}},                       // the second one backwards
			{Path: orb.LineString{{4000, 3000}, {4000, 4500}, {4000, 2500}}},        // out and back, on the first
			{Path: orb.LineString{{0, 0}, {0, 8000}, {10000, 8000}}, Name: "coast"}, // vertices of the outline
		},
	}
	m := mustBuild(t, d, Options{Nodes: 3000})
	for i, want := range [][]float64{{1, 1, 1, 1, 1}, {1}, {1}, {0.5}, {2. / 3}, {1}, {1, 1}, {1, 1}} {
		have := covered(t, m, i, len(want))
		for j := range want {
			if math.Abs(have[j]-want[j]) > 1e-9 { // rounding of fractions
				t.Errorf("line %d segment %d covered %v, want %v", i, j, have[j], want[j])
			}
		}
	}
	for j, e := range m.LineEdges[1] {
		if l := math.Hypot(m.X[e.A]-m.X[e.B], m.Y[e.A]-m.Y[e.B]); l > 100*(1+shellTolerance) {
			t.Errorf("edge %d of the line of size 100 is %v long", j, l)
		}
	}
	f := m.Bisect()
	for i := range d.Lines {
		if len(f.LineEdges[i]) != 2*len(m.LineEdges[i]) {
			t.Errorf("bisected line %d has %d edges, not twice %d", i, len(f.LineEdges[i]), len(m.LineEdges[i]))
		}
		covered(t, f, i, len(d.Lines[i].Path)-1)
	}
	outline := make([][]float64, 2)
	for i, r := range allRings(d) {
		outline[i] = make([]float64, len(r))
	}
	for _, e := range m.OutlineEdges {
		outline[e.Ring][e.Segment] += math.Abs(e.FractionB - e.FractionA)
	}
	for i := range outline {
		for j, s := range outline[i] {
			if math.Abs(s-1) > 1e-9 {
				t.Errorf("ring %d segment %d covered %v", i, j, s)
			}
		}
	}
}

func TestGivenPlacesKeepTheirCoordinates(t *testing.T) {
	for seed := range 10 {
		d, fault := site(rand.New(rand.NewSource(int64(300 + seed))))
		if fault != "" {
			continue
		}
		m := mustBuild(t, d, Options{Nodes: 1000})
		if len(m.Notes) > len(d.Lines) { // something was drawn together: another test's business
			continue
		}
		at := map[orb.Point]bool{}
		for i := range m.X {
			at[orb.Point{m.X[i], m.Y[i]}] = true
		}
		for _, r := range allRings(d) {
			for _, p := range r {
				if !at[p] {
					t.Errorf("seed %d: no node at the ring's vertex %v", seed, p)
				}
			}
		}
		for i, p := range d.Points {
			if v := m.PointNode[i]; m.X[v] != p.At[0] || m.Y[v] != p.At[1] {
				t.Errorf("seed %d: %s moved", seed, p.Name)
			}
		}
	}
}

func TestSameInputSameBytes(t *testing.T) {
	d, _ := site(rand.New(rand.NewSource(3)))
	bytesOf := func() []byte {
		m, err := Build(context.Background(), d, Options{Nodes: 3000})
		if err != nil {
			t.Fatal(err)
		}
		var b bytes.Buffer
		fmt.Fprint(&b, m.X, m.Y, m.Triangles, m.Neighbours, m.Constraint, m.Region, m.Regions, m.PointNode, m.LineEdges, m.OutlineEdges, m.Quality, m.Notes)
		return b.Bytes()
	}
	first := bytesOf()
	before := runtime.GOMAXPROCS(1)
	defer runtime.GOMAXPROCS(before)
	if !bytes.Equal(first, bytesOf()) {
		t.Error("two builds of one domain differ")
	}
}

func TestLocate(t *testing.T) {
	d := wellfield(10, 20)
	d.Holes = []orb.Ring{{{4900, 7100}, {5500, 7100}, {5500, 7400}}}
	m := mustBuild(t, d, Options{Nodes: 4000})
	rng := rand.New(rand.NewSource(2))
	for range 5000 {
		p := orb.Point{11000*rng.Float64() - 500, 9000*rng.Float64() - 500}
		tr, ok := m.Locate(p)
		set := newRingSet(allRings(d))
		inside := set.sideOf(p, 0) == insideRing && set.sideOf(p, 1) != insideRing
		if ok != inside {
			t.Fatalf("%v: found %v, inside %v", p, ok, inside)
		}
		if ok && !m.holds(tr, p) {
			t.Fatalf("%v is not in triangle %d", p, tr)
		}
	}
	for v := range m.X {
		tr, ok := m.Locate(orb.Point{m.X[v], m.Y[v]})
		if !ok || !m.holds(tr, orb.Point{m.X[v], m.Y[v]}) {
			t.Fatalf("node %d not found", v)
		}
		touched := false
		for _, u := range m.NodeTriangles(int32(v)) {
			touched = touched || u == tr
		}
		if !touched {
			t.Fatalf("node %d found in triangle %d, which it is no corner of", v, tr)
		}
	}
	if _, ok := m.Locate(orb.Point{math.NaN(), 0}); ok {
		t.Error("found a place that is no number")
	}
}

func TestBisectKeepsShape(t *testing.T) {
	d := wellfield(5, 50)
	m := mustBuild(t, d, Options{Nodes: 500})
	f := m.Bisect()
	for _, s := range faultsOf(f, d, false) {
		t.Error(s)
	}
	// Euler: nodes - edges + triangles = 1 for a connected domain without holes; edges = (3 triangles + outer ones)/2.
	for _, g := range []*Mesh{m, f} {
		edges := (3*len(g.Region) + len(g.OutlineEdges)) / 2
		if e := len(g.X) - edges + len(g.Region); e != 1 {
			t.Errorf("Euler characteristic %d", e)
		}
	}
	if len(f.Region) != 4*len(m.Region) || len(f.OutlineEdges) != 2*len(m.OutlineEdges) {
		t.Errorf("%d triangles from %d, %d outer edges from %d", len(f.Region), len(m.Region), len(f.OutlineEdges), len(m.OutlineEdges))
	}
}

func TestBudget(t *testing.T) {
	m := mustBuild(t, wellfield(20, 1), Options{Nodes: 20000, MaxNodes: 2000})
	if !m.Quality.BudgetHit || len(m.X) > 2000 {
		t.Errorf("%d nodes, budget hit %v", len(m.X), m.Quality.BudgetHit)
	}
	if n := m.Notes[len(m.Notes)-1].Text; !strings.Contains(n, "budget of 2000 nodes was hit") {
		t.Errorf("note %q", n)
	}
}

func TestSizesAreMet(t *testing.T) {
	for _, n := range []int{300, 1000, 5000, 30000} {
		m := mustBuild(t, Domain{Outer: square()}, Options{Nodes: n})
		if r := float64(len(m.X)) / float64(n); r < 1 || r > 1.2 {
			t.Errorf("%d nodes for %d wanted", len(m.X), n)
		}
	}
	d := wellfield(8, 15)
	m := mustBuild(t, d, Options{Nodes: 8000})
	if e := EstimateNodes(d, Options{Nodes: 8000}); math.Abs(e/float64(len(m.X))-1) > 0.1 {
		t.Errorf("%v nodes expected, %d made", e, len(m.X))
	}
	for i := range d.Points {
		v := m.PointNode[i]
		for _, tr := range m.NodeTriangles(v) {
			for _, w := range m.Triangles[3*tr : 3*tr+3] {
				l := math.Hypot(m.X[w]-m.X[v], m.Y[w]-m.Y[v])
				if w != v && !(l > 0.6*15 && l < 1.5*15) { // the first ring is put at 15 m and moved a little
					t.Errorf("edge of %v m at a well of size 15", l)
				}
			}
		}
	}
}

// stopAfter is a context that reports cancellation from its n-th question on.
type stopAfter struct {
	context.Context
	left int
}

func (c *stopAfter) Err() error {
	if c.left--; c.left < 0 {
		return context.Canceled
	}
	return nil
}

func TestStops(t *testing.T) {
	d := wellfield(10, 20)
	for n := 0; ; n++ {
		_, err := Build(&stopAfter{context.Background(), n}, d, Options{Nodes: 20000})
		if err == nil {
			if n < 5 {
				t.Errorf("only %d questions asked", n)
			}
			break
		}
		if !errors.Is(err, context.Canceled) {
			t.Fatal(err)
		}
	}
}
