package mesh

import (
	"context"
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

// workPerPiece bounds the pieces done for each input segment; crossings and snaps make a few each, so reaching it means that
// lines are entangled below the tolerance.
const workPerPiece = 400

// insertAll makes every ring and line segment a chain of constrained edges.
func (g *planar) insertAll(ctx context.Context) error {
	total := 0
	for _, r := range g.rings {
		total += len(r.vertex)
	}
	for _, l := range g.lines {
		total += len(l.vertex)
	}
	limit := workPerPiece * (total + 100)
	insert := func(owner, segment, a, b int32) error {
		g.sets = append(g.sets, []origin{{owner, segment}})
		g.pieces = append(g.pieces[:0], piece{a, b, int32(len(g.sets) - 1)})
		for len(g.pieces) > 0 {
			c := g.pieces[len(g.pieces)-1]
			g.pieces = g.pieces[:len(g.pieces)-1]
			if err := g.insertPiece(c); err != nil {
				return err
			}
			if g.work++; g.work > limit {
				return fmt.Errorf("mesh: %s is entangled with others near (%.10g, %.10g): widths below the tolerance of %.3g m",
					g.name(owner), g.p[a].x, g.p[a].y, g.tol)
			}
			if g.work%pollEvery == 0 && ctx.Err() != nil {
				return fmt.Errorf("mesh: stopped while inserting %s: %w", g.name(owner), ctx.Err())
			}
		}
		return nil
	}
	for i, r := range g.rings {
		for j, v := range r.vertex {
			if err := insert(int32(i), r.segment[j], v, r.vertex[(j+1)%len(r.vertex)]); err != nil {
				return err
			}
		}
	}
	for i, l := range g.lines {
		for j := 0; j+1 < len(l.vertex); j++ {
			if err := insert(int32(len(g.rings)+i), l.segment[j], l.vertex[j], l.vertex[j+1]); err != nil {
				return err
			}
		}
	}
	return nil
}

// insertPiece makes a-b an edge, or cuts it where it meets a vertex or another segment and leaves the parts in g.pieces.
func (g *planar) insertPiece(c piece) error {
	if c.a == c.b {
		return nil
	}
	if h := g.findEdge(c.a, c.b); h >= 0 {
		for _, e := range [2]int32{h, g.t[h>>2].n[h&3]} {
			if v := g.t[e>>2].v[e&3]; g.nearPiece(c.a, c.b, v) {
				if g.t[h>>2].s[h&3] >= 0 {
					g.cutAt(piece{c.a, c.b, g.release(h)}, v)
				}
				g.cutAt(c, v)
				return nil
			}
		}
		g.constrain(h, c.set)
		return nil
	}
	h, v := g.leave(c.a, c.b)
	for v < 0 {
		if h < 0 {
			return fmt.Errorf("mesh: internal: no way from (%v, %v)", g.p[c.a].x, g.p[c.a].y)
		}
		if g.t[h>>2].s[h&3] >= 0 {
			return g.cross(c, h)
		}
		p, q := g.ends(h)
		g.pending = append(g.pending, [2]int32{p, q})
		e := g.t[h>>2].n[h&3]
		apex := g.t[e>>2].v[e&3]
		if apex == c.b {
			return g.carveEdge(c)
		}
		if g.nearPiece(c.a, c.b, apex) {
			v = apex
			break
		}
		if g.orientV(c.a, c.b, apex) > 0 {
			h = 4*(e>>2) + next3[e&3]
		} else {
			h = 4*(e>>2) + prev3[e&3]
		}
	}
	g.cutAt(c, v)
	return nil
}

// leave finds how the way from a to b leaves the fan of a: through the edge h, or through the near vertex v.
func (g *planar) leave(a, b int32) (h, v int32) {
	g.pending = g.pending[:0]
	h, v = -1, -1
	start := g.vtri[a]
	t := start
	for {
		k := g.corner(t, a)
		u, w := g.t[t].v[next3[k]], g.t[t].v[prev3[k]]
		if g.nearPiece(a, b, u) && (v < 0 || g.distance(a, u) < g.distance(a, v)) {
			v = u
		}
		if g.orientV(a, b, u) < 0 && g.orientV(a, b, w) > 0 {
			h = 4*t + k
		}
		t = g.t[t].n[next3[k]] >> 2
		if t == start {
			return h, v
		}
	}
}

// corner is the index of vertex a in triangle t.
func (m *triangulation) corner(t, a int32) int32 {
	switch a {
	case m.t[t].v[0]:
		return 0
	case m.t[t].v[1]:
		return 1
	}
	return 2
}

// distance between two vertices.
func (m *triangulation) distance(a, b int32) float64 {
	return math.Hypot(m.p[a].x-m.p[b].x, m.p[a].y-m.p[b].y)
}

// nearPiece says whether v lies within the tolerance of the inner part of a-b.
func (g *planar) nearPiece(a, b, v int32) bool {
	d, ok := g.offset(a, b, v)
	return ok && d <= g.tol
}

// offset is the distance of v from a-b; ok is false when its foot is not between a and b.
func (g *planar) offset(a, b, v int32) (float64, bool) {
	if v == a || v == b {
		return 0, false
	}
	p, q, r := &g.p[a], &g.p[b], &g.p[v]
	ux, uy := q.x-p.x, q.y-p.y
	along := (r.x-p.x)*ux + (r.y-p.y)*uy
	length := math.Hypot(ux, uy)
	if !(along > 0 && along < length*length) {
		return 0, false
	}
	return math.Abs(orient(p.x, p.y, q.x, q.y, r.x, r.y)) / length, true
}

// cutAt replaces a piece by two that meet at v.
func (g *planar) cutAt(c piece, v int32) {
	g.noteSnap(c.a, c.b, v, c.set)
	g.pieces = append(g.pieces, piece{v, c.b, c.set}, piece{c.a, v, c.set})
}

// snapNoteFloor: a vertex off a segment by less than this share of the tolerance is on it but for rounding, not worth a note.
const snapNoteFloor = 1e-3

// noteSnap tells that a segment was led through a vertex that is not on it.
func (g *planar) noteSnap(a, b, v, set int32) {
	owner := g.sets[set][0].owner
	d, ok := g.offset(a, b, v)
	if !ok || d <= snapNoteFloor*g.tol || g.spot[v] == owner+1 {
		return
	}
	g.spot[v] = owner + 1
	g.note(orb.Point{g.p[v].x, g.p[v].y}, "%s was led through a vertex %.3g m away from it", g.name(owner), d)
}

// findEdge gives the handle of edge a-b (from a to b), or -1.
func (g *planar) findEdge(a, b int32) int32 {
	start := g.vtri[a]
	t := start
	for {
		k := g.corner(t, a)
		if g.t[t].v[next3[k]] == b {
			return 4*t + prev3[k]
		}
		e := g.t[t].n[next3[k]]
		if e < 0 {
			break
		}
		t = e >> 2
		if t == start {
			return -1
		}
	}
	// a is a corner of the box: its fan is open. Seen from b it is closed.
	if h := g.findEdge(b, a); h >= 0 {
		return g.t[h>>2].n[h&3]
	}
	return -1
}

// constrain marks an edge as lying on the segments of a set, besides those already there.
func (g *planar) constrain(h, set int32) {
	old := g.t[h>>2].s[h&3]
	if old >= 0 {
		g.sets = append(g.sets, append(append([]origin{}, g.sets[old]...), g.sets[set]...))
		set = int32(len(g.sets) - 1)
	}
	g.t[h>>2].s[h&3] = set
	e := g.t[h>>2].n[h&3]
	g.t[e>>2].s[e&3] = set
}

// release takes the constraint from an edge, restores the Delaunay property and gives its set.
func (g *planar) release(h int32) int32 {
	set := g.t[h>>2].s[h&3]
	e := g.t[h>>2].n[h&3]
	g.t[h>>2].s[h&3] = -1
	g.t[e>>2].s[e&3] = -1
	g.flips = append(g.flips, h)
	g.legalise(g.renewIncidence)
	return set
}

// cross deals with a piece that meets the constrained edge h: one of the four ends lies on the other within the tolerance, or
// the crossing becomes a vertex.
func (g *planar) cross(c piece, h int32) error {
	u, w := g.ends(h)
	for _, v := range [2]int32{u, w} {
		if g.nearPiece(c.a, c.b, v) {
			g.cutAt(c, v)
			return nil
		}
	}
	for _, v := range [2]int32{c.a, c.b} {
		if g.nearPiece(u, w, v) {
			old := g.release(h)
			g.pieces = append(g.pieces, c)
			g.cutAt(piece{u, w, old}, v)
			return nil
		}
	}
	x, y := g.crossing(c.a, c.b, u, w)
	v, _ := g.vertexGridNear(x, y)
	if v == u || v == w {
		g.cutAt(c, v)
		return nil
	}
	old := g.release(h)
	if v < 0 {
		v = g.addVertex(x, y)
		g.vtri = append(g.vtri, -1)
		g.spot = append(g.spot, 0)
		g.last = g.vtri[u]
		if err := g.insertVertex(v); err != nil {
			return err
		}
		g.releaseNear(v)
	}
	g.pieces = append(g.pieces, piece{v, c.b, c.set}, piece{c.a, v, c.set}, piece{v, w, old}, piece{u, v, old})
	return nil
}

// vertexGridNear is the vertex within the tolerance of a place, box corners left out.
func (g *planar) vertexGridNear(x, y float64) (int32, float64) { return g.grid.near(g.p, x, y) }

// releaseNear frees the constrained edges that a new vertex lies within the tolerance of and lets them pass through it.
func (g *planar) releaseNear(v int32) {
	for again := true; again; {
		again = false
		start := g.vtri[v]
		t := start
		for {
			k := g.corner(t, v)
			p, q := g.ends(4*t + k)
			if g.t[t].s[k] >= 0 && g.nearPiece(p, q, v) {
				g.cutAt(piece{p, q, g.release(4*t + k)}, v)
				again = true
				break
			}
			t = g.t[t].n[next3[k]] >> 2
			if t == start {
				break
			}
		}
	}
}

// crossing is the place where a-b meets u-w, which it is known to cross.
func (g *planar) crossing(a, b, u, w int32) (x, y float64) {
	da, db := math.Abs(g.orientV(u, w, a)), math.Abs(g.orientV(u, w, b))
	f := da / (da + db)
	p, q := &g.p[a], &g.p[b]
	return p.x + f*(q.x-p.x), p.y + f*(q.y-p.y)
}

// carveEdge flips the edges in g.pending until a-b is an edge (Sloan 1993), then restores the Delaunay property around it.
func (g *planar) carveEdge(c piece) error {
	fresh := make([][2]int32, 0, 8)
	guard := 0
	for len(g.pending) > 0 {
		e := g.pending[0]
		g.pending = g.pending[1:]
		h := g.findEdge(e[0], e[1])
		if h < 0 {
			return fmt.Errorf("mesh: internal: edge lost near (%v, %v)", g.p[c.a].x, g.p[c.a].y)
		}
		if !g.flippable(h) {
			g.pending = append(g.pending, e)
			if guard++; guard > 4*(len(g.pending)+4)*(len(g.pending)+4) {
				return fmt.Errorf("mesh: internal: no edge can be flipped near (%v, %v)", g.p[c.a].x, g.p[c.a].y)
			}
			continue
		}
		g.flip(h)
		t, u := h>>2, g.t[h>>2].n[0]>>2
		g.renewIncidence(t)
		g.renewIncidence(u)
		p, q := g.ends(4 * t)
		if p != c.a && p != c.b && q != c.a && q != c.b && g.orientV(c.a, c.b, p) > 0 != (g.orientV(c.a, c.b, q) > 0) {
			g.pending = append(g.pending, [2]int32{p, q})
		} else {
			fresh = append(fresh, [2]int32{p, q})
		}
	}
	h := g.findEdge(c.a, c.b)
	if h < 0 {
		return fmt.Errorf("mesh: internal: edge not made near (%v, %v)", g.p[c.a].x, g.p[c.a].y)
	}
	g.constrain(h, c.set)
	for _, e := range fresh {
		if h := g.findEdge(e[0], e[1]); h >= 0 {
			g.flips = append(g.flips, h)
			g.legalise(g.renewIncidence)
		}
	}
	return nil
}
