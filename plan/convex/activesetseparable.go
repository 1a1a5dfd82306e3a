package convex

import (
	"context"
	"math"
	"sort"
)

// separable guesses the active set of a problem whose Hessian is diagonal: for given prices y of the rows each column is then known by
// itself, x_j = (A'y - c)_j / h_j cut at its bounds, and the dual function of y is concave and made of quadratic pieces. It is climbed
// by Newton's method on the rows that have mattered so far, with an exact line search; rows are looked at all together only when the
// climb on these has ended, and the most violated ones join.
//
// The result is a guess: what is reported is solved for and checked by the active-set method itself.
//
// Source: Qi & Sun (1993), A nonsmooth version of Newton's method; Li & Swetits (1997), A new algorithm for solving strictly convex
// quadratic programs.
type separable struct {
	f      *interiorForm
	h      []float64 // diagonal
	x      []float64 // at the present prices
	want   []float64 // the same before it is cut at its bounds
	rows   []int     // rows that have mattered
	at     []Place   // side of each
	y      []float64 // price of each
	gap    []float64 // bound less value of each
	slope  []float64 // by column: change of want h per unit of the step
	known  []bool    // by row: it is in rows
	matrix growingFactor
	steps  int
}

const (
	// separableSteps bounds the climb: a dozen steps are usual, and after hundreds the single steps of the active set do better.
	separableSteps = 400
	// separableJoin is the number of rows that may join at once; more than a few mostly leave again.
	separableJoin = 8
	// separableEnough is the distance of an active row from its bound, per max(1, |bound|), that ends the climb on the present rows.
	separableEnough = 1e-9
	// separableShift keeps the Newton matrix definite where few columns lie between their bounds, relative to what it would be with all.
	separableShift = 1e-9
	// separableFar is the length of a step beyond which the dual function counts as unbounded.
	separableFar = 1e15
)

// newSeparable returns nil for a Hessian that is not a positive diagonal.
func newSeparable(f *interiorForm) *separable {
	for _, w := range f.weight {
		if w != 0 {
			return nil
		}
	}
	s := &separable{f: f, h: make([]float64, f.n), x: make([]float64, f.n), want: make([]float64, f.n), slope: make([]float64, f.n), known: make([]bool, f.m)}
	for j := range s.h {
		col, val := f.h.row(j)
		if len(col) != 1 || int(col[0]) != j || !(val[0] > 0) {
			return nil
		}
		s.h[j] = val[0]
	}
	return s
}

// guess sets the places of an active set; false, with the places as they were, when the climb does not end.
func (s *separable) guess(ctx context.Context, place []Place) bool {
	f := s.f
	for i := range f.m {
		if f.lower[f.n+i] == f.upper[f.n+i] {
			s.take(i, AtLower)
		}
	}
	value := make([]float64, f.m)
	for s.steps < separableSteps && ctx.Err() == nil {
		if !s.climb(ctx) {
			return false
		}
		f.a.times(value, s.x)
		if !s.join(value) {
			s.report(place)
			return true
		}
	}
	return false
}

func (s *separable) take(i int, at Place) {
	s.rows, s.at, s.y, s.gap = append(s.rows, i), append(s.at, at), append(s.y, 0), append(s.gap, 0)
	s.known[i] = true
}

// join takes in the most violated rows; false when none is violated.
func (s *separable) join(value []float64) bool {
	f := s.f
	type violated struct {
		row int
		at  Place
		by  float64
	}
	var list []violated
	for i, r := range value {
		lower, upper := f.lower[f.n+i], f.upper[f.n+i]
		if by := (lower - r) / math.Max(1, math.Abs(lower)); by > separableEnough && !s.known[i] {
			list = append(list, violated{i, AtLower, by})
		}
		if by := (r - upper) / math.Max(1, math.Abs(upper)); by > separableEnough && !s.known[i] {
			list = append(list, violated{i, AtUpper, by})
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return list[a].by > list[b].by })
	for _, v := range list[:min(len(list), separableJoin)] {
		s.take(v.row, v.at)
	}
	return len(list) > 0
}

// climb goes to the top of the dual function of the present rows.
func (s *separable) climb(ctx context.Context) bool {
	for ; s.steps < separableSteps && ctx.Err() == nil; s.steps++ {
		s.evaluate()
		var moving []int
		done := true
		for t := range s.rows {
			wrong := s.gap[t] * s.sign(t) // positive: the price must grow
			if s.y[t] == 0 && !(wrong > 0) && !s.equation(t) {
				continue
			}
			moving = append(moving, t)
			done = done && math.Abs(s.gap[t]) <= separableEnough*math.Max(1, math.Abs(s.bound(t)))
		}
		if done {
			return true
		}
		if !s.step(moving) {
			return false
		}
	}
	return false
}

func (s *separable) equation(t int) bool {
	v := s.f.n + s.rows[t]
	return s.f.lower[v] == s.f.upper[v]
}

func (s *separable) sign(t int) float64 {
	if s.at[t] == AtUpper {
		return -1
	}
	return 1
}

func (s *separable) bound(t int) float64 {
	if s.at[t] == AtUpper {
		return s.f.upper[s.f.n+s.rows[t]]
	}
	return s.f.lower[s.f.n+s.rows[t]]
}

