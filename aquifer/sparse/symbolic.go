package sparse

import (
	"context"
	"fmt"
	"sync"
)

// Options of an analysis. The zero value is the default.
type Options struct {
	Workers int  // goroutines that may work at once; 0: GOMAXPROCS when the work starts. Results do not depend on it.
	Refine  bool // Solve and SolveSelected add one step of iterative refinement
}

// Symbolic is what can be known of a factorisation from the pattern alone. It is immutable and may be used from
// several goroutines at once.
type Symbolic struct {
	pattern  *Pattern
	options  Options
	order    []int32 // position -> row of the caller
	position []int32 // row of the caller -> position
	nodes    partition
	rowPtr   []int   // supernode -> its rows below its columns
	rowUp    []int32 // place of each row in the rows of the parent, its columns included
	panelPtr []int   // supernode -> its panel in Factor.values, rows x columns by columns
	entryPtr []int32 // column -> its entries of the matrix
	entry    []int32 // slots in Values
	entryRow []int32 // rows within the supernode's panel
	plan     plan
	schedule schedule
	nonZeros int64
	flops    float64
	tallest  int        // rows of the largest supernode
	spare    *sync.Pool // *worker
	panels   *sync.Pool // *panel
}

// Analyse orders the matrix and finds the structure of its factor. x and y are coordinates of the rows, N each and finite, in
// any unit but the same for both; where both are nil the order comes from the graph alone (minimum degree). The result
// does not depend on the number of workers. It fails only when ctx ends ([Interrupted]); a wrong pattern or length
// panics. Method and sources: package documentation.
func Analyse(ctx context.Context, p *Pattern, x, y []float64, o Options) (*Symbolic, error) {
	p.check()
	if o.Workers < 0 || len(x) != len(y) || (x != nil && len(x) != p.N) {
		panic(fmt.Sprintf("sparse: Analyse of %d rows with %d and %d coordinates and %d workers", p.N, len(x), len(y), o.Workers))
	}
	const steps = 4
	stop := func(done int) error {
		if err := ctx.Err(); err != nil {
			return &Interrupted{Stage: "analyse", Done: done, Total: steps, Cause: err}
		}
		return nil
	}
	if err := stop(0); err != nil {
		return nil, err
	}
	workers := workerCount(o.Workers)
	g, order := orderGraph(ctx, p, x, y, workers)
	if err := stop(1); err != nil {
		return nil, err
	}
	s := &Symbolic{pattern: p, options: o}
	order = s.buildTree(g, order)
	position := invert(order)
	if err := stop(2); err != nil {
		return nil, err
	}
	rowPtr, rowIndex := s.nodes.rowLists(g, order, position)
	s.rowPtr = rowPtr
	s.layout(rowIndex)
	if err := stop(3); err != nil {
		return nil, err
	}
	s.mapEntries(g, order, position, rowIndex, workers)
	s.plan = newPlan(s)
	s.schedule = newSchedule(s, rowIndex)
	s.spare = &sync.Pool{New: func() any { return &worker{} }}
	s.panels = &sync.Pool{New: s.newPanel}
	return s, nil
}

// leastDissected is the number of rows up to which minimum degree orders the whole matrix: dissection saves less fill there
// than it costs time.
const leastDissected = 1000

// orderings keeps the memory of minimum degree from one small matrix to the next.
var orderings = sync.Pool{New: func() any { return new(minDegree) }}

// orderGraph returns the graph of the matrix and its nodes in elimination order.
func orderGraph(ctx context.Context, p *Pattern, x, y []float64, workers int) (*graph, []int32) {
	if x != nil && p.N > leastDissected {
		return dissect(ctx, p, x, y, workers)
	}
	rows := make([]int32, p.N)
	for i := range rows {
		rows[i] = int32(i)
	}
	g := newGraph(p, rows)
	m := orderings.Get().(*minDegree)
	order := m.order(g.n, g.start, g.to)
	if p.N <= leastDissected {
		orderings.Put(m)
	}
	return g, order
}

// buildTree settles order, position and supernodes from a first order of the nodes, and returns the order that follows
// the supernodes.
func (s *Symbolic) buildTree(g *graph, order []int32) []int32 {
	parent := eliminationTree(g, order, invert(order))
	by := postorder(parent)
	order = compose(order, by)
	parent = relabel(parent, by)
	count := columnCounts(g, order, invert(order), parent)
	nodes, old := supernodes(parent, count)
	s.nodes = nodes
	order = compose(order, old)
	s.order = compose(g.row, order)
	s.position = invert(s.order)
	return order
}

// compose returns a[b[k]] for every k.
func compose(a, b []int32) []int32 {
	out := make([]int32, len(b))
	for k, i := range b {
		out[k] = a[i]
	}
	return out
}

