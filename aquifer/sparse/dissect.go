package sparse

import (
	"context"
	"sync"
)

// Where dissection stops and how it weighs its choices; measured on triangle meshes of 20,000 to a million nodes.
const (
	leafNodes     = 120  // parts up to this size are ordered by minimum degree
	parallelPart  = 4000 // parts from this size on may be split by another worker
	sweepWindow   = 0.2  // the cut lies within this share of the median by count
	sweepMargin   = 0.08 // nodes further than this share before the window are not looked at
	fewDirections = 4000 // parts below this size are swept along x and y only
	imbalanceCost = 0.5  // a side with share s of the nodes makes a separator 1 + imbalanceCost (2s-1)² as dear
	largestShare  = 0.68 // no side of a separator holds a larger share of its part after improvement
)

// The side of a separator on which a node lies.
const (
	sideLeft = uint8(iota)
	sideRight
	sideBetween
)

// dissection orders a graph by nested dissection on coordinates. A part is a range of positions [lo, hi) of the final
// ordering; each of the sweeps keeps the part's nodes in its own order in that range, so parts share no memory.
type dissection struct {
	g       *graph
	sweeps  [4][]int32 // position -> node, in sweep order within each part
	rank    [4][]int32 // node -> position in that sweep
	far     [4][]int32 // node -> last in that sweep of itself and its neighbours in the part
	side    []uint8    // node -> side within its part
	local   []int32    // node -> number in the boundary being covered, then gain of a move
	scratch []int32
	order   []int32 // position -> node: the result
	tokens  chan struct{}
	group   sync.WaitGroup
	ctx     context.Context
	spare   sync.Pool // *dissector
}

// dissector is the memory of one worker.
type dissector struct {
	cover     bipartite
	mover     mover
	degrees   minDegree
	haloOf    []int32 // node -> local number in the leaf at hand, valid where haloOwner matches
	leafStart []int32
	leafTo    []int32
	halo      []int32
	between   []int32
}

// dissect numbers the nodes of a matrix for locality and returns its graph with the nodes in elimination order.
func dissect(ctx context.Context, p *Pattern, x, y []float64, workers int) (*graph, []int32) {
	n := p.N
	d := &dissection{side: make([]uint8, n), scratch: make([]int32, n), order: make([]int32, n),
		tokens: make(chan struct{}, max(0, workers-1)), ctx: ctx}
	d.local = make([]int32, n)
	d.spare.New = func() any { return &dissector{haloOf: make([]int32, n)} }
	runFixed(workers, len(directions), func(k int) { d.sweeps[k] = sweepOrder(x, y, directions[k]) })
	rows := nearby(d.sweeps[0], d.sweeps[1])
	node := invert(rows)
	d.g = newGraph(p, rows)
	runFixed(workers, len(directions), func(k int) {
		for p, row := range d.sweeps[k] {
			d.sweeps[k][p] = node[row]
		}
		d.rank[k] = invert(d.sweeps[k])
		d.far[k] = make([]int32, n)
		for v := range int32(n) {
			d.findFar(k, v)
		}
	})
	w := d.spare.Get().(*dissector)
	d.split(w, 0, n)
	d.group.Wait()
	return d.g, d.order
}

// directionsIn returns along how many directions a part of n nodes is swept.
func directionsIn(n int) int {
	if n < fewDirections {
		return 2
	}
	return len(directions)
}

// split orders the part [lo, hi).
func (d *dissection) split(w *dissector, lo, hi int) {
	for hi-lo > leafNodes {
		if d.ctx.Err() != nil {
			return
		}
		direction, cut := d.bestCut(lo, hi)
		left, right := d.separate(w, direction, lo, hi, cut)
		if left == 0 || right == 0 {
			break
		}
		d.divide(lo, hi, left, right)
		middle := lo + left
		if left >= parallelPart {
			select {
			case d.tokens <- struct{}{}:
				d.group.Add(1)
				go func(lo, hi int) {
					defer d.group.Done()
					other := d.spare.Get().(*dissector)
					d.split(other, lo, hi)
					d.spare.Put(other)
					<-d.tokens
				}(lo, middle)
			default:
				d.split(w, lo, middle)
			}
		} else {
			d.split(w, lo, middle)
		}
		lo, hi = middle, middle+right
	}
	d.orderLeaf(w, lo, hi)
}

// findFar sets the last in sweep k of v and its neighbours in the part.
func (d *dissection) findFar(k int, v int32) {
	rank := d.rank[k]
	far := v
	for _, u := range d.g.inside(v) {
		if rank[u] > rank[far] {
			far = u
		}
	}
	d.far[k][v] = far
}

