package convex

import "sort"

// In a large problem most rows never bind. The dual method then follows the values of the watched rows only while boxed columns pass
// from bound to bound, which for every row that is followed reads an entry of each such column. The other values are solved for when no
// watched row is violated any more, and the most violated rows join, until there is none.

const (
	// watchFrom is the number of entries from which on rows are watched: below it the whole matrix is near at hand.
	watchFrom = 100_000
	// watchShare is the part of the rows that joins at once, at least watchLeast.
	watchShare = 8
	watchLeast = 16
)

// watch chooses the first rows to follow; values must be right. careful follows all, which the proof that smallest indices end needs.
func (e *engine) watch(careful bool) {
	e.watching = !careful && e.rows*e.m.dense >= watchFrom
	e.stale = false
	if !e.watching {
		return
	}
	if e.watched == nil {
		e.watched = make([]bool, e.rows)
	}
	clear(e.watched)
	e.join()
}

// join adds the most violated rows that are not followed and reports whether there were any; values must be right.
func (e *engine) join() bool {
	type violated struct {
		row   int
		merit float64
	}
	var list []violated
	for i := range e.watched {
		if e.watched[i] || e.posR[i] >= 0 {
			continue
		}
		if by := e.violation(e.n + i); by != 0 {
			list = append(list, violated{i, by * by / e.weight[e.n+i]})
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return list[a].merit > list[b].merit })
	for _, v := range list[:min(len(list), max(watchLeast, e.rows/watchShare))] {
		e.watched[v.row] = true
	}
	return len(list) > 0
}

// follows tells that the value of row i is kept right.
func (e *engine) follows(i int) bool { return !e.watching || e.watched[i] }

// lookAtAll makes all values right. It reports whether rows have joined.
func (e *engine) lookAtAll() bool {
	if !e.watching {
		return false
	}
	if e.stale {
		e.computeValues()
	}
	return e.join()
}

// unwatch makes all values right and follows all of them from here on.
func (e *engine) unwatch() {
	if e.watching && e.stale {
		e.computeValues()
	}
	e.watching = false
}

// addColumns adds delta[f] times column list[f] to dst, for the rows that are active or followed; entries of list that are rows are
// passed over. It overwrites delta.
func (e *engine) addColumns(dst []float64, list []int, delta []float64) {
	m := e.m
	e.stale = e.stale || e.watching
	for f, v := range list {
		if v < m.dense {
			delta[f] *= m.colScale[v]
		}
	}
	for i, row := range m.a {
		if e.posR[i] < 0 && !e.follows(i) {
			continue
		}
		sum := 0.0
		for f, v := range list {
			if v < len(row) {
				sum += row[v] * delta[f]
			}
		}
		dst[i] += sum * m.rowScale[i]
	}
	for f, v := range list {
		if v >= m.dense && v < m.cols {
			dst[m.unitRow[v-m.dense]] += m.unitValue[v-m.dense] * delta[f]
		}
	}
}
