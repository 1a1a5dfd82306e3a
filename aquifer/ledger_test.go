package aquifer

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"github.com/paulmach/orb"
)

// ledgerTolerance is what is left of a nodal balance, and of a feature's flow against the model's own, as a share of the throughflow: rounding of
// a direct solve, with room for the worst of hundreds of sites.
const ledgerTolerance = 1e-9

// dice throws the figures of a random site.
type dice struct{ *rand.Rand }

func (d dice) in(a, b float64) float64      { return a + (b-a)*d.Float64() }
func (d dice) level(a, b float64) *float64  { v := d.in(a, b); return &v }
func (d dice) best(a, b float64) *Parameter { return best(math.Exp(d.in(math.Log(a), math.Log(b)))) }
func (d dice) chance(oneIn int) bool        { return d.IntN(oneIn) == 0 }

// randomSite has a bent or right-angled outline, perhaps a hole, edges whose paths leave the outline a little and end between its vertices, zones of
// every kind that overlap and reach outside, rivers that come back along themselves, a lake with an island, a spring.
func randomSite(d dice) *Site {
	const length, width = 4000.0, 3000.0
	outer := orb.Ring{{0, 0}, {length, 0}, {length * d.in(0.9, 1.1), width / 2}, {length, width}, {length / 2, width * d.in(0.8, 1.2)}, {0, width}, {0, 0}}
	if d.chance(3) {
		outer = orb.Ring{{0, 0}, {length, 0}, {length, width}, {0, width}, {0, 0}}
	}
	s := &Site{Extent: orb.Polygon{outer}}
	if d.chance(2) {
		shaft := orb.Ring{{1500, 2000}, {1500, 2300}, {1900, 2300}, {1900, 2000}, {1500, 2000}}
		s.Extent = append(s.Extent, shaft)
		if d.chance(2) {
			s.Edges = append(s.Edges, Edge{Name: "shaft", Kind: []EdgeKind{PrescribedHead, HeadDependent}[d.IntN(2)], Path: orb.LineString(shaft), Levels: []float64{7}, Conductance: *d.best(0.01, 1)})
		}
	}
	s.Background = Zone{Transmissivity: d.best(50, 2000), Recharge: d.best(1e-4, 1e-3)}
	if d.chance(4) {
		s.Background.Anisotropy = &Anisotropy{Ratio: d.in(1, 20), AngleDeg: d.in(-180, 180)}
	}
	off := d.in(-3, 3)
	s.Edges = append(s.Edges, Edge{Name: "west", Kind: PrescribedHead, Path: orb.LineString{{off, width * d.in(0.6, 0.99)}, {off / 2, width / 2}, {0, width * d.in(0.01, 0.3)}},
		Levels: []float64{d.in(5, 10), d.in(5, 10), d.in(5, 10)}})
	if d.chance(2) {
		s.Edges = append(s.Edges, Edge{Name: "south", Kind: EdgeKind(d.IntN(3)), Path: orb.LineString{{d.in(100, 1500), off}, {d.in(2000, 3900), -off}},
			Levels: []float64{d.in(5, 10), d.in(5, 10)}, Flux: d.in(-0.1, 0.3), Conductance: *d.best(0.01, 1)})
	}
	for k := range d.IntN(5) {
		s.Zones = append(s.Zones, randomZone(d, k))
	}
	for k := range d.IntN(3) {
		s.Rivers = append(s.Rivers, randomRiver(d, k))
	}
	if d.chance(2) {
		x, y := d.in(200, 3000), d.in(200, 2000)
		s.Lakes = []Lake{{Name: "tarn", Area: orb.Polygon{{{x, y}, {x + 300, y}, {x + 300, y + 400}, {x, y + 400}, {x, y}}, {{x + 100, y + 100}, {x + 100, y + 200}, {x + 200, y + 200}, {x + 100, y + 100}}},
			WaterLevel: 8, BedLevel: d.level(4, 7), BedResistance: *d.best(1, 1000)}}
	}
	if d.chance(2) {
		s.Springs = []Spring{{Name: "holm", At: orb.Point{d.in(300, 3700), d.in(200, 1900)}, OutletLevel: d.in(4, 9), Conductance: d.best(10, 500), EffectiveRadius: 1}}
	}
	s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{d.in(300, 3700), d.in(200, 1900)}, Radius: 0.2, Well: true}}
	return s
}

