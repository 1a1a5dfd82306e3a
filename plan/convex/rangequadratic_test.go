package convex

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

const (
	// parabolaAgrees is the difference of an optimum from its parabola, relative to one plus its size: both are certified to 1e-9.
	parabolaAgrees = 1e-8
	// lineAgrees is the same for prices, whose errors are those of a system of condition 1e5 or so.
	lineAgrees = 1e-6
	// farTried is how far a range without an end is tried [-].
	farTried = 10
)

// rangeTally counts what a test has seen.
type rangeTally struct{ sides, unknown, kinks, blocked, inside int }

// confirmRange solves again inside both sides of a range and just beyond their ends.
func confirmRange(t *testing.T, p *Problem, r QuadraticRange, tally *rangeTally) {
	t.Helper()
	for _, way := range []float64{-1, 1} {
		known, price, bend, to, end := r.LeftKnown, r.Left, r.LeftBend, r.From, r.Below
		if way > 0 {
			known, price, bend, to, end = r.RightKnown, r.Right, r.RightBend, r.To, r.Above
		}
		tally.sides++
		if !known {
			tally.unknown++
			continue
		}
		reach := (to - r.At) * way
		at := func(step float64) (*Solution, *Problem) {
			q, ok := movedBy(p, []Move{{r.Of, 1}}, way*step)
			if !ok {
				return nil, nil
			}
			s, err := Solve(context.Background(), q, Options{})
			if err != nil {
				t.Fatal(err)
			}
			return s, q
		}
		if math.IsInf(price, 0) {
			tally.blocked++
			if s, _ := at(1e-2); s != nil && s.Status != Infeasible {
				t.Errorf("%v, way %v: closed, and yet %v at a hundredth", r.Of, way, s.Status)
			}
			continue
		}
		far := math.Min(reach, farTried)
		for _, share := range []float64{0.1, 0.5, 0.95} {
			step := share * far
			s, _ := at(step)
			if s == nil || s.Status != Optimal {
				t.Fatalf("%v: %v inside its range of %v", r.Of, s, reach)
			}
			want := r.Value + way*step*price + bend*step*step/2
			if !(math.Abs(s.Objective-want) <= parabolaAgrees*(1+math.Abs(want))) {
				t.Errorf("%v, way %v: %v at %v of %v, the parabola says %v", r.Of, way, s.Objective, step, reach, want)
			}
			tally.inside++
		}
		if math.IsInf(reach, 1) {
			if end.Kind != Endless {
				t.Errorf("%v: an endless side ends with %v", r.Of, end.Kind)
			}
			continue
		}
		beyond := 1e-2 * (1 + reach)
		if end.Kind == InfeasibleBeyond {
			tally.blocked++
			if s, _ := at(reach + beyond); s != nil && s.Status != Infeasible {
				t.Errorf("%v, way %v: %v beyond %v", r.Of, way, s.Status, reach)
			}
			continue
		}
		s, q := at(reach + beyond)
		for try := 0; try < 3 && (s == nil || s.Status != Optimal); try++ { // the next piece may be short
			beyond /= 100
			s, q = at(reach + beyond)
		}
		if s == nil || s.Status != Optimal {
			t.Errorf("%v, way %v: %v beyond %v, which should go on", r.Of, way, s, reach)
			continue
		}
		prices := s.RowPrice
		if r.Of.Column {
			prices = s.ReducedCost
		}
		want := price + way*(reach+beyond)*bend
		if math.Abs(activePrice(q, s, r.Of, prices)-want) > lineAgrees*(1+math.Abs(want)) {
			tally.kinks++
		}
	}
}

// Ranges of random problems, confirmed by solving again: the optimum is the parabola inside, and another one beyond.
func TestQuadraticRangesAgainstSolving(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 7))
	var tally rangeTally
	for trial := 0; trial < 60; trial++ {
		p := randomQuadratic(t, rng, 2+rng.IntN(9), rng.IntN(9))
		s, err := Solve(context.Background(), p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if s.Status != Optimal {
			continue
		}
		var groups [][]Move
		for _, side := range AllSides(p) {
			groups = append(groups, []Move{{side, 1}})
		}
		list, err := QuadraticRanges(context.Background(), p, s, groups)
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range list {
			confirmRange(t, p, r, &tally)
			want := s.RowPrice
			if r.Of.Column {
				want = s.ReducedCost
			}
			if r.Left == r.Right && !(math.Abs(r.Left-activePrice(p, s, r.Of, want)) <= lineAgrees*(1+math.Abs(r.Left))) {
				t.Errorf("%v: price %v, of the solution %v", r.Of, r.Left, want[r.Of.Index])
			}
		}
	}
	if tally.unknown > 0 || tally.kinks < tally.sides/4 || tally.blocked == 0 {
		t.Errorf("%+v", tally)
	}
	t.Logf("%+v", tally)
}

