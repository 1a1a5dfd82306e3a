package sparse

import "math"

// What a number stands for in the quotient graph of minimum degree.
const (
	kindVariable = uint8(iota) // not eliminated, stands for weight nodes
	kindElement                // an eliminated pivot: a clique of the variables in its list
	kindGone                   // absorbed into another variable or element, or postponed
)

// Nodes with more neighbours than postponeFactor sqrt(n), and postponeLeast at least, go last: they meet nearly every
// pivot, so that their place does not matter, and they would make the work quadratic.
const (
	postponeFactor = 10
	postponeLeast  = 16
)

// minDegree orders a graph by approximate minimum degree (Amestoy, Davis & Duff 1996) on a quotient graph, with
// element absorption, mass elimination and indistinguishable variables. Numbers from variables on are a halo: they
// count in degrees and are never eliminated. The value keeps its memory from call to call.
type minDegree struct {
	variables, total int
	pool             []int32 // lists: of a variable its elements, then its variables; of an element its variables
	used             int32
	start, length    []int32
	elements         []int32 // number of elements at the front of a variable's list
	weight           []int32 // nodes that a variable stands for; negative while it is in the pivot's list
	degree           []int32
	mark             []int32 // of an element e: tag + |Le \ Lpivot|
	tag              int32
	largest          int32 // largest degree of an element so far
	kind             []uint8
	head, next, prev []int32 // lists of variables by degree; next and prev hold hash chains during a pivot
	hashHead         []int32
	member, tail     []int32 // chains of nodes that follow a variable in the ordering
	lowest           int32
	eliminated       int
	pivots           []int32
	postponed        []int32
}

// order returns the numbers 0..variables-1 in elimination order. Number v has the neighbours to[start[v]:start[v+1]].
func (m *minDegree) order(variables int, start, to []int32) []int32 {
	m.load(variables, start, to)
	for m.eliminated < m.variables {
		for m.head[m.lowest] < 0 {
			m.lowest++
		}
		m.eliminate(m.head[m.lowest])
	}
	order := make([]int32, 0, variables)
	for _, p := range m.pivots {
		for v := p; v >= 0; v = m.member[v] {
			order = append(order, v)
		}
	}
	return append(order, m.postponed...)
}

func grow(s []int32, n int, value int32) []int32 {
	if cap(s) < n {
		s = make([]int32, n+n/2)
	}
	s = s[:n]
	for i := range s {
		s[i] = value
	}
	return s
}

func (m *minDegree) load(variables int, start, to []int32) {
	n := len(start) - 1
	m.variables, m.total = variables, n
	m.start, m.length = grow(m.start, n, 0), grow(m.length, n, 0)
	m.elements, m.weight, m.degree = grow(m.elements, n, 0), grow(m.weight, n, 1), grow(m.degree, n, 0)
	m.mark, m.tag = grow(m.mark, n, 0), 1
	m.head, m.next, m.prev = grow(m.head, n+1, -1), grow(m.next, n, -1), grow(m.prev, n, -1)
	m.hashHead, m.member, m.tail = grow(m.hashHead, n, -1), grow(m.member, n, -1), grow(m.tail, n, 0)
	if cap(m.kind) < n {
		m.kind = make([]uint8, n+n/2)
	}
	m.kind = m.kind[:n]
	clear(m.kind)
	m.pool = grow(m.pool, len(to)+len(to)/4+4*n+16, 0)
	copy(m.pool, to)
	m.used = int32(len(to))
	m.pivots, m.postponed = m.pivots[:0], m.postponed[:0]
	m.lowest, m.eliminated, m.largest = 0, 0, 0
	limit := int32(max(postponeLeast, postponeFactor*math.Sqrt(float64(n))))
	for v := n - 1; v >= 0; v-- {
		m.start[v], m.length[v] = start[v], start[v+1]-start[v]
		m.degree[v], m.tail[v] = m.length[v], int32(v)
		if v >= variables {
			continue
		}
		if m.length[v] > limit {
			m.kind[v], m.weight[v] = kindGone, 0
			m.eliminated++
			continue
		}
		m.insert(int32(v))
	}
	for v := range variables {
		if m.kind[v] == kindGone {
			m.postponed = append(m.postponed, int32(v))
		}
	}
}

