package convex

import (
	"context"
	"math"
)

// engine holds the state of a simplex solve of: minimise cost'x subject to A x - r = 0 and bounds on all of x and r. Variables are
// numbered columns first, then rows. A basis has one variable per row; only the block of active rows (their r at a bound) by basic
// columns needs factoring, since every other row has its own r basic.
type engine struct {
	m       *matrix
	n, rows int // columns, rows

	trueCost []float64 // by column; rows cost nothing
	cost     []float64 // by variable: working costs, shifted and perturbed
	lower    []float64 // by variable: working bounds, widened when the primal method stalls
	upper    []float64
	trueLow  []float64 // by variable: the bounds that are meant
	trueUp   []float64
	widened  bool
	feasible float64 // violation that counts as none
	optimal  float64 // wrong price that counts as none
	place    []Place
	x        []float64 // by variable
	d        []float64 // price of each variable that is not basic
	weight   []float64 // steepest-edge weight of each basic variable

	jList  []int // basic columns, in the order of the kernel
	rList  []int // active rows, in the order of the kernel
	posJ   []int // place in jList or -1
	posR   []int // place in rList or -1
	stored [][]float64
	spare  [][]float64
	kern   kernel
	fresh  bool // the kernel was factored and values computed from scratch since the last change
	age    int

	alpha  []float64 // pivot row by variable
	w      []float64 // multipliers of the active rows
	dxJ    []float64 // pivot column, basic columns
	dr     []float64 // pivot column, rows
	tau    []float64
	zeta   []float64
	byRow  []float64
	byCol  []float64
	ratio  ratioHeap
	passed []breakpoint
	flips  []int

	iterations, primalIterations int
	limit                        int
	proof                        []float64 // multipliers of the rows that prove noPoint
	progress                     func(Progress)
	draw                         uint64 // state of the generator for perturbations
}

func newEngine(m *matrix, cost, lower, upper []float64) *engine {
	n, rows := m.cols, m.rows
	v := n + rows
	e := &engine{
		m: m, n: n, rows: rows, trueCost: cost, trueLow: lower, trueUp: upper,
		lower: append([]float64(nil), lower...), upper: append([]float64(nil), upper...),
		feasible: feasibilityTolerance, optimal: optimalityTolerance,
		cost: make([]float64, v), place: make([]Place, v), x: make([]float64, v), d: make([]float64, v),
		weight: make([]float64, v), posJ: make([]int, n), posR: make([]int, rows),
		alpha: make([]float64, v), w: make([]float64, rows), dxJ: make([]float64, rows), dr: make([]float64, rows),
		tau: make([]float64, rows), zeta: make([]float64, rows), byRow: make([]float64, rows), byCol: make([]float64, n),
		draw: 0x9e3779b97f4a7c15,
	}
	copy(e.cost, cost)
	return e
}

// fixed tells that variable v cannot move.
func (e *engine) fixed(v int) bool { return e.lower[v] == e.upper[v] }

// boxed tells that variable v has two finite bounds.
func (e *engine) boxed(v int) bool { return finite(e.lower[v]) && finite(e.upper[v]) }

// settle puts a variable that is not basic at a bound that exists, keeping its place where it can, and sets its value.
func (e *engine) settle(v int) {
	hasLower, hasUpper := finite(e.lower[v]), finite(e.upper[v])
	switch {
	case !hasLower && !hasUpper:
		e.place[v] = AtZero
	case !hasUpper:
		e.place[v] = AtLower
	case !hasLower:
		e.place[v] = AtUpper
	case e.place[v] != AtUpper:
		e.place[v] = AtLower
	}
	e.x[v] = e.rest(v)
}

// rest returns the value of a variable that is not basic.
func (e *engine) rest(v int) float64 {
	switch e.place[v] {
	case AtLower:
		return e.lower[v]
	case AtUpper:
		return e.upper[v]
	}
	return 0
}

