package sparse

// eliminationTree returns the parent of each position, -1 for roots, of the matrix ordered so that position k holds
// node order[k] (Liu 1990, with path compression). position is the inverse of order.
func eliminationTree(g *graph, order, position []int32) []int32 {
	parent := make([]int32, g.n)
	ancestor := make([]int32, g.n)
	for i := range int32(g.n) {
		parent[i], ancestor[i] = -1, -1
		for _, u := range g.all(order[i]) {
			j := position[u]
			for j < i {
				next := ancestor[j]
				ancestor[j] = i
				if next < 0 {
					parent[j] = i
					break
				}
				j = next
			}
		}
	}
	return parent
}

// postorder returns the numbers of a forest so that every subtree is a run that ends with its root; children keep
// their order.
func postorder(parent []int32) []int32 {
	n := len(parent)
	head, next := make([]int32, n), make([]int32, n)
	for v := range head {
		head[v] = -1
	}
	root := int32(-1)
	for v := n - 1; v >= 0; v-- {
		if p := parent[v]; p >= 0 {
			next[v], head[p] = head[p], int32(v)
		} else {
			next[v], root = root, int32(v)
		}
	}
	out := make([]int32, 0, n)
	var stack []int32
	for ; root >= 0; root = next[root] {
		stack = append(stack, root)
		for len(stack) > 0 {
			v := stack[len(stack)-1]
			if child := head[v]; child >= 0 {
				head[v] = next[child]
				stack = append(stack, child)
				continue
			}
			out = append(out, v)
			stack = stack[:len(stack)-1]
		}
	}
	return out
}

// relabel renumbers a forest so that new number k stands for old number by[k].
func relabel(parent, by []int32) []int32 {
	inverse := invert(by)
	out := make([]int32, len(parent))
	for k, v := range by {
		out[k] = -1
		if p := parent[v]; p >= 0 {
			out[k] = inverse[p]
		}
	}
	return out
}

func invert(order []int32) []int32 {
	position := make([]int32, len(order))
	for k, v := range order {
		position[v] = int32(k)
	}
	return position
}

// columnCounts returns the number of entries of each column of L, diagonal included, for a matrix in postorder
// (Gilbert, Ng & Peyton 1994): each leaf of a row subtree adds a path, least common ancestors take away overlaps.
func columnCounts(g *graph, order, position, parent []int32) []int32 {
	n := g.n
	count := make([]int32, n)
	first := make([]int32, n)    // first descendant
	farthest := make([]int32, n) // of row i: largest first descendant among the leaves so far
	previous := make([]int32, n) // of row i: last leaf
	ancestor := make([]int32, n)
	for j := range int32(n) {
		first[j], farthest[j], previous[j], ancestor[j] = -1, -1, -1, j
	}
	for k := range int32(n) {
		if first[k] < 0 {
			count[k] = 1
		}
		for j := k; j >= 0 && first[j] < 0; j = parent[j] {
			first[j] = k
		}
	}
	for j := range int32(n) {
		if parent[j] >= 0 {
			count[parent[j]]--
		}
		for _, u := range g.all(order[j]) {
			i := position[u]
			if i <= j || first[j] <= farthest[i] {
				continue
			}
			farthest[i] = first[j]
			count[j]++
			if last := previous[i]; last >= 0 {
				q := last
				for q != ancestor[q] {
					q = ancestor[q]
				}
				for s := last; s != q; {
					s, ancestor[s] = ancestor[s], q
				}
				count[q]--
			}
			previous[i] = j
		}
		if parent[j] >= 0 {
			ancestor[j] = parent[j]
		}
	}
	for j := range n {
		if parent[j] >= 0 {
			count[parent[j]] += count[j]
		}
	}
	return count
}
