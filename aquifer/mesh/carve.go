package mesh

import (
	"math"

	"github.com/paulmach/orb"
)

// base is one segment of the planar graph: between two of its vertices nothing else lies on it.
type base struct {
	p, q   int32 // end vertices
	set    int32 // index of its origins
	sharpP bool  // another segment leaves p within sharpAngleDeg
	sharpQ bool
	scaleP float64 // shell distances from p are multiplied by this, so that shells agree in the metric of the wedges
	scaleQ float64
	mixed  bool    // at an end of it, regions of different metrics meet
	size   float64 // wanted edge length on it; +Inf none [m]
}

// sharpAngleDeg: two segments that meet at less than this can keep each other from being split enough, so their pieces are cut
// on common shells (Ruppert 1995; Shewchuk 2002). 60 degrees is where equal pieces no longer encroach on each other.
const sharpAngleDeg = 60

// carved is the domain's own part of the triangulation, with its segments.
type carved struct {
	triangulation
	bases []base
	sets  [][]origin
	rings int
	point []int32 // vertex of each point; -1 when it fell outside

	meeting map[int32][]int32 // base segments that end at a vertex; looked up only
}

// carve drops the triangles outside the outline and in holes. A triangle is inside when the way to it from the box crosses an
// odd number of ring segments, so rings that were drawn together by the tolerance leave no false part.
func (g *planar) carve() *carved {
	inside := g.floodParity()
	c := &carved{sets: g.sets, rings: len(g.rings)}
	vmap := make([]int32, len(g.p))
	for i := range vmap {
		vmap[i] = -1
	}
	used := make([]bool, len(g.p))
	for t := range g.t {
		if inside[t] {
			for _, v := range g.t[t].v {
				used[v] = true
			}
		}
	}
	for v := range g.p {
		if used[v] {
			vmap[v] = int32(len(c.p))
			c.p = append(c.p, g.p[v])
		}
	}
	tmap := make([]int32, len(g.t))
	n := int32(0)
	for t := range g.t {
		tmap[t] = -1
		if inside[t] {
			tmap[t] = n
			n++
		}
	}
	c.t = make([]triangle, n)
	c.mark = make([]uint32, n)
	for t := range g.t {
		if tmap[t] < 0 {
			continue
		}
		o, r := &g.t[t], &c.t[tmap[t]]
		for k := range 3 {
			r.v[k], r.n[k], r.s[k] = vmap[o.v[k]], -1, o.s[k]
			if e := o.n[k]; e >= 0 && tmap[e>>2] >= 0 {
				r.n[k] = 4*tmap[e>>2] + e&3
			}
		}
	}
	for _, v := range g.point {
		c.point = append(c.point, vmap[v])
	}
	c.makeBases()
	return c
}

// floodParity finds the triangles inside the rings.
func (g *planar) floodParity() []bool {
	odd := make([]bool, len(g.sets))
	for i, s := range g.sets {
		for _, o := range s {
			if int(o.owner) < len(g.rings) {
				odd[i] = !odd[i]
			}
		}
	}
	inside := make([]bool, len(g.t))
	seen := make([]bool, len(g.t))
	first := int32(0)
	for t := range g.t { // any triangle with a hull edge lies outside
		if g.t[t].v[0] >= 0 && (g.t[t].n[0] < 0 || g.t[t].n[1] < 0 || g.t[t].n[2] < 0) {
			first = int32(t)
			break
		}
	}
	stack := []int32{first}
	seen[first] = true
	for len(stack) > 0 {
		t := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		for k := range 3 {
			e := g.t[t].n[k]
			if e < 0 || seen[e>>2] {
				continue
			}
			seen[e>>2] = true
			s := g.t[t].s[k]
			inside[e>>2] = inside[t] != (s >= 0 && odd[s])
			stack = append(stack, e>>2)
		}
	}
	return inside
}

// makeBases turns constrained edges into base segments. An edge between two inside triangles that only rings lie on, an even
// number of times, is a seam left by the tolerance and is no segment.
func (c *carved) makeBases() {
	for t := range c.t {
		for k := int32(0); k < 3; k++ {
			h := 4*int32(t) + k
			set, e := c.t[t].s[k], c.t[t].n[k]
			if e >= 0 && e < h {
				continue
			}
			number := int32(-1)
			if e < 0 || set >= 0 && c.onLine(set) {
				a, b := c.ends(h)
				number = int32(len(c.bases))
				c.bases = append(c.bases, base{p: a, q: b, set: set, scaleP: 1, scaleQ: 1, size: math.Inf(1)})
			}
			c.t[t].s[k] = number
			if e >= 0 {
				c.t[e>>2].s[e&3] = number
			}
		}
	}
	c.meeting = make(map[int32][]int32, len(c.bases))
	for i, b := range c.bases {
		c.p[b.p].kind, c.p[b.q].kind = inputVertex, inputVertex
		c.meeting[b.p] = append(c.meeting[b.p], int32(i))
		c.meeting[b.q] = append(c.meeting[b.q], int32(i))
	}
}

// onLine says whether an interior line is among the origins of a set.
func (c *carved) onLine(set int32) bool {
	for _, o := range c.sets[set] {
		if int(o.owner) >= c.rings {
			return true
		}
	}
	return false
}

// numberRegions floods the parts bounded by segments and gives each a number, in the order of their first triangles.
func (m *triangulation) numberRegions() int32 {
	for t := range m.t {
		m.t[t].region = -1
	}
	n := int32(0)
	var stack []int32
	for t := range m.t {
		if m.t[t].v[0] < 0 || m.t[t].region >= 0 {
			continue
		}
		m.t[t].region = n
		stack = append(stack[:0], int32(t))
		for len(stack) > 0 {
			u := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			for k := range 3 {
				e := m.t[u].n[k]
				if e >= 0 && m.t[u].s[k] < 0 && m.t[e>>2].region < 0 {
					m.t[e>>2].region = n
					stack = append(stack, e>>2)
				}
			}
		}
		n++
	}
	return n
}

// regionPlaces gives a place inside each region: the centroid of its largest triangle.
func (m *triangulation) regionPlaces(n int32) []orb.Point {
	places := make([]orb.Point, n)
	largest := make([]float64, n)
	for t := range m.t {
		tr := &m.t[t]
		if tr.v[0] < 0 {
			continue
		}
		a, b, c := &m.p[tr.v[0]], &m.p[tr.v[1]], &m.p[tr.v[2]]
		if area := orient(a.x, a.y, b.x, b.y, c.x, c.y); area > largest[tr.region] {
			largest[tr.region] = area
			places[tr.region] = orb.Point{(a.x + b.x + c.x) / 3, (a.y + b.y + c.y) / 3}
		}
	}
	return places
}

// cosine of the angle b-a-w in the metric of a region.
func (m *triangulation) cosine(region, a, b, w int32) float64 {
	ux, uy := m.vector(region, a, b)
	vx, vy := m.vector(region, a, w)
	return (ux*vx + uy*vy) / math.Sqrt((ux*ux+uy*uy)*(vx*vx+vy*vy))
}

// vector from a to b in the metric of a region.
func (m *triangulation) vector(region, a, b int32) (x, y float64) {
	x, y = m.p[b].x-m.p[a].x, m.p[b].y-m.p[a].y
	if m.metrics != nil {
		return m.metrics[region].to(x, y)
	}
	return x, y
}
