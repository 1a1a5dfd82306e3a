package convex

import (
	"math"
	"sort"
)

// scalePasses is the most sweeps over the entries; each costs one reading of the matrix, and dense response rows are even enough
// after one or two.
const scalePasses = 6

// scaleGain is the factor by which a sweep must narrow the spread of the entries to be followed by another.
const scaleGain = 0.8

// evenSpread is the spread of entries that needs no scaling at all.
const evenSpread = 64

// widestUnit bounds the unit of a column without entries, so that its bounds keep their digits.
const widestUnit = 0x1p200

// scaled is a problem in scaled form, minimised: entry a_ij row_i col_j, which is never stored, cost c_j col_j cost, bounds of columns
// divided by col_j, bounds of rows times row_i. All factors are powers of two.
type scaled struct {
	matrix       *matrix
	cost         []float64
	lower, upper []float64
	row, col     []float64
	empty        []bool  // by dense column: no row has an entry in it
	costFactor   float64 // negative for a maximisation
	report       Scaling
}

// scale brings the entries near one by geometric means (Curtis & Reid 1972 treat the same aim by least squares), the costs to at
// most one and the typical bound to one.
func scale(p *Problem) *scaled { return scaleAbout(p, typicalMedian) }

// typical names the bound that becomes one.
type typical int

const (
	typicalMedian  typical = iota // the smaller of the medians over rows and over columns
	typicalLargest                // the largest, where tiny bounds among large ones make the first choice a bad one
)

// scaleAbout is scale with the choice of the typical bound.
func scaleAbout(p *Problem, t typical) *scaled {
	m, n, u := len(p.rowName), len(p.columns), len(p.unit)
	s := &scaled{row: ones(m), col: ones(n + u)}
	s.balance(p)
	s.centreBounds(p, t)
	s.scaleCost(p)
	s.matrix = &matrix{rows: m, dense: n, cols: n + u, a: p.a, rowScale: s.row, colScale: s.col[:n], unitRow: p.unitRow,
		unitValue: make([]float64, u)}
	for k, i := range p.unitRow {
		s.matrix.unitValue[k] = p.unitSign[k] * s.row[i] * s.col[n+k]
	}
	s.fillBounds(p)
	return s
}

func ones(n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = 1
	}
	return v
}

// balance alternates between rows and columns, setting each factor to the inverse root of the smallest times the largest entry.
func (s *scaled) balance(p *Problem) {
	m, n := len(p.rowName), len(p.columns)
	small, large := make([]float64, n), make([]float64, n)
	col := s.col[:n]
	for pass := 0; ; pass++ {
		for j := range small {
			small[j], large[j] = math.Inf(1), 0
		}
		low, high := math.Inf(1), 0.0
		for i := 0; i < m; i++ {
			rowLow, rowHigh := extremes(p.row(i), col)
			if !(rowHigh > 0) {
				continue
			}
			low, high = math.Min(low, rowLow*s.row[i]), math.Max(high, rowHigh*s.row[i])
			s.row[i] = 1 / math.Sqrt(rowLow*rowHigh)
			noteColumns(p.row(i), s.row[i], small, large)
		}
		spread := 1.0
		if high > 0 {
			spread = high / low
		}
		if pass == 0 {
			s.report.SpreadBefore = spread
		}
		last := s.report.SpreadAfter
		s.report.SpreadAfter = spread
		if spread <= evenSpread || pass == scalePasses || (pass > 0 && spread > scaleGain*last) {
			break
		}
		s.report.Passes++
		for j := range col {
			if large[j] > 0 {
				col[j] = 1 / math.Sqrt(small[j]*large[j])
			}
		}
	}
	for i := range s.row {
		s.row[i] = powerOfTwo(s.row[i])
	}
	s.empty = make([]bool, n)
	for j := range col {
		col[j] = powerOfTwo(col[j])
		s.empty[j] = !(large[j] > 0)
	}
	for k, i := range p.unitRow {
		s.col[n+k] = 1 / s.row[i]
	}
}

