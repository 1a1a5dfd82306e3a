package convex

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
)

func mustCertifyMixed(t testing.TB, p *MixedProblem, s *MixedSolution) MixedCertificate {
	t.Helper()
	c := CertifyMixed(p, s)
	if !c.Accepted {
		t.Fatalf("certificate of %v refused: %s", s.Status, c.Reason)
	}
	return c
}

// upTo returns the numbers below n.
func upTo(n int) []int {
	list := make([]int, n)
	for j := range list {
		list[j] = j
	}
	return list
}

// TestKnownKnapsack: of values 60, 100, 120 and weights 10, 20, 30 under 50 the best are the last two.
func TestKnownKnapsack(t *testing.T) {
	p := &MixedProblem{Integer: upTo(3), Problem: mustProblem(t, Maximise,
		[]Column{{Cost: 60, Upper: 1}, {Cost: 100, Upper: 1}, {Cost: 120, Upper: 1}}, atMost(50, 10, 20, 30))}
	s := mustMixed(t, p, MixedOptions{})
	if s.Status != MixedOptimal || s.Objective != 220 || s.Bound != 220 || !reflect.DeepEqual(s.X, []float64{0, 1, 1}) {
		t.Errorf("%v %v bound %v at %v", s.Status, s.Objective, s.Bound, s.X)
	}
	mustCertifyMixed(t, p, s)
}

// TestKnownSwitching works a case by hand. Two wells of 4 to 10 share a limit of 9 on their sum, the first twice as dear in drawdown
// against a limit of 12: 2 x1 + x2 <= 12. Both running at 4 allow x1 = 4, x2 = 4 (yield 8); the second alone 9; so it runs alone
// and one more unit of the sum is worth one.
func TestKnownSwitching(t *testing.T) {
	p := &MixedProblem{SemiContinuous: upTo(2), Problem: mustProblem(t, Maximise,
		[]Column{{Name: "A", Cost: 1, Lower: 4, Upper: 10}, {Name: "B", Cost: 1, Lower: 4, Upper: 10}}, atMost(9, 1, 1), atMost(12, 2, 1))}
	s := mustMixed(t, p, MixedOptions{})
	if s.Status != MixedOptimal || s.Objective != 9 {
		t.Fatalf("%v %v at %v", s.Status, s.Objective, s.X)
	}
	mustCertifyMixed(t, p, s)
	if s.Linear.RowPrice[0] != 1 || s.Linear.RowPrice[1] != 0 {
		t.Errorf("prices at this switching %v", s.Linear.RowPrice)
	}
	if c := s.Switching.Column(0); c.Lower != 0 && c.Lower != 4 {
		t.Errorf("bounds of A at the switching: %v to %v", c.Lower, c.Upper)
	}
}

// TestAssignment: an assignment problem needs no tree, and its optimum is that of all permutations.
func TestAssignment(t *testing.T) {
	const n = 5
	rng := rand.New(rand.NewPCG(5, 5))
	columns := make([]Column, n*n)
	for k := range columns {
		columns[k] = Column{Cost: float64(rng.IntN(50)), Upper: 1}
	}
	p := &MixedProblem{Integer: upTo(n * n), Problem: mustProblem(t, Minimise, columns)}
	for i := 0; i < n; i++ {
		a, b := make([]float64, n*n), make([]float64, n*n)
		for j := 0; j < n; j++ {
			a[i*n+j], b[j*n+i] = 1, 1
		}
		for _, r := range [][]float64{a, b} {
			if _, err := p.AddRow(Row{Coefficients: r, Lower: 1, Upper: 1}); err != nil {
				t.Fatal(err)
			}
		}
	}
	best := math.Inf(1)
	var walk func(i int, used int, cost float64)
	walk = func(i, used int, cost float64) {
		if i == n {
			best = math.Min(best, cost)
			return
		}
		for j := 0; j < n; j++ {
			if used&(1<<j) == 0 {
				walk(i+1, used|1<<j, cost+columns[i*n+j].Cost)
			}
		}
	}
	walk(0, 0, 0)
	s := mustMixed(t, p, MixedOptions{})
	if s.Status != MixedOptimal || s.Objective != best {
		t.Errorf("%v %v, all permutations %v", s.Status, s.Objective, best)
	}
}

