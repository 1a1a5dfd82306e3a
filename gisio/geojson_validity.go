package gisio

import (
	"fmt"
	"slices"

	"github.com/paulmach/orb"
)

// Bounds on what is listed for one feature: the first few faults show what is wrong.
const (
	shownContacts    = 5
	searchedContacts = 100_000 // touching points are legal and may be many; beyond this the shape is not a drawing of anything
)

// shapeFault is a fault of a polygon against the simple-feature rules, in words.
type shapeFault struct {
	ring           int // index in shape.rings
	warning        bool
	found, allowed string
	hint           string
}

// finding gives a fault of s as a finding without a place.
func (f shapeFault) finding(s *shape) Finding {
	severity := Error
	if f.warning {
		severity = Warning
	}
	return Finding{Severity: severity, Property: s.ringName(f.ring), Found: f.found, Allowed: f.allowed, Hint: f.hint}
}

// shape is a polygon, or several parts, under examination. Rings are closed, without repeated consecutive points and
// not all on one line; outer rings run counterclockwise, holes clockwise.
type shape struct {
	rings  [][]orb.Point
	part   []int // part of each ring
	number []int // 0 = outer ring, 1 = first hole ...
	parts  int
	faults []shapeFault
}

func newShape(m orb.MultiPolygon) *shape {
	s := &shape{parts: len(m)}
	for i, p := range m {
		for j, r := range p {
			s.rings = append(s.rings, r)
			s.part = append(s.part, i)
			s.number = append(s.number, j)
		}
	}
	return s
}

// ringName names a ring for a finding.
func (s *shape) ringName(ring int) string {
	return ringName(s.parts, s.part[ring], s.number[ring])
}

// ringName names a ring of a polygon of so many parts, all counted from 0.
func ringName(parts, part, number int) string {
	name := "the outer ring"
	if number > 0 {
		name = fmt.Sprintf("hole %d", number)
	}
	if parts > 1 {
		name += fmt.Sprintf(" of part %d", part+1)
	}
	return name
}

func (s *shape) fault(ring int, found, allowed, hint string) {
	s.faults = append(s.faults, shapeFault{ring, false, found, allowed, hint})
}

func pointText(p orb.Point) string { return fmt.Sprintf("(%v, %v)", p[0], p[1]) }

// check examines the shape by the rules of OGC simple features (OGC 06-103r4, 6.1.11 and 6.1.13), exactly:
// rings neither cross nor touch themselves, do not cross each other or run along each other, holes lie inside and
// apart, rings may meet at single points but must leave the inside of a part connected, parts do not overlap.
// The one leave it takes: parts that share an edge from either side are warned of, not refused.
func (s *shape) check() []shapeFault {
	if s.spikes(); len(s.faults) > 0 {
		return s.faults
	}
	contacts := findContacts(s.rings, searchedContacts)
	if len(contacts) >= searchedContacts {
		s.fault(0, fmt.Sprintf("crossed or touched by other edges at %d places or more", searchedContacts), "a shape that does not cross itself", "redraw the shape")
		return s.faults
	}
	s.judge(contacts)
	if len(s.faults) > 0 && !s.onlyWarnings() {
		return s.faults
	}
	s.connected(contacts)
	if len(s.faults) > 0 && !s.onlyWarnings() {
		return s.faults
	}
	s.holesInside()
	s.partsApart()
	return s.faults
}

func (s *shape) onlyWarnings() bool {
	for _, f := range s.faults {
		if !f.warning {
			return false
		}
	}
	return true
}

// spikes finds places where a ring turns back on itself.
func (s *shape) spikes() {
	for i, r := range s.rings {
		n := len(r) - 1
		shown := 0
		for j := range n {
			a, b, c := r[(j+n-1)%n], r[j], r[j+1]
			if orientation(a, b, c) != 0 || before(a, b) != before(c, b) {
				continue
			}
			if shown++; shown > shownContacts {
				break
			}
			s.fault(i, "drawn with a spike: it runs out to "+pointText(b)+" and back on the same line", "a ring that does not turn back on itself", "remove the tip of the spike")
		}
	}
}

