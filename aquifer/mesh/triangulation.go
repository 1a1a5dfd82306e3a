package mesh

// Kinds of vertex.
const (
	inputVertex   uint8 = iota // vertex of the outline, a hole, a line or a crossing of these
	pointVertex                // one of Domain.Points, not on a segment
	segmentVertex              // put on a segment by refinement
	freeVertex                 // put into the interior by refinement
)

// vertex is a node while the mesh is made.
type vertex struct {
	x, y float64
	h    float64 // wanted edge length here [m]
	seg  int32   // base segment that a segmentVertex lies on, else -1
	kind uint8
}

// triangle holds everything of a triangle in one cache line. Edge k runs from v[k+1] to v[k+2], opposite v[k]. A handle is
// 4 t + k: edge k of triangle t.
type triangle struct {
	v      [3]int32 // counter-clockwise; v[0] < 0 marks a free slot
	n      [3]int32 // handle of the same edge in the neighbour; -1 outside
	s      [3]int32 // segment on the edge; -1 none
	region int32
	stamp  uint32 // changes whenever the slot is rewritten
	state  uint8
}

var (
	next3 = [4]int32{1, 2, 0, 0}
	prev3 = [4]int32{2, 0, 1, 0}
)

// rim is one edge of a cavity's rim, counter-clockwise, with what lies outside it.
type rim struct {
	a, b   int32
	n, s   int32
	region int32
}

// triangulation is a constrained Delaunay triangulation in flat arrays.
type triangulation struct {
	p       []vertex
	t       []triangle
	free    []int32
	metrics []metric // per region; nil = Euclidean everywhere

	rims  []rim   // of the cavity found last
	dead  []int32 // its triangles
	stack []int32
	made  []int32 // triangles made by the last insertion
	mark  []uint32
	epoch uint32
	flips []int32 // work list of legalise

	cavityA, cavityB int32 // ends of the segment being split, else -1
	cavitySegment    int32
}

// orientV is the orientation of three vertices.
func (m *triangulation) orientV(a, b, c int32) float64 {
	p, q, r := &m.p[a], &m.p[b], &m.p[c]
	return orient(p.x, p.y, q.x, q.y, r.x, r.y)
}

// inside says whether (x, y) lies strictly inside the circumcircle of triangle t, in the metric of its region. Most of the time is
// spent here, so a cheaper filter goes before that of inCircle: with squared distances a², b², c² of the corners, the permanent that
// bounds the error is at most a²bc + b²ca + c²ab, and that at most a third of (a² + b² + c²)².
func (m *triangulation) inside(t int32, x, y float64) bool {
	tr := &m.t[t]
	a, b, c := &m.p[tr.v[0]], &m.p[tr.v[1]], &m.p[tr.v[2]]
	if m.metrics != nil {
		return m.metrics[tr.region].inside(a, b, c, x, y)
	}
	ax, ay := a.x-x, a.y-y
	bx, by := b.x-x, b.y-y
	cx, cy := c.x-x, c.y-y
	al := float64(ax*ax) + float64(ay*ay)
	bl := float64(bx*bx) + float64(by*by)
	cl := float64(cx*cx) + float64(cy*cy)
	det := float64(al*(float64(bx*cy)-float64(cx*by))) + float64(bl*(float64(cx*ay)-float64(ax*cy))) +
		float64(cl*(float64(ax*by)-float64(bx*ay)))
	sum := al + bl + cl
	bound := quickBound * (sum * sum)
	if det > bound || -det > bound {
		return det > 0
	}
	return inCircle(a.x, a.y, b.x, b.y, c.x, c.y, x, y) > 0
}

// newTriangle gives a slot.
func (m *triangulation) newTriangle() int32 {
	if n := len(m.free); n > 0 {
		t := m.free[n-1]
		m.free = m.free[:n-1]
		return t
	}
	m.t = append(m.t, triangle{})
	m.mark = append(m.mark, 0)
	return int32(len(m.t) - 1)
}

