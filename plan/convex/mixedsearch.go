package convex

import (
	"context"
	"math"
)

// Numbers that shape the search. None of them bears on what is proven.
const (
	nodePivots     = 20000 // pivots of one node before it is left undecided
	plungeLeast    = 8     // depth to which a plunge goes on whatever the bound
	plungeShare    = 0.3   // share of the distance from the least bound to the best plan beyond which a longer plunge ends
	estimateEvery  = 4     // every so many jumps go to the best estimate, the others to the least bound
	diveEvery      = 12    // plunges between two dives
	neighbourEvery = 150   // nodes between two searches of a neighbourhood, growing with each failure
	reportNodes    = 50    // nodes between two reports
)

// search is the branch and bound over one core.
type search struct {
	ctx    context.Context
	c      *core
	o      MixedOptions
	best   *incumbent
	lift   func([]float64) []float64 // values of the core to the problem as given
	from   []int                     // by column of the core: column of the problem as given
	lp     *nodeLP
	cuts   []coreRow
	global box // bounds that hold for all plans better than the best
	local  box // bounds at the present node
	inLP   box // bounds that the linear programme has
	prop   *propagator
	guide  guide
	open   openNodes
	snap   lpSnapshot
	diveAt lpSnapshot
	proof  *proofTree

	rootBound       float64
	rootCost        float64 // of the last linear programme of the root
	rootReduced     []float64
	rootX           []float64
	nodes, created  int
	plunges         int
	nextDive        int // plunge at which to dive again
	nextNeighbour   int // node at which to search a neighbourhood again
	neighbourWait   int
	spent           int // pivots of dives
	earlier         int // pivots of linear programmes given up for larger ones
	stopped         Status
	unresolved      float64 // least bound of nodes that rounding left undecided, +Inf without any
	excluded        float64 // least bound of nodes left out for it, +Inf without any
	endless         bool
	pivotsElsewhere int
}

func newSearch(ctx context.Context, c *core, o MixedOptions, best *incumbent) *search {
	s := &search{ctx: ctx, c: c, o: o, best: best, unresolved: math.Inf(1), excluded: math.Inf(1), rootBound: math.Inf(-1), neighbourWait: neighbourEvery}
	s.global.copyFrom(c.lower, c.upper)
	s.local.copyFrom(c.lower, c.upper)
	s.inLP.copyFrom(c.lpLower, c.lpUpper)
	s.prop = newPropagator(c)
	s.guide.init(len(c.cost))
	if o.Proof {
		s.proof = &proofTree{sign: 1}
		if best.p.sense == Maximise {
			s.proof.sign = -1
		}
		c.step = 0 // what the prices of a leaf cannot show is not used
	}
	return s
}

// cutoff is the cost, in the core, above which a node cannot hold a plan that matters.
func (s *search) cutoff() float64 {
	if math.IsInf(s.best.value, 1) {
		return math.Inf(1)
	}
	v := s.best.value - s.c.offset
	if c := s.c.step; c > 0 {
		return v - c*(1-wholeness)
	}
	return v - s.o.Gap*s.best.scale
}

// raise lifts a bound to the next cost that a plan can have.
func (s *search) raise(bound float64) float64 {
	if c := s.c.step; c > 0 && finite(bound) {
		return math.Max(bound, c*math.Ceil(bound/c-wholeness))
	}
	return bound
}

// run solves the root and then the tree.
func (s *search) run() {
	s.lp = newNodeLP(s.c.problem(nil))
	switch s.lp.first(s.ctx) {
	case lpOptimal:
	case lpEmpty:
		s.proof.start(len(s.c.rows))
		s.proof.leaf(0, s.lp, lpEmpty)
		return
	case lpEndless:
		s.endless = true
		return
	case lpHalted:
		s.stopped = Interrupted
		return
	default:
		s.stopped, s.unresolved = NumericalTrouble, math.Inf(-1)
		return
	}
	s.rootBound = s.raise(s.lp.objective())
	s.noteRoot()
	s.proof.start(len(s.c.rows))
	s.proof.leaf(0, s.lp, lpOptimal)
	if !s.root() {
		return
	}
	s.tree(&mixedNode{bound: s.rootBound, estimate: s.rootBound, start: s.lp.state()})
}

// noteRoot keeps prices and values of the root for the tightening by new plans.
func (s *search) noteRoot() {
	n := len(s.c.cost)
	s.rootCost = s.lp.objective()
	s.rootReduced, s.rootX = make([]float64, n), make([]float64, n)
	for j := range s.rootX {
		s.rootX[j] = s.lp.value(j)
		if s.lp.e.place[j] != Basic {
			s.rootReduced[j] = s.lp.reduced(j)
		}
	}
}

// leastBound is the cost below which no plan lies, in the core.
func (s *search) leastBound(plunge *mixedNode) float64 {
	v := math.Min(s.open.leastBound(), s.unresolved)
	if plunge != nil {
		v = math.Min(v, plunge.bound)
	}
	return v
}

