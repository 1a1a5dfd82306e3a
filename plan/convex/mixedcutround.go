package convex

import (
	"math"
	"sort"
)

// Numbers of mixed-integer rounding.
const (
	partLeast     = 0.01 // least fraction of the right side, and least distance from one: the cut's coefficients grow with its inverse
	divisorsMost  = 8    // divisors tried
	complementsOf = 20   // columns tried at their other bound
)

// weighted names a row with its multiplier.
type weighted struct {
	row    int
	weight float64
}

// slackTerm is the distance of a row from one of its limits with its coefficient in a sum of rows.
type slackTerm struct {
	row         int
	upper       bool
	coefficient float64
}

// summed is a sum of rows: a'x + slacks <= limit holds with equality for every x.
type summed struct {
	list   []int // columns with an entry in k.a
	slacks []slackTerm
	limit  float64
}

// sum adds rows up in k.a. false when a row has no limit.
func (k *cutter) sum(rows []weighted) (summed, bool) {
	var s summed
	for _, w := range rows {
		r := k.rows[w.row]
		up, down := r.upper-k.activity[w.row], k.activity[w.row]-r.lower
		limit := r.upper
		if r.lower != r.upper {
			t := slackTerm{row: w.row, upper: up <= down, coefficient: w.weight}
			if !t.upper {
				limit, t.coefficient = r.lower, -w.weight
			}
			s.slacks = append(s.slacks, t)
		}
		if !finite(limit) {
			k.clear(s.list)
			return s, false
		}
		s.limit += w.weight * limit
		for _, e := range r.entries {
			if k.a[e.at] == 0 {
				s.list = append(s.list, e.at)
			}
			k.a[e.at] += w.weight * e.value
			if k.a[e.at] == 0 {
				k.a[e.at] = math.SmallestNonzeroFloat64 // stays on the list
			}
		}
	}
	sort.Ints(s.list)
	return s, true
}

func (k *cutter) clear(list []int) {
	for _, j := range list {
		k.a[j] = 0
	}
}

// roundTerm is one variable z >= 0 of a sum of rows in the form that is rounded.
type roundTerm struct {
	column   int // -1 for a slack
	slack    slackTerm
	whole    bool
	value    float64 // coefficient of z
	at       float64 // z in the relaxation
	reach    float64 // largest z of a whole one
	upper    bool    // z is the distance from the upper bound
	constant float64 // the bound is constant + slope times column y
	slope    float64
	y        int
}

// roundedSum tries to cut the relaxation off by rounding the sum of rows, both as it stands and with its sign changed.
//
// Source: Marchand & Wolsey (2001), Aggregation and mixed integer rounding to solve MIPs, Operations Research 49, 363-371.
func (k *cutter) roundedSum(rows []weighted, variable bool, divisors ...float64) bool {
	any := false
	for _, sign := range []float64{1, -1} {
		turned := make([]weighted, len(rows))
		for i, w := range rows {
			turned[i] = weighted{w.row, sign * w.weight}
		}
		if s, ok := k.sum(turned); ok {
			terms, limit, ok := k.standard(s, variable)
			if ok && k.roundTerms(terms, limit, divisors) {
				any = true
			}
		}
	}
	return any
}

