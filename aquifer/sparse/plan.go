package sparse

import (
	"cmp"
	"slices"
)

// The forest of supernodes is cut into tasks: whole subtrees with up to 1/tasksWanted of the work, and every supernode
// above them as a task of its own. Both numbers are fixed, so the tasks do not depend on the number of workers.
const (
	tasksWanted = 96
	leastTask   = 400e3 // work below which a subtree is not cut further; about 0.1 ms
)

// plan is the task graph of a factorisation.
type plan struct {
	first, last []int32 // task -> its supernodes, first..last; last is its root
	parent      []int32 // task -> task that waits for it, -1 for none
	of          []int32 // supernode -> task
	starts      []int32 // tasks without children, heaviest last
	children    []int32 // supernode -> first child, -1 for none
	sibling     []int32 // supernode -> next child of the same parent, -1 for none
	odd         []bool  // supernode -> depth is odd: which of the two stacks holds its update matrix
	stack       [2]int  // largest size of each stack over all tasks
	waiting     int64   // largest total of update matrices that can wait between tasks
}

func newPlan(s *Symbolic) plan {
	t := &s.nodes
	total := len(t.rows)
	p := plan{of: make([]int32, total), children: make([]int32, total), sibling: make([]int32, total), odd: make([]bool, total)}
	work := make([]float64, total) // of the subtree
	start := make([]int32, total)  // first supernode of the subtree
	for k := range total {
		p.children[k], p.sibling[k], start[k] = -1, -1, int32(k)
	}
	all := 0.0
	for k := total - 1; k >= 0; k-- {
		if up := t.parent[k]; up >= 0 {
			p.sibling[k], p.children[up] = p.children[up], int32(k)
			p.odd[k] = !p.odd[up]
		}
	}
	for k := range total {
		nc, nr := s.shape(k)
		own := frontFlops(nr, nc) + 10*float64(nr)*float64(nr) + 1000
		work[k] += own
		all += own
		if up := t.parent[k]; up >= 0 {
			work[up] += work[k]
			start[up] = min(start[up], start[k])
		}
	}
	small := max(all/tasksWanted, leastTask)
	for k := range total {
		up := t.parent[k]
		if work[k] <= small && up >= 0 && work[up] <= small {
			continue // part of a larger subtree
		}
		first := int32(k)
		if work[k] <= small {
			first = start[k]
		}
		for q := first; q <= int32(k); q++ {
			p.of[q] = int32(len(p.first))
		}
		p.first, p.last = append(p.first, first), append(p.last, int32(k))
	}
	p.link(s, work)
	p.measure(s)
	return p
}

// link finds the parents of the tasks and those that can start at once.
func (p *plan) link(s *Symbolic, work []float64) {
	p.parent = make([]int32, len(p.first))
	waits := make([]bool, len(p.first))
	for t, root := range p.last {
		p.parent[t] = -1
		if up := s.nodes.parent[root]; up >= 0 {
			p.parent[t] = p.of[up]
			waits[p.of[up]] = true
		}
	}
	for t := len(p.first) - 1; t >= 0; t-- {
		if !waits[t] {
			p.starts = append(p.starts, int32(t))
		}
	}
	slices.SortStableFunc(p.starts, func(a, b int32) int { return cmp.Compare(work[p.last[a]], work[p.last[b]]) })
}

// measure finds how large the stacks get, and the largest total of update matrices between tasks: at any time those
// that wait belong to tasks none of which is below another.
func (p *plan) measure(s *Symbolic) {
	below := make([]int64, len(p.first))  // largest total within the tasks under a task
	inputs := make([]int64, len(p.first)) // update matrices that a task takes
	for t := range p.first {
		var size [2]int
		for k := p.first[t]; k <= p.last[t]; k++ {
			side := 0
			if p.odd[k] {
				side = 1
			}
			if k < p.last[t] {
				size[side] += s.updateSize(int(k))
				p.stack[side] = max(p.stack[side], size[side])
			}
			if p.first[t] < p.last[t] {
				for c := p.children[k]; c >= 0; c = p.sibling[c] {
					size[1-side] -= s.updateSize(int(c))
				}
			}
		}
		// While a task runs, its own update matrix and those that it takes exist together.
		own := int64(s.updateSize(int(p.last[t])))
		most := max(below[t], inputs[t]+own)
		if up := p.parent[t]; up >= 0 {
			below[up] += most
			inputs[up] += own
		} else {
			p.waiting += most
		}
	}
}

// updateSize returns the number of entries of the update matrix of supernode k.
func (s *Symbolic) updateSize(k int) int {
	m := s.rowPtr[k+1] - s.rowPtr[k]
	return m * m
}
