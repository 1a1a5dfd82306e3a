package mesh

// reorder numbers the vertices along a Hilbert curve and the triangles by their lowest vertex, so that what is near in the plane
// is near in memory, here and for whoever uses the mesh.
func (c *carved) reorder() {
	order := hilbertOrder(len(c.p), func(i int) (float64, float64) { return c.p[i].x, c.p[i].y })
	number := make([]int32, len(c.p))
	p := make([]vertex, len(c.p), cap(c.p))
	for i, v := range order {
		number[v] = int32(i)
		p[i] = c.p[v]
	}
	c.p = p
	c.renumber(number)
	c.reorderTriangles(number)
}

// renumber changes the vertex numbers of points and segments.
func (c *carved) renumber(number []int32) {
	for i, v := range c.point {
		c.point[i] = number[v]
	}
	c.meeting = make(map[int32][]int32, len(c.bases))
	for i := range c.bases {
		b := &c.bases[i]
		b.p, b.q = number[b.p], number[b.q]
		c.meeting[b.p] = append(c.meeting[b.p], int32(i))
		c.meeting[b.q] = append(c.meeting[b.q], int32(i))
	}
}

// reorderTriangles renumbers the vertices in the triangles and sorts these, stably, by their lowest vertex.
func (c *carved) reorderTriangles(number []int32) {
	start := make([]int32, len(c.p)+1)
	for t := range c.t {
		if tr := &c.t[t]; tr.v[0] >= 0 {
			tr.v = [3]int32{number[tr.v[0]], number[tr.v[1]], number[tr.v[2]]}
			start[min(tr.v[0], tr.v[1], tr.v[2])+1]++
		}
	}
	for i := range c.p {
		start[i+1] += start[i]
	}
	moved := make([]int32, len(c.t))
	sorted := make([]triangle, start[len(c.p)], cap(c.t))
	for t := range c.t {
		if tr := &c.t[t]; tr.v[0] >= 0 {
			low := min(tr.v[0], tr.v[1], tr.v[2])
			moved[t] = start[low]
			sorted[start[low]] = *tr
			start[low]++
		}
	}
	for t := range sorted {
		for k, e := range sorted[t].n {
			if e >= 0 {
				sorted[t].n[k] = 4*moved[e>>2] + e&3
			}
		}
	}
	c.t, c.free = sorted, c.free[:0]
	c.mark = c.mark[:len(sorted)]
	clear(c.mark)
	c.epoch = 0
}
