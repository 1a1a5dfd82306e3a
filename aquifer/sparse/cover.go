package sparse

import "math"

// bipartite finds the fewest nodes that touch every cut edge: a maximum matching of the cut by Hopcroft & Karp (1973)
// and the cover that goes with it (König 1931). Its memory is kept from call to call.
type bipartite struct {
	left, right []int32 // nodes at the cut
	start, to   []int32 // left number -> right numbers
	mateOfLeft  []int32
	mateOfRight []int32
	layer       []int32
	queue       []int32
	next        []int32 // next edge to try of a left number
	seenRight   []bool
	stack       []int32
}

// smallestCover returns the nodes of a smallest cover of the edges between the sides of the part, left nodes first.
// boundary holds the left nodes that have neighbours on the right; its memory is used for the result. local is scratch
// by node.
func (b *bipartite) smallestCover(g *graph, side []uint8, local []int32, boundary []int32) []int32 {
	b.collect(g, side, local, boundary)
	b.match()
	return b.konig(boundary[:0])
}

func (b *bipartite) collect(g *graph, side []uint8, local []int32, boundary []int32) {
	b.left = append(b.left[:0], boundary...)
	b.right, b.start, b.to = b.right[:0], b.start[:0], b.to[:0]
	for _, v := range b.left {
		for _, u := range g.inside(v) {
			local[u] = -1
		}
	}
	for _, v := range b.left {
		b.start = append(b.start, int32(len(b.to)))
		for _, u := range g.inside(v) {
			if side[u] != sideRight {
				continue
			}
			if local[u] < 0 {
				local[u] = int32(len(b.right))
				b.right = append(b.right, u)
			}
			b.to = append(b.to, local[u])
		}
	}
	b.start = append(b.start, int32(len(b.to)))
	b.mateOfLeft = grow(b.mateOfLeft, len(b.left), -1)
	b.mateOfRight = grow(b.mateOfRight, len(b.right), -1)
}

func (b *bipartite) match() {
	for v := range b.left {
		for _, u := range b.to[b.start[v]:b.start[v+1]] {
			if b.mateOfRight[u] < 0 {
				b.mateOfRight[u], b.mateOfLeft[v] = int32(v), u
				break
			}
		}
	}
	b.layer = grow(b.layer, len(b.left), 0)
	b.next = grow(b.next, len(b.left), 0)
	for b.layers() {
		copy(b.next, b.start[:len(b.left)])
		for v := range b.left {
			if b.mateOfLeft[v] < 0 {
				b.augment(int32(v))
			}
		}
	}
}

// layers finds the distance of each left number from a free one; it tells whether a free right number can be reached.
func (b *bipartite) layers() bool {
	b.queue = b.queue[:0]
	for v := range b.left {
		b.layer[v] = math.MaxInt32
		if b.mateOfLeft[v] < 0 {
			b.layer[v] = 0
			b.queue = append(b.queue, int32(v))
		}
	}
	found := false
	for k := 0; k < len(b.queue); k++ {
		v := b.queue[k]
		for _, u := range b.to[b.start[v]:b.start[v+1]] {
			mate := b.mateOfRight[u]
			if mate < 0 {
				found = true
			} else if b.layer[mate] == math.MaxInt32 {
				b.layer[mate] = b.layer[v] + 1
				b.queue = append(b.queue, mate)
			}
		}
	}
	return found
}

// augment follows layers from the free left number v to a free right number and flips the path.
func (b *bipartite) augment(v int32) {
	b.stack = append(b.stack[:0], v)
	for len(b.stack) > 0 {
		v := b.stack[len(b.stack)-1]
		if b.next[v] == b.start[v+1] {
			b.layer[v] = math.MaxInt32
			b.stack = b.stack[:len(b.stack)-1]
			continue
		}
		u := b.to[b.next[v]]
		b.next[v]++
		mate := b.mateOfRight[u]
		if mate >= 0 {
			if b.layer[mate] == b.layer[v]+1 {
				b.stack = append(b.stack, mate)
			}
			continue
		}
		for k := len(b.stack) - 1; k >= 0; k-- {
			v := b.stack[k]
			u, b.mateOfLeft[v] = b.mateOfLeft[v], u
			b.mateOfRight[b.mateOfLeft[v]] = v
		}
		return
	}
}

// konig returns left numbers that cannot be reached by alternating paths from free left ones, and right ones that can.
func (b *bipartite) konig(out []int32) []int32 {
	b.seenRight = b.seenRight[:0]
	for range b.right {
		b.seenRight = append(b.seenRight, false)
	}
	b.queue = b.queue[:0]
	for v := range b.left {
		b.layer[v] = 0
		if b.mateOfLeft[v] < 0 {
			b.layer[v] = 1
			b.queue = append(b.queue, int32(v))
		}
	}
	for k := 0; k < len(b.queue); k++ {
		v := b.queue[k]
		for _, u := range b.to[b.start[v]:b.start[v+1]] {
			if b.seenRight[u] {
				continue
			}
			b.seenRight[u] = true
			if mate := b.mateOfRight[u]; mate >= 0 && b.layer[mate] == 0 {
				b.layer[mate] = 1
				b.queue = append(b.queue, mate)
			}
		}
	}
	for v, node := range b.left {
		if b.layer[v] == 0 {
			out = append(out, node)
		}
	}
	for u, node := range b.right {
		if b.seenRight[u] {
			out = append(out, node)
		}
	}
	return out
}
