package aquifer

import (
	"math"
	"sort"

	"github.com/paulmach/orb"
)

// alongOutline is how far an edge's path may lie from the outline, as a share of the extent's diagonal: digitised copies of
// one line in two layers differ by rounding and by generalisation, a tenth of a percent keeps 10 m on a 10 km site.
const alongOutline = 1e-3

// sameVertex is how near an edge's end may lie to a vertex of the outline to be taken as that vertex, as a share of the
// diagonal; it covers coordinates rounded to 7 decimals of a degree (1 cm) on sites above 10 km and never moves the end of
// a condition visibly.
const sameVertex = 1e-6

// stretch is the part of a ring that an edge covers, in the ring's own direction.
type stretch struct {
	edge  int
	ring  int
	start float64 // arc length on the ring [m]
	span  float64 // length, at most the ring's perimeter [m]
	// levels by arc length from start, increasing
	at     []float64
	levels []float64
}

// outlineRings holds the rings of the extent, open, as they go to the mesher.
type outlineRings struct {
	rings []orb.Ring
	cum   [][]float64 // arc length at each vertex, and the perimeter as the last entry [m]
	diag  float64
}

func newOutlineRings(extent orb.Polygon) *outlineRings {
	o := &outlineRings{}
	for _, r := range extent {
		o.rings = append(o.rings, append(orb.Ring(nil), openRing(r)...))
	}
	b := extent.Bound()
	o.diag = distance(b.Min, b.Max)
	o.measure()
	return o
}

func (o *outlineRings) measure() {
	o.cum = make([][]float64, len(o.rings))
	for k, r := range o.rings {
		c := make([]float64, len(r)+1)
		for i := range r {
			c[i+1] = c[i] + distance(r[i], r[(i+1)%len(r)])
		}
		o.cum[k] = c
	}
}

// nearest returns the place on ring k nearest to p.
func (o *outlineRings) nearest(k int, p orb.Point) (arc, dist float64) {
	dist = math.Inf(1)
	r := o.rings[k]
	for i := range r {
		f, d := onSegment(p, r[i], r[(i+1)%len(r)])
		if d < dist {
			dist = d
			arc = o.cum[k][i] + f*(o.cum[k][i+1]-o.cum[k][i])
		}
	}
	return arc, dist
}

// insert makes p a vertex of the ring nearest to it unless a vertex is there already.
func (o *outlineRings) insert(k int, p orb.Point) {
	r := o.rings[k]
	best, bestD, bestF := 0, math.Inf(1), 0.0
	for i := range r {
		f, d := onSegment(p, r[i], r[(i+1)%len(r)])
		if d < bestD {
			best, bestD, bestF = i, d, f
		}
	}
	a, b := r[best], r[(best+1)%len(r)]
	at := orb.Point{a[0] + bestF*(b[0]-a[0]), a[1] + bestF*(b[1]-a[1])}
	if bestD == 0 {
		at = p
	}
	tol := sameVertex * o.diag
	if distance(at, a) <= tol || distance(at, b) <= tol {
		return
	}
	grown := append(orb.Ring(nil), r[:best+1]...)
	grown = append(grown, at)
	o.rings[k] = append(grown, r[best+1:]...)
}

// ringOf finds the ring that a whole path lies along; the error distance is that of its farthest vertex.
func (o *outlineRings) ringOf(path orb.LineString) (ring int, worst float64) {
	worst = math.Inf(1)
	for k := range o.rings {
		far := 0.0
		for _, p := range path {
			_, d := o.nearest(k, p)
			far = math.Max(far, d)
		}
		if far < worst {
			worst, ring = far, k
		}
	}
	return ring, worst
}

// match places every edge on its ring: first the ends become vertices, then arcs are measured on the final rings.
func (o *outlineRings) match(edges []Edge, bad *problems) []stretch {
	ringOf := make([]int, len(edges))
	for i, e := range edges {
		ringOf[i] = -1
		k, worst := o.ringOf(e.Path)
		if !(worst <= alongOutline*o.diag) {
			bad.add("edge "+e.Name, e.Path[0], "the path leaves the outline by %.3g m; at most %.3g m is allowed: draw it along the extent's outline", worst, alongOutline*o.diag)
			continue
		}
		ringOf[i] = k
		if e.Path[0] != e.Path[len(e.Path)-1] {
			o.insert(k, e.Path[0])
			o.insert(k, e.Path[len(e.Path)-1])
			o.measure() // the next edge is measured on the ring with these vertices
		}
	}
	var out []stretch
	for i, e := range edges {
		if ringOf[i] < 0 {
			continue
		}
		st := o.place(i, ringOf[i], e)
		if off, at := o.farthest(st, e.Path); !(off <= alongOutline*o.diag) {
			bad.add("edge "+e.Name, at, "the path leaves the outline by %.3g m at (%.1f, %.1f); at most %.3g m is allowed: draw it along the extent's outline", off, at[0], at[1], alongOutline*o.diag)
			continue
		}
		out = append(out, st)
	}
	o.overlaps(edges, out, bad)
	return out
}

// farthest is how far the outline within a stretch runs from the path that should lie along it, at the outline's vertices and the middles
// between them.
func (o *outlineRings) farthest(s stretch, path orb.LineString) (dist float64, at orb.Point) {
	r, cum := o.rings[s.ring], o.cum[s.ring]
	perimeter := cum[len(cum)-1]
	for i, v := range r {
		next := r[(i+1)%len(r)]
		for _, c := range [2]struct {
			arc float64
			p   orb.Point
		}{{cum[i], v}, {(cum[i] + cum[i+1]) / 2, orb.Point{(v[0] + next[0]) / 2, (v[1] + next[1]) / 2}}} {
			if !(math.Mod(c.arc-s.start+perimeter, perimeter) <= s.span) {
				continue
			}
			near := math.Inf(1)
			for k := 0; k+1 < len(path); k++ {
				_, d := onSegment(c.p, path[k], path[k+1])
				near = math.Min(near, d)
			}
			if near > dist {
				dist, at = near, c.p
			}
		}
	}
	return dist, at
}

