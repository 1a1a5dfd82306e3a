package convex

import "math"

// witness finds points that meet all bounds but one, from the basis of a proof of infeasibility. The proof is the row of one basic
// variable in terms of those at their bounds. Let go of one of them and the basic variable reaches its bound; what else is basic moves
// along, and takes no part in the proof.
//
// Source: Gleeson & Ryan (1990), Identifying minimally infeasible subsystems of inequalities.
type witness struct {
	x        []float64 // point of the basis, by column
	activity []float64 // by row
	terms    []float64 // by row: sum of absolute terms
	move     []float64 // by column, in the units of the problem
	moved    []int
	unit     yardstick
	ready    *Problem // the problem that unit belongs to
}

// prepare takes the point of the basis that the last proof came from.
func (w *witness) prepare(f *filter) {
	p, e, s := f.p, f.t.e, f.t.s
	if w.ready != p {
		w.unit, w.ready = measure(p), p
	}
	w.x, w.move = make([]float64, p.Columns()), make([]float64, p.Columns())
	w.activity, w.terms = make([]float64, p.Rows()), make([]float64, p.Rows())
	for j := range w.x {
		w.x[j] = e.x[j] * s.col[j]
	}
	for i := range w.activity {
		w.activity[i], w.terms[i] = p.activity(i, w.x)
	}
}

// meets tells that a point was found which meets all bounds of the problem but m. The engine must be at the basis of the last proof.
func (w *witness) meets(f *filter, m *filterMember) bool {
	e, s := f.t.e, f.t.s
	v := m.at.Index
	if m.row {
		v += e.n
	}
	for _, j := range w.moved {
		w.move[j] = 0
	}
	w.moved = w.moved[:0]
	if v != e.proofAt {
		if e.place[v] == Basic || e.place[e.proofAt] != Basic {
			return false
		}
		e.pivotColumn(v)
		step := e.stepOf(e.proofAt)
		if !(math.Abs(step) > pivotTolerance) {
			return false
		}
		theta := -e.proofBy / step
		for t, j := range e.jList {
			w.shift(j, theta*e.dxJ[t]*s.col[j])
		}
		if v < e.n {
			w.shift(v, theta*s.col[v])
		}
	}
	return w.within(f, m)
}

func (w *witness) shift(j int, by float64) {
	w.move[j] = by
	w.moved = append(w.moved, j)
}

// within checks the moved point against the data.
func (w *witness) within(f *filter, m *filterMember) bool {
	p := f.p
	ok := func(v, lower, upper, size float64, own bool) bool {
		if own {
			lower, upper = f.without(m)
		}
		by, bound := outside(v, lower, upper)
		return by <= CertifiedPrimal*math.Max(size, math.Abs(bound))
	}
	for j, x := range w.x {
		c := p.columns[j]
		if !ok(x+w.move[j], c.Lower, c.Upper, w.unit.value*w.unit.col[j], !m.row && j == m.at.Index) {
			return false
		}
	}
	for i, v := range w.activity {
		terms, a := w.terms[i], p.row(i)
		for _, j := range w.moved {
			by := a[j] * w.move[j]
			v += by
			terms += math.Abs(by)
		}
		if !ok(v, p.rowLower[i], p.rowUpper[i], math.Max(terms, w.unit.value/w.unit.row[i]), m.row && i == m.at.Index) {
			return false
		}
	}
	return true
}