// powerOfTwo returns the power of two nearest to v in the geometric sense.
func powerOfTwo(v float64) float64 {
	return math.Ldexp(1, int(math.Round(math.Log2(v))))
}

// centreBounds multiplies columns and divides rows by one factor so that the typical bound is one: the smaller of the medians over
// rows and over columns. A median passes over the large numbers that stand for "no bound"; and where the two differ the smaller one
// makes for the stricter tolerance.
func (s *scaled) centreBounds(p *Problem, t typical) {
	var rows, columns []float64
	note := func(list *[]float64, b, f float64) {
		if b != 0 && finite(b) {
			*list = append(*list, math.Log2(math.Abs(b))+math.Log2(f))
		}
	}
	for i, r := range s.row {
		note(&rows, p.rowLower[i], r)
		note(&rows, p.rowUpper[i], r)
	}
	for j, c := range p.columns {
		if !s.empty[j] {
			note(&columns, c.Lower, 1/s.col[j])
			note(&columns, c.Upper, 1/s.col[j])
		}
	}
	middle := math.Min(median(rows), median(columns))
	if math.IsInf(middle, 1) {
		return
	}
	if t == typicalLargest {
		for _, v := range append(rows, columns...) {
			middle = math.Max(middle, v)
		}
	}
	g := math.Ldexp(1, int(math.Round(middle)))
	for i := range s.row {
		s.row[i] /= g
	}
	for j := range s.col {
		s.col[j] *= g
	}
}

// median returns the lower median of the list, which it sorts; +Inf for an empty one.
func median(list []float64) float64 {
	if len(list) == 0 {
		return math.Inf(1)
	}
	sort.Float64s(list)
	return list[(len(list)-1)/2]
}

// scaleCost sets the factor of the cost, with the sign that makes it a minimisation. A column without entries has no natural unit; it
// gets one in which its cost is not lost beside those of the others, since nothing but its sign matters.
func (s *scaled) scaleCost(p *Problem) {
	largest := 0.0
	for j, c := range p.columns {
		if !s.empty[j] {
			largest = math.Max(largest, math.Abs(c.Cost)*s.col[j])
		}
	}
	for k, c := range p.unit {
		largest = math.Max(largest, math.Abs(c.Cost)*s.col[len(p.columns)+k])
	}
	if !(largest > 0) {
		for j, c := range p.columns {
			largest = math.Max(largest, math.Abs(c.Cost)*s.col[j])
		}
	}
	for j, c := range p.columns {
		if s.empty[j] && c.Cost != 0 {
			s.col[j] = math.Min(math.Max(1, powerOfTwo(largest/math.Abs(c.Cost))), widestUnit)
		}
	}
	s.costFactor = 1
	if largest > 0 {
		s.costFactor = powerOfTwo(1 / largest)
	}
	if p.sense == Maximise {
		s.costFactor = -s.costFactor
	}
}

// fillBounds writes scaled costs and bounds, columns first.
func (s *scaled) fillBounds(p *Problem) {
	n, m := len(s.col), len(s.row)
	s.cost, s.lower, s.upper = make([]float64, n), make([]float64, n+m), make([]float64, n+m)
	for j := range s.col {
		c := p.anyColumn(j)
		s.cost[j] = c.Cost * s.col[j] * s.costFactor
		s.lower[j], s.upper[j] = c.Lower/s.col[j], c.Upper/s.col[j]
	}
	for i, r := range s.row {
		s.lower[n+i], s.upper[n+i] = p.rowLower[i]*r, p.rowUpper[i]*r
	}
}

// anyColumn returns column j, counting helper columns behind the dense ones.
func (p *Problem) anyColumn(j int) Column {
	if j < len(p.columns) {
		return p.columns[j]
	}
	return p.unit[j-len(p.columns)]
}
