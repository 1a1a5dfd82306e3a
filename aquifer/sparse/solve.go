package sparse

import (
	"context"
	"fmt"
)

// panelWidth is the number of right-hand sides that go through the factor together: a row of a panel is one cache
// line, and the block of rows that a supernode touches stays in the first-level cache.
const panelWidth = 8

// panel is the memory of one pass through the factor.
type panel struct {
	x    []float64 // positions x width
	rows []float64 // rows of a supernode x width
	path []int32   // supernodes on the paths of sparse right-hand sides
	seen []bool    // supernode -> it is on the path
}

func (s *Symbolic) takePanel(width int) *panel {
	p := s.panels.Get().(*panel)
	if len(p.x) < s.pattern.N*width {
		p.x = make([]float64, s.pattern.N*width)
	}
	return p
}

// Solve replaces the k right-hand sides in block, N entries each and one after the other, by the solutions of A x = b. A
// solution does not depend, to the last bit, on the others in the block. It fails with [Interrupted] when ctx ends; the
// block is then partly overwritten.
func (f *Factor) Solve(ctx context.Context, block []float64, k int) error {
	s := f.symbolic
	n := s.pattern.N
	f.mustBeValid()
	if k < 0 || len(block) != n*k {
		panic(fmt.Sprintf("sparse: Solve of %d right-hand sides of %d rows in %d entries", k, n, len(block)))
	}
	if s.options.Refine {
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
	count := (k + panelWidth - 1) / panelWidth
	runFixed(workerCount(s.options.Workers), count, func(c int) {
		from := c * panelWidth
		to := min(k, from+panelWidth)
		f.solvePanel(ctx, block[from*n:to*n], to-from)
	})
	if err := ctx.Err(); err != nil {
		return &Interrupted{Stage: "solve", Done: 0, Total: count, Cause: err}
	}
	return nil
}

// solvePanel solves for up to panelWidth right-hand sides.
func (f *Factor) solvePanel(ctx context.Context, block []float64, k int) {
	s := f.symbolic
	n := s.pattern.N
	if ctx.Err() != nil {
		return
	}
	p := s.takePanel(k)
	defer s.panels.Put(p)
	x := p.x[:n*k]
	for c := range k {
		column := block[c*n : (c+1)*n]
		for i, v := range s.order {
			x[i*k+c] = column[v]
		}
	}
	total := len(s.nodes.rows)
	for q := range total {
		if q%pollSupernodes == 0 && ctx.Err() != nil {
			return
		}
		f.forward(p, q, k)
	}
	for q := total - 1; q >= 0; q-- {
		if q%pollSupernodes == 0 && ctx.Err() != nil {
			return
		}
		f.backward(p, q, k)
	}
	for c := range k {
		column := block[c*n : (c+1)*n]
		for i, v := range s.order {
			column[v] = x[i*k+c]
		}
	}
}

// pollSupernodes is the number of supernodes between two looks at the context, about a millisecond of work.
const pollSupernodes = 4096

// forward solves with the columns of supernode q and takes their products from the rows below.
func (f *Factor) forward(p *panel, q, k int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:s.panelPtr[q+1]]
	first := int(s.nodes.first[q])
	x := p.x
	below := s.rowIndex[s.rowPtr[q]:s.rowPtr[q+1]]
	for j := range nc {
		col := front[j*nr : (j+1)*nr]
		xj := x[(first+j)*k : (first+j+1)*k]
		for c := range xj {
			xj[c] /= col[j]
		}
		for i := j + 1; i < nc; i++ {
			v := col[i]
			xi := x[(first+i)*k : (first+i+1)*k]
			for c := range xi {
				xi[c] -= float64(v * xj[c])
			}
		}
		for i, row := range below {
			v := col[nc+i]
			xi := x[int(row)*k : int(row+1)*k]
			for c := range xi {
				xi[c] -= float64(v * xj[c])
			}
		}
	}
}

// backward solves with the transposed columns of supernode q.
func (f *Factor) backward(p *panel, q, k int) {
	s := f.symbolic
	nc, nr := s.shape(q)
	front := f.panels[s.panelPtr[q]:s.panelPtr[q+1]]
	first := int(s.nodes.first[q])
	x := p.x
	below := s.rowIndex[s.rowPtr[q]:s.rowPtr[q+1]]
	for j := nc - 1; j >= 0; j-- {
		col := front[j*nr : (j+1)*nr]
		xj := x[(first+j)*k : (first+j+1)*k]
		for i, row := range below {
			v := col[nc+i]
			xi := x[int(row)*k : int(row+1)*k]
			for c := range xj {
				xj[c] -= float64(v * xi[c])
			}
		}
		for i := j + 1; i < nc; i++ {
			v := col[i]
			xi := x[(first+i)*k : (first+i+1)*k]
			for c := range xj {
				xj[c] -= float64(v * xi[c])
			}
		}
		for c := range xj {
			xj[c] /= col[j]
		}
	}
}
