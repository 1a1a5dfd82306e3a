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
// few. Results equal those of Solve to the last bit. With Options.Refine the whole solution is
// needed and Solve does the work. It fails with [Interrupted] when ctx ends; an index out of range panics.
func (f *Factor) SolveSelected(ctx context.Context, rhs []SparseVector, wanted []int32) ([][]float64, error) {
	f.mustBeValid()
	s := f.symbolic
	s.checkSelection(rhs, wanted)
	values := make([][]float64, len(rhs))
	for r := range values {
		values[r] = make([]float64, len(wanted))
	}
	if s.options.Refine {
		if err := f.selectFromWhole(ctx, rhs, wanted, values); err != nil {
			return nil, err
		}
		return values, nil
	}
	sel := &selection{factor: f, rhs: rhs, values: values, sequence: s.byPosition(rhs), back: make([]bool, len(s.nodes.rows)), wanted: make([]wantedEntry, len(wanted))}
	s.paths(wanted, nil, sel.back)
	for w, i := range wanted {
		sel.wanted[w] = wantedEntry{s.position[i], int32(w)}
	}
	slices.SortFunc(sel.wanted, func(a, b wantedEntry) int {
		return cmp.Or(cmp.Compare(a.position, b.position), cmp.Compare(a.number, b.number))
	})
	count := (len(rhs) + panelWidth - 1) / panelWidth
	done := make([]bool, count)
	runFixed(workerCount(s.options.Workers), count, func(c int) { done[c] = sel.panel(ctx, c) })
	if err := finished("solve", done, ctx); err != nil {
		return nil, err
	}
	return values, nil
}

// selection is one call of SolveSelected.
type selection struct {
	factor   *Factor
	rhs      []SparseVector
	sequence []int32 // right-hand sides by panel
	wanted   []wantedEntry
	back     []bool // supernode -> it is on the path of a wanted entry
	values   [][]float64
}

type wantedEntry struct{ position, number int32 }

// givenEntry is an entry of a panel's right-hand sides.
type givenEntry struct {
	position, column int32
	value            float64
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

// paths marks the supernodes on the paths from the given rows to their roots and appends those not seen before.
func (s *Symbolic) paths(rows []int32, out []int32, seen []bool) []int32 {
	for _, i := range rows {
		for q := s.nodes.of[s.position[i]]; q >= 0 && !seen[q]; q = s.nodes.parent[q] {
			seen[q] = true
			out = append(out, q)
		}
	}
	return out
}

// panel solves for the c-th panel of right-hand sides and tells whether it did.
func (sel *selection) panel(ctx context.Context, c int) bool {
	if ctx.Err() != nil {
		return false
	}
	s := sel.factor.symbolic
	p := s.panels.Get().(*panel)
	defer s.panels.Put(p)
	if need := s.schedule.total * panelWidth; len(p.x) < need {
		p.x = make([]float64, need)
	}
	sequence := sel.sequence[c*panelWidth : min(len(sel.rhs), (c+1)*panelWidth)]
	clear(p.seen)
	p.path, p.kept = p.path[:0], p.kept[:0]
	var given []givenEntry
	for column, r := range sequence {
		v := sel.rhs[r]
		p.path = s.paths(v.Index, p.path, p.seen)
		for e, i := range v.Index {
			given = append(given, givenEntry{s.position[i], int32(column), v.Value[e]})
		}
	}
	slices.Sort(p.path)
	slices.SortStableFunc(given, func(a, b givenEntry) int { return cmp.Compare(a.position, b.position) })
	sel.up(p, given)
	sel.down(p, sequence)
	return true
}

// up walks the path of the panel's right-hand sides. Rows that subtrees share are set before any path comes to them, those
// of a subtree when its turn comes; what the way down needs of a subtree is kept.
func (sel *selection) up(p *panel, given []givenEntry) {
	s := sel.factor.symbolic
	runs, runOf := s.schedule.runs, s.schedule.runOf
	for _, q := range p.path {
		if !runs[runOf[q]].subtree {
			s.set(p, q, given)
		}
	}
	now := int32(-1)
	for at, q := range p.path {
		r := runOf[q]
		if runs[r].subtree && r != now {
			for k := at; k < len(p.path) && runOf[p.path[k]] == r; k++ {
				s.set(p, p.path[k], given)
			}
			now = r
		}
		sel.factor.forward(p, &s.schedule.places, int(q), panelWidth)
		if runs[r].subtree && sel.back[q] {
			p.kept = append(p.kept, s.ownRows(p, q)...)
		}
	}
}

// down walks back along the paths of the wanted entries and reads them.
func (sel *selection) down(p *panel, sequence []int32) {
	s := sel.factor.symbolic
	wanted := sel.wanted
	for k := len(s.schedule.runs) - 1; k >= 0; k-- {
		r := s.schedule.runs[k]
		if !sel.back[r.last] { // every path in a subtree passes through its root
			continue
		}
		for q := r.last; q >= r.first; q-- {
			if !sel.back[q] {
				continue
			}
			own := s.ownRows(p, q)
			switch {
			case !p.seen[q]:
				clear(own)
			case r.subtree:
				copy(own, p.kept[len(p.kept)-len(own):])
				p.kept = p.kept[:len(p.kept)-len(own)]
			}
			sel.factor.backward(p, &s.schedule.places, int(q), panelWidth)
			for len(wanted) > 0 && wanted[len(wanted)-1].position >= s.nodes.first[q] {
				w := wanted[len(wanted)-1]
				row := own[int(w.position-s.nodes.first[q])*panelWidth:]
				for column, r := range sequence {
					sel.values[r][w.number] = row[column]
				}
				wanted = wanted[:len(wanted)-1]
			}
		}
	}
}

// set clears the rows of supernode q and adds the given entries, which are in the order of their positions.
func (s *Symbolic) set(p *panel, q int32, given []givenEntry) {
	own := s.ownRows(p, q)
	clear(own)
	first, last := s.nodes.first[q], s.nodes.first[q+1]
	at, _ := slices.BinarySearchFunc(given, first, func(g givenEntry, i int32) int { return cmp.Compare(g.position, i) })
	for ; at < len(given) && given[at].position < last; at++ {
		own[int(given[at].position-first)*panelWidth+int(given[at].column)] += given[at].value
	}
}

// ownRows returns the rows of supernode q in a panel.
func (s *Symbolic) ownRows(p *panel, q int32) []float64 {
	from := int(s.schedule.first[q]) * panelWidth
	return p.x[from : from+int(s.nodes.first[q+1]-s.nodes.first[q])*panelWidth]
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
