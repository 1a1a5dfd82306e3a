package convex

import (
	"context"
	"testing"
)

// TestWatchedRows: problems so large that only some rows are followed have the optimum of the interior method, cold and warm, and a proof
// where there is no point.
func TestWatchedRows(t *testing.T) {
	for _, c := range []planningCase{
		{wells: 800, limits: 160, seed: 1},
		{wells: 800, limits: 160, sparse: true, seed: 2},
		{wells: 400, limits: 300, degenerate: true, seed: 3},
		{wells: 800, limits: 130, recharging: true, seed: 4},
	} {
		if c.wells*c.limits < watchFrom {
			t.Fatalf("%+v is followed whole", c)
		}
		p := planningProblem(t, c)
		s := mustOptimal(t, p, Options{})
		if a := SecondOpinion(context.Background(), p, s); a.Verdict != Agree {
			t.Errorf("%+v: %v, %s", c, a.Verdict, a.Reason)
		}
		for i := 0; i < p.Rows(); i += 3 {
			if err := p.SetRowBounds(i, p.Row(i).Lower, 0.7*p.Row(i).Upper); err != nil {
				t.Fatal(err)
			}
		}
		warm, cold := mustOptimal(t, p, Options{Start: s.Basis}), mustOptimal(t, p, Options{})
		if !near(warm.Objective, cold.Objective, rounding) {
			t.Errorf("%+v: warm %v, cold %v", c, warm.Objective, cold.Objective)
		}
		r := p.Row(0)
		r.Lower, r.Upper = 1.001*p.Row(0).Upper, inf // above the limit that the row itself has
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
		none := mustSolve(t, p, Options{})
		if proof := Certify(p, none); none.Status != Infeasible || !proof.Accepted {
			t.Errorf("%+v: %v, %s", c, none.Status, proof.Reason)
		}
	}
}
