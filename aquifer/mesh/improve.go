package mesh

import "math"

// shape holds a triangle's corners, relative to its first vertex and in the metric of its region, and what follows from them.
type shape struct {
	x, y   [3]float64
	l2     [3]float64 // squared length of edge k, opposite corner k
	cross  float64    // twice the area
	radius float64    // squared circumradius
}

// newShape measures a triangle by its second and third corner, seen from the first.
func newShape(bx, by, cx, cy float64) shape {
	s := shape{x: [3]float64{0, bx, cx}, y: [3]float64{0, by, cy}}
	dx, dy := cx-bx, cy-by
	s.l2 = [3]float64{dx*dx + dy*dy, cx*cx + cy*cy, bx*bx + by*by}
	s.cross = bx*cy - by*cx
	s.radius = s.l2[0] * s.l2[1] * s.l2[2] / (4 * s.cross * s.cross)
	return s
}

// shapeOf measures a triangle.
func (m *triangulation) shapeOf(t int32) shape {
	tr := &m.t[t]
	bx, by := m.vector(tr.region, tr.v[0], tr.v[1])
	cx, cy := m.vector(tr.region, tr.v[0], tr.v[2])
	return newShape(bx, by, cx, cy)
}

// centre is the circumcentre relative to corner 0.
func (s *shape) centre() (x, y float64) {
	b, c := s.l2[2], s.l2[1]
	return (s.y[2]*b - s.y[1]*c) / (2 * s.cross), (s.x[1]*c - s.x[2]*b) / (2 * s.cross)
}

// shortest is the index of the shortest edge.
func (s *shape) shortest() int32 {
	k := int32(0)
	if s.l2[1] < s.l2[0] {
		k = 1
	}
	if s.l2[2] < s.l2[k] {
		k = 2
	}
	return k
}

// faults says by how much a triangle is larger than wanted (0 when it is not), and whether an angle is too small that can be
// helped.
func (r *refiner) faults(t int32, s *shape) (tooLarge float64, thin bool) {
	tr := &r.t[t]
	h := (r.p[tr.v[0]].h + r.p[tr.v[1]].h + r.p[tr.v[2]].h) / 3
	if over2 := 3 * s.radius / (h * h); !(over2 <= oversize*oversize) {
		tooLarge = math.Sqrt(over2)
	}
	k := s.shortest()
	if s.radius <= r.ratio2*s.l2[k] {
		return tooLarge, false
	}
	if s.l2[k] < hopelessShare*hopelessShare*h*h {
		return tooLarge, false
	}
	return tooLarge, !r.forced(t, k)
}

// forced says whether the input forces the smallest angle of a triangle, opposite its shortest edge k: both sides of the angle
// are segments, or the edge spans two segments of a sharp corner on one shell (Miller, Pav & Walkington 2003).
func (r *refiner) forced(t, k int32) bool {
	tr := &r.t[t]
	if tr.s[next3[k]] >= 0 && tr.s[prev3[k]] >= 0 {
		return true
	}
	return r.onShell(tr.v[next3[k]], tr.v[prev3[k]])
}

// onShell says whether two vertices were put on two segments of one sharp corner, at the same distance from it.
func (r *refiner) onShell(u, w int32) bool {
	a, b := r.p[u].seg, r.p[w].seg
	if a < 0 || b < 0 || a == b {
		return false
	}
	c := r.sharedCorner(a, b)
	if c < 0 {
		return false
	}
	du, dw := *r.shellScale(a, c)*r.distance(c, u), *r.shellScale(b, c)*r.distance(c, w)
	return math.Abs(du-dw) <= shellTolerance*max(du, dw)
}

// sharedCorner is the vertex at which two segments meet in a sharp corner, or -1.
func (r *refiner) sharedCorner(a, b int32) int32 {
	s, o := &r.bases[a], &r.bases[b]
	if s.sharpP && (s.p == o.p || s.p == o.q) {
		return s.p
	}
	if s.sharpQ && (s.q == o.p || s.q == o.q) {
		return s.q
	}
	return -1
}

// improve adds a vertex that removes a bad triangle: an off-centre over an edge that the finished mesh or a segment bounds, else
// the circumcentre. Where the vertex would encroach upon a segment, that segment is cut instead.
func (r *refiner) improve(t int32, central bool) {
	tr := &r.t[t]
	s := r.shapeOf(t)
	tooLarge, thin := r.faults(t, &s)
	base := int32(-1)
	for k := range int32(3) {
		e := tr.n[k]
		if (e < 0 || tr.s[k] >= 0 || r.t[e>>2].state == stateGood) && (base < 0 || s.l2[k] < s.l2[base]) {
			base = k
		}
	}
	if thin {
		base = s.shortest()
	}
	if base < 0 && !central {
		tr.state = stateLater
		r.later.push(item{t, tr.stamp})
		return
	}
	if base >= 0 && !central {
		if x, y, ok := r.offCentre(t, &s, base, thin); ok && r.tryInsert(t, x, y, tooLarge, thin, false) {
			return
		}
	}
	cx, cy := s.centre()
	x, y := r.place(t, cx, cy)
	if !r.tryInsert(t, x, y, tooLarge, thin, true) {
		r.settle(t)
	}
}

