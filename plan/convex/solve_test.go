package convex

import (
	"context"
	"math"
	"testing"
)

func mustSolve(t testing.TB, p *Problem, o Options) *Solution {
	t.Helper()
	s, err := Solve(context.Background(), p, o)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func mustProblem(t testing.TB, sense Sense, columns []Column, rows ...Row) *Problem {
	t.Helper()
	p, err := NewProblem(sense, columns)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range rows {
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

func near(a, b, relative float64) bool {
	return math.Abs(a-b) <= relative*math.Max(math.Abs(a), math.Abs(b))
}

var inf = math.Inf(1)

// responses of the rectangle between two canals: metres per cubic metre a day of three wells at two springs.
var (
	springP1 = []float64{2.712079621525e-4, 3.842560390817e-4, 2.069615201665e-4}
	springP2 = []float64{1.469348697956e-4, 4.305805866293e-4, 2.910185545674e-4}
)

// printedDigits is half a unit of the last of ten printed digits, relative to the value.
const printedDigits = 1e-9

func threeWells(cost []float64, cap float64) []Column {
	c := make([]Column, 3)
	for j := range c {
		c[j] = Column{Cost: cost[j], Lower: 0, Upper: cap}
	}
	return c
}

func TestPlanningProblem(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500),
		Row{Coefficients: springP1, Lower: -inf, Upper: 0.30}, Row{Coefficients: springP2, Lower: -inf, Upper: 0.25})
	s := mustSolve(t, p, Options{})
	if s.Status != Optimal || !near(s.Objective, 1221.986123, printedDigits) {
		t.Fatalf("%v %v", s.Status, s.Objective)
	}
	if !near(s.RowPrice[0], 2969.775953, printedDigits) || !near(s.RowPrice[1], 1324.213347, printedDigits) {
		t.Errorf("prices %v", s.RowPrice)
	}
}
