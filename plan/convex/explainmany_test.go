package convex

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"
)

// explainedPlans is the number of infeasible planning problems whose explanation is checked; the default run takes the first tenth.
const explainedPlans = 200

// elasticDense writes the elastic programme of p with a dense column for each side that may give way, apart from newElastic.
func elasticDense(t testing.TB, p *Problem, list []Relaxable) *Problem {
	var columns []Column
	for j := range p.Columns() {
		c := p.Column(j)
		c.Cost = 0
		columns = append(columns, c)
	}
	n := len(columns)
	entry := make([]int, p.Rows())
	upper := func(weight float64) float64 { // a weight of zero keeps the side
		if weight == 0 {
			return 0
		}
		return inf
	}
	for _, r := range list {
		entry[r.Row] = len(columns)
		columns = append(columns, Column{Cost: r.LowerWeight, Upper: upper(r.LowerWeight)}, Column{Cost: r.UpperWeight, Upper: upper(r.UpperWeight)})
	}
	q := mustProblem(t, Minimise, columns)
	for i := range p.Rows() {
		r := p.Row(i)
		a := make([]float64, len(columns))
		copy(a[:n], r.Coefficients)
		if entry[i] > 0 {
			a[entry[i]], a[entry[i]+1] = 1, -1
		}
		r.Coefficients = a
		if _, err := q.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return q
}

// checkRelaxation compares the total with the exact optimum of the elastic programme and with the second method, and solves the relaxed
// problem.
func checkRelaxation(t *testing.T, seed int, p *Problem, list []Relaxable) (agreed bool) {
	t.Helper()
	r, err := LeastRelaxation(context.Background(), p, list)
	if err != nil || r.Status != Optimal {
		t.Errorf("seed %d: relaxation %v %v", seed, r.Status, err)
		return false
	}
	q := elasticDense(t, p, list)
	status, value := exactSolve(q)
	exactly, _ := value.Float64()
	if status != Optimal || !near(r.Total, exactly, CertifiedGap) {
		t.Errorf("seed %d: total %.15g, exactly %v %.15g", seed, r.Total, status, exactly)
	}
	wider := p.Clone()
	for _, row := range r.Rows {
		old, grow := p.Row(row.Row), 1+1e-7 // above the tolerance of the solver, for the rounding of the amounts
		if err := wider.SetRowBounds(row.Row, old.Lower-row.Lower*grow, old.Upper+row.Upper*grow); err != nil {
			t.Fatal(err)
		}
	}
	mustOptimal(t, wider, Options{})
	for k, row := range r.Rows { // alone: enough, and the least, by the exact optimum with the other columns left out
		alone := q.Clone()
		for o := range list {
			for side := range 2 {
				if o != k {
					if err := alone.SetBounds(p.Columns()+2*o+side, 0, 0); err != nil {
						t.Fatal(err)
					}
				}
			}
		}
		status, value := exactSolve(alone)
		if (status == Optimal) != finite(row.Alone) {
			t.Errorf("seed %d row %d: alone %v, exactly %v", seed, k, row.Alone, status)
		} else if status == Optimal {
			if exactly, _ := value.Float64(); !near(row.Alone, exactly, CertifiedGap) {
				t.Errorf("seed %d row %d: alone %.15g, exactly %.15g", seed, k, row.Alone, exactly)
			}
		}
	}
	s, err := SolveInterior(context.Background(), q, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if s.Status == NumericalTrouble || !Certify(q, s).Accepted {
		return false
	}
	// The certificate of the second method holds to a share of the dearest row's worth; the exact optimum above asks for more.
	size := math.Max(r.Total, worthShare*measure(q).worth)
	if s.Status != Optimal || !(math.Abs(s.Objective-r.Total) <= OpinionAgreement*size) {
		t.Errorf("seed %d: total %.15g, by the second method %v %.15g", seed, r.Total, s.Status, s.Objective)
	}
	return true
}

// TestManyExplanations takes infeasible planning problems: the conflict must be irreducible and the relaxation the least, both in rational
// arithmetic.
func TestManyExplanations(t *testing.T) {
	cases, found, agreed, members := explainedPlans/10, 0, 0, 0
	if long() {
		cases = explainedPlans
	}
	for seed := 0; found < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 1003))
		v := varietyOf(rng)
		v.impossible = true
		p := manyPlan(t, rng, v, 1+rng.IntN(6), 1+rng.IntN(5), true)
		if s := mustSolve(t, p, Options{}); s.Status != Infeasible {
			continue
		}
		found++
		var among []int
		var list []Relaxable
		for i := range p.Rows() {
			if seed%4 != 0 || i != 0 {
				among = append(among, i)
			}
			list = append(list, Relaxable{Row: i, LowerWeight: float64(1 + rng.IntN(4)), UpperWeight: float64(1 + rng.IntN(4))})
		}
		c, err := Conflict(context.Background(), p, among)
		if err != nil {
			t.Fatal(err)
		}
		checkConflict(t, p, among, c)
		members += len(c.Rows) + len(c.Bounds)
		if checkRelaxation(t, seed, p, list) {
			agreed++
		}
	}
	t.Logf("%d infeasible problems, %.1f members of a conflict on average, all irreducible in rational arithmetic; least totals exact, the second method agrees on %d and stays undecided on %d",
		found, float64(members)/float64(found), agreed, found-agreed)
}