// standard brings the sum in k.a to variables that are not negative, and empties k.a.
func (k *cutter) standard(s summed, variable bool) ([]roundTerm, float64, bool) {
	terms := k.terms[:0]
	defer func() { k.terms = terms }()
	limit, ok := s.limit, true
	size := 0.0
	for _, j := range s.list {
		size = math.Max(size, math.Abs(k.a[j])*k.lp.t.s.col[j])
	}
	whole := k.wholeList[:0]
	for _, j := range s.list {
		v := k.a[j]
		if k.c.whole[j] {
			whole = append(whole, j)
			continue
		}
		k.a[j] = 0
		if math.Abs(v)*k.lp.t.s.col[j] <= cutNegligible*cutNegligible*size {
			// what is left of entries that cancel: rounding of their sum, taken at the bound that keeps the sum valid
			bound := k.c.lower[j]
			if v < 0 {
				bound = k.c.upper[j]
			}
			if !finite(bound) && math.Abs(v) > math.SmallestNonzeroFloat64 {
				ok = false
			} else if finite(bound) {
				limit -= v * bound
			}
			continue
		}
		t, fine := k.nearestBound(j, variable)
		if !fine {
			ok = false
			continue
		}
		limit -= v * t.constant
		t.value = v
		if t.upper {
			t.value = -v
		}
		if t.slope != 0 {
			if k.a[t.y] == 0 && !k.listed(s.list, t.y) {
				whole = append(whole, t.y)
			}
			k.a[t.y] += v * t.slope
			if k.a[t.y] == 0 {
				k.a[t.y] = math.SmallestNonzeroFloat64 // stays on the list
			}
		}
		terms = append(terms, t)
	}
	sort.Ints(whole)
	k.wholeList = whole
	terms, limit, ok = k.standardWhole(terms, whole, limit, ok)
	return k.standardSlacks(terms, s.slacks), limit, ok
}

// standardWhole adds the terms of whole columns, measured from the nearer bound, and empties k.a.
func (k *cutter) standardWhole(terms []roundTerm, whole []int, limit float64, ok bool) ([]roundTerm, float64, bool) {
	for _, j := range whole {
		v := k.a[j]
		k.a[j] = 0
		if v == 0 || !ok || math.Abs(v) == math.SmallestNonzeroFloat64 {
			continue
		}
		lo, hi := k.c.lower[j], k.c.upper[j]
		t := roundTerm{column: j, whole: true, value: v, constant: lo, at: math.Max(0, k.x[j]-lo), reach: hi - lo}
		if !finite(lo) || hi-k.x[j] < k.x[j]-lo {
			t.upper, t.value, t.constant, t.at = true, -v, hi, math.Max(0, hi-k.x[j])
		}
		if !finite(t.constant) {
			ok = false
			continue
		}
		limit -= v * t.constant
		terms = append(terms, t)
	}
	return terms, limit, ok
}

// standardSlacks adds the terms of the slacks.
func (k *cutter) standardSlacks(terms []roundTerm, slacks []slackTerm) []roundTerm {
	for _, sl := range slacks {
		r := k.rows[sl.row]
		at, bound := k.activity[sl.row]-r.lower, r.lower
		if sl.upper {
			at, bound = r.upper-k.activity[sl.row], r.upper
		}
		terms = append(terms, roundTerm{column: -1, slack: sl, whole: r.whole && bound == math.Trunc(bound), value: sl.coefficient,
			at: math.Max(0, at), reach: math.Inf(1)})
	}
	return terms
}

func (k *cutter) listed(list []int, j int) bool {
	at := sort.SearchInts(list, j)
	return at < len(list) && list[at] == j
}

// nearestBound picks the bound of a continuous column that is nearest to its value.
func (k *cutter) nearestBound(j int, variable bool) (roundTerm, bool) {
	x := k.x[j]
	best := roundTerm{column: j, at: math.Inf(1)}
	try := func(t roundTerm, at float64) {
		if at < best.at-cutRelief*math.Max(1, math.Abs(x)) {
			t.column, t.at = j, math.Max(0, at)
			best = t
		}
	}
	if variable {
		for _, b := range k.above[j] {
			try(roundTerm{upper: true, constant: b.constant, slope: b.slope, y: b.column}, b.constant+b.slope*k.x[b.column]-x)
		}
		for _, b := range k.below[j] {
			try(roundTerm{constant: b.constant, slope: b.slope, y: b.column}, x-b.constant-b.slope*k.x[b.column])
		}
	}
	if lo := k.c.lower[j]; finite(lo) {
		try(roundTerm{constant: lo}, x-lo)
	}
	if hi := k.c.upper[j]; finite(hi) {
		try(roundTerm{upper: true, constant: hi}, hi-x)
	}
	return best, finite(best.at)
}

