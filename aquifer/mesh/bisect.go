package mesh

// Bisect cuts every triangle into four similar ones at its edge midpoints and carries all provenance over; triangle t becomes
// 4t..4t+3, the last one the inner, and the first nodes keep their numbers. An obtuse triangle's inner edge faces twice the
// obtuse angle, so edges are then flipped until all are Delaunay again (Lawson 1977), never across a constrained edge.
func (m *Mesh) Bisect() *Mesh {
	n := len(m.Region)
	f := &Mesh{X: append([]float64(nil), m.X...), Y: append([]float64(nil), m.Y...)}
	middle := make([]int32, 3*n) // node in the middle of the edge opposite each corner
	for t := range n {
		for k := range 3 {
			e := m.Neighbours[3*t+k]
			if e >= 0 && int(e) < t {
				middle[3*t+k] = middle[3*int(e)+m.backEdge(e, t, k)]
				continue
			}
			a, b := m.Triangles[3*t+int(next3[k])], m.Triangles[3*t+int(prev3[k])]
			middle[3*t+k] = int32(len(f.X))
			f.X = append(f.X, m.X[a]+(m.X[b]-m.X[a])/2)
			f.Y = append(f.Y, m.Y[a]+(m.Y[b]-m.Y[a])/2)
		}
	}
	f.cutInFour(m, middle)
	f.metrics = m.metrics
	sharp := f.flipObtuse(m)
	f.PointNode = append([]int32(nil), m.PointNode...)
	f.Regions = append([]Region(nil), m.Regions...)
	for i := range f.Regions {
		f.Regions[i].Triangles *= 4
	}
	f.Parts = m.Parts
	f.Notes = append([]Note(nil), m.Notes...)
	f.Quality = m.Quality
	f.measure(func(t int32) bool { return sharp[t] })
	f.incidence()
	f.halveEdges(m, middle)
	return f
}

// Middles lists the ends of the coarse edge in whose middle each node lies that Bisect adds, in the order of those nodes.
func (m *Mesh) Middles() [][2]int32 {
	var out [][2]int32
	for t := range m.Region {
		for k := range 3 {
			if e := m.Neighbours[3*t+k]; e < 0 || int(e) > t {
				out = append(out, [2]int32{m.Triangles[3*t+int(next3[k])], m.Triangles[3*t+int(prev3[k])]})
			}
		}
	}
	return out
}

// backEdge is the index, in neighbour e, of edge k of triangle t.
func (m *Mesh) backEdge(e int32, t, k int) int {
	a := m.Triangles[3*t+int(next3[k])]
	for j := range 3 {
		if m.Triangles[3*int(e)+int(prev3[j])] == a && m.Neighbours[3*int(e)+j] == int32(t) {
			return j
		}
	}
	panic("mesh: Bisect: neighbours do not agree")
}

// cutInFour writes the triangles of the finer mesh.
func (f *Mesh) cutInFour(m *Mesh, middle []int32) {
	n := len(m.Region)
	f.Triangles, f.Neighbours = make([]int32, 12*n), make([]int32, 12*n)
	f.Constraint, f.Region = make([]uint8, 4*n), make([]int32, 4*n)
	for t := range n {
		inner := 4*t + 3
		for k := range 3 {
			u := 4*t + k // the triangle at corner k: corner, middle of k+2, middle of k+1
			i, j := int(next3[k]), int(prev3[k])
			copy(f.Triangles[3*u:], []int32{m.Triangles[3*t+k], middle[3*t+j], middle[3*t+i]})
			f.Triangles[3*inner+k] = middle[3*t+k]
			f.Neighbours[3*inner+k] = int32(u)
			f.Neighbours[3*u] = int32(inner)
			f.Neighbours[3*u+1] = m.halfNeighbour(t, i, k)
			f.Neighbours[3*u+2] = m.halfNeighbour(t, j, k)
			f.Constraint[u] = m.Constraint[t]>>i&1<<1 | m.Constraint[t]>>j&1<<2
		}
		for k := range 4 {
			f.Region[4*t+k] = m.Region[t]
		}
	}
}

// flipObtuse restores the Delaunay property and tells which triangles come from ones at sharp corners.
func (f *Mesh) flipObtuse(m *Mesh) (sharp []bool) {
	g := &triangulation{p: make([]vertex, len(f.X)), t: make([]triangle, len(f.Region)), metrics: f.metrics}
	for i := range f.X {
		g.p[i] = vertex{x: f.X[i], y: f.Y[i]}
	}
	sharp = make([]bool, len(f.Region))
	for t := range g.t {
		sharp[t] = m.sharp[t/4]
		tr := &g.t[t]
		tr.region = f.Region[t]
		for k := range 3 {
			tr.v[k], tr.n[k], tr.s[k] = f.Triangles[3*t+k], -1, -1
			if e := f.Neighbours[3*t+k]; e >= 0 {
				tr.n[k] = 4*e + int32(f.backEdge(e, t, k))
			}
			if f.Constraint[t]>>k&1 == 1 {
				tr.s[k] = 0
			}
		}
	}
	g.delaunayAll()
	for t := range g.t {
		tr := &g.t[t]
		f.Constraint[t] = 0
		for k := range 3 {
			if f.Triangles[3*t+k] != tr.v[k] {
				for _, e := range tr.n { // flipped: what was sharp next to it may lie here now
					sharp[t] = sharp[t] || e >= 0 && m.sharp[e>>4]
				}
			}
			f.Triangles[3*t+k], f.Neighbours[3*t+k] = tr.v[k], -1
			if tr.n[k] >= 0 {
				f.Neighbours[3*t+k] = tr.n[k] >> 2
			}
			if tr.s[k] >= 0 {
				f.Constraint[t] |= 1 << k
			}
		}
	}
	return sharp
}

// halfNeighbour is the fine triangle across the half of coarse edge k of t that touches corner c of t.
func (m *Mesh) halfNeighbour(t, k, c int) int32 {
	e := m.Neighbours[3*t+k]
	if e < 0 {
		return -1
	}
	j := m.backEdge(e, t, k)
	v := m.Triangles[3*t+c]
	if m.Triangles[3*int(e)+int(next3[j])] == v {
		return 4*e + next3[j]
	}
	return 4*e + prev3[j]
}

// halveEdges cuts the edges of lines and outline in two.
func (f *Mesh) halveEdges(m *Mesh, middle []int32) {
	mid := func(a, b int32) int32 {
		for _, t := range m.NodeTriangles(a) {
			for k := range 3 {
				p, q := m.Triangles[3*int(t)+int(next3[k])], m.Triangles[3*int(t)+int(prev3[k])]
				if p == a && q == b || p == b && q == a {
					return middle[3*int(t)+k]
				}
			}
		}
		panic("mesh: Bisect: an edge of a line is no edge of the mesh")
	}
	f.LineEdges = make([][]LineEdge, len(m.LineEdges))
	for i, edges := range m.LineEdges {
		for _, e := range edges {
			first, second := e, e
			first.B = mid(e.A, e.B)
			second.A = first.B
			first.FractionB = (e.FractionA + e.FractionB) / 2
			second.FractionA = first.FractionB
			f.LineEdges[i] = append(f.LineEdges[i], first, second)
		}
	}
	for _, e := range m.OutlineEdges {
		first, second := e, e
		first.B = mid(e.A, e.B)
		second.A = first.B
		first.FractionB = (e.FractionA + e.FractionB) / 2
		second.FractionA = first.FractionB
		if e.FractionB < e.FractionA {
			first, second = second, first
		}
		f.OutlineEdges = append(f.OutlineEdges, first, second)
	}
}
