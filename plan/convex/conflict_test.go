package convex

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"
)

// checkConflict verifies a set with the exact solver: infeasible with all members and the rows outside, feasible without any one.
func checkConflict(t *testing.T, p *Problem, among []int, c *ConflictSet) {
	t.Helper()
	if c.Status != Infeasible || !c.Verified {
		t.Fatalf("status %v, verified %v", c.Status, c.Verified)
	}
	build := func(dropRow, dropBound int) *Problem {
		columns := make([]Column, p.Columns())
		for j := range columns {
			columns[j] = Column{Lower: -inf, Upper: inf}
		}
		for k, b := range c.Bounds {
			if k == dropBound {
				continue
			}
			if b.Side == LowerSide {
				columns[b.Index].Lower = p.Column(b.Index).Lower
			} else {
				columns[b.Index].Upper = p.Column(b.Index).Upper
			}
		}
		q := mustProblem(t, Minimise, columns)
		listed := map[int]bool{}
		for _, i := range among {
			listed[i] = true
		}
		for i := 0; i < p.Rows(); i++ {
			r := p.Row(i)
			if listed[i] {
				lower, upper := r.Lower, r.Upper
				r.Lower, r.Upper = -inf, inf
				for k, b := range c.Rows {
					if b.Index != i || k == dropRow {
						continue
					}
					if b.Side == LowerSide {
						r.Lower = lower
					} else {
						r.Upper = upper
					}
				}
			}
			if _, err := q.AddRow(r); err != nil {
				t.Fatal(err)
			}
		}
		return q
	}
	if status, _ := exactSolve(build(-1, -1)); status != Infeasible {
		t.Fatalf("the set %v %v is feasible", c.Rows, c.Bounds)
	}
	for k := range c.Rows {
		if status, _ := exactSolve(build(k, -1)); status == Infeasible {
			t.Errorf("row member %v is not needed", c.Rows[k])
		}
	}
	for k := range c.Bounds {
		if status, _ := exactSolve(build(-1, k)); status == Infeasible {
			t.Errorf("bound member %v is not needed", c.Bounds[k])
		}
	}
}

func TestConflictSmall(t *testing.T) {
	found := 0
	for seed := uint64(0); seed < 400; seed++ {
		rng := rand.New(rand.NewPCG(seed, 5))
		p := randomInteger(t, rng)
		var among []int
		for i := 0; i < p.Rows(); i++ {
			if seed%3 != 0 || i%2 == 0 {
				among = append(among, i)
			}
		}
		c, err := Conflict(context.Background(), p, among)
		if err != nil {
			t.Fatal(err)
		}
		if status, _ := exactSolve(p); status != Infeasible {
			if c.Status == Infeasible {
				t.Fatalf("seed %d: a conflict in a feasible problem", seed)
			}
			continue
		}
		found++
		checkConflict(t, p, among, c)
	}
	if found < 100 {
		t.Errorf("only %d infeasible cases", found)
	}
}

// tooMuch asks a planning problem for more than it can give, and returns it with its optimum.
func tooMuch(t testing.TB, c planningCase, times float64) (*Problem, float64) {
	p := planningProblem(t, c)
	most := mustOptimal(t, p, Options{}).Objective
	ones := make([]float64, p.Columns())
	for j := range ones {
		ones[j] = p.Column(j).Cost
	}
	if _, err := p.AddRow(atLeast(times*most, ones...)); err != nil {
		t.Fatal(err)
	}
	return p, most
}

// TestConflictOfDemand: a demand above the largest yield conflicts with the limits that bind at the largest yield, or fewer.
func TestConflictOfDemand(t *testing.T) {
	p, _ := tooMuch(t, planningCase{wells: 100, limits: 40, seed: 31}, 1.2)
	among := make([]int, p.Rows())
	for i := range among {
		among[i] = i
	}
	c, err := Conflict(context.Background(), p, among)
	if err != nil || c.Status != Infeasible || !c.Verified {
		t.Fatalf("%+v %v", c, err)
	}
	demand := false
	for _, b := range c.Rows {
		demand = demand || b == Bound{40, LowerSide}
	}
	if !demand || len(c.Rows) < 2 || len(c.Rows) > 12 {
		t.Errorf("rows in conflict: %v", c.Rows)
	}
	t.Logf("%d rows, %d bounds, %d solves", len(c.Rows), len(c.Bounds), c.Solves)
	if _, err := Conflict(context.Background(), p, []int{p.Rows()}); err == nil {
		t.Error("a row out of range was taken")
	}
}