func (m *minDegree) insert(v int32) {
	d := m.degree[v]
	first := m.head[d]
	m.next[v], m.prev[v], m.head[d] = first, -1, v
	if first >= 0 {
		m.prev[first] = v
	}
}

func (m *minDegree) remove(v int32) {
	before, after := m.prev[v], m.next[v]
	if after >= 0 {
		m.prev[after] = before
	}
	if before >= 0 {
		m.next[before] = after
	} else {
		m.head[m.degree[v]] = after
	}
}

// follow puts the nodes of v behind those of u in the ordering.
func (m *minDegree) follow(u, v int32) {
	m.member[m.tail[u]] = v
	m.tail[u] = m.tail[v]
	m.kind[v], m.weight[v], m.elements[v] = kindGone, 0, 0
}

// eliminate makes an element of variable p and updates the variables around it.
func (m *minDegree) eliminate(p int32) {
	m.remove(p)
	m.pivots = append(m.pivots, p)
	pivotWeight := m.weight[p]
	m.eliminated += int(pivotWeight)
	fresh := m.elements[p] > 0
	if fresh && int(m.used)+int(m.degree[p]) > len(m.pool) {
		m.compact()
	}
	members := m.gather(p)
	m.kind[p] = kindElement
	m.measure(p, members)
	members, pivotWeight = m.update(p, members, pivotWeight)
	m.merge(members)
	m.restore(p, members, pivotWeight, fresh)
}

// gather builds the list of element p from its variables and those of its elements, which it absorbs.
func (m *minDegree) gather(p int32) []int32 {
	m.weight[p] = -m.weight[p]
	sum := int32(0)
	take := func(out int32, list []int32) int32 {
		for _, v := range list {
			w := m.weight[v]
			if w <= 0 {
				continue
			}
			sum += w
			m.weight[v] = -w
			m.pool[out] = v
			out++
			if int(v) < m.variables {
				m.remove(v)
			}
		}
		return out
	}
	a, ne, length := m.start[p], m.elements[p], m.length[p]
	first, out := a, a
	if ne > 0 {
		first, out = m.used, m.used
		for k := a; k < a+ne; k++ {
			e := m.pool[k]
			out = take(out, m.pool[m.start[e]:m.start[e]+m.length[e]])
			m.kind[e], m.mark[e] = kindGone, 0
		}
	}
	out = take(out, m.pool[a+ne:a+length])
	if ne > 0 {
		m.used = out
	}
	m.start[p], m.length[p], m.degree[p], m.elements[p] = first, out-first, sum, 0
	m.largest = max(m.largest, sum)
	return m.pool[first:out]
}

// measure sets mark[e] - tag = |Le \ Lp| for every element e that touches a variable of the pivot.
func (m *minDegree) measure(p int32, members []int32) {
	if m.tag > math.MaxInt32-2*int32(m.total)-2 {
		clear(m.mark)
		m.tag = 1
	}
	for _, v := range members {
		w := -m.weight[v]
		a := m.start[v]
		for _, e := range m.pool[a : a+m.elements[v]] {
			if m.kind[e] != kindElement {
				continue
			}
			if m.mark[e] >= m.tag {
				m.mark[e] -= w
			} else {
				m.mark[e] = m.degree[e] + m.tag - w
			}
		}
	}
}

