package convex

import "math"

// A row with one entry is a bound of its column. As a row it would take a place in every basis; as a bound it costs nothing. Explanations
// are asked with such rows, since only a row can be named as a member or be let give way, and work on them as bounds.

// asBound returns the bounds that row i sets on its only column. ok is false for rows with more entries than one, and where dividing by
// the entry would round, so that nothing changes but the form. flipped tells that the entry is negative: the lower side of the row is then
// the upper bound of the column.
func (p *Problem) asBound(i int) (j int, lower, upper float64, flipped, ok bool) {
	if len(p.unit) > 0 {
		return 0, 0, 0, false, false
	}
	j = -1
	for k, a := range p.a[i] {
		if a == 0 {
			continue
		}
		if j >= 0 {
			return 0, 0, 0, false, false
		}
		j = k
	}
	if j < 0 {
		return 0, 0, 0, false, false
	}
	a := p.a[i][j]
	lower, okLower := exactQuotient(p.rowLower[i], a)
	upper, okUpper := exactQuotient(p.rowUpper[i], a)
	if a < 0 {
		lower, upper = upper, lower
	}
	return j, lower, upper, a < 0, okLower && okUpper
}

// exactQuotient divides a bound by an entry and tells that nothing was rounded.
func exactQuotient(bound, a float64) (float64, bool) {
	q := bound / a
	if !finite(bound) {
		return q, true
	}
	return q, finite(q) && math.FMA(q, a, -bound) == 0 && (q == 0) == (bound == 0)
}

// rowBounds are the rows of a problem that are bounds of a column.
type rowBounds struct {
	is           []bool // by row
	column       []int  // by row
	lower, upper []float64
	flipped      []bool
	size         []float64 // of the entry
}

// findRowBounds finds them. Those on a column whose bounds exclude each other stay rows, as NewProblem asks of columns.
func findRowBounds(p *Problem) *rowBounds {
	m := p.Rows()
	b := &rowBounds{is: make([]bool, m), column: make([]int, m), lower: make([]float64, m), upper: make([]float64, m), flipped: make([]bool, m), size: make([]float64, m)}
	lower, upper := make([]float64, p.Columns()), make([]float64, p.Columns())
	for j, c := range p.columns {
		lower[j], upper[j] = c.Lower, c.Upper
	}
	for i := range m {
		b.column[i], b.lower[i], b.upper[i], b.flipped[i], b.is[i] = p.asBound(i)
		if j := b.column[i]; b.is[i] {
			b.size[i] = math.Abs(p.a[i][j])
			lower[j], upper[j] = math.Max(lower[j], b.lower[i]), math.Min(upper[j], b.upper[i])
		}
	}
	for i := range m {
		b.is[i] = b.is[i] && lower[b.column[i]] <= upper[b.column[i]]
	}
	return b
}

// side returns the side of row i that sets the given side of its column.
func (b *rowBounds) side(i int, ofColumn Side) Side {
	if b.flipped[i] {
		return LowerSide + UpperSide - ofColumn
	}
	return ofColumn
}
