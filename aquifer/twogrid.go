package aquifer

import (
	"context"
	"math"
)

// lane is how many fields the smoother takes through a row of the matrix together: one line of the cache.
const lane = 8

// FineSystem is the finer model's matrix in a state: which entries of the exchanges answer to the head.
type FineSystem struct {
	finer    *Finer
	coarse   *Settled
	diagonal []float64

	coarseExchange, fineExchange exchangeAt
}

// System makes the finer model's system with the entries switched off that are listed; coarse solves with the coarse model's matrix in the
// corresponding state.
func (f *Finer) System(coarse *Settled, off []SwitchedOff) *FineSystem {
	s := &FineSystem{finer: f, coarse: coarse, diagonal: make([]float64, f.pattern.N)}
	s.coarseExchange, s.fineExchange = f.Coarse.exchanges(coarse.Off), f.exchanges(off)
	for i := range s.diagonal {
		s.diagonal[i] = f.matrix.Values[f.slots.Diagonal[i]]
	}
	for _, o := range off {
		e := &f.Exchanges[o.Exchange]
		s.diagonal[f.free[e.Nodes[o.Entry]]] -= e.Conductance[o.Entry]
	}
	return s
}

const (
	// SolvedShare of the first residual, in the norm of the diagonal's inverse, may be left: differences between the meshes then carry an
	// algebraic remainder of about a hundredth.
	SolvedShare = 0.01
	// SolvedFinely is the same where the difference at the very node of a source counts, which settles last.
	SolvedFinely = 0.001
	// mostCycles bounds them: a cycle takes the residual down by ten on good triangles, by three on bad ones.
	mostCycles = 30
)

// Improve takes the fields x to the solutions of A x = b, both over the unknowns, by cycles of smoothing forward, correction on the
// coarse mesh and smoothing backward (two-grid method with Gauss-Seidel sweeps; Brandt 1977, Math. Comput. 31), until a share of the first residual of
// each is left, and returns what is left at worst and the cycles made. Start from the coarse solutions, interpolated.
func (s *FineSystem) Improve(ctx context.Context, x, b [][]float64, share float64, workers int) (left float64, cycles int, err error) {
	nc := s.finer.Coarse.Unknowns()
	groups := (len(x) + lane - 1) / lane
	xs, bs := make([][]float64, groups), make([][]float64, groups)
	block := make([]float64, nc*len(x))
	part := func(g int) []float64 { return block[nc*g*lane : min(len(block), nc*(g+1)*lane)] }
	norms := make([][lane]float64, groups)
	var first [][lane]float64
	for cycles = 0; cycles < mostCycles; {
		err := inParallel(ctx, groups, workers, func(_ context.Context, g int) error {
			if cycles == 0 {
				xs[g], bs[g] = s.weave(x, g), s.weave(b, g)
			}
			s.sweep(xs[g], bs[g], false)
			norms[g] = s.restrict(xs[g], bs[g], part(g))
			return nil
		})
		if err != nil {
			return 0, cycles, err
		}
		if cycles == 0 {
			first = append(first, norms...)
		}
		if err := s.coarse.SolveFree(ctx, block, len(x)); err != nil {
			return 0, cycles, err
		}
		err = inParallel(ctx, groups, workers, func(_ context.Context, g int) error {
			s.correct(xs[g], part(g))
			s.sweep(xs[g], bs[g], true)
			return nil
		})
		if err != nil {
			return 0, cycles, err
		}
		cycles++
		if left = worstShare(norms, first); left <= share {
			break
		}
	}
	return left, cycles, inParallel(ctx, groups, workers, func(_ context.Context, g int) error {
		s.unweave(x, xs[g], g)
		return nil
	})
}

// Smooth makes double sweeps only: what they leave is what the coarse mesh shows too.
func (s *FineSystem) Smooth(ctx context.Context, x, b [][]float64, sweeps, workers int) error {
	return inParallel(ctx, (len(x)+lane-1)/lane, workers, func(_ context.Context, g int) error {
		y, r := s.weave(x, g), s.weave(b, g)
		for range sweeps {
			s.sweep(y, r, false)
			s.sweep(y, r, true)
		}
		s.unweave(x, y, g)
		return nil
	})
}

