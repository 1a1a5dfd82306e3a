package adjoint_test

import (
	"fmt"
	"math"
	"math/rand/v2"

	"github.com/paulmach/orb"

	"springbound/aquifer"
	"springbound/wells"
)

// randomSite draws a site: a star-shaped outline of 12 to 40 vertices with a held and a head-dependent stretch, zones of other transmissivity that
// may be anisotropic, a leaky zone, a lake, a river, springs, wells, and one receptor of each kind.
func randomSite(seed uint64) (*aquifer.Site, []wells.Well, []wells.Receptor) {
	rng := rand.New(rand.NewPCG(seed, 77))
	span := func(a, b float64) float64 { return a + (b-a)*rng.Float64() }
	n := 12 + rng.IntN(29)
	m := motions(2)[1]
	size := span(1500, 4000)
	radii := make([]float64, n)
	for i := range radii {
		radii[i] = size * span(0.75, 1.1)
	}
	vertex := func(i int) orb.Point {
		s, c := math.Sincos(2 * math.Pi * float64(i%n) / float64(n))
		return m.at(radii[i%n]*c, radii[i%n]*s)
	}
	var ring orb.Ring
	for i := range n + 1 {
		ring = append(ring, vertex(i))
	}
	stretch := func(from, to int) orb.LineString {
		var p orb.LineString
		for i := from; i <= to; i++ {
			p = append(p, vertex(i))
		}
		return p
	}
	t := math.Exp(span(math.Log(50), math.Log(1500)))
	site := &aquifer.Site{Extent: orb.Polygon{ring}, Background: aquifer.Zone{Transmissivity: constant(t), Recharge: constant(span(2e-4, 1e-3))}}
	site.Edges = []aquifer.Edge{{Name: "sea", Kind: aquifer.PrescribedHead, Path: stretch(0, n/4), Levels: []float64{5}}}
	if rng.IntN(2) == 0 {
		site.Edges = append(site.Edges, aquifer.Edge{Name: "fan", Kind: aquifer.HeadDependent, Path: stretch(n/2, n/2+n/5), Levels: []float64{9}, Conductance: *constant(span(0.05, 1))})
	}
	place := func(inner float64) (x, y float64) {
		r, a := size*0.7*math.Sqrt(span(inner*inner, 1)), span(0, 2*math.Pi)
		return r * math.Cos(a), r * math.Sin(a)
	}
	blob := func(x, y, r float64, k int) orb.Polygon {
		var out orb.Ring
		for i := range k {
			s, c := math.Sincos(2 * math.Pi * float64(i) / float64(k))
			f := r * span(0.8, 1.2)
			out = append(out, m.at(x+f*c, y+f*s))
		}
		return orb.Polygon{append(out, out[0])}
	}
	for i := range rng.IntN(3) {
		x, y := place(0)
		z := aquifer.Zone{Name: fmt.Sprintf("zone %d", i), Area: orb.MultiPolygon{blob(x, y, size*span(0.15, 0.4), 5+rng.IntN(8))}, Transmissivity: constant(t * math.Exp(span(-3, 3)))}
		if rng.IntN(3) == 0 {
			z.Anisotropy = &aquifer.Anisotropy{Ratio: span(1.5, 6), AngleDeg: span(0, 180)}
		}
		site.Zones = append(site.Zones, z)
	}
	if rng.IntN(2) == 0 {
		x, y := place(0)
		level := span(5, 9)
		site.Zones = append(site.Zones, aquifer.Zone{Name: "leaky", Area: orb.MultiPolygon{blob(x, y, size*span(0.2, 0.5), 8)}, LeakageResistance: constant(math.Exp(span(math.Log(300), math.Log(2e4)))), SourceHead: &level})
	}
	if rng.IntN(3) == 0 {
		x, y := place(0)
		site.Lakes = append(site.Lakes, aquifer.Lake{Name: "tarn", Area: blob(x, y, size*0.08, 7), WaterLevel: 7, BedResistance: *constant(span(10, 200))})
	}
	var rs []wells.Receptor
	if rng.IntN(3) > 0 {
		a, b := span(0, 2*math.Pi), span(1.5, 2.5)
		end := func(angle float64) orb.Point { return m.at(0.6*size*math.Cos(angle), 0.6*size*math.Sin(angle)) }
		bend := m.at(size*span(-0.2, 0.2), size*span(-0.2, 0.2))
		site.Rivers = append(site.Rivers, aquifer.River{Name: "Aln", Path: orb.LineString{end(a), bend, end(a + b)}, WaterLevels: []float64{6}, Width: span(3, 15), BedResistance: *constant(span(1, 30))})
		rs = append(rs, wells.Receptor{ID: "aln", Kind: wells.RiverReach, Feature: "Aln"})
	}
	for i := range 1 + rng.IntN(3) {
		x, y := place(0)
		name := fmt.Sprintf("spring %d", i)
		site.Springs = append(site.Springs, aquifer.Spring{Name: name, At: m.at(x, y), OutletLevel: -500, Conductance: constant(span(10, 400)), EffectiveRadius: span(0.1, 0.3)})
		rs = append(rs, wells.Receptor{ID: name, Kind: wells.SpringFlow, Feature: name})
	}
	var ws []wells.Well
	for i := range 3 + rng.IntN(5) {
		x, y := place(0)
		ws = append(ws, pumped(fmt.Sprintf("W%d", i+1), m.at(x, y), 0.2, span(100, 1500)))
	}
	low := -1000.0
	ws[0].LowestLevel = &low
	for i := range 5 {
		x, y := place(0)
		rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", i+1), Kind: wells.PointLevel, At: m.at(x, y)})
	}
	x, y := place(0)
	rs = append(rs, wells.Receptor{ID: "fen", Kind: wells.Wetland, Area: blob(x, y, size*0.1, 6)}, wells.Receptor{ID: "sea", Kind: wells.EdgeFlow, Feature: "sea"})
	x, y = place(0)
	rs = append(rs, wells.Receptor{ID: "front", Kind: wells.SalineFront, At: m.at(x, y), To: m.at(x+200, y)})
	return site, ws, rs
}
