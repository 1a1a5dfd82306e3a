package convex

import "slices"

// minimumDegree returns an elimination order of a symmetric pattern that keeps the fill of its factor small. Neighbours are given
// for every node, without the node itself.
//
// Method: quotient graph with approximate external degrees, absorption of elements, mass elimination and indistinguishable nodes
// (Amestoy, Davis & Duff 1996, SIAM Journal on Matrix Analysis and Applications 17, 886-905).
func minimumDegree(neighbours [][]int32) []int32 {
	n := len(neighbours)
	g := &quotientGraph{
		nodes: make([][]int32, n), elements: make([][]int32, n), inside: make([][]int32, n), weight: make([]int, n),
		degree: make([]int, n), outer: make([]int, n), stamp: make([]int, n), mark: make([]int, n),
		head: make([]int32, n+1), next: make([]int32, n), prev: make([]int32, n), members: make([][]int32, n),
	}
	for d := range g.head {
		g.head[d] = -1
	}
	for i := range neighbours {
		g.nodes[i] = slices.Clone(neighbours[i])
		g.weight[i] = 1
		g.insert(int32(i), len(g.nodes[i]))
	}
	order := make([]int32, 0, n)
	for len(order) < n {
		for g.head[g.least] < 0 {
			g.least++
		}
		order = g.eliminate(order, g.head[g.least], n-len(order))
	}
	return order
}

// quotientGraph holds the nodes not yet eliminated and the elements, which stand for the cliques of eliminated ones.
type quotientGraph struct {
	nodes    [][]int32 // by node: neighbours not in a common element
	elements [][]int32 // by node: elements it is in
	inside   [][]int32 // by element: its nodes; nil when absorbed
	weight   []int     // nodes that a node stands for, 0 when eliminated or merged
	members  [][]int32 // nodes merged into a node
	degree   []int
	outer    []int // by element: weight outside of the pivot element
	stamp    []int // by element: round in which outer was set
	mark     []int // by node: round of the pivot element
	round    int
	tag      int
	head     []int32 // lists of nodes by degree
	next     []int32
	prev     []int32
	least    int
}

func (g *quotientGraph) insert(i int32, degree int) {
	g.degree[i] = degree
	h := g.head[degree]
	g.next[i], g.prev[i] = h, -1
	if h >= 0 {
		g.prev[h] = i
	}
	g.head[degree] = i
	g.least = min(g.least, degree)
}

func (g *quotientGraph) remove(i int32) {
	if g.prev[i] >= 0 {
		g.next[g.prev[i]] = g.next[i]
	} else {
		g.head[g.degree[i]] = g.next[i]
	}
	if g.next[i] >= 0 {
		g.prev[g.next[i]] = g.prev[i]
	}
}

// eliminate makes node p an element and updates its neighbours. left is the number of nodes not yet in order.
func (g *quotientGraph) eliminate(order []int32, p int32, left int) []int32 {
	g.remove(p)
	g.round++
	clique, size := g.clique(p)
	order = g.take(order, p)
	left -= len(g.members[p]) + 1
	for _, i := range clique {
		g.remove(i)
		for _, e := range g.elements[i] {
			if g.inside[e] == nil {
				continue
			}
			if g.stamp[e] != g.round {
				g.stamp[e], g.outer[e] = g.round, g.size(e)
			}
			g.outer[e] -= g.weight[i]
		}
	}
	kept := clique[:0]
	hashes := make(map[uint64][]int32)
	for _, i := range clique {
		outside, hash := g.prune(i, p)
		if outside == 0 {
			order = g.take(order, i) // all neighbours are in the clique: eliminated at once
			left -= len(g.members[i]) + 1
			size -= g.weight[i]
			g.weight[i] = 0
			continue
		}
		g.degree[i] = outside
		if !g.merged(i, hashes[hash]) {
			hashes[hash] = append(hashes[hash], i)
			kept = append(kept, i)
		}
	}
	for _, i := range kept {
		g.insert(i, max(0, min(left-g.weight[i], g.degree[i]+size-g.weight[i])))
	}
	g.inside[p] = kept
	if len(kept) == 0 {
		g.inside[p] = nil
	}
	return order
}

func (g *quotientGraph) take(order []int32, i int32) []int32 {
	return append(append(order, i), g.members[i]...)
}

func (g *quotientGraph) size(e int32) int {
	sum := 0
	for _, i := range g.inside[e] {
		sum += g.weight[i]
	}
	return sum
}

// clique returns the live neighbours of p and their weight, and absorbs its elements.
func (g *quotientGraph) clique(p int32) (list []int32, size int) {
	g.tag++
	g.mark[p] = g.tag
	visit := func(from []int32) {
		for _, i := range from {
			if g.weight[i] > 0 && g.mark[i] != g.tag {
				g.mark[i] = g.tag
				list = append(list, i)
				size += g.weight[i]
			}
		}
	}
	visit(g.nodes[p])
	for _, e := range g.elements[p] {
		visit(g.inside[e])
		g.inside[e] = nil
	}
	g.weight[p] = 0
	g.nodes[p], g.elements[p] = nil, nil
	return list, size
}

// prune drops from the lists of i what element p covers, adds p, and returns the weight of the neighbours outside of p and a hash
// of the lists.
func (g *quotientGraph) prune(i, p int32) (outside int, hash uint64) {
	nodes := g.nodes[i][:0]
	for _, j := range g.nodes[i] {
		if g.weight[j] > 0 && g.mark[j] != g.tag {
			nodes = append(nodes, j)
			outside += g.weight[j]
			hash += uint64(j) * 0x9e3779b97f4a7c15
		}
	}
	elements := g.elements[i][:0]
	for _, e := range g.elements[i] {
		switch {
		case g.inside[e] == nil:
		case g.outer[e] == 0:
			g.inside[e] = nil // inside p: absorbed
		default:
			elements = append(elements, e)
			outside += g.outer[e]
			hash += uint64(e) * 0xc2b2ae3d27d4eb4f
		}
	}
	g.nodes[i], g.elements[i] = nodes, append(elements, p)
	return outside, hash
}

// merged merges i into one of the candidates that has the same lists.
func (g *quotientGraph) merged(i int32, candidates []int32) bool {
	for _, j := range candidates {
		if sameSet(g.nodes[i], g.nodes[j]) && sameSet(g.elements[i], g.elements[j]) {
			g.weight[j] += g.weight[i]
			g.weight[i] = 0
			g.members[j] = append(append(g.members[j], i), g.members[i]...)
			g.nodes[i], g.elements[i] = nil, nil
			return true
		}
	}
	return false
}

// sameSet compares two lists without repetition; it sorts them.
func sameSet(a, b []int32) bool {
	if len(a) != len(b) {
		return false
	}
	slices.Sort(a)
	slices.Sort(b)
	return slices.Equal(a, b)
}
