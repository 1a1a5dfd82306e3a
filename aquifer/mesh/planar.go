package mesh

import (
	"context"
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

// boxFactor puts the corners of the starting box so many diagonals away; the outline is all segments, so where the box lies has
// no bearing on the mesh inside it.
const boxFactor = 8

// origin is one input segment: of ring 0.. (outer, holes) or, counted on, of a line.
type origin struct {
	owner   int32 // ring number, or number of rings + line number
	segment int32
}

// piece is a segment waiting for insertion.
type piece struct {
	a, b int32
	set  int32 // index of its origins
}

// planar makes the planar straight-line graph of a domain inside a constrained Delaunay triangulation of a large box.
type planar struct {
	triangulation
	tol   float64
	rings []cleanRing
	lines []cleanLine
	point []int32 // vertex of each point

	sets    [][]origin // per segment number on a triangle edge: the input segments it lies on
	vtri    []int32    // a triangle of each vertex
	pieces  []piece
	work    int // pieces done, for the guard
	notes   []Note
	name    func(owner int32) string
	pending [][2]int32 // crossed edges of the piece being inserted
	grid    vertexGrid
	spot    []int32 // per vertex: owner of the last snap noted, so that one snap is told once
	last    int32   // where the last walk ended
}

// cleanRing is a ring without repeated vertices.
type cleanRing struct {
	vertex  []int32 // vertex numbers
	segment []int32 // index in the given ring of the segment that starts at each
}

// cleanLine is a line's vertices.
type cleanLine struct {
	vertex  []int32
	segment []int32 // index in the given path of the segment that starts at each vertex but the last
}

// newPlanar takes over the vertices, brings near ones together and triangulates them.
func newPlanar(ctx context.Context, d Domain, tol float64) (*planar, error) {
	g := &planar{tol: tol, name: func(owner int32) string { return ownerName(d, int(owner)) }}
	g.grid.init(tol)
	for i, ring := range allRings(d) {
		g.rings = append(g.rings, g.takeRing(int32(i), ring))
	}
	for i, l := range d.Lines {
		g.lines = append(g.lines, g.takeLine(int32(len(g.rings)+i), l.Path))
	}
	for _, p := range d.Points {
		g.point = append(g.point, g.takePoint(p))
	}
	if err := g.triangulateVertices(ctx); err != nil {
		return nil, err
	}
	return g, g.insertAll(ctx)
}

// allRings lists the outline and the holes.
func allRings(d Domain) []orb.Ring {
	return append([]orb.Ring{d.Outer}, d.Holes...)
}

// takeVertex gives the vertex at p: an earlier one within the tolerance, or a new one.
func (g *planar) takeVertex(p orb.Point) (v int32, distance float64, fresh bool) {
	if v, distance := g.grid.near(g.p, p[0], p[1]); v >= 0 {
		return v, distance, false
	}
	return g.addVertex(p[0], p[1]), 0, true
}

// addVertex appends a vertex and files it.
func (g *planar) addVertex(x, y float64) int32 {
	v := int32(len(g.p))
	g.p = append(g.p, vertex{x: x, y: y, seg: -1, kind: inputVertex})
	g.grid.put(v, x, y)
	return v
}

// note records something done to the input.
func (g *planar) note(at orb.Point, format string, args ...any) {
	g.notes = append(g.notes, Note{fmt.Sprintf(format, args...), at})
}

// takeRing files the vertices of a ring.
func (g *planar) takeRing(owner int32, r orb.Ring) cleanRing {
	var c cleanRing
	n := len(r)
	if n > 1 && r[0] == r[n-1] {
		n--
	}
	for i, p := range r[:n] {
		c.vertex = g.takeAlong(owner, i, p, c.vertex)
		if len(c.vertex) > len(c.segment) {
			c.segment = append(c.segment, int32(i))
		} else {
			c.segment[len(c.segment)-1] = int32(i)
		}
	}
	if k := len(c.vertex); k > 1 && c.vertex[0] == c.vertex[k-1] {
		g.note(r[n-1], "%s: vertex %d repeats vertex 1 and was dropped", g.name(owner), n)
		c.vertex, c.segment = c.vertex[:k-1], c.segment[:k-1]
	}
	return c
}

// takeLine files the vertices of a line.
func (g *planar) takeLine(owner int32, path orb.LineString) cleanLine {
	var c cleanLine
	for i, p := range path {
		closing := i > 0 && i == len(path)-1 && p == path[0]
		if closing {
			if k := len(c.vertex); c.vertex[k-1] != c.vertex[0] {
				c.vertex = append(c.vertex, c.vertex[0])
			}
			break
		}
		c.vertex = g.takeAlong(owner, i, p, c.vertex)
		if len(c.vertex) > len(c.segment) {
			c.segment = append(c.segment, int32(i))
		} else {
			c.segment[len(c.segment)-1] = int32(i)
		}
	}
	return c
}

// takeAlong files vertex i of a ring or line and appends its number, unless it repeats the one before.
func (g *planar) takeAlong(owner int32, i int, p orb.Point, path []int32) []int32 {
	v, distance, fresh := g.takeVertex(p)
	if k := len(path); k > 0 && path[k-1] == v {
		g.note(p, "%s: vertex %d repeats the one before (%.3g m away, tolerance %.3g m) and was dropped",
			g.name(owner), i+1, distance, g.tol)
		return path
	}
	if !fresh && distance > 0 {
		g.note(p, "%s: vertex %d was moved %.3g m to a vertex already there", g.name(owner), i+1, distance)
	}
	return append(path, v)
}

// takePoint files a point.
func (g *planar) takePoint(p Point) int32 {
	v, distance, fresh := g.takeVertex(p.At)
	switch {
	case fresh:
		g.p[v].kind = pointVertex
	case distance > 0:
		g.note(p.At, "%s was moved %.3g m to a vertex already there", pointName(p), distance)
	}
	return v
}

// triangulateVertices inserts all vertices into a box, in the order of a Hilbert curve.
func (g *planar) triangulateVertices(ctx context.Context) error {
	n := len(g.p)
	order := hilbertOrder(n, func(i int) (float64, float64) { return g.p[i].x, g.p[i].y })
	x0, y0, x1, y1 := bounds(g.p)
	far := boxFactor * (math.Hypot(x1-x0, y1-y0) + g.tol)
	x0, y0, x1, y1 = x0-far, y0-far, x1+far, y1+far
	for _, c := range [4][2]float64{{x0, y0}, {x1, y0}, {x1, y1}, {x0, y1}} {
		g.p = append(g.p, vertex{x: c[0], y: c[1], seg: -1, kind: inputVertex})
	}
	a, b := g.newTriangle(), g.newTriangle()
	g.setTriangle(a, int32(n), int32(n+1), int32(n+2), 0)
	g.setTriangle(b, int32(n), int32(n+2), int32(n+3), 0)
	g.link(4*a+1, 4*b+2)
	g.vtri = make([]int32, n+4)
	g.spot = make([]int32, n+4)
	g.renewIncidence(a)
	g.renewIncidence(b)
	for i, v := range order {
		if i%pollEvery == 0 {
			if err := ctx.Err(); err != nil {
				return fmt.Errorf("mesh: stopped after %d of %d vertices: %w", i, n, err)
			}
		}
		if err := g.insertVertex(v); err != nil {
			return err
		}
	}
	return nil
}

// pollEvery is how many insertions pass between two looks at the context, about 10 ms.
const pollEvery = 4096

// bounds is the bounding box of vertices.
func bounds(p []vertex) (x0, y0, x1, y1 float64) {
	x0, y0, x1, y1 = p[0].x, p[0].y, p[0].x, p[0].y
	for i := range p {
		x0, x1 = min(x0, p[i].x), max(x1, p[i].x)
		y0, y1 = min(y0, p[i].y), max(y1, p[i].y)
	}
	return
}

// renewIncidence records t as a triangle of its vertices.
func (g *planar) renewIncidence(t int32) {
	for _, v := range g.t[t].v {
		g.vtri[v] = t
	}
}

// insertVertex puts vertex v, which has coordinates already, into the triangulation. It must not lie on a segment.
func (g *planar) insertVertex(v int32) error {
	p := &g.p[v]
	t := g.find(g.last, p.x, p.y)
	if t < 0 {
		return fmt.Errorf("mesh: internal: no triangle found for (%v, %v)", p.x, p.y)
	}
	g.digCavity(t, -1, p.x, p.y)
	if !g.starShaped(p.x, p.y) {
		return g.insertByFlips(v, t)
	}
	g.fillCavity(v)
	for _, t := range g.made {
		g.renewIncidence(t)
	}
	g.last = g.made[0]
	return nil
}

// insertByFlips is the fallback where segments make the cavity odd: split what holds the vertex, then flip (Lawson 1977).
func (g *planar) insertByFlips(v, t int32) error {
	if err := g.splitPlain(v, t); err != nil {
		return err
	}
	for _, t := range g.made {
		g.renewIncidence(t)
		g.flips = append(g.flips, 4*t)
	}
	g.last = g.made[0]
	g.legalise(g.renewIncidence)
	return nil
}

// splitPlain puts vertex v into triangle t, or into the edge of it that it lies on, without looking at circles.
func (m *triangulation) splitPlain(v, t int32) error {
	p := &m.p[v]
	edge := int32(-1)
	for k := int32(0); k < 3; k++ {
		a, b := m.ends(4*t + k)
		if orient(m.p[a].x, m.p[a].y, m.p[b].x, m.p[b].y, p.x, p.y) == 0 && m.t[t].n[k] >= 0 {
			edge = 4*t + k
		}
	}
	m.digSmallest(t, edge)
	if !m.starShaped(p.x, p.y) {
		return fmt.Errorf("mesh: internal: (%v, %v) cannot be put into its triangle", p.x, p.y)
	}
	m.fillCavity(v)
	return nil
}

// digSmallest makes the cavity of triangle t alone, or of the two triangles at an edge.
func (m *triangulation) digSmallest(t, edge int32) {
	m.epoch++
	m.rims, m.dead, m.stack = m.rims[:0], m.dead[:0], m.stack[:0]
	m.cavityA, m.cavityB, m.cavitySegment = -1, -1, -1
	take := func(h int32) {
		tr := &m.t[h>>2]
		k := h & 3
		m.rims = append(m.rims, rim{tr.v[next3[k]], tr.v[prev3[k]], tr.n[k], tr.s[k], tr.region})
	}
	if edge < 0 {
		m.dead = append(m.dead, t)
		take(4 * t)
		take(4*t + 1)
		take(4*t + 2)
		return
	}
	t = edge >> 2
	k := edge & 3
	m.cavityA, m.cavityB = m.ends(edge)
	m.cavitySegment = m.t[t].s[k]
	m.dead = append(m.dead, t)
	if g := m.t[t].n[k]; g >= 0 {
		m.dead = append(m.dead, g>>2)
		take(4*(g>>2) + next3[g&3])
		take(4*(g>>2) + prev3[g&3])
	}
	take(4*t + next3[k])
	take(4*t + prev3[k])
}
