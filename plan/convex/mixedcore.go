package convex

import "math"

// mixedEntry is one coefficient: at is a column in a row, or a row in a column.
type mixedEntry struct {
	at    int
	value float64
}

// coreRow is a row in sparse form.
type coreRow struct {
	entries      []mixedEntry
	lower, upper float64
	whole        bool // its value is whole whenever whole columns are
}

// core is the problem a search works on: a minimisation, with rows in sparse form beside the dense ones of its linear programme.
// A column j may be anything in [lower, upper] except the open interval (gapLow, gapHigh), and must be whole when whole[j].
type core struct {
	cost             []float64
	lower, upper     []float64 // the narrowest bounds known; the linear programme sees them for discrete columns only
	lpLower, lpUpper []float64 // bounds in the linear programme
	whole            []bool
	gapLow, gapHigh  []float64
	rows             []coreRow
	touching         [][]mixedEntry // by column: its entries
	discrete         []int          // columns that are whole or have a gap

	parent int       // columns of the problem it was made from
	base   []float64 // values of the columns left out
	origin []int     // by column: column of the problem it was made from
	offset float64   // cost of the columns left out
	step   float64   // every plan costs offset plus a multiple of this; 0 when that is not known
}

// newCore copies a problem; columns keep their order.
func newCore(p *MixedProblem) *core {
	n := p.Columns()
	c := &core{
		cost: make([]float64, n), lower: make([]float64, n), upper: make([]float64, n), whole: make([]bool, n),
		gapLow: make([]float64, n), gapHigh: make([]float64, n), parent: n, base: make([]float64, n), origin: make([]int, n),
	}
	for j, col := range p.columns {
		c.origin[j] = j
		c.cost[j] = col.Cost
		if p.sense == Maximise {
			c.cost[j] = -col.Cost
		}
		c.lower[j], c.upper[j] = col.Lower, col.Upper
	}
	for _, j := range p.SemiContinuous {
		switch {
		case c.lower[j] > 0:
			c.gapHigh[j], c.lower[j] = c.lower[j], 0
		case c.upper[j] < 0:
			c.gapLow[j], c.upper[j] = c.upper[j], 0
		}
	}
	for _, j := range p.Integer {
		c.whole[j] = true
		c.lower[j], c.upper[j] = math.Ceil(c.lower[j]), math.Floor(c.upper[j])
		if c.gap(j) {
			c.gapLow[j], c.gapHigh[j] = math.Floor(c.gapLow[j]), math.Ceil(c.gapHigh[j])
		}
	}
	for i := range p.rowName {
		r := coreRow{lower: p.rowLower[i], upper: p.rowUpper[i]}
		for j, a := range p.row(i) {
			if a != 0 {
				r.entries = append(r.entries, mixedEntry{j, a})
			}
		}
		c.rows = append(c.rows, r)
	}
	c.lpLower, c.lpUpper = append([]float64(nil), c.lower...), append([]float64(nil), c.upper...)
	c.index()
	return c
}

// index fills what follows from the rest.
func (c *core) index() {
	c.touching = make([][]mixedEntry, len(c.cost))
	for i := range c.rows {
		r := &c.rows[i]
		r.whole = true
		for _, e := range r.entries {
			c.touching[e.at] = append(c.touching[e.at], mixedEntry{i, e.value})
			r.whole = r.whole && c.whole[e.at] && e.value == math.Trunc(e.value)
		}
	}
	c.discrete = c.discrete[:0]
	for j := range c.cost {
		if c.whole[j] || c.gap(j) {
			c.discrete = append(c.discrete, j)
		}
	}
	c.step = c.costStep()
}

func (c *core) gap(j int) bool { return c.gapHigh[j] > c.gapLow[j] }

// boundsInOrder tells that no column is without a value.
func (c *core) boundsInOrder() bool {
	for j := range c.lower {
		if !(c.lower[j] <= c.upper[j]) {
			return false
		}
	}
	return true
}

