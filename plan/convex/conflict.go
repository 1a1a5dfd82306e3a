package convex

import (
	"context"
	"fmt"
	"math"
)

// ConflictSet is an irreducible set of bounds that cannot all be met.
type ConflictSet struct {
	// Status is Infeasible when a set was found, Optimal when the problem is feasible, and what stopped the search otherwise.
	Status Status
	Rows   []Bound // sides of rows, in the order of Among
	Bounds []Bound // bounds of columns that take part
	// Verified tells that the set, with the rows outside Among, was proven infeasible afresh with an accepted certificate, and
	// that dropping any one member was seen to make it feasible.
	Verified bool
	Solves   int
}

// Conflict explains an infeasible problem: it finds sides of the rows in among, and bounds of columns, that together with the rows
// not in among cannot be met, while they can be once any one of them is dropped. Sides tried earlier are the first to be dropped,
// so that those later in among are kept where there is a choice.
//
// Method: deletion filter (Chinneck & Dravnieks 1991), with what a proof of infeasibility does not use dropped at once. What is left
// is irreducible already when no row is outside among (Gleeson & Ryan 1990): the basis of the proof has a point for each member that
// meets all others, which is computed and checked; only a member without such a point is tried by a warm-started solve. Rows with one
// entry are worked on as bounds of their column and named as rows; of several on one side of a column the tightest alone can be a member.
// The error is not nil only for an index out of range; other ends are in Status.
func Conflict(ctx context.Context, p *Problem, among []int) (*ConflictSet, error) {
	for _, i := range among {
		if i < 0 || i >= p.Rows() {
			return nil, fmt.Errorf("convex: Conflict: no row %d among %d", i, p.Rows())
		}
	}
	f := newFilter(ctx, p, among)
	out := &ConflictSet{Status: f.solve()}
	if out.Status == Infeasible {
		f.useProof()
		out.Status = f.compact()
	}
	if out.Status == Infeasible {
		f.useProof()
		out.Status = f.reduce()
	}
	if out.Status == Infeasible {
		for _, m := range f.members {
			switch {
			case m.dropped:
			case m.ofRow:
				out.Rows = append(out.Rows, m.says)
			default:
				out.Bounds = append(out.Bounds, m.says)
			}
		}
		out.Verified = f.verify()
	}
	out.Solves = f.solves
	return out, nil
}

// filterMember is a side that may be in conflict.
type filterMember struct {
	at      Bound // in the filter's problem ...
	row     bool  // ... of a row of it, not of a column
	says    Bound // in the caller's problem ...
	ofRow   bool  // ... of a row of it
	dropped bool
}

// filter is the state of the deletion filter. The problem p is its own copy: dropped bounds are removed from it.
type filter struct {
	ctx       context.Context
	p         *Problem
	t         *undertaking
	members   []filterMember // in the order in which they are tried
	low, high []float64      // by column: the bounds that always hold
	solves    int
	witness   witness
}