func TestMixedInfeasible(t *testing.T) {
	for name, p := range map[string]*MixedProblem{
		"no whole number between the bounds": {Integer: []int{0}, Problem: mustProblem(t, Minimise, []Column{{Lower: 0.2, Upper: 0.8}})},
		"even sum, odd limit": {Integer: upTo(4), Problem: mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}, {Upper: 1}, {Upper: 1}},
			Row{Coefficients: []float64{2, 2, 2, 2}, Lower: 3, Upper: 3})},
		"demand inside the gap": {SemiContinuous: []int{0}, Problem: mustProblem(t, Minimise, []Column{{Cost: 1, Lower: 5, Upper: 9}},
			Row{Coefficients: []float64{1}, Lower: 2, Upper: 3})},
		"no relaxation either": {Integer: []int{0}, Problem: mustProblem(t, Minimise, []Column{{Upper: 9}}, atMost(-1, 1))},
	} {
		if s := mustMixed(t, p, MixedOptions{}); s.Status != MixedInfeasible || s.X != nil {
			t.Errorf("%s: %v at %v", name, s.Status, s.X)
		}
		s := mustMixed(t, p, MixedOptions{Proof: true})
		if c := CertifyMixed(p, s); s.Status != MixedInfeasible || !c.Accepted {
			t.Errorf("%s: %v, certificate %+v", name, s.Status, c)
		}
	}
}

func TestMixedUnbounded(t *testing.T) {
	open := mustProblem(t, Maximise, []Column{{Cost: 1, Lower: 2, Upper: inf}, {Upper: 3}}, Row{Coefficients: []float64{1, -1}, Lower: 0.5, Upper: inf})
	p := &MixedProblem{Problem: open, Integer: []int{0, 1}, SemiContinuous: []int{0}}
	s := mustMixed(t, p, MixedOptions{})
	if s.Status != MixedUnbounded || !math.IsInf(s.Bound, 1) {
		t.Fatalf("%v bound %v", s.Status, s.Bound)
	}
	mustCertifyMixed(t, p, s)
	// the relaxation is unbounded, but no whole number fits in column 1
	shut := &MixedProblem{Integer: []int{1}, Problem: mustProblem(t, Maximise, []Column{{Cost: 1, Upper: inf}, {Lower: 0.25, Upper: 0.75}})}
	if s := mustMixed(t, shut, MixedOptions{}); s.Status != MixedInfeasible {
		t.Errorf("%v where no whole number fits", s.Status)
	}
}

