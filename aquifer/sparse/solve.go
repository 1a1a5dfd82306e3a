package sparse

import (
	"context"
	"fmt"
)

// panelWidth is the number of right-hand sides that go through the factor together: a row of a panel is one cache
// line, and the rows that a supernode touches stay in the first-level cache. The kernels are written for this number.
const panelWidth = 8

// panelsTogether is the largest number of panels that one worker takes through the factor side by side, so that an entry
// of the factor comes from memory once for all of them.
const panelsTogether = 4

// pollSupernodes is the number of supernodes between two looks at the context, some milliseconds of work.
const pollSupernodes = 4096

// panel is the memory of one pass of up to panelWidth right-hand sides through the factor.
type panel struct {
	x    []float64 // places x width
	rows []float64 // rows of a supernode x width, and three more rows that a kernel may touch
	path []int32   // supernodes on the paths of sparse right-hand sides
	kept []float64 // rows of subtrees for the way down, supernode by supernode
	seen []bool    // supernode -> it is on the path of an entry that is not zero
}

func (s *Symbolic) newPanel() any {
	return &panel{rows: make([]float64, (s.tallest+3)*panelWidth), seen: make([]bool, len(s.nodes.rows))}
}

// Solve replaces the k right-hand sides in block, N entries each and one after the other, by the solutions of A x = b. A
// solution does not depend, to the last bit, on the others in the block. It fails with [Interrupted] when ctx ends; the
// block is then partly overwritten.
func (f *Factor) Solve(ctx context.Context, block []float64, k int) error {
	n := f.symbolic.pattern.N
	f.mustBeValid()
	if k < 0 || len(block) != n*k {
		panic(fmt.Sprintf("sparse: Solve of %d right-hand sides of %d rows in %d entries", k, n, len(block)))
	}
	if f.symbolic.options.Refine {
		return f.solveRefined(ctx, block, k)
	}
	return f.solvePlain(ctx, block, k)
}

func (f *Factor) mustBeValid() {
	if !f.valid {
		panic("sparse: factor used after a failed Refactor")
	}
}

func (f *Factor) solvePlain(ctx context.Context, block []float64, k int) error {
	s := f.symbolic
	n := s.pattern.N
	workers := workerCount(s.options.Workers)
	count := (k + panelWidth - 1) / panelWidth
	together := max(1, min(panelsTogether, count/workers))
	groups := (count + together - 1) / together
	done := make([]bool, groups)
	runFixed(workers, groups, func(c int) {
		from := c * together * panelWidth
		to := min(k, from+together*panelWidth)
		done[c] = f.solveGroup(ctx, block[from*n:to*n], to-from)
	})
	return finished("solve", done, ctx)
}

// finished returns nil where all steps were done, and the context's error otherwise.
func finished(stage string, done []bool, ctx context.Context) error {
	count := 0
	for _, d := range done {
		if d {
			count++
		}
	}
	if count == len(done) {
		return nil
	}
	return &Interrupted{Stage: stage, Done: count, Total: len(done), Cause: ctx.Err()}
}

// solveGroup solves for up to panelsTogether panels of right-hand sides and tells whether it came to the end. Supernodes
// that no entry other than zero leads to are passed over on the way up.
func (f *Factor) solveGroup(ctx context.Context, block []float64, k int) bool {
	s := f.symbolic
	n := s.pattern.N
	var panels [panelsTogether]*panel
	var blocks [panelsTogether][]float64
	count := (k + panelWidth - 1) / panelWidth
	width := panelWidth
	if k == 1 {
		width = 1
	}
	for c := range count {
		p := s.panels.Get().(*panel)
		defer s.panels.Put(p)
		if need := s.schedule.total * width; len(p.x) < need {
			p.x = make([]float64, need)
		}
		panels[c], blocks[c] = p, block[c*panelWidth*n:min(k, (c+1)*panelWidth)*n]
		s.mark(p, blocks[c])
		s.loadShared(p, blocks[c], width)
	}
	polled := 0
	stopped := func(r run) bool {
		polled += int(r.last - r.first + 1)
		if polled < pollSupernodes {
			return false
		}
		polled = 0
		return ctx.Err() != nil
	}
	for _, r := range s.schedule.runs {
		if stopped(r) {
			return false
		}
		for c, p := range panels[:count] {
			f.forwardRun(p, blocks[c], r, width)
		}
	}
	for k := len(s.schedule.runs) - 1; k >= 0; k-- {
		r := s.schedule.runs[k]
		if stopped(r) {
			return false
		}
		for c, p := range panels[:count] {
			f.backwardRun(p, blocks[c], r, width)
		}
	}
	return true
}

// mark finds the supernodes on the paths from the entries of the block that are not zero to the roots.
func (s *Symbolic) mark(p *panel, block []float64) {
	clear(p.seen)
	n := s.pattern.N
	left := len(p.seen)
	for from := 0; from < len(block); from += n {
		for v, b := range block[from : from+n] {
			if b == 0 {
				continue
			}
			for q := s.nodes.of[s.position[v]]; q >= 0 && !p.seen[q]; q = s.nodes.parent[q] {
				p.seen[q] = true
				if left--; left == 0 {
					return
				}
			}
		}
	}
}

// loadShared fills the rows that subtrees share, those that a path leads to.
func (s *Symbolic) loadShared(p *panel, block []float64, width int) {
	for _, r := range s.schedule.runs {
		if !r.subtree && p.seen[r.last] {
			s.load(p, block, r.last, width)
		}
	}
}

