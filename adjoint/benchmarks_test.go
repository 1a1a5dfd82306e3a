package adjoint_test

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/paulmach/orb"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/wells"
)

// motion is a rotation and an offset of the plane, so that no mesh is tuned to one placing.
type motion struct{ sin, cos, dx, dy float64 }

func (m motion) at(x, y float64) orb.Point {
	return orb.Point{m.dx + m.cos*x - m.sin*y, m.dy + m.sin*x + m.cos*y}
}

func (m motion) path(xy ...float64) orb.LineString {
	var out orb.LineString
	for i := 0; i < len(xy); i += 2 {
		out = append(out, m.at(xy[i], xy[i+1]))
	}
	return out
}

func (m motion) ring(xy ...float64) orb.Ring {
	r := orb.Ring(m.path(xy...))
	return append(r, r[0])
}

func motions(n int) []motion {
	rng := rand.New(rand.NewPCG(20261201, 7))
	out := []motion{{cos: 1}}
	for len(out) < n {
		s, c := math.Sincos(rng.Float64() * 2 * math.Pi)
		out = append(out, motion{s, c, 1e5 + rng.Float64()*4e5, 1e6 + rng.Float64()*3e6})
	}
	return out
}

func circle(m motion, radius float64, n int) orb.Ring {
	var r orb.Ring
	for i := range n {
		s, c := math.Sincos(2 * math.Pi * float64(i) / float64(n))
		r = append(r, m.at(radius*c, radius*s))
	}
	return append(r, r[0])
}

func constant(v float64) *aquifer.Parameter { return &aquifer.Parameter{Best: v} }

// pumped is a well for tests: id, place, radius, rate.
func pumped(id string, at orb.Point, radius, rate float64) wells.Well {
	return wells.Well{ID: id, At: at, Radius: radius, Mode: wells.Fixed, FixedRate: rate, DutyHours: 24, Max: 5000}
}

// pointAt is what is expected at a place.
type pointAt struct {
	x, y, drawdown float64
	source         string
}

// benchmark is one closed-form problem of the check values, section 13.
type benchmark struct {
	name      string
	site      func(m motion) *aquifer.Site
	wells     func(m motion) []wells.Well
	points    []pointAt
	face      []float64          // drawdown at each well's casing
	shares    map[string]float64 // capture of the first well by edge
	tolerance float64            // away from wells, relative
}

func rectangle(m motion, a, b, t float64, edges ...aquifer.Edge) *aquifer.Site {
	return &aquifer.Site{
		Extent:     orb.Polygon{m.ring(0, 0, a, 0, a, b, 0, b)},
		Background: aquifer.Zone{Transmissivity: constant(t)},
		Edges:      edges,
	}
}

func held(name string, level float64, path orb.LineString) aquifer.Edge {
	return aquifer.Edge{Name: name, Kind: aquifer.PrescribedHead, Path: path, Levels: []float64{level}}
}

func benchmarks() []benchmark {
	const src = "closed form, section 13 of the check values, computed"
	return []benchmark{
		{
			name: "BM1 leaky disc",
			site: func(m motion) *aquifer.Site {
				rim := circle(m, 3000, 360)
				return &aquifer.Site{
					Extent:     orb.Polygon{rim},
					Background: aquifer.Zone{Transmissivity: constant(600), LeakageResistance: constant(1500), SourceHead: new(float64)},
					Edges:      []aquifer.Edge{held("rim", 0, orb.LineString(rim))},
				}
			},
			wells: func(m motion) []wells.Well { return []wells.Well{pumped("W1", m.at(0, 0), 0.25, 1200)} },
			points: []pointAt{{50, 0, 0.97295470, src}, {0, 200, 0.54025281, src}, {-500, 0, 0.27870508, src},
				{0, -1000, 0.12197456, src}, {2000 * math.Sqrt2 / 2, 2000 * math.Sqrt2 / 2, 0.02771152, src}},
			face:      []float64{2.65856529},
			shares:    map[string]float64{"rim": 215.377128 / 1200, "background": 984.622872 / 1200},
			tolerance: 0.003,
		},
		{
			name: "BM2 rectangle, four edges",
			site: func(m motion) *aquifer.Site {
				return rectangle(m, 2000, 1000, 500,
					held("south", 0, m.path(0, 0, 2000, 0)), held("east", 0, m.path(2000, 0, 2000, 1000)),
					held("north", 0, m.path(2000, 1000, 0, 1000)), held("west", 0, m.path(0, 1000, 0, 0)))
			},
			wells: func(m motion) []wells.Well { return []wells.Well{pumped("W1", m.at(800, 400), 0.15, 1000)} },
			points: []pointAt{{1000, 500, 0.33827252, src}, {1200, 600, 0.15353480, src}, {500, 250, 0.18225465, src},
				{1900, 100, 0.00281246, src}},
			face:      []float64{2.638877},
			shares:    map[string]float64{"south": 0.53586241, "north": 0.33850347, "west": 0.09790351, "east": 0.02773061},
			tolerance: 0.002,
		},
		{
			name: "BM3 island with recharge",
			site: func(m motion) *aquifer.Site {
				rim := circle(m, 1000, 360)
				return &aquifer.Site{
					Extent:     orb.Polygon{rim},
					Background: aquifer.Zone{Transmissivity: constant(300), Recharge: constant(1e-3)},
					Edges:      []aquifer.Edge{held("sea", 2, orb.LineString(rim))},
				}
			},
			wells: func(m motion) []wells.Well { return []wells.Well{pumped("W1", m.at(400, 0), 0.2, 600)} },
			points: []pointAt{{0, 0, 0.29166440, src}, {200, 0, 0.48575881, src}, {400, 300, 0.33095340, src},
				{-500, 0, 0.09157205, src}, {700, -400, 0.12374111, src}},
			face:      []float64{2.65560839},
			shares:    map[string]float64{"sea": 1},
			tolerance: 0.002,
		},
		{
			name: "BM4 two canals, W1",
			site: func(m motion) *aquifer.Site {
				return rectangle(m, 3000, 2000, 800, held("west", 0, m.path(0, 2000, 0, 0)), held("east", 0, m.path(3000, 0, 3000, 2000)))
			},
			wells: func(m motion) []wells.Well {
				return []wells.Well{pumped("W1", m.at(700, 600), 0.2, 1000), pumped("W2", m.at(1500, 1400), 0.2, 0), pumped("W3", m.at(2200, 800), 0.2, 0)}
			},
			points:    []pointAt{{1200, 1000, 0.2712079621525, src}, {1900, 1300, 0.1469348697956, src}},
			face:      []float64{1.828591694781, 0.1834747600834, 0.1227870889678},
			shares:    map[string]float64{"west": 0.76666667, "east": 0.23333333},
			tolerance: 0.002,
		},
	}
}

