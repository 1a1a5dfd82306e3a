package aquifer

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/paulmach/orb"
)

// switchingSite is a block with springs and a perched river that pumping can dry; held tells whether the west edge fixes the head.
func switchingSite(rng *rand.Rand, held bool) *Site {
	s := block()
	if !held {
		s.Edges = nil
	}
	s.Background.Transmissivity = best(50 + 200*rng.Float64())
	bed := 9 + rng.Float64()
	s.Rivers = []River{{Name: "Aln", Path: pathOf(150, 420, 850, 450), WaterLevels: []float64{bed + 1}, BedLevels: []float64{bed}, Width: 3, BedResistance: *best(1 + 20*rng.Float64())}}
	for i := range 2 {
		s.Springs = append(s.Springs, Spring{Name: string(rune('A' + i)), At: orb.Point{200 + 500*rng.Float64(), 60 + 200*rng.Float64()},
			OutletLevel: 9.5 + rng.Float64(), Conductance: best(20 + 300*rng.Float64()), EffectiveRadius: 0.5})
	}
	s.Nodes = []NodeRequest{{Name: "well A", At: orb.Point{300 + 400*rng.Float64(), 200 + 150*rng.Float64()}, Radius: 0.1, Well: true}}
	return s
}

// residualOf is the largest imbalance at an unknown with every exchange at its own switched flow [m³/d].
func residualOf(m *Model, h []float64, sinks []Sink) float64 {
	r := make([]float64, len(h))
	m.eachEdge(func(a, b int32, c float64) {
		q := c * (h[a] - h[b])
		r[a] -= q
		r[b] += q
	})
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		for k, n := range e.Nodes {
			r[n] += e.flow(k, h[n])
		}
	}
	for _, f := range m.Inflows {
		for k, n := range f.Nodes {
			r[n] += f.Flow[k]
		}
	}
	for _, s := range sinks {
		r[s.Node] -= s.Rate
	}
	worst := 0.0
	for n, v := range r {
		if m.free[n] >= 0 {
			worst = math.Max(worst, math.Abs(v))
		}
	}
	return worst
}

// A sweep of random sites and rates: every state found balances with its own switched flows, in few steps, and drawdown is convex in the rate.
func TestSettledStatesBalanceAndDrawdownIsConvex(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 3))
	switched, most := 0, 0
	for range 60 {
		m, err := Build(context.Background(), switchingSite(rng, true), Options{Nodes: 400})
		if err != nil {
			t.Fatal(err)
		}
		var level [3]float64
		q := 100 + 2500*rng.Float64()
		for k := range level {
			sinks := []Sink{{m.RequestNode[0], q * float64(k) / 2}}
			s, err := m.Settle(context.Background(), sinks)
			if err != nil {
				t.Fatal(err)
			}
			// imbalance beside a throughflow of hundreds of m³/d: rounding of heads near 10 m times conductances near 1000 m²/d
			if r := residualOf(m, s.Heads, sinks); !(r <= 1e-8) {
				t.Errorf("imbalance %.2e m³/d with %d entries off after %d steps", r, len(s.Off), s.Steps)
			}
			if len(s.Off) > 0 {
				switched++
			}
			most = max(most, s.Steps)
			level[k] = s.Heads[m.RequestNode[0]]
		}
		// heads are concave in the rate: the middle one is not below the mean of the others
		if level[1] < (level[0]+level[2])/2-1e-9 {
			t.Errorf("levels %v are not concave in the rate", level)
		}
	}
	if switched < 30 {
		t.Errorf("only %d states switched anything", switched)
	}
	t.Logf("%d states with something off, at most %d steps", switched, most)
}

// With few springs every combination can be tried: exactly one is consistent, and it is the one found.
func TestSettledStateByBruteForce(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 8))
	for range 40 {
		site := switchingSite(rng, true)
		site.Rivers = nil
		m, err := Build(context.Background(), site, Options{Nodes: 300})
		if err != nil {
			t.Fatal(err)
		}
		sinks := []Sink{{m.RequestNode[0], 1500 * rng.Float64()}}
		s, err := m.Settle(context.Background(), sinks)
		if err != nil {
			t.Fatal(err)
		}
		consistent := 0
		for mask := range 4 {
			var off []SwitchedOff
			for i := range 2 {
				if mask>>i&1 == 1 {
					off = append(off, SwitchedOff{i, 0})
				}
			}
			h, _, _, err := m.solveWith(context.Background(), sinks, off)
			if err != nil {
				t.Fatal(err)
			}
			if !equalOff(m.offAt(h), off) {
				continue
			}
			consistent++
			for n := range h {
				if math.Abs(h[n]-s.Heads[n]) > 1e-9 {
					t.Fatalf("head %v by trying, %v found", h[n], s.Heads[n])
				}
			}
		}
		if consistent != 1 {
			t.Errorf("%d combinations are consistent, want exactly one", consistent)
		}
	}
}

// Pumping more than recharge and river can give, with nothing else to fix the head: there is no steady state, and that is said.
func TestNoSteadyState(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 2))
	m, err := Build(context.Background(), switchingSite(rng, false), Options{Nodes: 400})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := m.Settle(context.Background(), []Sink{{m.RequestNode[0], 300}}); err != nil {
		t.Errorf("300 m³/d: %v", err)
	}
	var none *NoSteadyState
	if _, err := m.Settle(context.Background(), []Sink{{m.RequestNode[0], 1e6}}); !errors.As(err, &none) {
		t.Errorf("error %v, want no steady state", err)
	}
}
