package convex

import (
	"context"
	"math"
)

const (
	// interiorTarget is the relative error of values, prices and gap at which the interior method ends. Certify asks for 1e-8 and
	// 1e-9; what is left to it is taken by the finish.
	interiorTarget = 1e-10
	// interiorIterations bounds the iterations; more than a hundred mean that rounding stands in the way.
	interiorIterations = 200
	// interiorStall is the number of iterations without a better point after which the best one is taken.
	interiorStall = 15
	// boundaryShare is the share of the way to the nearest bound that a step may go.
	boundaryShare = 0.995
	// correctors is the most centrality corrections in one iteration (Gondzio 1996).
	correctors = 2
	// smallStep is the step below which the next iteration only centres.
	smallStep = 0.05
	// divergence is the size of prices or values, in a problem scaled to ones, at which they count as without end.
	divergence = 1e12
)

// interiorPoint is the state of the method. Values come in the order x, s; low and up are the distances from the bounds, zl and zu
// their prices.
type interiorPoint struct {
	f                    *interiorForm
	sys                  *interiorSystem
	v, low, up           []float64
	zl, zu               []float64
	y                    []float64
	hasLow, hasUp        []bool
	pairs                int // number of finite bounds
	rd, rp               []float64
	rl, ru               []float64
	hx                   []float64
	primal, dual         float64 // relative errors
	gap, mu              float64
	objective            float64
	linear               bool
	dv, dlow, dup        []float64
	dzl, dzu, dy         []float64
	tl, tu               []float64 // complementarity wanted of each pair
	rhs, sol, fs         []float64
	iterations           int
	stepP, stepD         float64
	bestMerit            float64
	best                 *interiorPoint
	equation             []bool
	accuracy             float64 // residual of the last Newton system
	place                []Place // set by finish, by x and s
	progress             func(Progress)
	normB, normC         float64
	priceSize, valueSize float64
}

func newInteriorPoint(f *interiorForm) *interiorPoint {
	n := f.n + f.m
	s := &interiorPoint{f: f, sys: newInteriorSystem(f), bestMerit: math.Inf(1)}
	for _, v := range []*[]float64{&s.v, &s.low, &s.up, &s.zl, &s.zu, &s.rd, &s.rl, &s.ru, &s.dv, &s.dlow, &s.dup, &s.dzl, &s.dzu, &s.tl, &s.tu, &s.rhs, &s.sol} {
		*v = make([]float64, n)
	}
	s.y, s.dy, s.rp, s.fs, s.hx = make([]float64, f.m), make([]float64, f.m), make([]float64, f.m), make([]float64, f.m), make([]float64, f.n)
	s.hasLow, s.hasUp, s.equation = make([]bool, n), make([]bool, n), make([]bool, f.m)
	s.linear = len(f.h.val) == 0
	for i := range f.weight {
		s.linear = s.linear && f.weight[i] == 0
		s.equation[i] = f.lower[f.n+i] == f.upper[f.n+i]
		if s.equation[i] {
			s.normB = math.Max(s.normB, math.Abs(f.lower[f.n+i]))
			s.v[f.n+i] = f.lower[f.n+i]
		}
	}
	s.normC = largestOf(f.c)
	for k := range s.v {
		if k >= f.n && s.equation[k-f.n] {
			continue
		}
		s.hasLow[k], s.hasUp[k] = finite(f.lower[k]), finite(f.upper[k])
		if s.hasLow[k] {
			s.pairs++
		}
		if s.hasUp[k] {
			s.pairs++
		}
	}
	return s
}

// gradient sets hx to H x.
func (s *interiorPoint) curvatureTimes(out, x []float64) {
	clear(out)
	s.f.h.addSymmetric(out, 1, x)
}

