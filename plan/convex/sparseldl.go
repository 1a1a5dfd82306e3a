package convex

import "math"

// quasidefinite is a symmetric matrix [-F A'; A G] with F and G positive (semi)definite, made definite by small shifts, and its
// factor L D L' in a fixed order: such a matrix has one for every order (Vanderbei 1995, SIAM Journal on Optimization 5, 100-113).
// The pattern is analysed once; values are set by place.
type quasidefinite struct {
	n     int
	order []int32 // elimination order: order[k] is the k-th
	rank  []int32 // its inverse
	// Upper triangle in elimination order, by columns: start, row, value; every diagonal is stored.
	start  []int
	row    []int32
	value  []float64
	diag   []int // by original index: where its diagonal is in value
	parent []int32
	lp     []int
	li     []int32
	lx     []float64
	d      []float64
	sign   []float64 // by elimination index: sign that the pivot has
	// work
	y       []float64
	flag    []int32
	pattern []int32
	count   []int
	shifts  int // pivots that were moved away from zero in the last factorisation
}

// place is one entry of the matrix to be: row and column in any order.
type matrixPlace struct{ i, j int32 }

// analyse orders the matrix and counts its factor. It returns where in value each of the places off the diagonal is, in order.
func analyse(n int, negative int, places []matrixPlace) (*quasidefinite, []int) {
	neighbours := make([][]int32, n)
	for _, p := range places {
		neighbours[p.i] = append(neighbours[p.i], p.j)
		neighbours[p.j] = append(neighbours[p.j], p.i)
	}
	q := &quasidefinite{n: n, order: minimumDegree(neighbours), rank: make([]int32, n), start: make([]int, n+1), diag: make([]int, n),
		d: make([]float64, n), sign: make([]float64, n), y: make([]float64, n), flag: make([]int32, n), pattern: make([]int32, n)}
	for k, i := range q.order {
		q.rank[i] = int32(k)
		q.sign[k] = 1
		if int(i) < negative {
			q.sign[k] = -1
		}
	}
	for _, p := range places {
		q.start[max(q.rank[p.i], q.rank[p.j])+1]++
	}
	for k := 0; k < n; k++ {
		q.start[k+1] += q.start[k] + 1
	}
	q.row, q.value = make([]int32, q.start[n]), make([]float64, q.start[n])
	next := append([]int(nil), q.start[:n]...)
	at := make([]int, len(places))
	for t, p := range places {
		a, b := q.rank[p.i], q.rank[p.j]
		k := max(a, b)
		q.row[next[k]] = min(a, b)
		at[t] = next[k]
		next[k]++
	}
	for k, i := range q.order {
		q.row[next[k]] = int32(k)
		q.diag[i] = next[k]
	}
	q.symbolic()
	return q, at
}

// symbolic finds the elimination tree and the columns' lengths (Liu 1990).
func (q *quasidefinite) symbolic() {
	n := q.n
	q.parent, q.lp, q.count = make([]int32, n), make([]int, n+1), make([]int, n)
	for k := 0; k < n; k++ {
		q.parent[k], q.flag[k] = -1, int32(k)
		for p := q.start[k]; p < q.start[k+1]; p++ {
			for i := q.row[p]; q.flag[i] != int32(k); i = q.parent[i] {
				if q.parent[i] < 0 {
					q.parent[i] = int32(k)
				}
				q.count[i]++
				q.flag[i] = int32(k)
			}
		}
	}
	for k := 0; k < n; k++ {
		q.lp[k+1] = q.lp[k] + q.count[k]
	}
	q.li, q.lx = make([]int32, q.lp[n]), make([]float64, q.lp[n])
}

// factor computes L and D row by row. Pivots on the wrong side of least are set to least.
func (q *quasidefinite) factor(least float64) {
	n := q.n
	clear(q.count)
	q.shifts = 0
	for k := range q.flag {
		q.flag[k] = -1
	}
	y := q.y
	for k := 0; k < n; k++ {
		top := n
		q.flag[k] = int32(k)
		d := 0.0
		for p := q.start[k]; p < q.start[k+1]; p++ {
			i := q.row[p]
			if int(i) == k {
				d += q.value[p]
				continue
			}
			y[i] += q.value[p]
			length := 0
			for ; q.flag[i] != int32(k); i = q.parent[i] {
				q.pattern[length] = i
				length++
				q.flag[i] = int32(k)
			}
			for length > 0 {
				top--
				length--
				q.pattern[top] = q.pattern[length]
			}
		}
		for ; top < n; top++ {
			i := q.pattern[top]
			yi := y[i]
			y[i] = 0
			from, to := q.lp[i], q.lp[i]+q.count[i]
			li, lx := q.li[from:to], q.lx[from:to]
			for p, r := range li {
				y[r] -= lx[p] * yi
			}
			l := yi / q.d[i]
			d -= l * yi
			q.li[to], q.lx[to] = int32(k), l
			q.count[i]++
		}
		if !(d*q.sign[k] >= least) {
			d = q.sign[k] * math.Max(least, 0)
			q.shifts++
		}
		q.d[k] = d
	}
}

// solve overwrites b with the solution.
func (q *quasidefinite) solve(b, work []float64) {
	for k, i := range q.order {
		work[k] = b[i]
	}
	for k := 0; k < q.n; k++ {
		v := work[k]
		if v == 0 {
			continue
		}
		lx := q.lx[q.lp[k]:q.lp[k+1]]
		for p, r := range q.li[q.lp[k]:q.lp[k+1]] {
			work[r] -= lx[p] * v
		}
	}
	for k := range work[:q.n] {
		work[k] /= q.d[k]
	}
	for k := q.n - 1; k >= 0; k-- {
		v := work[k]
		lx := q.lx[q.lp[k]:q.lp[k+1]]
		for p, r := range q.li[q.lp[k]:q.lp[k+1]] {
			v -= lx[p] * work[r]
		}
		work[k] = v
	}
	for k, i := range q.order {
		b[i] = work[k]
	}
}