// judge turns contacts into faults where they are not legal.
func (s *shape) judge(contacts []edgeContact) {
	shown := 0
	warned := make(map[[2]int]bool)
	for _, c := range contacts {
		if shown >= shownContacts {
			return
		}
		e, f := int(c.e.ring), int(c.f.ring)
		where := fmt.Sprintf("the edge %s-%s and the edge %s-%s", pointText(c.e.a), pointText(c.e.b), pointText(c.f.a), pointText(c.f.b))
		count := len(s.faults)
		switch {
		case e == f && c.kind == contactTouch:
			s.fault(f, "touching itself at "+pointText(c.point), "a ring that does not touch itself", "cut the shape in two there, or move the ring apart")
		case e == f && c.kind == contactCross:
			s.fault(f, "crossing itself: "+where+" cross", "a ring that does not cross itself", "put its positions in the order of the outline")
		case e == f:
			s.fault(f, "running along itself from "+pointText(c.point)+": "+where, "a ring that uses each line once", "remove the doubled stretch")
		case c.kind == contactCross:
			s.fault(f, "crossing "+s.ringName(e)+": "+where+" cross", "rings that do not cross", "move one of the two")
		case c.kind == contactOverlap && s.part[e] != s.part[f] && s.opposite(c):
			pair := [2]int{s.part[e], s.part[f]}
			if !warned[pair] {
				warned[pair] = true
				s.faults = append(s.faults, shapeFault{f, true, "sharing an edge with " + s.ringName(e) + " at " + pointText(c.point),
					"parts that meet at single points only", "read as they are; they could be one part"})
				continue
			}
		case c.kind == contactOverlap:
			s.fault(f, "sharing a stretch of edge with "+s.ringName(e)+" from "+pointText(c.point), "rings that meet at single points only",
				"move one of the two, or draw the two as one ring")
		case s.part[e] != s.part[f] && s.entering(c):
			s.fault(f, "overlapping part "+fmt.Sprint(s.part[e]+1)+" at "+pointText(c.point), "parts that do not overlap", "cut the overlap off one of the two")
		}
		if len(s.faults) > count {
			shown++
		}
	}
}

// opposite tells whether two edges on one line run in opposite directions, so that their insides lie apart.
func (s *shape) opposite(c edgeContact) bool { return before(c.e.a, c.e.b) != before(c.f.a, c.f.b) }

// entering tells whether at a touching point one ring goes on inside the corner of the other.
func (s *shape) entering(c edgeContact) bool {
	ePrevious, eNext := s.neighbours(c.e, c.point)
	fPrevious, fNext := s.neighbours(c.f, c.point)
	return inCorner(c.point, ePrevious, eNext, fPrevious) || inCorner(c.point, ePrevious, eNext, fNext) ||
		inCorner(c.point, fPrevious, fNext, ePrevious) || inCorner(c.point, fPrevious, fNext, eNext)
}

// neighbours gives the ring points before and after p, which lies on e.
func (s *shape) neighbours(e edge, p orb.Point) (previous, next orb.Point) {
	r := s.rings[e.ring]
	n := len(r) - 1
	i := int(e.index)
	switch p {
	case e.a:
		return r[(i+n-1)%n], e.b
	case e.b:
		return e.a, r[(i+2)%n]
	}
	return e.a, e.b
}

// inCorner tells whether the direction from p to q lies strictly within the corner that the inside of a ring has at
// p: counterclockwise from the next point to the previous one.
func inCorner(p, previous, next, q orb.Point) bool {
	fromNext, fromPrevious := orientation(p, next, q), orientation(p, previous, q)
	switch orientation(p, next, previous) {
	case 1:
		return fromNext > 0 && fromPrevious < 0
	case -1:
		return !(fromPrevious >= 0 && fromNext <= 0)
	}
	return fromNext > 0
}