// forwardRun takes one run of supernodes on the way up. Rows of a separator stay in the panel from the first run below it to
// the last; those of a subtree go back to the block.
func (f *Factor) forwardRun(p *panel, block []float64, r run, width int) {
	s := f.symbolic
	if !p.seen[r.last] { // every path in a subtree passes through its root
		return
	}
	if !r.subtree {
		f.forward(p, &s.schedule.places, int(r.last), width)
		return
	}
	for q := r.first; q <= r.last; q++ {
		if p.seen[q] {
			s.load(p, block, q, width)
		}
	}
	for q := r.first; q <= r.last; q++ {
		if p.seen[q] {
			f.forward(p, &s.schedule.places, int(q), width)
			s.unload(p, block, q, width)
		}
	}
}

func (f *Factor) backwardRun(p *panel, block []float64, r run, width int) {
	s := f.symbolic
	for q := r.last; q >= r.first; q-- {
		switch {
		case !p.seen[q]:
			at := int(s.schedule.first[q]) * width
			clear(p.x[at : at+int(s.nodes.first[q+1]-s.nodes.first[q])*width])
		case r.subtree:
			s.load(p, block, q, width)
		}
		f.backward(p, &s.schedule.places, int(q), width)
		s.unload(p, block, q, width)
	}
}

// load copies the rows of supernode q from the columns of the block, zeros beyond the last. The sum makes a zero of a
// negative zero, so that it is the same as the zero of rows that no path leads to.
func (s *Symbolic) load(p *panel, block []float64, q int32, width int) {
	n := s.pattern.N
	rows := s.order[s.nodes.first[q]:s.nodes.first[q+1]]
	x := p.x[int(s.schedule.first[q])*width:]
	if width == 1 {
		for i, v := range rows {
			x[i] = block[v] + 0
		}
		return
	}
	k := len(block) / n
	for i, v := range rows {
		row := (*[panelWidth]float64)(x[i*panelWidth:])
		at := int(v)
		for c := range k {
			row[c] = block[at] + 0
			at += n
		}
		clear(row[k:])
	}
}

// unload copies the rows of supernode q back into the columns of the block.
func (s *Symbolic) unload(p *panel, block []float64, q int32, width int) {
	n := s.pattern.N
	rows := s.order[s.nodes.first[q]:s.nodes.first[q+1]]
	x := p.x[int(s.schedule.first[q])*width:]
	if width == 1 {
		for i, v := range rows {
			block[v] = x[i]
		}
		return
	}
	k := len(block) / n
	for i, v := range rows {
		row := (*[panelWidth]float64)(x[i*panelWidth:])
		at := int(v)
		for c := range k {
			block[at] = row[c]
			at += n
		}
	}
}

// forward solves with the columns of supernode q and takes their products from the rows below. Every entry has its
// products subtracted in the order of the columns.
func (f *Factor) forward(p *panel, t *places, q, width int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:]
	rows := p.gather(s, t, q, nc, nr, width)
	for j := 0; j < nc; j += 4 {
		w := min(4, nc-j)
		if width == 1 {
			forwardOne(rows[j:nr], front[j*nr+j:], nr, w)
			continue
		}
		forwardTriangle(rows[j*panelWidth:], front[j*nr+j:], nr, w)
		if m := nr - j - w; m > 0 {
			forwardRows(rows[(j+w)*panelWidth:], front[j*nr+j+w:], nr, rows[j*panelWidth:], m, w)
		}
	}
	p.scatter(s, t, q, nc, nr, width)
}

// backward solves with the transposed columns of supernode q. Every entry has its products subtracted in the order of
// the rows that follow its block of four columns, then of those in the block.
func (f *Factor) backward(p *panel, t *places, q, width int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:]
	rows := p.gather(s, t, q, nc, nr, width)
	for j := (nc - 1) &^ 3; j >= 0; j -= 4 {
		w := min(4, nc-j)
		if width == 1 {
			backwardOne(rows[j:nr], front[j*nr+j:], nr, w)
			continue
		}
		if m := nr - j - w; m > 0 {
			backwardRows(rows[j*panelWidth:], front[j*nr+j+w:], nr, rows[(j+w)*panelWidth:], m, w)
		}
		backwardTriangle(rows[j*panelWidth:], front[j*nr+j:], nr, w)
	}
	first := int(t.first[q])
	copy(p.x[first*width:(first+nc)*width], rows)
}

// gather copies the rows of supernode q side by side.
func (p *panel) gather(s *Symbolic, t *places, q, nc, nr, width int) []float64 {
	first := int(t.first[q])
	rows := p.rows
	copy(rows, p.x[first*width:(first+nc)*width])
	below := t.rows[s.rowPtr[q]:s.rowPtr[q+1]]
	if width == 1 {
		out := rows[nc:nr]
		for i, row := range below {
			out[i] = p.x[row]
		}
		return rows
	}
	gatherRows(rows[nc*panelWidth:], p.x, below)
	return rows
}

// scatter puts the rows of supernode q back.
func (p *panel) scatter(s *Symbolic, t *places, q, nc, nr, width int) {
	first := int(t.first[q])
	copy(p.x[first*width:(first+nc)*width], p.rows)
	below := t.rows[s.rowPtr[q]:s.rowPtr[q+1]]
	if width == 1 {
		in := p.rows[nc:nr]
		for i, row := range below {
			p.x[row] = in[i]
		}
		return
	}
	scatterRows(p.x, p.rows[nc*panelWidth:], below)
}