func randomZone(d dice, k int) Zone {
	x, y, a, b := math.Round(d.in(-500, 3500)), math.Round(d.in(-500, 2500)), math.Round(d.in(200, 2000)), math.Round(d.in(200, 2000))
	z := Zone{Name: fmt.Sprint("zone ", k), Area: orb.MultiPolygon{{{{x, y}, {x + a, y}, {x + a*d.in(0.8, 1), y + b}, {x, y + b*d.in(0.7, 1)}, {x, y}}}}}
	switch d.IntN(4) {
	case 0:
		z.Transmissivity = d.best(1, 5000)
	case 1:
		z.Transmissivity, z.Anisotropy = d.best(50, 500), &Anisotropy{Ratio: d.in(1, 30), AngleDeg: d.in(0, 90)}
	case 2:
		z.LeakageResistance, z.SourceHead, z.Top = d.best(100, 1e5), d.level(5, 12), d.level(-5, 4)
	case 3:
		z.Recharge = d.best(1e-5, 2e-3)
	}
	return z
}

func randomRiver(d dice, k int) River {
	r := River{Name: fmt.Sprint("river ", k), Width: d.in(1, 20), BedResistance: *d.best(0.1, 100), WaterLevels: []float64{d.in(6, 11)}}
	x, y := math.Round(d.in(-200, 1000)), d.in(-200, 3200)
	for range 2 + d.IntN(6) {
		r.Path = append(r.Path, orb.Point{x, y})
		x, y = x+math.Round(d.in(50, 1200)), math.Max(-300, math.Min(3300, y+d.in(-500, 500)))
	}
	switch d.IntN(5) {
	case 0:
		r.Path = append(r.Path, r.Path[0])
	case 1:
		r.Path = orb.LineString{{800, 0}, {2800, 0}, {3200, 400}} // on the outline for a while
	}
	if d.chance(2) {
		r.WaterLevels = nil
		for range r.Path {
			r.WaterLevels, r.BedLevels = append(r.WaterLevels, d.in(6, 11)), append(r.BedLevels, d.in(1, 6))
		}
	}
	return r
}

// On random sites the ledger finds every node in balance and every feature's flow as the model does, on the mesh and on its bisection.
func TestLedgerOnRandomSites(t *testing.T) {
	ctx, count := context.Background(), 12
	if os.Getenv("SPRINGBOUND_LONG") == "1" {
		count = 400
	}
	checked := 0
	for seed := range uint64(count) {
		d := dice{rand.New(rand.NewPCG(seed, 5))}
		s := randomSite(d)
		m, err := Build(ctx, s, Options{Nodes: 1000, Finest: 30})
		if err != nil {
			continue // a river or a lake outside the extent: refused by name
		}
		sinks := []Sink{{Node: m.RequestNode[0], Rate: d.in(0, 3000)}}
		if checked++; checked%6 == 0 {
			if m, err = m.Bisected(ctx, Options{}, 1); err != nil {
				t.Fatal(err)
			}
		}
		state, err := m.Settle(ctx, sinks)
		if err != nil {
			t.Fatalf("site %d: %v", seed, err)
		}
		b := m.Ledger(1).Book(state.Heads, sinks)
		through := math.Max(b.In, b.Out)
		if worst := math.Abs(b.Residual[b.Worst]); !(worst <= ledgerTolerance*through) || !(b.LevelsApart <= 1e-9) { // rounding of a level
			t.Errorf("site %d: a node at %v keeps %.2e of the throughflow; levels differ by %.1e m", seed, m.At(b.Worst), worst/through, b.LevelsApart)
		}
		for _, x := range m.Balance(state.Heads, sinks).Features {
			for _, y := range b.Features {
				if x.Kind == y.Kind && x.Index == y.Index && !(math.Max(math.Abs(x.In-y.In), math.Abs(x.Out-y.Out)) <= ledgerTolerance*through) {
					t.Errorf("site %d: %s %s: model in %.6f out %.6f, ledger in %.6f out %.6f", seed, x.Kind, x.Feature, x.In, x.Out, y.In, y.Out)
				}
			}
		}
	}
	if checked < count/2 {
		t.Errorf("only %d of %d sites could be built", checked, count)
	}
}