// place measures one edge on its ring and picks the direction that its path runs in.
func (o *outlineRings) place(index, k int, e Edge) stretch {
	perimeter := o.cum[k][len(o.cum[k])-1]
	s := stretch{edge: index, ring: k}
	closed := e.Path[0] == e.Path[len(e.Path)-1]
	pos := make([]float64, len(e.Path))
	for i, p := range e.Path {
		pos[i] = o.snapped(k, p)
	}
	// Walking the path's points along the ring takes as much way as the path is long in its true direction, nearly whole turns in the other.
	length := arcs(e.Path)[len(e.Path)-1]
	onward, back := 0.0, 0.0
	for i := 1; i < len(pos); i++ {
		step := math.Mod(pos[i]-pos[i-1]+perimeter, perimeter)
		onward += step
		if step > 0 {
			back += perimeter - step
		}
	}
	reversed := math.Abs(back-length) < math.Abs(onward-length)
	switch {
	case closed:
		s.start, s.span = pos[0], perimeter
	case reversed:
		s.start, s.span = pos[len(pos)-1], math.Mod(pos[0]-pos[len(pos)-1]+perimeter, perimeter)
	default:
		s.start, s.span = pos[0], math.Mod(pos[len(pos)-1]-pos[0]+perimeter, perimeter)
	}
	if len(e.Levels) == len(e.Path) && len(e.Levels) > 1 {
		for i := range pos {
			at := math.Mod(pos[i]-s.start+perimeter, perimeter)
			first, last := i == 0, i == len(pos)-1
			if reversed {
				first, last = last, first
			}
			if first {
				at = 0
			}
			if last {
				at = s.span
			}
			s.at = append(s.at, at)
			s.levels = append(s.levels, e.Levels[i])
		}
		if reversed {
			for a, b := 0, len(s.at)-1; a < b; a, b = a+1, b-1 {
				s.at[a], s.at[b] = s.at[b], s.at[a]
				s.levels[a], s.levels[b] = s.levels[b], s.levels[a]
			}
		}
		sort.Stable(byArc{s.at, s.levels})
	} else if len(e.Levels) > 0 {
		s.at, s.levels = []float64{0}, e.Levels[:1]
	}
	return s
}

type byArc struct{ at, levels []float64 }

func (b byArc) Len() int           { return len(b.at) }
func (b byArc) Less(i, j int) bool { return b.at[i] < b.at[j] }
func (b byArc) Swap(i, j int) {
	b.at[i], b.at[j] = b.at[j], b.at[i]
	b.levels[i], b.levels[j] = b.levels[j], b.levels[i]
}

// snapped returns the arc of p on ring k, taking the arc of a vertex that p is at.
func (o *outlineRings) snapped(k int, p orb.Point) float64 {
	arc, _ := o.nearest(k, p)
	for i, v := range o.rings[k] {
		if distance(v, p) <= sameVertex*o.diag {
			return o.cum[k][i]
		}
	}
	return arc
}

// overlaps reports edges that claim the same part of the outline.
func (o *outlineRings) overlaps(edges []Edge, s []stretch, bad *problems) {
	tol := 2 * sameVertex * o.diag
	for i := range s {
		for j := i + 1; j < len(s); j++ {
			if s[i].ring != s[j].ring {
				continue
			}
			perimeter := o.cum[s[i].ring][len(o.cum[s[i].ring])-1]
			gap := math.Mod(s[j].start-s[i].start+perimeter, perimeter)
			back := math.Mod(s[i].start-s[j].start+perimeter, perimeter)
			common := math.Max(s[i].span-gap, s[j].span-back)
			if gap > perimeter-tol {
				common = math.Min(s[i].span, s[j].span)
			}
			common = math.Min(common, math.Min(s[i].span, s[j].span))
			if common > tol {
				bad.add("edge "+edges[s[j].edge].Name, edges[s[j].edge].Path[0], "it overlaps edge %s over %.4g m of the outline; each part of the outline may carry one condition", edges[s[i].edge].Name, common)
			}
		}
	}
}

// covers tells whether the outline edge between two arcs belongs to the stretch, and the arcs of its ends from its start.
func (s stretch) covers(mid, half, perimeter float64) (from, to float64, ok bool) {
	rel := math.Mod(mid-s.start+2*perimeter, perimeter)
	if !(rel <= s.span) {
		return 0, 0, false
	}
	return math.Max(0, rel-half), math.Min(s.span, rel+half), true
}

// level interpolates between the stated points.
func (s stretch) level(arc float64) float64 { return interpolate(s.at, s.levels, arc) }

// interpolate is linear between points and constant beyond the ends; one value holds everywhere.
func interpolate(at, values []float64, x float64) float64 {
	if len(at) == 0 {
		return 0
	}
	if len(at) == 1 || x <= at[0] {
		return values[0]
	}
	for i := 1; i < len(at); i++ {
		if x <= at[i] {
			if at[i] == at[i-1] {
				return values[i]
			}
			f := (x - at[i-1]) / (at[i] - at[i-1])
			return values[i-1] + f*(values[i]-values[i-1])
		}
	}
	return values[len(values)-1]
}
