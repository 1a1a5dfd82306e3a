package convex

import "math"

// reduceSweeps bounds the rounds of presolve; each is a reading of the rows.
const reduceSweeps = 10

// reduce narrows bounds and coefficients by what the rows imply and leaves out rows that ask for nothing and columns with one
// value. false means that no plan exists. The core itself stays as it is.
//
// Source: Savelsbergh (1994), Preprocessing and probing techniques for mixed integer programming problems.
func (c *core) reduce() (*core, Tightenings, bool) {
	var did Tightenings
	w := c.copy()
	b := &box{lo: w.lower, hi: w.upper}
	g := newPropagator(w)
	for sweep := 0; sweep < reduceSweeps; sweep++ {
		if !g.all(b) {
			return c, did, false
		}
		did.Bounds += len(g.changed)
		fixed := w.fixByCost(b)
		did.Bounds += fixed
		shrunk := 0
		for i := range w.rows {
			shrunk += w.shrinkRow(b, i)
		}
		did.Coefficients += shrunk
		w.index()
		if len(g.changed)+fixed+shrunk == 0 {
			break
		}
	}
	for j := range w.cost {
		// a coefficient may have been shrunk on the strength of any bound, so that then all of them must stay in force
		if did.Coefficients > 0 || w.isDiscrete(j) {
			w.lpLower[j], w.lpUpper[j] = b.lo[j], b.hi[j]
		}
	}
	return w.compact(&did), did, true
}

// copy returns a core that shares nothing that presolve changes.
func (c *core) copy() *core {
	w := *c
	w.lower, w.upper = append([]float64(nil), c.lower...), append([]float64(nil), c.upper...)
	w.lpLower, w.lpUpper = append([]float64(nil), c.lpLower...), append([]float64(nil), c.lpUpper...)
	w.rows = make([]coreRow, len(c.rows))
	for i, r := range c.rows {
		r.entries = append([]mixedEntry(nil), r.entries...)
		w.rows[i] = r
	}
	w.discrete = nil
	w.index()
	return &w
}

// fixByCost fixes columns that no row keeps from moving where the cost does not object: some best plan has them there.
func (c *core) fixByCost(b *box) int {
	fixed := 0
	for j, cost := range c.cost {
		if b.lo[j] == b.hi[j] {
			continue
		}
		up, down := 0, 0 // rows that object
		for _, e := range c.touching[j] {
			r := &c.rows[e.at]
			if s := b.spanOf(r); s.stays(r.upper) && s.reaches(r.lower) {
				continue
			}
			if finite(r.upper) == finite(r.lower) {
				up, down = up+1, down+1
			} else if finite(r.upper) == (e.value > 0) {
				up++
			} else {
				down++
			}
		}
		switch {
		case cost >= 0 && down == 0 && finite(b.lo[j]):
			b.hi[j] = b.lo[j]
		case cost <= 0 && up == 0 && finite(b.hi[j]):
			b.lo[j] = b.hi[j]
		default:
			continue
		}
		c.lpLower[j], c.lpUpper[j] = b.lo[j], b.hi[j]
		fixed++
	}
	return fixed
}

// shrinkRow makes coefficients of whole columns of a one-sided row smaller where the row asks for nothing one step away from the
// bound at which the column makes it hardest.
func (c *core) shrinkRow(b *box, i int) int {
	r := &c.rows[i]
	if finite(r.lower) == finite(r.upper) {
		return 0
	}
	sign, limit := 1.0, r.upper
	if finite(r.lower) {
		sign, limit = -1, -r.lower
	}
	shrunk := 0
	for k := range r.entries {
		e := &r.entries[k]
		j := e.at
		if !c.whole[j] || c.gap(j) || b.lo[j] == b.hi[j] {
			continue
		}
		s := b.spanOf(r)
		most, infinite := s.high, s.highInf
		if sign < 0 {
			most, infinite = -s.low, s.lowInf
		}
		if infinite > 0 {
			return shrunk
		}
		a := sign * e.value
		worst, step := b.hi[j], 1.0
		if a < 0 {
			worst, step = b.lo[j], -1
		}
		rest := most - a*worst
		spare := limit - rest - a*(worst-step) // what the row has left one step away
		if !(spare > shrinkWorth*math.Max(math.Abs(a), math.Abs(limit))) || !(math.Abs(a) > spare) {
			continue
		}
		a -= step * spare
		limit -= step * spare * worst
		e.value = sign * a
		shrunk++
	}
	if sign > 0 {
		r.upper = limit
	} else {
		r.lower = -limit
	}
	return shrunk
}

// shrinkWorth is the least share by which a coefficient must shrink: less would be rounding.
const shrinkWorth = 1e-6

// compact leaves out rows that always hold and columns with one value.
func (c *core) compact(did *Tightenings) *core {
	b := &box{lo: c.lower, hi: c.upper}
	lp := &box{lo: c.lpLower, hi: c.lpUpper}
	n := len(c.cost)
	out := &core{parent: n, base: make([]float64, n)}
	place := make([]int, n)
	for j := range place {
		place[j] = -1
		if b.lo[j] == b.hi[j] {
			out.base[j] = b.lo[j]
			out.offset += c.cost[j] * b.lo[j]
			did.Columns++
			continue
		}
		place[j] = len(out.cost)
		out.origin = append(out.origin, j)
		out.cost = append(out.cost, c.cost[j])
		out.lower, out.upper = append(out.lower, c.lower[j]), append(out.upper, c.upper[j])
		out.lpLower, out.lpUpper = append(out.lpLower, c.lpLower[j]), append(out.lpUpper, c.lpUpper[j])
		out.whole = append(out.whole, c.whole[j])
		out.gapLow, out.gapHigh = append(out.gapLow, c.gapLow[j]), append(out.gapHigh, c.gapHigh[j])
	}
	for i := range c.rows {
		r := &c.rows[i]
		s := lp.spanOf(r) // bounds of continuous columns that this very row implies do not count
		slack := emptiness * emptiness * math.Max(1, s.terms)
		if (!finite(r.upper) || s.stays(r.upper+slack)) && (!finite(r.lower) || s.reaches(r.lower-slack)) {
			did.Rows++
			continue
		}
		kept := coreRow{lower: r.lower, upper: r.upper}
		var known twofold
		for _, e := range r.entries {
			if k := place[e.at]; k >= 0 {
				kept.entries = append(kept.entries, mixedEntry{k, e.value})
			} else {
				known.addProduct(e.value, out.base[e.at])
			}
		}
		kept.lower -= known.value()
		kept.upper -= known.value()
		out.rows = append(out.rows, kept)
	}
	out.index()
	return out
}
