package convex

import (
	"context"
	"math"
)

// engine holds the state of a simplex solve of: minimise cost'x subject to A x - r = 0 and bounds on all of x and r. Variables are
// numbered columns first, then rows. A basis has one variable per row; only the block of active rows (their r at a bound) by basic
// columns needs factoring, since every other row has its own r basic.
type engine struct {
	m       *matrix
	n, rows int // columns, rows

	trueCost []float64 // by column; rows cost nothing
	cost     []float64 // by variable: working costs, shifted and perturbed
	lower    []float64 // by variable: working bounds, widened when the primal method stalls
	upper    []float64
	trueLow  []float64 // by variable: the bounds that are meant
	trueUp   []float64
	widened  bool
	feasible float64 // violation that counts as none
	optimal  float64 // wrong price that counts as none
	place    []Place
	x        []float64 // by variable
	d        []float64 // price of each variable that is not basic
	weight   []float64 // steepest-edge weight of each basic variable

	jList  []int // basic columns, in the order of the kernel
	rList  []int // active rows, in the order of the kernel
	posJ   []int // place in jList or -1
	posR   []int // place in rList or -1
	stored [][]float64
	spare  [][]float64
	kern   kernel
	fresh  bool // the kernel was factored and values computed from scratch since the last change
	age    int

	alpha  []float64 // pivot row by variable
	w      []float64 // multipliers of the active rows
	dxJ    []float64 // pivot column, basic columns
	dr     []float64 // pivot column, rows
	tau    []float64
	zeta   []float64
	byRow  []float64
	byCol  []float64
	ratio  ratioHeap
	passed []breakpoint
	flips  []int

	watching bool   // only the values of watched rows are kept right
	watched  []bool // by row
	stale    bool   // values of other rows are not right now

	iterations, primalIterations int
	limit                        int
	proof                        []float64 // multipliers of the rows that prove noPoint
	proofAt                      int       // basic variable whose row they are
	proofBy                      float64   // its violation
	progress                     func(Progress)
	draw                         uint64 // state of the generator for perturbations
}

func newEngine(m *matrix, cost, lower, upper []float64) *engine {
	n, rows := m.cols, m.rows
	v := n + rows
	e := &engine{
		m: m, n: n, rows: rows, trueCost: cost, trueLow: lower, trueUp: upper,
		lower: append([]float64(nil), lower...), upper: append([]float64(nil), upper...),
		feasible: feasibilityTolerance, optimal: optimalityTolerance,
		cost: make([]float64, v), place: make([]Place, v), x: make([]float64, v), d: make([]float64, v),
		weight: make([]float64, v), posJ: make([]int, n), posR: make([]int, rows),
		alpha: make([]float64, v), w: make([]float64, rows), dxJ: make([]float64, rows), dr: make([]float64, rows),
		tau: make([]float64, rows), zeta: make([]float64, rows), byRow: make([]float64, rows), byCol: make([]float64, n),
		draw: 0x9e3779b97f4a7c15,
	}
	copy(e.cost, cost)
	return e
}

// fixed tells that variable v cannot move.
func (e *engine) fixed(v int) bool { return e.lower[v] == e.upper[v] }

// boxed tells that variable v has two finite bounds.
func (e *engine) boxed(v int) bool { return finite(e.lower[v]) && finite(e.upper[v]) }

// settle puts a variable that is not basic at a bound that exists, keeping its place where it can, and sets its value.
func (e *engine) settle(v int) {
	hasLower, hasUpper := finite(e.lower[v]), finite(e.upper[v])
	switch {
	case !hasLower && !hasUpper:
		e.place[v] = AtZero
	case !hasUpper:
		e.place[v] = AtLower
	case !hasLower:
		e.place[v] = AtUpper
	case e.place[v] != AtUpper:
		e.place[v] = AtLower
	}
	e.x[v] = e.rest(v)
}

// rest returns the value of a variable that is not basic.
func (e *engine) rest(v int) float64 {
	switch e.place[v] {
	case AtLower:
		return e.lower[v]
	case AtUpper:
		return e.upper[v]
	}
	return 0
}

// violation returns by how much variable v is below its lower bound (negative) or above its upper bound (positive), zero within
// the tolerance.
func (e *engine) violation(v int) float64 {
	x := e.x[v]
	if lo := e.lower[v]; x < lo && lo-x > e.feasible*math.Max(1, math.Abs(lo)) {
		return x - lo
	}
	if up := e.upper[v]; x > up && x-up > e.feasible*math.Max(1, math.Abs(up)) {
		return x - up
	}
	return 0
}

// wrong returns by how much the price of variable v, which is not basic, has the wrong sign; zero or below when it is right.
func (e *engine) wrong(v int) float64 {
	if e.fixed(v) {
		return 0
	}
	switch e.place[v] {
	case AtLower:
		return -e.d[v]
	case AtUpper:
		return e.d[v]
	}
	return math.Abs(e.d[v])
}

// stopped reports the status that ends the solve from outside, or zero.
func (e *engine) stopped(ctx context.Context) Status {
	if ctx.Err() != nil {
		return Interrupted
	}
	if e.iterations >= e.limit {
		return IterationLimit
	}
	return 0
}

// random returns the next number in [0, 1) of a fixed sequence (xorshift; Marsaglia 2003).
func (e *engine) random() float64 {
	e.draw ^= e.draw << 13
	e.draw ^= e.draw >> 7
	e.draw ^= e.draw << 17
	return float64(e.draw>>11) / (1 << 53)
}
