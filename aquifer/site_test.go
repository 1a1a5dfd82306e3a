package aquifer

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

func ringOf(xy ...float64) orb.Ring {
	var r orb.Ring
	for i := 0; i < len(xy); i += 2 {
		r = append(r, orb.Point{xy[i], xy[i+1]})
	}
	return append(r, r[0])
}

func pathOf(xy ...float64) orb.LineString {
	r := ringOf(xy...)
	return orb.LineString(r[:len(r)-1])
}

func best(v float64) *Parameter { return &Parameter{Best: v} }

// block is a rectangle of 1000 x 600 m with a held west edge.
func block() *Site {
	return &Site{
		Extent:     orb.Polygon{ringOf(0, 0, 1000, 0, 1000, 600, 0, 600)},
		Background: Zone{Transmissivity: best(100), Recharge: best(1e-3)},
		Edges:      []Edge{{Name: "west", Kind: PrescribedHead, Path: pathOf(0, 600, 0, 0), Levels: []float64{10}}},
	}
}

// Every planted fault is refused by name; none slips through as NaN, and nothing is computed.
func TestFaultsAreNamed(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		label string
		spoil func(s *Site)
		says  string
	}{
		{"no outline", func(s *Site) { s.Extent = nil }, "no outline"},
		{"transmissivity is not a number", func(s *Site) { s.Background.Transmissivity.Best = nan }, "transmissivity"},
		{"transmissivity is zero", func(s *Site) { s.Background.Transmissivity.Best = 0 }, "transmissivity"},
		{"transmissivity is not stated", func(s *Site) { s.Background.Transmissivity = nil }, "transmissivity"},
		{"transmissivity is infinite", func(s *Site) { s.Background.Transmissivity.Best = math.Inf(1) }, "transmissivity"},
		{"recharge is not a number", func(s *Site) { s.Background.Recharge.Best = nan }, "recharge"},
		{"leakage resistance is negative", func(s *Site) { s.Background.LeakageResistance = best(-5) }, "leakage resistance"},
		{"anisotropy below one", func(s *Site) { s.Background.Anisotropy = &Anisotropy{Ratio: 0.5} }, "anisotropy ratio"},
		{"anisotropy angle", func(s *Site) { s.Background.Anisotropy = &Anisotropy{Ratio: 2, AngleDeg: nan} }, "anisotropy angle"},
		{"level is not a number", func(s *Site) { s.Edges[0].Levels[0] = nan }, "levels"},
		{"three levels for two points", func(s *Site) { s.Edges[0].Levels = []float64{1, 2, 3} }, "3 levels for 2 points"},
		{"edge off the outline", func(s *Site) { s.Edges[0].Path = pathOf(50, 600, 50, 0) }, "leaves the outline by 50 m"},
		{"edge of one point", func(s *Site) { s.Edges[0].Path = pathOf(0, 600) }, "at least two"},
		{"unknown kind", func(s *Site) { s.Edges[0].Kind = 9 }, "kind 9"},
		{"conductance is zero", func(s *Site) { s.Edges[0].Kind = HeadDependent }, "conductance"},
		{"flux is infinite", func(s *Site) { s.Edges[0].Kind, s.Edges[0].Flux = PrescribedFlux, math.Inf(-1) }, "flux"},
		{"nothing fixes the head", func(s *Site) { s.Edges = nil }, "nothing fixes the head"},
		{"overlapping edges", func(s *Site) {
			s.Edges = append(s.Edges, Edge{Name: "again", Kind: PrescribedHead, Path: pathOf(0, 300, 0, 0), Levels: []float64{10}})
		}, "overlaps edge west over 300 m"},
		{"touching edges of different heads", func(s *Site) {
			s.Edges = append(s.Edges, Edge{Name: "south", Kind: PrescribedHead, Path: pathOf(0, 0, 1000, 0), Levels: []float64{11}})
		}, "differs from edge west's 10 m"},
		{"well on a held edge", func(s *Site) {
			s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{0, 300}, Radius: 0.1, Well: true}}
		}, "well A: it stands on edge west"},
		{"well on a river", func(s *Site) {
			s.Rivers = []River{{Name: "Aln", Path: pathOf(200, 300, 800, 300), WaterLevels: []float64{9}, Width: 3, BedResistance: *best(2)}}
			s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{500, 300}, Radius: 0.1, Well: true}}
		}, "well A: it stands on river Aln"},
		{"wells at one place", func(s *Site) {
			s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{500, 300}, Radius: 0.1, Well: true}, {Name: "well B", At: orb.Point{500, 300}, Radius: 0.1, Well: true}}
		}, "well B"},
		{"well outside", func(s *Site) {
			s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{5000, 300}, Radius: 0.1, Well: true}}
		}, "well A"},
		{"river outside", func(s *Site) {
			s.Rivers = []River{{Name: "Aln", Path: pathOf(2000, 0, 3000, 0), WaterLevels: []float64{9}, Width: 3, BedResistance: *best(2)}}
		}, "no part of it lies inside"},
		{"lake without resistance", func(s *Site) {
			s.Lakes = []Lake{{Name: "tarn", Area: orb.Polygon{ringOf(100, 100, 200, 100, 200, 200)}, WaterLevel: 9}}
		}, "bed resistance"},
		{"spring without conductance", func(s *Site) {
			s.Springs = []Spring{{Name: "holm", At: orb.Point{400, 300}, OutletLevel: 9, EffectiveRadius: 1}}
		}, "neither a conductance nor a measured flow"},
		{"spring with a flow that the head cannot give", func(s *Site) {
			flow := 5000.0
			s.Springs = []Spring{{Name: "holm", At: orb.Point{400, 300}, OutletLevel: 9, EffectiveRadius: 1, MeasuredFlow: &flow}}
		}, "not above its outlet"},
		{"radius is not a number", func(s *Site) { s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{500, 300}, Radius: nan}} }, "radius"},
	} {
		t.Run(c.label, func(t *testing.T) {
			s := block()
			c.spoil(s)
			_, err := Build(context.Background(), s, Options{Nodes: 300})
			if err == nil || !strings.Contains(err.Error(), c.says) {
				t.Errorf("error %v, want one that says %q", err, c.says)
			}
		})
	}
	if _, err := Build(context.Background(), block(), Options{Growth: math.NaN()}); err == nil {
		t.Error("a growth that is not a number passes")
	}
}

