package mesh

import "math"

const (
	// A coarse mesh is halved at the edges that are longer than halveFrom - halveSlope x (coarse size over fine size) wanted
	// lengths: nearly all where it was made twice as coarse as wanted, nearly none where it has the wanted size already.
	halveFrom  = 2.7
	halveSlope = 0.9
	// halveRoom: room for so many more nodes than halving makes, for the refinement that follows.
	halveRoom = 1.02
)

// piecePattern says how a triangle is cut: each piece by its corners, of which 0 to 2 are the triangle's own and 3 + k is the
// middle of edge k.
type piecePattern struct {
	n      int32
	v      [4][3]uint8
	across [4][3]int8  // handle, counted from the first piece, of the same edge in another piece; -1 on the triangle's own edges
	edge   [4][3]uint8 // the triangle's edge that it lies on then
	half   [4][3]uint8 // 0 the half at the start of that edge, 1 the one at its end
	outer  [3][2]int32 // handle, counted from the first piece, of each half of each edge
}

// Patterns are numbered by the edges cut, bit k for edge k; 8 + k is the other diagonal where edge k alone is whole.
var piecePatterns = makePatterns()

// makePatterns lists the pieces and finds what lies across their edges.
func makePatterns() (patterns [11]piecePattern) {
	patterns[0] = piecePattern{n: 1, v: [4][3]uint8{{0, 1, 2}}}
	patterns[7] = piecePattern{n: 4, v: [4][3]uint8{{0, 5, 4}, {1, 3, 5}, {2, 4, 3}, {3, 4, 5}}}
	for k := range uint8(3) {
		i, j := (k+1)%3, (k+2)%3
		patterns[1<<k] = piecePattern{n: 2, v: [4][3]uint8{{k, i, 3 + k}, {k, 3 + k, j}}}
		corner := [3]uint8{k, 3 + j, 3 + i}
		patterns[7-1<<k] = piecePattern{n: 3, v: [4][3]uint8{corner, {3 + j, i, 3 + i}, {i, j, 3 + i}}}
		patterns[8+k] = piecePattern{n: 3, v: [4][3]uint8{corner, {3 + j, j, 3 + i}, {3 + j, i, j}}}
	}
	for i := range patterns {
		patterns[i].join()
	}
	return patterns
}

// join fills in what lies across every edge of the pieces.
func (p *piecePattern) join() {
	for h := range 4 * p.n {
		c, e := h>>2, h&3
		if e == 3 {
			continue
		}
		a, b := p.v[c][next3[e]], p.v[c][prev3[e]]
		p.across[c][e] = -1
		for g := range 4 * p.n {
			if g&3 < 3 && p.v[g>>2][next3[g&3]] == b && p.v[g>>2][prev3[g&3]] == a {
				p.across[c][e] = int8(g)
			}
		}
		if p.across[c][e] >= 0 {
			continue
		}
		for k := range uint8(3) {
			start, end := uint8(next3[k]), uint8(prev3[k])
			switch {
			case a == start && b == end:
				p.edge[c][e], p.outer[k] = k, [2]int32{h, h}
			case a == start && b == 3+k:
				p.edge[c][e], p.outer[k][0] = k, h
			case a == 3+k && b == end:
				p.edge[c][e], p.half[c][e], p.outer[k][1] = k, 1, h
			}
		}
	}
}

// halver cuts the triangles of a mesh, which has no free slots, at the middles of its long edges.
type halver struct {
	*refiner
	h       []float64 // size wanted after halving, at the vertices there are
	number  []int32   // of each vertex after halving
	middle  []int32   // per handle: number of the vertex in the middle; -1 where the edge stays whole
	whole   []bool    // per triangle: thin, which only the input's own sharpness explains, and not to be cut
	pattern []uint8   // per triangle
	first   []int32   // first piece of each triangle
	p       []vertex
	t       []triangle
}

