package sparse

import (
	"context"
	"sync"
)

// Where dissection stops and how it weighs its choices; measured on triangle meshes of 20,000 to a million nodes.
const (
	leafNodes    = 120  // parts up to this size are ordered by minimum degree
	parallelPart = 4000 // parts from this size on may be split by another worker
	fewDirection = 1000 // smaller parts are swept along x and y only
	sweepWindow  = 0.14 // the cut lies within this share of the median by count
	sweepMargin  = 0.08 // nodes further than this share outside of the window are not looked at
	largestShare = 0.68 // no side of a separator holds a larger share of its part after improvement
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
	side    []uint8    // node -> side within its part
	local   []int32    // node -> number in the boundary being covered
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

// dissect returns the nodes of g in elimination order. It changes the order within the lists of g.
func dissect(ctx context.Context, g *graph, x, y []float64, workers int) []int32 {
	n := g.n
	d := &dissection{g: g, side: make([]uint8, n), local: make([]int32, n), scratch: make([]int32, n), order: make([]int32, n),
		tokens: make(chan struct{}, max(0, workers-1)), ctx: ctx}
	d.spare.New = func() any { return &dissector{haloOf: make([]int32, n)} }
	runFixed(workers, len(directions), func(k int) {
		d.sweeps[k] = sweepOrder(x, y, directions[k])
		d.rank[k] = make([]int32, n)
		for p, v := range d.sweeps[k] {
			d.rank[k][v] = int32(p)
		}
	})
	w := d.spare.Get().(*dissector)
	d.split(w, 0, n)
	d.group.Wait()
	return d.order
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

// bestCut sweeps the part along each direction and returns the position with the smallest separator for its balance:
// nodes at positions before cut in that sweep are left.
func (d *dissection) bestCut(lo, hi int) (direction, cut int) {
	n := hi - lo
	window := int(float64(n) * sweepWindow)
	first, last := lo+n/2-window, lo+n/2+window
	from := max(lo, first-int(float64(n)*sweepMargin))
	count := len(directions)
	if n < fewDirection {
		count = 2
	}
	change := d.scratch[lo:hi]
	best := 0.0
	for k := range count {
		clear(change)
		rank := d.rank[k]
		for p := from; p < last; p++ {
			far := int32(0)
			for _, u := range d.g.inside(d.sweeps[k][p]) {
				far = max(far, rank[u])
			}
			if int(far) > p {
				change[p+1-lo]++
				if int(far)+1 < hi {
					change[int(far)+1-lo]--
				}
			}
		}
		size := int32(0)
		for c := from; c <= last && c < hi; c++ {
			size += change[c-lo]
			if c < first {
				continue
			}
			off := float64(2*(c-lo)-n) / float64(n)
			cost := (float64(size) + 1) * (1 + 2*off*off)
			if (k == 0 && c == first) || cost < best {
				best, direction, cut = cost, k, c
			}
		}
	}
	return direction, cut
}

// separate marks the sides of the part's nodes and returns how many lie left and right.
func (d *dissection) separate(w *dissector, direction, lo, hi, cut int) (left, right int) {
	sweep := d.sweeps[direction]
	for p := lo; p < cut; p++ {
		d.side[sweep[p]] = sideLeft
	}
	for p := cut; p < hi; p++ {
		d.side[sweep[p]] = sideRight
	}
	w.between = w.cover.smallestCover(d.g, d.side, d.local, sweep[lo:cut], w.between[:0])
	left, right = cut-lo, hi-cut
	for _, v := range w.between {
		if d.side[v] == sideLeft {
			left--
		} else {
			right--
		}
		d.side[v] = sideBetween
	}
	return w.mover.improve(d.g, d.side, w.between, left, right)
}

// divide rearranges every sweep of the part into left, right, between, and writes the separator into the result.
func (d *dissection) divide(lo, hi, left, right int) {
	for k := range d.sweeps {
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
	for _, v := range d.sweeps[0][lo+left+right : hi] {
		d.g.detach(v)
	}
	copy(d.order[lo+left+right:hi], d.sweeps[0][lo+left+right:hi])
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