// update prunes the list of each variable of the pivot, finds its degree outside of the pivot, eliminates those that
// have none, and files the rest by a hash of their lists.
func (m *minDegree) update(p int32, members []int32, pivotWeight int32) ([]int32, int32) {
	for _, v := range members {
		a := m.start[v]
		out, d, hash := a, int32(0), uint32(0)
		end := a + m.length[v]
		for k := a; k < a+m.elements[v]; k++ {
			e := m.pool[k]
			if m.kind[e] != kindElement {
				continue
			}
			if outside := m.mark[e] - m.tag; outside > 0 {
				d += outside
				m.pool[out] = e
				out++
				hash += uint32(e)
			} else {
				m.kind[e], m.mark[e] = kindGone, 0
			}
		}
		firstVariable := out
		for k := a + m.elements[v]; k < end; k++ {
			u := m.pool[k]
			if w := m.weight[u]; w > 0 {
				d += w
				m.pool[out] = u
				out++
				hash += uint32(u)
			}
		}
		if d == 0 && int(v) < m.variables {
			w := -m.weight[v]
			m.degree[p] -= w
			pivotWeight += w
			m.eliminated += int(w)
			m.follow(p, v)
			continue
		}
		m.degree[v] = min(m.degree[v], d)
		m.elements[v] = firstVariable - a + 1
		m.pool[out] = m.pool[firstVariable]
		m.pool[firstVariable] = m.pool[a]
		m.pool[a] = p
		m.length[v] = out - a + 1
		if int(v) < m.variables {
			h := int32(hash % uint32(m.total))
			m.prev[v] = h
			m.next[v] = m.hashHead[h]
			m.hashHead[h] = v
		}
	}
	m.tag += m.largest + 1
	return members, pivotWeight
}

// merge joins variables of the pivot whose lists are equal.
func (m *minDegree) merge(members []int32) {
	for _, v := range members {
		if m.weight[v] >= 0 || int(v) >= m.variables {
			continue
		}
		h := m.prev[v]
		u := m.hashHead[h]
		m.hashHead[h] = -1
		for ; u >= 0 && m.next[u] >= 0; u = m.next[u] {
			length, ne, a := m.length[u], m.elements[u], m.start[u]
			for _, x := range m.pool[a+1 : a+length] {
				m.mark[x] = m.tag
			}
			last := u
			for w := m.next[u]; w >= 0; w = m.next[w] {
				if m.length[w] != length || m.elements[w] != ne || !m.allMarked(w) {
					last = w
					continue
				}
				m.weight[u] += m.weight[w]
				m.follow(u, w)
				m.next[last] = m.next[w]
			}
			m.tag++
		}
	}
}

func (m *minDegree) allMarked(v int32) bool {
	a := m.start[v]
	for _, x := range m.pool[a+1 : a+m.length[v]] {
		if m.mark[x] != m.tag {
			return false
		}
	}
	return true
}

// restore files the remaining variables of the pivot by their new degree.
func (m *minDegree) restore(p int32, members []int32, pivotWeight int32, fresh bool) {
	out := m.start[p]
	left := int32(m.total - m.eliminated)
	for _, v := range members {
		w := -m.weight[v]
		if w <= 0 {
			continue
		}
		m.weight[v] = w
		d := max(0, min(m.degree[v]+m.degree[p]-w, left-w))
		m.degree[v] = d
		if int(v) < m.variables {
			m.insert(v)
			m.lowest = min(m.lowest, d)
		}
		m.pool[out] = v
		out++
	}
	m.weight[p] = pivotWeight
	m.length[p] = out - m.start[p]
	if fresh {
		m.used = out
	}
	if m.length[p] == 0 {
		m.kind[p] = kindGone
	}
}

// compact moves the live lists to the front of the pool.
func (m *minDegree) compact() {
	for v := range m.total {
		if m.kind[v] != kindGone && m.length[v] > 0 {
			a := m.start[v]
			m.start[v] = m.pool[a]
			m.pool[a] = -int32(v) - 1
		}
	}
	out := int32(0)
	for k := int32(0); k < m.used; {
		v := -m.pool[k] - 1
		if v < 0 {
			k++
			continue
		}
		m.pool[out] = m.start[v]
		m.start[v] = out
		copy(m.pool[out+1:], m.pool[k+1:k+m.length[v]])
		out += m.length[v]
		k += m.length[v]
	}
	m.used = out
}