// violation returns by how much variable v is below its lower bound (negative) or above its upper bound (positive), zero within
// the tolerance.
func (e *engine) violation(v int) float64 {
	x := e.x[v]
	if lo := e.lower[v]; x < lo && lo-x > e.feasible*math.Max(1, math.Abs(lo)) {
		return x - lo
	}
	if up := e.upper[v]; x > up && x-up > e.feasible*math.Max(1, math.Abs(up)) {
		return x - up
	}
	return 0
}

// wrong returns by how much the price of variable v, which is not basic, has the wrong sign; zero or below when it is right.
func (e *engine) wrong(v int) float64 {
	if e.fixed(v) {
		return 0
	}
	switch e.place[v] {
	case AtLower:
		return -e.d[v]
	case AtUpper:
		return e.d[v]
	}
	return math.Abs(e.d[v])
}

// startFromRows makes the basis of all rows.
func (e *engine) startFromRows() {
	for v := range e.place {
		e.place[v] = AtLower
		if v >= e.n {
			e.place[v] = Basic
		}
	}
	e.adoptPlaces()
}

// adoptPlaces builds the lists from the places. When the number of basic columns differs from that of active rows, columns or
// rows are released in index order.
func (e *engine) adoptPlaces() {
	e.jList, e.rList = e.jList[:0], e.rList[:0]
	for j := range e.posJ {
		e.posJ[j] = -1
		if e.place[j] == Basic {
			e.jList = append(e.jList, j)
		}
	}
	for i := range e.posR {
		e.posR[i] = -1
		if e.place[e.n+i] != Basic {
			e.rList = append(e.rList, i)
		}
	}
	for len(e.jList) > len(e.rList) {
		last := len(e.jList) - 1
		e.place[e.jList[last]] = AtLower
		e.jList = e.jList[:last]
	}
	for len(e.rList) > len(e.jList) {
		last := len(e.rList) - 1
		e.place[e.n+e.rList[last]] = Basic
		e.rList = e.rList[:last]
	}
	e.storeColumns()
}

// storeColumns gathers the basic columns and fills the positions.
func (e *engine) storeColumns() {
	e.spare = append(e.spare, e.stored...)
	e.stored = e.stored[:0]
	for t, j := range e.jList {
		e.posJ[j] = t
		e.stored = append(e.stored, e.gather(j))
	}
	for t, i := range e.rList {
		e.posR[i] = t
	}
}

// gather returns a copy of column j in memory of its own.
func (e *engine) gather(j int) []float64 {
	var c []float64
	if last := len(e.spare) - 1; last >= 0 {
		c, e.spare = e.spare[last], e.spare[:last]
	} else {
		c = make([]float64, e.rows)
	}
	e.m.column(j, c)
	return c
}

// refactor factors the kernel of the present lists, releasing columns and rows that make it singular, and recomputes values and
// prices.
func (e *engine) refactor() {
	k := len(e.jList)
	entries := make([]float64, k*k)
	for t, i := range e.rList {
		for s := range e.jList {
			entries[t*k+s] = e.stored[s][i]
		}
	}
	if rows, cols := dependent(k, entries); len(rows) > 0 {
		e.release(rows, cols)
		e.refactor()
		return
	}
	e.kern.factor(k, entries)
	e.age = 0
	for v := range e.place {
		if e.place[v] != Basic {
			e.settle(v)
		}
	}
	e.computeValues()
	e.computePrices()
	e.fresh = true
}

// release makes the rows in the given places of rList basic and the columns in the given places of jList not basic.
func (e *engine) release(rows, cols []int) {
	for _, t := range rows {
		e.place[e.n+e.rList[t]] = Basic
	}
	for _, t := range cols {
		v := e.jList[t]
		e.place[v] = AtLower
		if finite(e.upper[v]) && math.Abs(e.x[v]-e.upper[v]) < math.Abs(e.x[v]-e.lower[v]) {
			e.place[v] = AtUpper
		}
	}
	e.adoptPlaces()
	e.exactWeights()
}