// solve builds a benchmark's field and solves it at the wells' rates.
func (b benchmark) solve(t *testing.T, m motion, o aquifer.Options) (*adjoint.Field, *adjoint.State, *adjoint.Linear) {
	t.Helper()
	ctx := context.Background()
	ws := b.wells(m)
	var rs []wells.Receptor
	for i, p := range b.points {
		rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", i+1), Kind: wells.PointLevel, At: m.at(p.x, p.y)})
	}
	site := b.site(m)
	site.Nodes, site.Outlines = adjoint.Requests(ws, rs)
	model, err := aquifer.Build(ctx, site, o)
	if err != nil {
		t.Fatalf("%s: %v", b.name, err)
	}
	f, err := adjoint.NewField(model, ws, rs)
	if err != nil {
		t.Fatalf("%s: %v", b.name, err)
	}
	rates := make([]float64, len(ws))
	for i, w := range ws {
		rates[i] = w.FixedRate
	}
	state, err := f.Changes(ctx, rates)
	if err != nil {
		t.Fatalf("%s: %v", b.name, err)
	}
	lin, err := f.Sensitivities(ctx, nil, adjoint.Options{Capture: true})
	if err != nil {
		t.Fatalf("%s: %v", b.name, err)
	}
	return f, state, lin
}

// Tolerances that the project promises for the default mesh.
const (
	faceTolerance  = 0.001 // at the well face, relative
	shareTolerance = 0.001 // capture shares, absolute
)

func TestBenchmarksAgainstClosedForms(t *testing.T) {
	for _, b := range benchmarks() {
		for k, m := range motions(5) {
			t.Run(fmt.Sprintf("%s/%d", b.name, k), func(t *testing.T) {
				f, s, lin := b.solve(t, m, aquifer.Options{})
				for i, p := range b.points {
					if rel := s.Rows[i].Change/p.drawdown - 1; !(math.Abs(rel) <= b.tolerance) {
						t.Errorf("drawdown at (%v, %v) is %.8f, want %.8f (%s): off by %.4f %%", p.x, p.y, s.Rows[i].Change, p.drawdown, p.source, 100*rel)
					}
				}
				for w, want := range b.face {
					node := f.Node(w)
					got := s.Base[node] - s.Heads[node] + s.Rates[w]*f.Below(w)
					tol := faceTolerance
					if s.Rates[w] == 0 {
						tol = b.tolerance
					}
					if rel := got/want - 1; !(math.Abs(rel) <= tol) {
						t.Errorf("drawdown at the face of well %d is %.8f, want %.8f: off by %.4f %%", w+1, got, want, 100*rel)
					}
				}
				seen := 0
				for _, c := range lin.Capture {
					if want, ok := b.shares[c.Feature.Name]; ok {
						seen++
						if !(math.Abs(c.Share[0]-want) <= shareTolerance) {
							t.Errorf("share of %s is %.6f, want %.6f", c.Feature.Name, c.Share[0], want)
						}
					}
				}
				if seen != len(b.shares) {
					t.Errorf("%d of %d sources found", seen, len(b.shares))
				}
				if testing.Verbose() {
					t.Logf("%d nodes, min angle %.1f, finest %.2f", len(f.Model.Mesh.X), f.Model.Mesh.Quality.MinAngleDeg, f.Model.FinestSize)
				}
			})
		}
	}
}
