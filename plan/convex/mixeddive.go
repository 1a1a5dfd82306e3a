package convex

import "math"

// Numbers of the dives.
const (
	divePivots  = 3000 // pivots of one dive, and of all dives beyond their share
	diveShare   = 0.25 // share of all pivots that dives may take
	diveAtOnce  = 0.1  // share of the columns left that are fixed before the next linear programme
	diveLongest = 200  // linear programmes of one dive
)

// diveRule says which column a dive fixes next, and where.
type diveRule int

const (
	diveNearest diveRule = iota // the one nearest to an allowed value
	diveCheap                   // the one whose fixing costs least by its pseudo-costs
	diveGuided                  // towards the best plan
	diveUp                      // upward: wells on, rounded up
	diveRules
)

// root finds cuts and first plans. It returns false when nothing is left to search.
func (s *search) root() bool {
	s.quickRounding(s.values())
	if !s.o.plain && s.proof == nil && !s.cutRounds() {
		return false
	}
	x := s.values()
	if len(s.fractional(x)) == 0 {
		return true
	}
	s.quickRounding(x)
	for rule := diveRule(0); rule < diveRules && s.ctx.Err() == nil; rule++ {
		if rule != diveGuided || s.best.x != nil {
			s.dive(rule)
		}
	}
	if !s.o.plain {
		s.aroundRelaxation(x)
	}
	s.local.copyFrom(s.global.lo, s.global.hi)
	s.sync()
	return true
}

// diveNow dives from the first node of a plunge now and then.
func (s *search) diveNow(n *mixedNode, x []float64) {
	if s.plunges < s.nextDive || n.depth == 0 {
		return
	}
	s.nextDive = s.plunges + diveEvery
	if float64(s.spent) > divePivots+diveShare*float64(s.lp.e.iterations) {
		return
	}
	rule := diveRule(s.plunges/diveEvery) % diveRules
	if rule == diveGuided && s.best.x == nil {
		rule = diveNearest
	}
	if s.dive(rule) {
		s.nextDive = s.plunges + diveEvery/2
	}
}

// dive fixes columns one after the other, each as the last linear programme suggests, until all are allowed or nothing is left.
// The state of the node is restored. It tells whether the plan found is the best so far.
func (s *search) dive(rule diveRule) bool {
	s.lp.save(&s.diveAt)
	var local, inLP box
	local.copyFrom(s.local.lo, s.local.hi)
	inLP.copyFrom(s.inLP.lo, s.inLP.hi)
	before := s.lp.e.iterations
	x := s.diveDown(rule)
	s.spent += s.lp.e.iterations - before
	s.local.copyFrom(local.lo, local.hi)
	s.inLP = inLP
	s.lp.restore(&s.diveAt)
	return x != nil && s.improve(x)
}

func (s *search) diveDown(rule diveRule) []float64 {
	guideTo := s.project()
	before := s.lp.e.iterations
	for step := 0; step < diveLongest && s.ctx.Err() == nil; step++ {
		x := s.values()
		list := s.fractional(x)
		if len(list) == 0 {
			return x
		}
		many := 1 + int(diveAtOnce*float64(len(list)))
		for k := 0; k < many; k++ {
			c, up, ok := s.diveChoice(rule, x, list, guideTo)
			if !ok {
				break
			}
			if !s.diveFix(c, up) {
				return nil
			}
		}
		s.sync()
		left := divePivots - (s.lp.e.iterations - before)
		if left <= 0 || s.lp.solve(s.ctx, left, s.cutoff()) != lpOptimal {
			return nil
		}
	}
	return nil
}

// diveFix moves a bound, or the other one when that leaves nothing.
func (s *search) diveFix(c candidate, up bool) bool {
	var kept box
	kept.copyFrom(s.local.lo, s.local.hi)
	for try := 0; try < 2; try++ {
		j := c.column
		if up {
			s.local.lo[j] = math.Max(s.local.lo[j], c.high)
		} else {
			s.local.hi[j] = math.Min(s.local.hi[j], c.low)
		}
		if s.local.lo[j] <= s.local.hi[j] && s.prop.from(&s.local, j) {
			return true
		}
		s.local.copyFrom(kept.lo, kept.hi)
		up = !up
	}
	return false
}

// diveChoice picks among the columns that are still open in the node's bounds.
func (s *search) diveChoice(rule diveRule, x []float64, list []candidate, guideTo []float64) (best candidate, up, ok bool) {
	top := math.Inf(1)
	for _, c := range list {
		j := c.column
		if s.local.lo[j] >= c.high || s.local.hi[j] <= c.low {
			continue
		}
		toUp, merit := c.part > 0.5, math.Min(c.part, 1-c.part)
		switch rule {
		case diveCheap:
			down, rise := s.guide.expected(c)
			toUp, merit = rise < down, math.Min(down, rise)/(scoreFloor+math.Max(down, rise))
		case diveGuided:
			toUp = guideTo[j] >= c.high
			merit = c.part
			if toUp {
				merit = 1 - c.part
			}
		case diveUp:
			toUp, merit = true, 1-c.part
		}
		if merit < top {
			best, up, ok, top = c, toUp, true, merit
		}
	}
	return best, up, ok
}

// project returns the best plan in the columns of the core, nil without one.
func (s *search) project() []float64 {
	if s.best.x == nil {
		return nil
	}
	y := make([]float64, len(s.from))
	for k, j := range s.from {
		y[k] = s.best.x[j]
	}
	return y
}

// roundings tries the plan with all discrete values rounded, where that is a matter of looking only.
func (s *search) roundings(x []float64) {
	if s.best.allWhole() {
		s.quickRounding(x)
	}
}

// quickRounding tries the nearest allowed values, narrowing after each, most certain column first.
func (s *search) quickRounding(x []float64) {
	var kept box
	kept.copyFrom(s.local.lo, s.local.hi)
	defer func() { s.local = kept }()
	y := append([]float64(nil), x...)
	for _, c := range s.fractional(x) {
		j := c.column
		s.local.lo[j], s.local.hi[j] = math.Max(s.local.lo[j], c.low), math.Min(s.local.hi[j], c.high)
	}
	list := s.fractional(x)
	for len(list) > 0 {
		at, top := 0, math.Inf(1)
		for k, c := range list {
			if m := math.Min(c.part, 1-c.part); m < top {
				at, top = k, m
			}
		}
		c := list[at]
		list = append(list[:at], list[at+1:]...)
		j := c.column
		if s.local.lo[j] < c.high && s.local.hi[j] > c.low && !s.diveFix(c, c.part > 0.5) {
			return
		}
		y[j] = c.low
		if s.local.lo[j] >= c.high {
			y[j] = c.high
		}
	}
	full := s.lift(y)
	if s.best.allWhole() {
		if s.best.offer(s.ctx, full) {
			s.tightenRoot()
		}
		return
	}
	if s.best.offerSwitching(s.ctx, full) {
		s.tightenRoot()
	}
}