// isDiscrete tells that column j may not take every value between its bounds.
func (c *core) isDiscrete(j int) bool { return c.whole[j] || c.gap(j) }

// stepTrials are the multipliers by which costs are tried for whole numbers; stepSlack is their rounding.
const (
	stepTrials = 1000
	stepSlack  = 1e-9
)

// costStep returns the largest number found of which every cost is a multiple, when all columns with a cost are whole.
func (c *core) costStep() float64 {
	for j, v := range c.cost {
		if v != 0 && !c.whole[j] {
			return 0
		}
	}
	for _, f := range []float64{1, 10, 100, stepTrials} {
		divisor := 0.0
		for _, v := range c.cost {
			r := math.Round(v * f)
			if !(math.Abs(v*f-r) <= stepSlack) || math.Abs(r) > 1e9 {
				divisor = -1
				break
			}
			divisor = commonDivisor(divisor, math.Abs(r))
		}
		if divisor > 0 {
			return divisor / f
		}
	}
	return 0
}

func commonDivisor(a, b float64) float64 {
	for b != 0 {
		a, b = b, math.Mod(a, b)
	}
	return a
}

// expand returns the values of all columns of the problem that the core was made from.
func (c *core) expand(x []float64) []float64 {
	out := append([]float64(nil), c.base...)
	for k, j := range c.origin {
		out[j] = x[k]
	}
	return out
}

// problem builds the linear programme of the core with further rows behind its own.
func (c *core) problem(cuts []coreRow) *Problem {
	n, m := len(c.cost), len(c.rows)+len(cuts)
	p := &Problem{sense: Minimise, columns: make([]Column, n), rowName: make([]string, m), rowLower: make([]float64, m),
		rowUpper: make([]float64, m), a: make([][]float64, m)}
	for j := range p.columns {
		p.columns[j] = Column{Cost: c.cost[j], Lower: c.lpLower[j], Upper: c.lpUpper[j]}
	}
	all := make([]float64, m*n)
	for i := 0; i < m; i++ {
		p.a[i] = all[i*n : i*n+n : i*n+n]
		r := c.rowOrCut(cuts, i)
		p.rowLower[i], p.rowUpper[i] = r.lower, r.upper
		dst := p.row(i)
		for _, e := range r.entries {
			dst[e.at] += e.value
		}
	}
	return p
}

func (c *core) rowOrCut(cuts []coreRow, i int) *coreRow {
	if i < len(c.rows) {
		return &c.rows[i]
	}
	return &cuts[i-len(c.rows)]
}

// wholeness is the distance from a whole number, or from an edge of a gap as a share of the gap, that counts as none while the
// tree is searched: a thousand times the rounding of values near one. Plans are rounded and solved afresh before they count.
const wholeness = 1e-6

// split returns the two neighbours of v between which column j may not lie and how far v is from the lower one, from 0 to 1;
// false when v is allowed.
func (c *core) split(j int, v float64) (low, high, part float64, between bool) {
	if c.gap(j) {
		low, high = c.gapLow[j], c.gapHigh[j]
		part = (v - low) / (high - low)
		if part > wholeness && part < 1-wholeness {
			return low, high, part, true
		}
	}
	if !c.whole[j] {
		return 0, 0, 0, false
	}
	low = math.Floor(v)
	part = v - low
	return low, low + 1, part, part > wholeness && part < 1-wholeness
}

// nearest returns the allowed value of column j that is nearest to v.
func (c *core) nearest(j int, v float64) float64 {
	if c.whole[j] {
		v = math.Round(v)
	}
	if c.gap(j) && v > c.gapLow[j] && v < c.gapHigh[j] {
		if v-c.gapLow[j] < c.gapHigh[j]-v {
			v = c.gapLow[j]
		} else {
			v = c.gapHigh[j]
		}
	}
	return math.Max(c.lower[j], math.Min(c.upper[j], v))
}
