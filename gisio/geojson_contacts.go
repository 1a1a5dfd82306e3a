package gisio

import (
	"cmp"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

// edge is one side of a ring: from ring point index to index + 1.
type edge struct {
	a, b  orb.Point
	ring  int32 // index in the list of rings
	index int32 // index of a in the ring
}

// edgeContact is a meeting of two edges other than the shared end of two neighbours in a ring.
type edgeContact struct {
	e, f  edge // e before f in ring, then index
	kind  contact
	point orb.Point
}

// edgesPerLeaf is how many edges a leaf of the tree holds: fewer make the tree deep, more make needless pairs.
const edgesPerLeaf = 4

// extents are the lowest and highest x, y, x + y and x - y: an octagon, so that long slanting edges do not fill boxes.
type extents struct {
	low, high [4]float64
}

func (e edge) extents() extents {
	p := [4]float64{e.a[0], e.a[1], e.a[0] + e.a[1], e.a[0] - e.a[1]}
	q := [4]float64{e.b[0], e.b[1], e.b[0] + e.b[1], e.b[0] - e.b[1]}
	var x extents
	for i := range p {
		x.low[i], x.high[i] = min(p[i], q[i]), max(p[i], q[i])
	}
	return x
}

func (x *extents) include(y *extents) {
	for i := range x.low {
		x.low[i], x.high[i] = min(x.low[i], y.low[i]), max(x.high[i], y.high[i])
	}
}

// meet tells whether two octagons may share a point. Rounded sums keep the order of exact ones, so no meeting is lost.
func (x *extents) meet(y *extents) bool {
	for i := range x.low {
		if x.low[i] > y.high[i] || y.low[i] > x.high[i] {
			return false
		}
	}
	return true
}

// contactSearch finds the contacts between edges with a tree of octagons over the edges in the order of a
// space-filling curve: n log n for shapes that are not dense with long parallel edges.
type contactSearch struct {
	edges   []edge
	boxes   []extents // of the edges
	nodes   []extents // of the tree, in heap order: node i has the children 2i+1 and 2i+2
	ringLen []int32   // number of edges of each ring
	found   []edgeContact
	most    int
	pairs   int // pairs of edges that were looked at
}

// findContacts gives the contacts between edges of closed rings without repeated consecutive points and without spikes
// (so that neighbours meet at their common end only), sorted by edges. Once most contacts are found it stops and gives those.
func findContacts(rings [][]orb.Point, most int) []edgeContact {
	s := newContactSearch(rings, most)
	s.run()
	return s.found
}

func newContactSearch(rings [][]orb.Point, most int) *contactSearch {
	s := &contactSearch{most: most, ringLen: make([]int32, len(rings))}
	total := 0
	for _, r := range rings {
		total += max(len(r)-1, 0)
	}
	s.edges = make([]edge, 0, total)
	for i, r := range rings {
		for j := 1; j < len(r); j++ {
			s.edges = append(s.edges, edge{r[j-1], r[j], int32(i), int32(j - 1)})
		}
		s.ringLen[i] = int32(max(len(r)-1, 0))
	}
	return s
}

func (s *contactSearch) run() {
	if len(s.edges) == 0 {
		return
	}
	s.sortEdges()
	s.boxes = make([]extents, len(s.edges))
	for i, e := range s.edges {
		s.boxes[i] = e.extents()
	}
	leaves := 1
	for leaves*edgesPerLeaf < len(s.edges) {
		leaves *= 2
	}
	s.nodes = make([]extents, 2*leaves-1)
	s.build(0, 0, leaves)
	s.within(0, 0, leaves)
	slices.SortFunc(s.found, func(p, q edgeContact) int {
		return cmp.Or(cmp.Compare(p.e.ring, q.e.ring), cmp.Compare(p.e.index, q.e.index),
			cmp.Compare(p.f.ring, q.f.ring), cmp.Compare(p.f.index, q.f.index))
	})
}

// sortEdges orders the edges by the Z-order curve through their middles.
func (s *contactSearch) sortEdges() {
	low := orb.Point{math.Inf(1), math.Inf(1)}
	high := orb.Point{math.Inf(-1), math.Inf(-1)}
	for _, e := range s.edges {
		for k := range 2 {
			low[k], high[k] = math.Min(low[k], e.a[k]), math.Max(high[k], e.a[k])
		}
	}
	width := math.Max(high[0]-low[0], high[1]-low[1])
	cells := func(e edge, k int) uint64 {
		const finest = 1 << 31
		t := (e.a[k]/2 + e.b[k]/2 - low[k]) / width * finest
		if !(t >= 0) {
			return 0
		}
		return uint64(math.Min(t, finest))
	}
	type keyed struct {
		key uint64
		edge
	}
	order := make([]keyed, len(s.edges))
	for i, e := range s.edges {
		order[i] = keyed{spread(cells(e, 0)) | spread(cells(e, 1))<<1, e}
	}
	slices.SortFunc(order, func(p, q keyed) int {
		return cmp.Or(cmp.Compare(p.key, q.key), cmp.Compare(p.ring, q.ring), cmp.Compare(p.index, q.index))
	})
	for i := range order {
		s.edges[i] = order[i].edge
	}
}

// spread puts a zero bit between the lower 32 bits of x.
func spread(x uint64) uint64 {
	x = (x | x<<16) & 0x0000ffff0000ffff
	x = (x | x<<8) & 0x00ff00ff00ff00ff
	x = (x | x<<4) & 0x0f0f0f0f0f0f0f0f
	x = (x | x<<2) & 0x3333333333333333
	return (x | x<<1) & 0x5555555555555555
}

// span gives the edges under the leaves from first on.
func (s *contactSearch) span(first, leaves int) (from, to int) {
	return min(first*edgesPerLeaf, len(s.edges)), min((first+leaves)*edgesPerLeaf, len(s.edges))
}

func (s *contactSearch) build(node, first, leaves int) {
	x := extents{}
	for i := range x.low {
		x.low[i], x.high[i] = math.Inf(1), math.Inf(-1)
	}
	if leaves == 1 {
		from, to := s.span(first, 1)
		for i := from; i < to; i++ {
			x.include(&s.boxes[i])
		}
	} else {
		s.build(2*node+1, first, leaves/2)
		s.build(2*node+2, first+leaves/2, leaves/2)
		x.include(&s.nodes[2*node+1])
		x.include(&s.nodes[2*node+2])
	}
	s.nodes[node] = x
}

// within meets the edges under one node with each other.
func (s *contactSearch) within(node, first, leaves int) {
	if len(s.found) >= s.most {
		return
	}
	if leaves == 1 {
		from, to := s.span(first, 1)
		for i := from; i < to; i++ {
			for j := i + 1; j < to; j++ {
				s.pair(i, j)
			}
		}
		return
	}
	half := leaves / 2
	s.within(2*node+1, first, half)
	s.within(2*node+2, first+half, half)
	s.across(2*node+1, first, 2*node+2, first+half, half)
}

// across meets the edges under two nodes of the same height.
func (s *contactSearch) across(p, pFirst, q, qFirst, leaves int) {
	if len(s.found) >= s.most || !s.nodes[p].meet(&s.nodes[q]) {
		return
	}
	if leaves == 1 {
		from, to := s.span(pFirst, 1)
		qFrom, qTo := s.span(qFirst, 1)
		for i := from; i < to; i++ {
			for j := qFrom; j < qTo; j++ {
				s.pair(i, j)
			}
		}
		return
	}
	half := leaves / 2
	for _, a := range [2]int{0, 1} {
		for _, b := range [2]int{0, 1} {
			s.across(2*p+1+a, pFirst+a*half, 2*q+1+b, qFirst+b*half, half)
		}
	}
}

func (s *contactSearch) pair(i, j int) {
	s.pairs++
	if !s.boxes[i].meet(&s.boxes[j]) {
		return
	}
	e, f := s.edges[i], s.edges[j]
	if f.ring < e.ring || f.ring == e.ring && f.index < e.index {
		e, f = f, e
	}
	if e.ring == f.ring && (e.index+1 == f.index || e.index == 0 && f.index == s.ringLen[e.ring]-1) {
		return
	}
	kind, point := segmentContact(e.a, e.b, f.a, f.b)
	if kind == contactNone {
		return
	}
	s.found = append(s.found, edgeContact{e, f, kind, point})
}
