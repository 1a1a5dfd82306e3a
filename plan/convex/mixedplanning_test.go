package convex

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"
)

// switchedCase describes a planning problem with wells that are off or pump at least their least rate.
type switchedCase struct {
	wells, limits int
	least         float64 // least rate as a share of the largest
	fixedCost     bool    // least cost for a demand, with a cost for each well that runs; otherwise the largest yield
	most          int     // wells that may run at once; 0 for any number
	pairs         int     // pairs of wells that exclude each other
	tight         bool    // limits so that many of them bind at once
	seed          uint64
}

// switchedProblem makes a problem on the response of planningProblem.
func switchedProblem(t testing.TB, c switchedCase) *MixedProblem {
	rng := rand.New(rand.NewPCG(c.seed, 99))
	linear := planningProblem(t, planningCase{wells: c.wells, limits: c.limits, seed: c.seed})
	sense := Maximise
	if c.fixedCost {
		sense = Minimise
	}
	columns, total := make([]Column, c.wells), 0.0
	for j := range columns {
		columns[j] = linear.Column(j)
		columns[j].Lower = c.least * columns[j].Upper
		if c.fixedCost {
			columns[j].Cost = 0.5 + rng.Float64()
		}
	}
	p := &MixedProblem{Problem: mustProblem(t, sense, columns)}
	plan := make([]float64, c.wells)
	for j := range plan {
		plan[j] = (0.2 + 0.6*rng.Float64()) * columns[j].Upper
	}
	for i := 0; i < c.limits; i++ {
		r := linear.Row(i)
		if c.tight {
			r.Upper = (1 + 0.05*rng.Float64()) * dot(r.Coefficients, plan)
			if err := linear.SetRowBounds(i, r.Lower, r.Upper); err != nil {
				t.Fatal(err)
			}
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	for j := range columns {
		p.SemiContinuous = append(p.SemiContinuous, j)
	}
	if c.fixedCost {
		total = mustOptimal(t, linear, Options{}).Objective
		demand := make([]float64, c.wells)
		for j := range demand {
			demand[j] = 1
		}
		if _, err := p.AddRow(Row{Name: "demand", Coefficients: demand, Lower: 0.8 * total, Upper: inf}); err != nil {
			t.Fatal(err)
		}
	}
	if !c.fixedCost && c.most == 0 && c.pairs == 0 {
		return p
	}
	var on []int
	for j := 0; j < c.wells; j++ {
		y, err := OnOff(p, j)
		if err != nil {
			t.Fatal(err)
		}
		if c.fixedCost {
			if err := p.SetCost(y, columns[j].Upper*(0.1+0.4*rng.Float64())); err != nil {
				t.Fatal(err)
			}
		}
		on = append(on, y)
	}
	if c.most > 0 {
		if _, err := CountOn(p, "wells running", on, 0, float64(c.most)); err != nil {
			t.Fatal(err)
		}
	}
	for k := 0; k < c.pairs; k++ {
		a := rng.IntN(c.wells)
		b := (a + 1 + rng.IntN(c.wells-1)) % c.wells
		if _, err := CountOn(p, "exclude", []int{on[a], on[b]}, 0, 1); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

func mustMixed(t testing.TB, p *MixedProblem, o MixedOptions) *MixedSolution {
	t.Helper()
	s, err := SolveMixed(context.Background(), p, o)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func switchedCases(wells int) []switchedCase {
	return []switchedCase{
		{wells: wells, limits: 40, least: 0.3, seed: 1},
		{wells: wells, limits: 40, least: 0.6, seed: 2},
		{wells: wells, limits: 40, least: 0.2, most: wells / 3, seed: 3},
		{wells: wells, limits: 40, least: 0.2, pairs: wells / 2, seed: 4},
		{wells: wells, limits: 40, least: 0.2, fixedCost: true, seed: 5},
		{wells: wells, limits: 40, least: 0.3, fixedCost: true, pairs: wells / 4, seed: 6},
		{wells: wells, limits: 40, least: 0.5, tight: true, seed: 7},
		{wells: wells, limits: 40, least: 0.3, tight: true, most: wells / 2, seed: 8},
		{wells: wells, limits: 40, least: 0.3, tight: true, pairs: wells / 2, seed: 9},
		{wells: wells, limits: 40, least: 0.2, tight: true, fixedCost: true, seed: 10},
	}
}

const (
	thirtyWellsLimit  = 5 * time.Second
	hundredWellsLimit = 60 * time.Second
	hundredWellsGap   = 0.005
)

func TestThirtyWells(t *testing.T) {
	for _, c := range switchedCases(30) {
		p := switchedProblem(t, c)
		begin := time.Now()
		s := mustMixed(t, p, MixedOptions{})
		took := time.Since(begin)
		t.Logf("%+v: %v %.6g bound %.6g %d nodes %d pivots %d cuts %.2fs", c, s.Status, s.Objective, s.Bound, s.Nodes, s.Pivots, s.Cuts, took.Seconds())
		if s.Status != MixedOptimal {
			t.Errorf("%+v: %v", c, s.Status)
		}
		if long() && took > thirtyWellsLimit { // a clock proves nothing on a busy machine
			t.Errorf("%+v: %v", c, took)
		}
	}
}

func TestHundredWells(t *testing.T) {
	if !long() {
		t.Skip("minutes: set SPRINGBOUND_LONG=1")
	}
	for _, c := range switchedCases(100) {
		p := switchedProblem(t, c)
		ctx, cancel := context.WithTimeout(context.Background(), hundredWellsLimit)
		begin := time.Now()
		s, err := SolveMixed(ctx, p, MixedOptions{})
		cancel()
		if err != nil {
			t.Fatal(err)
		}
		t.Logf("%+v: %v %.8g bound %.8g gap %.2e %d nodes %d pivots %d cuts %.2fs", c, s.Status, s.Objective, s.Bound, s.Gap, s.Nodes, s.Pivots, s.Cuts,
			time.Since(begin).Seconds())
		if !(s.Gap <= hundredWellsGap) {
			t.Errorf("%+v: gap %v", c, s.Gap)
		}
	}
}

func BenchmarkSwitched(b *testing.B) {
	for _, c := range switchedCases(30) {
		p := switchedProblem(b, c)
		b.Run(fmt.Sprintf("%d", c.seed), func(b *testing.B) {
			for b.Loop() {
				mustMixed(b, p, MixedOptions{})
			}
		})
	}
}

// bruteForce returns the best objective over all switchings of the zero-or-within columns and all values of the whole ones; NaN when
// there is none.
func bruteForce(t testing.TB, p *MixedProblem) float64 {
	c := newCore(p)
	q := p.Problem.Clone()
	best := math.NaN()
	var basis *Basis
	var walk func(k int)
	walk = func(k int) {
		if k == len(c.discrete) {
			s := mustSolve(t, q, Options{Start: basis})
			basis = s.Basis
			if s.Status == Optimal && !(s.Objective >= best && p.sense == Minimise || s.Objective <= best && p.sense == Maximise) {
				best = s.Objective
			}
			return
		}
		j := c.discrete[k]
		set := func(lower, upper float64) {
			if err := q.SetBounds(j, lower, upper); err != nil {
				t.Fatal(err)
			}
			walk(k + 1)
		}
		switch {
		case c.whole[j]:
			for v := c.lower[j]; v <= c.upper[j]; v++ {
				if !c.gap(j) || v <= c.gapLow[j] || v >= c.gapHigh[j] {
					set(v, v)
				}
			}
		default:
			set(c.lower[j], c.gapLow[j])
			set(c.gapHigh[j], c.upper[j])
		}
	}
	walk(0)
	return best
}

// smallMixed makes a small problem of one of several kinds from a seed.
func smallMixed(t testing.TB, seed uint64) *MixedProblem {
	rng := rand.New(rand.NewPCG(seed, 3))
	wells := 3 + rng.IntN(4)
	switch seed % 6 {
	case 0:
		return switchedProblem(t, switchedCase{wells: wells + 3, limits: 1 + rng.IntN(6), least: 0.2 + 0.6*rng.Float64(), seed: seed})
	case 1:
		return switchedProblem(t, switchedCase{wells: wells, limits: 2 + rng.IntN(4), least: 0.3, fixedCost: true, seed: seed})
	case 2:
		return switchedProblem(t, switchedCase{wells: wells, limits: 2 + rng.IntN(4), least: 0.4, most: 1 + rng.IntN(3), pairs: 2, seed: seed})
	case 3: // whole numbers with equations and negative values
		columns := make([]Column, wells)
		for j := range columns {
			columns[j] = Column{Cost: float64(rng.IntN(21) - 10), Lower: float64(-rng.IntN(3)), Upper: float64(1 + rng.IntN(2))}
		}
		p := &MixedProblem{Problem: mustProblem(t, Sense(rng.IntN(2)), columns)}
		for i := 0; i < 3; i++ {
			r := Row{Coefficients: make([]float64, wells), Lower: -inf, Upper: float64(rng.IntN(12))}
			for j := range r.Coefficients {
				r.Coefficients[j] = float64(rng.IntN(15) - 7)
			}
			if rng.IntN(4) == 0 {
				r.Lower = r.Upper - float64(rng.IntN(3))
			}
			if _, err := p.AddRow(r); err != nil {
				t.Fatal(err)
			}
		}
		for j := range columns {
			p.Integer = append(p.Integer, j)
		}
		return p
	case 4: // knapsacks
		n := wells + 4
		columns := make([]Column, n)
		for j := range columns {
			columns[j] = Column{Cost: float64(1 + rng.IntN(30)), Upper: 1}
		}
		p := &MixedProblem{Problem: mustProblem(t, Maximise, columns)}
		for i := 0; i < 2; i++ {
			a, sum := make([]float64, n), 0.0
			for j := range a {
				a[j] = float64(5 + rng.IntN(40))
				sum += a[j]
			}
			if _, err := p.AddRow(atMost(math.Floor(sum*(0.3+0.4*rng.Float64())), a...)); err != nil {
				t.Fatal(err)
			}
		}
		for j := range columns {
			p.Integer = append(p.Integer, j)
		}
		return p
	}
	// wells that pump or recharge, some with whole steps, beside free helpers
	columns := make([]Column, wells+2)
	for j := range columns {
		columns[j] = Column{Cost: rng.Float64() * 10, Lower: 1 + rng.Float64(), Upper: 3 + 4*rng.Float64()}
		if j%3 == 1 {
			columns[j].Lower, columns[j].Upper, columns[j].Cost = -columns[j].Upper, -columns[j].Lower, -columns[j].Cost
		}
	}
	columns[wells], columns[wells+1] = Column{Cost: -2, Upper: 5}, Column{Cost: 1, Lower: -1, Upper: inf}
	p := &MixedProblem{Problem: mustProblem(t, Maximise, columns)}
	for i := 0; i < 3; i++ {
		a := make([]float64, len(columns))
		for j := range a {
			a[j] = rng.Float64()*4 - 1
		}
		if _, err := p.AddRow(atMost(2+5*rng.Float64(), a...)); err != nil {
			t.Fatal(err)
		}
	}
	all := make([]float64, len(columns))
	for j := range all {
		all[j] = 1
	}
	if _, err := p.AddRow(atMost(8, all...)); err != nil {
		t.Fatal(err)
	}
	for j := 0; j < wells; j++ {
		p.SemiContinuous = append(p.SemiContinuous, j)
		if j%4 == 3 {
			p.Integer = append(p.Integer, j)
		}
	}
	return p
}

// bruteAgreement allows for the gap that counts as none and the rounding of the two linear programmes.
const bruteAgreement = 2 * DefaultMixedGap

func TestMixedAgainstAllSwitchings(t *testing.T) {
	cases := uint64(120)
	if long() {
		cases = 3000
	}
	none, tree := 0, 0
	for seed := uint64(0); seed < cases; seed++ {
		p := smallMixed(t, seed)
		want := bruteForce(t, p)
		s := mustMixed(t, p, MixedOptions{})
		if math.IsNaN(want) {
			none++
			if s.Status != MixedInfeasible {
				t.Errorf("seed %d: %v, there is no plan", seed, s.Status)
			}
			continue
		}
		if s.Nodes > 1 {
			tree++
		}
		if s.Status == MixedUnbounded {
			continue
		}
		if s.Status != MixedOptimal || !(math.Abs(s.Objective-want) <= bruteAgreement*math.Max(1, math.Abs(want))) {
			t.Errorf("seed %d: %v %.12g, all switchings %.12g", seed, s.Status, s.Objective, want)
		}
	}
	t.Logf("%d without a plan, %d with a tree", none, tree)
}
