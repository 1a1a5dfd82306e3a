package convex

import "math"

// proves builds the multipliers of the row of basic variable p, whose violation is by, and tells whether they prove that no values
// meet all bounds. The multipliers are kept in proof.
func (e *engine) proves(p int, by float64) bool {
	y := make([]float64, e.rows)
	sign := 1.0
	if by > 0 {
		sign = -1
	}
	for t, i := range e.rList {
		y[i] = sign * e.w[t]
	}
	if p >= e.n {
		y[p-e.n] = -sign
	}
	e.proof, e.proofAt, e.proofBy = y, p, by
	return e.proofOf(y) > proofMargin
}

// proofOf returns minus the largest value of y'r - (A'y)'x within all bounds, relative to the sum of the absolute terms, or to the
// largest multiplier where the terms are only rounding, bounds being near one: positive when y is a proof (Farkas 1902).
// Multipliers of rows that meet an infinite bound are rounding and are set to zero; what meets an infinite bound of a column must
// be negligible against the largest multiplier, entries being near one, and so small that values as large as the largest bound make
// less than CertifiedStray of the margin of it; the result is -Inf otherwise.
func (e *engine) proofOf(y []float64) float64 {
	for i := range y {
		if !finite(e.edge(e.n+i, y[i])) {
			y[i] = 0
		}
	}
	e.m.combineRows(e.byCol, e.everyRow(y), e.dr, e.byRow)
	size := 0.0
	for _, yi := range y {
		size = math.Max(size, math.Abs(yi))
	}
	var top twofold
	terms, stray := 0.0, 0.0
	take := func(v int, z float64) {
		if z == 0 {
			return
		}
		b := e.edge(v, z)
		top.addProduct(z, b)
		terms += math.Abs(z * b)
	}
	for i, yi := range y {
		take(e.n+i, yi)
	}
	for j := 0; j < e.n; j++ {
		z := -e.byCol[j]
		if !finite(e.edge(j, z)) {
			if !(math.Abs(z) <= negligibleShare*size) {
				return math.Inf(-1)
			}
			stray += math.Abs(z)
			continue
		}
		take(j, z)
	}
	if !(size > 0) {
		return 0
	}
	if stray > 0 && !(stray*e.largestBound() <= -CertifiedStray*top.value()) {
		return math.Inf(-1)
	}
	return -top.value() / math.Max(terms, size)
}

// largestBound returns the size of the largest finite bound, at least one.
func (e *engine) largestBound() float64 {
	most := 1.0
	for v := range e.lower {
		for _, b := range [2]float64{e.lower[v], e.upper[v]} {
			if finite(b) {
				most = math.Max(most, math.Abs(b))
			}
		}
	}
	return most
}

// edge returns the bound of v that makes z times v largest; zero when z is zero.
func (e *engine) edge(v int, z float64) float64 {
	switch {
	case z > 0:
		return e.upper[v]
	case z < 0:
		return e.lower[v]
	}
	return 0
}