// measure computes residuals and relative errors.
func (s *interiorPoint) measure() {
	f, n := s.f, s.f.n
	x, slack := s.v[:n], s.v[n:]
	s.curvatureTimes(s.hx, x)
	aty := s.rd[:n]
	clear(aty)
	f.a.addTransposed(aty, 1, s.y)
	s.dual, s.priceSize = 0, 0
	linear, quadratic, bounds := 0.0, 0.0, 0.0
	for j := range x {
		terms := math.Abs(f.c[j]) + math.Abs(s.hx[j]) + math.Abs(aty[j])
		linear += f.c[j] * x[j]
		quadratic += s.hx[j] * x[j]
		s.rd[j] = f.c[j] + s.hx[j] - aty[j] - s.zl[j] + s.zu[j]
		s.dual = math.Max(s.dual, math.Abs(s.rd[j])/(1+terms))
	}
	f.a.times(s.rp, x)
	s.primal, s.valueSize = 0, largestOf(s.v)
	for i := range s.rp {
		k := n + i
		terms := math.Abs(s.rp[i])
		s.rp[i] = slack[i] - s.rp[i]
		s.primal = math.Max(s.primal, math.Abs(s.rp[i])/(1+terms))
		if s.equation[i] {
			s.rd[k] = 0
			bounds += s.y[i] * slack[i]
			continue
		}
		s.rd[k] = f.weight[i]*slack[i] + s.y[i] - s.zl[k] + s.zu[k]
		quadratic += f.weight[i] * slack[i] * slack[i]
		s.dual = math.Max(s.dual, math.Abs(s.rd[k])/(1+math.Abs(s.y[i])))
	}
	products := 0.0
	for k := range s.v {
		if s.hasLow[k] {
			s.rl[k] = s.v[k] - f.lower[k] - s.low[k]
			s.primal = math.Max(s.primal, math.Abs(s.rl[k])/(1+math.Abs(f.lower[k])))
			products += s.low[k] * s.zl[k]
			bounds += f.lower[k] * s.zl[k]
		}
		if s.hasUp[k] {
			s.ru[k] = f.upper[k] - s.v[k] - s.up[k]
			s.primal = math.Max(s.primal, math.Abs(s.ru[k])/(1+math.Abs(f.upper[k])))
			products += s.up[k] * s.zu[k]
			bounds -= f.upper[k] * s.zu[k]
		}
	}
	s.priceSize = math.Max(largestOf(s.y), math.Max(largestOf(s.zl), largestOf(s.zu)))
	s.mu = 0
	if s.pairs > 0 {
		s.mu = products / float64(s.pairs)
	}
	s.objective = linear + quadratic/2
	other := bounds - quadratic/2
	s.gap = math.Max(math.Abs(s.objective-other), products) / (1 + math.Abs(s.objective))
}

func (s *interiorPoint) merit() float64 { return math.Max(s.primal, math.Max(s.dual, s.gap)) }

// barrier fills the diagonals of the Newton system from the present point and factors.
func (s *interiorPoint) barrier() {
	n := s.f.n
	for k := range s.v {
		theta := 0.0
		if s.hasLow[k] {
			theta += s.zl[k] / s.low[k]
		}
		if s.hasUp[k] {
			theta += s.zu[k] / s.up[k]
		}
		switch {
		case k < n:
			s.sys.t[k] = math.Min(theta, excluded/2)
		case s.equation[k-n]:
			s.sys.e[k-n] = 0
		default:
			s.sys.e[k-n] = 1 / (s.f.weight[k-n] + theta + smallestTheta)
		}
	}
	s.sys.factor()
}

// smallestTheta keeps the diagonal of a row whose bounds are far away below 1e14, past which it excludes the row's price anyway.
const smallestTheta = 1e-14

// direction solves the Newton system for the complementarities wanted in tl and tu.
func (s *interiorPoint) direction() float64 {
	n := s.f.n
	for k := range s.v {
		r := -s.rd[k]
		if s.hasLow[k] {
			r += (s.tl[k]-s.zl[k]*s.rl[k])/s.low[k] - s.zl[k]
		}
		if s.hasUp[k] {
			r -= (s.tu[k]-s.zu[k]*s.ru[k])/s.up[k] - s.zu[k]
		}
		switch {
		case k < n:
			s.rhs[k] = -r
		case s.equation[k-n]:
			s.rhs[k] = s.rp[k-n]
		default:
			s.fs[k-n] = r
			s.rhs[k] = s.rp[k-n] + s.sys.e[k-n]*r
		}
	}
	accuracy := s.sys.solve(s.sol, s.rhs)
	copy(s.dv[:n], s.sol[:n])
	copy(s.dy, s.sol[n:])
	for i, e := range s.sys.e {
		s.dv[n+i] = 0
		if !s.equation[i] {
			s.dv[n+i] = e * (s.fs[i] - s.dy[i])
		}
	}
	for k, d := range s.dv {
		if s.hasLow[k] {
			s.dlow[k] = d + s.rl[k]
			s.dzl[k] = (s.tl[k]-s.zl[k]*s.dlow[k])/s.low[k] - s.zl[k]
		}
		if s.hasUp[k] {
			s.dup[k] = s.ru[k] - d
			s.dzu[k] = (s.tu[k]-s.zu[k]*s.dup[k])/s.up[k] - s.zu[k]
		}
	}
	return accuracy
}

