package convex

import (
	"context"
	"math"
)

// mostViolated returns the variable with the largest violation, equations first, and the violation; -1 for none.
func (s *activeSet) mostViolated() (at int, by float64) {
	at = -1
	most, equation := 0.0, false
	for v := range s.place {
		if s.place[v] != Basic || (v >= s.f.n && s.isFactor(v-s.f.n)) {
			continue
		}
		w := s.violation(v)
		if w == 0 {
			continue
		}
		size, eq := math.Abs(w), s.equation(v)
		if size > most && eq == equation || eq && !equation {
			at, by, most, equation = v, w, size, eq
		}
	}
	return at, by
}

// dual is the method of Goldfarb & Idnani (1983, Mathematical Programming 27, 1-33): the point is always the minimum on its active
// set with prices of the right sign; a violated bound is brought in, and bounds whose price would change sign on the way are dropped.
func (s *activeSet) dual(ctx context.Context) Status {
	for {
		p, by := s.mostViolated()
		if p < 0 {
			return Optimal
		}
		price := 0.0 // of p, while it is being brought in
		for {
			if ctx.Err() != nil {
				return Interrupted
			}
			if s.iterations >= s.limit {
				return IterationLimit
			}
			s.iterations++
			if s.progress != nil && s.iterations%reportEvery == 0 {
				s.progress(Progress{Stage: "active set", Iterations: s.iterations, Infeasible: math.Abs(by)})
			}
			done, status := s.bringIn(p, by, &price)
			if status != 0 {
				return status
			}
			if done {
				break
			}
			if by = s.violation(p); by == 0 {
				break
			}
		}
	}
}

// bringIn makes one step towards the violated bound of p. It reports whether p has become active, or a status that ends the method.
func (s *activeSet) bringIn(p int, by float64, price *float64) (bool, Status) {
	if s.stale {
		before := len(s.active)
		s.refactorBetween()
		if len(s.active) < before {
			return false, NumericalTrouble
		}
	}
	sign := 1.0
	if by > 0 {
		sign = -1
	}
	full := s.direction(p, sign)
	own := sign * s.along(p)
	enter := math.Inf(1)
	if own > flatShare*full && full > 0 {
		enter = math.Abs(by) / own
	}
	leave, step := s.blocking(enter)
	if leave < 0 && !finite(enter) {
		s.infeasible = true
		return false, Infeasible
	}
	s.move(step, finite(enter))
	*price += sign * step
	if leave >= 0 {
		if leave >= s.f.n {
			for t, i := range s.active {
				if i == leave-s.f.n {
					s.unbind(t)
					break
				}
			}
		} else if !s.release(leave) {
			return false, NumericalTrouble
		}
		if p < s.f.n {
			s.d[p] = 0
		}
		return false, 0
	}
	at := AtLower
	if by > 0 {
		at = AtUpper
	}
	if p < s.f.n {
		s.fix(p, at)
		s.x[p], s.d[p] = s.target(p), *price
		return true, 0
	}
	s.place[p] = at
	if !s.bind(p - s.f.n) {
		s.place[p] = Basic
		return false, NumericalTrouble
	}
	s.y[p-s.f.n] = *price
	return true, 0
}

// along returns the change of the value of p along z.
func (s *activeSet) along(p int) float64 {
	if p < s.f.n {
		return s.z[p]
	}
	return s.rowTimes(p-s.f.n, s.z)
}

// direction sets z to the step of the values for one unit of price of p, q to the change of the prices of the active rows with the sign
// reversed, and dStep to that of the columns at a bound. It returns the curvature before projection on the active rows.
func (s *activeSet) direction(p int, sign float64) (full float64) {
	n := s.f.n
	clear(s.dStep)
	if p < n {
		s.dStep[p] = sign
	} else {
		s.addRow(s.dStep, p-n, sign)
	}
	copy(s.z, s.dStep)
	s.free.solve(s.z)
	full = sign * s.along(p)
	k := len(s.active)
	for t, i := range s.active {
		s.q[t] = s.rowTimes(i, s.z)
	}
	s.between.solve(s.q[:k])
	for t, i := range s.active {
		s.addRow(s.dStep, i, -s.q[t])
	}
	if k > 0 {
		copy(s.z, s.dStep)
		s.free.solve(s.z)
	}
	s.hessianTimes(s.hz, s.z)
	for j, v := range s.hz {
		s.dStep[j] = v - s.dStep[j]
	}
	return full
}

// blocking returns the constraint whose price changes sign first within the step, the steepest among nearly equal ones, or -1,
// and the step.
func (s *activeSet) blocking(enter float64) (leave int, step float64) {
	n := s.f.n
	step = enter
	leave = -1
	steepest := 0.0
	look := func(v int, price, rate float64) {
		if s.place[v] == AtUpper {
			price, rate = -price, -rate
		}
		if !(rate < -tinyRate) || s.equation(v) {
			return
		}
		t := math.Max(price, 0) / -rate
		if t < step*(1-tieShare) || (t <= step && -rate > steepest) {
			leave, step, steepest = v, math.Min(step, t), -rate
		}
	}
	for t, i := range s.active {
		look(n+i, s.y[i], -s.q[t])
	}
	for j, ok := range s.isFree {
		if !ok {
			look(j, s.d[j], s.dStep[j])
		}
	}
	return leave, step
}

const (
	// tinyRate is the change of a price per unit of another that counts as none.
	tinyRate = 1e-13
	// tieShare is the relative difference of steps that counts as equal.
	tieShare = 1e-12
)

// move goes the step in values, when they move at all, and prices.
func (s *activeSet) move(step float64, moves bool) {
	for t, i := range s.active {
		s.y[i] -= step * s.q[t]
	}
	for j, ok := range s.isFree {
		if !ok {
			s.d[j] += step * s.dStep[j]
		}
	}
	if !moves {
		return
	}
	addScaled(s.x, step, s.z)
	addScaled(s.g, step, s.hz)
	s.f.a.times(s.az, s.z)
	addScaled(s.r, step, s.az)
}
