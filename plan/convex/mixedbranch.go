package convex

import (
	"math"
	"sort"
)

// candidate is a column that may be split: it must be at most low or at least high.
type candidate struct {
	column    int
	low, high float64
	part      float64 // place of its value between the two, from 0 to 1
	downGain  float64 // rise of the cost below, upGain above, where it was looked at and is proven
	upGain    float64
	score     float64
}

func (c candidate) gain(upper bool) float64 {
	if upper {
		return c.downGain
	}
	return c.upGain
}

// Numbers of reliability branching, as in the source but for the smaller limits that dense linear programmes ask for.
const (
	reliable      = 4    // solves after which a pseudo-cost is trusted
	lookahead     = 6    // looks without a better candidate after which looking ends
	looksAtRoot   = 60   // most looks at one node
	lookPivots    = 40   // pivots of one look
	scoreFloor    = 1e-6 // gain that stands for none in a product of gains
	looksPerPivot = 0.5  // share of all pivots that looks may take, beyond looksFree
	looksFree     = 3000 // pivots of looks that are always allowed
)

// pseudoCost is the mean rise of the cost per unit of distance.
type pseudoCost struct {
	sum   float64
	count int
}

func (p pseudoCost) mean(otherwise float64) float64 {
	if p.count == 0 {
		return otherwise
	}
	return p.sum / float64(p.count)
}

// guide learns which splits raise the cost.
//
// Source: Achterberg, Koch & Martin (2005), Branching rules revisited, Operations Research Letters 33, 42-54.
type guide struct {
	down, up       []pseudoCost
	allDown, allUp pseudoCost
	looked         int // pivots of looks
	failures       []float64
}

func (g *guide) init(n int) {
	g.down, g.up, g.failures = make([]pseudoCost, n), make([]pseudoCost, n), make([]float64, n)
}

// learn takes the cost of a node against its parent's.
func (g *guide) learn(n *mixedNode, cost float64) {
	if n.parent == nil || !(n.part > 0) {
		return
	}
	g.note(n.column, n.upper, math.Max(0, cost-n.parent.bound)/n.part)
}

func (g *guide) note(j int, upper bool, perUnit float64) {
	one, all := &g.up[j], &g.allUp
	if upper {
		one, all = &g.down[j], &g.allDown
	}
	one.sum += perUnit
	one.count++
	all.sum += perUnit
	all.count++
}

// failed counts a node that held nothing: columns that end nodes are good ones to split early.
func (g *guide) failed(n *mixedNode) {
	if n.parent != nil {
		g.failures[n.column]++
	}
}

func (g *guide) expected(c candidate) (down, up float64) {
	j := c.column
	return g.down[j].mean(g.allDown.mean(1)) * c.part, g.up[j].mean(g.allUp.mean(1)) * (1 - c.part)
}

// estimate guesses the cost of the best plan below a node.
func (g *guide) estimate(bound float64, list []candidate) float64 {
	for _, c := range list {
		down, up := g.expected(c)
		bound += math.Min(down, up)
	}
	return bound
}

// prefersUp picks the side to look at first: the one towards which the column has moved since the root, else the nearer one.
func (g *guide) prefersUp(c candidate, rootX []float64) bool {
	v := c.low + c.part*(c.high-c.low)
	if r := rootX[c.column]; math.Abs(r-v) > 0.3*(c.high-c.low) {
		return v > r
	}
	return c.part > 0.5
}

func product(down, up float64) float64 { return math.Max(down, scoreFloor) * math.Max(up, scoreFloor) }

// choose picks the column to split. again tells that bounds have been narrowed instead, empty that the node holds nothing.
func (s *search) choose(n *mixedNode, x []float64, cost float64, list []candidate) (best candidate, again, empty bool) {
	g := &s.guide
	unit := math.Max(scoreFloor, g.allDown.mean(1)*g.allUp.mean(1))
	for k := range list {
		down, up := g.expected(list[k])
		list[k].score = product(down, up) + 1e-3*unit*g.failures[list[k].column]/float64(1+s.nodes)
	}
	sort.SliceStable(list, func(a, b int) bool { return list[a].score > list[b].score })
	if s.ctx.Err() != nil {
		return list[0], false, false
	}
	most, none := lookahead, 0
	if n.depth == 0 {
		most = looksAtRoot
	}
	at, top, looks, saved := 0, math.Inf(-1), 0, false
	for k := range list {
		c := &list[k]
		few := g.down[c.column].count < reliable || g.up[c.column].count < reliable
		if few && looks < looksAtRoot && none < most && s.mayLook() {
			if !saved {
				s.lp.save(&s.snap)
				saved = true
			}
			looks++
			down, up := s.look(c, cost, true), s.look(c, cost, false)
			if down.shut && up.shut {
				return *c, false, true
			}
			if down.shut || up.shut {
				left := s.shut(c, down.shut)
				return *c, left, !left
			}
			c.downGain, c.upGain = down.gain, up.gain
			c.score = product(down.gain, up.gain)
		}
		if c.score > top*(1+1e-9) {
			at, top, none = k, c.score, 0
		} else {
			none++
		}
	}
	return list[at], false, false
}

func (s *search) mayLook() bool {
	return s.proof == nil && float64(s.guide.looked) < looksFree+looksPerPivot*float64(s.lp.e.iterations-s.guide.looked)
}

// shut narrows the node by a side that was seen to hold nothing; true when something is left to look at.
func (s *search) shut(c *candidate, down bool) bool {
	if down {
		s.local.lo[c.column] = math.Max(s.local.lo[c.column], c.high)
	} else {
		s.local.hi[c.column] = math.Min(s.local.hi[c.column], c.low)
	}
	return s.local.lo[c.column] <= s.local.hi[c.column] && s.prop.from(&s.local, c.column)
}

// outlook is what a short look at one side of a split brought.
type outlook struct {
	gain float64 // proven rise of the cost
	shut bool    // nothing better on this side
}

// look solves one side of a split with few pivots and goes back.
func (s *search) look(c *candidate, cost float64, upper bool) outlook {
	j := c.column
	lo, hi := s.inLP.lo[j], s.inLP.hi[j]
	if upper {
		hi = c.low
	} else {
		lo = c.high
	}
	if !(lo <= hi) {
		return outlook{shut: true}
	}
	before := s.lp.e.iterations
	s.lp.setBounds(j, lo, hi)
	end := s.lp.solve(s.ctx, lookPivots, s.cutoff())
	var o outlook
	switch {
	case end == lpEmpty:
		o.shut = true
	case end == lpBeaten:
		s.exclude(s.raise(s.lp.objective()))
		o.shut = true
	case end == lpOptimal || end == lpCut && !s.lp.costMoved() && s.lp.e.pricesRight():
		o.gain = math.Max(0, s.lp.objective()-cost)
		if end == lpOptimal && s.raise(cost+o.gain) > s.cutoff() {
			s.exclude(s.raise(cost + o.gain))
			o.shut = true
			break
		}
		part := c.part
		if !upper {
			part = 1 - c.part
		}
		s.guide.note(j, upper, o.gain/part)
	}
	s.guide.looked += s.lp.e.iterations - before
	s.lp.restore(&s.snap)
	return o
}
