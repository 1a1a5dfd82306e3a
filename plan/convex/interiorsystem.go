package convex

import "math"

const (
	// leastShift and mostShift bound the shifts that make the augmented system definite. In a system scaled to ones the least is the
	// root of rounding: the product of a primal and a dual shift must not vanish beside one. Refinement takes their effect out.
	// The shift grows by shiftGrowth when pivots had to be moved or a system was not solved to systemNeeded, and shrinks slowly.
	leastShift   = 1e-8
	mostShift    = 1e-4
	shiftGrowth  = 10
	systemNeeded = 1e-6
	// systemRefinements bounds the refinements of one solve, systemAccurate is the residual, relative to the right-hand side, that
	// ends them.
	systemRefinements = 8
	systemAccurate    = 1e-13
	// refinementGain is the factor by which a refinement must lessen the residual to be followed by another.
	refinementGain = 0.5
	// excluded is the diagonal that holds a value, or a price, where it is: entries are near one.
	excluded = 1e20
)

// interiorSystem is the Newton system
//
//	[ -(H + T)  A' ] [dx]   [-r]
//	[    A      E  ] [dy] = [ g]
//
// with diagonals T and E.
type interiorSystem struct {
	f        *interiorForm
	q        *quasidefinite
	hDiag    []float64 // diagonal of H by x
	t, e     []float64 // T by x, E by row
	residual []float64
	trial    []float64
	work     []float64
	shift    float64
}

func newInteriorSystem(f *interiorForm) *interiorSystem {
	n := f.n + f.m
	s := &interiorSystem{f: f, shift: leastShift, hDiag: make([]float64, f.n), t: make([]float64, f.n), e: make([]float64, f.m),
		residual: make([]float64, n), trial: make([]float64, n), work: make([]float64, n)}
	var places []matrixPlace
	var values []float64
	for i := 0; i < f.n; i++ {
		col, val := f.h.row(i)
		for k, j := range col {
			if int(j) == i {
				s.hDiag[i] = val[k]
				continue
			}
			places = append(places, matrixPlace{int32(i), j})
			values = append(values, -val[k])
		}
	}
	for i := 0; i < f.m; i++ {
		col, val := f.a.row(i)
		for k, j := range col {
			places = append(places, matrixPlace{int32(f.n + i), j})
			values = append(values, val[k])
		}
	}
	q, at := analyse(n, f.n, places)
	for k, v := range values {
		q.value[at[k]] = v
	}
	s.q = q
	return s
}

// factor factors the shifted system for the present diagonals, with larger shifts when pivots lose their sign to rounding.
func (s *interiorSystem) factor() {
	for {
		for j, t := range s.t {
			s.q.value[s.q.diag[j]] = -(s.hDiag[j] + t + s.shift)
		}
		for i, e := range s.e {
			s.q.value[s.q.diag[s.f.n+i]] = e + s.shift
		}
		s.q.factor(s.shift * smallestPivot)
		if s.q.shifts == 0 || !s.grow() {
			return
		}
	}
}

// smallestPivot is the share of the shift below which a pivot is rounding.
const smallestPivot = 1e-2

// grow raises the shift; false when it is at its end.
func (s *interiorSystem) grow() bool {
	if s.shift >= mostShift {
		return false
	}
	s.shift *= shiftGrowth
	return true
}

// shrink lowers the shift by one step.
func (s *interiorSystem) shrink() { s.shift = math.Max(leastShift, s.shift/shiftGrowth) }

// apply sets out to b less the system, without shifts, times v. Excluded values count for nothing.
func (s *interiorSystem) apply(out, b, v []float64) {
	n := s.f.n
	copy(out, b)
	x, y := v[:n], v[n:]
	s.f.h.addSymmetric(out[:n], 1, x)
	s.f.a.addTransposed(out[:n], -1, y)
	for j, t := range s.t {
		if t >= excluded {
			out[j] = 0
			continue
		}
		out[j] += t * x[j]
	}
	s.f.a.times(s.work, x)
	for i, e := range s.e {
		if e >= excluded {
			out[n+i] = 0
			continue
		}
		out[n+i] -= s.work[i] + e*y[i]
	}
}

func largestOf(v []float64) float64 {
	most := 0.0
	for _, x := range v {
		most = math.Max(most, math.Abs(x))
	}
	return most
}

// solve solves for b with refinement into v and returns the residual relative to the right-hand side. Refinement goes on until each
// of the two blocks is accurate by its own measure, since one of them is often larger by far.
func (s *interiorSystem) solve(v, b []float64) float64 {
	n := s.f.n
	top, bottom := largestOf(b[:n]), largestOf(b[n:])
	clear(v)
	if top == 0 && bottom == 0 {
		return 0
	}
	least := blockShare * math.Max(top, bottom)
	top, bottom = math.Max(top, least), math.Max(bottom, least)
	copy(s.residual, b)
	last, accuracy := math.Inf(1), math.Inf(1)
	for pass := 0; ; pass++ {
		copy(s.trial, s.residual)
		s.q.solve(s.trial, s.work)
		for i := range v {
			s.trial[i] += v[i]
		}
		s.apply(s.residual, b, s.trial)
		above, below := largestOf(s.residual[:n]), largestOf(s.residual[n:])
		now := math.Max(above/top, below/bottom)
		if !(now < last) {
			return accuracy
		}
		copy(v, s.trial)
		accuracy = math.Max(above, below) / math.Max(top, bottom)
		if now <= systemAccurate || pass == systemRefinements || now > refinementGain*last {
			return accuracy
		}
		last = now
	}
}

// blockShare is the share of the larger block's right-hand side to which the smaller one is solved at most: the rounding of the
// residual of the larger.
const blockShare = 1e-10
