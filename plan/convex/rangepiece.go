package convex

import "math"

// activePiece is a quadratic programme with its active set fixed: values and prices are linear in the bounds. Everything is that of a
// minimisation; prices of a maximisation change their sign on the way out. Variables are columns, then rows.
type activePiece struct {
	p      *Problem
	sign   float64
	places []Place
	free   []int // columns
	rows   []int // active rows
	scale  []float64
	factor *denseFactor
	block  []float64
	x, d   []float64 // values of variables, and prices of those at a bound
	size   []float64 // of the terms of each variable's value
	cost   []float64 // of the terms of each variable's price
}

// newActivePiece solves for values and prices; nil when the active bounds depend on each other, leave a flat direction or are too many.
func newActivePiece(p *Problem, places []Place) *activePiece {
	n := p.Columns()
	a := &activePiece{p: p, sign: 1, places: places}
	if p.sense == Maximise {
		a.sign = -1
	}
	for v, place := range places {
		switch {
		case v < n && place == Basic:
			a.free = append(a.free, v)
		case v >= n && place != Basic:
			a.rows = append(a.rows, v-n)
		}
	}
	if len(a.rows) > len(a.free) || len(a.free)+len(a.rows) > rangeDense {
		return nil
	}
	a.build()
	bounds := make([]float64, len(places))
	cost := make([]float64, n)
	for v, place := range places {
		bounds[v] = a.bound(v, place)
	}
	for j := range cost {
		cost[j] = a.sign * p.columns[j].Cost
	}
	var ok bool
	if a.x, a.d, ok = a.solve(bounds, cost); !ok {
		return nil
	}
	a.measure()
	return a
}

// bound is the value that variable v is held at; zero where it is not.
func (a *activePiece) bound(v int, place Place) float64 {
	lower, upper := boundsAt(a.p, a.side(v, BothSides))
	switch place {
	case AtLower:
		return lower
	case AtUpper:
		return upper
	}
	return 0
}

func (a *activePiece) side(v int, s Side) SideOf {
	if n := a.p.Columns(); v >= n {
		return SideOf{Index: v - n, Side: s}
	}
	return SideOf{Column: true, Index: v, Side: s}
}

// hessianTimes sets out to the Hessian, as of a minimisation, times x.
func (a *activePiece) hessianTimes(out, x []float64) {
	clear(out)
	if a.p.hessian != nil {
		a.p.hessian.times(out, x)
	}
	for j := range out {
		out[j] *= a.sign
	}
}

// build factors the system of the free columns and the active rows, scaled to ones on the diagonal.
func (a *activePiece) build() {
	f, k := len(a.free), len(a.free)+len(a.rows)
	place := make([]int, a.p.Columns())
	for j := range place {
		place[j] = -1
	}
	for i, j := range a.free {
		place[j] = i
	}
	a.block, a.scale = make([]float64, k*k), make([]float64, k)
	for _, e := range a.p.HessianEntries() {
		if r, c := place[e.Row], place[e.Column]; r >= 0 && c >= 0 {
			a.block[r*k+c], a.block[c*k+r] = a.sign*e.Value, a.sign*e.Value
		}
	}
	for i := range a.free {
		a.scale[i] = 1
		if own := math.Abs(a.block[i*k+i]); own > 0 {
			a.scale[i] = 1 / math.Sqrt(own)
		}
	}
	for t, r := range a.rows {
		row, largest := a.p.row(r), 0.0
		for i, j := range a.free {
			v := row[j]
			a.block[(f+t)*k+i], a.block[i*k+f+t] = v, v
			largest = math.Max(largest, math.Abs(v)*a.scale[i])
		}
		a.scale[f+t] = 1
		if largest > 0 {
			a.scale[f+t] = 1 / largest
		}
	}
	for i := range k {
		for j := range k {
			a.block[i*k+j] *= a.scale[i] * a.scale[j]
		}
	}
	a.factor = factorDense(k, a.block)
}

// solve returns the values of all variables and the prices of those at a bound, given the values of those at a bound and the linear cost; or
// their rates of change, given those.
func (a *activePiece) solve(bounds, cost []float64) (x, d []float64, ok bool) {
	n, f, k := a.p.Columns(), len(a.free), len(a.free)+len(a.rows)
	x, d = make([]float64, len(a.places)), make([]float64, len(a.places))
	for j := range n {
		if a.places[j] != Basic {
			x[j] = bounds[j]
		}
	}
	g, right, got, rest := make([]float64, n), make([]float64, k), make([]float64, k), make([]float64, k)
	asked := 0.0
	for pass := range 3 {
		a.hessianTimes(g, x[:n])
		for j := range g {
			g[j] += cost[j]
		}
		for _, r := range a.rows {
			addScaled(g, -d[n+r], a.p.row(r))
		}
		worst := 0.0
		for i, j := range a.free {
			right[i] = -g[j] * a.scale[i]
		}
		for t, r := range a.rows {
			right[f+t] = (bounds[n+r] - dot(a.p.row(r), x[:n])) * a.scale[f+t]
		}
		for _, v := range right {
			worst = math.Max(worst, math.Abs(v))
		}
		if pass == 0 {
			asked = worst
		} else if pass == 2 {
			if !(worst <= rangeSingular*asked) {
				return nil, nil, false
			}
			break
		}
		if k == 0 || worst == 0 {
			break
		}
		a.factor.solve(got, right)
		copy(rest, got)
		for i, j := range a.free {
			x[j] += got[i] * a.scale[i]
		}
		for t, r := range a.rows {
			d[n+r] -= got[f+t] * a.scale[f+t]
		}
	}
	for i := range a.p.rowName {
		x[n+i] = dot(a.p.row(i), x[:n])
	}
	for j := range n {
		if a.places[j] != Basic {
			d[j] = g[j]
		}
	}
	for _, v := range x {
		if !finite(v) {
			return nil, nil, false
		}
	}
	return x, d, true
}

// measure finds the sizes that rounding is relative to.
func (a *activePiece) measure() {
	n := a.p.Columns()
	a.size, a.cost = make([]float64, len(a.places)), make([]float64, len(a.places))
	largest := 0.0
	for j := range n {
		a.size[j] = 1 + math.Abs(a.x[j])
	}
	for i := range a.p.rowName {
		sum := 0.0
		for j, v := range a.p.row(i) {
			sum += math.Abs(v * a.x[j])
		}
		a.size[n+i] = sum
	}
	g := make([]float64, n)
	a.hessianTimes(g, a.x[:n])
	for j := range n {
		a.cost[j] = math.Abs(a.p.columns[j].Cost) + math.Abs(g[j])
		for _, r := range a.rows {
			a.cost[j] += math.Abs(a.d[n+r] * a.p.row(r)[j])
		}
		largest = math.Max(largest, a.cost[j])
	}
	for j := range n {
		a.cost[j] = math.Max(a.cost[j], rangeReach*largest)
	}
	for _, r := range a.rows { // what the price of the row is to its largest column
		for j, v := range a.p.row(r) {
			if v != 0 && a.places[j] == Basic {
				if c := a.cost[j] / math.Abs(v); a.cost[n+r] == 0 || c < a.cost[n+r] {
					a.cost[n+r] = c
				}
			}
		}
	}
}