// connected refuses rings of one part that touch so often that they cut its inside in two: the graph of rings and
// touching points must have no loop. It also makes sure that two rings of a part touch at one point at most, so that
// one further point tells which lies inside which.
func (s *shape) connected(contacts []edgeContact) {
	type incidence struct {
		ring int
		at   orb.Point
	}
	seen := make(map[incidence]bool)
	places := make(map[orb.Point]map[int]int) // point -> part -> node
	parent := make([]int, len(s.rings))
	for i := range parent {
		parent[i] = i
	}
	root := func(i int) int {
		for parent[i] != i {
			parent[i] = parent[parent[i]]
			i = parent[i]
		}
		return i
	}
	for _, c := range contacts {
		part := s.part[c.e.ring]
		if c.kind != contactTouch || s.part[c.f.ring] != part {
			continue
		}
		for _, ring := range [2]int{int(c.e.ring), int(c.f.ring)} {
			if seen[incidence{ring, c.point}] {
				continue
			}
			seen[incidence{ring, c.point}] = true
			if places[c.point] == nil {
				places[c.point] = make(map[int]int)
			}
			node, ok := places[c.point][part]
			if !ok {
				node = len(parent)
				parent = append(parent, node)
				places[c.point][part] = node
			}
			if root(ring) == root(node) {
				s.fault(ring, "touching the other rings at more than one point, the last at "+pointText(c.point)+", which cuts the area in two",
					"rings that leave the inside in one piece", "draw the pieces as parts of their own, or move the hole")
				return
			}
			parent[root(ring)] = root(node)
		}
	}
}

// relation tells where ring r lies against ring other, which it neither crosses nor runs along: by its first point off the
// other. onRing comes back where every point of r lies on the other.
func (s *shape) relation(r, other int) side {
	for _, p := range s.rings[r] {
		if at := sideOfRing(p, s.rings[other]); at != onRing {
			return at
		}
	}
	return onRing
}

func (s *shape) holesInside() {
	var shell int
	var holes []int
	var boxes []orb.Bound
	flush := func() {
		for i := range holes {
			for j := range i {
				if !boxes[i].Intersects(boxes[j]) {
					continue
				}
				if s.relation(holes[i], holes[j]) != outside || s.relation(holes[j], holes[i]) != outside {
					s.fault(holes[i], "overlapping "+s.ringName(holes[j]), "holes that lie apart", "draw the two as one hole")
				}
			}
		}
		holes, boxes = holes[:0], boxes[:0]
	}
	for i := range s.rings {
		if s.number[i] == 0 {
			flush()
			shell = i
			continue
		}
		if s.relation(i, shell) != inside {
			s.fault(i, "outside of "+s.ringName(shell), "holes inside the outer ring, which comes first", "put the outer ring first, or give the other area a part or a feature of its own")
			continue
		}
		holes = append(holes, i)
		boxes = append(boxes, orb.Ring(s.rings[i]).Bound())
	}
	flush()
}

// partsApart refuses a part that lies within the area of another.
func (s *shape) partsApart() {
	if s.parts < 2 {
		return
	}
	first := make([]int, 0, s.parts+1) // outer ring of each part
	for i := range s.rings {
		if s.number[i] == 0 {
			first = append(first, i)
		}
	}
	first = append(first, len(s.rings))
	boxes := make([]orb.Bound, s.parts)
	order := make([]int, s.parts)
	for i := range order {
		order[i] = i
		boxes[i] = orb.Ring(s.rings[first[i]]).Bound()
	}
	slices.SortStableFunc(order, func(a, b int) int {
		return sign(boxes[a].Min[0] - boxes[b].Min[0])
	})
	for at, a := range order {
		for _, b := range order[at+1:] {
			if boxes[b].Min[0] > boxes[a].Max[0] {
				break
			}
			if !boxes[a].Intersects(boxes[b]) {
				continue
			}
			for _, pair := range [2][2]int{{a, b}, {b, a}} {
				if s.partInside(first[pair[0]], first[pair[1]], first[pair[1]+1]) {
					s.fault(first[max(a, b)], fmt.Sprintf("overlapping part %d", min(a, b)+1), "parts that do not overlap", "cut the overlap off one of the two")
					break
				}
			}
		}
	}
}

// partInside tells whether the outer ring r lies in the area of the rings from shell up to end.
func (s *shape) partInside(r, shell, end int) bool {
points:
	for _, p := range s.rings[r] {
		in := false
		for other := shell; other < end; other++ {
			switch sideOfRing(p, s.rings[other]) {
			case onRing:
				continue points
			case inside:
				in = other == shell
				if other > shell {
					return false
				}
			case outside:
				if other == shell {
					return false
				}
			}
		}
		return in
	}
	return false
}
