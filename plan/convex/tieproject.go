package convex

import (
	"context"
	"math"
)

const (
	// tieViolation is the violation, in rows of norm one and distances of at most one, that counts as none.
	tieViolation = 1e-12
	// tieRounding is the rounding of a row's value relative to its terms.
	tieRounding = 1e-15
	// tieDependent is the part of a row of norm one outside the span of the active ones below which it counts as a combination of
	// them: the projection that measures it is good to some 1e-15.
	tieDependent = 1e-9
	// tieLeft is the violation that may stay where a row is such a combination.
	tieLeft = 1e-8
	// tieNoise is the multiplier that is rounding of zero.
	tieNoise = 1e-13
	// tieSteps bounds the changes of the active set, per row and column.
	tieSteps = 50
)

// nearPoint finds the point nearest to zero with low <= u <= high and lower <= G u <= upper, rows of G having norm one, by the dual
// active-set method of Goldfarb & Idnani (1983), Mathematical Programming 27, 1-33. Columns at a bound are taken out of the problem,
// so that only the active rows over the other columns are factored, as QR by orthogonalisation in two passes.
type nearPoint struct {
	n            int
	low, high    []float64
	g            [][]float64
	lower, upper []float64
	slack        []float64 // violation of a row that counts as none

	u      []float64
	at     []Place   // Basic for a column that is not at a bound
	hold   []float64 // multiplier of the bound of a column that is
	active []int     // rows
	sign   []float64 // +1 at the lower bound, -1 at the upper one
	pull   []float64 // multipliers of the active rows
	q      [][]float64
	r      [][]float64 // r[k] is column k, k+1 long
	left   []bool      // rows and columns given up as dependent
	steps  int
}

func newNearPoint(n int) *nearPoint {
	f := func() []float64 { return make([]float64, n) }
	return &nearPoint{n: n, low: f(), high: f(), u: f(), at: make([]Place, n), hold: f()}
}

func (s *nearPoint) addRow(g []float64, lower, upper, slack float64) {
	s.g = append(s.g, g)
	s.lower, s.upper, s.slack = append(s.lower, lower), append(s.upper, upper), append(s.slack, slack)
}

// entrant is a violated constraint: a row or a column, and the side.
type entrant struct {
	row, col int // -1 for the other kind
	sign     float64
	by       float64 // violation
}

// solve runs the method from zero, cut to the bounds of the columns.
func (s *nearPoint) solve(ctx context.Context) error {
	s.left = make([]bool, len(s.g)+s.n)
	for j := range s.u {
		switch {
		case s.low[j] > 0:
			s.u[j], s.at[j], s.hold[j] = s.low[j], AtLower, s.low[j]
		case s.high[j] < 0:
			s.u[j], s.at[j], s.hold[j] = s.high[j], AtUpper, -s.high[j]
		}
	}
	for s.steps = 0; s.steps < 1000+tieSteps*(s.n+len(s.g)); {
		if ctx.Err() != nil {
			return &StatusError{"choosing among equal optima", Interrupted}
		}
		p := s.worst()
		if p.row < 0 && p.col < 0 {
			s.finish()
			return nil
		}
		if !s.enter(p) {
			if !(p.by <= tieLeft) {
				break
			}
			if p.row >= 0 {
				s.left[p.row] = true
			} else {
				s.left[len(s.g)+p.col] = true
			}
		}
	}
	return &StatusError{"choosing among equal optima", NumericalTrouble}
}

// worst returns the most violated constraint, equations first; none when all hold.
func (s *nearPoint) worst() entrant {
	best := entrant{row: -1, col: -1}
	equation := false
	for i, g := range s.g {
		if s.left[i] {
			continue
		}
		v := dot(g, s.u)
		by, sign := s.lower[i]-v, 1.0
		if v-s.upper[i] > by {
			by, sign = v-s.upper[i], -1
		}
		own := s.lower[i] == s.upper[i]
		if !(by > s.slack[i]) || (equation && !own) || s.has(i) {
			continue
		}
		if by > best.by || (own && !equation) {
			best, equation = entrant{i, -1, sign, by}, own
		}
	}
	if equation {
		return best
	}
	for j, v := range s.u {
		if s.at[j] != Basic || s.left[len(s.g)+j] {
			continue
		}
		if by := s.low[j] - v; by > tieViolation && by > best.by {
			best = entrant{-1, j, 1, by}
		}
		if by := v - s.high[j]; by > tieViolation && by > best.by {
			best = entrant{-1, j, -1, by}
		}
	}
	return best
}

func (s *nearPoint) has(i int) bool {
	for _, a := range s.active {
		if a == i {
			return true
		}
	}
	return false
}

// enter brings a violated constraint into the active set, dropping others on the way. False when it is a combination of the active
// ones that none of them gives way to.
func (s *nearPoint) enter(p entrant) bool {
	own := 0.0
	for {
		s.steps++
		normal := s.normalOf(p)
		z, h := s.outsideSpan(normal)
		r := s.backSolve(h)
		length := dot(z, z)
		full := math.Inf(1)
		if length > tieDependent*tieDependent {
			full = math.Max(0, s.violation(p)) / length
		}
		hold := s.holdRates(normal, r)
		t, row, col := s.dropping(r, hold)
		if !(math.Min(full, t) <= math.MaxFloat64) {
			return false
		}
		whole := full <= t
		t = math.Min(t, full)
		if finite(full) {
			addScaled(s.u, t, z)
		}
		for k := range s.pull {
			s.pull[k] -= t * r[k]
		}
		for j := range s.hold {
			s.hold[j] -= t * hold[j]
		}
		own += t
		switch {
		case whole:
			s.settle(p, own, z, h)
			return true
		case row >= 0:
			s.dropRow(row)
		default:
			s.at[col], s.hold[col] = Basic, 0
		}
		s.factor()
	}
}

