package convex

import "math"

const (
	// finishRounds bounds the corrections of the guessed set of active bounds.
	finishRounds = 6
	// finishPasses bounds the refinements of values and prices on one set.
	finishPasses = 12
	// finishAccurate is the residual, relative to its terms, to which values and prices of the final set are solved for.
	finishAccurate = 1e-13
	// finishAccepted is the violation and the wrong price, in the scaled problem, that a finished point may have: those of the simplex method.
	finishAccepted = 1e-9
)

// finish guesses from the last point which bounds bind, solves for values and prices with these as equations, and corrects the
// guess a few times. It reports whether the result is optimal to the accuracy of the simplex method; otherwise the point is
// what it was. Where values or prices are not the only ones those nearest to the interior point are taken.
func (s *interiorPoint) finish() bool {
	f, n := s.f, s.f.n
	if !finite(largestOf(s.v)) || !finite(largestOf(s.y)) {
		return false
	}
	before := s.snapshot()
	at := make([]int8, len(s.v))
	for k := range at {
		switch {
		case s.hasLow[k] && s.low[k] < s.zl[k] && !(s.hasUp[k] && s.up[k] < s.low[k]):
			at[k] = -1
		case s.hasUp[k] && s.up[k] < s.zu[k]:
			at[k] = 1
		case k >= n && s.equation[k-n]:
			at[k] = 2
		}
	}
	for range finishRounds {
		s.solveOn(at)
		changed, ok := s.correctSet(at)
		if ok {
			s.place = make([]Place, len(at))
			for k, a := range at {
				s.place[k] = map[int8]Place{-1: AtLower, 0: Basic, 1: AtUpper, 2: AtLower}[a]
				s.low[k], s.up[k] = s.v[k]-f.lower[k], f.upper[k]-s.v[k]
			}
			return true
		}
		if !changed {
			break
		}
	}
	s.copyFrom(before)
	s.measure()
	return false
}

func (s *interiorPoint) snapshot() *interiorPoint {
	c := func(v []float64) []float64 { return append([]float64(nil), v...) }
	return &interiorPoint{v: c(s.v), low: c(s.low), up: c(s.up), zl: c(s.zl), zu: c(s.zu), y: c(s.y)}
}

// bound returns the bound that k is held at.
func (s *interiorPoint) bound(k int, at int8) float64 {
	if at == 1 {
		return s.f.upper[k]
	}
	return s.f.lower[k]
}

// solveOn solves for values and prices with the bounds in the set as equations and all others left out.
func (s *interiorPoint) solveOn(at []int8) {
	f, n := s.f, s.f.n
	for k, a := range at {
		switch {
		case k < n && a != 0:
			s.v[k], s.sys.t[k] = s.bound(k, a), excluded
		case k < n:
			s.sys.t[k] = 0
		case f.weight[k-n] > 0:
			s.sys.e[k-n] = 1 / f.weight[k-n]
		case a != 0:
			s.v[k], s.sys.e[k-n] = s.bound(k, a), 0
		default:
			s.y[k-n], s.sys.e[k-n] = 0, excluded
		}
	}
	s.sys.factor()
	last := math.Inf(1)
	best := s.snapshot()
	for pass := 0; pass <= finishPasses; pass++ {
		now := s.setResidual(at)
		if !(now < last) {
			s.copyFrom(best)
			break
		}
		best.copyFrom(s)
		if now <= finishAccurate || now > refinementGain*last && pass > 3 {
			break
		}
		last = now
		s.sys.solve(s.sol, s.rhs)
		for k, d := range s.sol {
			if k < n {
				s.v[k] += d
			} else {
				s.y[k-n] += d
			}
		}
	}
	f.a.times(s.sys.work, s.v[:n])
	for i := range s.y {
		if at[n+i] == 0 {
			s.v[n+i] = s.sys.work[i]
		}
		if f.weight[i] > 0 {
			s.v[n+i] = -s.y[i] / f.weight[i]
		}
	}
}

// setResidual fills the right-hand side of the system of solveOn and returns its largest entry relative to its terms.
func (s *interiorPoint) setResidual(at []int8) float64 {
	f, n := s.f, s.f.n
	s.curvatureTimes(s.hx, s.v[:n])
	aty := s.rd[:n]
	clear(aty)
	f.a.addTransposed(aty, 1, s.y)
	f.a.times(s.sys.work, s.v[:n])
	most := 0.0
	for k, a := range at {
		r, terms := 0.0, 1.0
		switch {
		case k < n && a == 0:
			r = f.c[k] + s.hx[k] - aty[k]
			terms += math.Abs(f.c[k]) + math.Abs(s.hx[k])
		case k >= n && f.weight[k-n] > 0:
			r = -s.sys.work[k-n] - s.y[k-n]/f.weight[k-n]
			terms += math.Abs(s.sys.work[k-n])
		case k >= n && a != 0:
			r = s.v[k] - s.sys.work[k-n]
			terms += math.Abs(s.v[k])
		}
		s.rhs[k] = r
		most = largest(most, math.Abs(r)/terms)
	}
	return most
}

// correctSet compares values with bounds and prices with their signs. It reports whether the set was changed, and whether all is
// within the accepted errors.
func (s *interiorPoint) correctSet(at []int8) (changed, ok bool) {
	f, n := s.f, s.f.n
	ok = s.setResidual(at) <= finishAccepted
	aty := s.rd[:n]
	for k, a := range at {
		if a == 2 || (k >= n && f.weight[k-n] > 0) {
			continue
		}
		price, terms := 0.0, 1.0
		if k < n {
			price = f.c[k] + s.hx[k] - aty[k]
			terms += math.Abs(f.c[k]) + math.Abs(s.hx[k])
		} else {
			price = s.y[k-n]
		}
		switch a {
		case 0:
			s.zl[k], s.zu[k] = 0, 0
			for _, side := range [2]int8{-1, 1} {
				b := s.bound(k, side)
				by := float64(side) * (s.v[k] - b)
				if finite(b) && !(by <= finishAccepted*(1+math.Abs(b))) {
					at[k], changed, ok = side, true, false
				}
			}
		default:
			wrong := float64(a) * price
			s.zl[k], s.zu[k] = math.Max(price, 0), math.Max(-price, 0)
			if !(wrong <= finishAccepted*terms) {
				at[k], changed, ok = 0, true, false
			}
		}
	}
	return changed, ok
}
