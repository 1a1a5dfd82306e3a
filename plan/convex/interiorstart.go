package convex

import "math"

// centrality improves the direction by corrections that draw outlying complementarities towards the middle, as long as each
// lengthens the step (Gondzio 1996, Computational Optimization and Applications 6, 137-156).
func (s *interiorPoint) centrality(p, d, sigma float64) (float64, float64) {
	if s.pairs == 0 || math.Min(p, d) > 0.9 {
		return p, d
	}
	const narrow, wide, gain, aim = 0.1, 10, 0.01, 0.1
	target := math.Max(sigma, 1e-3) * s.mu
	for range correctors {
		dv, dy := append([]float64(nil), s.dv...), append([]float64(nil), s.dy...)
		dlow, dup := append([]float64(nil), s.dlow...), append([]float64(nil), s.dup...)
		dzl, dzu := append([]float64(nil), s.dzl...), append([]float64(nil), s.dzu...)
		tl, tu := append([]float64(nil), s.tl...), append([]float64(nil), s.tu...)
		longP, longD := math.Min(1, p+aim), math.Min(1, d+aim)
		correct := func(v, dv, z, dz float64) float64 {
			product := (v + longP*dv) * (z + longD*dz)
			switch {
			case product < narrow*target:
				return narrow*target - product
			case product > wide*target:
				return math.Max(wide*target-product, -wide*target)
			}
			return 0
		}
		for k := range s.v {
			if s.hasLow[k] {
				s.tl[k] += correct(s.low[k], s.dlow[k], s.zl[k], s.dzl[k])
			}
			if s.hasUp[k] {
				s.tu[k] += correct(s.up[k], s.dup[k], s.zu[k], s.dzu[k])
			}
		}
		s.direction()
		p2, d2 := s.longest()
		if !(p2 >= p && d2 >= d && p2+d2 >= p+d+2*gain) {
			copy(s.dv, dv)
			copy(s.dy, dy)
			copy(s.dlow, dlow)
			copy(s.dup, dup)
			copy(s.dzl, dzl)
			copy(s.dzu, dzu)
			copy(s.tl, tl)
			copy(s.tu, tu)
			return p, d
		}
		p, d = p2, d2
	}
	return p, d
}

// begin sets the first point: the least-squares values and prices, moved inside by one common distance (Mehrotra 1992).
func (s *interiorPoint) begin() {
	f, n := s.f, s.f.n
	nearest := func(k int) float64 { return math.Max(f.lower[k], math.Min(f.upper[k], 0)) }
	for j := range s.sys.t {
		s.sys.t[j] = 1
		s.rhs[j] = f.c[j] - nearest(j)
	}
	for i := range s.sys.e {
		s.sys.e[i] = 0
		if !s.equation[i] {
			s.sys.e[i] = 1 / (1 + f.weight[i])
		}
		s.rhs[n+i] = nearest(n + i)
	}
	s.sys.factor()
	s.sys.solve(s.sol, s.rhs)
	copy(s.v[:n], s.sol[:n])
	copy(s.y, s.sol[n:])
	f.a.times(s.work(), s.v[:n])
	for i := range s.y {
		if !s.equation[i] {
			s.v[n+i] = s.sys.work[i]
		}
	}
	s.curvatureTimes(s.hx, s.v[:n])
	z := make([]float64, len(s.v))
	copy(z, f.c)
	f.a.addTransposed(z[:n], -1, s.y)
	for j, h := range s.hx {
		z[j] += h
	}
	for i := range s.y {
		z[n+i] = f.weight[i]*s.v[n+i] + s.y[i]
	}
	s.inside(z)
}

func (s *interiorPoint) work() []float64 { return s.sys.work[:s.f.m] }

// inside moves the distances and prices to positive ones.
func (s *interiorPoint) inside(z []float64) {
	f := s.f
	distance, price := 0.0, 0.0
	each := func(g func(v, z *float64)) {
		for k := range s.v {
			if s.hasLow[k] {
				g(&s.low[k], &s.zl[k])
			}
			if s.hasUp[k] {
				g(&s.up[k], &s.zu[k])
			}
		}
	}
	for k := range s.v {
		s.low[k], s.up[k] = s.v[k]-f.lower[k], f.upper[k]-s.v[k]
		both := s.hasLow[k] && s.hasUp[k]
		switch {
		case both:
			s.zl[k], s.zu[k] = math.Max(z[k], 0), math.Max(-z[k], 0)
		case s.hasLow[k]:
			s.zl[k] = z[k]
		case s.hasUp[k]:
			s.zu[k] = -z[k]
		}
	}
	each(func(v, z *float64) {
		distance = math.Max(distance, -1.5**v)
		price = math.Max(price, -1.5**z)
	})
	product, sumV, sumZ := 0.0, 0.0, 0.0
	each(func(v, z *float64) {
		a, b := *v+distance, *z+price
		product += a * b
		sumV += a
		sumZ += b
	})
	const half, least = 0.5, 1e-2
	if sumZ > 0 {
		distance += half * product / sumZ
	}
	if sumV > 0 {
		price += half * product / sumV
	}
	distance, price = math.Max(distance, least), math.Max(price, least)
	each(func(v, z *float64) { *v, *z = *v+distance, *z+price })
}

// keep remembers the present point as the best so far.
func (s *interiorPoint) keep(merit float64) {
	s.bestMerit = merit
	if s.best == nil {
		n := len(s.v)
		s.best = &interiorPoint{v: make([]float64, n), low: make([]float64, n), up: make([]float64, n), zl: make([]float64, n),
			zu: make([]float64, n), y: make([]float64, len(s.y))}
	}
	s.best.copyFrom(s)
}

func (s *interiorPoint) copyFrom(o *interiorPoint) {
	copy(s.v, o.v)
	copy(s.low, o.low)
	copy(s.up, o.up)
	copy(s.zl, o.zl)
	copy(s.zu, o.zu)
	copy(s.y, o.y)
}

// restore goes back to the best point.
func (s *interiorPoint) restore() {
	if s.best != nil {
		s.copyFrom(s.best)
	}
	s.measure()
}