// newFilter copies p without its costs. Rows with one entry become bounds of their column.
func newFilter(ctx context.Context, p *Problem, among []int) *filter {
	f := &filter{ctx: ctx, p: &Problem{sense: p.sense, columns: append([]Column(nil), p.columns...)}}
	f.low, f.high = make([]float64, p.Columns()), make([]float64, p.Columns())
	for j := range f.low {
		f.p.columns[j].Cost = 0
		f.low[j], f.high[j] = math.Inf(-1), math.Inf(1)
	}
	listed := make([]bool, p.Rows())
	for _, i := range among {
		listed[i] = true
	}
	bounds, place := findRowBounds(p), make([]int, p.Rows())
	for i := range place {
		switch j := bounds.column[i]; {
		case !bounds.is[i]:
			place[i] = f.p.Rows()
			f.p.takeRow(p, i)
		case !listed[i]:
			f.low[j], f.high[j] = math.Max(f.low[j], bounds.lower[i]), math.Min(f.high[j], bounds.upper[i])
		}
	}
	tightest := newTightest(p, bounds, among, f.low, f.high)
	for _, i := range among {
		if !listed[i] {
			continue // named before
		}
		listed[i] = false
		if bounds.is[i] {
			for _, side := range [2]Side{LowerSide, UpperSide} {
				if j := bounds.column[i]; tightest.is(j, side, i) {
					f.members = append(f.members, filterMember{at: Bound{j, side}, says: Bound{i, bounds.side(i, side)}, ofRow: true})
				}
			}
			continue
		}
		for _, b := range sidesOf(i, p.rowLower[i], p.rowUpper[i]) {
			f.members = append(f.members, filterMember{at: Bound{place[i], b.Side}, row: true, says: b, ofRow: true})
		}
	}
	for j, c := range p.columns {
		for _, b := range sidesOf(j, c.Lower, c.Upper) {
			if tightest.is(j, b.Side, ownBound) {
				f.members = append(f.members, filterMember{at: b, says: b})
			}
		}
		f.p.columns[j].Lower, f.p.columns[j].Upper = tightest.lower[j], tightest.upper[j]
	}
	f.start(f.p)
	return f
}

// ownBound stands for the bound of the column itself, nobodysBound for one that always holds.
const (
	ownBound     = -1
	nobodysBound = -2
)

// tightest are the bounds of the columns, and the rows that set them.
type tightest struct {
	lower, upper     []float64
	byLower, byUpper []int // row, ownBound or nobodysBound
}

// newTightest takes the bounds that always hold, where these are no less tight, then among ties the bound that is tried last.
func newTightest(p *Problem, b *rowBounds, among []int, low, high []float64) *tightest {
	n := p.Columns()
	t := &tightest{lower: append([]float64(nil), low...), upper: append([]float64(nil), high...), byLower: make([]int, n), byUpper: make([]int, n)}
	for j := range t.byLower {
		t.byLower[j], t.byUpper[j] = nobodysBound, nobodysBound
	}
	take := func(j, by int, lower, upper float64) {
		if lower > t.lower[j] || lower == t.lower[j] && lower > low[j] {
			t.lower[j], t.byLower[j] = lower, by
		}
		if upper < t.upper[j] || upper == t.upper[j] && upper < high[j] {
			t.upper[j], t.byUpper[j] = upper, by
		}
	}
	for _, i := range among {
		if b.is[i] {
			take(b.column[i], i, b.lower[i], b.upper[i])
		}
	}
	for j, c := range p.columns {
		take(j, ownBound, c.Lower, c.Upper)
	}
	return t
}

// is tells that a side of column j is set by a row or by the column itself.
func (t *tightest) is(j int, side Side, by int) bool {
	if side == LowerSide {
		return t.byLower[j] == by
	}
	return t.byUpper[j] == by
}

// takeRow appends row i of another problem with the same columns; the coefficients are shared.
func (p *Problem) takeRow(of *Problem, i int) {
	p.a = append(p.a, of.a[i])
	p.rowName = append(p.rowName, of.rowName[i])
	p.rowLower = append(p.rowLower, of.rowLower[i])
	p.rowUpper = append(p.rowUpper, of.rowUpper[i])
}

// start goes on with p.
func (f *filter) start(p *Problem) {
	f.p, f.t = p, newUndertaking(p)
	f.t.e.startFromRows()
}

func (f *filter) solve() Status {
	f.solves++
	return f.t.solve(f.ctx, Options{}.iterationLimit(f.p.Rows(), f.p.Columns()))
}

// bounds returns the bounds that m is a side of.
func (f *filter) bounds(m *filterMember) (lower, upper float64) {
	if m.row {
		return f.p.rowLower[m.at.Index], f.p.rowUpper[m.at.Index]
	}
	return f.p.columns[m.at.Index].Lower, f.p.columns[m.at.Index].Upper
}

