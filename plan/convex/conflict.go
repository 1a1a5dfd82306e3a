package convex

import (
	"context"
	"fmt"
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
// meets all others, which is computed and checked; only a member without such a point is tried by a warm-started solve. The error is not nil only for an index out of range; other ends are in Status.
func Conflict(ctx context.Context, p *Problem, among []int) (*ConflictSet, error) {
	for _, i := range among {
		if i < 0 || i >= p.Rows() {
			return nil, fmt.Errorf("convex: Conflict: no row %d among %d", i, p.Rows())
		}
	}
	f := newFilter(ctx, p.Clone(), among)
	out := &ConflictSet{Status: f.solve()}
	if out.Status == Infeasible {
		f.useProof()
		out.Status = f.compact()
	}
	if out.Status == Infeasible {
		f.useProof()
		out.Status = f.reduce(&f.rows)
	}
	if out.Status == Infeasible {
		out.Status = f.reduce(&f.columns)
	}
	if out.Status == Infeasible {
		out.Rows, out.Bounds = f.rows.list(), f.columns.list()
		for k := range out.Rows {
			out.Rows[k].Index = f.origin[out.Rows[k].Index]
		}
		out.Verified = f.verify()
	}
	out.Solves = f.solves
	return out, nil
}

// filterList is a list of bounds of which some have been dropped.
type filterList struct {
	all     []Bound
	dropped []bool
	row     bool // bounds of rows, not of columns
}

func (l *filterList) list() []Bound {
	var kept []Bound
	for k, b := range l.all {
		if !l.dropped[k] {
			kept = append(kept, b)
		}
	}
	return kept
}

// filter is the state of the deletion filter. The problem p is its own copy: dropped bounds are removed from it.
type filter struct {
	ctx           context.Context
	p             *Problem
	t             *session
	rows, columns filterList
	origin        []int // by row of p: index in the caller's problem
	solves        int
	witness       witness
}

func newFilter(ctx context.Context, p *Problem, among []int) *filter {
	p.hessian = nil
	for j := range p.columns {
		p.columns[j].Cost = 0
	}
	f := &filter{ctx: ctx, p: p, t: newSession(p)}
	f.t.e.startFromRows()
	seen := make([]bool, p.Rows())
	for _, i := range among {
		if !seen[i] {
			f.rows.all = append(f.rows.all, sidesOf(i, p.rowLower[i], p.rowUpper[i])...)
		}
		seen[i] = true
	}
	for j, c := range p.columns {
		f.columns.all = append(f.columns.all, sidesOf(j, c.Lower, c.Upper)...)
	}
	f.rows.row = true
	f.rows.dropped = make([]bool, len(f.rows.all))
	f.columns.dropped = make([]bool, len(f.columns.all))
	return f
}

func (f *filter) solve() Status {
	f.solves++
	return f.t.solve(f.ctx, Options{}.iterationLimit(f.p.Rows(), f.p.Columns()))
}

// bounds returns the bounds that b is a side of.
func (f *filter) bounds(b Bound, row bool) (lower, upper float64) {
	if row {
		return f.p.rowLower[b.Index], f.p.rowUpper[b.Index]
	}
	return f.p.columns[b.Index].Lower, f.p.columns[b.Index].Upper
}

func (f *filter) set(b Bound, row bool, lower, upper float64) {
	if row {
		f.p.rowLower[b.Index], f.p.rowUpper[b.Index] = lower, upper
		f.t.setRow(b.Index, lower, upper)
		return
	}
	f.p.columns[b.Index].Lower, f.p.columns[b.Index].Upper = lower, upper
	f.t.setColumn(b.Index, lower, upper)
}

// drop removes member k for good.
func (f *filter) drop(l *filterList, k int) {
	b := l.all[k]
	lower, upper := f.bounds(b, l.row)
	lower, upper = without(lower, upper, b.Side)
	f.set(b, l.row, lower, upper)
	l.dropped[k] = true
}

// useProof drops every member that the last proof does not need.
func (f *filter) useProof() {
	y := f.t.e.proof
	f.dropUnused(&f.rows, func(i int) float64 { return y[i] })
	z := f.t.e.byCol
	f.t.e.m.combineRows(z, f.t.e.everyRow(y), f.t.e.dr, f.t.e.byRow)
	f.dropUnused(&f.columns, func(j int) float64 { return -z[j] })
	f.witness.prepare(f)
}

func (f *filter) dropUnused(l *filterList, multiplier func(int) float64) {
	for k, b := range l.all {
		v := multiplier(b.Index)
		used := (v > 0 && b.Side == UpperSide) || (v < 0 && b.Side == LowerSide)
		if !used && !l.dropped[k] {
			f.drop(l, k)
		}
	}
}

// compact leaves out the rows without bounds, which are most of them once a proof has been used, and solves what remains.
func (f *filter) compact() Status {
	small := &Problem{sense: f.p.sense, columns: f.p.columns}
	place := make([]int, f.p.Rows())
	for i := range place {
		place[i] = small.Rows()
		lower, upper := f.p.rowLower[i], f.p.rowUpper[i]
		if !finite(lower) && !finite(upper) {
			continue
		}
		f.origin = append(f.origin, i)
		small.a = append(small.a, f.p.row(i))
		small.rowName = append(small.rowName, f.p.rowName[i])
		small.rowLower = append(small.rowLower, lower)
		small.rowUpper = append(small.rowUpper, upper)
	}
	kept := filterList{row: true}
	for _, b := range f.rows.list() {
		kept.all = append(kept.all, Bound{place[b.Index], b.Side})
	}
	kept.dropped = make([]bool, len(kept.all))
	f.p, f.rows, f.t = small, kept, newSession(small)
	f.t.e.startFromRows()
	return f.solve()
}

// reduce tries to do without each member in turn. It returns Infeasible, or the status that stopped it.
func (f *filter) reduce(l *filterList) Status {
	for k, b := range l.all {
		if l.dropped[k] || f.witness.meets(f, b, l.row) {
			continue
		}
		lower, upper := f.bounds(b, l.row)
		f.drop(l, k)
		switch status := f.solve(); status {
		case Infeasible:
			f.useProof()
		case Optimal:
			f.set(b, l.row, lower, upper)
			l.dropped[k] = false
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
	for _, l := range []*filterList{&f.rows, &f.columns} {
		for k, b := range l.all {
			if l.dropped[k] || f.witness.meets(f, b, l.row) {
				continue
			}
			lower, upper := f.bounds(b, l.row)
			f.drop(l, k)
			status := f.solve()
			f.set(b, l.row, lower, upper)
			l.dropped[k] = false
			if status != Optimal || f.solve() != Infeasible {
				return false
			}
			f.witness.prepare(f)
		}
	}
	return true
}