// setTriangle writes vertices into a slot and clears the rest.
func (m *triangulation) setTriangle(t, a, b, c, region int32) {
	tr := &m.t[t]
	*tr = triangle{v: [3]int32{a, b, c}, n: [3]int32{-1, -1, -1}, s: [3]int32{-1, -1, -1}, region: region, stamp: tr.stamp + 1}
}

// link makes two edges neighbours.
func (m *triangulation) link(h, g int32) {
	if h >= 0 {
		m.t[h>>2].n[h&3] = g
	}
	if g >= 0 {
		m.t[g>>2].n[g&3] = h
	}
}

// ends gives the vertices of an edge in the direction that has its triangle on the left.
func (m *triangulation) ends(h int32) (a, b int32) {
	tr := &m.t[h>>2]
	return tr.v[next3[h&3]], tr.v[prev3[h&3]]
}

// digCavity finds the triangles whose circumcircle holds (x, y), from triangle t, without crossing a segment. With edge >= 0
// the point lies on that edge (a handle), which is to vanish. It leaves the rim counter-clockwise in m.rims.
func (m *triangulation) digCavity(t, edge int32, x, y float64) {
	m.epoch++
	m.rims, m.dead, m.stack = m.rims[:0], m.dead[:0], m.stack[:0]
	m.cavityA, m.cavityB, m.cavitySegment = -1, -1, -1
	if edge >= 0 {
		t = edge >> 2
		k := edge & 3
		m.cavityA, m.cavityB = m.ends(edge)
		m.cavitySegment = m.t[t].s[k]
		if g := m.t[t].n[k]; g >= 0 {
			m.enter(g)
			m.mark[t] = m.epoch
			m.dead = append(m.dead, t)
			m.drain(x, y)
			m.stack = append(m.stack, 4*t+prev3[k], 4*t+next3[k])
		} else {
			m.enter(edge)
		}
	} else {
		m.mark[t] = m.epoch
		m.dead = append(m.dead, t)
		m.stack = append(m.stack, 4*t+2, 4*t+1, 4*t)
	}
	m.drain(x, y)
}

// enter takes the triangle of a handle into the cavity and puts its two other edges on the stack.
func (m *triangulation) enter(g int32) {
	t := g >> 2
	m.mark[t] = m.epoch
	m.dead = append(m.dead, t)
	m.stack = append(m.stack, 4*t+prev3[g&3], 4*t+next3[g&3])
}

// drain empties the stack of cavity edges: each is crossed or becomes part of the rim.
func (m *triangulation) drain(x, y float64) {
	stack, dead, rims, mark, epoch := m.stack, m.dead, m.rims, m.mark, m.epoch
	for len(stack) > 0 {
		h := stack[len(stack)-1]
		stack = stack[:len(stack)-1]
		tr := &m.t[h>>2]
		k := h & 3
		g := tr.n[k]
		if u := g >> 2; g >= 0 && tr.s[k] < 0 && mark[u] != epoch && m.inside(u, x, y) {
			mark[u] = epoch
			dead = append(dead, u)
			stack = append(stack, 4*u+prev3[g&3], 4*u+next3[g&3])
			continue
		}
		rims = append(rims, rim{tr.v[next3[k]], tr.v[prev3[k]], g, tr.s[k], tr.region})
	}
	m.stack, m.dead, m.rims = stack, dead, rims
}

// starShaped says whether every rim edge is seen from (x, y) with positive orientation.
func (m *triangulation) starShaped(x, y float64) bool {
	for i := range m.rims {
		a, b := &m.p[m.rims[i].a], &m.p[m.rims[i].b]
		if !(orient(a.x, a.y, b.x, b.y, x, y) > 0) {
			return false
		}
	}
	return true
}