// computeValues solves for the basic values from those at their bounds.
func (e *engine) computeValues() {
	for _, j := range e.jList {
		e.x[j] = 0
	}
	rows := e.x[e.n:]
	e.m.times(e.dr, e.x[:e.n])
	for t, i := range e.rList {
		e.dxJ[t] = rows[i] - e.dr[i]
	}
	e.kern.solve(e.dxJ, e.dxJ)
	for t, j := range e.jList {
		e.x[j] = e.dxJ[t]
		addScaled(e.dr, e.dxJ[t], e.stored[t])
	}
	for i := range rows {
		if e.posR[i] < 0 {
			rows[i] = e.dr[i]
		}
	}
}

// computePrices solves for the multipliers y from the working costs and fills d.
func (e *engine) computePrices() {
	y := e.tau
	for i := range y {
		y[i] = 0
		if e.posR[i] < 0 {
			y[i] = -e.cost[e.n+i]
		}
	}
	for t, j := range e.jList {
		e.w[t] = e.cost[j] - dot(e.stored[t], y)
	}
	e.kern.solveTransposed(e.w, e.w[:e.kern.k])
	for t, i := range e.rList {
		y[i] = e.w[t]
	}
	e.m.combineRows(e.byCol, e.everyRow(y), e.dr, e.byRow)
	for j := 0; j < e.n; j++ {
		e.d[j] = e.cost[j] - e.byCol[j]
		if e.posJ[j] >= 0 {
			e.d[j] = 0
		}
	}
	for i, yi := range y {
		e.d[e.n+i] = e.cost[e.n+i] + yi
		if e.posR[i] < 0 {
			e.d[e.n+i] = 0
		}
	}
}

// everyRow returns the rows with a multiplier, and writes the multipliers in the same order to dr.
func (e *engine) everyRow(y []float64) []int {
	list := e.flips[:0]
	for i, yi := range y {
		if yi != 0 {
			e.dr[len(list)] = yi
			list = append(list, i)
		}
	}
	e.flips = list[:0]
	return list
}

// pivotRow computes, for basic variable p, the multipliers w of the active rows and alpha = dx_p / dx_v for all v not basic.
func (e *engine) pivotRow(p int) {
	k := e.kern.k
	w := e.w[:k]
	clear(w)
	if p < e.n {
		w[e.posJ[p]] = 1
	} else {
		for t := range w {
			w[t] = e.stored[t][p-e.n]
		}
	}
	e.kern.solveTransposed(w, w)
	for t := range w {
		e.dxJ[t] = -w[t]
	}
	list, f := e.rList, e.dxJ[:k]
	if p >= e.n {
		list = append(e.flips[:0], e.rList...)
		list = append(list, p-e.n)
		e.flips = list[:0]
		e.dxJ[k] = 1
		f = e.dxJ[:k+1]
	}
	e.m.combineRows(e.alpha[:e.n], list, f, e.byRow)
	for _, j := range e.jList {
		e.alpha[j] = 0
	}
	clear(e.alpha[e.n:])
	for t, i := range e.rList {
		e.alpha[e.n+i] = w[t]
	}
}

// pivotColumn computes the change of the basic values per unit of variable q, which is not basic: dxJ and dr.
func (e *engine) pivotColumn(q int) {
	k := e.kern.k
	clear(e.dxJ[:k])
	if q < e.n {
		e.m.column(q, e.dr)
		for t, i := range e.rList {
			e.dxJ[t] = -e.dr[i]
		}
	} else {
		clear(e.dr)
		e.dxJ[e.posR[q-e.n]] = 1
	}
	e.finishColumn()
}

// finishColumn solves for dxJ and adds its effect to dr.
func (e *engine) finishColumn() {
	k := e.kern.k
	e.kern.solve(e.dxJ, e.dxJ[:k])
	e.spread(e.dr, e.dxJ[:k])
}

