package gisio

import (
	"fmt"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

// rings reads the rings of one polygon: closed, cleaned, of some area. parts and part name it in findings.
func (r *layerReader) rings(v *jsonValue, parts, part int) ([]path, bool) {
	if len(v.items) == 0 {
		r.add(Error, int(v.offset), fmt.Sprintf("part %d", part+1), "without rings: it is empty", "an array of rings", "")
		return nil, false
	}
	out := make([]path, len(v.items))
	good := true
	for i := range v.items {
		p, ok := r.ring(&v.items[i], ringName(parts, part, i))
		out[i] = p
		good = good && ok
	}
	return out, good
}

func (r *layerReader) ring(v *jsonValue, name string) (path, bool) {
	n := len(v.items)
	if n < 4 {
		r.add(Error, int(v.offset), name, "made of "+positionCount(n), "at least 4 positions, the last of which repeats the first", "")
		return path{}, false
	}
	p, ok := r.path(v)
	if !ok {
		return path{}, false
	}
	first, last := r.json.elements(&v.items[0]), r.json.elements(&v.items[n-1])
	if !slices.Equal(first, last) {
		r.add(Error, int(v.items[n-1].offset), name, fmt.Sprintf("not closed: it starts at %v and ends at %v", first, last),
			"a ring whose last position repeats the first", "repeat the first position at the end")
		return path{}, false
	}
	if p, ok = r.unwrap(p, true, name); !ok {
		return path{}, false
	}
	p = r.closeRing(r.dropRepeated(p, name))
	switch {
	case len(p.points) < 4:
		r.add(Error, int(v.offset), name, "smaller than 0.1 mm, or a line out and back", "at least 3 different positions", "remove it, or draw it anew")
		return path{}, false
	case onOneLine(p.points):
		r.add(Error, int(v.offset), name, "of zero area: all its positions lie on one line", "a ring around an area", "remove it, or draw it anew")
		return path{}, false
	}
	return p, true
}

// closeRing makes the last position the first one again after near positions were dropped, whether the last
// position itself was dropped or is now nearer than allowed to the one before it.
func (r *layerReader) closeRing(p path) path {
	n := len(p.points)
	if p.points[0] != p.points[n-1] {
		p.points, p.at = p.points[:n:n], p.at[:n:n]
		p.points[n-1], p.at[n-1] = p.points[0], p.at[0]
	}
	return p
}

// polygons turns rings the right way round, checks the shape, and joins what was cut at the antimeridian.
func (r *layerReader) polygons(parts [][]path) orb.Geometry {
	m := make(orb.MultiPolygon, len(parts))
	for i, part := range parts {
		for j, p := range part {
			ring := orb.Ring(p.points)
			if !r.projected && j > 0 {
				ring = besideRing(ring, m[i][0])
			}
			m[i] = append(m[i], turned(ring, j == 0))
		}
	}
	r.judgeShape(parts, m)
	if r.faulty {
		return nil
	}
	if !r.projected {
		if joined, changed := joinParts(m); changed {
			m = joined
			r.judgeShape(parts, m)
		}
	}
	switch {
	case r.faulty:
		return nil
	case len(m) == 1:
		return m[0]
	}
	return m
}

// judgeShape records the faults of the shape.
func (r *layerReader) judgeShape(parts [][]path, m orb.MultiPolygon) {
	s := newShape(m)
	for _, fault := range s.check() {
		f := fault.finding(s)
		r.add(f.Severity, r.ringOffset(parts, m, s, fault.ring), f.Property, f.Found, f.Allowed, f.Hint)
	}
}

// ringOffset gives the place of a ring in the text, as far as it is still the ring of the text.
func (r *layerReader) ringOffset(parts [][]path, m orb.MultiPolygon, s *shape, ring int) int {
	part, number := s.part[ring], s.number[ring]
	if len(m) != len(parts) || len(m[part]) != len(parts[part]) {
		part, number = 0, 0
	}
	return int(parts[part][number].at[0])
}

// turned gives a ring that runs counterclockwise, or clockwise for holes (RFC 7946, section 3.1.6), from the same first point.
func turned(ring orb.Ring, counterclockwise bool) orb.Ring {
	if leftTurning(ring) == counterclockwise {
		return ring
	}
	out := slices.Clone(ring)
	slices.Reverse(out)
	return out
}

// ringArea gives the area of a closed ring, positive counterclockwise, summed about its first point.
func ringArea(ring []orb.Point) float64 {
	if len(ring) == 0 {
		return 0
	}
	o := ring[0]
	sum := 0.0
	for i := 1; i < len(ring); i++ {
		a, b := ring[i-1], ring[i]
		sum += (a[0]-o[0])*(b[1]-o[1]) - (b[0]-o[0])*(a[1]-o[1])
	}
	return sum / 2
}

// onOneLine tells exactly whether all points of a ring lie on one line.
func onOneLine(ring []orb.Point) bool {
	if len(ring) < 3 {
		return true
	}
	a, b := ring[0], ring[0]
	furthest := 0.0
	for _, p := range ring {
		if d := math.Abs(p[0]-a[0]) + math.Abs(p[1]-a[1]); d > furthest {
			b, furthest = p, d
		}
	}
	for _, p := range ring {
		if a != b && orientation(a, b, p) != 0 {
			return false
		}
	}
	return true
}

// CheckShape examines a Polygon or MultiPolygon as ReadLayer does and gives its faults as findings without a place;
// other geometries have none. It is for shapes that were projected: a straight edge between two positions is another
// line on the plane than in degrees, so that what lay a hair apart may cross. Rings must be closed, with finite points
// none of which repeats the one before. Method: see shape.check (OGC simple features), exact signs.
func CheckShape(g orb.Geometry) Findings {
	var m orb.MultiPolygon
	switch g := g.(type) {
	case orb.Polygon:
		m = orb.MultiPolygon{g}
	case orb.MultiPolygon:
		m = g
	default:
		return nil
	}
	ready := make(orb.MultiPolygon, len(m))
	var out Findings
	for i, p := range m {
		if len(p) == 0 {
			out = append(out, Finding{Severity: Error, Property: ringName(len(m), i, 0), Found: "missing", Allowed: "a ring around an area"})
		}
		for j, ring := range p {
			if onOneLine(ring) {
				out = append(out, Finding{Severity: Error, Property: ringName(len(m), i, j), Found: "of zero area: all its positions lie on one line", Allowed: "a ring around an area"})
				continue
			}
			ready[i] = append(ready[i], turned(ring, j == 0))
		}
	}
	if len(out) > 0 {
		return out
	}
	s := newShape(ready)
	for _, f := range s.check() {
		out = append(out, f.finding(s))
	}
	return out
}
