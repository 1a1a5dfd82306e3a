package gisio

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"github.com/paulmach/orb"

	"springbound/aquifer"
	"springbound/wells"
)

// checkSite looks at the whole site for what no single record shows. It reports suspicions as warnings: each may be meant.
func (b *builder) checkSite() {
	b.checkWaters()
	b.checkZoneOverlaps()
	b.checkLevelScale()
	b.checkRateScale()
	b.checkLinearLoss()
}

// alongShare is the share of a line's points from which two lines count as one water: less is a crossing or a confluence.
const alongShare = 0.5

// checkWaters warns of one water entered twice: a river inside a lake, along an edge or along another river, a lake on a lake.
func (b *builder) checkWaters() {
	if !b.extentKnown {
		return
	}
	const hint = "the same water may be entered twice and its exchange counted twice"
	site := &b.p.Site
	for i, r := range site.Rivers {
		if len(r.Path) < 2 {
			continue
		}
		p := b.recordOf("river", i)
		for _, l := range site.Lakes {
			if len(l.Area) == 0 || !l.Area.Bound().Intersects(r.Path.Bound()) {
				continue
			}
			points, in := withMiddles(r.Path), 0
			for _, at := range points {
				if deepInside(l.Area, at, b.tolerance) {
					in++
				}
			}
			if in > 0 || crossesThrough(r.Path, l.Area, b.tolerance) {
				p.warn(Finding{Found: "a river that runs through the lake " + quoted(l.Name), Allowed: "a river that ends at its shore", Hint: hint})
			}
		}
		for _, e := range site.Edges {
			if len(e.Path) > 1 && e.Kind != aquifer.PrescribedFlux && shareAlong(r.Path, e.Path, b.tolerance) >= alongShare {
				p.warn(Finding{Found: "a river along the edge " + quoted(e.Name), Hint: hint})
			}
		}
		for _, o := range site.Rivers[:i] {
			if len(o.Path) > 1 && (shareAlong(r.Path, o.Path, b.tolerance) >= alongShare || shareAlong(o.Path, r.Path, b.tolerance) >= alongShare) {
				p.warn(Finding{Found: "a river along the river " + quoted(o.Name), Hint: hint})
			}
		}
	}
	for i, l := range site.Lakes {
		for _, o := range site.Lakes[:i] {
			if overlap(l.Area, o.Area, b.tolerance) {
				b.recordOf("lake", i).warn(Finding{Found: "a lake that overlaps the lake " + quoted(o.Name), Hint: hint})
			}
		}
	}
}

// crossesThrough tells whether a line crosses a polygon's outline at least twice, each time by more than a distance.
func crossesThrough(line orb.LineString, area orb.Polygon, by float64) bool {
	n := 0
	for i := 0; i+1 < len(line); i++ {
		for j := 0; j+1 < len(area[0]); j++ {
			if crossDeep(line[i], line[i+1], area[0][j], area[0][j+1], by) {
				n++
			}
		}
	}
	return n >= 2
}

// checkZoneOverlaps lists the overlaps of zones in which the later zone changes a value of the earlier one.
func (b *builder) checkZoneOverlaps() {
	zones := b.p.Site.Zones
	for i, z := range zones {
		if b.extentKnown && len(z.Area) > 0 && !touches(z.Area, b.p.Site.Extent, b.tolerance) {
			b.recordOf("zone", i).warn(Finding{Found: "a zone outside the extent", Hint: "it has no effect"})
		}
		for _, o := range zones[:i] {
			changed := changes(z, o)
			if len(changed) == 0 || !multiOverlap(z.Area, o.Area, b.tolerance) {
				continue
			}
			b.recordOf("zone", i).warn(Finding{Found: "a zone that overlaps the zone " + quoted(o.Name), Hint: "there its own value is taken for " + strings.Join(changed, ", ")})
		}
	}
}

// touches tells whether some part of a zone shares an area with the extent.
func touches(area orb.MultiPolygon, extent orb.Polygon, by float64) bool {
	return multiOverlap(area, orb.MultiPolygon{extent}, by)
}

// multiOverlap tells whether two areas overlap.
func multiOverlap(a, b orb.MultiPolygon, by float64) bool {
	for _, p := range a {
		for _, q := range b {
			if overlap(p, q, by) {
				return true
			}
		}
	}
	return false
}

// changes lists the properties that both zones state with different values.
func changes(a, b aquifer.Zone) []string {
	var out []string
	parameter := func(name string, x, y *aquifer.Parameter) {
		if x != nil && y != nil && x.Best != y.Best {
			out = append(out, name)
		}
	}
	level := func(name string, x, y *float64) {
		if x != nil && y != nil && *x != *y {
			out = append(out, name)
		}
	}
	parameter("transmissivity", a.Transmissivity, b.Transmissivity)
	if a.Anisotropy != nil && b.Anisotropy != nil && *a.Anisotropy != *b.Anisotropy {
		out = append(out, "anisotropy")
	}
	parameter("recharge", a.Recharge, b.Recharge)
	parameter("leakage resistance", a.LeakageResistance, b.LeakageResistance)
	level("source head", a.SourceHead, b.SourceHead)
	level("top", a.Top, b.Top)
	parameter("storage", a.Storage, b.Storage)
	return out
}

// siteLevel is one level of the site's waters.
type siteLevel struct {
	p        placed
	property string
	value    float64
}

