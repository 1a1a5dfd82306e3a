package convex

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// benchmarkFour is the planning problem of three wells and two springs between two canals: energy for the demand.
func benchmarkFour(t testing.TB, demand float64) *Problem {
	t.Helper()
	g := [5][3]float64{
		{2.712079621525e-4, 3.842560390817e-4, 2.069615201665e-4},
		{1.469348697956e-4, 4.305805866293e-4, 2.910185545674e-4},
		{1.828591694781e-3, 1.834747600834e-4, 1.227870889678e-4},
		{1.834747600834e-4, 1.975167108720e-3, 2.295258708132e-4},
		{1.227870889678e-4, 2.295258708132e-4, 1.839313309697e-3},
	}
	columns := make([]Column, 3)
	dense := make([]float64, 9)
	for i, z := range []float64{22, 21, 22.5} {
		columns[i] = Column{Name: fmt.Sprintf("W%d", i+1), Cost: z, Upper: 900}
		for j := range 3 {
			dense[3*i+j] = 2 * g[2+i][j]
		}
	}
	p := mustProblem(t, Minimise, columns, equal(demand, 1, 1, 1), atMost(0.30, g[0][:]...), atMost(0.25, g[1][:]...))
	if err := p.SetHessian(Hessian{Dense: dense}); err != nil {
		t.Fatal(err)
	}
	return p
}

// TestEnergyOfThreeWells holds objective, rates and prices to half the last printed digit.
func TestEnergyOfThreeWells(t *testing.T) {
	const digit = 0.5000001e-6
	for _, c := range []struct {
		demand, objective float64
		rates, prices     [3]float64
		reason            string
	}{
		{800, 17809.446833, [3]float64{296.214247, 428.947584, 74.838169}, [3]float64{23.477465, 0, -1486.197898}, "only the second spring binds"},
		{1100, 25250.483565, [3]float64{652.771795, 171.489016, 275.739189}, [3]float64{26.660209, -4046.468690, -7110.811129}, "both springs bind"},
	} {
		p := benchmarkFour(t, c.demand)
		for name, solve := range bothMethods {
			s, err := solve(context.Background(), p, Options{})
			if err != nil || s.Status != Optimal {
				t.Fatalf("%s, demand %v: %v %v", name, c.demand, s.Status, err)
			}
			mustCertify(t, p, s)
			if math.Abs(s.Objective-c.objective) > digit {
				t.Errorf("%s, demand %v (%s): objective %.9f, want %.6f", name, c.demand, c.reason, s.Objective, c.objective)
			}
			for i := range 3 {
				if math.Abs(s.X[i]-c.rates[i]) > digit {
					t.Errorf("%s, demand %v: rate %d is %.9f, want %.6f", name, c.demand, i, s.X[i], c.rates[i])
				}
				if math.Abs(s.RowPrice[i]-c.prices[i]) > digit {
					t.Errorf("%s, demand %v: price %d is %.9f, want %.6f", name, c.demand, i, s.RowPrice[i], c.prices[i])
				}
			}
		}
	}
	for name, solve := range bothMethods {
		p := benchmarkFour(t, 1222)
		s, err := solve(context.Background(), p, Options{})
		if err != nil || s.Status != Infeasible {
			t.Fatalf("%s: a demand above 1221.986: %v %v", name, s.Status, err)
		}
		mustCertify(t, p, s)
	}
}

var bothMethods = map[string]func(context.Context, *Problem, Options) (*Solution, error){"Solve": Solve, "SolveInterior": SolveInterior}

// energyProblem is least energy for a demand: lift and the drawdown that wells of one field share through few common modes, with
// limits at receptors near the mean drawdown.
func energyProblem(t testing.TB, wells, limits, modes int, seed uint64) *Problem {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 41))
	columns := make([]Column, wells)
	h := Hessian{Diagonal: make([]float64, wells)}
	place := make([]float64, wells)
	for j := range columns {
		columns[j] = Column{Cost: 20 + 10*rng.Float64(), Upper: 500 + 1000*rng.Float64()}
		h.Diagonal[j] = 2e-3 * (1 + rng.Float64())
		place[j] = rng.Float64()
	}
	for k := range modes {
		f := HessianFactor{Weight: 1e-4 / float64(1+k), Coefficients: make([]float64, wells)}
		for j, x := range place {
			f.Coefficients[j] = math.Cos(float64(k) * math.Pi * x)
		}
		h.Factors = append(h.Factors, f)
	}
	p := mustProblem(t, Minimise, columns)
	demand := Row{Coefficients: ones(wells), Upper: inf}
	for j := range columns {
		demand.Lower += 0.35 * columns[j].Upper
	}
	if _, err := p.AddRow(demand); err != nil {
		t.Fatal(err)
	}
	for range limits {
		r := Row{Coefficients: make([]float64, wells), Lower: -inf}
		at, share := rng.Float64(), 0.34+0.1*rng.Float64() // of what full pumping does, against 0.35 of the demand
		for j, x := range place {
			r.Coefficients[j] = 1e-4 * math.Exp(-20*math.Abs(x-at)) * (1 + 0.1*rng.Float64())
			r.Upper += share * r.Coefficients[j] * columns[j].Upper
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	if err := p.SetHessian(h); err != nil {
		t.Fatal(err)
	}
	return p
}

func BenchmarkEnergy(b *testing.B) {
	for _, c := range [][3]int{{300, 40, 30}, {1000, 200, 50}, {5000, 500, 100}} {
		p := energyProblem(b, c[0], c[1], c[2], 1)
		b.Run(fmt.Sprintf("%dx%d", c[0], c[1]), func(b *testing.B) {
			var s *Solution
			for b.Loop() {
				s, _ = Solve(context.Background(), p, Options{})
			}
			if s.Status != Optimal {
				b.Fatal(s.Status)
			}
			b.ReportMetric(float64(s.Iterations), "steps")
		})
		if c[0] > 1000 {
			continue
		}
		d := denseCopy(b, p)
		b.Run(fmt.Sprintf("%dx%d-dense", c[0], c[1]), func(b *testing.B) {
			var s *Solution
			for b.Loop() {
				s, _ = Solve(context.Background(), d, Options{})
			}
			if s.Status != Optimal {
				b.Fatal(s.Status)
			}
			b.ReportMetric(float64(s.Iterations), "steps")
		})
	}
}

// denseCopy is the same problem with its Hessian multiplied out.
func denseCopy(t testing.TB, p *Problem) *Problem {
	t.Helper()
	q := p.Clone()
	q.hessian = nil
	if err := q.SetHessian(Hessian{Entries: p.HessianEntries()}); err != nil {
		t.Fatal(err)
	}
	return q
}
