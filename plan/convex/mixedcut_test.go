package convex

import (
	"context"
	"math"
	"testing"
)

// cutKeeps is the amount by which a plan may exceed a cut, relative to its terms: plans of the linear programme meet their bounds to
// 1e-9, which a cut with coefficients up to a hundred times as large shows.
const cutKeeps = 1e-7

// TestCutsKeepEveryPlan enumerates all switchings of small problems and looks at the cuts of all rounds at the best plan of each
// switching, at the plan nearest to the cut, and for problems of whole columns at every plan.
func TestCutsKeepEveryPlan(t *testing.T) {
	cases := uint64(60)
	if long() {
		cases = 2000
	}
	cuts, plans := 0, 0
	for seed := uint64(2000); seed < 2000+cases; seed++ {
		p := smallMixed(t, seed)
		c := newCore(p)
		if !c.boundsInOrder() {
			continue
		}
		all := cutsOf(c, p)
		cuts += len(all)
		if len(all) == 0 {
			continue
		}
		q := p.Problem.Clone()
		eachSwitching(t, c, q, func() {
			for _, r := range all {
				for j := range q.columns { // the plan of this switching that goes farthest against the cut
					q.columns[j].Cost = 0
				}
				for _, e := range r.entries {
					q.columns[e.at].Cost = e.value
				}
				q.sense = Maximise
				s := mustSolve(t, q, Options{})
				if s.Status != Optimal {
					if s.Status == Infeasible {
						return
					}
					continue
				}
				plans++
				terms := math.Abs(r.upper)
				for _, e := range r.entries {
					terms = math.Max(terms, math.Abs(e.value*s.X[e.at]))
				}
				if !(s.Objective <= r.upper+cutKeeps*terms) {
					t.Fatalf("seed %d: a plan exceeds a cut by %.3g of %.3g", seed, s.Objective-r.upper, terms)
				}
			}
		})
	}
	t.Logf("%d cuts, %d plans", cuts, plans)
	if cuts < int(cases) || plans < 1000 {
		t.Errorf("only %d cuts and %d plans", cuts, plans)
	}
}

// cutsOf returns the cuts of several rounds, none dropped.
func cutsOf(c *core, p *MixedProblem) []coreRow {
	s := newSearch(context.Background(), c, MixedOptions{Gap: DefaultMixedGap}, newIncumbent(p))
	s.lp = newNodeLP(c.problem(nil))
	for round := 0; round < 4; round++ {
		if s.lp.first(s.ctx) != lpOptimal {
			break
		}
		found := s.findCuts(s.values(), cutPerRoundMost)
		if len(found) == 0 {
			break
		}
		s.extend(append(s.cuts, found...), s.lp.state())
	}
	return s.cuts
}

// eachSwitching sets the bounds of q to every switching in turn.
func eachSwitching(t testing.TB, c *core, q *Problem, f func()) {
	var walk func(k int)
	walk = func(k int) {
		if k == len(c.discrete) {
			f()
			return
		}
		j := c.discrete[k]
		set := func(lower, upper float64) {
			if lower > upper {
				return
			}
			q.columns[j].Lower, q.columns[j].Upper = lower, upper
			walk(k + 1)
		}
		if !c.whole[j] {
			set(c.lower[j], math.Min(c.gapLow[j], c.upper[j]))
			set(math.Max(c.gapHigh[j], c.lower[j]), c.upper[j])
			return
		}
		for v := c.lower[j]; v <= c.upper[j]; v++ {
			if !c.gap(j) || v <= c.gapLow[j] || v >= c.gapHigh[j] {
				set(v, v)
			}
		}
	}
	walk(0)
}

// TestReduceKeepsTheOptimum: presolve alone, seen through all switchings of what it leaves.
func TestReduceKeepsTheOptimum(t *testing.T) {
	changed, cases := 0, uint64(25)
	if long() {
		cases = 1000
	}
	for seed := uint64(3000); seed < 3000+cases; seed++ {
		p := smallMixed(t, seed)
		want := bruteForce(t, p)
		c, did, possible := newCore(p).reduce()
		if did != (Tightenings{}) {
			changed++
		}
		got := math.Inf(1)
		if possible {
			q := c.problem(nil)
			if len(c.cost) == 0 {
				got = c.offset
			} else {
				eachSwitching(t, c, q, func() {
					if s := mustSolve(t, q, Options{}); s.Status == Optimal {
						got = math.Min(got, s.Objective+c.offset)
					}
				})
			}
		}
		if p.sense == Maximise {
			got = -got
		}
		if math.IsNaN(want) != math.IsInf(got, 0) || !math.IsNaN(want) && !(math.Abs(got-want) <= bruteAgreement*math.Max(1, math.Abs(want))) {
			t.Errorf("seed %d: %v after presolve %+v, %v before", seed, got, did, want)
		}
	}
	t.Logf("%d problems changed", changed)
}

// TestKnownCover: 3 x1 + 3 x2 + 3 x3 + 2 x4 <= 7 has the cover {1, 2, 3}; at the relaxation (1, 1, 1/3, 0) it is violated.
func TestKnownCover(t *testing.T) {
	p := &MixedProblem{Integer: upTo(4), Problem: mustProblem(t, Maximise,
		[]Column{{Cost: 9, Upper: 1}, {Cost: 8, Upper: 1}, {Cost: 7, Upper: 1}, {Cost: 1, Upper: 1}}, atMost(7, 3, 3, 3, 2))}
	c := newCore(p)
	lp := newNodeLP(c.problem(nil))
	if lp.first(context.Background()) != lpOptimal {
		t.Fatal("no optimum")
	}
	x := make([]float64, 4)
	for j := range x {
		x[j] = lp.value(j)
	}
	k := newCutter(c, lp, nil, x)
	k.covers()
	if len(k.found) != 1 {
		t.Fatalf("%d covers at %v", len(k.found), x)
	}
	r := k.found[0].row
	if len(r.entries) < 3 || !near(r.upper, 2, 1e-8) { // the relief of a cut
		t.Errorf("cover %+v", r)
	}
}

// TestRoundingFunction compares with the textbook cut: from x - s <= 2.5, x whole, s >= 0 follows x - 2 s <= 2.
func TestRoundingFunction(t *testing.T) {
	whole, slack := roundTerm{whole: true, value: 1}, roundTerm{value: -1}
	if v := roundedValue(&whole, 1, 0.5); v != 1 {
		t.Errorf("whole column %v, want 1", v)
	}
	if v := roundedValue(&slack, 1, 0.5); v != -2 {
		t.Errorf("slack %v, want -2", v)
	}
}
