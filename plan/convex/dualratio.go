package convex

import "math"

// breakpoint is a step at which the price of a variable changes sign.
type breakpoint struct {
	v     int
	size  float64 // |alpha|
	slack float64 // price, signed so that a right one is not negative
	ratio float64 // max(slack, 0) / size
}

// before orders breakpoints by ratio, then by index, so that equal input takes equal turns.
func (b breakpoint) before(c breakpoint) bool {
	return b.ratio < c.ratio || (b.ratio == c.ratio && b.v < c.v)
}

// ratioHeap is a binary heap with the nearest breakpoint first: few of thousands are ever looked at.
type ratioHeap []breakpoint

func (h ratioHeap) heapify() {
	for i := len(h)/2 - 1; i >= 0; i-- {
		h.sink(i)
	}
}

func (h ratioHeap) sink(i int) {
	for {
		c := 2*i + 1
		if c >= len(h) {
			return
		}
		if c+1 < len(h) && h[c+1].before(h[c]) {
			c++
		}
		if !h[c].before(h[i]) {
			return
		}
		h[i], h[c] = h[c], h[i]
		i = c
	}
}

func (h *ratioHeap) pop() breakpoint {
	top := (*h)[0]
	last := len(*h) - 1
	(*h)[0] = (*h)[last]
	*h = (*h)[:last]
	h.sink(0)
	return top
}

// gatherBreakpoints fills the heap with the variables whose price the step in the given direction (+1 when the leaving value must
// rise, -1 when it must fall) moves towards the wrong sign.
func (e *engine) gatherBreakpoints(direction float64) {
	e.ratio = e.ratio[:0]
	for v, a := range e.alpha {
		a *= direction
		if !(math.Abs(a) > pivotTolerance) || e.place[v] == Basic || e.fixed(v) {
			continue
		}
		slack := e.d[v]
		switch e.place[v] {
		case AtLower:
			if a < 0 {
				continue
			}
		case AtUpper:
			if a > 0 {
				continue
			}
			a, slack = -a, -slack
		default:
			a, slack = math.Abs(a), 0
		}
		ratio := 0.0
		if slack > 0 {
			ratio = slack / a
		}
		e.ratio = append(e.ratio, breakpoint{v, a, slack, ratio})
	}
	e.ratio.heapify()
}

// longStep picks the entering variable: it walks over the breakpoints, from one bound to the other for each boxed variable, as
// long as the leaving value stays short of its bound (gap > 0 is what it lacks, less the tolerance), and then takes the largest entry among the breakpoints that lie
// within the tolerance of the last one (Harris). The second result is false when the walk never ends, which proves that the bound
// cannot be met.
//
// Source: Fourer (1994), Notes on the dual simplex method; Maros (2003), A generalized dual phase-2 simplex algorithm; Harris
// (1973).
func (e *engine) longStep(gap float64) (breakpoint, bool) {
	e.passed = e.passed[:0]
	for len(e.ratio) > 0 {
		b := e.ratio.pop()
		gap -= b.size * (e.upper[b.v] - e.lower[b.v])
		if gap >= 0 {
			e.passed = append(e.passed, b)
			continue
		}
		best := b
		reach := (b.slack + e.optimal) / b.size
		for len(e.ratio) > 0 && e.ratio[0].ratio <= reach {
			c := e.ratio.pop()
			reach = math.Min(reach, (c.slack+e.optimal)/c.size)
			if c.size > best.size {
				best = c
			}
		}
		for i := len(e.passed) - 1; i >= 0 && best.size < steadyPivot; i-- {
			if e.passed[i].size > best.size {
				best = e.passed[i]
			}
		}
		return best, true
	}
	return breakpoint{}, false
}

// firstStep picks the nearest breakpoint, the smallest index among equals: with the smallest leaving index it cannot cycle
// (Bland 1977).
func (e *engine) firstStep(float64) (breakpoint, bool) {
	e.passed = e.passed[:0]
	if len(e.ratio) == 0 {
		return breakpoint{}, false
	}
	return e.ratio.pop(), true
}

// retreat takes the largest entry among the breakpoints that a long step walks over. It serves a row that seems to prove that there
// is no point while the proof is too thin to be believed.
func (e *engine) retreat(gap float64) (breakpoint, bool) {
	if b, ok := e.longStep(gap); ok {
		return b, true
	}
	best := breakpoint{}
	for _, b := range e.passed {
		if b.size > best.size {
			best = b
		}
	}
	return best, best.size > 0
}
