package mesh

import (
	"cmp"
	"slices"

	"github.com/paulmach/orb"
)

// finish turns the refined triangulation into a Mesh.
func (r *refiner) finish(d Domain, o Options, g *planar) *Mesh {
	m := &Mesh{Notes: g.notes, metrics: r.metrics}
	m.Quality = Quality{WantedAngleDeg: o.MinAngleDeg, BudgetHit: r.budgetHit, Coarsest: r.field.coarsest, Tolerance: o.Tolerance}
	slot := r.pack(m)
	m.PointNode = append([]int32(nil), r.point...)
	m.fillRegions()
	m.incidence()
	m.provenance(r, d)
	m.noteDropped(d, o.Tolerance)
	m.measure(func(t int32) bool { return r.atSharp(slot[t]) })
	return m
}

// pack copies nodes and triangles, leaving out free slots, and gives the slot of each triangle.
func (r *refiner) pack(m *Mesh) (slot []int32) {
	number := make([]int32, len(r.t))
	slot = make([]int32, 0, len(r.t))
	for t := range r.t {
		number[t] = -1
		if r.t[t].v[0] >= 0 {
			number[t] = int32(len(slot))
			slot = append(slot, int32(t))
		}
	}
	n := len(slot)
	m.X, m.Y = make([]float64, len(r.p)), make([]float64, len(r.p))
	inParallel(len(r.p), func(from, to int) {
		for i := from; i < to; i++ {
			m.X[i], m.Y[i] = r.p[i].x, r.p[i].y
		}
	})
	m.Triangles, m.Neighbours = make([]int32, 3*n), make([]int32, 3*n)
	m.Constraint, m.Region = make([]uint8, n), make([]int32, n)
	inParallel(n, func(from, to int) {
		for i := from; i < to; i++ {
			tr := &r.t[slot[i]]
			constraint := uint8(0)
			for k := range 3 {
				m.Triangles[3*i+k] = tr.v[k]
				g := tr.n[k]
				if g >= 0 {
					g = number[g>>2]
				}
				m.Neighbours[3*i+k] = g
				if tr.s[k] >= 0 {
					constraint |= 1 << k
				}
			}
			m.Constraint[i], m.Region[i] = constraint, tr.region
		}
	})
	return slot
}

// fillRegions sums the regions and finds the connected parts of the domain.
func (m *Mesh) fillRegions() {
	n := int32(0)
	for _, g := range m.Region {
		n = max(n, g+1)
	}
	m.Regions = make([]Region, n)
	largest := make([]float64, n)
	for t, g := range m.Region {
		area := m.area(int32(t))
		r := &m.Regions[g]
		r.Area += area
		r.Triangles++
		if area > largest[g] {
			largest[g] = area
			a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
			r.At = orb.Point{(m.X[a] + m.X[b] + m.X[c]) / 3, (m.Y[a] + m.Y[b] + m.Y[c]) / 3}
		}
	}
	m.findParts()
}

// findParts numbers the connected parts of the domain, in the order of their first regions. A region is connected itself, so only
// constrained edges with triangles on both sides join them further.
func (m *Mesh) findParts() {
	root := make([]int, len(m.Regions))
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			root[i] = root[root[i]]
			i = root[i]
		}
		return i
	}
	for t, c := range m.Constraint {
		for k := 0; c != 0; k, c = k+1, c>>1 {
			if e := m.Neighbours[3*t+k]; c&1 == 1 && e >= 0 {
				a, b := find(int(m.Region[t])), find(int(m.Region[e]))
				root[max(a, b)] = min(a, b)
			}
		}
	}
	m.Parts = 0
	for i := range root {
		if root[i] == i {
			m.Regions[i].Part = m.Parts
			m.Parts++
		} else {
			m.Regions[i].Part = m.Regions[find(i)].Part
		}
	}
}

// area of triangle t [m²].
func (m *Mesh) area(t int32) float64 {
	a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
	return ((m.X[b]-m.X[a])*(m.Y[c]-m.Y[a]) - (m.Y[b]-m.Y[a])*(m.X[c]-m.X[a])) / 2
}

// incidence lists the triangles of each node.
func (m *Mesh) incidence() {
	m.nodeStart = make([]int32, len(m.X)+1)
	for _, v := range m.Triangles {
		m.nodeStart[v+1]++
	}
	for i := range m.X {
		m.nodeStart[i+1] += m.nodeStart[i]
	}
	m.nodeTris = make([]int32, len(m.Triangles))
	fill := append([]int32(nil), m.nodeStart[:len(m.X)]...)
	for i, v := range m.Triangles {
		m.nodeTris[fill[v]] = int32(i / 3)
		fill[v]++
	}
}