// fillCavity joins vertex p to the rim. The cavity must be star-shaped about it. Triangles made are in m.made.
func (m *triangulation) fillCavity(p int32) {
	m.made = m.made[:0]
	n := len(m.rims)
	used := 0
	for range n {
		var t int32
		if used < len(m.dead) {
			t = m.dead[used]
			used++
		} else {
			t = m.newTriangle()
		}
		m.made = append(m.made, t)
	}
	for _, t := range m.dead[used:] {
		m.t[t].v[0] = -1
		m.t[t].stamp++
		m.free = append(m.free, t)
	}
	for i, r := range m.rims {
		t := m.made[i]
		tr := &m.t[t]
		before, after := n-1, 0
		if i > 0 {
			before = i - 1
		}
		if i < n-1 {
			after = i + 1
		}
		tr.v = [3]int32{p, r.a, r.b}
		tr.n = [3]int32{r.n, 4*m.made[after] + 2, 4*m.made[before] + 1}
		tr.s = [3]int32{r.s, -1, -1}
		tr.region = r.region
		tr.stamp++
		tr.state = 0
		if r.n >= 0 {
			m.t[r.n>>2].n[r.n&3] = 4 * t
		}
		if m.cavityA >= 0 {
			if r.a == m.cavityA || r.a == m.cavityB {
				tr.s[2] = m.cavitySegment
			}
			if r.b == m.cavityA || r.b == m.cavityB {
				tr.s[1] = m.cavitySegment
			}
		}
	}
	if m.cavityA >= 0 && n > 0 && m.rims[0].a != m.rims[n-1].b { // split on the outline: the fan is open
		m.t[m.made[0]].n[2] = -1
		m.t[m.made[n-1]].n[1] = -1
	}
}

// flip turns the edge of handle h inside its two triangles. Both keep their slots; the new edge is edge 0 of t.
func (m *triangulation) flip(h int32) {
	t, k := h>>2, h&3
	g := m.t[t].n[k]
	u, j := g>>2, g&3
	a, b := &m.t[t], &m.t[u]
	c, d := a.v[k], b.v[j] // opposite vertices
	p, q := a.v[next3[k]], a.v[prev3[k]]
	nqc, sqc := a.n[next3[k]], a.s[next3[k]] // edge q-c
	ncp, scp := a.n[prev3[k]], a.s[prev3[k]] // edge c-p
	npd, spd := b.n[next3[j]], b.s[next3[j]] // edge p-d
	ndq, sdq := b.n[prev3[j]], b.s[prev3[j]] // edge d-q
	a.v = [3]int32{p, d, c}
	a.s = [3]int32{-1, scp, spd}
	b.v = [3]int32{q, c, d}
	b.s = [3]int32{-1, sdq, sqc}
	a.stamp++
	b.stamp++
	m.link(4*t, 4*u)
	m.link(4*t+1, ncp)
	m.link(4*t+2, npd)
	m.link(4*u+1, ndq)
	m.link(4*u+2, nqc)
}

// flippable says whether the edge may be flipped: not on a segment, and the quadrilateral is strictly convex.
func (m *triangulation) flippable(h int32) bool {
	t, k := h>>2, h&3
	g := m.t[t].n[k]
	if g < 0 || m.t[t].s[k] >= 0 {
		return false
	}
	a, b := m.ends(h)
	c, d := m.t[t].v[k], m.t[g>>2].v[g&3]
	return m.orientV(c, a, d) > 0 && m.orientV(d, b, c) > 0
}

// legalise flips edges on the work list m.flips until all are locally Delaunay (Lawson 1977). Every flip lowers the lifted
// surface, so it ends. It reports the triangles touched through touched, if not nil.
func (m *triangulation) legalise(touched func(t int32)) {
	for len(m.flips) > 0 {
		h := m.flips[len(m.flips)-1]
		m.flips = m.flips[:len(m.flips)-1]
		t, k := h>>2, h&3
		g := m.t[t].n[k]
		if g < 0 || m.t[t].s[k] >= 0 || m.t[t].v[0] < 0 {
			continue
		}
		d := &m.p[m.t[g>>2].v[g&3]]
		if !m.inside(t, d.x, d.y) || !m.flippable(h) {
			continue
		}
		m.flip(h)
		if touched != nil {
			touched(t)
			touched(g >> 2)
		}
		u := g >> 2
		m.flips = append(m.flips, 4*t+1, 4*t+2, 4*u+1, 4*u+2)
	}
}
