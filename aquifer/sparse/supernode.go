package sparse

// Relaxed amalgamation (Ashcraft & Grimes 1989): a supernode joins its parent while the joined one has at most
// this many columns and at most this share of zeros among its entries. Measured as the fastest factor on triangle meshes.
var amalgamation = []struct {
	columns int32
	zeros   float64
}{{4, 1}, {8, 0.5}, {16, 0.25}, {48, 0.12}, {1 << 30, 0.05}}

// partition is the forest of supernodes: supernode s holds the columns first[s]..first[s+1]-1 and rows[s] rows,
// its own columns included.
type partition struct {
	first  []int32 // supernodes+1
	rows   []int32
	parent []int32 // -1 for roots
	of     []int32 // column -> supernode
}

// supernodes groups the columns of a postordered matrix and returns the groups in a new postorder together with the
// old numbers of the columns in their new order.
func supernodes(parent, count []int32) (partition, []int32) {
	n := int32(len(parent))
	var start []int32
	of := make([]int32, n)
	for j := range n {
		if j == 0 || parent[j-1] != j || count[j-1] != count[j]+1 {
			start = append(start, j)
		}
		of[j] = int32(len(start) - 1)
	}
	total := len(start)
	start = append(start, n)
	tree := make([]int32, total)
	columns, rows := make([]int32, total), make([]int32, total)
	for s := range total {
		tree[s] = -1
		if p := parent[start[s+1]-1]; p >= 0 {
			tree[s] = of[p]
		}
		columns[s], rows[s] = start[s+1]-start[s], count[start[s]]
	}
	into := amalgamate(tree, columns, rows)
	return regroup(start, tree, columns, rows, into)
}

// amalgamate decides which supernodes join their parent and updates columns, rows and tree of those that stay;
// into[s] is the supernode that s joins, itself where it stays.
func amalgamate(tree, columns, rows []int32) (into []int32) {
	total := len(tree)
	into = make([]int32, total)
	zeros := make([]int64, total)
	for s := range into {
		into[s] = int32(s)
	}
	entries := func(c, r int32) int64 { return int64(c)*int64(r) - int64(c)*int64(c-1)/2 }
	for s := range total {
		p := tree[s]
		if p < 0 {
			continue
		}
		c, r := columns[s]+columns[p], columns[s]+rows[p]
		joined := entries(c, r)
		empty := joined - entries(columns[s], rows[s]) - entries(columns[p], rows[p]) + zeros[s] + zeros[p]
		for _, rule := range amalgamation {
			if c <= rule.columns {
				if float64(empty) <= rule.zeros*float64(joined) {
					into[s] = p
					columns[p], rows[p], zeros[p] = c, r, empty
				}
				break
			}
		}
	}
	return into
}

// regroup numbers the supernodes that stay in postorder and lists the columns accordingly.
func regroup(start, tree, columns, rows, into []int32) (partition, []int32) {
	total := len(tree)
	number := make([]int32, total) // of those that stay
	kept := int32(0)
	for s := range total {
		if into[s] == int32(s) {
			number[s] = kept
			kept++
		}
	}
	for s := total - 1; s >= 0; s-- { // parents come after children
		into[s] = into[into[s]]
	}
	parent := make([]int32, kept)
	for s := range total {
		if into[s] == int32(s) {
			parent[number[s]] = -1
			if tree[s] >= 0 {
				parent[number[s]] = number[into[tree[s]]]
			}
		}
	}
	by := postorder(parent)
	place := invert(by)
	p := partition{first: make([]int32, kept+1), rows: make([]int32, kept), parent: relabel(parent, by), of: make([]int32, start[total])}
	for s := range total {
		if into[s] == int32(s) {
			k := place[number[s]]
			p.first[k+1], p.rows[k] = columns[s], rows[s]
		}
	}
	for k := range kept {
		p.first[k+1] += p.first[k]
	}
	at := append([]int32(nil), p.first...)
	old := make([]int32, start[total])
	for s := range total {
		k := place[number[into[s]]]
		for j := start[s]; j < start[s+1]; j++ {
			p.of[at[k]] = k
			old[at[k]] = j
			at[k]++
		}
	}
	return p, old
}

// rowLists returns the rows below the columns of each supernode, ascending: list s is index[ptr[s]:ptr[s+1]]. Row i is
// met by the supernodes on the paths from its entries up to its own (its row subtree).
func (p *partition) rowLists(g *graph, order, position []int32) (ptr []int, index []int32) {
	total := len(p.rows)
	ptr = make([]int, total+1)
	at := make([]int, total)
	seen := make([]int32, total)
	for s := range total {
		at[s], seen[s] = ptr[s], -1
		ptr[s+1] = ptr[s] + int(p.rows[s]-(p.first[s+1]-p.first[s]))
	}
	index = make([]int32, ptr[total])
	for i := range int32(g.n) {
		own := p.of[i]
		seen[own] = i
		for _, u := range g.all(order[i]) {
			j := position[u]
			if j >= i {
				continue
			}
			for s := p.of[j]; seen[s] != i; s = p.parent[s] {
				seen[s] = i
				index[at[s]] = i
				at[s]++
			}
		}
	}
	return ptr, index
}
