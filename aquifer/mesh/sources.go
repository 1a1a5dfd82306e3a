package mesh

import "math"

const (
	// ringFit: six vertices are put around a free-standing point when no other vertex lies nearer than so many wanted sizes.
	ringFit = 2.2
	// ringTurn turns the six away from the axes, so that they do not fall in line with rows of points on a grid [rad].
	ringTurn = 0.2
	// mostAlong bounds the places along one edge that ask for a size.
	mostAlong = 2 * largestCoarser
)

// request is what a place wants, for size fields of any coarseness.
type request struct {
	x, y    float64
	asked   float64 // edge length asked for; +Inf none [m]
	feature float64 // distance of the next feature of the input, which a mesh of any coarseness must resolve [m]
	growth  float64 // [-]
}

// requests lists what the vertices want: the shortest edge, which is how near the next feature is, and what points and lines of the
// domain ask for. What is asked for grows by growth; the detail of rings and other lines grows by detail.
func (c *carved) requests(points []Point, growth, detail float64) []request {
	out := make([]request, len(c.p))
	for i := range out {
		out[i] = request{c.p[i].x, c.p[i].y, math.Inf(1), math.Inf(1), detail}
	}
	for t := range c.t {
		tr := &c.t[t]
		for k := int32(0); k < 3; k++ {
			a, b := tr.v[next3[k]], tr.v[prev3[k]]
			if tr.v[0] < 0 || tr.n[k] > 4*int32(t)+k {
				continue
			}
			l := c.distance(a, b)
			if tr.s[k] >= 0 || !c.acrossCorner(a, b) {
				out[a].feature, out[b].feature = min(out[a].feature, l), min(out[b].feature, l)
			}
			if tr.s[k] >= 0 && l > c.bases[tr.s[k]].size {
				out = append(out, c.alongEdge(a, b, l, c.bases[tr.s[k]].size, growth)...)
			}
		}
	}
	for v := range c.p {
		segments := c.segmentsAt(int32(v))
		if len(segments) == 0 {
			out[v].growth = growth
		}
		for _, s := range segments {
			if c.bases[s].size < math.Inf(1) {
				out[v].asked, out[v].growth = min(out[v].asked, c.bases[s].size), growth
			}
		}
	}
	for i, p := range points {
		if v := c.point[i]; v >= 0 && p.Size > 0 {
			out[v].asked, out[v].growth = min(out[v].asked, p.Size), growth
		}
	}
	return out
}

// alongEdge asks for a size at places between the ends of an edge on a line.
func (c *carved) alongEdge(a, b int32, l, size, growth float64) []request {
	n := int(min(math.Ceil(l/size), mostAlong))
	out := make([]request, 0, n)
	p, q := &c.p[a], &c.p[b]
	for i := 1; i < n; i++ {
		f := float64(i) / float64(n)
		out = append(out, request{p.x + f*(q.x-p.x), p.y + f*(q.y-p.y), size, math.Inf(1), growth})
	}
	return out
}

// sources makes the sources of a size field that is so many times coarser than wanted wherever features allow; no size is less
// than the tolerance.
func sources(requests []request, tol, coarser, steepest float64) []source {
	out := make([]source, 0, len(requests))
	for _, q := range requests {
		if size := min(coarser*q.asked, q.feature); size < math.Inf(1) {
			out = append(out, source{q.x, q.y, max(size, tol), min(coarser*q.growth, max(q.growth, steepest))})
		}
	}
	return out
}

// acrossCorner says whether two vertices were put on two segments of one sharp corner, or one of them is that corner: how near
// they are is the angle's doing and shall not make the surroundings fine. The far end of a segment is a feature of its own.
func (c *carved) acrossCorner(a, b int32) bool {
	corner := c.commonCorner(a, b)
	return corner >= 0 && (a == corner || c.p[a].kind != inputVertex) && (b == corner || c.p[b].kind != inputVertex)
}

// commonCorner is a sharp corner of which the vertices lie on two different segments, or -1.
func (c *carved) commonCorner(a, b int32) int32 {
	for _, s := range c.segmentsAt(a) {
		for _, o := range c.segmentsAt(b) {
			if s == o {
				continue
			}
			p, q := &c.bases[s], &c.bases[o]
			if p.sharpP && (p.p == q.p || p.p == q.q) {
				return p.p
			}
			if p.sharpQ && (p.q == q.p || p.q == q.q) {
				return p.q
			}
		}
	}
	return -1
}

// segmentsAt lists the base segments that a vertex lies on.
func (c *carved) segmentsAt(v int32) []int32 {
	if s := c.p[v].seg; s >= 0 {
		return []int32{s}
	}
	return c.meeting[v]
}

// ringPoints puts six vertices around each free-standing point at its wanted size, so that the triangles around a well are
// equilateral.
func (r *refiner) ringPoints() {
	at := make([]int32, len(r.p))
	for t := range r.t {
		if r.t[t].v[0] >= 0 {
			for _, v := range r.t[t].v {
				at[v] = int32(t)
			}
		}
	}
	n := len(r.p)
	for v := range n {
		if r.p[v].kind != pointVertex || !(r.clearance(at[v], int32(v)) >= ringFit*r.p[v].h) {
			continue
		}
		x, y, h := r.p[v].x, r.p[v].y, r.p[v].h
		for i := range 6 {
			if len(r.p) >= r.maxNodes {
				return
			}
			s, c := math.Sincos(float64(i)*math.Pi/3 + ringTurn)
			if !r.insertFree(at[v], x+h*c, y+h*s) {
				continue
			}
			for _, t := range r.made {
				for _, w := range r.t[t].v {
					if int(w) < n {
						at[w] = t
					}
				}
			}
		}
	}
}

// clearance is the length of the shortest edge at vertex v, which is the distance of the nearest vertex, and no more than that
// of segments around it.
func (r *refiner) clearance(t, v int32) float64 {
	nearest := math.Inf(1)
	start := t
	for {
		k := r.corner(t, v)
		nearest = min(nearest, r.distance(v, r.t[t].v[next3[k]]))
		e := r.t[t].n[next3[k]]
		if e < 0 {
			return nearest
		}
		if t = e >> 2; t == start {
			return nearest
		}
	}
}

// insertFree puts a vertex at a place near triangle t, unless it is out of sight or would encroach upon a segment.
func (r *refiner) insertFree(t int32, x, y float64) bool {
	a, b, c := &r.p[r.t[t].v[0]], &r.p[r.t[t].v[1]], &r.p[r.t[t].v[2]]
	u, how := r.walk(t, (a.x+b.x+c.x)/3, (a.y+b.y+c.y)/3, x, y, true)
	if how != walkInside {
		return false
	}
	r.digCavity(u, -1, x, y)
	if !r.starShaped(x, y) {
		return false
	}
	for i := range r.rims {
		if r.rims[i].s >= 0 && r.encroaches(&r.rims[i], x, y) {
			return false
		}
	}
	r.p = append(r.p, vertex{x: x, y: y, seg: -1, kind: freeVertex, h: r.field.at(x, y)})
	r.fillCavity(int32(len(r.p) - 1))
	return true
}
