package convex

import (
	"context"
	"math"
)

// activeSet is the state of the dual active-set method for a definite Hessian: columns at a bound are left out of the block that is
// factored, rows at a bound are the equations of a small system between them. Variables are numbered columns first, then rows;
// factors of the Hessian are rows of the form that take no part.
type activeSet struct {
	f      *interiorForm
	free   freeBlock
	place  []Place // Basic: a free column, or a row that says nothing
	isFree []bool
	x      []float64 // by column
	r      []float64 // row values
	g      []float64 // c + Hx
	y      []float64 // prices of rows
	d      []float64 // prices of columns at a bound
	active []int     // rows at a bound, in the order of between
	// between is the factor of A_W H_FF^-1 A_W' for the active rows W.
	between     growingFactor
	stale       bool // between must be made anew
	z           []float64
	hz          []float64
	az          []float64
	q           []float64
	column      []float64
	dStep       []float64
	iterations  int
	limit       int
	progress    func(Progress)
	infeasible  bool
	changeCount int
}

const (
	// activeFeasible is the violation of a bound b, per max(1, |b|), that counts as none in the scaled problem.
	activeFeasible = 1e-10
	// activeDual is the price of the wrong sign that counts as none, per one plus the size of its terms.
	activeDual = 1e-10
	// flatShare is the share of its unprojected curvature below which a direction counts as zero: what is left is rounding.
	flatShare = 1e-12
	// betweenChanges is the number of updates after which the factor between the rows is made anew.
	betweenChanges = 100
	// activeRounds bounds how often values are solved for afresh and the method goes on.
	activeRounds = 8
)

// newActiveSet returns nil when the Hessian has no form that the method takes.
func newActiveSet(f *interiorForm) *activeSet {
	block := newFreeBlock(f)
	if block == nil {
		return nil
	}
	n, m := f.n, f.m
	s := &activeSet{f: f, free: block, place: make([]Place, n+m), isFree: make([]bool, n)}
	for _, v := range []*[]float64{&s.x, &s.g, &s.d, &s.z, &s.hz, &s.column, &s.dStep} {
		*v = make([]float64, n)
	}
	for _, v := range []*[]float64{&s.r, &s.y, &s.az, &s.q} {
		*v = make([]float64, m)
	}
	return s
}

// hessianTimes sets out to Hx.
func (s *activeSet) hessianTimes(out, x []float64) {
	f := s.f
	clear(out)
	f.h.addSymmetric(out, 1, x)
	for i, w := range f.weight {
		if w == 0 {
			continue
		}
		col, val := f.a.row(i)
		sum := 0.0
		for k, j := range col {
			sum += val[k] * x[j]
		}
		sum *= w
		for k, j := range col {
			out[j] += val[k] * sum
		}
	}
}

// rowTimes returns row i times v.
func (s *activeSet) rowTimes(i int, v []float64) float64 {
	return s.f.a.rowTimes(i, v)
}

// addRow adds t times row i to v.
func (s *activeSet) addRow(v []float64, i int, t float64) {
	s.f.a.addRow(v, i, t)
}

// target is the bound that variable v is held at.
func (s *activeSet) target(v int) float64 {
	if s.place[v] == AtUpper {
		return s.f.upper[v]
	}
	return s.f.lower[v]
}

func (s *activeSet) isFactor(row int) bool { return s.f.weight[row] > 0 }

func (s *activeSet) equation(v int) bool { return s.f.lower[v] == s.f.upper[v] }

// refactor makes all factors anew for the present places. Active rows that depend on others become inactive.
func (s *activeSet) refactor() bool {
	for j := range s.isFree {
		s.isFree[j] = s.place[j] == Basic
	}
	if !s.free.reset(s.isFree) {
		return false
	}
	s.refactorBetween()
	return true
}

func (s *activeSet) refactorBetween() {
	s.stale, s.changeCount = false, 0
	s.between.rows = s.between.rows[:0]
	rows := append([]int(nil), s.active...)
	s.active = s.active[:0]
	for _, i := range rows {
		if !s.bind(i) {
			s.place[s.f.n+i] = Basic
			s.y[i] = 0
		}
	}
}

// bind makes row i an equation; false when it depends on those that are.
func (s *activeSet) bind(i int) bool {
	clear(s.column)
	s.addRow(s.column, i, 1)
	s.free.solve(s.column)
	k := len(s.active)
	for t, r := range s.active {
		s.q[t] = s.rowTimes(r, s.column)
	}
	own := s.rowTimes(i, s.column)
	if !s.between.append(append(s.q[:k:k], own)) {
		return false
	}
	s.active = append(s.active, i)
	return true
}

