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
	x    []float64 // positions x width
	rows []float64 // rows of a supernode x width, and three more rows that a kernel may touch
	path []int32   // supernodes on the paths of sparse right-hand sides
	seen []bool    // supernode -> it is on the path
}

func (s *Symbolic) newPanel() any { return &panel{rows: make([]float64, (s.tallest+3)*panelWidth)} }

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

// solveGroup solves for up to panelsTogether panels of right-hand sides and tells whether it came to the end.
func (f *Factor) solveGroup(ctx context.Context, block []float64, k int) bool {
	s := f.symbolic
	n := s.pattern.N
	var panels [panelsTogether]*panel
	count := (k + panelWidth - 1) / panelWidth
	width := panelWidth
	if k == 1 {
		width = 1
	}
	for c := range count {
		p := s.panels.Get().(*panel)
		defer s.panels.Put(p)
		if len(p.x) < n*width {
			p.x = make([]float64, n*width)
		}
		from, to := c*panelWidth, min(k, (c+1)*panelWidth)
		s.load(p.x[:n*width], block[from*n:to*n], to-from, width)
		panels[c] = p
	}
	total := len(s.nodes.rows)
	for q := range total {
		if q%pollSupernodes == 0 && ctx.Err() != nil {
			return false
		}
		for _, p := range panels[:count] {
			f.forward(p, q, width)
		}
	}
	for q := total - 1; q >= 0; q-- {
		if q%pollSupernodes == 0 && ctx.Err() != nil {
			return false
		}
		for _, p := range panels[:count] {
			f.backward(p, q, width)
		}
	}
	for c, p := range panels[:count] {
		from, to := c*panelWidth, min(k, (c+1)*panelWidth)
		s.unload(p.x[:n*width], block[from*n:to*n], to-from, width)
	}
	return true
}

// load copies k columns into rows of width in elimination order, zeros beyond the k-th.
func (s *Symbolic) load(x, block []float64, k, width int) {
	n := s.pattern.N
	if width == 1 {
		for i, v := range s.order {
			x[i] = block[v]
		}
		return
	}
	for i, v := range s.order {
		row := (*[panelWidth]float64)(x[i*panelWidth:])
		at := int(v)
		for c := range k {
			row[c] = block[at]
			at += n
		}
		clear(row[k:])
	}
}

// unload copies the rows back into k columns.
func (s *Symbolic) unload(x, block []float64, k, width int) {
	n := s.pattern.N
	if width == 1 {
		for i, v := range s.order {
			block[v] = x[i]
		}
		return
	}
	for i, v := range s.order {
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
func (f *Factor) forward(p *panel, q, width int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:]
	rows := p.gather(s, q, nc, nr, width)
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
	p.scatter(s, q, nc, nr, width)
}

// backward solves with the transposed columns of supernode q. Every entry has its products subtracted in the order of
// the rows that follow its block of four columns, then of those in the block.
func (f *Factor) backward(p *panel, q, width int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:]
	rows := p.gather(s, q, nc, nr, width)
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
	first := int(s.nodes.first[q])
	copy(p.x[first*width:(first+nc)*width], rows)
}

// gather copies the rows of supernode q side by side.
func (p *panel) gather(s *Symbolic, q, nc, nr, width int) []float64 {
	first := int(s.nodes.first[q])
	rows := p.rows
	copy(rows, p.x[first*width:(first+nc)*width])
	below := s.rowIndex[s.rowPtr[q]:s.rowPtr[q+1]]
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
func (p *panel) scatter(s *Symbolic, q, nc, nr, width int) {
	first := int(s.nodes.first[q])
	copy(p.x[first*width:(first+nc)*width], p.rows)
	below := s.rowIndex[s.rowPtr[q]:s.rowPtr[q+1]]
	if width == 1 {
		in := p.rows[nc:nr]
		for i, row := range below {
			p.x[row] = in[i]
		}
		return
	}
	scatterRows(p.x, p.rows[nc*panelWidth:], below)
}
