package convex

import "math"

// box holds bounds of all columns of a core.
type box struct{ lo, hi []float64 }

func (b *box) copyFrom(lo, hi []float64) {
	b.lo = append(b.lo[:0], lo...)
	b.hi = append(b.hi[:0], hi...)
}

// Tolerances of the tightening of bounds.
const (
	// emptiness is the distance by which bounds of a row or column must miss each other before a box counts as empty, relative to
	// max(1, the terms): far above rounding, so that no plan is lost to it.
	emptiness = 1e-7
	// worthTightening is the least share of the range, or of max(1, |bound|) where that was infinite, by which the bound of a
	// continuous column must move to be taken.
	worthTightening = 1e-2
	// propagationVisits bounds the number of rows looked at, per row of the problem.
	propagationVisits = 8
)

// propagator narrows boxes by the rows of a core.
type propagator struct {
	c       *core
	queue   []int
	queued  []bool
	changed []int // columns whose bounds the last run moved, each named once or more
}

func newPropagator(c *core) *propagator {
	return &propagator{c: c, queued: make([]bool, len(c.rows))}
}

func (g *propagator) enqueueColumn(j int) {
	for _, e := range g.c.touching[j] {
		if !g.queued[e.at] {
			g.queued[e.at] = true
			g.queue = append(g.queue, e.at)
		}
	}
}

// all narrows the box by every row; false when it is empty.
func (g *propagator) all(b *box) bool {
	g.queue = g.queue[:0]
	for i := range g.c.rows {
		g.queued[i] = true
		g.queue = append(g.queue, i)
	}
	return g.drain(b)
}

// from narrows the box after the bounds of the given columns have moved; false when it is empty.
func (g *propagator) from(b *box, columns ...int) bool {
	g.queue = g.queue[:0]
	for _, j := range columns {
		g.enqueueColumn(j)
	}
	return g.drain(b)
}

func (g *propagator) drain(b *box) bool {
	g.changed = g.changed[:0]
	most := propagationVisits*len(g.c.rows) + 100
	ok := true
	head := 0
	for ; head < len(g.queue) && head < most && ok; head++ {
		i := g.queue[head]
		g.queued[i] = false
		ok = g.visit(b, &g.c.rows[i])
	}
	for ; head < len(g.queue); head++ {
		g.queued[g.queue[head]] = false
	}
	return ok
}

// span is the range of a row over a box; infinite terms are counted apart.
type span struct {
	low, high       float64
	lowInf, highInf int
	terms           float64
}

func (b *box) spanOf(r *coreRow) span {
	var s span
	for _, e := range r.entries {
		lo, hi := b.lo[e.at], b.hi[e.at]
		if e.value < 0 {
			lo, hi = hi, lo
		}
		if finite(lo) {
			v := e.value * lo
			s.low += v
			s.note(v)
		} else {
			s.lowInf++
		}
		if finite(hi) {
			v := e.value * hi
			s.high += v
			s.note(v)
		} else {
			s.highInf++
		}
	}
	return s
}

// note keeps the largest term.
func (s *span) note(v float64) {
	if v < 0 {
		v = -v
	}
	if v > s.terms {
		s.terms = v
	}
}

func (s *span) reaches(lower float64) bool { return s.lowInf == 0 && s.low >= lower }
func (s *span) stays(upper float64) bool   { return s.highInf == 0 && s.high <= upper }

