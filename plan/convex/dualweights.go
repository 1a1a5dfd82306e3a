package convex

import "math"

// exactWeightWork caps the work on exact starting weights [multiplications]; beyond it all start at one, which is valid but a
// poorer guide.
const exactWeightWork = 300_000_000

// exactWeights sets the steepest-edge weight of each basic variable, the squared norm of its row of the basis inverse.
func (e *engine) exactWeights() {
	k := len(e.jList)
	for v := range e.weight {
		e.weight[v] = 1
	}
	if k == 0 || e.kern.k != k || k*k*e.rows > exactWeightWork {
		return
	}
	z := make([]float64, k)
	for t, j := range e.jList {
		clear(z)
		z[t] = 1
		e.kern.solveTransposed(z, z)
		e.weight[j] = math.Max(dot(z, z), weightFloor)
	}
	for i := range e.posR {
		if e.posR[i] >= 0 {
			continue
		}
		for t := range z {
			z[t] = e.stored[t][i]
		}
		e.kern.solveTransposed(z, z)
		e.weight[e.n+i] = 1 + dot(z, z)
	}
}

// updateWeights carries the weights over the exchange of p for q, before the kernel changes. The pivot column is in dxJ and dr, the
// multipliers of row p in w.
//
// Source: Forrest & Goldfarb (1992), Steepest-edge simplex algorithms for linear programming, algorithm I.
func (e *engine) updateWeights(p, q int) {
	k := e.kern.k
	w, tau := e.w[:k], e.tau
	own := dot(w, w)
	z := e.zeta[:k]
	e.kern.solve(z, w)
	clear(tau)
	e.spread(tau, z)
	if p >= e.n {
		own++
		tau[p-e.n]++
	}
	pivot := e.stepOf(p)
	for t, j := range e.jList {
		if j != p {
			e.carry(j, e.dxJ[t]/pivot, z[t], own)
		}
	}
	for i := range e.posR {
		if v := e.n + i; e.posR[i] < 0 && v != p && e.dr[i] != 0 {
			e.carry(v, e.dr[i]/pivot, tau[i], own)
		}
	}
	e.weight[q] = math.Max(own/(pivot*pivot), weightFloor)
}

func (e *engine) carry(v int, ratio, tau, own float64) {
	if ratio == 0 {
		return
	}
	e.weight[v] = math.Max(e.weight[v]+ratio*(ratio*own-2*tau), weightFloor)
}
