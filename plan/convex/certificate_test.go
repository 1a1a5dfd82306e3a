package convex

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestCertificateRefuses spoils each part of a good solution by more than any tolerance.
func TestCertificateRefuses(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 20, limits: 10, seed: 41})
	good := mustOptimal(t, p, Options{})
	copyOf := func() *Solution {
		s := *good
		s.X = append([]float64(nil), good.X...)
		s.RowPrice = append([]float64(nil), good.RowPrice...)
		s.ReducedCost = append([]float64(nil), good.ReducedCost...)
		return &s
	}
	spoil := 1e-6 // a hundred times the widest tolerance
	for j := range good.X {
		s := copyOf()
		s.X[j] += spoil * math.Max(1000, math.Abs(s.X[j]))
		if Certify(p, s).Accepted {
			t.Errorf("X[%d] raised: accepted", j)
		}
		s = copyOf()
		s.ReducedCost[j] += 10 * spoil
		if Certify(p, s).Accepted {
			t.Errorf("ReducedCost[%d] raised: accepted", j)
		}
		s = copyOf()
		s.X[j] = math.NaN()
		if Certify(p, s).Accepted {
			t.Errorf("X[%d] = NaN: accepted", j)
		}
		s = copyOf()
		s.ReducedCost[j] = math.NaN()
		if Certify(p, s).Accepted {
			t.Errorf("ReducedCost[%d] = NaN: accepted", j)
		}
	}
	for i := range good.RowPrice {
		for _, v := range []float64{good.RowPrice[i]*(1+spoil) + spoil*1000, -1 - good.RowPrice[i], math.NaN()} {
			s := copyOf()
			s.RowPrice[i] = v
			if Certify(p, s).Accepted {
				t.Errorf("RowPrice[%d] = %v: accepted", i, v)
			}
		}
	}
	for _, status := range []Status{Infeasible, Unbounded, IterationLimit, NumericalTrouble, Interrupted} {
		s := copyOf()
		s.Status = status
		if Certify(p, s).Accepted {
			t.Errorf("%v without a proof: accepted", status)
		}
	}
}

// TestCertificateRefusesProofs spoils proofs of infeasibility and directions.
func TestCertificateRefusesProofs(t *testing.T) {
	spoiled := 0
	for seed := uint64(0); seed < 300; seed++ {
		p := randomInteger(t, rand.New(rand.NewPCG(seed, 5)))
		s := mustSolve(t, p, Options{})
		if s.Status != Infeasible && s.Status != Unbounded {
			continue
		}
		spoiled++
		for i := range s.Ray.Rows {
			s.Ray.Rows[i] = -s.Ray.Rows[i]
		}
		for j := range s.Ray.Columns {
			s.Ray.Columns[j] = -s.Ray.Columns[j]
		}
		if s.Status == Unbounded && Certify(p, s).Accepted {
			t.Errorf("seed %d: the opposite direction was accepted", seed)
		}
		for i := range s.Ray.Rows {
			s.Ray.Rows[i] = 0
		}
		for j := range s.Ray.Columns {
			s.Ray.Columns[j] = 0
		}
		if Certify(p, s).Accepted {
			t.Errorf("seed %d: nothing was accepted as proof of %v", seed, s.Status)
		}
		s.Ray = nil
		if Certify(p, s).Accepted {
			t.Errorf("seed %d: no ray at all was accepted", seed)
		}
	}
	if spoiled < 100 {
		t.Errorf("only %d proofs", spoiled)
	}
}

// TestTwofold sums what plain arithmetic cannot.
func TestTwofold(t *testing.T) {
	x := []float64{1e16, 1, -1e16, 3e-9}
	y := []float64{1, 1, 1, 1}
	if got := dotTwofold(x, y); got != 1+3e-9 {
		t.Errorf("%v", got)
	}
}
