package mesh

import "math"

// An expansion is a sum of floating-point numbers that do not overlap, smallest first; its sign is that of its last term
// (Shewchuk 1997, section 2). Zero terms are left out, so the empty expansion is zero.

// pair is a two-term expansion: value and rounding error of one operation.
type pair struct {
	v [2]float64 // error, value
	n int        // terms that are not zero, counted from the value
}

// terms gives the expansion's terms.
func (p *pair) terms() []float64 { return p.v[2-p.n:] }

// difference is a-b exactly.
func difference(a, b float64) pair {
	x := a - b
	bv := a - x
	av := x + bv
	e := (a - av) + (bv - b)
	switch {
	case e != 0:
		return pair{[2]float64{e, x}, 2}
	case x != 0:
		return pair{[2]float64{0, x}, 1}
	}
	return pair{}
}

// twoSum is a+b exactly: value and error (Knuth 1969).
func twoSum(a, b float64) (x, e float64) {
	x = a + b
	bv := x - a
	av := x - bv
	return x, (a - av) + (b - bv)
}

// twoProduct is a b exactly: value and error.
func twoProduct(a, b float64) (x, e float64) {
	x = float64(a * b)
	return x, math.FMA(a, b, -x)
}

// grow adds one number to an expansion in place (Shewchuk 1997, grow-expansion) and drops zero terms.
func grow(e []float64, b float64) []float64 {
	q, n := b, 0
	for _, t := range e {
		var r float64
		q, r = twoSum(q, t)
		if r != 0 {
			e[n] = r
			n++
		}
	}
	e = e[:n]
	if q != 0 {
		e = append(e, q)
	}
	return e
}

// add appends e+f to the empty out. Every term of f is grown in, which keeps the result free of overlap.
func add(e, f, out []float64) []float64 {
	out = append(out, e...)
	for _, t := range f {
		out = grow(out, t)
	}
	return out
}

// subtract appends e-f to the empty out.
func subtract(e, f, out []float64) []float64 {
	out = append(out, e...)
	for _, t := range f {
		out = grow(out, -t)
	}
	return out
}

// multiply appends e f to the empty out.
func multiply(e, f, out []float64) []float64 {
	for _, a := range e {
		for _, b := range f {
			x, r := twoProduct(a, b)
			out = grow(grow(out, r), x)
		}
	}
	return out
}

// top is the largest term, which has the sign of the expansion; 0 for an empty one.
func top(e []float64) float64 {
	if len(e) == 0 {
		return 0
	}
	return e[len(e)-1]
}
