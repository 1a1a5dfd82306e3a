package convex

import (
	"context"
	"math/rand/v2"
	"testing"
)

// separableProblem makes a least-squares problem with a diagonal Hessian: bounds of every kind, limits on one or both sides and one
// equation, all met by a point drawn first.
func separableProblem(t *testing.T, seed uint64) *Problem {
	rng := rand.New(rand.NewPCG(seed, 41))
	n, m := 3+rng.IntN(40), 1+rng.IntN(20)
	columns, diagonal, point := make([]Column, n), make([]float64, n), make([]float64, n)
	for j := range columns {
		point[j] = rng.NormFloat64()
		columns[j] = Column{Cost: 3 * rng.NormFloat64(), Lower: -inf, Upper: inf}
		if rng.IntN(4) > 0 {
			columns[j].Lower = point[j] - float64(rng.IntN(3))*rng.Float64()
		}
		if rng.IntN(4) > 0 {
			columns[j].Upper = point[j] + float64(rng.IntN(3))*rng.Float64()
		}
		diagonal[j] = 0.2 + 3*rng.Float64()
	}
	p := mustProblem(t, Minimise, columns)
	for i := 0; i < m; i++ {
		row, at := make([]float64, n), 0.0
		for j := range row {
			if rng.IntN(3) > 0 {
				row[j] = rng.NormFloat64()
			}
			at += row[j] * point[j]
		}
		r := Row{Coefficients: row, Lower: at - rng.Float64(), Upper: at + rng.Float64()}
		switch rng.IntN(4) {
		case 0:
			r.Lower = -inf
		case 1:
			r.Upper = inf
		}
		if i == 0 {
			r.Lower, r.Upper = at, at
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	if err := p.SetHessian(Hessian{Diagonal: diagonal}); err != nil {
		t.Fatal(err)
	}
	return p
}

// TestSeparableGuess: the optimum from the guess is that from the plain start, and the guess mostly leaves nothing to do.
func TestSeparableGuess(t *testing.T) {
	ended, idle := 0, 0
	const problems = 300
	for seed := uint64(0); seed < problems; seed++ {
		p := separableProblem(t, seed)
		s := mustOptimal(t, p, Options{})
		start := &Basis{columns: make([]Place, p.Columns()), rows: make([]Place, p.Rows())}
		for j := range start.columns {
			start.columns[j] = Basic
		}
		for i := range start.rows {
			start.rows[i] = Basic
		}
		plain := mustOptimal(t, p, Options{Start: start})
		if !near(s.Objective, plain.Objective, 1e-10) { // both are certified to 1e-9 of the terms, and usually to rounding
			t.Errorf("seed %d: %.15g from the guess, %.15g from the plain start", seed, s.Objective, plain.Objective)
		}
		f := buildForm(p, p.curvature().form, typicalShares[0])
		if newSeparable(f).guess(context.Background(), make([]Place, f.n+f.m)) {
			ended++
		}
		if s.Iterations == 0 {
			idle++
		}
	}
	t.Logf("%d climbs ended, %d guesses left nothing to do, of %d", ended, idle, problems)
	if ended < problems*9/10 || idle < problems*8/10 {
		t.Errorf("%d climbs ended, %d guesses left nothing to do, of %d", ended, idle, problems)
	}
}

// TestSeparableInfeasible: where no point exists the climb has no end, and the answer is the proof of the other methods.
func TestSeparableInfeasible(t *testing.T) {
	for seed := uint64(0); seed < 30; seed++ {
		p := separableProblem(t, seed)
		r := p.Row(0)
		r.Lower, r.Upper = r.Lower+1, r.Upper+1
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
		s := mustSolve(t, p, Options{})
		if c := Certify(p, s); s.Status != Infeasible || !c.Accepted {
			t.Errorf("seed %d: %v, %s", seed, s.Status, c.Reason)
		}
	}
}

// TestSeparableNeedsDiagonal: a Hessian with other entries or with factors is not taken.
func TestSeparableNeedsDiagonal(t *testing.T) {
	for name, h := range map[string]Hessian{
		"entry":       {Diagonal: []float64{2, 2}, Entries: []HessianEntry{{1, 0, 1}}},
		"factor":      {Diagonal: []float64{2, 2}, Factors: []HessianFactor{{1, []float64{1, 1}}}},
		"semi":        {Diagonal: []float64{2, 0}},
		"wrong sense": {Diagonal: []float64{-2, -2}},
	} {
		p := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}})
		if err := p.SetHessian(h); err != nil {
			t.Fatal(err)
		}
		if newSeparable(buildForm(p, p.hessian, typicalShares[0])) != nil {
			t.Errorf("%s: taken", name)
		}
	}
}