// layout places the panels, counts the work and finds where each row of a supernode lies in its parent.
func (s *Symbolic) layout(rowIndex []int32) {
	t := &s.nodes
	s.panelPtr = make([]int, len(t.rows)+1)
	s.rowUp = make([]int32, len(rowIndex))
	for k := range t.rows {
		nc, nr := s.shape(k)
		s.panelPtr[k+1] = s.panelPtr[k] + nr*nc
		s.nonZeros += int64(nc)*int64(nr) - int64(nc)*int64(nc-1)/2
		s.flops += frontFlops(nr, nc)
		s.tallest = max(s.tallest, nr)
		p := t.parent[k]
		if p < 0 {
			continue
		}
		first, last := t.first[p], t.first[p+1]
		below := rowIndex[s.rowPtr[p]:s.rowPtr[p+1]]
		b := 0
		for q := s.rowPtr[k]; q < s.rowPtr[k+1]; q++ {
			i := rowIndex[q]
			if i < last {
				s.rowUp[q] = i - first
				continue
			}
			for below[b] != i {
				b++
			}
			s.rowUp[q] = int32(b) + last - first
		}
	}
}

// shape returns the number of columns and of rows, columns included, of supernode k.
func (s *Symbolic) shape(k int) (columns, rows int) {
	return int(s.nodes.first[k+1] - s.nodes.first[k]), int(s.nodes.rows[k])
}

// frontFlops counts additions and multiplications of a partial Cholesky of nc columns in a front of nr rows.
func frontFlops(nr, nc int) float64 {
	// sum of h^2 for h from nr-nc+1 to nr
	sum := func(h float64) float64 { return h * (h + 1) * (2*h + 1) / 6 }
	return sum(float64(nr)) - sum(float64(nr-nc))
}

// mapEntries finds for every entry of the matrix its place in the panel of its supernode.
func (s *Symbolic) mapEntries(g *graph, order, position, rowIndex []int32, workers int) {
	n := g.n
	s.entryPtr = make([]int32, n+1)
	s.entry = make([]int32, len(s.pattern.Index))
	s.entryRow = make([]int32, len(s.pattern.Index))
	for j := range int32(n) {
		count := int32(1)
		for _, u := range g.all(order[j]) {
			if position[u] > j {
				count++
			}
		}
		s.entryPtr[j+1] = s.entryPtr[j] + count
	}
	total := len(s.nodes.rows)
	chunks := min(total, 4*workers)
	spare := sync.Pool{New: func() any { return make([]int32, n) }}
	runFixed(workers, chunks, func(c int) {
		place := spare.Get().([]int32)
		for k := total * c / chunks; k < total*(c+1)/chunks; k++ {
			s.mapSupernode(g, k, order, position, rowIndex, place)
		}
		spare.Put(place)
	})
}

func (s *Symbolic) mapSupernode(g *graph, k int, order, position, rowIndex, place []int32) {
	first, last := s.nodes.first[k], s.nodes.first[k+1]
	for q, i := range rowIndex[s.rowPtr[k]:s.rowPtr[k+1]] {
		place[i] = int32(q) + last - first
	}
	for j := first; j < last; j++ {
		at := s.entryPtr[j]
		v := order[j]
		s.entry[at], s.entryRow[at] = int32(s.pattern.Ptr[g.row[v]]), j-first
		at++
		for q := g.start[v]; q < g.start[v+1]; q++ {
			i := position[g.to[q]]
			if i <= j {
				continue
			}
			s.entry[at] = g.slot[q]
			if i < last {
				s.entryRow[at] = i - first
			} else {
				s.entryRow[at] = place[i]
			}
			at++
		}
	}
}

// N returns the number of rows.
func (s *Symbolic) N() int { return s.pattern.N }

// NonZeros returns the number of entries of L that are stored and used, zeros from amalgamation included.
func (s *Symbolic) NonZeros() int64 { return s.nonZeros }

// Flops returns the number of floating-point operations of a factorisation [-].
func (s *Symbolic) Flops() float64 { return s.flops }

// FactorBytes returns the memory of one Factor [bytes].
func (s *Symbolic) FactorBytes() int64 {
	return 8 * int64(s.panelPtr[len(s.panelPtr)-1]+kernelReach(s.tallest))
}

// PeakBytes returns a bound on the memory that a factorisation holds at once beside the Symbolic: factor, update
// matrices and the stacks of its workers [bytes]. The stacks grow with the number of workers, and the garbage collector
// may be late to reuse update matrices that are done with.
func (s *Symbolic) PeakBytes() int64 {
	stacks := s.plan.stack[0] + s.plan.stack[1]
	return s.FactorBytes() + 8*(s.plan.waiting+int64(s.crewSize())*int64(stacks))
}

// SolveBytes returns the memory that Solve needs at once for k right-hand sides beside factor and block [bytes].
func (s *Symbolic) SolveBytes(k int) int64 {
	width, panels := panelWidth, min((k+panelWidth-1)/panelWidth, panelsTogether*workerCount(s.options.Workers))
	if k <= 1 {
		width = 1
	}
	bytes := int64(panels) * int64(8*width*s.schedule.total+8*panelWidth*(s.tallest+3)+len(s.nodes.rows))
	if s.options.Refine {
		bytes += 16 * int64(s.pattern.N) * int64(k)
	}
	return bytes
}

// Permutation returns a copy of the elimination order: entry k is the row that is eliminated as the k-th.
func (s *Symbolic) Permutation() []int32 { return append([]int32(nil), s.order...) }