// waterLevels collects the levels of edges, rivers, lakes and springs.
func (b *builder) waterLevels() []siteLevel {
	var out []siteLevel
	add := func(kind string, i int, property string, values ...float64) {
		for _, v := range values {
			out = append(out, siteLevel{b.recordOf(kind, i), property, v})
		}
	}
	for i, e := range b.p.Site.Edges {
		add("edge", i, "level", e.Levels...)
	}
	for i, r := range b.p.Site.Rivers {
		add("river", i, "water_level", r.WaterLevels...)
	}
	for i, l := range b.p.Site.Lakes {
		if l.Area != nil {
			add("lake", i, "water_level", l.WaterLevel)
		}
	}
	for i, s := range b.p.Site.Springs {
		add("spring", i, "outlet_level", s.OutletLevel)
	}
	return out
}

// Bounds of the suspicion that a level is in feet. Levels of one aquifer lie within some tens of metres; one that stands apart from all
// the others by more than their own range and this much, and among them once it is taken for feet, is suspicious.
const (
	leastApart    = 20.0 // [m]
	fewestToJudge = 2    // other levels
)

// checkLevelScale warns of a water level that stands apart from the others and would be among them if it were in feet.
func (b *builder) checkLevelScale() {
	all := b.waterLevels()
	for i, l := range all {
		low, high, n := math.Inf(1), math.Inf(-1), 0
		for j, o := range all {
			if j == i || o.p.record == l.p.record {
				continue
			}
			low, high, n = math.Min(low, o.value), math.Max(high, o.value), n+1
		}
		span := math.Max(high-low, leastApart)
		taken := l.value * foot
		if n >= fewestToJudge && (l.value > high+span || l.value < low-span) && taken >= low-span/2 && taken <= high+span/2 {
			l.p.warn(Finding{Property: l.property, Found: fmt.Sprintf("%v m, while the other waters stand at %v to %v m", l.value, low, high), Hint: "is it in feet?"})
		}
	}
	for i, w := range b.p.Wells {
		for _, item := range []struct {
			name  string
			value *float64
		}{{"lowest_level", w.LowestLevel}, {"intake", w.Intake}} {
			if item.value == nil || len(all) == 0 {
				continue
			}
			highest := math.Inf(-1)
			for _, l := range all {
				highest = math.Max(highest, l.value)
			}
			if *item.value > highest {
				b.recordOf("well", i).warn(Finding{Property: item.name, Found: fmt.Sprintf("%v m, above every water of the site (highest %v m)", *item.value, highest), Hint: "is it a depth given as an elevation?"})
			}
		}
	}
}

// Bounds of the suspicion that a rate is in another unit than it says.
const (
	smallestMax   = 5.0  // a decided well below this [m³/d] is a garden well, or L/s taken for m³/d
	litreFactor   = 86.4 // m³/d in a litre per second
	litreFactorBy = 3.0  // how far from the factor a ratio may be and still suggest it
)

// checkRateScale warns of rates that look like litres per second taken for cubic metres per day.
func (b *builder) checkRateScale() {
	for i, w := range b.p.Wells {
		if w.Mode != wells.Decided || !(w.Max > 0) {
			continue
		}
		var others []float64
		for j, o := range b.p.Wells {
			if j != i && o.Mode == wells.Decided && o.Max > 0 {
				others = append(others, o.Max)
			}
		}
		p := b.recordOf("well", i)
		shown := Inside(Rate).show(w.Max)
		if w.Max < smallestMax {
			p.warn(Finding{Property: "max", Found: shown, Hint: "very little for a well: is it in L/s?"})
			continue
		}
		if len(others) < fewestToJudge {
			continue
		}
		sort.Float64s(others)
		ratio := others[len(others)/2] / w.Max
		if ratio > litreFactor/litreFactorBy && ratio < litreFactor*litreFactorBy {
			p.warn(Finding{Property: "max", Found: fmt.Sprintf("%s, about %.0f times less than the other wells", shown, ratio), Hint: "is it in L/s?"})
		}
	}
}

// stepTestRadius is the distance to which a step test's linear term reaches [m]: drawdown there is small within a day.
const stepTestRadius = 100.0

// checkLinearLoss warns of a linear loss that is as large as the aquifer's own drawdown around the well: a step test's whole linear term,
// B >= ln(100 m/rw)/(2 pi T), which the model already holds (Jacob 1947).
func (b *builder) checkLinearLoss() {
	for i, w := range b.p.Wells {
		p := b.recordOf("well", i)
		if !(w.LinearLoss > 0) || !(w.Radius > 0) || p.geometry == nil {
			continue
		}
		t := b.p.Site.Background.Transmissivity
		for _, z := range b.p.Site.Zones {
			for _, area := range z.Area {
				if z.Transmissivity != nil && polygonContains(area, w.At) {
					t = z.Transmissivity
				}
			}
		}
		if t == nil {
			continue
		}
		own := math.Log(stepTestRadius/w.Radius) / (2 * math.Pi * t.Best)
		if own > 0 && w.LinearLoss >= own {
			p.warn(Finding{Property: "linear_loss", Found: Inside(LinearLoss).show(w.LinearLoss), Allowed: fmt.Sprintf("usually well below %.2g d/m2, the aquifer's own drawdown to %v m", own, stepTestRadius),
				Hint: "is it the whole linear term of a step test? The model adds the aquifer's part itself"})
		}
	}
}