// bestCut sweeps the part along each direction and returns the position with the smallest separator for its balance:
// nodes at positions before cut in that sweep are left. A node counts in the separators of the positions between it and
// the last of its neighbours.
func (d *dissection) bestCut(lo, hi int) (direction, cut int) {
	n := hi - lo
	window := int(float64(n) * sweepWindow)
	first, last := lo+n/2-window, lo+n/2+window
	from := max(lo, first-int(float64(n)*sweepMargin))
	change := d.scratch[lo:hi]
	best := 0.0
	for k := range directionsIn(n) {
		clear(change[from-lo : last-lo+2])
		rank, far := d.rank[k], d.far[k]
		for p, v := range d.sweeps[k][from:last] {
			p += from - lo + 1
			q := int(rank[far[v]]) - lo + 1
			change[p]++
			change[min(q, last-lo+1)]--
		}
		size := int32(0)
		for c := from; c <= last; c++ {
			size += change[c-lo]
			if c < first {
				continue
			}
			off := float64(2*(c-lo)-n) / float64(n)
			cost := (float64(size) + 1) * (1 + imbalanceCost*off*off)
			if (k == 0 && c == first) || cost < best {
				best, direction, cut = cost, k, c
			}
		}
	}
	return direction, cut
}

// separate marks the sides of the part's nodes and returns how many lie left and right.
func (d *dissection) separate(w *dissector, direction, lo, hi, cut int) (left, right int) {
	sweep, rank, far := d.sweeps[direction], d.rank[direction], d.far[direction]
	w.between = w.between[:0]
	for _, v := range sweep[lo:cut] {
		d.side[v] = sideLeft
		if int(rank[far[v]]) >= cut {
			w.between = append(w.between, v)
		}
	}
	for _, v := range sweep[cut:hi] {
		d.side[v] = sideRight
	}
	w.between = w.cover.smallestCover(d.g, d.side, d.local, w.between)
	left, right = cut-lo, hi-cut
	for _, v := range w.between {
		if d.side[v] == sideLeft {
			left--
		} else {
			right--
		}
		d.side[v] = sideBetween
	}
	return w.mover.improve(d.g, d.side, d.local, w.between, left, right)
}

// divide rearranges every sweep of the part into left, right, between, and writes the separator into the result.
func (d *dissection) divide(lo, hi, left, right int) {
	count := directionsIn(hi - lo)
	for k := range count {
		sweep, rank, spare := d.sweeps[k], d.rank[k], d.scratch[lo:hi]
		a, b, c := lo, 0, right
		for p := lo; p < hi; p++ {
			v := sweep[p]
			switch d.side[v] {
			case sideLeft:
				sweep[a] = v
				rank[v] = int32(a)
				a++
			case sideRight:
				spare[b] = v
				rank[v] = int32(lo + left + b)
				b++
			default:
				spare[c] = v
				c++
			}
		}
		copy(sweep[a:hi], spare[:c])
	}
	between := d.order[lo+left+right : hi]
	copy(between, d.sweeps[0][lo+left+right:hi])
	for _, v := range between {
		d.detach(v, count)
	}
}

// detach takes a node of a separator out of its part, which is swept along count directions.
func (d *dissection) detach(v int32, count int) {
	neighbours := d.g.inside(v)
	d.g.detach(v)
	for _, u := range neighbours {
		for k := range d.far[:count] {
			if d.far[k][u] == v {
				d.findFar(k, u)
			}
		}
	}
}

// orderLeaf orders the part by minimum degree within its halo.
func (d *dissection) orderLeaf(w *dissector, lo, hi int) {
	nodes := d.sweeps[0][lo:hi]
	for i, v := range nodes {
		w.haloOf[v] = int32(i + 1)
	}
	w.halo = w.halo[:0]
	w.leafStart, w.leafTo = w.leafStart[:0], w.leafTo[:0]
	for _, v := range nodes {
		w.leafStart = append(w.leafStart, int32(len(w.leafTo)))
		for _, u := range d.g.all(v) {
			if w.haloOf[u] == 0 {
				w.halo = append(w.halo, u)
				w.haloOf[u] = int32(len(nodes) + len(w.halo))
			}
			w.leafTo = append(w.leafTo, w.haloOf[u]-1)
		}
	}
	for _, v := range w.halo {
		w.leafStart = append(w.leafStart, int32(len(w.leafTo)))
		for _, u := range d.g.all(v) {
			if i := w.haloOf[u]; i > 0 && int(i) <= len(nodes) {
				w.leafTo = append(w.leafTo, i-1)
			}
		}
	}
	w.leafStart = append(w.leafStart, int32(len(w.leafTo)))
	for p, i := range w.degrees.order(len(nodes), w.leafStart, w.leafTo) {
		d.order[lo+p] = nodes[i]
	}
	for _, v := range nodes {
		w.haloOf[v] = 0
	}
	for _, v := range w.halo {
		w.haloOf[v] = 0
	}
}