// TestInterrupted stops a search by its context and by its limit of nodes: the plan is certified and the bound holds.
func TestInterrupted(t *testing.T) {
	p := switchedProblem(t, switchedCase{wells: 24, limits: 30, least: 0.3, tight: true, most: 12, seed: 11})
	whole := mustMixed(t, p, MixedOptions{})
	if whole.Status != MixedOptimal {
		t.Fatal(whole.Status)
	}
	holds := func(what string, s *MixedSolution, stopped Status) {
		t.Helper()
		if s.Stopped != stopped || s.Status != MixedFeasible && s.Status != MixedUndecided {
			t.Fatalf("%s: %v stopped by %v", what, s.Status, s.Stopped)
		}
		if !(s.Bound >= whole.Objective*(1-mixedRounding)) {
			t.Errorf("%s: bound %v below the optimum %v", what, s.Bound, whole.Objective)
		}
		if s.X != nil {
			mustCertifyMixed(t, p, s)
			if !(s.Objective <= whole.Objective*(1+mixedRounding)) {
				t.Errorf("%s: %v above the optimum %v", what, s.Objective, whole.Objective)
			}
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	count := 0
	s, err := SolveMixed(ctx, p, MixedOptions{Proof: true, Progress: func(g MixedProgress) {
		if count++; g.Found && count > 2 {
			cancel()
		}
	}})
	cancel()
	if err != nil {
		t.Fatal(err)
	}
	holds("context", s, Interrupted)
	if c := mustCertifyMixed(t, p, s); !c.BoundKnown {
		t.Error("the bound of the interrupted tree was not recomputed")
	}
	holds("limit of nodes", mustMixed(t, p, MixedOptions{NodeLimit: 5, Proof: true}), IterationLimit)
	s, err = SolveMixed(ctx, p, MixedOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if s.Status != MixedUndecided || s.Stopped != Interrupted {
		t.Errorf("cancelled from the start: %v, %v", s.Status, s.Stopped)
	}
	s, err = SolveMixed(ctx, p, MixedOptions{Start: whole.X})
	if err != nil {
		t.Fatal(err)
	}
	if s.Stopped != Interrupted {
		t.Errorf("cancelled with a plan: %v, %v", s.Status, s.Stopped)
	}
}

// TestStart takes a plan as the first one, and rounds one that is off.
func TestStart(t *testing.T) {
	p := switchedProblem(t, switchedCase{wells: 20, limits: 15, least: 0.3, fixedCost: true, seed: 21})
	whole := mustMixed(t, p, MixedOptions{})
	x := append([]float64(nil), whole.X...)
	for j := range x {
		x[j] *= 1 + 1e-3
	}
	s := mustMixed(t, p, MixedOptions{Start: x, NodeLimit: 1, plain: true})
	if s.X == nil || !near(s.Objective, whole.Objective, bruteAgreement) {
		t.Errorf("%v %v, want %v", s.Status, s.Objective, whole.Objective)
	}
}

// TestGapOption: the plan is within the gap asked for, the bound is honest, and fewer nodes are needed.
func TestGapOption(t *testing.T) {
	const gap = 0.02
	for seed := uint64(31); seed < 36; seed++ {
		p := switchedProblem(t, switchedCase{wells: 20, limits: 20, least: 0.3, tight: true, fixedCost: true, seed: seed})
		whole, rough := mustMixed(t, p, MixedOptions{}), mustMixed(t, p, MixedOptions{Gap: gap})
		if rough.Status != MixedOptimal || !(rough.Gap <= gap+mixedRounding) || !(rough.Bound <= whole.Objective*(1+mixedRounding)) ||
			!(rough.Objective <= whole.Objective*(1+gap+mixedRounding)) || rough.Nodes > whole.Nodes {
			t.Errorf("seed %d: %v %v bound %v gap %v in %d nodes; exact %v in %d", seed, rough.Status, rough.Objective, rough.Bound, rough.Gap, rough.Nodes,
				whole.Objective, whole.Nodes)
		}
	}
}

func TestMixedDeterministic(t *testing.T) {
	p := switchedProblem(t, switchedCase{wells: 30, limits: 30, least: 0.3, fixedCost: true, pairs: 6, seed: 41})
	print := func() string {
		s := mustMixed(t, p, MixedOptions{})
		return fmt.Sprintf("%x %x %x %v %d %d %d %x", s.X, s.Objective, s.Bound, s.Status, s.Nodes, s.Pivots, s.Cuts, s.Linear.RowPrice)
	}
	if a, b := print(), print(); a != b {
		t.Errorf("two runs differ:\n%s\n%s", a, b)
	}
}

// TestProofTree recomputes the bound from the tree, for plans, for infeasible problems, and refuses a tree that was tampered with.
func TestProofTree(t *testing.T) {
	trees, refused := 0, 0
	for seed := uint64(1000); seed < 1090; seed++ {
		p := smallMixed(t, seed)
		s := mustMixed(t, p, MixedOptions{Proof: true})
		quick := mustMixed(t, p, MixedOptions{})
		if s.Status != quick.Status || s.X != nil && !near(s.Objective, quick.Objective, bruteAgreement) {
			t.Fatalf("seed %d: %v %v with the tree kept, %v %v without", seed, s.Status, s.Objective, quick.Status, quick.Objective)
		}
		c := mustCertifyMixed(t, p, s)
		if s.Status == MixedUnbounded {
			continue
		}
		if !c.BoundKnown {
			t.Errorf("seed %d: no bound from the tree", seed)
		}
		if c.Leaves < 2 || s.Status != MixedOptimal {
			continue
		}
		trees++
		for k := range s.proof.nodes { // leave a part of the tree out
			if n := &s.proof.nodes[k]; n.down > 0 {
				n.high += 1 + math.Abs(n.high)
				break
			}
		}
		if !CertifyMixed(p, s).Accepted {
			refused++
		}
	}
	t.Logf("%d trees, %d refused once changed", trees, refused)
	if trees < 20 || refused != trees {
		t.Errorf("%d trees, %d refused once changed", trees, refused)
	}
}

// TestMixedCertificateRefuses changes plans for the worse.
func TestMixedCertificateRefuses(t *testing.T) {
	p := switchedProblem(t, switchedCase{wells: 8, limits: 6, least: 0.4, fixedCost: true, seed: 51})
	for name, spoil := range map[string]func(*MixedSolution){
		"value inside the gap": func(s *MixedSolution) { s.X[0] = 0.5 * p.Column(0).Lower; s.Linear.X[0] = s.X[0] },
		"half a switch":        func(s *MixedSolution) { s.X[8] = 0.5; s.Linear.X[8] = 0.5 },
		"another objective":    func(s *MixedSolution) { s.Objective *= 1.001 },
		"values not the linear programme's": func(s *MixedSolution) {
			s.X = append([]float64(nil), s.X...)
			s.X[1] += 1e-3
		},
		"bound better than the tree's": func(s *MixedSolution) { s.Bound *= 1.01 },
		"no linear programme":          func(s *MixedSolution) { s.Linear = nil },
	} {
		s := mustMixed(t, p, MixedOptions{Proof: true})
		mustCertifyMixed(t, p, s)
		spoil(s)
		if CertifyMixed(p, s).Accepted {
			t.Errorf("%s: accepted", name)
		}
	}
}

func TestMixedBadInput(t *testing.T) {
	linear := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: inf}})
	var fault *DataError
	_, err := SolveMixed(context.Background(), &MixedProblem{Problem: linear, Integer: []int{0, 0, 7}, SemiContinuous: []int{-1}}, MixedOptions{})
	if !errors.As(err, &fault) || len(fault.Faults) != 3 {
		t.Errorf("%v", err)
	}
	p := &MixedProblem{Problem: linear}
	for _, o := range []MixedOptions{{Gap: -1}, {Gap: math.NaN()}, {Gap: inf}, {NodeLimit: -1}, {Start: []float64{1}}, {Start: []float64{1, math.NaN()}}} {
		if _, err := SolveMixed(context.Background(), p, o); err == nil {
			t.Errorf("accepted %+v", o)
		}
	}
	curved := mustProblem(t, Minimise, []Column{{Upper: 1}})
	if err := curved.SetHessian(Hessian{Dense: []float64{2}}); err != nil {
		t.Fatal(err)
	}
	if _, err := SolveMixed(context.Background(), &MixedProblem{Problem: curved}, MixedOptions{}); !errors.As(err, &fault) {
		t.Errorf("took a quadratic cost: %v", err)
	}
	if _, err := OnOff(&MixedProblem{Problem: curved}, 0); !errors.As(err, &fault) {
		t.Errorf("gave a column to a quadratic cost: %v", err)
	}
	if _, err := OnOff(p, 1); !errors.As(err, &fault) || p.Columns() != 2 || p.Rows() != 0 {
		t.Errorf("switched a column without an upper bound: %v", err)
	}
}