// place maps an offset from the first vertex of t, in the metric of its region, to the plane.
func (r *refiner) place(t int32, dx, dy float64) (x, y float64) {
	tr := &r.t[t]
	if r.metrics != nil {
		dx, dy = r.metrics[tr.region].from(dx, dy)
	}
	o := &r.p[tr.v[0]]
	return o.x + dx, o.y + dy
}

// offCentre is the place on the bisector of edge k at which the new triangle has sides of the wanted size, or, for a thin
// triangle, just the wanted angle, whichever is nearer (Ungor 2004; Engwirda & Ivers 2016). ok is false when the circumcentre
// is nearer still.
func (r *refiner) offCentre(t int32, s *shape, k int32, thin bool) (x, y float64, ok bool) {
	tr := &r.t[t]
	i, j := next3[k], prev3[k]
	mx, my := (s.x[i]+s.x[j])/2, (s.y[i]+s.y[j])/2
	l := math.Sqrt(s.l2[k])
	nx, ny := -(s.y[j]-s.y[i])/l, (s.x[j]-s.x[i])/l
	cx, cy := s.centre()
	dc := (cx-mx)*nx + (cy-my)*ny
	if !(dc > 0) {
		return 0, 0, false
	}
	u, w := r.p[tr.v[i]].h, r.p[tr.v[j]].h
	side := (u + w) / 2
	d := altitude(side, l)
	if d < dc {
		qx, qy := r.place(t, mx+d*nx, my+d*ny)
		side = (side + r.field.at(qx, qy)) / 2
		d = altitude(side, l)
	}
	if thin {
		d = min(d, l*r.apex)
	}
	if !(d < dc) {
		return 0, 0, false
	}
	x, y = r.place(t, mx+d*nx, my+d*ny)
	return x, y, true
}

// altitude of the triangle with a base and two sides of the wanted length; never flatter than a right angle at the apex.
func altitude(side, base float64) float64 {
	return math.Sqrt(max(side*side-base*base/4, base*base/4))
}

// tryInsert puts a free vertex at (x, y) to remove triangle t. It gives false when nothing was done: an off-centre that is out
// of sight or encroaches, or a place that cannot be reached.
func (r *refiner) tryInsert(t int32, x, y float64, tooLarge float64, thin, central bool) bool {
	tr := &r.t[t]
	a, b, c := &r.p[tr.v[0]], &r.p[tr.v[1]], &r.p[tr.v[2]]
	stamp := tr.stamp
	u, how := r.walk(t, (a.x+b.x+c.x)/3, (a.y+b.y+c.y)/3, x, y, true)
	switch how {
	case walkLost:
		return false
	case walkBlocked:
		if !central || !thin && tooLarge < mildOversize {
			return false
		}
		return r.cutFor(u, t, stamp)
	}
	r.digCavity(u, -1, x, y)
	if !r.starShaped(x, y) {
		return false
	}
	for i := range r.rims {
		if g := &r.rims[i]; g.s >= 0 && r.encroaches(g, x, y) {
			if !central || !thin && tooLarge < mildOversize {
				return false
			}
			return r.cutFor(r.handleOf(g), t, stamp)
		}
	}
	v := int32(len(r.p))
	r.p = append(r.p, vertex{x: x, y: y, seg: -1, kind: freeVertex, h: r.field.at(x, y)})
	r.fillCavity(v)
	r.afterInsertion()
	if r.t[t].stamp == stamp {
		r.settle(t) // the vertex did not touch it: leave it
	}
	return true
}

// encroaches says whether (x, y) lies inside the diametral circle of a rim edge, in the metric inside the rim.
func (r *refiner) encroaches(g *rim, x, y float64) bool {
	ax, ay := r.p[g.a].x-x, r.p[g.a].y-y
	bx, by := r.p[g.b].x-x, r.p[g.b].y-y
	if r.metrics != nil {
		ax, ay = r.metrics[g.region].to(ax, ay)
		bx, by = r.metrics[g.region].to(bx, by)
	}
	return ax*bx+ay*by <= 0
}

// handleOf finds the handle, inside the cavity, of a rim edge.
func (r *refiner) handleOf(g *rim) int32 {
	if g.n >= 0 {
		return r.t[g.n>>2].n[g.n&3]
	}
	for _, t := range r.dead {
		for k := int32(0); k < 3; k++ {
			if a, b := r.ends(4*t + k); a == g.a && b == g.b {
				return 4*t + k
			}
		}
	}
	return -1
}

// cutFor cuts a segment in favour of triangle t and queues t again if it is still there.
func (r *refiner) cutFor(h, t int32, stamp uint32) bool {
	n := len(r.p)
	r.cutSegment(h)
	if len(r.p) == n {
		return false
	}
	if r.t[t].stamp == stamp {
		r.t[t].state = stateQueued
		r.triangles.push(item{t, stamp})
	}
	return true
}
