package convex

import (
	"context"
	"math/rand/v2"
	"testing"
)

// manyTies makes a problem of middle size around a whole-numbered point that meets every row, most of them exactly; small entries
// and repeated rows make almost every pivot degenerate. One in sixty has a row that the point does not meet.
func manyTies(t testing.TB, rng *rand.Rand) *Problem {
	n, m := 5+rng.IntN(60), 5+rng.IntN(60)
	span, dense := 1+rng.IntN(3), 0.05+0.9*rng.Float64()
	point, columns := make([]float64, n), make([]Column, n)
	for j := range columns {
		point[j] = float64(rng.IntN(4))
		columns[j] = Column{Cost: float64(rng.IntN(7) - 2), Upper: inf}
		switch rng.IntN(5) {
		case 0:
			columns[j].Lower = -inf
		case 1, 2:
			columns[j].Upper = point[j] + float64(rng.IntN(2))
		}
	}
	p := mustProblem(t, Minimise, columns)
	for i := 0; i < m; i++ {
		a := make([]float64, n)
		for j := range a {
			if rng.Float64() < dense {
				a[j] = float64(rng.IntN(2*span+1) - span)
			}
		}
		if i > 0 && rng.IntN(6) == 0 {
			a = p.Row(i - 1).Coefficients
		}
		v := dot(a, point)
		r := atMost(v+float64(rng.IntN(2)), a...)
		switch rng.IntN(5) {
		case 0:
			r.Lower, r.Upper = v, v
		case 1:
			r.Lower, r.Upper = v-float64(rng.IntN(2)), inf
		case 2:
			r.Lower = v - float64(rng.IntN(3))
		}
		if rng.IntN(60*m) == 0 {
			r.Lower, r.Upper = -inf, v-1
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

// TestManyTies asks for a certificate of every answer, and that no case takes many more pivots than it has rows and columns.
func TestManyTies(t *testing.T) {
	cases := 300
	if long() {
		cases = 60_000
	}
	count := map[Status]int{}
	for seed := 0; seed < cases; seed++ {
		p := manyTies(t, rand.New(rand.NewPCG(uint64(seed), 98)))
		s := mustSolve(t, p, Options{})
		count[s.Status]++
		if c := Certify(p, s); !c.Accepted {
			t.Errorf("seed %d, %d x %d: %v refused: %s", seed, p.Rows(), p.Columns(), s.Status, c.Reason)
		}
		if s.Iterations > 10*(p.Rows()+p.Columns()) {
			t.Errorf("seed %d, %d x %d: %d pivots", seed, p.Rows(), p.Columns(), s.Iterations)
		}
	}
	t.Logf("%d optimal, %d infeasible, %d unbounded", count[Optimal], count[Infeasible], count[Unbounded])
	if count[Optimal] < cases/10 || count[Unbounded] < cases/10 {
		t.Errorf("one-sided cases: %v", count)
	}
}

// afterPolls is a context that is cancelled at its k-th poll.
type afterPolls struct {
	context.Context
	left int
}

func (c *afterPolls) Err() error {
	if c.left--; c.left < 0 {
		return context.Canceled
	}
	return nil
}

// TestCancelledAtEveryPoll stops a solve at each pivot; what is left is a basis that the next solve may start from.
func TestCancelledAtEveryPoll(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 40, limits: 25, recharging: true, seed: 91})
	want := mustOptimal(t, p, Options{})
	for k := 0; ; k++ {
		s, err := Solve(&afterPolls{context.Background(), k}, p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if s.Status == Optimal {
			if k < 3 {
				t.Errorf("only %d polls", k)
			}
			return
		}
		if s.Status != Interrupted {
			t.Fatalf("poll %d: %v", k, s.Status)
		}
		if on := mustOptimal(t, p, Options{Start: s.Basis}); !near(on.Objective, want.Objective, rounding) {
			t.Errorf("poll %d: %v, want %v", k, on.Objective, want.Objective)
		}
	}
}

// TestExplanationsCancelled: what was stopped says so.
func TestExplanationsCancelled(t *testing.T) {
	p, _ := tooMuch(t, planningCase{wells: 40, limits: 20, seed: 92}, 1.1)
	among, list := []int{}, []Relaxable{}
	for i := 0; i < p.Rows(); i++ {
		among = append(among, i)
		list = append(list, Relaxable{i, 1, 1})
	}
	for k := 0; k < 60; k += 7 {
		c, err := Conflict(&afterPolls{context.Background(), k}, p, among)
		if err != nil || (c.Status != Interrupted && c.Status != Infeasible) || (c.Status == Interrupted && c.Verified) {
			t.Errorf("conflict, poll %d: %+v %v", k, c, err)
		}
		r, err := LeastRelaxation(&afterPolls{context.Background(), k}, p, list)
		if err != nil || (r.Status != Interrupted && r.Status != Optimal) {
			t.Errorf("relaxation, poll %d: %+v %v", k, r, err)
		}
	}
}

func TestProgress(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 300, limits: 300, seed: 93})
	for j := 0; j < p.Columns(); j++ { // one-sided columns, so that there are many pivots
		if err := p.SetBounds(j, 0, inf); err != nil {
			t.Fatal(err)
		}
	}
	var last Progress
	s := mustOptimal(t, p, Options{Progress: func(r Progress) {
		if r.Iterations <= last.Iterations || (r.Stage != "dual" && r.Stage != "primal") {
			t.Errorf("%+v after %+v", r, last)
		}
		last = r
	}})
	if s.Iterations >= reportEvery && last.Iterations == 0 {
		t.Error("no report")
	}
	t.Logf("%d pivots, %d primal", s.Iterations, s.Primal)
}
