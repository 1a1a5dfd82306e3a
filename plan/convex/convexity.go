package convex

import "math"

// curvature is what is known of a Hessian for one sense.
type curvature struct {
	convex    bool
	strict    bool      // definite, well away from singular
	direction []float64 // not convex: a direction along which the matrix bends the wrong way
	form      *hessian  // the matrix to solve with: the given one, or without factors where only the sum is convex
}

const (
	// convexityShift is added to the diagonal of a Hessian with unit diagonal before its definiteness is asked for: rounding of
	// the entries and of the factorisation is far below, so that a semidefinite matrix passes.
	convexityShift = 1e-11
	// strictPivot is the pivot of the same factorisation above which the matrix counts as definite. The shift shows in the pivot of a
	// singular matrix over the square of a component of its null vector, the smaller the more columns there are; this leaves room for
	// 1e-4. Unconstrained minima of a definite matrix keep eight digits.
	strictPivot = 1e-7
	// CertifiedCurvature is the least curvature of the wrong sign, relative to the sum of the absolute terms of d'Hd, that counts
	// as proof that a problem is not convex.
	CertifiedCurvature = 1e-12
)

// curvature classifies the Hessian of p; it is computed once for each matrix.
func (p *Problem) curvature() *curvature {
	h := p.hessian
	h.once.Do(func() {
		sign := 1.0
		if p.sense == Maximise {
			sign = -1
		}
		h.shape = h.classify(sign)
	})
	return &h.shape
}

func (h *hessian) classify(sign float64) curvature {
	right := true
	for _, w := range h.weight {
		right = right && w*sign > 0
	}
	if right {
		if c := h.sparsePart(sign); c.convex {
			c.form = h
			return c
		}
	}
	full := h.assembled()
	c := full.sparsePart(sign)
	c.form = full
	if !c.convex && !(h.bend(c.direction, sign) < 0) {
		c.convex, c.direction = true, nil // the direction does not stand up to a sum in twice the digits
	}
	return c
}

// bend returns sign d'Hd relative to its absolute terms.
func (h *hessian) bend(d []float64, sign float64) float64 {
	value, terms := h.quadratic(d)
	return sign * share(value, terms)
}

// quadratic returns d'Hd and the sum of its absolute terms.
func (h *hessian) quadratic(d []float64) (value, terms float64) {
	var sum twofold
	for i := 0; i < h.n; i++ {
		if d[i] == 0 {
			continue
		}
		var row twofold
		for k := h.start[i]; k < h.start[i+1]; k++ {
			j, v := int(h.column[k]), h.value[k]
			if j != i {
				v *= 2
			}
			row.addProduct(v, d[j])
			terms += math.Abs(v * d[j] * d[i])
		}
		sum.addProduct(row.high, d[i])
		sum.addProduct(row.low, d[i])
	}
	for k, f := range h.factor {
		g := dotTwofold(f, d)
		sum.addProduct(h.weight[k]*g, g)
		terms += math.Abs(h.weight[k]) * g * g
	}
	return sum.value(), terms
}

// sparsePart looks at sign times the matrix without its factors: with the diagonal scaled to ones and shifted a little it has a
// Cholesky factorisation, or a pivot that is not positive gives a direction.
func (h *hessian) sparsePart(sign float64) curvature {
	n := h.n
	scale := ones(n)
	diagonal := make([]float64, n)
	for i := 0; i < n; i++ {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			if int(h.column[k]) == i {
				diagonal[i] = sign * h.value[k]
			}
		}
		if diagonal[i] < 0 {
			return curvature{direction: unit(n, i)}
		}
		if diagonal[i] > 0 {
			scale[i] = 1 / math.Sqrt(diagonal[i])
		}
	}
	var places []matrixPlace
	var values []float64
	for i := 0; i < n; i++ {
		for k := h.start[i]; k < h.start[i+1]; k++ {
			j := int(h.column[k])
			if j == i {
				continue
			}
			if diagonal[i] == 0 || diagonal[j] == 0 {
				return curvature{direction: h.flatPair(i, j, h.value[k]*sign, diagonal)}
			}
			places = append(places, matrixPlace{int32(i), int32(j)})
			values = append(values, sign*h.value[k]*scale[i]*scale[j])
		}
	}
	q, at := analyse(n, 0, places)
	for k, v := range values {
		q.value[at[k]] = v
	}
	for i, d := range diagonal {
		q.value[q.diag[i]] = convexityShift
		if d > 0 {
			q.value[q.diag[i]] += 1
		}
	}
	q.factor(math.Inf(-1))
	out := curvature{convex: true, strict: true}
	for k, d := range q.d {
		out.strict = out.strict && d >= strictPivot
		if d > 0 {
			continue
		}
		out = curvature{direction: q.kernelDirection(k)}
		for i := range out.direction {
			out.direction[i] *= scale[i]
		}
		return out
	}
	return out
}

func unit(n, i int) []float64 {
	v := make([]float64, n)
	v[i] = 1
	return v
}

// flatPair is a direction of negative curvature where the diagonal of i or j is zero and their entry v is not.
func (h *hessian) flatPair(i, j int, v float64, diagonal []float64) []float64 {
	if diagonal[i] != 0 {
		i, j = j, i
	}
	d := unit(len(diagonal), j) // diagonal[i] is zero: with d_i = t the curvature is diagonal[j] + 2 t v
	d[i] = -(diagonal[j] + math.Abs(v)) / v
	return d
}

// kernelDirection solves L'd = e_k: the curvature along d is the k-th pivot.
func (q *quasidefinite) kernelDirection(k int) []float64 {
	work := make([]float64, q.n)
	work[k] = 1
	for c := k - 1; c >= 0; c-- {
		v := 0.0
		for p := q.lp[c]; p < q.lp[c+1]; p++ {
			if r := q.li[p]; int(r) <= k {
				v -= q.lx[p] * work[r]
			}
		}
		work[c] = v
	}
	d := make([]float64, q.n)
	for c, i := range q.order {
		d[i] = work[c]
	}
	return d
}
