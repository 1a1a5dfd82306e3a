package convex

import (
	"context"
	"testing"
)

// TestRelaxer asks one Relaxer for single rows, for pairs, and again after a further row, and compares with problems made anew.
func TestRelaxer(t *testing.T) {
	p, _ := tooMuch(t, planningCase{wells: 30, limits: 12, seed: 77}, 1.1)
	q := rangesAsRows(t, p)
	_, list := everyRow(q)
	r, err := NewRelaxer(q, list)
	if err != nil {
		t.Fatal(err)
	}
	check := func(what string, takes func(k int) bool) {
		t.Helper()
		var some []Relaxable
		for k, v := range list {
			if takes(k) {
				some = append(some, v)
			}
		}
		got := r.Least(context.Background(), takes)
		want, err := Solve(context.Background(), elasticDense(t, q, some), Options{})
		if err != nil {
			t.Fatal(err)
		}
		if got.Status != want.Status || want.Status == Optimal && !near(got.Total, want.Objective, CertifiedGap) {
			t.Errorf("%s: %v %.15g, by columns %v %.15g", what, got.Status, got.Total, want.Status, want.Objective)
		}
	}
	several := func(what string) {
		t.Helper()
		check(what+", all", func(int) bool { return true })
		check(what+", none", func(int) bool { return false })
		which, weighted := []int{0, 31, len(list) - 1, 7}, []float64(nil)
		weighted, _, status := r.Alone(context.Background(), which)
		if status != Optimal {
			t.Fatal(status)
		}
		for n, k := range which {
			check(what+", one", func(other int) bool { return other == k })
			one := r.Least(context.Background(), func(other int) bool { return other == k })
			if (one.Status == Optimal) != finite(weighted[n]) || one.Status == Optimal && !near(one.Total, weighted[n], CertifiedGap) {
				t.Errorf("%s: row %d alone %.15g, by itself %v %.15g", what, k, weighted[n], one.Status, one.Total)
			}
			check(what+", two", func(other int) bool { return other == k || other == len(list)-1 })
		}
	}
	several("first")
	further := atMost(0.7*p.Column(0).Upper, ones(p.Columns())...)
	for j := 1; j < p.Columns(); j++ {
		further.Coefficients[j] = 0
	}
	further.Coefficients[1] = 0.25
	if _, err := q.AddRow(further); err != nil {
		t.Fatal(err)
	}
	if err := r.AddRow(further); err != nil {
		t.Fatal(err)
	}
	several("with a further row")
	if r.Iterations() == 0 {
		t.Error("no pivots are counted")
	}
	if _, err := NewRelaxer(q, []Relaxable{{Row: q.Rows()}}); err == nil {
		t.Error("a row out of range was taken")
	}
	if err := r.AddRow(Row{Coefficients: []float64{1}}); err == nil {
		t.Error("a row of the wrong length was taken")
	}
}
