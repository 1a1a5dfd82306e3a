package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

func distance(a, b orb.Point) float64 { return math.Hypot(a[0]-b[0], a[1]-b[1]) }

// onSegment returns the fraction along a-b of the point nearest to p, and its distance from p.
func onSegment(p, a, b orb.Point) (fraction, dist float64) {
	dx, dy := b[0]-a[0], b[1]-a[1]
	length2 := dx*dx + dy*dy
	if length2 > 0 {
		fraction = ((p[0]-a[0])*dx + (p[1]-a[1])*dy) / length2
		fraction = math.Max(0, math.Min(1, fraction))
	}
	return fraction, math.Hypot(p[0]-a[0]-fraction*dx, p[1]-a[1]-fraction*dy)
}

// openRing drops the closing point.
func openRing(r orb.Ring) orb.Ring {
	if len(r) > 1 && r[0] == r[len(r)-1] {
		return r[:len(r)-1]
	}
	return r
}

// inRing tells whether p is inside a ring (even-odd rule).
func inRing(p orb.Point, ring orb.Ring) bool {
	inside := false
	r := openRing(ring)
	for i, j := 0, len(r)-1; i < len(r); j, i = i, i+1 {
		a, b := r[i], r[j]
		if (a[1] > p[1]) != (b[1] > p[1]) && p[0] < (b[0]-a[0])*(p[1]-a[1])/(b[1]-a[1])+a[0] {
			inside = !inside
		}
	}
	return inside
}

// inPolygon tells whether p is inside ring 0 and outside the holes.
func inPolygon(p orb.Point, poly orb.Polygon) bool {
	if len(poly) == 0 || !inRing(p, poly[0]) {
		return false
	}
	for _, hole := range poly[1:] {
		if inRing(p, hole) {
			return false
		}
	}
	return true
}

func inMultiPolygon(p orb.Point, mp orb.MultiPolygon) bool {
	for _, poly := range mp {
		if inPolygon(p, poly) {
			return true
		}
	}
	return false
}

// arcs returns the arc length at each vertex of a path [m].
func arcs(path orb.LineString) []float64 {
	s := make([]float64, len(path))
	for i := 1; i < len(path); i++ {
		s[i] = s[i-1] + distance(path[i-1], path[i])
	}
	return s
}

// ringArea returns the signed area, positive counter-clockwise [m²].
func ringArea(r orb.Ring) float64 {
	o := openRing(r)
	if len(o) == 0 {
		return 0
	}
	area := 0.0
	for i := range o {
		j := (i + 1) % len(o)
		area += (o[i][0]-o[0][0])*(o[j][1]-o[0][1]) - (o[j][0]-o[0][0])*(o[i][1]-o[0][1])
	}
	return area / 2
}
