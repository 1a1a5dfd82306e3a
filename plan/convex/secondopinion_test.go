package convex

import (
	"context"
	"math/rand/v2"
	"testing"
)

// TestSecondOpinion agrees with right answers of every kind and with none that is wrong.
func TestSecondOpinion(t *testing.T) {
	ctx := context.Background()
	planning := planningProblem(t, planningCase{wells: 60, limits: 15, seed: 1})
	energy := energyProblem(t, 80, 12, 10, 2)
	infeasible := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}}, atLeast(3, 1, 1))
	unbounded := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: inf}, {Cost: -2, Upper: inf}}, atMost(1, 1, -1))
	for name, p := range map[string]*Problem{"planning": planning, "energy": energy, "infeasible": infeasible} {
		s := mustSolve(t, p, Options{})
		if a := SecondOpinion(ctx, p, s); a.Verdict != Agree {
			t.Errorf("%s: %v, %s", name, a.Verdict, a.Reason)
		}
		cancelled, cancel := context.WithCancel(ctx)
		cancel()
		if a := SecondOpinion(cancelled, p, s); a.Verdict != Undecided {
			t.Errorf("%s, cancelled: %v", name, a.Verdict)
		}
		s.Status = NumericalTrouble
		if a := SecondOpinion(ctx, p, s); a.Verdict != Undecided {
			t.Errorf("%s, without a claim: %v", name, a.Verdict)
		}
	}
	s := mustSolve(t, unbounded, Options{})
	if s.Status == Unbounded {
		t.Error("x1 - 2 x2 within x1 - x2 <= 1 is at most 1")
	}
	if err := unbounded.SetCost(1, -0.5); err != nil {
		t.Fatal(err)
	}
	s = mustSolve(t, unbounded, Options{})
	if a := SecondOpinion(ctx, unbounded, s); s.Status != Unbounded || a.Verdict != Agree {
		t.Errorf("unbounded: %v, %v, %s", s.Status, a.Verdict, a.Reason)
	}
}

// TestInteriorOnSmall compares the interior method with rational arithmetic on problems full of ties, free columns and dependent rows.
func TestInteriorOnSmall(t *testing.T) {
	cases, undecided := 400, 0
	if long() {
		cases = 5000
	}
	for seed := 0; seed < cases; seed++ {
		p := randomInteger(t, rand.New(rand.NewPCG(uint64(seed), 21)))
		want, value := exactSolve(p)
		s, err := SolveInterior(context.Background(), p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if s.Status == NumericalTrouble {
			undecided++
			continue
		}
		if s.Status != want || !Certify(p, s).Accepted {
			t.Errorf("seed %d: %v, want %v; %s", seed, s.Status, want, Certify(p, s).Reason)
			continue
		}
		if want != Optimal {
			continue
		}
		exactly, _ := value.Float64()
		// The gap is certified relative to terms of a few tens at most.
		if d := s.Objective - exactly; !(d <= 1e-7 && d >= -1e-7) {
			t.Errorf("seed %d: %.15g, want %.15g", seed, s.Objective, exactly)
		}
	}
	t.Logf("%d of %d undecided", undecided, cases)
	if undecided > cases/100 {
		t.Errorf("%d of %d undecided", undecided, cases)
	}
}
