package convex

import "math"

// twofold is an unevaluated sum of two numbers, about 32 digits. It carries residuals and certificates, where plain sums would
// round away what is looked for.
//
// Source: Dekker (1971); Ogita, Rump & Oishi (2005), Accurate sum and dot product.
type twofold struct{ high, low float64 }

// add adds v.
func (t *twofold) add(v float64) {
	s := t.high + v
	b := s - t.high
	t.low += (t.high - (s - b)) + (v - b)
	t.high = s
}

// addProduct adds a b.
func (t *twofold) addProduct(a, b float64) {
	p := a * b
	t.low += math.FMA(a, b, -p)
	t.add(p)
}

// value rounds the sum.
func (t *twofold) value() float64 { return t.high + t.low }

// dotTwofold returns x'y rounded once, over the length of x.
func dotTwofold(x, y []float64) float64 {
	var t twofold
	y = y[:len(x)]
	for i, v := range x {
		if v != 0 && y[i] != 0 {
			t.addProduct(v, y[i])
		}
	}
	return t.value()
}
