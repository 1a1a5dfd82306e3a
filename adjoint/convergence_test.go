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

// twoCanals is the drawdown at (x, y) of a unit rate at (xi, eta) between canals x = 0 and x = length, walls y = 0 and y = width: the strip
// form of section 4 of the check values with image wells beyond the walls. The terms fall as exp(-2 pi width m/length).
func twoCanals(x, y, xi, eta, length, width, t float64) float64 {
	strip := func(dy float64) float64 {
		c := math.Cosh(math.Pi * dy / length)
		return math.Log((c-math.Cos(math.Pi*(x+xi)/length))/(c-math.Cos(math.Pi*(x-xi)/length))) / (4 * math.Pi * t)
	}
	s := 0.0
	for m := -8; m <= 8; m++ {
		shift := 2 * width * float64(m)
		s += strip(y-eta-shift) + strip(y+eta-shift)
	}
	return s
}

func TestTwoCanalsFormAgainstPrintedTable(t *testing.T) {
	// Section 13, BM4 [C], 13 digits printed.
	for _, c := range []struct{ x, y, xi, eta, want float64 }{
		{1200, 1000, 700, 600, 2.712079621525e-4}, {1900, 1300, 1500, 1400, 4.305805866293e-4}, {700.2, 600, 700, 600, 1.828591694781e-3},
	} {
		// 0.2 m from the well the form subtracts cosines that agree to 4e-8, which costs eight digits of its logarithm's argument
		if got := twoCanals(c.x, c.y, c.xi, c.eta, 3000, 2000, 800); math.Abs(got/c.want-1) > 1e-9 {
			t.Errorf("at (%v, %v): %.15e, want %.12e", c.x, c.y, got, c.want)
		}
	}
}

// slopeOf fits log(error) = a + order log(size) by least squares.
func slopeOf(sizes, errors []float64) float64 {
	var sx, sy, sxx, sxy float64
	for i := range sizes {
		x, y := math.Log(sizes[i]), math.Log(errors[i])
		sx, sy, sxx, sxy = sx+x, sy+y, sxx+x*x, sxy+x*y
	}
	n := float64(len(sizes))
	return (n*sxy - sx*sy) / (n*sxx - sx*sx)
}

// orderWanted is second order less what four meshes that are not nested leave of scatter.
const orderWanted = 1.8

// Finest size, coarsest size and growth scaled together: second order over 36 points, fitted on the root mean square error.
func TestSecondOrderOverManyPoints(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 17))
	m := motions(2)[1]
	const xi, eta = 700, 600
	var places [][2]float64
	var rs []wells.Receptor
	for len(places) < 36 {
		x, y := 100+2800*rng.Float64(), 100+1800*rng.Float64()
		if math.Hypot(x-xi, y-eta) < 150 {
			continue
		}
		places = append(places, [2]float64{x, y})
		rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", len(places)), Kind: wells.PointLevel, At: m.at(x, y)})
	}
	ws := []wells.Well{pumped("W1", m.at(xi, eta), 0.2, 1000)}
	var sizes, errors []float64
	for _, scale := range []float64{2, 1.41421356, 1, 0.70710678} {
		site := benchmarks()[3].site(m)
		f := build(t, site, ws, rs, aquifer.Options{Finest: 12, Coarsest: 100, Scale: scale})
		s, err := f.Changes(context.Background(), []float64{1000})
		if err != nil {
			t.Fatal(err)
		}
		sum := 0.0
		for i, p := range places {
			d := s.Rows[i].Change - 1000*twoCanals(p[0], p[1], xi, eta, 3000, 2000, 800)
			sum += d * d
		}
		sizes, errors = append(sizes, scale), append(errors, math.Sqrt(sum/float64(len(places))))
		t.Logf("scale %.3f: %d nodes, rms error %.3e m", scale, len(f.Model.Mesh.X), errors[len(errors)-1])
	}
	if order := slopeOf(sizes, errors); !(order >= orderWanted) {
		t.Errorf("observed order %.2f, want at least %.1f", order, orderWanted)
	} else {
		t.Logf("observed order %.2f", order)
	}
}

// meshChange is how much spring and at-well results may move between meshes four times apart in nodes, relative, as promised.
const meshChange = 0.005

func TestSpringAndWellResultsSettle(t *testing.T) {
	m := motions(3)[2]
	for _, radius := range []float64{0.5, 3} {
		var last []float64
		for _, o := range []aquifer.Options{{Nodes: 5000, Finest: 8}, {Nodes: 20000, Finest: 4}, {Nodes: 80000, Finest: 2}} {
			site := benchmarks()[3].site(m)
			site.Background.Recharge = constant(1e-3)
			site.Springs = []aquifer.Spring{{Name: "P1", At: m.at(1200, 1000), OutletLevel: 0.2, Conductance: constant(200), EffectiveRadius: radius}}
			ws := []wells.Well{pumped("W1", m.at(700, 600), 0.2, 1000), pumped("W2", m.at(1260, 1000), 0.2, 100)}
			rs := []wells.Receptor{{ID: "S", Kind: wells.SpringFlow, Feature: "P1"}, {ID: "B1", Kind: wells.PumpingLevel, Feature: "W1"}, {ID: "B2", Kind: wells.PumpingLevel, Feature: "W2"}}
			f := build(t, site, ws, rs, o)
			lin, err := f.Sensitivities(context.Background(), nil, adjoint.Options{})
			if err != nil {
				t.Fatal(err)
			}
			now := []float64{lin.Rows[0].Base, lin.Rows[0].Slope[0], lin.Rows[0].Slope[1], lin.Rows[1].Slope[0], lin.Rows[2].Slope[1], lin.Rows[2].Slope[0]}
			for i := range last {
				if rel := math.Abs(now[i]/last[i] - 1); !(rel <= meshChange) {
					t.Errorf("radius %v, figure %d: %.8e, on the coarser mesh %.8e: %.3f %%", radius, i, now[i], last[i], 100*rel)
				}
			}
			last = now
			t.Logf("radius %v: %d nodes %.6v", radius, len(f.Model.Mesh.X), now)
		}
	}
}

