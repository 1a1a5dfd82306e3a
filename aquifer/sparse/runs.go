package sparse

// subtreeRows bounds the rows of the subtrees that whole solutions take in one go: a panel's rows of one, and its part of the
// factor, stay in the second-level cache. Measured on meshes of 100,000 and a million nodes.
const subtreeRows = 2048

// places tells where the rows that supernodes touch stand in a panel: the first column of each, and each of its rows below in
// the sequence of Symbolic.rowPtr.
type places struct {
	first []int32
	rows  []int32
}

// run is a piece of the sequence of supernodes: a whole subtree with up to subtreeRows rows, or one supernode above those.
type run struct {
	first, last int32
	subtree     bool
}

// schedule is how whole solutions use a panel. Rows of subtrees take turns in the first places; the rows above, which
// several subtrees share, have one each behind them. So a panel holds a small part of the unknowns.
type schedule struct {
	places
	runs  []run
	runOf []int32 // supernode -> run
	total int     // places
}

// newSchedule puts places in the stead of positions in rowIndex.
func newSchedule(s *Symbolic, rowIndex []int32) schedule {
	t := &s.nodes
	count := len(t.rows)
	lowest := make([]int32, count) // first supernode of the subtree
	for k := range lowest {
		lowest[k] = int32(k)
	}
	for k := range count {
		if up := t.parent[k]; up >= 0 {
			lowest[up] = min(lowest[up], lowest[k])
		}
	}
	rowsUnder := func(k int32) int32 { return t.first[k+1] - t.first[lowest[k]] }
	c := schedule{places: places{first: make([]int32, count), rows: rowIndex}, runOf: make([]int32, count)}
	shared := int32(0)
	for k := range int32(count) {
		up := t.parent[k]
		small := rowsUnder(k) <= subtreeRows
		switch {
		case small && up >= 0 && rowsUnder(up) <= subtreeRows:
		case small:
			c.runs = append(c.runs, run{lowest[k], k, true})
			shared = max(shared, rowsUnder(k))
		default:
			c.runs = append(c.runs, run{k, k, false})
		}
	}
	place := make([]int32, s.pattern.N) // of positions
	next := shared
	for number, r := range c.runs {
		at := int32(0)
		if !r.subtree {
			at = next
			next += t.first[r.last+1] - t.first[r.first]
		}
		for k := r.first; k <= r.last; k++ {
			c.runOf[k] = int32(number)
			c.first[k] = at + t.first[k] - t.first[r.first]
		}
		for i := t.first[r.first]; i < t.first[r.last+1]; i++ {
			place[i] = at + i - t.first[r.first]
		}
	}
	for q, i := range rowIndex {
		c.rows[q] = place[i]
	}
	c.total = int(next)
	return c
}
