package convex

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"
)

// boundsAsRows rewrites p with bounds of columns as rows of one entry, of either sign and not always one, some of them twice and some
// looser than others, some bounds left where they are.
func boundsAsRows(t testing.TB, p *Problem, rng *rand.Rand) *Problem {
	columns := make([]Column, p.Columns())
	type row struct {
		j            int
		lower, upper float64
	}
	var rows []row
	for j := range columns {
		c := p.Column(j)
		columns[j] = Column{Lower: -inf, Upper: inf}
		switch rng.IntN(4) {
		case 0:
			columns[j] = c
		case 1:
			rows = append(rows, row{j, c.Lower, inf}, row{j, -inf, c.Upper})
		case 2:
			rows = append(rows, row{j, c.Lower, c.Upper}, row{j, -inf, c.Upper + float64(rng.IntN(3))})
		default:
			columns[j].Lower = c.Lower
			rows = append(rows, row{j, c.Lower - 1, c.Upper})
		}
	}
	q := mustProblem(t, Minimise, columns)
	add := func(r Row) {
		if _, err := q.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	for _, r := range rows {
		a := make([]float64, len(columns))
		f := [...]float64{1, 1, -1, 2, -0.5, 3}[rng.IntN(6)]
		a[r.j] = f
		lower, upper := r.lower*f, r.upper*f
		if f < 0 {
			lower, upper = upper, lower
		}
		add(Row{Coefficients: a, Lower: lower, Upper: upper})
	}
	for i := range p.Rows() {
		add(p.Row(i))
	}
	return q
}

// TestExplanationsOfOneEntryRows: what is worked on as bounds of columns is named and relaxed as rows, in rational arithmetic.
func TestExplanationsOfOneEntryRows(t *testing.T) {
	cases, found, bounds := 15, 0, 0
	if long() {
		cases = 100
	}
	for seed := 0; found < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 2003))
		v := varietyOf(rng)
		v.impossible = true
		p := manyPlan(t, rng, v, 1+rng.IntN(4), 1+rng.IntN(3), true)
		if s := mustSolve(t, p, Options{}); s.Status != Infeasible {
			continue
		}
		found++
		q := boundsAsRows(t, p, rng)
		var among []int
		var list []Relaxable
		for i := range q.Rows() {
			if rng.IntN(5) > 0 {
				among = append(among, i)
			}
			if rng.IntN(8) > 0 {
				w := Relaxable{Row: i, LowerWeight: float64(1 + rng.IntN(4)), UpperWeight: float64(rng.IntN(4))}
				list = append(list, w)
			}
		}
		rng.Shuffle(len(among), func(a, b int) { among[a], among[b] = among[b], among[a] })
		b := findRowBounds(q)
		for _, is := range b.is {
			if is {
				bounds++
			}
		}
		c, err := Conflict(context.Background(), q, among)
		if err != nil {
			t.Fatal(err)
		}
		checkConflict(t, q, among, c)
		status, _ := exactSolve(elasticDense(t, q, list))
		r, err := LeastRelaxation(context.Background(), q, list)
		if err != nil {
			t.Fatal(err)
		}
		if r.Status != status {
			t.Errorf("seed %d: relaxation %v, exactly %v", seed, r.Status, status)
		}
		if status == Optimal {
			checkRelaxation(t, seed, q, list)
		}
	}
	if bounds < cases {
		t.Errorf("only %d rows of one entry in %d problems", bounds, found)
	}
}

// TestRowBounds: only rows that are the same as a bound are taken for one.
func TestRowBounds(t *testing.T) {
	p := mustProblem(t, Minimise, []Column{{Upper: 10}, {Lower: -inf, Upper: inf}})
	for _, r := range []Row{
		{Coefficients: []float64{1, 0}, Lower: -inf, Upper: 5},
		{Coefficients: []float64{0, -2}, Lower: -inf, Upper: 5},
		{Coefficients: []float64{0, 3}, Lower: 1, Upper: 3},   // a third is rounded
		{Coefficients: []float64{1, 1}, Lower: 1, Upper: 3},   // two entries
		{Coefficients: []float64{0, 0}, Lower: 0, Upper: inf}, // none
		{Coefficients: []float64{0, 1e300}, Lower: 0, Upper: 1e-300},
	} {
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	b := findRowBounds(p)
	for i, want := range []bool{true, true, false, false, false, false} {
		if b.is[i] != want {
			t.Errorf("row %d: %v", i, b.is[i])
		}
	}
	if b.lower[1] != -2.5 || !math.IsInf(b.upper[1], 1) || b.side(1, LowerSide) != UpperSide || b.side(0, UpperSide) != UpperSide {
		t.Errorf("bounds %v to %v", b.lower[1], b.upper[1])
	}
	if _, err := p.AddRow(Row{Coefficients: []float64{1, 0}, Lower: 6, Upper: inf}); err != nil { // excludes the first
		t.Fatal(err)
	}
	if b := findRowBounds(p); b.is[0] || b.is[6] || !b.is[1] {
		t.Error("bounds that exclude each other are to stay rows")
	}
}