// halve cuts the long edges in the middle and goes over to a finer size field. It gives false, and leaves all as it was, where rounding
// would turn a piece over or the budget does not allow so many nodes.
func (r *refiner) halve(f *sizeField) bool {
	s := &halver{refiner: r, h: make([]float64, len(r.p)), middle: make([]int32, 4*len(r.t)), whole: make([]bool, len(r.t)), pattern: make([]uint8, len(r.t))}
	inParallel(len(r.p), func(from, to int) {
		for v := from; v < to; v++ {
			s.h[v] = f.at(r.p[v].x, r.p[v].y)
		}
	})
	inParallel(len(r.t), func(from, to int) {
		for t := from; t < to; t++ {
			shape := r.shapeOf(int32(t))
			s.whole[t] = !(shape.radius <= r.ratio2*shape.l2[shape.shortest()])
		}
	})
	inParallel(len(r.t), s.markEdges)
	nodes := s.numberVertices()
	if nodes > r.maxNodes {
		return false
	}
	pieces := int32(0)
	s.first = make([]int32, len(r.t))
	for t := range s.first {
		s.first[t] = pieces
		pieces += piecePatterns[s.pattern[t]].n
	}
	s.p = make([]vertex, nodes, int(halveRoom*float64(nodes))+100)
	s.t = make([]triangle, pieces, int(halveRoom*float64(pieces))+200)
	s.placeVertices(f)
	sound := make([]bool, len(r.t)/parallelShare+1)
	inParallel(len(r.t), func(from, to int) { sound[from/parallelShare] = s.cut(from, to) })
	for _, ok := range sound {
		if !ok {
			return false
		}
	}
	r.p, r.t, r.field = s.p, s.t, f
	r.mark, r.epoch, r.free = make([]uint32, len(s.t), cap(s.t)), 0, r.free[:0]
	r.renumber(s.number)
	return true
}

// markEdges decides which edges of some triangles are cut.
func (s *halver) markEdges(from, to int) {
	for t := from; t < to; t++ {
		tr := &s.refiner.t[t]
		mask := uint8(0)
		for k := int32(0); k < 3; k++ {
			s.middle[4*int32(t)+k] = -1
			if g := tr.n[k]; !s.whole[t] && (g < 0 || !s.whole[g>>2]) && s.long(tr, k) {
				mask |= 1 << k
			}
		}
		if mask == 3 || mask == 5 || mask == 6 {
			mask = s.diagonal(tr, mask)
		}
		s.pattern[t] = mask
	}
}

// long says whether edge k is cut; both its triangles get the same answer. As everywhere, what is inside a region is measured in its
// metric and segments are measured in the plane.
func (s *halver) long(tr *triangle, k int32) bool {
	a, b := tr.v[next3[k]], tr.v[prev3[k]]
	p, q := &s.refiner.p[a], &s.refiner.p[b]
	limit := (halveFrom*(s.h[a]+s.h[b]) - halveSlope*(p.h+q.h)) / 2
	dx, dy := p.x-q.x, p.y-q.y
	if tr.s[k] >= 0 {
		l := math.Sqrt(dx*dx + dy*dy)
		return l > limit && s.divisible(l)
	}
	if s.metrics != nil {
		dx, dy = s.metrics[tr.region].to(dx, dy)
	}
	return dx*dx+dy*dy > limit*limit
}

// diagonal picks the shorter diagonal of the part beside the whole edge.
func (s *halver) diagonal(tr *triangle, mask uint8) uint8 {
	k := [8]int32{3: 2, 5: 1, 6: 0}[mask]
	i, j := next3[k], prev3[k]
	a, b, c := &s.refiner.p[tr.v[k]], &s.refiner.p[tr.v[i]], &s.refiner.p[tr.v[j]]
	ux, uy := b.x-(c.x+a.x)/2, b.y-(c.y+a.y)/2 // corner i to the middle of edge i
	vx, vy := c.x-(a.x+b.x)/2, c.y-(a.y+b.y)/2
	if vx*vx+vy*vy < ux*ux+uy*uy {
		return 8 + uint8(k)
	}
	return mask
}