// unweave takes group g apart again.
func (s *FineSystem) unweave(x [][]float64, y []float64, g int) {
	fields := x[g*lane : min(len(x), (g+1)*lane)]
	if len(fields) == 1 {
		copy(fields[0], y)
		return
	}
	for k := range s.diagonal {
		o := y[k*lane : k*lane+lane]
		for c, f := range fields {
			f[k] = o[c]
		}
	}
}

// worstShare is the largest of the norms over the first ones.
func worstShare(norms, first [][lane]float64) float64 {
	worst := 0.0
	for g := range norms {
		for c, v := range norms[g] {
			if v > 0 {
				worst = math.Max(worst, math.Sqrt(v/first[g][c]))
			}
		}
	}
	return worst
}

// weave interleaves the fields of group g; one alone stays as it is.
func (s *FineSystem) weave(x [][]float64, g int) []float64 {
	fields := x[g*lane : min(len(x), (g+1)*lane)]
	if len(fields) == 1 {
		return append([]float64(nil), fields[0]...)
	}
	out := make([]float64, len(s.diagonal)*lane)
	for k := range s.diagonal {
		o := out[k*lane : k*lane+lane]
		for c, f := range fields {
			o[c] = f[k]
		}
	}
	return out
}

// residual computes b - (off-diagonal part) x in row i for a lane of fields, or for one.
func (f *Finer) residual(i int, x, b []float64) (r [lane]float64) {
	if len(x) == f.pattern.N {
		v := b[i]
		for p := f.start[i]; p < f.start[i+1]; p++ {
			v -= float64(f.value[p] * x[f.index[p]])
		}
		r[0] = v
		return r
	}
	copy(r[:], b[i*lane:i*lane+lane])
	for p := f.start[i]; p < f.start[i+1]; p++ {
		v := f.value[p]
		j := int(f.index[p]) * lane
		y := x[j : j+lane : j+lane]
		for c := range lane {
			r[c] -= float64(v * y[c])
		}
	}
	return r
}

// sweep is one Gauss-Seidel sweep.
func (s *FineSystem) sweep(x, b []float64, backward bool) {
	n := len(s.diagonal)
	width := len(x) / n
	for k := range n {
		i := k
		if backward {
			i = n - 1 - k
		}
		r := s.finer.residual(i, x, b)
		d := 1 / s.diagonal[i]
		y := x[i*width : i*width+width]
		for c := range y {
			y[c] = r[c] * d
		}
	}
}

// restrict sums the residual into the coarse unknowns, field after field, and returns its squared norms.
func (s *FineSystem) restrict(x, b, out []float64) (norm [lane]float64) {
	f := s.finer
	nc := f.Coarse.Unknowns()
	clear(out)
	add := func(coarse int32, r *[lane]float64, weight float64) {
		u := f.Coarse.free[coarse]
		if u < 0 {
			return
		}
		for c := range len(out) / nc {
			out[c*nc+int(u)] += weight * r[c]
		}
	}
	first := int32(len(f.Coarse.Mesh.X))
	width := len(x) / len(s.diagonal)
	for i, node := range f.nodeOf {
		r := f.residual(i, x, b)
		for c := range width {
			r[c] -= s.diagonal[i] * x[i*width+c]
			norm[c] += r[c] * r[c] / s.diagonal[i]
		}
		if node < first {
			add(node, &r, 1)
			continue
		}
		e := f.ends[node-first]
		add(e[0], &r, 0.5)
		add(e[1], &r, 0.5)
	}
	return norm
}

// correct adds the coarse fields, interpolated linearly.
func (s *FineSystem) correct(x, coarse []float64) {
	f := s.finer
	nc := f.Coarse.Unknowns()
	fields, width := len(coarse)/nc, len(x)/len(s.diagonal)
	add := func(i int, node int32, weight float64) {
		if u := f.Coarse.free[node]; u >= 0 {
			for c := range fields {
				x[i*width+c] += weight * coarse[c*nc+int(u)]
			}
		}
	}
	first := int32(len(f.Coarse.Mesh.X))
	for i, node := range f.nodeOf {
		if node < first {
			add(i, node, 1)
			continue
		}
		e := f.ends[node-first]
		add(i, e[0], 0.5)
		add(i, e[1], 0.5)
	}
}