// tree looks at nodes until none is left or something ends the search.
func (s *search) tree(root *mixedNode) {
	next, jumps, depth := root, 0, 0
	for {
		if next == nil {
			jumps++
			depth = 0
			next = s.open.take(jumps%estimateEvery == 0)
			if next == nil {
				return
			}
			s.plunges++
		}
		if next.bound > s.cutoff() {
			s.exclude(next.bound)
			next = nil
			continue
		}
		if status := s.ends(); status != 0 {
			s.stopped = status
			next.gone = false
			s.open.add(next)
			return
		}
		s.nodes++
		s.report(next)
		preferred, other := s.visit(next)
		if other != nil {
			s.open.add(other)
		}
		next = preferred
		depth++
		if next != nil && depth > plungeLeast && !math.IsInf(s.best.value, 1) {
			least := s.leastBound(next)
			if next.bound-least > plungeShare*(s.cutoff()-least) {
				next.start = s.lp.state()
				s.open.add(next)
				next = nil
			}
		}
	}
}

// exclude notes that plans of at least this cost have been left out.
func (s *search) exclude(bound float64) { s.excluded = math.Min(s.excluded, bound) }

// ends tells whether context or node limit end the search.
func (s *search) ends() Status {
	if s.ctx.Err() != nil {
		return Interrupted
	}
	if s.o.NodeLimit > 0 && s.nodes >= s.o.NodeLimit {
		return IterationLimit
	}
	return 0
}

func (s *search) report(n *mixedNode) {
	if s.o.Progress == nil || s.nodes%reportNodes != 1 {
		return
	}
	sign := 1.0
	if s.best.p.sense == Maximise {
		sign = -1
	}
	bound := s.leastBound(n)
	s.o.Progress(MixedProgress{Nodes: s.nodes, Open: s.open.count + 1, Found: s.best.x != nil, Objective: sign * s.best.value,
		Bound: sign * math.Min(bound+s.c.offset, s.best.value)})
}

// enter sets the bounds of node n; false when they leave nothing.
func (s *search) enter(n *mixedNode) bool {
	s.local.copyFrom(s.global.lo, s.global.hi)
	columns := n.boxOf(&s.local)
	for _, j := range columns {
		if !(s.local.lo[j] <= s.local.hi[j]) {
			return false
		}
	}
	if s.proof != nil {
		return true
	}
	return s.prop.from(&s.local, columns...)
}

// sync hands the local bounds of discrete columns to the linear programme.
func (s *search) sync() {
	for _, j := range s.c.discrete {
		if s.inLP.lo[j] != s.local.lo[j] || s.inLP.hi[j] != s.local.hi[j] {
			s.inLP.lo[j], s.inLP.hi[j] = s.local.lo[j], s.local.hi[j]
			s.lp.setBounds(j, s.local.lo[j], s.local.hi[j])
		}
	}
}

// visit solves a node and returns its children, the preferred one first; nil, nil when the node is done with.
func (s *search) visit(n *mixedNode) (preferred, other *mixedNode) {
	if !s.enter(n) {
		return nil, nil
	}
	s.sync()
	if n.start != nil {
		s.lp.load(n.start)
		n.start = nil
	}
	for {
		cost, open := s.solveNode(n)
		if !open {
			return nil, nil
		}
		if math.IsNaN(cost) {
			return s.undecided(n)
		}
		x := s.values()
		list := s.fractional(x)
		if len(list) == 0 {
			if !s.settled(n, x, cost) {
				return s.branchOnRest(n, x)
			}
			s.exclude(n.bound)
			s.proof.leaf(n.proof, s.lp, lpBeaten)
			return nil, nil
		}
		if s.lookForPlans(n, x); n.bound > s.cutoff() {
			s.exclude(n.bound)
			s.proof.leaf(n.proof, s.lp, lpBeaten)
			return nil, nil
		}
		if s.proof == nil {
			switch s.tightenByPrices(cost) {
			case tightenedEmpty:
				return nil, nil
			case tightenedMoved:
				s.sync()
				continue
			}
		}
		choice, again, empty := s.choose(n, x, cost, list)
		if empty {
			return nil, nil
		}
		if again {
			s.sync()
			continue
		}
		return s.children(n, choice, cost, list)
	}
}

// solveNode solves the linear programme of a node, whose bounds are set. open is false when the node is done with; the cost is NaN
// when rounding gave no answer.
func (s *search) solveNode(n *mixedNode) (cost float64, open bool) {
	end := s.lp.solve(s.ctx, nodePivots, s.cutoff())
	switch end {
	case lpEmpty, lpBeaten:
		if end == lpBeaten {
			s.exclude(math.Max(n.bound, s.raise(s.lp.objective())))
		}
		s.proof.leaf(n.proof, s.lp, end)
		s.guide.failed(n)
		return 0, false
	case lpHalted:
		s.putBack(n)
		return 0, false
	case lpOptimal:
	default:
		return math.NaN(), true
	}
	cost = s.lp.objective()
	s.guide.learn(n, cost)
	n.part = 0
	n.bound = math.Max(n.bound, s.raise(cost))
	if n.bound > s.cutoff() {
		s.exclude(n.bound)
		s.proof.leaf(n.proof, s.lp, lpBeaten)
		return 0, false
	}
	return cost, true
}