// unbind takes the equation at place t of the active rows back.
func (s *activeSet) unbind(t int) {
	s.between.delete(t)
	i := s.active[t]
	s.active = append(s.active[:t], s.active[t+1:]...)
	s.place[s.f.n+i], s.y[i] = Basic, 0
}

// release makes column j free; false when the block would not be definite.
func (s *activeSet) release(j int) bool {
	if !s.free.add(j) {
		return false
	}
	s.place[j], s.isFree[j], s.d[j] = Basic, true, 0
	s.adjust(j, 1)
	return true
}

// fix holds column j at the bound of its new place.
func (s *activeSet) fix(j int, at Place) {
	s.adjust(j, -1)
	s.free.remove(j)
	s.place[j], s.isFree[j] = at, false
}

// adjust changes the factor between the rows for column j, which must be free: with z the column of the inverse it gains or loses
// (A_W z)(A_W z)'/z_j.
func (s *activeSet) adjust(j int, sign float64) {
	if len(s.active) == 0 || s.stale {
		return
	}
	clear(s.column)
	s.column[j] = 1
	s.free.solve(s.column)
	root := math.Sqrt(s.column[j])
	for t, r := range s.active {
		s.q[t] = s.rowTimes(r, s.column) / root
	}
	s.changeCount++
	if !s.between.change(sign, s.q[:len(s.active)]) || s.changeCount > betweenChanges {
		s.stale = true
	}
}

// settle solves for values and prices of the present places, with refinement.
func (s *activeSet) settle() {
	f, n := s.f, s.f.n
	if s.stale {
		s.refactorBetween()
	}
	for j := range s.x {
		if s.place[j] != Basic {
			s.x[j] = s.target(j)
		}
	}
	for i := range s.y {
		if s.place[n+i] == Basic {
			s.y[i] = 0
		}
	}
	last := math.Inf(1)
	for pass := 0; pass <= refinements; pass++ {
		s.hessianTimes(s.g, s.x)
		for j, c := range f.c {
			s.g[j] += c
			s.z[j] = -s.g[j]
		}
		for _, i := range s.active {
			s.addRow(s.z, i, s.y[i])
		}
		worst := 0.0
		for j, ok := range s.isFree {
			if ok {
				worst = math.Max(worst, math.Abs(s.z[j])/(1+math.Abs(f.c[j])))
			}
		}
		k := len(s.active)
		copy(s.column, s.z)
		s.free.solve(s.column)
		for t, i := range s.active {
			short := s.target(n+i) - s.rowTimes(i, s.x)
			worst = math.Max(worst, math.Abs(short)/(1+math.Abs(s.target(n+i))))
			s.q[t] = short - s.rowTimes(i, s.column)
		}
		if worst <= refinedEnough || !(worst < refinementGain*last) {
			break
		}
		last = worst
		s.between.solve(s.q[:k])
		for t, i := range s.active {
			s.y[i] += s.q[t]
			s.addRow(s.z, i, s.q[t])
		}
		s.free.solve(s.z)
		for j, v := range s.z {
			s.x[j] += v
		}
	}
	s.evaluate()
}

// evaluate computes row values, gradient and prices of columns from values and prices of rows.
func (s *activeSet) evaluate() {
	f := s.f
	s.hessianTimes(s.g, s.x)
	for j, c := range f.c {
		s.g[j] += c
		s.d[j] = s.g[j]
	}
	for _, i := range s.active {
		s.addRow(s.d, i, -s.y[i])
	}
	for j, ok := range s.isFree {
		if ok {
			s.d[j] = 0
		}
	}
	f.a.times(s.r, s.x)
}

// run is the whole method. The status is Optimal, Infeasible, NumericalTrouble or what stopped it.
func (s *activeSet) run(ctx context.Context, start *Basis) Status {
	if !s.begin(ctx, start) {
		if ctx.Err() != nil {
			return Interrupted
		}
		return NumericalTrouble
	}
	for range activeRounds {
		status := s.dual(ctx)
		if status != Optimal {
			return status
		}
		if !s.refactor() {
			return NumericalTrouble
		}
		s.settle()
		if v, _ := s.mostViolated(); v < 0 && !s.anyWrong() {
			return Optimal
		}
		if !s.makeDualFeasible(ctx) {
			return NumericalTrouble
		}
	}
	return NumericalTrouble
}
