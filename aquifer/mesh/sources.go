package mesh

import "math"

const (
	// ringFit: six vertices are put around a free-standing point when no other vertex lies nearer than so many wanted sizes.
	ringFit = 2.2
	// ringTurn turns the six away from the axes, so that they do not fall in line with rows of points on a grid [rad].
	ringTurn = 0.2
)

// sources makes a size-field source of every vertex: its shortest edge, which is how near the next feature is, and what the
// domain's points ask for, but never less than the tolerance. What is asked for, at points and along lines, grows by growth; the
// detail of rings and other lines grows by detail.
func (c *carved) sources(points []Point, tol, growth, detail float64) []source {
	size := make([]float64, len(c.p))
	for i := range size {
		size[i] = math.Inf(1)
	}
	for t := range c.t {
		tr := &c.t[t]
		for k := int32(0); k < 3; k++ {
			a, b := tr.v[next3[k]], tr.v[prev3[k]]
			if tr.v[0] < 0 || tr.n[k] > 4*int32(t)+k || tr.s[k] < 0 && c.acrossCorner(a, b) {
				continue
			}
			l := c.distance(a, b)
			size[a], size[b] = min(size[a], l), min(size[b], l)
		}
	}
	asked := make([]bool, len(c.p))
	for v := range asked {
		segments := c.segmentsAt(int32(v))
		asked[v] = len(segments) == 0
		for _, s := range segments {
			asked[v] = asked[v] || c.bases[s].size < math.Inf(1)
		}
	}
	for i, p := range points {
		if v := c.point[i]; v >= 0 && p.Size > 0 {
			size[v] = min(size[v], p.Size)
			asked[v] = true
		}
	}
	out := make([]source, 0, len(c.p))
	for i := range c.p {
		if size[i] < math.Inf(1) {
			g := detail
			if asked[i] {
				g = growth
			}
			out = append(out, source{c.p[i].x, c.p[i].y, max(size[i], tol), g})
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