// A model without a feature holds nothing of it, on the same mesh; what alone fixes the head cannot be taken away.
func TestWithout(t *testing.T) {
	ctx := context.Background()
	d := dice{rand.New(rand.NewPCG(3, 5))}
	s := block()
	s.Rivers = []River{{Name: "Aln", Path: pathOf(150, 120, 850, 150), WaterLevels: []float64{9}, Width: 3, BedResistance: *d.best(1, 10)}}
	s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{420, 260}, Radius: 0.1, Well: true}}
	m, err := Build(ctx, s, Options{Nodes: 800})
	if err != nil {
		t.Fatal(err)
	}
	sinks := []Sink{{m.RequestNode[0], 50}}
	var only *OnlySource
	for _, c := range []struct {
		kind  FeatureKind
		index int
	}{{EdgeFeature, 0}, {RiverFeature, 0}} {
		less, err := m.Without(ctx, Options{}, c.kind, c.index)
		if err != nil {
			t.Fatal(err)
		}
		h, err := less.Heads(ctx, sinks)
		if err != nil {
			t.Fatal(err)
		}
		if len(less.Mesh.X) != len(m.Mesh.X) {
			t.Errorf("%d nodes, with the feature %d", len(less.Mesh.X), len(m.Mesh.X))
		}
		b := less.Balance(h, sinks)
		if !(math.Abs(b.Error()) <= ledgerTolerance) {
			t.Errorf("without %s the balance is off by %.2e", c.kind, b.Error())
		}
		for _, f := range b.Features {
			if f.Kind == c.kind && f.Index == c.index && f.In+f.Out > 1e-12 { // a sealed bed lets 1e-40 through
				t.Errorf("%s %s still gives %v", f.Kind, f.Feature, f)
			}
		}
		other := RiverFeature
		if c.kind == RiverFeature {
			other = EdgeFeature
		}
		if c.kind == EdgeFeature {
			if _, err = less.Without(ctx, Options{}, other, 0); err == nil {
				t.Error("the river alone fixes the head and was taken away")
			} else if only, _ = err.(*OnlySource); only == nil {
				t.Errorf("%v", err)
			}
		}
	}
}

// Edges whose ends lie between vertices of the outline, the later ones nearest to its last side: each is measured on the ring as it is by then.
func TestEdgesThatEndBetweenVertices(t *testing.T) {
	s := block()
	s.Edges = []Edge{
		{Name: "a", Kind: PrescribedHead, Path: pathOf(100, 0, 300, 0), Levels: []float64{10}},
		{Name: "b", Kind: PrescribedHead, Path: pathOf(500, 0, 700, 0), Levels: []float64{10}},
		{Name: "c", Kind: PrescribedHead, Path: pathOf(0, 400, 0, 100), Levels: []float64{10}},
	}
	m, err := Build(context.Background(), s, Options{Nodes: 600})
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{200, 200, 300} {
		e, length := m.HeadEdges[i], 0.0
		for k := 1; k < len(e.Nodes); k++ {
			length += distance(m.At(e.Nodes[k-1]), m.At(e.Nodes[k]))
		}
		if math.Abs(length-want) > 1e-6 { // the ends are vertices
			t.Errorf("edge %s covers %.3f m, want %.0f", e.Name, length, want)
		}
	}
}