// TestOnOff: the indicator follows the column, and a limit on their number holds.
func TestOnOff(t *testing.T) {
	for seed := uint64(0); seed < 20; seed++ {
		p := switchedProblem(t, switchedCase{wells: 12, limits: 8, least: 0.3, most: 4, pairs: 3, seed: 60 + seed})
		s := mustMixed(t, p, MixedOptions{})
		if s.Status != MixedOptimal {
			t.Fatal(s.Status)
		}
		mustCertifyMixed(t, p, s)
		on := 0.0
		for j := 0; j < 12; j++ {
			y := s.X[12+j]
			on += y
			if x := s.X[j]; (x > 0) != (y == 1) && x != 0 {
				t.Errorf("seed %d: rate %v with indicator %v", seed, x, y)
			}
		}
		if on > 4 {
			t.Errorf("seed %d: %v wells run", seed, on)
		}
	}
}

// TestNoWholeColumns is a linear programme.
func TestNoWholeColumns(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 20, limits: 10, seed: 71})
	s, want := mustMixed(t, &MixedProblem{Problem: p}, MixedOptions{}), mustOptimal(t, p, Options{})
	if s.Status != MixedOptimal || !near(s.Objective, want.Objective, rounding) {
		t.Errorf("%v %v, want %v", s.Status, s.Objective, want.Objective)
	}
}
