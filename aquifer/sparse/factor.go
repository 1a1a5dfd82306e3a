package sparse

import (
	"context"
	"fmt"
	"math"
	"sync/atomic"
)

// Factor is a Cholesky factor. Solve and SolveSelected may be called from several goroutines at once; Refactor may not
// run beside them.
type Factor struct {
	symbolic *Symbolic
	panels   []float64 // L, supernode by supernode
	values   []float64 // the matrix, kept for refinement only
	valid    bool
	smallest pivotShare
}

// pivotShare is a pivot as a share of the diagonal entry that it started from.
type pivotShare struct {
	position int32
	share    float64
}

// SmallestPivot returns the row whose pivot is the smallest share of its diagonal entry, and that share [-]. A share near
// n units of rounding says that the matrix is singular to working precision, as where nothing fixes the level of a part.
// The row is -1 where the matrix has none.
func (f *Factor) SmallestPivot() (row int, share float64) {
	f.mustBeValid()
	if f.smallest.position < 0 {
		return -1, 1
	}
	return int(f.symbolic.order[f.smallest.position]), f.smallest.share
}

// Updates of a front with at least sharedWork operations are shared between idle workers in groups of sharedColumns
// columns: about a millisecond altogether, and groups of some tens of microseconds.
const (
	sharedWork    = 10e6
	sharedColumns = 32
)

// kernelReach is the number of entries beyond the last panel that a kernel may read: it works on four columns and on rows
// in fours, whether a supernode has them or not.
func kernelReach(tallest int) int { return 3*tallest + 3 }

// Factor computes L for the given values, one for each entry of the pattern. It fails with [NotPositiveDefinite] where
// a pivot is not positive (within rounding of the diagonal entry that it came from) or a value is not finite, and with
// [Interrupted] when ctx ends. Of several bad rows the one eliminated first is named.
func (s *Symbolic) Factor(ctx context.Context, values []float64) (*Factor, error) {
	f := &Factor{symbolic: s, panels: make([]float64, s.panelPtr[len(s.panelPtr)-1]+kernelReach(s.tallest))}
	preferHugePages(f.panels)
	if err := f.Refactor(ctx, values); err != nil {
		return nil, err
	}
	return f, nil
}

// Refactor computes L anew for other values in the same memory. After an error the factor cannot be used until another
// Refactor succeeds.
func (f *Factor) Refactor(ctx context.Context, values []float64) error {
	s := f.symbolic
	if len(values) != len(s.pattern.Index) {
		panic(fmt.Sprintf("sparse: %d values for a pattern of %d entries", len(values), len(s.pattern.Index)))
	}
	f.valid = false
	if err := s.checkFinite(values); err != nil {
		return err
	}
	r := &numeric{symbolic: s, panels: f.panels, values: values, ctx: ctx, updates: make([][]float64, len(s.plan.first))}
	if err := r.run(); err != nil {
		return err
	}
	f.smallest = pivotShare{-1, 1}
	for _, p := range r.smallest {
		if p.position >= 0 && (f.smallest.position < 0 || p.share < f.smallest.share) {
			f.smallest = p
		}
	}
	if s.options.Refine {
		f.values = append(f.values[:0], values...)
	}
	f.valid = true
	return nil
}

func (s *Symbolic) checkFinite(values []float64) error {
	p := s.pattern
	for j := range p.N {
		for _, v := range values[p.Ptr[j]:p.Ptr[j+1]] {
			if !(math.Abs(v) <= math.MaxFloat64) {
				return &NotPositiveDefinite{Row: j, Pivot: v}
			}
		}
	}
	return nil
}

// worker is the memory of one goroutine during a factorisation.
type worker struct {
	stack [2][]float64
	used  [2]int
	rows  []float64 // packed rows
	spare []float64 // up to four columns
	scale []float64
}

// numeric is one run of the multifrontal method.
type numeric struct {
	symbolic *Symbolic
	panels   []float64
	values   []float64
	updates  [][]float64 // task -> its update matrix until the parent takes it
	recycled recycler
	ctx      context.Context
	crew     crew
	broken   []atomic.Bool // task -> it or one below it failed or was stopped
	failure  []failure     // task -> the pivot that it refused, position -1 for none
	smallest []pivotShare  // task -> its smallest pivot
	done     atomic.Int64  // tasks done
}

type failure struct {
	position int32
	pivot    float64
}