// normalOf returns the gradient of a constraint, over all columns.
func (s *nearPoint) normalOf(p entrant) []float64 {
	v := make([]float64, s.n)
	if p.row >= 0 {
		addScaled(v, p.sign, s.g[p.row])
	} else {
		v[p.col] = p.sign
	}
	return v
}

// violation returns by how much a constraint is violated now.
func (s *nearPoint) violation(p entrant) float64 {
	var v, lower, upper float64
	if p.row >= 0 {
		v, lower, upper = dot(s.g[p.row], s.u), s.lower[p.row], s.upper[p.row]
	} else {
		v, lower, upper = s.u[p.col], s.low[p.col], s.high[p.col]
	}
	if p.sign > 0 {
		return lower - v
	}
	return v - upper
}

// outsideSpan returns the part of a vector, over the columns that are not at a bound, that is orthogonal to the active rows, and the
// coefficients of the rest in Q.
func (s *nearPoint) outsideSpan(v []float64) (z, h []float64) {
	z, h = append([]float64(nil), v...), make([]float64, len(s.q))
	for j := range z {
		if s.at[j] != Basic {
			z[j] = 0
		}
	}
	for pass := 0; pass < 2; pass++ {
		for k, q := range s.q {
			c := dot(q, z)
			h[k] += c
			addScaled(z, -c, q)
		}
	}
	return z, h
}

// backSolve returns R⁻¹ h.
func (s *nearPoint) backSolve(h []float64) []float64 {
	x := append([]float64(nil), h...)
	for k := len(x) - 1; k >= 0; k-- {
		x[k] /= s.r[k][k]
		for i := 0; i < k; i++ {
			x[i] -= s.r[k][i] * x[k]
		}
	}
	return x
}

// holdRates returns the rates at which the multipliers of the columns at a bound fall.
func (s *nearPoint) holdRates(normal, r []float64) []float64 {
	rest := append([]float64(nil), normal...)
	for k, a := range s.active {
		addScaled(rest, -r[k]*s.sign[k], s.g[a])
	}
	for j := range rest {
		switch s.at[j] {
		case Basic:
			rest[j] = 0
		case AtUpper:
			rest[j] = -rest[j]
		}
	}
	return rest
}

// dropping returns the first step at which a multiplier becomes zero and its row (place in the active list) or column.
func (s *nearPoint) dropping(r, hold []float64) (t float64, row, col int) {
	t, row, col = math.Inf(1), -1, -1
	for k, rate := range r {
		i := s.active[k]
		if s.lower[i] == s.upper[i] || !(rate > tieViolation) {
			continue
		}
		if at := math.Max(0, s.pull[k]) / rate; at < t {
			t, row = at, k
		}
	}
	for j, rate := range hold {
		if s.at[j] == Basic || !(rate > tieViolation) {
			continue
		}
		if at := math.Max(0, s.hold[j]) / rate; at < t {
			t, row, col = at, -1, j
		}
	}
	return t, row, col
}

// settle makes the constraint active.
func (s *nearPoint) settle(p entrant, multiplier float64, z, h []float64) {
	if p.col >= 0 {
		s.at[p.col], s.u[p.col] = AtLower, s.low[p.col]
		if p.sign < 0 {
			s.at[p.col], s.u[p.col] = AtUpper, s.high[p.col]
		}
		s.hold[p.col] = multiplier
		s.factor()
		return
	}
	s.active, s.sign, s.pull = append(s.active, p.row), append(s.sign, p.sign), append(s.pull, multiplier)
	s.appendColumn(z, h)
}

// appendColumn adds to Q and R a column of which z is the part outside the span and h the part within.
func (s *nearPoint) appendColumn(z, h []float64) {
	norm := math.Sqrt(dot(z, z))
	for j := range z {
		z[j] /= norm
	}
	s.q = append(s.q, z)
	s.r = append(s.r, append(h, norm))
}

func (s *nearPoint) dropRow(k int) {
	s.active = append(s.active[:k], s.active[k+1:]...)
	s.sign = append(s.sign[:k], s.sign[k+1:]...)
	s.pull = append(s.pull[:k], s.pull[k+1:]...)
}

// factor makes Q and R afresh.
func (s *nearPoint) factor() {
	s.q, s.r = s.q[:0], s.r[:0]
	for k, a := range s.active {
		v := make([]float64, s.n)
		addScaled(v, s.sign[k], s.g[a])
		z, h := s.outsideSpan(v)
		s.appendColumn(z, h)
	}
}

// finish solves for the point and the multipliers of the last active set afresh: with N the active normals, u = N (N'N)⁻¹ b.
func (s *nearPoint) finish() {
	s.factor()
	y := make([]float64, len(s.active))
	for k, a := range s.active {
		bound := s.lower[a]
		if s.sign[k] < 0 {
			bound = -s.upper[a]
		}
		for j, p := range s.at {
			if p != Basic {
				bound -= s.sign[k] * s.g[a][j] * s.u[j]
			}
		}
		y[k] = (bound - dot(s.r[k][:k], y)) / s.r[k][k]
	}
	for j, p := range s.at {
		if p == Basic {
			s.u[j] = 0
		}
	}
	for k, q := range s.q {
		addScaled(s.u, y[k], q)
	}
	s.pull = s.backSolve(y)
}
