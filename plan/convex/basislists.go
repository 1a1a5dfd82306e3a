package convex

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

// exchange makes q basic in place of p and updates the kernel; p must have been given its place and value by the caller.
func (e *engine) exchange(p, q int) {
	var entering []float64
	if q < e.n {
		entering = e.gather(q)
	}
	e.place[q] = Basic
	if e.watching && q >= e.n {
		e.watched[q-e.n] = true
	}
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