// relaxed widens the listed rows of p by the amounts and returns the status.
func relaxed(t *testing.T, p *Problem, rows []RowRelaxation, grow float64) Status {
	t.Helper()
	q := p.Clone()
	for _, r := range rows {
		old := q.Row(r.Row)
		if err := q.SetRowBounds(r.Row, old.Lower-r.Lower*grow, old.Upper+r.Upper*grow); err != nil {
			t.Fatal(err)
		}
	}
	return mustSolve(t, q, Options{}).Status
}

// TestLeastRelaxationOfDemand: the demand alone must give way by what is missing; each amount is enough, and less is not.
func TestLeastRelaxationOfDemand(t *testing.T) {
	p, most := tooMuch(t, planningCase{wells: 60, limits: 20, seed: 33}, 1.2)
	var list []Relaxable
	for i := 0; i < p.Rows(); i++ {
		list = append(list, Relaxable{Row: i, LowerWeight: 1e-4, UpperWeight: 1})
	}
	r, err := LeastRelaxation(context.Background(), p, list)
	if err != nil || r.Status != Optimal {
		t.Fatalf("%+v %v", r, err)
	}
	demand := r.Rows[20]
	check(t, "demand alone", demand.AloneAmount, 0.2*most, 1e-9*most) // the optimum itself is certified to 1e-9
	if !(r.Total <= demand.Alone*(1+rounding)) || !(r.Total > 0) {
		t.Errorf("total %v, demand alone %v", r.Total, demand.Alone)
	}
	slightlyMore := 1 + 1e-7 // above feasibilityTolerance, for the rounding of the amounts
	if s := relaxed(t, p, r.Rows, slightlyMore); s != Optimal {
		t.Errorf("after the relaxation: %v", s)
	}
	if s := relaxed(t, p, r.Rows, 0.999); s != Infeasible {
		t.Errorf("after less than the relaxation: %v", s)
	}
	for k, row := range r.Rows {
		alone := []RowRelaxation{{Row: row.Row}}
		if k == 20 {
			alone[0].Lower = row.AloneAmount
		} else {
			alone[0].Upper = row.AloneAmount
		}
		if math.IsInf(row.Alone, 1) {
			alone[0].Upper = 1e9 // any amount: a thousand kilometres of drawdown
			if s := relaxed(t, p, alone, 1); s != Infeasible {
				t.Errorf("row %d: called hopeless, but %v", k, s)
			}
			continue
		}
		if s := relaxed(t, p, alone, slightlyMore); s != Optimal {
			t.Errorf("row %d alone: %v", k, s)
		}
		if s := relaxed(t, p, alone, 0.999); s != Infeasible {
			t.Errorf("row %d with less: %v", k, s)
		}
	}
}

func TestLeastRelaxationSmall(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 10}}, atMost(1, 1), atLeast(4, 1), equal(6, 1))
	r, err := LeastRelaxation(context.Background(), p, []Relaxable{{0, 1, 1}, {1, 1, 1}, {2, 1, 1}})
	if err != nil || r.Status != Optimal {
		t.Fatalf("%+v %v", r, err)
	}
	// at 6: 5 + 0 + 0; at 4: 3 + 0 + 2; at 1: 0 + 3 + 5
	check(t, "total", r.Total, 5, 5*rounding)
	if !math.IsInf(r.Rows[1].Alone, 1) || !math.IsInf(r.Rows[2].Alone, 1) || math.Abs(r.Rows[0].Alone-5) > 5*rounding {
		t.Errorf("alone: %+v", r.Rows)
	}
	r, err = LeastRelaxation(context.Background(), p, []Relaxable{{0, 0, 10}, {1, 0, 0}, {2, 1, 0}})
	if err != nil || r.Status != Optimal {
		t.Fatalf("%+v %v", r, err)
	}
	check(t, "at least 4 is hard: 3 x 10 + 2 x 1", r.Total, 32, 32*rounding)
	r, err = LeastRelaxation(context.Background(), p, []Relaxable{{1, 1, 1}})
	if err != nil || r.Status != Infeasible || !math.IsInf(r.Rows[0].Alone, 1) {
		t.Errorf("%+v %v", r, err)
	}
	if _, err := LeastRelaxation(context.Background(), p, []Relaxable{{0, math.NaN(), 1}}); err == nil {
		t.Error("a NaN weight was taken")
	}
	if _, err := LeastRelaxation(context.Background(), p, []Relaxable{{3, 1, 1}}); err == nil {
		t.Error("a row out of range was taken")
	}
}

func TestLeastRelaxationOfFeasible(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 10}}, atMost(1, 1))
	r, err := LeastRelaxation(context.Background(), p, []Relaxable{{0, 1, 1}})
	if err != nil || r.Status != Optimal || r.Total != 0 || r.Rows[0].Alone != 0 {
		t.Errorf("%+v %v", r, err)
	}
}
