package convex

import "math"

const (
	// refinements of the final values and prices: each gains the digits that the condition of the kernel leaves.
	refinements = 4
	// refinedEnough ends them: the correction is rounding of the solution itself.
	refinedEnough = 1e-16
)

// polish solves for the values and prices of the basis from a new LU factorisation, with residuals in twofold precision. It reports
// whether the results are finite.
func (e *engine) polish() bool {
	k := len(e.jList)
	entries := make([]float64, k*k)
	for t, i := range e.rList {
		for s := range e.jList {
			entries[t*k+s] = e.stored[s][i]
		}
	}
	f := factorDense(k, entries)
	e.polishValues(f)
	y := e.polishPrices(f, entries)
	e.m.combineRows(e.byCol, e.everyRow(y), e.dr, e.byRow)
	for j := 0; j < e.n; j++ {
		e.d[j] = e.cost[j] - e.byCol[j]
		if e.posJ[j] >= 0 {
			e.d[j] = 0
		}
	}
	copy(e.d[e.n:], y)
	sum := 0.0
	for v := range e.x {
		sum += math.Abs(e.x[v]) + math.Abs(e.d[v])
	}
	return finite(sum)
}

// polishValues solves K x_J = r_R - A_RN x_N and sets all row values.
func (e *engine) polishValues(f *denseFactor) {
	k := f.k
	residual, correction := make([]float64, k), make([]float64, k)
	for _, j := range e.jList {
		e.x[j] = 0
	}
	for pass := 0; pass <= refinements && k > 0; pass++ {
		for t, i := range e.rList {
			var sum twofold
			sum.add(e.rest(e.n + i))
			e.subtractRow(&sum, i)
			residual[t] = sum.value()
		}
		f.solve(correction, residual)
		change, size := 0.0, 0.0
		for t, j := range e.jList {
			e.x[j] += correction[t]
			change = math.Max(change, math.Abs(correction[t]))
			size = math.Max(size, math.Abs(e.x[j]))
		}
		if !(change > refinedEnough*size) {
			break
		}
	}
	rows := e.x[e.n:]
	e.m.times(rows, e.x[:e.n], e.byCol)
	for _, i := range e.rList {
		rows[i] = e.rest(e.n + i)
	}
}

// subtractRow subtracts row i times x.
func (e *engine) subtractRow(sum *twofold, i int) {
	for j, a := range e.m.a[i] {
		if x := e.x[j]; a != 0 && x != 0 {
			sum.addProduct(-a*(e.m.rowScale[i]*e.m.colScale[j]), x)
		}
	}
	for u, r := range e.m.unitRow {
		if r == i {
			sum.addProduct(-e.m.unitValue[u], e.x[e.m.dense+u])
		}
	}
}

// polishPrices solves K'y = c_J; the result is by row.
func (e *engine) polishPrices(f *denseFactor, entries []float64) []float64 {
	k := f.k
	y := make([]float64, e.rows)
	z, residual, correction := make([]float64, k), make([]float64, k), make([]float64, k)
	for pass := 0; pass <= refinements && k > 0; pass++ {
		for s, j := range e.jList {
			var sum twofold
			sum.add(e.trueCost[j])
			for t := range z {
				if a := entries[t*k+s]; a != 0 {
					sum.addProduct(-a, z[t])
				}
			}
			residual[s] = sum.value()
		}
		f.solveTransposed(correction, residual)
		change, size := 0.0, 0.0
		for t := range z {
			z[t] += correction[t]
			change = math.Max(change, math.Abs(correction[t]))
			size = math.Max(size, math.Abs(z[t]))
		}
		if !(change > refinedEnough*size) {
			break
		}
	}
	for t, i := range e.rList {
		y[i] = z[t]
	}
	return y
}