func (r *numeric) run() error {
	s := r.symbolic
	p := &s.plan
	r.broken, r.failure = make([]atomic.Bool, len(p.first)), make([]failure, len(p.first))
	r.smallest = make([]pivotShare, len(p.first))
	for t := range r.failure {
		r.failure[t].position, r.smallest[t].position = -1, -1
	}
	r.crew = crew{parent: p.parent, pending: make([]int32, len(p.first)), workers: s.crewSize(), do: r.task}
	for _, up := range p.parent {
		if up >= 0 {
			r.crew.pending[up]++
		}
	}
	r.crew.run(p.starts, s.takeWorker, func(w *worker) { s.spare.Put(w) })
	if err := r.ctx.Err(); err != nil && int(r.done.Load()) < len(p.first) {
		return &Interrupted{Stage: "factor", Done: int(r.done.Load()), Total: len(p.first), Cause: err}
	}
	first := failure{position: -1}
	for _, f := range r.failure {
		if f.position >= 0 && (first.position < 0 || f.position < first.position) {
			first = f
		}
	}
	if first.position >= 0 {
		return &NotPositiveDefinite{Row: int(s.order[first.position]), Pivot: first.pivot}
	}
	return nil
}

// crewSize returns the number of workers of a factorisation; one where starting another costs more than the work.
func (s *Symbolic) crewSize() int {
	if s.flops < leastTask {
		return 1
	}
	return workerCount(s.options.Workers)
}

func (s *Symbolic) takeWorker() *worker {
	w := s.spare.Get().(*worker)
	for side := range w.stack {
		if len(w.stack[side]) < s.plan.stack[side] {
			w.stack[side] = make([]float64, s.plan.stack[side])
			preferHugePages(w.stack[side])
		}
		w.used[side] = 0
	}
	if w.rows == nil {
		w.rows = make([]float64, 4*blockColumns)
	}
	return w
}

// task eliminates the supernodes of one task.
func (r *numeric) task(w *worker, t int32) {
	p := &r.symbolic.plan
	if r.ctx.Err() != nil {
		r.broken[t].Store(true)
	}
	for k := p.first[t]; k <= p.last[t] && !r.broken[t].Load(); k++ {
		if position, pivot := r.supernode(w, t, k); position >= 0 {
			r.failure[t] = failure{position, pivot}
			r.broken[t].Store(true)
		}
	}
	w.used = [2]int{}
	if !r.broken[t].Load() {
		r.done.Add(1)
		return
	}
	if up := p.parent[t]; up >= 0 {
		r.broken[up].Store(true)
	}
}

// supernode assembles the front of supernode k and eliminates its columns. It returns the position of a refused pivot
// and its value, or -1.
func (r *numeric) supernode(w *worker, t, k int32) (int32, float64) {
	s := r.symbolic
	p := &s.plan
	nc, nr := s.shape(int(k))
	m := nr - nc
	front := r.panels[s.panelPtr[k]:s.panelPtr[k+1]]
	clear(front)
	first := int(s.nodes.first[k])
	w.scale = w.scale[:0]
	for j := range nc {
		col := front[j*nr : (j+1)*nr]
		a, b := s.entryPtr[first+j], s.entryPtr[first+j+1]
		for q := a; q < b; q++ {
			col[s.entryRow[q]] = r.values[s.entry[q]]
		}
		w.scale = append(w.scale, col[j])
	}
	side := 0
	if p.odd[k] {
		side = 1
	}
	var rest []float64
	if k == p.last[t] {
		rest = r.recycled.take(m * m)
		r.updates[t] = rest
	} else {
		rest = w.stack[side][w.used[side] : w.used[side]+m*m]
		clear(rest)
		w.used[side] += m * m
	}
	r.gather(w, t, k, front, rest, 1-side)
	if q, pivot := r.eliminateFront(w, front, nr, nc, rest); q >= 0 {
		return int32(first + q), pivot
	}
	for j := range nc {
		root := front[j*nr+j]
		share := root * root / w.scale[j]
		if least := &r.smallest[t]; least.position < 0 || share < least.share {
			*least = pivotShare{int32(first + j), share}
		}
	}
	return -1, 0
}