// roundTerms looks for the divisor and the bounds that cut deepest and keeps that cut.
func (k *cutter) roundTerms(terms []roundTerm, limit float64, divisors []float64) bool {
	if len(divisors) == 0 {
		for _, t := range terms {
			if v := math.Abs(t.value); t.whole && t.column >= 0 && t.at > wholeness && v > cutNegligible && len(divisors) < divisorsMost && !near1(divisors, v) {
				divisors = append(divisors, v)
			}
		}
	}
	best, divisor := 0.0, 0.0
	for _, d := range divisors {
		if v := depth(terms, limit, d); v > best {
			best, divisor = v, d
		}
	}
	if !(divisor > 0) {
		return false
	}
	for _, f := range []float64{2, 4, 8} {
		if v := depth(terms, limit, divisor/f); v > best*(1+cutRelief) {
			best, divisor = v, divisor/f
			break
		}
	}
	tried := 0
	for i := range terms {
		t := &terms[i]
		if !t.whole || t.column < 0 || !(t.at > wholeness && t.at < t.reach-wholeness) || !finite(t.reach) || tried >= complementsOf {
			continue
		}
		tried++
		limit -= t.value * t.reach
		t.flip()
		if v := depth(terms, limit, divisor); v > best*(1+cutRelief) {
			best = v
			continue
		}
		t.flip()
		limit += t.value * t.reach
	}
	return k.writeRounded(terms, limit, divisor)
}

func near1(list []float64, v float64) bool {
	for _, w := range list {
		if math.Abs(v-w) <= cutRelief*v {
			return true
		}
	}
	return false
}

// flip measures z from the other bound.
func (t *roundTerm) flip() {
	t.value = -t.value
	t.at = t.reach - t.at
	if t.upper {
		t.constant -= t.reach
	} else {
		t.constant += t.reach
	}
	t.upper = !t.upper
}

// roundedValue is the rounding function of the source: F(v) for whole terms, and for others the slope of a negative coefficient.
func roundedValue(t *roundTerm, divisor, part float64) float64 {
	v := t.value / divisor
	if !t.whole {
		return math.Min(0, v) / (1 - part)
	}
	floor := math.Floor(v)
	return floor + math.Max(0, v-floor-part)/(1-part)
}

// depth is the distance of the relaxation beyond the rounded sum in the space of z; below zero when there is none.
func depth(terms []roundTerm, limit, divisor float64) float64 {
	b := limit / divisor
	floor := math.Floor(b)
	part := b - floor
	if !(part >= partLeast && part <= 1-partLeast) {
		return -1
	}
	value, norm := -floor, 0.0
	for i := range terms {
		f := roundedValue(&terms[i], divisor, part)
		value += f * terms[i].at
		norm += f * f
	}
	if !(norm > 0) {
		return -1
	}
	return value / math.Sqrt(norm)
}

// writeRounded writes the rounded sum in the columns and keeps it.
func (k *cutter) writeRounded(terms []roundTerm, limit, divisor float64) bool {
	b := limit / divisor
	right := math.Floor(b)
	part := b - right
	if !(part >= partLeast && part <= 1-partLeast) {
		return false
	}
	for i := range terms {
		t := &terms[i]
		f := roundedValue(t, divisor, part)
		if f == 0 {
			continue
		}
		if t.column < 0 {
			r := k.rows[t.slack.row]
			bound := r.lower
			if t.slack.upper {
				f, bound = -f, r.upper
			}
			right += f * bound
			for _, e := range r.entries {
				k.out[e.at] += f * e.value
			}
			continue
		}
		if t.upper {
			f = -f
		}
		k.out[t.column] += f
		right += f * t.constant
		if t.slope != 0 {
			k.out[t.y] -= f * t.slope
		}
	}
	return k.keep(right)
}
