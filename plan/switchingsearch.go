package plan

import (
	"container/heap"
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// The search over which wells run for an aim that is not linear: branch and bound (Land & Doig 1960, Econometrica 28), best bound first, over
// convex problems in the rates alone. Whether an open well runs is projected out: it runs to at least the share rate/Max, which the
// rules and the lowest levels use. A part's bound is the least of the tangent plane at its optimum with the prices of its rows, recomputed
// from the data, so that it holds whatever the solver did (duality of Wolfe 1961, Quarterly of Applied Mathematics 19).

// strongTries is how many open wells are tried both ways before one is branched on, and strongDepth down to where.
const strongTries, strongDepth = 5, 6

// roundEvery is after how many parts one is rounded to a plan; the first ones all are.
const roundEvery, roundFirst = 8, 24

// choice says of a well what a part of the search holds it to.
type choice int8

const (
	openChoice choice = iota
	runsChoice
	offChoice
)

// decision is one step of a path through the tree.
type decision struct {
	well int
	to   choice
}

// runNode is a part of the search.
type runNode struct {
	path   []decision
	states []choice // of each well, with what follows from the rules
	x      []float64
	price  []float64 // of the rows, as of an aim to be made small
	bound  float64   // no plan of this part costs less
	basis  *convex.Basis
	dead   *convex.Solution // the proof that no rates keep every limit; with none and no x the rules forbid it
	order  int
}

func (n *runNode) possible() bool { return n.x != nil }

// runTree is the search with what it found.
type runTree struct {
	base   *programme
	best   *runNode // the plan
	value  float64  // its cost
	closed []*runNode
	open   runQueue
	solved int
	scale  float64
}

// runQueue is the open parts, the least bound first.
type runQueue []*runNode

func (q runQueue) Len() int { return len(q) }
func (q runQueue) Less(i, j int) bool {
	if q[i].bound != q[j].bound {
		return q[i].bound < q[j].bound
	}
	return q[i].order < q[j].order
}
func (q runQueue) Swap(i, j int) { q[i], q[j] = q[j], q[i] }
func (q *runQueue) Push(v any)   { *q = append(*q, v.(*runNode)) }
func (q *runQueue) Pop() any {
	old := *q
	v := old[len(old)-1]
	*q = old[:len(old)-1]
	return v
}

// chooseCurved searches which wells run and keeps the choice. It returns false when no choice keeps every limit.
func (p *planner) chooseCurved(ctx context.Context, g *programme) (possible bool, err error) {
	t := &runTree{base: g, value: math.Inf(1)}
	t.scale = math.Abs(p.curved.value(make([]float64, len(p.setup.decided))))
	if p.keepProblem {
		if p.search.problem, err = p.mixed(g); err != nil {
			return false, err
		}
	}
	if err := p.searchRunning(ctx, t); err != nil {
		return false, err
	}
	p.search.nodes += t.solved
	p.search.tree = t
	bound := t.bound()
	switch {
	case t.best == nil && len(t.open) == 0:
		return false, nil
	case t.best == nil:
		return false, fmt.Errorf("%w: it was ended after %d programmes", errUndecided, t.solved)
	}
	p.search.bound, p.search.gap = bound, math.Max(0, t.value-bound)/t.size()
	p.search.proven = p.search.gap <= switchingGap
	ruled := p.ruled()
	p.runs = make([]bool, len(p.setup.Wells))
	for _, i := range p.setup.decided {
		p.runs[i] = !p.isOut(i) && (t.best.states[i] != offChoice || !(ruled[i] || p.setup.switched(i)))
	}
	return true, nil
}

// aimFloor is the share of the aim at rest below which a difference of two plans is rounding.
const aimFloor = 1e-6

// size is what the gap is relative to.
func (t *runTree) size() float64 {
	if v := math.Max(math.Abs(t.value), aimFloor*t.scale); v > 0 && finite(v) {
		return v
	}
	return 1
}

// bound is the cost that no plan of the whole is below.
func (t *runTree) bound() float64 {
	least := t.value
	for _, list := range [][]*runNode{t.open, t.closed} {
		for _, n := range list {
			if n.dead == nil && n.possible() {
				least = math.Min(least, n.bound)
			}
		}
	}
	return least
}

// beaten tells that a part holds no plan that is better by more than the gap.
func (t *runTree) beaten(n *runNode) bool {
	return t.best != nil && n.bound >= t.value-switchingGap*t.size()
}

// searchRunning runs the search until nothing better is left or the programmes are used up.
func (p *planner) searchRunning(ctx context.Context, t *runTree) error {
	root, err := p.branch(ctx, t, nil, decision{well: -1})
	if err != nil {
		return err
	}
	t.put(root)
	if last := p.search.tree; last != nil && last.best != nil { // the choice of the last round
		if err := p.offer(ctx, t, root, last.best.states); err != nil {
			return err
		}
	}
	// a later round with further tangents begins with the choice of the last one and has less to look for
	most := max(switchingNodes-p.search.nodes, switchingNodes/4)
	for count := 0; len(t.open) > 0 && t.solved < most; count++ {
		n := heap.Pop(&t.open).(*runNode)
		if t.beaten(n) {
			t.closed = append(t.closed, n)
			continue
		}
		if p.settled(t, n) {
			if t.best == nil || n.bound < t.value {
				t.best, t.value = n, p.curved.value(n.x)
			}
			t.closed = append(t.closed, n)
			continue
		}
		if count < roundFirst || count%roundEvery == 0 {
			if err := p.round(ctx, t, n); err != nil {
				return err
			}
		}
		children, err := p.split(ctx, t, n)
		if err != nil {
			return err
		}
		for _, c := range children {
			t.put(c)
		}
	}
	return nil
}

// put files a part.
func (t *runTree) put(n *runNode) {
	if !n.possible() {
		t.closed = append(t.closed, n)
		return
	}
	heap.Push(&t.open, n)
}

// branch makes and solves the part of n in which one more well is decided.
func (p *planner) branch(ctx context.Context, t *runTree, n *runNode, d decision) (*runNode, error) {
	c := &runNode{states: make([]choice, len(p.setup.Wells)), bound: math.Inf(-1), order: t.solved}
	if n != nil {
		c.path = append(append([]decision(nil), n.path...), d)
		copy(c.states, n.states)
		c.bound, c.basis, c.x = n.bound, n.basis, n.x
		c.states[d.well] = d.to
	}
	if !p.propagate(c.states) {
		c.x = nil
		return c, nil
	}
	return c, p.solveNode(ctx, t, c)
}

// solveNode solves a part for its values, prices and bound.
func (p *planner) solveNode(ctx context.Context, t *runTree, n *runNode) error {
	problem, err := p.nodeProblem(t.base, n.states)
	if err != nil {
		return err
	}
	kept := p.aimValue
	g := &programme{problem: problem, share: -1}
	p.near = n.x
	sol, err := p.solve(ctx, g, n.basis)
	p.aimValue, p.near, n.x = kept, nil, nil
	t.solved++
	switch {
	case ctx.Err() != nil:
		return ctx.Err()
	case err != nil:
		return err
	case sol.Status == convex.Infeasible && convex.Certify(g.problem, sol).Accepted:
		n.dead = sol
		return nil
	case sol.Status != convex.Optimal:
		return fmt.Errorf("%w: a programme ended as %s", errUndecided, sol.Status)
	}
	n.x, n.basis = sol.X, sol.Basis
	n.price = make([]float64, len(sol.RowPrice))
	for r, v := range sol.RowPrice {
		n.price[r] = -v
	}
	n.bound = math.Max(n.bound, p.priceBound(problem, n.x, n.price))
	return nil
}

// settled tells whether the optimum of a part is a plan: every open well is off or within its range, and every rule and level is kept with
// the wells running that do.
func (p *planner) settled(t *runTree, n *runNode) bool {
	s := p.setup
	states := append([]choice(nil), n.states...)
	for k, i := range s.decided {
		if states[i] != openChoice {
			continue
		}
		switch {
		case p.atRestIn(i, n.x[k]):
			states[i] = offChoice
		case !s.switched(i) || p.withinRange(i, n.x[k]):
			states[i] = runsChoice
		default:
			return false
		}
	}
	if !p.propagate(states) {
		return false
	}
	problem, err := p.nodeProblem(t.base, states)
	if err != nil {
		return false
	}
	for r := 0; r < problem.Rows(); r++ {
		row := problem.Row(r)
		value, size := 0.0, 0.0
		for k, a := range row.Coefficients {
			value += a * n.x[k]
			size += math.Abs(a * n.x[k])
		}
		near := settledShare * (size + 1e-300)
		if !(value <= row.Upper+near && value >= row.Lower-near) {
			return false
		}
	}
	n.states = states // what the plan's programme is built with
	return true
}

// settledShare is by how much, as a share of its terms, a row may be off to count as kept: what the solver leaves, and more.
const settledShare = 1e-8

func (p *planner) atRestIn(i int, x float64) bool {
	return math.Abs(x) <= rateTolerance*p.setup.rateScale(i)
}

func (p *planner) withinRange(i int, x float64) bool {
	w, near := p.setup.Wells[i], rateTolerance*p.setup.rateScale(i)
	return x >= w.Min-near && x <= w.Max+near
}

// offer tries a whole choice of running wells as a plan.
func (p *planner) offer(ctx context.Context, t *runTree, from *runNode, states []choice) error {
	n := &runNode{states: append([]choice(nil), states...), basis: from.basis, x: from.x, bound: math.Inf(-1)}
	for _, i := range p.setup.decided {
		if n.states[i] == openChoice {
			n.states[i] = runsChoice
		}
		if from.states[i] != openChoice && from.states[i] != n.states[i] {
			return nil
		}
	}
	if !p.propagate(n.states) {
		return nil
	}
	if err := p.solveNode(ctx, t, n); err != nil {
		return err
	}
	if n.possible() {
		if value := p.curved.value(n.x); t.best == nil || value < t.value {
			t.best, t.value = n, value
		}
	}
	return nil
}
