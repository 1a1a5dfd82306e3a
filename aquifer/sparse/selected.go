package sparse

import (
	"cmp"
	"context"
	"fmt"
	"slices"
)

// SparseVector is a right-hand side with few entries. Entries with the same index add up.
type SparseVector struct {
	Index []int32
	Value []float64 // [any]
}

// SolveSelected solves A x = b for each right-hand side and returns only the wanted entries: values[r][w] is entry
// wanted[w] of the solution for rhs[r]. It walks the paths of the elimination tree from the entries of the right-hand
// sides to the root, and back along the paths of the wanted entries (Gilbert 1994), so it costs little where these are
// few. Results equal those of Solve to rounding. With Options.Refine the whole solution is needed and Solve does the
// work. It fails with [Interrupted] when ctx ends; an index out of range panics.
func (f *Factor) SolveSelected(ctx context.Context, rhs []SparseVector, wanted []int32) ([][]float64, error) {
	f.mustBeValid()
	f.symbolic.checkSelection(rhs, wanted)
	values := make([][]float64, len(rhs))
	for r := range values {
		values[r] = make([]float64, len(wanted))
	}
	if f.symbolic.options.Refine {
		if err := f.selectFromWhole(ctx, rhs, wanted, values); err != nil {
			return nil, err
		}
		return values, nil
	}
	s := f.symbolic
	sequence := s.byPosition(rhs)
	count := (len(rhs) + panelWidth - 1) / panelWidth
	done := make([]bool, count)
	back := s.paths(wanted, nil, make([]bool, len(s.nodes.rows)))
	slices.Sort(back)
	runFixed(workerCount(s.options.Workers), count, func(c int) {
		from := c * panelWidth
		to := min(len(rhs), from+panelWidth)
		done[c] = f.selectPanel(ctx, rhs, sequence[from:to], back, wanted, values)
	})
	if err := finished("solve", done, ctx); err != nil {
		return nil, err
	}
	return values, nil
}

func (s *Symbolic) checkSelection(rhs []SparseVector, wanted []int32) {
	n := s.pattern.N
	for r, v := range rhs {
		if len(v.Index) != len(v.Value) {
			panic(fmt.Sprintf("sparse: right-hand side %d has %d indices and %d values", r, len(v.Index), len(v.Value)))
		}
		for _, i := range v.Index {
			if uint(i) >= uint(n) {
				panic(fmt.Sprintf("sparse: right-hand side %d has index %d of %d", r, i, n))
			}
		}
	}
	for _, i := range wanted {
		if uint(i) >= uint(n) {
			panic(fmt.Sprintf("sparse: wanted entry %d of %d", i, n))
		}
	}
}

// byPosition orders right-hand sides by where their first entry is eliminated, so that neighbours share their paths.
func (s *Symbolic) byPosition(rhs []SparseVector) []int32 {
	lowest := make([]int32, len(rhs))
	sequence := make([]int32, len(rhs))
	for r, v := range rhs {
		sequence[r], lowest[r] = int32(r), int32(s.pattern.N)
		for _, i := range v.Index {
			lowest[r] = min(lowest[r], s.position[i])
		}
	}
	slices.SortStableFunc(sequence, func(a, b int32) int { return cmp.Compare(lowest[a], lowest[b]) })
	return sequence
}

// paths appends the supernodes on the paths from the given rows to their roots that are not seen yet.
func (s *Symbolic) paths(rows []int32, out []int32, seen []bool) []int32 {
	for _, i := range rows {
		for q := s.nodes.of[s.position[i]]; q >= 0 && !seen[q]; q = s.nodes.parent[q] {
			seen[q] = true
			out = append(out, q)
		}
	}
	return out
}

// selectPanel solves for the right-hand sides in sequence and tells whether it did. Its panel is all zeros on entry and left so.
func (f *Factor) selectPanel(ctx context.Context, rhs []SparseVector, sequence, back, wanted []int32, values [][]float64) bool {
	s := f.symbolic
	if ctx.Err() != nil {
		return false
	}
	k := panelWidth
	p := s.blank.Get().(*panel)
	defer s.blank.Put(p)
	if len(p.x) < s.pattern.N*panelWidth {
		p.x = make([]float64, s.pattern.N*panelWidth)
	}
	p.path = p.path[:0]
	for c, r := range sequence {
		p.path = s.paths(rhs[r].Index, p.path, p.seen)
		for e, i := range rhs[r].Index {
			p.x[int(s.position[i])*k+c] += rhs[r].Value[e]
		}
	}
	slices.Sort(p.path)
	for _, q := range p.path {
		p.seen[q] = false
		f.forward(p, &s.inPlace, int(q), k)
	}
	for at := len(back) - 1; at >= 0; at-- {
		f.backward(p, &s.inPlace, int(back[at]), k)
	}
	for c, r := range sequence {
		for w, i := range wanted {
			values[r][w] = p.x[int(s.position[i])*k+c]
		}
	}
	for _, list := range [2][]int32{p.path, back} {
		for _, q := range list {
			clear(p.x[int(s.nodes.first[q])*k : int(s.nodes.first[q+1])*k])
		}
	}
	return true
}

// selectFromWhole solves in full and picks the wanted entries.
func (f *Factor) selectFromWhole(ctx context.Context, rhs []SparseVector, wanted []int32, values [][]float64) error {
	n := f.symbolic.pattern.N
	for from := 0; from < len(rhs); from += 4 * panelWidth {
		to := min(len(rhs), from+4*panelWidth)
		block := make([]float64, n*(to-from))
		for r := from; r < to; r++ {
			for e, i := range rhs[r].Index {
				block[(r-from)*n+int(i)] += rhs[r].Value[e]
			}
		}
		if err := f.Solve(ctx, block, to-from); err != nil {
			return err
		}
		for r := from; r < to; r++ {
			for w, i := range wanted {
				values[r][w] = block[(r-from)*n+int(i)]
			}
		}
	}
	return nil
}
