package sparse

import (
	"fmt"
	"math"
)

// Matrix is a symmetric matrix: a pattern and a value for each of its entries.
type Matrix struct {
	Pattern *Pattern
	Values  []float64 // len(Pattern.Index) [any]
}

// MulVec stores A x in dst; x and dst have N entries and do not overlap. Each sum runs in a fixed order.
func (m Matrix) MulVec(dst, x []float64) {
	p := m.Pattern
	if len(dst) != p.N || len(x) != p.N || len(m.Values) != len(p.Index) {
		panic(fmt.Sprintf("sparse: MulVec of %d rows with %d values into %d from %d", p.N, len(m.Values), len(dst), len(x)))
	}
	clear(dst)
	for j := range p.N {
		a, b := p.Ptr[j], p.Ptr[j+1]
		xj := x[j]
		sum := float64(m.Values[a] * xj)
		values := m.Values[a+1 : b]
		for k, i := range p.Index[a+1 : b] {
			v := values[k]
			sum += float64(v * x[i])
			dst[i] += float64(v * xj)
		}
		dst[j] += sum
	}
}

// MulBlock stores A X in dst for k columns one after the other, each of N entries.
func (m Matrix) MulBlock(dst, x []float64, k int) {
	n := m.Pattern.N
	if k < 0 || len(dst) != n*k || len(x) != n*k {
		panic(fmt.Sprintf("sparse: MulBlock of %d columns of %d rows into %d from %d", k, n, len(dst), len(x)))
	}
	for c := range k {
		m.MulVec(dst[c*n:(c+1)*n], x[c*n:(c+1)*n])
	}
}

// Norm returns the largest row sum of absolute values, ‖A‖ in the infinity norm.
func (m Matrix) Norm() float64 {
	p := m.Pattern
	rows := make([]float64, p.N)
	for j := range p.N {
		for k := p.Ptr[j]; k < p.Ptr[j+1]; k++ {
			v := math.Abs(m.Values[k])
			rows[j] += v
			if i := int(p.Index[k]); i != j {
				rows[i] += v
			}
		}
	}
	return maxNorm(rows)
}

// Residual returns the scaled residual ‖A x − b‖/(‖A‖ ‖x‖ + ‖b‖) in the infinity norm [-]: a few units of rounding for a
// backward stable solution. It is 0 where both x and b are zero, NaN where a value is.
func (m Matrix) Residual(x, b []float64) float64 {
	r := make([]float64, m.Pattern.N)
	m.MulVec(r, x)
	for i := range r {
		r[i] -= b[i]
	}
	norm, scale := maxNorm(r), m.Norm()*maxNorm(x)+maxNorm(b)
	if norm == 0 && scale == 0 {
		return 0
	}
	return norm / scale
}

// maxNorm returns the largest magnitude; a NaN anywhere gives NaN.
func maxNorm(x []float64) float64 {
	largest := 0.0
	for _, v := range x {
		largest = max(largest, math.Abs(v))
	}
	return largest
}