// gather adds the update matrices of the children of supernode k, in order, and frees them.
func (r *numeric) gather(w *worker, t, k int32, front, rest []float64, side int) {
	s := r.symbolic
	p := &s.plan
	nc, nr := s.shape(int(k))
	size := 0
	for c := p.children[k]; c >= 0 && p.of[c] == t; c = p.sibling[c] {
		size += s.updateSize(int(c))
	}
	at := w.used[side] - size
	w.used[side] = at
	for c := p.children[k]; c >= 0; c = p.sibling[c] {
		up := s.rowUp[s.rowPtr[c]:s.rowPtr[c+1]]
		if p.of[c] == t {
			extendAdd(front, rest, nr, nc, w.stack[side][at:at+len(up)*len(up)], up)
			at += len(up) * len(up)
			continue
		}
		extendAdd(front, rest, nr, nc, r.updates[p.of[c]], up)
		r.recycled.give(r.updates[p.of[c]])
		r.updates[p.of[c]] = nil
	}
}

// extendAdd adds the lower triangle of an update matrix, whose rows are up in the rows of the front.
func extendAdd(front, rest []float64, nr, nc int, u []float64, up []int32) {
	n, m := len(up), nr-nc
	inside := 0 // rows of u that are columns of the front
	for inside < n && int(up[inside]) < nc {
		inside++
	}
	for j, column := range up[:inside] {
		target := front[int(column)*nr : int(column+1)*nr]
		source := u[j*n+j : (j+1)*n]
		rows := up[j:]
		rows = rows[:len(source)]
		for i, v := range source {
			target[rows[i]] += v
		}
	}
	for j := inside; j < n; j++ {
		c := int(up[j]) - nc
		target := rest[c*m : (c+1)*m]
		source := u[j*n+j : (j+1)*n]
		rows := up[j:]
		rows = rows[:len(source)]
		for i, v := range source {
			target[int(rows[i])-nc] += v
		}
	}
}

// eliminateFront computes the first nc columns of the factor of a front and subtracts their products from the rest. It
// returns the first refused pivot's column and value, or -1.
func (r *numeric) eliminateFront(w *worker, front []float64, nr, nc int, rest []float64) (int, float64) {
	for b := 0; b < nc; b += blockColumns {
		e := min(b+blockColumns, nc)
		for j := b; j < e; j += 4 {
			width := min(4, e-j)
			if j > b {
				w.update(front[j*nr+j:], nr, nr-j, front[b*nr:], nr, j, j-b, width)
			}
			if q, pivot := eliminate(front[j*nr+j:], nr, nr-j, width, w.scale[j:]); q >= 0 {
				return j + q, pivot
			}
		}
		r.updateRest(w, front, nr, nc, rest, b, e)
	}
	return -1, 0
}

// updateRest subtracts the products of the columns from b to e-1 from the columns of the front and the rest that follow.
// Large fronts share the work: each group of columns is the same sum whoever forms it.
func (r *numeric) updateRest(w *worker, front []float64, nr, nc int, rest []float64, b, e int) {
	m, depth := nr-nc, e-b
	do := func(w *worker, from, to int) {
		for j := from; j < min(to, nc); j += 4 {
			w.update(front[j*nr+j:], nr, nr-j, front[b*nr:], nr, j, depth, min(4, nc-j))
		}
		for j := max(0, from-nc); j < to-nc; j += 4 {
			w.update(rest[j*m+j:], m, m-j, front[b*nr:], nr, nc+j, depth, min(4, m-j))
		}
	}
	inner := (nc - e + sharedColumns - 1) / sharedColumns
	outer := (m + sharedColumns - 1) / sharedColumns
	if float64(nr-e)*float64(nr-e)*float64(depth) < sharedWork || r.crew.workers == 1 {
		do(w, e, nc)
		do(w, nc, nr)
		return
	}
	r.crew.share(w, inner+outer, func(w *worker, k int) {
		if k < inner {
			from := e + k*sharedColumns
			do(w, from, min(from+sharedColumns, nc))
			return
		}
		from := nc + (k-inner)*sharedColumns
		do(w, from, min(from+sharedColumns, nr))
	})
}

// update subtracts from width columns of c, rows entries each, the products of the rows of a from row r on with its rows
// r to r+width-1.
func (w *worker) update(c []float64, ldc, rows int, a []float64, lda, r, depth, width int) {
	packRows(w.rows, a, lda, r, width, depth)
	if width == 4 {
		update(c, ldc, a[r:], lda, w.rows, rows, depth)
		return
	}
	if len(w.spare) < 4*rows {
		w.spare = make([]float64, 8*rows)
	}
	updateNarrow(c, ldc, a[r:], lda, w.rows, rows, depth, width, w.spare)
}
