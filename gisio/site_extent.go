package gisio

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"
	"github.com/paulmach/orb/planar"

	"springbound/aquifer"
)

// buildExtent takes the one polygon of the extent's layer.
func (b *builder) buildExtent() {
	layer := b.layers["extent"]
	if layer == nil {
		return
	}
	ps := b.placedRecords(&extentSection, nil)
	if len(layer.features) != 1 {
		if len(layer.features) > 1 || b.findings.Err() == nil {
			b.fail(Finding{File: layer.file, Layer: "extent", Found: fmt.Sprintf("%d features", len(layer.features)), Allowed: "one polygon"})
		}
		if len(ps) == 0 {
			return
		}
	}
	if poly, ok := geometryOf[orb.Polygon](ps[0], "one polygon"); ok {
		b.p.Site.Extent = poly
		b.extentKnown = true
		box := poly.Bound()
		b.tolerance = outlineShare * math.Hypot(box.Max[0]-box.Min[0], box.Max[1]-box.Min[1])
	}
}

// inside tells whether a place lies in the extent; true where the extent is not known.
func (b *builder) inside(at orb.Point) bool {
	return !b.extentKnown || polygonContains(b.p.Site.Extent, at)
}

const exchangedHint = "longitude and latitude look exchanged"

// outsideHint says why a place may be outside: exchanged coordinates.
func (b *builder) outsideHint(at orb.Point) string {
	if lon, lat, err := b.p.Plane.Inverse(at[0], at[1]); err == nil && math.Abs(lon) <= 90 {
		if x, y, err := b.p.Plane.Forward(lat, lon); err == nil && b.inside(orb.Point{x, y}) {
			return exchangedHint
		}
	}
	for i, ring := range b.p.Site.Extent {
		if i > 0 && planar.RingContains(ring, at) {
			return fmt.Sprintf("it is in a hole of the extent, %s m from the hole's edge; take the hole out of the extent if water flows there", roundMetres(distanceToPolygon(b.p.Site.Extent, at)))
		}
	}
	return fmt.Sprintf("it is %s m from the outline", roundMetres(distanceToPolygon(b.p.Site.Extent, at)))
}

// roundMetres writes a distance for messages.
func roundMetres(d float64) string {
	if math.Abs(d) >= 1000 {
		return fmt.Sprintf("%.0f", d)
	}
	return fmt.Sprintf("%.4g", d)
}

// keepInside reports a shape that leaves the extent by more than the outline's tolerance: an error where no part is inside, else a
// warning, since the mesh drops what lies outside.
func (b *builder) keepInside(p placed, points []orb.Point) bool {
	if !b.extentKnown {
		return true
	}
	worst, within := 0.0, false
	for _, at := range points {
		if b.inside(at) {
			within = true
		} else {
			worst = math.Max(worst, distanceToPolygon(b.p.Site.Extent, at))
		}
	}
	switch {
	case worst <= b.tolerance:
		return true
	case within:
		p.warn(Finding{Property: p.spot(), Found: fmt.Sprintf("a part up to %s m outside the extent", roundMetres(worst)), Hint: "only what lies inside counts"})
		return true
	}
	p.fail(Finding{Property: p.spot(), Found: fmt.Sprintf("wholly outside the extent, up to %s m", roundMetres(worst)), Allowed: "inside the extent, at least in part", Hint: b.outsideHint(points[0])})
	return false
}

// nodes asks for a mesh node.
func (b *builder) node(name string, at orb.Point, radius float64, well bool) {
	b.p.Site.Nodes = append(b.p.Site.Nodes, aquifer.NodeRequest{Name: name, At: at, Radius: radius, Well: well})
}