// Several faults are reported at once.
func TestAllFaultsAtOnce(t *testing.T) {
	s := block()
	s.Background.Transmissivity.Best = -1
	s.Edges[0].Levels = nil
	s.Springs = []Spring{{Name: "holm"}}
	var e *SiteError
	if _, err := Build(context.Background(), s, Options{}); !errors.As(err, &e) || len(e.Problems) < 4 {
		t.Errorf("error %v, want at least four problems", err)
	}
}

// An edge's levels run along its own direction, whichever way the outline is drawn, and round a whole ring.
func TestEdgeLevelsFollowThePath(t *testing.T) {
	for _, reversed := range []bool{false, true} {
		s := block()
		if reversed {
			s.Extent[0].Reverse()
		}
		s.Background.Recharge = nil
		s.Edges[0].Path, s.Edges[0].Levels = pathOf(0, 600, 0, 0, 1000, 0), []float64{4, 10, 30}
		m, err := Build(context.Background(), s, Options{Nodes: 300})
		if err != nil {
			t.Fatal(err)
		}
		seen := 0
		for n := range m.Mesh.X {
			x, y := m.Mesh.X[n], m.Mesh.Y[n]
			switch {
			case x == 0:
				seen++
				if want := 10 - y/100; math.Abs(m.prescribed[n]-want) > 1e-9 {
					t.Errorf("level at (0, %v) is %v, want %v", y, m.prescribed[n], want)
				}
			case y == 0:
				seen++
				if want := 10 + x/50; math.Abs(m.prescribed[n]-want) > 1e-9 {
					t.Errorf("level at (%v, 0) is %v, want %v", x, m.prescribed[n], want)
				}
			case m.isPrescribed[n]:
				t.Errorf("(%v, %v) is prescribed", x, y)
			}
		}
		if seen < 10 {
			t.Errorf("%d nodes on the edge", seen)
		}
	}
}

