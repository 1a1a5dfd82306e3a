package convex

import "math"

// Numbers of the searches within a search.
const (
	neighbourNodes = 120 // nodes of one such search
	neighbourFixed = 0.3 // least share of the discrete columns that must be fixed to make it worth while
	neighbourSlow  = 2.0 // factor by which the wait grows after a failure
	neighbourShare = 0.3 // share of all pivots that such searches may take, beyond a first lot
	neighbourFirst = 20000
)

// neighbours searches the neighbourhood of the best plan and the present relaxation: what agrees in both is fixed.
//
// Source: Danna, Rothberg & Le Pape (2005), Exploring relaxation induced neighborhoods to improve MIP solutions.
func (s *search) neighbours(x []float64) {
	if s.o.plain || s.best.x == nil || s.nodes < s.nextNeighbour || len(s.c.discrete) < 10 {
		return
	}
	if s.nextNeighbour == 0 {
		s.nextNeighbour = 10
		if s.nodes < s.nextNeighbour {
			return
		}
	}
	best := s.project()
	found := s.within(func(sub *core, j int) bool {
		a, b := s.c.nearest(j, x[j]), s.c.nearest(j, best[j])
		if s.c.whole[j] {
			if math.Abs(x[j]-a) > wholeness || a != b {
				return false
			}
			sub.lower[j], sub.upper[j] = a, a
			return true
		}
		if _, _, _, between := s.c.split(j, x[j]); between || (a > s.c.gapLow[j]) != (b > s.c.gapLow[j]) {
			return false
		}
		s.keepSide(sub, j, a)
		return true
	})
	if found {
		s.neighbourWait = neighbourEvery
	} else {
		s.neighbourWait = int(neighbourSlow * float64(s.neighbourWait))
	}
	s.nextNeighbour = s.nodes + s.neighbourWait
}

// aroundRelaxation searches the plans whose discrete values are those of the relaxation, rounded either way (Berthold 2014).
func (s *search) aroundRelaxation(x []float64) {
	s.within(func(sub *core, j int) bool {
		low, high, _, between := s.c.split(j, x[j])
		if between {
			if s.c.whole[j] && !s.c.gap(j) {
				sub.lower[j], sub.upper[j] = math.Max(sub.lower[j], low), math.Min(sub.upper[j], high)
			}
			return false
		}
		a := s.c.nearest(j, x[j])
		if s.c.whole[j] {
			sub.lower[j], sub.upper[j] = a, a
			return true
		}
		s.keepSide(sub, j, a)
		return true
	})
}

// keepSide leaves the side of the gap of column j on which v is.
func (s *search) keepSide(sub *core, j int, v float64) {
	if v <= s.c.gapLow[j] {
		sub.upper[j] = math.Min(sub.upper[j], s.c.gapLow[j])
	} else {
		sub.lower[j] = math.Max(sub.lower[j], s.c.gapHigh[j])
	}
}

// within searches the core with some of its discrete columns fixed; it tells whether a better plan was found.
func (s *search) within(fix func(sub *core, j int) bool) bool {
	if float64(s.pivotsElsewhere) > neighbourFirst+neighbourShare*float64(s.lp.e.iterations) {
		return false
	}
	sub := s.c.copy()
	copy(sub.lower, s.global.lo)
	copy(sub.upper, s.global.hi)
	fixed := 0
	for _, j := range sub.discrete {
		if fix(sub, j) {
			fixed++
		}
	}
	if float64(fixed) < neighbourFixed*float64(len(sub.discrete)) || !sub.boundsInOrder() {
		return false
	}
	for _, j := range sub.discrete {
		sub.lpLower[j], sub.lpUpper[j] = sub.lower[j], sub.upper[j]
	}
	sub.offset = 0
	small, _, possible := sub.reduce()
	if !possible || small == sub {
		return false
	}
	small.offset += s.c.offset
	t := newSearch(s.ctx, small, MixedOptions{Gap: s.o.Gap, NodeLimit: neighbourNodes, plain: true}, s.best)
	t.lift = func(y []float64) []float64 { return s.lift(small.expand(y)) }
	t.from = make([]int, len(small.origin))
	for k, j := range small.origin {
		t.from[k] = s.from[j]
	}
	before := s.best.found
	t.run()
	s.pivotsElsewhere += t.pivots()
	if s.best.found == before {
		return false
	}
	s.tightenRoot()
	return true
}

// pivots counts those of the search and of all searches within it.
func (s *search) pivots() int {
	if s.lp == nil {
		return 0
	}
	return s.lp.e.iterations + s.pivotsElsewhere + s.earlier
}
