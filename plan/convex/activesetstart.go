package convex

import (
	"context"
	"math"
)

const (
	// guessRounds bounds the rounds that change many bounds at once to guess the active set, guessPatience those without fewer faults: the
	// number often rises for a few rounds before it falls to nothing, and a round costs as much as a few single steps.
	guessRounds   = 40
	guessPatience = 8
)

// begin sets places and makes them dual feasible: from the given basis, from the guess for a diagonal Hessian, or from all columns
// free and the equations. Then whole
// sets of bounds change at once while that lessens the number of faults (Júdice & Pires 1994; Hintermüller, Ito & Kunisch 2002), and
// what has the wrong price after that is dropped.
func (s *activeSet) begin(ctx context.Context, start *Basis) bool {
	s.adopt(start)
	if start == nil {
		if d := newSeparable(s.f); d != nil && d.guess(ctx, s.place) {
			s.recall(s.place)
		}
	}
	if !s.refactor() {
		return false
	}
	s.settle()
	least, waited := math.MaxInt, 0
	best := make([]Place, len(s.place))
	for round := 0; round < guessRounds && waited < guessPatience && ctx.Err() == nil; round++ {
		before := append([]Place(nil), s.place...)
		faults := s.exchange()
		if faults == 0 {
			return true
		}
		waited++
		if faults < least {
			least, waited = faults, 0
			copy(best, before)
		}
		if !s.refactor() {
			return false
		}
		s.settle()
	}
	s.recall(best)
	if !s.refactor() {
		return false
	}
	s.settle()
	return s.makeDualFeasible(ctx)
}

// recall takes up remembered places.
func (s *activeSet) recall(places []Place) {
	copy(s.place, places)
	s.active = s.active[:0]
	for v := s.f.n; v < len(places); v++ {
		if places[v] != Basic {
			s.active = append(s.active, v-s.f.n)
		}
	}
}

func (s *activeSet) adopt(start *Basis) {
	f, n := s.f, s.f.n
	s.active = s.active[:0]
	fits := func(v int, at Place) Place {
		switch {
		case at == AtLower && !finite(f.lower[v]) || at == AtUpper && !finite(f.upper[v]) || at == AtZero:
			return Basic
		}
		return at
	}
	for v := range s.place {
		s.place[v] = Basic
		if v >= n && s.isFactor(v-n) {
			continue
		}
		if v >= n && s.equation(v) {
			s.place[v] = AtLower
		} else if start != nil && v < n && f.column[v] < len(start.columns) {
			s.place[v] = fits(v, start.columns[f.column[v]])
		} else if start != nil && v >= n {
			s.place[v] = fits(v, start.Row(f.row[v-n]))
		}
		if v >= n && s.place[v] != Basic {
			s.active = append(s.active, v-n)
		}
	}
}

// fault returns the place that variable v should have instead of its own, or its own: a violated bound binds, a bound with a wrong
// price does not.
func (s *activeSet) fault(v int) Place {
	f, n := s.f, s.f.n
	if v >= n && s.isFactor(v-n) {
		return Basic
	}
	if s.place[v] == Basic {
		switch by := s.violation(v); {
		case by < 0:
			return AtLower
		case by > 0:
			return AtUpper
		}
		return Basic
	}
	price, size := 0.0, 1.0
	if v < n {
		price, size = s.d[v], 1+math.Abs(f.c[v])
	} else {
		price = s.y[v-n]
	}
	if s.place[v] == AtUpper {
		price = -price
	}
	if !s.equation(v) && !(price >= -activeDual*size) {
		return Basic
	}
	return s.place[v]
}

// violation is negative below the lower bound, positive above the upper one, zero within the tolerance.
func (s *activeSet) violation(v int) float64 {
	x := 0.0
	if v < s.f.n {
		x = s.x[v]
	} else {
		x = s.r[v-s.f.n]
	}
	if lo := s.f.lower[v]; x < lo && lo-x > activeFeasible*math.Max(1, math.Abs(lo)) {
		return x - lo
	}
	if up := s.f.upper[v]; x > up && x-up > activeFeasible*math.Max(1, math.Abs(up)) {
		return x - up
	}
	return 0
}

// exchange rights all faults at once and returns their number.
func (s *activeSet) exchange() int {
	n, count := s.f.n, 0
	s.active = s.active[:0]
	for v := range s.place {
		to := s.fault(v)
		if to != s.place[v] {
			count++
			s.place[v] = to
		}
		if v >= n && s.place[v] != Basic {
			s.active = append(s.active, v-n)
		}
	}
	return count
}

func (s *activeSet) anyWrong() bool {
	for v := range s.place {
		if s.place[v] != Basic && s.fault(v) == Basic {
			return true
		}
	}
	return false
}

// makeDualFeasible drops what has a wrong price, all at once, until nothing has. Each round drops something, so that it ends.
func (s *activeSet) makeDualFeasible(ctx context.Context) bool {
	n := s.f.n
	for {
		dropped := false
		rows := s.active
		s.active = nil
		for v := range s.place {
			if s.place[v] != Basic && s.fault(v) == Basic {
				s.place[v], dropped = Basic, true
			}
		}
		for _, i := range rows {
			if s.place[n+i] != Basic {
				s.active = append(s.active, i)
			}
		}
		if !dropped {
			return true
		}
		if ctx.Err() != nil || !s.refactor() {
			return false
		}
		s.settle()
	}
}