// without returns the bounds that m is a side of with m left out: what always holds is left.
func (f *filter) without(m *filterMember) (lower, upper float64) {
	lower, upper = f.bounds(m)
	switch j := m.at.Index; {
	case m.row:
		return without(lower, upper, m.at.Side)
	case m.at.Side == LowerSide:
		return f.low[j], upper
	default:
		return lower, f.high[j]
	}
}

func (f *filter) set(m *filterMember, lower, upper float64) {
	if m.row {
		f.p.rowLower[m.at.Index], f.p.rowUpper[m.at.Index] = lower, upper
		f.t.setRow(m.at.Index, lower, upper)
		return
	}
	f.p.columns[m.at.Index].Lower, f.p.columns[m.at.Index].Upper = lower, upper
	f.t.setColumn(m.at.Index, lower, upper)
}

// drop removes a member for good.
func (f *filter) drop(m *filterMember) {
	lower, upper := f.without(m)
	f.set(m, lower, upper)
	m.dropped = true
}

// useProof drops every member that the last proof does not need.
func (f *filter) useProof() {
	y, z := f.t.e.proof, f.t.e.byCol
	f.t.e.m.combineRows(z, f.t.e.everyRow(y), f.t.e.dr, f.t.e.byRow)
	for k := range f.members {
		m := &f.members[k]
		if m.dropped {
			continue
		}
		v := 0.0
		if m.row {
			v = y[m.at.Index]
		} else {
			v = -z[m.at.Index]
		}
		if used := (v > 0 && m.at.Side == UpperSide) || (v < 0 && m.at.Side == LowerSide); !used {
			f.drop(m)
		}
	}
	f.witness.prepare(f)
}

// compact leaves out the rows without bounds, which are most of them once a proof has been used, and solves what remains.
func (f *filter) compact() Status {
	small := &Problem{sense: f.p.sense, columns: f.p.columns}
	place := make([]int, f.p.Rows())
	for i := range place {
		place[i] = small.Rows()
		if finite(f.p.rowLower[i]) || finite(f.p.rowUpper[i]) {
			small.takeRow(f.p, i)
		}
	}
	for k := range f.members {
		if m := &f.members[k]; m.row {
			m.at.Index = place[m.at.Index]
		}
	}
	f.start(small)
	return f.solve()
}

// reduce tries to do without each member in turn. It returns Infeasible, or the status that stopped it.
func (f *filter) reduce() Status {
	for k := range f.members {
		m := &f.members[k]
		if m.dropped || f.witness.meets(f, m) {
			continue
		}
		lower, upper := f.bounds(m)
		f.drop(m)
		switch status := f.solve(); status {
		case Infeasible:
			f.useProof()
		case Optimal:
			f.set(m, lower, upper)
			m.dropped = false
			switch status := f.solve(); status { // back to a proof, for the points of the members to come
			case Infeasible:
				f.useProof()
			case Optimal: // feasible now, infeasible before: rounding decides
				return NumericalTrouble
			default:
				return status
			}
		default:
			return status
		}
	}
	return Infeasible
}

// verify solves the remaining problem from the start, checks the proof from the data, and finds for each member a point that meets all
// others, by a solve where the basis of the proof has none.
func (f *filter) verify() bool {
	s, err := Solve(f.ctx, f.p, Options{})
	f.solves++
	if err != nil || s.Status != Infeasible || !Certify(f.p, s).Accepted {
		return false
	}
	for k := range f.members {
		m := &f.members[k]
		if m.dropped || f.witness.meets(f, m) {
			continue
		}
		lower, upper := f.bounds(m)
		f.drop(m)
		status := f.solve()
		f.set(m, lower, upper)
		m.dropped = false
		if status != Optimal || f.solve() != Infeasible {
			return false
		}
		f.witness.prepare(f)
	}
	return true
}