// Section 13, BM4 [C]: spring P1 with conductance 200 m²/d and r = 1 m takes these shares from the wells.
func TestSpringShareClosedForm(t *testing.T) {
	m := motion{cos: 1}
	site := benchmarks()[3].site(m)
	site.Springs = []aquifer.Spring{{Name: "P1", At: m.at(1200, 1000), OutletLevel: -5, Conductance: constant(200), EffectiveRadius: 1}}
	ws := benchmarks()[3].wells(m)
	f := build(t, site, ws, []wells.Receptor{{ID: "S", Kind: wells.SpringFlow, Feature: "P1"}}, aquifer.Options{})
	lin, err := f.Sensitivities(context.Background(), nil, adjoint.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for w, want := range []float64{0.04111409, 0.05825175, 0.03137458} {
		if rel := lin.Rows[0].Slope[w]/want - 1; math.Abs(rel) > 0.002 { // the tolerance for results away from wells
			t.Errorf("share of %s: %.8f, want %.8f: off by %.3f %%", ws[w].ID, lin.Rows[0].Slope[w], want, 100*rel)
		}
	}
}

// Sections 7 and 9 of the check values [C]: strips with zones and recharge, exact for the linear interpolant's nodes up to the lumping.
func TestStripsAgainstClosedForms(t *testing.T) {
	strip := func(zones []aquifer.Zone, n, left, right, length float64) *aquifer.Site {
		m := motion{cos: 1}
		return &aquifer.Site{Extent: orb.Polygon{m.ring(0, 0, length, 0, length, 200, 0, 200)}, Background: aquifer.Zone{Transmissivity: constant(400), Recharge: constant(n)}, Zones: zones,
			Edges: []aquifer.Edge{held("left", left, m.path(0, 200, 0, 0)), held("right", right, m.path(length, 0, length, 200))}}
	}
	m := motion{cos: 1}
	pair := []aquifer.Zone{
		{Name: "a", Area: orb.MultiPolygon{{m.ring(-50, -50, 400, -50, 400, 250, -50, 250)}}, Transmissivity: constant(600)},
		{Name: "b", Area: orb.MultiPolygon{{m.ring(400, -50, 1100, -50, 1100, 250, 400, 250)}}, Transmissivity: constant(150)},
	}
	for _, c := range []struct {
		name   string
		site   *aquifer.Site
		x      []float64
		want   []float64
		reason string
	}{
		{"one zone", strip(nil, 8e-4, 12, 10, 1200), []float64{300, 600, 900}, []float64{11.77, 11.36, 10.77}, "section 7, first row"},
		{"two zones", strip(pair, 0, 20, 14, 1000), []float64{400}, []float64{19.14285714}, "section 7, two zones"},
		{"two zones with recharge", strip(pair, 5e-4, 20, 14, 1000), []float64{200, 400, 700}, []float64{19.65952381, 19.28571429, 16.79285714}, "section 7, two zones with recharge"},
	} {
		var rs []wells.Receptor
		for i, x := range c.x {
			rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", i), Kind: wells.PointLevel, At: orb.Point{x, 100}})
		}
		f := build(t, c.site, nil, rs, aquifer.Options{Nodes: 4000})
		s, err := f.Changes(context.Background(), nil)
		if err != nil {
			t.Fatal(err)
		}
		for i, want := range c.want {
			if d := s.Rows[i].Base - want; math.Abs(d) > 2e-4 { // second order: h²N/T with h about 15 m
				t.Errorf("%s (%s): head at %v is %.8f, want %.8f", c.name, c.reason, c.x[i], s.Rows[i].Base, want)
			}
		}
	}
}

// Section 7 [C]: well in a half-plane of T1 beside one of T2, as differences inside a large disc's centre; the kink at the border is exact.
func TestSkinRingRaisesTheWell(t *testing.T) {
	m := motion{cos: 1}
	rim := circle(m, 500, 240)
	site := &aquifer.Site{Extent: orb.Polygon{rim}, Background: aquifer.Zone{Transmissivity: constant(300)},
		Zones: []aquifer.Zone{{Name: "skin", Area: orb.MultiPolygon{{circle(m, 2, 48)}}, Transmissivity: constant(50)}},
		Edges: []aquifer.Edge{held("rim", 0, orb.LineString(rim))}}
	ws := []wells.Well{pumped("W", m.at(0, 0), 0.1, 500)}
	f := build(t, site, ws, nil, aquifer.Options{})
	s, err := f.Changes(context.Background(), []float64{500})
	if err != nil {
		t.Fatal(err)
	}
	got := s.Base[f.Node(0)] - s.Heads[f.Node(0)] + 500*f.Below(0)
	// Skin Q=500, Ts=50 to rs=2, T=300, rw=0.1, R=500: s_w = 6.23246899. The 48-sided skin is 0.14 % smaller in mean radius.
	if rel := got/6.23246899 - 1; math.Abs(rel) > 0.003 {
		t.Errorf("drawdown at the face %.6f, want 6.232469: off by %.3f %%", got, 100*rel)
	}
}
