package convex

import "math"

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
	e.stale = false
	for _, j := range e.jList {
		e.x[j] = 0
	}
	rows := e.x[e.n:]
	e.m.times(e.dr, e.x[:e.n], e.byCol)
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