// longest returns the steps to the boundary, at most one.
func (s *interiorPoint) longest() (primal, dual float64) {
	primal, dual = 1, 1
	limit := func(step *float64, v, d float64) {
		if d < 0 && -v/d < *step {
			*step = -v / d
		}
	}
	for k := range s.v {
		if s.hasLow[k] {
			limit(&primal, s.low[k], s.dlow[k])
			limit(&dual, s.zl[k], s.dzl[k])
		}
		if s.hasUp[k] {
			limit(&primal, s.up[k], s.dup[k])
			limit(&dual, s.zu[k], s.dzu[k])
		}
	}
	if !s.linear {
		primal = math.Min(primal, dual)
		dual = primal
	}
	return primal, dual
}

// run iterates to the target, a halt, or no further progress, and leaves the best point. Without a limit, zero, interiorIterations
// ends it as well. It returns what stopped it from outside, or zero.
func (s *interiorPoint) run(ctx context.Context, limit int) Status {
	s.begin()
	s.stepP, s.stepD = 1, 1
	since := 0
	for {
		s.measure()
		if s.progress != nil {
			s.progress(Progress{Stage: "interior", Iterations: s.iterations, Infeasible: s.primal})
		}
		if m := s.merit(); m < s.bestMerit {
			since = 0
			s.keep(m)
		} else if since++; since > interiorStall {
			break
		}
		if s.bestMerit <= interiorTarget || !(s.priceSize < divergence) || !(s.valueSize < divergence) {
			break
		}
		if ctx.Err() != nil {
			return Interrupted
		}
		if limit > 0 && s.iterations >= limit {
			return IterationLimit
		}
		if limit == 0 && s.iterations >= interiorIterations {
			break
		}
		s.iterations++
		s.iterate()
	}
	s.restore()
	return 0
}

// iterate is one predictor-corrector step (Mehrotra 1992).
func (s *interiorPoint) iterate() {
	s.sys.shrink()
	s.barrier()
	sigma := 0.0
	clear(s.tl)
	clear(s.tu)
	for s.accuracy = s.direction(); !(s.accuracy <= systemNeeded) && s.sys.grow(); s.accuracy = s.direction() {
		s.sys.factor()
	}
	if s.pairs > 0 {
		p, d := s.longest()
		after := 0.0
		for k := range s.v {
			if s.hasLow[k] {
				after += (s.low[k] + p*s.dlow[k]) * (s.zl[k] + d*s.dzl[k])
			}
			if s.hasUp[k] {
				after += (s.up[k] + p*s.dup[k]) * (s.zu[k] + d*s.dzu[k])
			}
		}
		ratio := after / (s.mu * float64(s.pairs))
		sigma = math.Min(1, math.Max(ratio*ratio*ratio, 1e-6))
		correct := 1.0
		if math.Min(s.stepP, s.stepD) < smallStep {
			sigma, correct = math.Max(sigma, 0.5), 0
		}
		for k := range s.v {
			if s.hasLow[k] {
				s.tl[k] = s.wanted(sigma, correct*s.dlow[k]*s.dzl[k])
			}
			if s.hasUp[k] {
				s.tu[k] = s.wanted(sigma, correct*s.dup[k]*s.dzu[k])
			}
		}
	}
	s.accuracy = s.direction()
	p, d := s.longest()
	p, d = s.centrality(p, d, sigma)
	p, d = math.Min(1, boundaryShare*p), math.Min(1, boundaryShare*d)
	s.step(p, d)
}

// wanted is the complementarity asked of a pair: the centred one less the second-order term of the predictor, which is kept from
// overruling it by far.
func (s *interiorPoint) wanted(sigma, second float64) float64 {
	most := secondOrderLimit * s.mu
	return sigma*s.mu - math.Max(-most, math.Min(most, second))
}

// secondOrderLimit bounds the second-order term by this many times the mean complementarity.
const secondOrderLimit = 1e3

// step moves by p in values and d in prices.
func (s *interiorPoint) step(p, d float64) {
	for k := range s.v {
		s.v[k] += p * s.dv[k]
		if s.hasLow[k] {
			s.zl[k] = math.Max(s.zl[k]+d*s.dzl[k], tiniest)
			s.low[k] = math.Max(s.low[k]+p*s.dlow[k], math.Max(tiniest, s.zl[k]/steepest))
		}
		if s.hasUp[k] {
			s.zu[k] = math.Max(s.zu[k]+d*s.dzu[k], tiniest)
			s.up[k] = math.Max(s.up[k]+p*s.dup[k], math.Max(tiniest, s.zu[k]/steepest))
		}
	}
	for i := range s.y {
		s.y[i] += d * s.dy[i]
	}
	s.stepP, s.stepD = p, d
}

// steepest is the price per distance that a pair keeps to, so that the system has the very diagonal that the step of the price is computed
// with: one above excluded would be cut off, and the difference to the step goes into the prices many times over.
const steepest = excluded / 10

// tiniest keeps distances and prices positive when a step rounds them away.
const tiniest = 1e-40
