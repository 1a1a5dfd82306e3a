package gisio

import (
	"fmt"
	"strings"

	"github.com/paulmach/orb"

	"springbound/aquifer"
	"springbound/wells"
)

// checkSite looks at the whole site for what no single record shows. It reports suspicions as warnings: each may be meant.
func (b *builder) checkSite() {
	b.checkSize()
	b.checkWaters()
	b.checkZoneOverlaps()
	b.checkLevelScale()
	b.checkRateScale()
	b.checkLinearLoss()
	b.checkDemand()
}

// Sizes of an extent's diagonal that are suspicious: smaller is a garden, or degrees taken for metres; larger goes beyond one zone of
// the plane and beyond what one steady layer describes.
const (
	smallestSite = 100.0 // [m]
	largestSite  = 3e5   // [m]
)

// checkSize warns of an extent of an unlikely size.
func (b *builder) checkSize() {
	if d := b.tolerance / outlineShare; b.extentKnown && !(d >= smallestSite && d <= largestSite) {
		b.warn(Finding{File: b.layers["extent"].file, Layer: "extent", Found: "an extent of " + roundMetres(d) + " m from corner to corner", Allowed: fmt.Sprintf("usually %v to %v m", smallestSite, largestSite), Hint: "are the coordinates right?"})
	}
}

// checkDemand warns of a demand that the wells cannot give.
func (b *builder) checkDemand() {
	sum := 0.0
	for _, w := range b.p.Wells {
		if w.Mode == wells.Decided && w.Max > 0 && !w.Outage {
			sum += w.Max
		}
	}
	rate := Inside(Rate)
	if d := b.p.Brief.Demand; d != nil && *d > sum {
		b.warn(Finding{File: b.p.File, Line: b.settings.line("brief", "demand"), Property: "demand", Found: rate.show(*d), Allowed: "at most " + rate.show(sum) + ", what the decided wells can give together"})
	}
	for _, s := range b.p.States {
		if s.Demand != nil && *s.Demand > sum {
			b.warn(Finding{File: b.tables["states"].file, Layer: "states", Property: "demand of " + s.Name, Found: rate.show(*s.Demand), Allowed: "at most " + rate.show(sum) + ", what the decided wells can give together"})
		}
	}
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
	beyond := 0
	for i, z := range zones {
		if b.extentKnown && len(z.Area) > 0 && !touches(z.Area, b.p.Site.Extent, b.tolerance) {
			b.recordOf("zone", i).warn(Finding{Found: "a zone outside the extent", Hint: "it has no effect"})
			if beyond++; beyond == len(zones) {
				b.recordOf("zone", i).fail(Finding{Found: "no zone that touches the extent", Allowed: "zones that do", Hint: "are the layer's coordinates or its crs right?"})
			}
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
