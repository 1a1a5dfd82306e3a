package mesh

import (
	"math/rand"
	"testing"

	"github.com/paulmach/orb"
)

// wellfield is a rectangle with wells and a river that reaches beyond it.
func wellfield(wells int, size float64) Domain {
	d := Domain{Outer: orb.Ring{{0, 0}, {10000, 0}, {10000, 8000}, {0, 8000}}}
	rng := rand.New(rand.NewSource(1))
	for range wells {
		d.Points = append(d.Points, Point{At: orb.Point{500 + 9000*rng.Float64(), 500 + 7000*rng.Float64()}, Size: size})
	}
	d.Lines = append(d.Lines, Line{Name: "river", Path: orb.LineString{{-100, 3000}, {4000, 4000}, {6000, 3000}, {11000, 7000}}, Size: 60})
	return d
}

func TestRectangleWithWells(t *testing.T) {
	d := wellfield(20, 5)
	m := mustBuild(t, d, Options{Nodes: 20000})
	q := m.Quality
	if q.MinAngleDeg < 25 || q.EncroachedLeft != 0 || q.PoorOther != 0 || q.BudgetHit {
		t.Errorf("quality %+v", q)
	}
	for i, p := range d.Points {
		if v := m.PointNode[i]; m.X[v] != p.At[0] || m.Y[v] != p.At[1] {
			t.Errorf("point %d moved", i)
		}
	}
	if len(m.Regions) != 2 || m.Parts != 1 {
		t.Errorf("%d regions, %d parts; the river cuts the rectangle in two regions of one part", len(m.Regions), m.Parts)
	}
	f := m.Bisect()
	for _, s := range faultsOf(f, d, true) {
		t.Error("bisected: ", s)
	}
}