// spread adds the stored columns times z to dst.
func (e *engine) spread(dst, z []float64) {
	t := 0
	for ; t+4 <= len(z); t += 4 {
		addScaled4(dst, z[t], z[t+1], z[t+2], z[t+3], e.stored[t], e.stored[t+1], e.stored[t+2], e.stored[t+3])
	}
	for ; t < len(z); t++ {
		addScaled(dst, z[t], e.stored[t])
	}
}

// stepOf returns the entry of the pivot column for basic variable p.
func (e *engine) stepOf(p int) float64 {
	if p < e.n {
		return e.dxJ[e.posJ[p]]
	}
	return e.dr[p-e.n]
}

// move changes the basic values by theta times the pivot column.
func (e *engine) move(theta float64) {
	if theta == 0 {
		return
	}
	for t, j := range e.jList {
		e.x[j] += theta * e.dxJ[t]
	}
	rows := e.x[e.n:]
	for i := range rows {
		if e.posR[i] < 0 {
			rows[i] += theta * e.dr[i]
		}
	}
}

// exchange makes q basic in place of p and updates the kernel; p must have been given its place and value by the caller.
func (e *engine) exchange(p, q int) {
	var entering []float64
	if q < e.n {
		entering = e.gather(q)
	}
	e.place[q] = Basic
	e.fresh = false
	e.age++
	switch {
	case p < e.n && q < e.n:
		t := e.posJ[p]
		e.kern.replaceColumn(t, e.onActive(entering))
		e.removeColumn(t)
		e.appendColumn(q, entering)
	case p >= e.n && q >= e.n:
		s := e.posR[q-e.n]
		e.kern.replaceRow(s, e.acrossBasic(p-e.n))
		e.posR[q-e.n] = -1
		e.rList[s] = p - e.n
		e.posR[p-e.n] = s
	case p >= e.n:
		i := p - e.n
		e.kern.grow(e.onActive(entering), e.acrossBasic(i), entering[i])
		e.posR[i] = len(e.rList)
		e.rList = append(e.rList, i)
		e.appendColumn(q, entering)
	default:
		t, s := e.posJ[p], e.posR[q-e.n]
		e.kern.shrink(t, s)
		e.removeColumn(t)
		last := len(e.rList) - 1
		e.rList[s] = e.rList[last]
		e.posR[e.rList[s]] = s
		e.rList = e.rList[:last]
		e.posR[q-e.n] = -1
	}
}

// onActive returns the entries of a column on the active rows.
func (e *engine) onActive(column []float64) []float64 {
	for t, i := range e.rList {
		e.w[t] = column[i]
	}
	return e.w[:len(e.rList)]
}

// acrossBasic returns the entries of row i in the basic columns.
func (e *engine) acrossBasic(i int) []float64 {
	for t := range e.jList {
		e.dxJ[t] = e.stored[t][i]
	}
	return e.dxJ[:len(e.jList)]
}

func (e *engine) removeColumn(t int) {
	e.posJ[e.jList[t]] = -1
	e.spare = append(e.spare, e.stored[t])
	e.jList = append(e.jList[:t], e.jList[t+1:]...)
	e.stored = append(e.stored[:t], e.stored[t+1:]...)
	for ; t < len(e.jList); t++ {
		e.posJ[e.jList[t]] = t
	}
}

func (e *engine) appendColumn(j int, column []float64) {
	e.posJ[j] = len(e.jList)
	e.jList = append(e.jList, j)
	e.stored = append(e.stored, column)
}

// stopped reports the status that ends the solve from outside, or zero.
func (e *engine) stopped(ctx context.Context) Status {
	if ctx.Err() != nil {
		return Interrupted
	}
	if e.iterations >= e.limit {
		return IterationLimit
	}
	return 0
}

// random returns the next number in [0, 1) of a fixed sequence (xorshift; Marsaglia 2003).
func (e *engine) random() float64 {
	e.draw ^= e.draw << 13
	e.draw ^= e.draw >> 7
	e.draw ^= e.draw << 17
	return float64(e.draw>>11) / (1 << 53)
}
