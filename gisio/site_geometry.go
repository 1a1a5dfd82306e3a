package gisio

import (
	"math"

	"github.com/paulmach/orb"
	"github.com/paulmach/orb/planar"
)

// polygonContains tells whether a point lies in a polygon, its outline included, its holes not.
func polygonContains(p orb.Polygon, at orb.Point) bool {
	if len(p) == 0 || !planar.RingContains(p[0], at) {
		return false
	}
	for _, hole := range p[1:] {
		if planar.RingContains(hole, at) && distanceToLine(orb.LineString(hole), at) > 0 {
			return false
		}
	}
	return true
}

// distanceToLine returns the distance of a point from a line [m].
func distanceToLine(line orb.LineString, at orb.Point) float64 {
	if len(line) == 1 {
		return planar.Distance(line[0], at)
	}
	d := math.Inf(1)
	for i := 0; i+1 < len(line); i++ {
		d = math.Min(d, planar.DistanceFromSegmentSquared(line[i], line[i+1], at))
	}
	return math.Sqrt(d)
}

// distanceToPolygon returns the distance of a point from the nearest ring of a polygon [m].
func distanceToPolygon(p orb.Polygon, at orb.Point) float64 {
	d := math.Inf(1)
	for _, ring := range p {
		d = math.Min(d, distanceToLine(orb.LineString(ring), at))
	}
	return d
}

// withMiddles returns a line's vertices with the middle of every segment between them.
func withMiddles(line orb.LineString) []orb.Point {
	var out []orb.Point
	for i, p := range line {
		if i > 0 {
			q := line[i-1]
			out = append(out, orb.Point{(p[0] + q[0]) / 2, (p[1] + q[1]) / 2})
		}
		out = append(out, p)
	}
	return out
}

// deepInside tells whether a point lies in a polygon by more than a distance.
func deepInside(p orb.Polygon, at orb.Point, by float64) bool {
	return polygonContains(p, at) && distanceToPolygon(p, at) > by
}

// overlap tells whether two polygons share an area that reaches more than a distance from their outlines: by a vertex, the middle of
// a segment, a crossing's surroundings or the centre of one inside the other. Only what lies in both boxes is looked at.
func overlap(a, b orb.Polygon, by float64) bool {
	if len(a) == 0 || len(b) == 0 {
		return false
	}
	common := commonBox(a.Bound(), b.Bound())
	if !(common.Max[0]-common.Min[0] > by && common.Max[1]-common.Min[1] > by) {
		return false // neighbours along a border
	}
	for _, pair := range [2][2]orb.Polygon{{a, b}, {b, a}} {
		for _, ring := range pair[0] {
			for _, at := range withMiddles(orb.LineString(ring)) {
				if common.Contains(at) && deepInside(pair[1], at, by) {
					return true
				}
			}
		}
		if c, area := planar.CentroidArea(pair[0]); area > 0 && common.Contains(c) && polygonContains(pair[0], c) && deepInside(pair[1], c, by) {
			return true
		}
	}
	of := segmentsIn(common, b)
	for _, s := range segmentsIn(common, a) {
		for _, o := range of {
			if crossDeep(s[0], s[1], o[0], o[1], by) {
				return true
			}
		}
	}
	return false
}

// commonBox returns the box that lies in both; its corners are exchanged where there is none.
func commonBox(a, b orb.Bound) orb.Bound {
	return orb.Bound{
		Min: orb.Point{math.Max(a.Min[0], b.Min[0]), math.Max(a.Min[1], b.Min[1])},
		Max: orb.Point{math.Min(a.Max[0], b.Max[0]), math.Min(a.Max[1], b.Max[1])},
	}
}

// segmentsIn lists the segments of a polygon's rings whose own box meets a box.
func segmentsIn(box orb.Bound, p orb.Polygon) [][2]orb.Point {
	var out [][2]orb.Point
	for _, ring := range p {
		for i := 0; i+1 < len(ring); i++ {
			c := commonBox(box, orb.LineString{ring[i], ring[i+1]}.Bound())
			if c.Min[0] <= c.Max[0] && c.Min[1] <= c.Max[1] {
				out = append(out, [2]orb.Point{ring[i], ring[i+1]})
			}
		}
	}
	return out
}

// crossDeep tells whether two segments cross with each end more than a distance on its side of the other.
func crossDeep(a, b, c, d orb.Point, by float64) bool {
	side := func(p, q, r orb.Point) float64 { // signed distance of r from the line pq
		l := math.Hypot(q[0]-p[0], q[1]-p[1])
		if !(l > 0) {
			return 0
		}
		return ((q[0]-p[0])*(r[1]-p[1]) - (q[1]-p[1])*(r[0]-p[0])) / l
	}
	s1, s2, s3, s4 := side(a, b, c), side(a, b, d), side(c, d, a), side(c, d, b)
	opposite := func(x, y float64) bool { return x > by && y < -by || x < -by && y > by }
	return opposite(s1, s2) && opposite(s3, s4)
}

// shareAlong returns the share of a line's sample points that lie within a distance of another line.
func shareAlong(line, other orb.LineString, within float64) float64 {
	points := withMiddles(line)
	n := 0
	for _, at := range points {
		if distanceToLine(other, at) <= within {
			n++
		}
	}
	return float64(n) / float64(len(points))
}
