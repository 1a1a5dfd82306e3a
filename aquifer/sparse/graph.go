package sparse

// graph is the adjacency of the matrix without its diagonal, both directions of every edge. The first active[v] entries
// of a node's list lead to nodes of its own part; dissection moves edges that it cuts behind them.
type graph struct {
	n      int
	row    []int32 // node -> row of the matrix
	start  []int32 // n+1
	to     []int32 // neighbours
	slot   []int32 // place of the entry in Values
	active []int32
}

// newGraph numbers the nodes in the given order of rows.
func newGraph(p *Pattern, rows []int32) *graph {
	n := p.N
	g := &graph{n: n, row: rows, start: make([]int32, n+1), active: make([]int32, n)}
	node := invert(rows)
	for j := range n {
		g.active[node[j]] += int32(p.Ptr[j+1] - p.Ptr[j] - 1)
		for _, i := range p.Index[p.Ptr[j]+1 : p.Ptr[j+1]] {
			g.active[node[i]]++
		}
	}
	for v := range n {
		g.start[v+1] = g.start[v] + g.active[v]
	}
	g.to = make([]int32, g.start[n])
	g.slot = make([]int32, g.start[n])
	at := append([]int32(nil), g.start[:n]...)
	for j := range n {
		u := node[j]
		for k := p.Ptr[j] + 1; k < p.Ptr[j+1]; k++ {
			v := node[p.Index[k]]
			g.to[at[v]], g.slot[at[v]] = u, int32(k)
			g.to[at[u]], g.slot[at[u]] = v, int32(k)
			at[v]++
			at[u]++
		}
	}
	return g
}

// inside returns the neighbours of v in its own part.
func (g *graph) inside(v int32) []int32 {
	a := g.start[v]
	return g.to[a : a+g.active[v]]
}

// all returns every neighbour of v.
func (g *graph) all(v int32) []int32 { return g.to[g.start[v]:g.start[v+1]] }

// detach removes v from the active lists of its neighbours and empties its own.
func (g *graph) detach(v int32) {
	for _, u := range g.inside(v) {
		a := g.start[u]
		last := a + g.active[u] - 1
		for k := a; k <= last; k++ {
			if g.to[k] == v {
				g.to[k], g.to[last] = g.to[last], g.to[k]
				g.slot[k], g.slot[last] = g.slot[last], g.slot[k]
				g.active[u]--
				break
			}
		}
	}
	g.active[v] = 0
}
