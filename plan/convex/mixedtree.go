package convex

import (
	"container/heap"
	"math"
)

// mixedNode is an open part of the tree: the moves of bounds on the way from the root, the basis of its parent, and what is known.
type mixedNode struct {
	parent   *mixedNode
	column   int // the bound that this node moves
	upper    bool
	value    float64
	bound    float64 // no plan below is cheaper
	estimate float64 // guess of the cheapest plan below
	depth    int
	number   int
	start    *lpState // nil for the root and for a node that is looked at right after its parent
	part     float64  // distance from the parent's value to the bound, for the pseudo-costs
	proof    int      // node of the proof
	gone     bool
}

// boundHeap has the node with the smallest bound first, estimateHeap that with the smallest estimate.
type boundHeap []*mixedNode

func (h boundHeap) Len() int { return len(h) }
func (h boundHeap) Less(a, b int) bool {
	if h[a].bound != h[b].bound {
		return h[a].bound < h[b].bound
	}
	if h[a].estimate != h[b].estimate {
		return h[a].estimate < h[b].estimate
	}
	return h[a].number < h[b].number
}
func (h boundHeap) Swap(a, b int) { h[a], h[b] = h[b], h[a] }
func (h *boundHeap) Push(v any)   { *h = append(*h, v.(*mixedNode)) }
func (h *boundHeap) Pop() any     { return popNode((*[]*mixedNode)(h)) }

type estimateHeap []*mixedNode

func (h estimateHeap) Len() int { return len(h) }
func (h estimateHeap) Less(a, b int) bool {
	if h[a].estimate != h[b].estimate {
		return h[a].estimate < h[b].estimate
	}
	return h[a].number < h[b].number
}
func (h estimateHeap) Swap(a, b int) { h[a], h[b] = h[b], h[a] }
func (h *estimateHeap) Push(v any)   { *h = append(*h, v.(*mixedNode)) }
func (h *estimateHeap) Pop() any     { return popNode((*[]*mixedNode)(h)) }

func popNode(list *[]*mixedNode) *mixedNode {
	last := len(*list) - 1
	v := (*list)[last]
	(*list)[last] = nil
	*list = (*list)[:last]
	return v
}

// openNodes is the set of open nodes, reachable by bound and by estimate.
type openNodes struct {
	byBound    boundHeap
	byEstimate estimateHeap
	count      int
}

func (o *openNodes) add(n *mixedNode) {
	heap.Push(&o.byBound, n)
	heap.Push(&o.byEstimate, n)
	o.count++
}

// leastBound returns the smallest bound of all open nodes, +Inf without any.
func (o *openNodes) leastBound() float64 {
	for len(o.byBound) > 0 && o.byBound[0].gone {
		heap.Pop(&o.byBound)
	}
	if len(o.byBound) == 0 {
		return math.Inf(1)
	}
	return o.byBound[0].bound
}

// take removes and returns the node with the smallest bound or estimate; nil without any.
func (o *openNodes) take(estimate bool) *mixedNode {
	for {
		var n *mixedNode
		switch {
		case estimate && len(o.byEstimate) > 0:
			n = heap.Pop(&o.byEstimate).(*mixedNode)
		case !estimate && len(o.byBound) > 0:
			n = heap.Pop(&o.byBound).(*mixedNode)
		default:
			return nil
		}
		if !n.gone {
			n.gone = true
			o.count--
			return n
		}
	}
}

// boxOf narrows b, the bounds of the root, by the moves on the way to n; it returns the columns moved.
func (n *mixedNode) boxOf(b *box) []int {
	var columns []int
	for ; n.parent != nil; n = n.parent {
		if n.upper {
			b.hi[n.column] = math.Min(b.hi[n.column], n.value)
		} else {
			b.lo[n.column] = math.Max(b.lo[n.column], n.value)
		}
		columns = append(columns, n.column)
	}
	return columns
}