// cutAcross says whether the pattern of a triangle has edge k cut.
func cutAcross(pattern uint8, k int32) bool {
	if pattern >= 8 {
		return int32(pattern-8) != k
	}
	return pattern>>k&1 == 1
}

// numberVertices gives every vertex and middle its new number: a middle follows the lower end of its edge, so what is near stays
// near in memory.
func (s *halver) numberVertices() int {
	old := s.refiner.t
	s.number = make([]int32, len(s.refiner.p)+1)
	each := func(do func(h, g, low int32)) {
		for t := range old {
			tr := &old[t]
			for k := int32(0); k < 3; k++ {
				if h, g := 4*int32(t)+k, tr.n[k]; (g < 0 || g > h) && cutAcross(s.pattern[t], k) {
					do(h, g, min(tr.v[next3[k]], tr.v[prev3[k]]))
				}
			}
		}
	}
	each(func(h, g, low int32) { s.number[low+1]++ })
	for v := range s.refiner.p {
		s.number[v+1] += s.number[v] + 1
	}
	next := append([]int32(nil), s.number...)
	each(func(h, g, low int32) {
		next[low]++
		s.middle[h] = next[low]
		if g >= 0 {
			s.middle[g] = next[low]
		}
	})
	return int(s.number[len(s.refiner.p)])
}

// placeVertices writes the vertices after halving.
func (s *halver) placeVertices(f *sizeField) {
	old := s.refiner.p
	inParallel(len(old), func(from, to int) {
		for v := from; v < to; v++ {
			p := &s.p[s.number[v]]
			*p = old[v]
			p.h = s.h[v]
		}
	})
	inParallel(len(s.refiner.t), func(from, to int) {
		for t := from; t < to; t++ {
			tr := &s.refiner.t[t]
			for k := int32(0); k < 3; k++ {
				h := 4*int32(t) + k
				if s.middle[h] < 0 || tr.n[k] >= 0 && tr.n[k] < h {
					continue
				}
				share := 0.5
				v := vertex{seg: -1, kind: freeVertex}
				if tr.s[k] >= 0 {
					v.seg, v.kind = tr.s[k], segmentVertex
					share = s.cutShare(h)
				}
				a, b := s.ends(h)
				v.x, v.y = old[a].x+share*(old[b].x-old[a].x), old[a].y+share*(old[b].y-old[a].y)
				v.h = f.at(v.x, v.y)
				s.p[s.middle[h]] = v
			}
		}
	})
}

// cut writes the pieces of some triangles; false when one of them is turned over.
func (s *halver) cut(from, to int) bool {
	sound := true
	for t := from; t < to; t++ {
		tr := &s.refiner.t[t]
		pattern := &piecePatterns[s.pattern[t]]
		m := s.middle[4*t : 4*t+3]
		number := [6]int32{s.number[tr.v[0]], s.number[tr.v[1]], s.number[tr.v[2]], m[0], m[1], m[2]}
		first := s.first[t]
		for c := range pattern.n {
			piece := triangle{region: tr.region}
			for e := range 3 {
				piece.v[e] = number[pattern.v[c][e]]
				piece.s[e] = -1
				if g := pattern.across[c][e]; g >= 0 {
					piece.n[e] = 4*first + int32(g)
					continue
				}
				k := pattern.edge[c][e]
				piece.s[e] = tr.s[k]
				piece.n[e] = -1
				if g := tr.n[k]; g >= 0 {
					piece.n[e] = 4*s.first[g>>2] + piecePatterns[s.pattern[g>>2]].outer[g&3][1-pattern.half[c][e]]
				}
			}
			s.t[first+c] = piece
			p, q, o := &s.p[piece.v[0]], &s.p[piece.v[1]], &s.p[piece.v[2]]
			sound = sound && orient(p.x, p.y, q.x, q.y, o.x, o.y) > 0
		}
	}
	return sound
}
