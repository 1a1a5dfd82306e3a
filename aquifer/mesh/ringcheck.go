package mesh

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

// ringSegment is one segment of a ring under examination.
type ringSegment struct {
	a, b  orb.Point
	ring  int
	index int // place in the cleaned ring
	of    int // segments of the ring
}

// bounds of the segment, widened by w.
func (s *ringSegment) bounds(w float64) box {
	return box{min(s.a[0], s.b[0]) - w, min(s.a[1], s.b[1]) - w, max(s.a[0], s.b[0]) + w, max(s.a[1], s.b[1]) + w}
}

// orientP is the orientation of three points.
func orientP(a, b, c orb.Point) float64 { return orient(a[0], a[1], b[0], b[1], c[0], c[1]) }

// dropRepeats leaves out vertices within the tolerance of the one before, and the closing one.
func dropRepeats(r orb.Ring, tol float64) orb.Ring {
	var out orb.Ring
	for _, p := range r {
		if n := len(out); n > 0 && distance(out[n-1], p) <= tol {
			continue
		}
		out = append(out, p)
	}
	for len(out) > 1 && distance(out[0], out[len(out)-1]) <= tol {
		out = out[:len(out)-1]
	}
	return out
}

// inLine says whether all vertices lie exactly on one straight line.
func inLine(r orb.Ring) bool {
	for i := 2; i < len(r); i++ {
		if orientP(r[0], r[1], r[i]) != 0 {
			return false
		}
	}
	return true
}

// cutSpikes removes places where a ring turns straight back and tells the tip of each, so that what follows sees the rest only.
func cutSpikes(r orb.Ring) (rest orb.Ring, tips []orb.Point) {
	rest = append(rest, r...)
	for i := 0; len(rest) >= 3 && i < len(rest); {
		n := len(rest)
		a, b, c := rest[(i+n-1)%n], rest[i], rest[(i+1)%n]
		if orientP(a, b, c) != 0 || !((a[0]-b[0])*(c[0]-b[0])+(a[1]-b[1])*(c[1]-b[1]) > 0) {
			i++
			continue
		}
		if len(tips) == 0 || tips[len(tips)-1] != a { // the remaining part of a spike just cut is no new one
			tips = append(tips, b)
		}
		rest = append(rest[:i], rest[i+1:]...)
		if n = len(rest); n > 1 && rest[i%n] == rest[(i+n-1)%n] {
			rest = append(rest[:i%n], rest[i%n+1:]...)
		}
		i = max(0, i-2)
	}
	return rest, tips
}

// meeting is how two segments meet.
type meetingKind int

const (
	apart meetingKind = iota
	touching
	crossing
	overlapping
)

// meet classifies two segments exactly and tells where they meet.
func meet(s, o *ringSegment) (meetingKind, orb.Point) {
	c, d := orientP(s.a, s.b, o.a), orientP(s.a, s.b, o.b)
	a, b := orientP(o.a, o.b, s.a), orientP(o.a, o.b, s.b)
	if c > 0 && d > 0 || c < 0 && d < 0 || a > 0 && b > 0 || a < 0 && b < 0 {
		return apart, orb.Point{}
	}
	if a == 0 && b == 0 && c == 0 && d == 0 {
		return meetInLine(s, o)
	}
	if a != 0 && b != 0 && c != 0 && d != 0 {
		f := math.Abs(a) / (math.Abs(a) + math.Abs(b))
		return crossing, orb.Point{s.a[0] + f*(s.b[0]-s.a[0]), s.a[1] + f*(s.b[1]-s.a[1])}
	}
	switch {
	case a == 0 && within(s.a, o):
		return touching, s.a
	case b == 0 && within(s.b, o):
		return touching, s.b
	case c == 0 && within(o.a, s):
		return touching, o.a
	case d == 0 && within(o.b, s):
		return touching, o.b
	}
	return apart, orb.Point{}
}

// meetInLine classifies two segments on one straight line.
func meetInLine(s, o *ringSegment) (meetingKind, orb.Point) {
	var shared []orb.Point
	add := func(p orb.Point) {
		if len(shared) == 0 || shared[0] != p {
			shared = append(shared, p)
		}
	}
	for _, p := range [2]orb.Point{s.a, s.b} {
		if within(p, o) {
			add(p)
		}
	}
	for _, p := range [2]orb.Point{o.a, o.b} {
		if within(p, s) && len(shared) < 2 {
			add(p)
		}
	}
	switch len(shared) {
	case 0:
		return apart, orb.Point{}
	case 1:
		return touching, shared[0]
	}
	return overlapping, orb.Point{(shared[0][0] + shared[1][0]) / 2, (shared[0][1] + shared[1][1]) / 2}
}

// within says whether p, which is in line with s, lies on it.
func within(p orb.Point, s *ringSegment) bool {
	b := s.bounds(0)
	return p[0] >= b.x0 && p[0] <= b.x1 && p[1] >= b.y0 && p[1] <= b.y1
}

// place writes a point for messages.
func place(p orb.Point) string { return fmt.Sprintf("(%.10g, %.10g)", p[0], p[1]) }

// side of a point against a ring.
type side int

const (
	outsideRing side = iota
	onRing
	insideRing
)

// ringSet finds segments of rings.
type ringSet struct {
	segments []ringSegment
	tree     *boxTree
	first    []int // first segment of each ring; one more at the end
}

// newRingSet files the segments of cleaned rings.
func newRingSet(rings []orb.Ring) *ringSet {
	s := &ringSet{}
	var boxes []box
	for i, r := range rings {
		s.first = append(s.first, len(s.segments))
		for j := range r {
			s.segments = append(s.segments, ringSegment{r[j], r[(j+1)%len(r)], i, j, len(r)})
			boxes = append(boxes, s.segments[len(s.segments)-1].bounds(0))
		}
	}
	s.first = append(s.first, len(s.segments))
	s.tree = newBoxTree(boxes)
	return s
}

// sideOf says on which side of one ring p lies, by an exact ray to the right.
func (s *ringSet) sideOf(p orb.Point, ring int) side {
	in, on := false, false
	s.tree.each(box{p[0], p[1], math.Inf(1), p[1]}, func(i int) bool {
		g := &s.segments[i]
		if g.ring != ring {
			return true
		}
		o := orientP(g.a, g.b, p)
		if o == 0 && within(p, g) {
			on = true
			return false
		}
		if (g.a[1] > p[1]) != (g.b[1] > p[1]) && (o > 0) == (g.b[1] > g.a[1]) {
			in = !in
		}
		return true
	})
	switch {
	case on:
		return onRing
	case in:
		return insideRing
	}
	return outsideRing
}

// near says whether a segment of any ring lies within w of p.
func (s *ringSet) near(p orb.Point, w float64) bool {
	found := false
	s.tree.each(box{p[0] - w, p[1] - w, p[0] + w, p[1] + w}, func(i int) bool {
		found = segmentDistance(p, s.segments[i].a, s.segments[i].b) <= w
		return !found
	})
	return found
}

// segmentDistance is the distance of p from segment a-b [m].
func segmentDistance(p, a, b orb.Point) float64 {
	ux, uy := b[0]-a[0], b[1]-a[1]
	f := ((p[0]-a[0])*ux + (p[1]-a[1])*uy) / (ux*ux + uy*uy)
	f = max(0, min(1, f))
	return math.Hypot(a[0]+f*ux-p[0], a[1]+f*uy-p[1])
}