// lookForPlans lets the heuristics look at a node now and then.
func (s *search) lookForPlans(n *mixedNode, x []float64) {
	s.roundings(x)
	s.diveNow(n, x)
	s.neighbours(x)
}

// putBack keeps a node that the context interrupted.
func (s *search) putBack(n *mixedNode) {
	n.gone = false
	s.open.add(n)
	s.stopped = Interrupted
}

// values returns the values of the columns of the core.
func (s *search) values() []float64 {
	x := make([]float64, len(s.c.cost))
	for j := range x {
		x[j] = s.lp.value(j)
	}
	return x
}

// fractional lists the discrete columns whose value is not allowed.
func (s *search) fractional(x []float64) []candidate {
	var list []candidate
	for _, j := range s.c.discrete {
		if low, high, part, between := s.c.split(j, x[j]); between {
			list = append(list, candidate{column: j, low: low, high: high, part: part})
		}
	}
	return list
}

// settled offers the plan of a node whose discrete values are allowed, and tells that the node holds nothing better.
func (s *search) settled(n *mixedNode, x []float64, cost float64) bool {
	s.improve(x)
	if n.bound > s.cutoff() {
		return true
	}
	v := s.best.value - s.c.offset
	return v-cost <= plansAgree*s.best.scale
}

// improve offers a plan of the core and narrows the global bounds by it.
func (s *search) improve(x []float64) bool {
	if !s.best.offer(s.ctx, s.lift(x)) {
		return false
	}
	s.tightenRoot()
	return true
}

// branchOnRest splits a node whose values are allowed only within the tolerance, but whose plan, once rounded, is worse.
func (s *search) branchOnRest(n *mixedNode, x []float64) (preferred, other *mixedNode) {
	at, most := -1, 0.0
	for _, j := range s.c.discrete {
		if off := math.Abs(x[j] - s.c.nearest(j, x[j])); s.splittable(j) && off >= most {
			at, most = j, off
		}
	}
	if at < 0 {
		return s.undecided(n)
	}
	return s.children(n, s.splitAnywhere(at, x[at]), n.bound, nil)
}

// undecided splits a node whose linear programme gave no answer; without anything to split its bound stays on record.
func (s *search) undecided(n *mixedNode) (preferred, other *mixedNode) {
	for _, j := range s.c.discrete {
		if s.splittable(j) {
			x := s.local.lo[j]
			if !finite(x) {
				x = s.local.hi[j]
			}
			if !finite(x) {
				x = 0
			}
			return s.children(n, s.splitAnywhere(j, x), n.bound, nil)
		}
	}
	s.unresolved = math.Min(s.unresolved, n.bound)
	return nil, nil
}

// acrossGap tells that both sides of the gap of column j are still open.
func (s *search) acrossGap(j int) bool {
	return s.c.gap(j) && s.local.lo[j] <= s.c.gapLow[j] && s.local.hi[j] >= s.c.gapHigh[j]
}

// splittable tells that more than one discrete value of column j is still open.
func (s *search) splittable(j int) bool {
	return s.acrossGap(j) || s.c.whole[j] && s.local.lo[j] < s.local.hi[j]
}

// splitAnywhere returns a split of column j, which is splittable, next to the value v.
func (s *search) splitAnywhere(j int, v float64) candidate {
	c := s.c
	v = c.nearest(j, v)
	if s.acrossGap(j) {
		return candidate{column: j, low: c.gapLow[j], high: c.gapHigh[j], part: 0.5}
	}
	if v >= s.local.hi[j] {
		v--
	}
	return candidate{column: j, low: v, high: v + 1, part: 0.5}
}

// children makes the two nodes of a split.
func (s *search) children(n *mixedNode, c candidate, cost float64, list []candidate) (preferred, other *mixedNode) {
	estimate := s.guide.estimate(n.bound, list)
	make1 := func(upper bool) *mixedNode {
		s.created++
		child := &mixedNode{parent: n, column: c.column, upper: upper, bound: n.bound, estimate: estimate, depth: n.depth + 1, number: s.created}
		child.value, child.part = c.high, 1-c.part
		if upper {
			child.value, child.part = c.low, c.part
		}
		if gain := c.gain(upper); cost+gain > child.bound && list != nil {
			child.bound = math.Max(child.bound, s.raise(cost+gain))
		}
		return child
	}
	down, up := make1(true), make1(false)
	s.proof.split(n.proof, s.lp, c, down, up)
	preferred, other = down, up
	if s.guide.prefersUp(c, s.rootX) {
		preferred, other = up, down
	}
	other.start = s.lp.state()
	return preferred, other
}