// NodeTriangles lists the triangles around a node, in the order of their numbers. The slice is shared; do not change it.
func (m *Mesh) NodeTriangles(node int32) []int32 {
	return m.nodeTris[m.nodeStart[node]:m.nodeStart[node+1]]
}

// provenance fills LineEdges and OutlineEdges from the segments on triangle edges.
func (m *Mesh) provenance(r *refiner, d Domain) {
	rings := allRings(d)
	m.LineEdges = make([][]LineEdge, len(d.Lines))
	for t := range r.t {
		if tr := &r.t[t]; tr.v[0] < 0 || tr.s[0]&tr.s[1]&tr.s[2] < 0 {
			continue
		}
		for k := int32(0); k < 3; k++ {
			m.noteEdge(r, d, rings, int32(t), k)
		}
	}
	for _, e := range m.LineEdges {
		slices.SortFunc(e, func(a, b LineEdge) int {
			return cmp.Or(cmp.Compare(a.SegmentA, b.SegmentA), cmp.Compare(a.FractionA+a.FractionB, b.FractionA+b.FractionB),
				cmp.Compare(a.A, b.A), cmp.Compare(a.B, b.B))
		})
	}
	slices.SortFunc(m.OutlineEdges, func(a, b OutlineEdge) int {
		return cmp.Or(cmp.Compare(a.Ring, b.Ring), cmp.Compare(a.Segment, b.Segment),
			cmp.Compare(a.FractionA+a.FractionB, b.FractionA+b.FractionB), cmp.Compare(a.A, b.A), cmp.Compare(a.B, b.B))
	})
}

// noteEdge files edge k of triangle t of the refined triangulation if it lies on lines or outline and was not met from its other side.
func (m *Mesh) noteEdge(r *refiner, d Domain, rings []orb.Ring, t, k int32) {
	tr := &r.t[t]
	if tr.s[k] < 0 || tr.n[k] >= 0 && tr.n[k] < 4*t+k {
		return
	}
	a, b := r.ends(4*t + k)
	onRing := false
	for _, o := range r.sets[r.bases[tr.s[k]].set] {
		if l := int(o.owner) - len(rings); l >= 0 {
			m.LineEdges[l] = append(m.LineEdges[l], m.lineEdge(d.Lines[l].Path, o.segment, a, b))
		} else if tr.n[k] < 0 && !onRing {
			onRing = true
			m.OutlineEdges = append(m.OutlineEdges, m.outlineEdge(rings[o.owner], o, a, b))
		}
	}
}

// lineEdge makes the record of edge a-b on a segment of a path, in the path's direction.
func (m *Mesh) lineEdge(path orb.LineString, segment, a, b int32) LineEdge {
	p, q := path[segment], path[segment+1]
	fa, fb := m.fraction(p, q, a), m.fraction(p, q, b)
	if fb < fa {
		a, b, fa, fb = b, a, fb, fa
	}
	return LineEdge{A: a, B: b, SegmentA: segment, SegmentB: segment, FractionA: fa, FractionB: fb}
}

// outlineEdge makes the record of edge a-b, which has the domain on its left, on a segment of a ring.
func (m *Mesh) outlineEdge(ring orb.Ring, o origin, a, b int32) OutlineEdge {
	p, q := ring[o.segment], ring[(int(o.segment)+1)%len(ring)]
	return OutlineEdge{A: a, B: b, Ring: o.owner, Segment: o.segment, FractionA: m.fraction(p, q, a), FractionB: m.fraction(p, q, b)}
}

// fraction is where node v lies from p to q, from 0 to 1.
func (m *Mesh) fraction(p, q orb.Point, v int32) float64 {
	x, y := m.X[v], m.Y[v]
	switch {
	case x == p[0] && y == p[1]:
		return 0
	case x == q[0] && y == q[1]:
		return 1
	}
	ux, uy := q[0]-p[0], q[1]-p[1]
	f := ((x-p[0])*ux + (y-p[1])*uy) / (ux*ux + uy*uy)
	if !(f > 0) {
		return 0
	}
	return min(f, 1)
}

// noteDropped tells of lines that lie partly or wholly outside the domain.
func (m *Mesh) noteDropped(d Domain, tol float64) {
	for i, l := range d.Lines {
		total, inside := 0.0, 0.0
		for j := 1; j < len(l.Path); j++ {
			total += distance(l.Path[j-1], l.Path[j])
		}
		for _, e := range m.LineEdges[i] {
			inside += distance(l.Path[e.SegmentA], l.Path[e.SegmentA+1]) * (e.FractionB - e.FractionA)
		}
		if out := total - inside; out > tol*float64(len(l.Path)) && len(l.Path) > 0 {
			m.Notes = append(m.Notes, Note{dropText(ownerName(d, 1+len(d.Holes)+i), out, total), l.Path[0]})
		}
	}
}