// activePrice is the price of a bound: that of its row or column where it is the one that holds.
func activePrice(p *Problem, s *Solution, of SideOf, prices []float64) float64 {
	v := prices[of.Index]
	lowerHolds := (v > 0) == (p.sense == Minimise)
	if of.Side == BothSides || v == 0 || lowerHolds == (of.Side == LowerSide) {
		return v
	}
	return 0
}

// Small whole numbers, with rows twice: many bounds meet at the optimum. What is said is confirmed, and little is left unsaid.
func TestQuadraticRangesOfDegenerateProblems(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 77))
	var tally rangeTally
	kinks := 0
	for trial := 0; trial < 80; trial++ {
		n := 2 + rng.IntN(4)
		var columns []Column
		h := Hessian{Diagonal: make([]float64, n)}
		for j := range n {
			columns = append(columns, Column{Cost: float64(rng.IntN(9) - 4), Upper: float64(1 + rng.IntN(3))})
			h.Diagonal[j] = -float64(1 + rng.IntN(2))
		}
		p := mustProblem(t, Maximise, columns)
		for range 2 + rng.IntN(4) {
			a := make([]float64, n)
			for j := range a {
				a[j] = float64(rng.IntN(3))
			}
			row := Row{Coefficients: a, Lower: -inf, Upper: float64(1 + rng.IntN(4))}
			for range 1 + rng.IntN(2) {
				if _, err := p.AddRow(row); err != nil {
					t.Fatal(err)
				}
			}
		}
		if err := p.SetHessian(h); err != nil {
			t.Fatal(err)
		}
		s, err := Solve(context.Background(), p, Options{})
		if err != nil || s.Status != Optimal {
			t.Fatal(err, s.Status)
		}
		var groups [][]Move
		for _, side := range AllSides(p) {
			groups = append(groups, []Move{{side, 1}})
		}
		list, err := QuadraticRanges(context.Background(), p, s, groups)
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range list {
			confirmRange(t, p, r, &tally)
			if r.LeftKnown && r.RightKnown && math.Abs(r.Left-r.Right) > lineAgrees {
				kinks++
			}
		}
	}
	if !(tally.unknown <= tally.sides/50) || kinks < 20 {
		t.Errorf("%+v, %d bounds with two prices", tally, kinks)
	}
	t.Logf("%+v, %d bounds with two prices", tally, kinks)
}

// One well with a request of 5 and a limit of 3: its price falls along a line to nothing at 5, where the limit no longer binds.
func TestQuadraticRangeByHand(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 10, Upper: 8}})
	if _, err := p.AddRow(Row{Coefficients: []float64{1}, Lower: -inf, Upper: 3}); err != nil {
		t.Fatal(err)
	}
	if err := p.SetHessian(Hessian{Diagonal: []float64{-2}}); err != nil {
		t.Fatal(err)
	}
	s, err := Solve(context.Background(), p, Options{})
	if err != nil {
		t.Fatal(err)
	}
	side := SideOf{Side: UpperSide}
	list, err := QuadraticRanges(context.Background(), p, s, [][]Move{{{side, 1}}})
	if err != nil {
		t.Fatal(err)
	}
	r := list[0]
	if !near(r.Left, 4, 1e-12) || !near(r.Right, 4, 1e-12) || !near(r.RightBend, -2, 1e-12) || !near(r.To, 5, 1e-12) || !r.Above.Leaves || r.Above.Binds != side {
		t.Errorf("%+v", r)
	}
	if !near(r.From, 0, 1e-12) || r.Below.Kind != InfeasibleBeyond {
		t.Errorf("%+v", r)
	}
	if _, err := QuadraticRanges(context.Background(), p, &Solution{Status: Infeasible}, nil); !errors.Is(err, ErrNotOptimal) {
		t.Errorf("%v", err)
	}
	if _, err := QuadraticRanges(context.Background(), p, s, [][]Move{{{SideOf{Index: 1, Side: UpperSide}, 1}}}); err == nil {
		t.Error("a row that is not there is ranged")
	}
}