// evaluate computes columns and gaps from the prices.
func (s *separable) evaluate() {
	f := s.f
	for j, c := range f.c {
		s.want[j] = -c
	}
	for t, i := range s.rows {
		if s.y[t] != 0 {
			f.a.addRow(s.want, i, s.y[t])
		}
	}
	for j := range s.want {
		s.want[j] /= s.h[j]
		s.x[j] = math.Max(f.lower[j], math.Min(f.upper[j], s.want[j]))
	}
	for t, i := range s.rows {
		s.gap[t] = s.bound(t) - f.a.rowTimes(i, s.x)
	}
}

// step makes a Newton step in the prices of the moving rows, up to where the first of them vanishes or the dual function is largest.
func (s *separable) step(moving []int) bool {
	f := s.f
	moving, delta, ok := s.newton(moving)
	if !ok {
		return false
	}
	clear(s.slope)
	rise, most, block := 0.0, math.Inf(1), -1
	for k, t := range moving {
		f.a.addRow(s.slope, s.rows[t], delta[k])
		rise += delta[k] * s.bound(t)
		if towards := delta[k] * s.sign(t); towards < 0 && !s.equation(t) {
			if limit := -s.y[t] * s.sign(t) / towards; limit < most {
				most, block = limit, k
			}
		}
	}
	length := s.search(rise, most)
	if !(length < separableFar) {
		return false
	}
	for k, t := range moving {
		s.y[t] += length * delta[k]
		if (k == block && length == most) || (!s.equation(t) && s.y[t]*s.sign(t) < 0) {
			s.y[t] = 0
		}
	}
	return true
}

// newton solves A_F H_F^-1 A_F' delta = gap for the moving rows, F the columns between their bounds. Rows whose price is zero and
// would get the wrong sign are left out, and the rest is solved again.
func (s *separable) newton(moving []int) ([]int, []float64, bool) {
	square := s.square(moving)
	list := make([]int, len(moving)) // places in moving
	for a := range list {
		list[a] = a
	}
	for {
		rows, delta := make([][]float64, len(list)), make([]float64, len(list))
		for a, k := range list {
			rows[a] = make([]float64, a+1)
			for b, l := range list[:a+1] {
				rows[a][b] = square[k][l]
			}
			delta[a] = s.gap[moving[k]]
		}
		if len(list) == 0 || !s.matrix.factorSquare(rows) {
			return nil, nil, false
		}
		s.matrix.solve(delta)
		kept := list[:0]
		for a, k := range list {
			if t := moving[k]; s.y[t] != 0 || s.equation(t) || delta[a]*s.sign(t) > 0 {
				kept = append(kept, k)
			}
		}
		if len(kept) == len(rows) {
			for a, k := range list {
				moving[a] = moving[k]
			}
			return moving[:len(list)], delta, true
		}
		list = kept
	}
}

// square returns the lower triangle of the Newton matrix.
func (s *separable) square(moving []int) [][]float64 {
	f, k := s.f, len(moving)
	weight, scaled := make([]float64, f.n), make([]float64, f.n)
	for j, v := range s.want {
		weight[j] = separableShift / s.h[j]
		if v > f.lower[j] && v < f.upper[j] {
			weight[j] = 1 / s.h[j]
		}
	}
	rows := make([][]float64, k)
	for a, t := range moving {
		col, val := f.a.row(s.rows[t])
		clear(scaled)
		for p, j := range col {
			scaled[j] = val[p] * weight[j]
		}
		rows[a] = make([]float64, a+1)
		for b, u := range moving[:a+1] {
			rows[a][b] = f.a.rowTimes(s.rows[u], scaled)
		}
		rows[a][a] *= 1 + separableShift
	}
	return rows
}

// search returns the length in (0, most] at which the slope of the dual function along the step passes zero. The slope falls and has
// straight pieces: Newton's method on it, kept within a shrinking interval.
func (s *separable) search(rise, most float64) float64 {
	f := s.f
	slopeAt := func(t float64) (value, fall float64) {
		value = rise
		for j, v := range s.slope {
			x := s.want[j] + t*v/s.h[j]
			switch {
			case x <= f.lower[j]:
				x = f.lower[j]
			case x >= f.upper[j]:
				x = f.upper[j]
			default:
				fall += v * v / s.h[j]
			}
			value -= v * x
		}
		return value, fall
	}
	low, high := 0.0, most
	t := math.Min(1, most)
	top, _ := slopeAt(0)
	for range separableSteps {
		value, fall := slopeAt(t)
		if math.Abs(value) <= separableShift*top {
			return t
		}
		if value > 0 {
			if t == most || t > separableFar {
				return t
			}
			low = t
		} else {
			high = t
		}
		next := t + value/fall
		if !(next > low && next < high) {
			if next = (low + high) / 2; math.IsInf(high, 1) {
				next = 4 * t
			} else if value > 0 && high == most {
				next = most
			}
		}
		if next == t {
			return t
		}
		t = next
	}
	return t
}

// report writes the places that belong to the top.
func (s *separable) report(place []Place) {
	f := s.f
	for j, v := range s.want {
		switch {
		case v <= f.lower[j]:
			place[j] = AtLower
		case v >= f.upper[j]:
			place[j] = AtUpper
		default:
			place[j] = Basic
		}
	}
	for t, i := range s.rows {
		place[f.n+i] = Basic
		if s.y[t] != 0 || s.equation(t) {
			place[f.n+i] = s.at[t]
		}
	}
}