// The outline of a circle as one closed edge.
func TestWholeRingAsEdge(t *testing.T) {
	s := block()
	s.Edges[0].Path = orb.LineString(s.Extent[0])
	m, err := Build(context.Background(), s, Options{Nodes: 500})
	if err != nil {
		t.Fatal(err)
	}
	h, err := m.Heads(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	b := m.Balance(h, nil)
	// all the recharge leaves through the edge: 1000 x 600 m² x 1e-3 m/d
	if math.Abs(b.Out-600) > 1e-6 || math.Abs(b.Error()) > 1e-9 {
		t.Errorf("out %.9f m³/d, want 600; error %.1e", b.Out, b.Error())
	}
}

// Control volumes sum to the area in every zone, isotropic or not, and none is negative.
func TestControlVolumesSumToTheArea(t *testing.T) {
	s := block()
	s.Zones = []Zone{{Name: "a", Area: orb.MultiPolygon{{ringOf(300, 100, 700, 150, 600, 500, 350, 450)}}, Transmissivity: best(5), Anisotropy: &Anisotropy{Ratio: 6, AngleDeg: 20}}}
	m, err := Build(context.Background(), s, Options{Nodes: 1500})
	if err != nil {
		t.Fatal(err)
	}
	volume := make([]float64, len(m.Mesh.X))
	total := 0.0
	for t3, a := range m.area {
		volume[m.Mesh.Triangles[t3]] += a
		total += a
	}
	if math.Abs(total-600000) > 1e-6 {
		t.Errorf("volumes sum to %.9f m², want 600000", total)
	}
	for n, v := range volume {
		if !(v > 0) {
			t.Errorf("control volume of node %d is %v m²", n, v)
		}
	}
	if wrong := m.CountWrongSigns(); wrong != 0 {
		t.Errorf("%d couplings have the wrong sign", wrong)
	}
}

// A measured flow is given back by the model under present pumping.
func TestMeasuredFlowIsReproduced(t *testing.T) {
	s := block()
	flow := 40.0
	s.Springs = []Spring{{Name: "holm", At: orb.Point{400, 300}, OutletLevel: 9, EffectiveRadius: 1, MeasuredFlow: &flow}}
	s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{700, 300}, Radius: 0.1, Well: true, PresentRate: 100}}
	m, err := Build(context.Background(), s, Options{Nodes: 1500})
	if err != nil {
		t.Fatal(err)
	}
	h, err := m.Heads(context.Background(), []Sink{{m.RequestNode[0], 100}})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range m.Balance(h, []Sink{{m.RequestNode[0], 100}}).Features {
		if f.Kind == SpringFeature && math.Abs(f.Out-flow) > 1e-9*flow {
			t.Errorf("the spring gives %.12f m³/d, measured were 40", f.Out)
		}
	}
	if m.Factorisations != 2 {
		t.Errorf("%d factorisations, want 2: one to find the conductance", m.Factorisations)
	}
}

// Later zones win, property by property, and each overlap that changed a value is listed.
func TestZoneOverlay(t *testing.T) {
	s := block()
	s.Zones = []Zone{
		{Name: "a", Area: orb.MultiPolygon{{ringOf(100, 100, 500, 100, 500, 500, 100, 500)}}, Transmissivity: best(5), Recharge: best(2e-3)},
		{Name: "b", Area: orb.MultiPolygon{{ringOf(300, 100, 900, 100, 900, 500, 300, 500)}}, Transmissivity: best(7)},
	}
	r, over := s.properties(orb.Point{400, 300})
	if r.mean != 7 || r.recharge != 2e-3 || len(over) != 1 || over[0].Property != "transmissivity" {
		t.Errorf("got T %v, recharge %v, overlaps %v", r.mean, r.recharge, over)
	}
	m, err := Build(context.Background(), s, Options{Nodes: 500})
	if err != nil {
		t.Fatal(err)
	}
	if len(m.Overlaps) != 1 || math.Abs(m.Overlaps[0].Area-200*400) > 1e-6 {
		t.Errorf("overlaps %v, want one of 80000 m²", m.Overlaps)
	}
}

// Cancelling ends the build with the context's error.
func TestBuildCanBeInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Build(ctx, block(), Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
}