// visit narrows the box by one row.
func (g *propagator) visit(b *box, r *coreRow) bool {
	s := b.spanOf(r)
	slack := emptiness * math.Max(1, s.terms)
	if s.lowInf == 0 && s.low > r.upper+slack || s.highInf == 0 && s.high < r.lower-slack {
		return false
	}
	up := finite(r.upper) && !s.stays(r.upper) && s.lowInf <= 1
	down := finite(r.lower) && !s.reaches(r.lower) && s.highInf <= 1
	if !up && !down {
		return true
	}
	for _, e := range r.entries {
		j, a := e.at, e.value
		lo, hi := b.lo[j], b.hi[j]
		if lo == hi {
			continue
		}
		atLow, atHigh := a*lo, a*hi
		if a < 0 {
			atLow, atHigh = atHigh, atLow
		}
		newLo, newHi := math.Inf(-1), math.Inf(1)
		if up {
			if rest, ok := without1(s.low, s.lowInf, atLow); ok {
				limit := (r.upper - rest) / a
				if a > 0 {
					newHi = limit
				} else {
					newLo = limit
				}
			}
		}
		if down {
			if rest, ok := without1(s.high, s.highInf, atHigh); ok {
				limit := (r.lower - rest) / a
				if a > 0 {
					newLo = math.Max(newLo, limit)
				} else {
					newHi = math.Min(newHi, limit)
				}
			}
		}
		rounding := emptiness * emptiness * s.terms / math.Abs(a)
		moved, ok := g.c.narrow(b, j, newLo-rounding, newHi+rounding)
		if !ok {
			return false
		}
		if moved {
			g.changed = append(g.changed, j)
			g.enqueueColumn(j)
			s = b.spanOf(r)
		}
	}
	return true
}

// without1 takes one term out of a sum with infinite terms counted apart; false when an infinite one remains.
func without1(sum float64, infinities int, term float64) (float64, bool) {
	if finite(term) {
		return sum - term, infinities == 0
	}
	return sum, infinities == 1
}

// narrow takes new bounds of column j into the box, rounded to allowed values where it is discrete. moved tells that they were
// worth it, ok that the column still has a value.
func (c *core) narrow(b *box, j int, newLo, newHi float64) (moved, ok bool) {
	lo, hi := b.lo[j], b.hi[j]
	if c.isDiscrete(j) {
		newLo, newHi = c.allowedAbove(j, newLo), c.allowedBelow(j, newHi)
	}
	if newLo > hi || newHi < lo {
		miss := math.Max(newLo-hi, lo-newHi)
		if miss > emptiness*math.Max(1, math.Max(math.Abs(lo), math.Abs(hi))) {
			return false, false
		}
		newLo, newHi = math.Min(newLo, hi), math.Max(newHi, lo)
	}
	worth := func(by float64) bool {
		if c.isDiscrete(j) {
			return by > wholeness*math.Max(1, c.gapHigh[j]-c.gapLow[j])
		}
		if width := hi - lo; finite(width) {
			return by > worthTightening*width
		}
		return by > worthTightening*math.Max(1, math.Max(math.Abs(newLo), math.Abs(newHi))) || !finite(lo) || !finite(hi)
	}
	if newLo > lo && worth(newLo-lo) && math.Abs(newLo) < hugeBound {
		b.lo[j], moved = newLo, true
	}
	if newHi < hi && worth(hi-newHi) && math.Abs(newHi) < hugeBound {
		b.hi[j], moved = newHi, true
	}
	return moved, b.lo[j] <= b.hi[j]
}

// hugeBound is the size of a bound that is as good as none: it would only bring rounding.
const hugeBound = 1e8

// allowedAbove returns the smallest allowed value of a discrete column from v on, within the tolerances.
func (c *core) allowedAbove(j int, v float64) float64 {
	if c.whole[j] {
		v = math.Ceil(v - wholeness)
	}
	if c.gap(j) {
		width := c.gapHigh[j] - c.gapLow[j]
		if v > c.gapLow[j]+wholeness*width && v < c.gapHigh[j] {
			v = c.gapHigh[j]
		} else if v > c.gapLow[j] && v < c.gapHigh[j] {
			v = c.gapLow[j]
		}
	}
	return v
}

// allowedBelow is the same downward.
func (c *core) allowedBelow(j int, v float64) float64 {
	if c.whole[j] {
		v = math.Floor(v + wholeness)
	}
	if c.gap(j) {
		width := c.gapHigh[j] - c.gapLow[j]
		if v < c.gapHigh[j]-wholeness*width && v > c.gapLow[j] {
			v = c.gapLow[j]
		} else if v < c.gapHigh[j] && v > c.gapLow[j] {
			v = c.gapHigh[j]
		}
	}
	return v
}
