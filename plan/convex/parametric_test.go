package convex

import (
	"context"
	"errors"
	"math"
	"math/big"
	"math/rand/v2"
	"reflect"
	"testing"
)

func mustCurve(t testing.TB, p *Problem, s *Solution, side SideOf, from, to float64) *Curve {
	t.Helper()
	c, err := Parametric(context.Background(), p, s, side, from, to)
	if err != nil {
		t.Fatal(err)
	}
	checkShape(t, p.Sense(), c)
	return c
}

// checkShape: parameters rise, values lie on the slopes, and slopes fall for a maximisation and rise for a minimisation.
func checkShape(t testing.TB, sense Sense, c *Curve) {
	t.Helper()
	last := len(c.Points) - 1
	for k := 0; k < last; k++ {
		a, b := c.Points[k], c.Points[k+1]
		if !(a.At < b.At) {
			t.Errorf("points %v and %v", a.At, b.At)
		}
		if line := a.Value + a.Slope*(b.At-a.At); !(math.Abs(line-b.Value) <= 1e-9*(1+math.Abs(a.Value)+math.Abs(a.Slope*(b.At-a.At)))) {
			t.Errorf("from %v the line leads to %v, the next point is at %v", a.At, line, b.Value)
		}
		turn := b.Slope - a.Slope
		if sense == Maximise {
			turn = -turn
		}
		if k+1 < last && !(turn > 0) {
			t.Errorf("slopes %v and %v", a.Slope, b.Slope)
		}
	}
	if last > 0 && c.Points[last].Slope != c.Points[last-1].Slope {
		t.Errorf("last slope %v after %v", c.Points[last].Slope, c.Points[last-1].Slope)
	}
}

// on returns the value of the curve at v; false outside.
func (c *Curve) on(v float64) (float64, bool) {
	for k := 0; k+1 < len(c.Points); k++ {
		if a, b := c.Points[k], c.Points[k+1]; v >= a.At && v <= b.At {
			return a.Value + a.Slope*(v-a.At), true
		}
	}
	return 0, false
}

// TestParametricExact compares curves with rational arithmetic: just before and just beyond every point, and on a dense sweep.
func TestParametricExact(t *testing.T) {
	cases := 160
	if long() {
		cases = 12000
	}
	corners, before, after, nowhere := 0, 0, 0, 0
	for seed := 0; seed < cases && !t.Failed(); seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), exactStream()+200))
		p := randomInteger(t, rng)
		sides := AllSides(p)
		// most random problems are infeasible or unbounded: one in eight of those is enough
		if len(sides) == 0 || (mustSolve(t, p, Options{}).Status != Optimal && seed%8 != 0) {
			continue
		}
		side := sides[rng.IntN(len(sides))]
		from, to := boundAt(p, side)-float64(rng.IntN(9)), boundAt(p, side)+1+float64(rng.IntN(9))
		c, err := Parametric(context.Background(), p, nil, side, from, to)
		if errors.Is(err, ErrUnbounded) {
			continue
		}
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		checkShape(t, p.Sense(), c)
		if c.InfeasibleBefore {
			before++
		}
		if c.InfeasibleAfter {
			after++
		}
		if c.Status == Infeasible {
			nowhere++
		}
		corners += max(0, len(c.Points)-2)
		exactSweep(t, p, side, c, from, to)
		exactCorners(t, p, side, c)
		if t.Failed() {
			t.Logf("seed %d", seed)
		}
	}
	t.Logf("%d corners, %d begin and %d end within, %d infeasible", corners, before, after, nowhere)
	if corners < cases/50 || before < cases/20 || after < cases/40 || nowhere < cases/80 {
		t.Error("one-sided cases")
	}
}

// exactSweep compares a curve with rational arithmetic on a sweep and around its points.
func exactSweep(t *testing.T, p *Problem, side SideOf, c *Curve, from, to float64) {
	t.Helper()
	var looks []float64
	for k := 0; k <= 16; k++ {
		looks = append(looks, from+(to-from)*float64(k)/16)
	}
	for _, b := range c.Points {
		looks = append(looks, b.At-1e-9, b.At+1e-9)
	}
	for _, v := range looks {
		if !(v >= from && v <= to) {
			continue
		}
		exactly := exactAt(t, p, side, v)
		got, ok := c.on(v)
		if exactly == nil {
			if ok && v != c.Points[0].At && v != c.Points[len(c.Points)-1].At { // the ends themselves are rounded
				t.Errorf("%v at %v, exactly infeasible", got, v)
			}
			continue
		}
		want, _ := exactly.Float64()
		if last := len(c.Points) - 1; !ok && last >= 0 && (math.Abs(v-c.Points[0].At) < 1e-11 || math.Abs(v-c.Points[last].At) < 1e-11) {
			continue // the ends of feasibility are rounded
		}
		if !ok || !(math.Abs(got-want) <= 1e-10*(1+math.Abs(want))) {
			t.Errorf("%v (%v) at %v, exactly %v", got, ok, v, want)
		}
	}
}

// exactCorners: exact second differences around each corner are not zero, so that no corner is made up, and in the middle of each
// piece they are zero.
func exactCorners(t *testing.T, p *Problem, side SideOf, c *Curve) {
	t.Helper()
	for k := 1; k+1 < len(c.Points); k++ {
		at, gap := c.Points[k].At, 1.0/(1<<30)
		a, b, d := exactAt(t, p, side, at-gap), exactAt(t, p, side, at), exactAt(t, p, side, at+gap)
		if a == nil || b == nil || d == nil {
			t.Errorf("infeasible around the corner at %v", at)
			continue
		}
		second := new(big.Rat).Add(a, d)
		second.Sub(second, b).Sub(second, b)
		if second.Sign() == 0 {
			t.Errorf("no corner at %v", at)
		}
	}
}

// TestParametricThreeWells: the two limits and the demand of the check values by hand.
func TestParametricThreeWells(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500), atMost(0.30, springP1...), atMost(0.25, springP2...))
	c := mustCurve(t, p, nil, SideOf{false, 0, UpperSide}, 0, 1)
	// only the first spring binds and the third well pumps; both bind; only the second binds and the first well pumps
	want := []Breakpoint{
		{At: 0, Slope: 1 / springP1[2]},
		{At: 0.25 * springP1[2] / springP2[2], Value: 0.25 / springP2[2], Slope: 2969.775953},
		{At: 0.25 * springP1[0] / springP2[0], Value: 0.25 / springP2[0]},
		{At: 1, Value: 0.25 / springP2[0]},
	}
	if len(c.Points) != len(want) {
		t.Fatalf("%+v", c.Points)
	}
	for k, b := range c.Points {
		check(t, "corner", b.At, want[k].At, 1e-12)
		check(t, "total", b.Value, want[k].Value, 1e-9)
		check(t, "slope", b.Slope, want[k].Slope, 5e-7)
	}
	if !reflect.DeepEqual(c.Points[1].Binds, []SideOf{{true, 0, LowerSide}}) && !reflect.DeepEqual(c.Points[1].Binds, []SideOf{{false, 1, UpperSide}}) {
		t.Errorf("binds %v", c.Points[1].Binds)
	}
	demand := mustProblem(t, Minimise, threeWells(springP1, 600), equal(1000, 1, 1, 1))
	c = mustCurve(t, demand, mustOptimal(t, demand, Options{}), SideOf{false, 0, BothSides}, -50, 2000)
	if !c.InfeasibleBefore || !c.InfeasibleAfter || len(c.Points) != 4 {
		t.Fatalf("%+v", c)
	}
	slopes := []float64{springP1[2], springP1[0], springP1[1], springP1[1]}
	for k, b := range c.Points {
		check(t, "demand", b.At, 600*float64(k), 1e-9)
		check(t, "slope of demand", b.Slope, slopes[k], 1e-15)
	}
}

// TestParametricPlanning sweeps random planning problems densely: limits together along a direction, and one by one.
func TestParametricPlanning(t *testing.T) {
	for seed := uint64(0); seed < 12; seed++ {
		p := planningProblem(t, planningCase{wells: 20, limits: 12, sparse: seed%4 == 1, degenerate: seed%4 == 2, recharging: seed%4 == 3, seed: 1000 + seed})
		s := mustOptimal(t, p, Options{})
		moves := make([]Move, p.Rows())
		for i := range moves {
			moves[i] = Move{SideOf{false, i, UpperSide}, p.Row(i).Upper * float64(1+i%3)}
		}
		c, err := ParametricAlong(context.Background(), p, s, moves, -0.2, 0.6)
		if err != nil {
			t.Fatal(err)
		}
		checkShape(t, Maximise, c)
		l := newBoundLine(p, moves, 0)
		for k := 0; k <= 40; k++ {
			v := -0.2 + 0.8*float64(k)/40
			q, _ := l.at(v)
			want := mustOptimal(t, q, Options{}).Objective
			if got, ok := c.on(math.Min(math.Max(v, -0.2), 0.6)); !ok || !near(got, want, 1e-10) {
				t.Errorf("seed %d at %v: %v, want %v", seed, v, got, want)
			}
		}
		again, err := ParametricAlong(context.Background(), p, s, moves, -0.2, 0.6)
		if err != nil || !reflect.DeepEqual(c, again) {
			t.Errorf("another curve the second time: %v", err)
		}
	}
}

// TestParametricUnits: the corners in other units.
func TestParametricUnits(t *testing.T) {
	base := planningProblem(t, planningCase{wells: 20, limits: 12, degenerate: true, seed: 1050})
	u := base.Row(0).Upper
	want := mustCurve(t, base, nil, SideOf{false, 0, UpperSide}, 0, 2*u)
	for _, f := range [][2]float64{{1e6, 1}, {1e-6, 1}, {1, 1e6}, {1, 1e-6}, {1e-6, 1e-6}} {
		p := base.Clone()
		for i := 0; i < p.Rows(); i++ {
			for j := range p.row(i) {
				p.row(i)[j] *= f[0]
			}
			p.rowUpper[i] *= f[0]
		}
		for j := range p.columns {
			p.columns[j].Cost *= f[1]
		}
		c := mustCurve(t, p, nil, SideOf{false, 0, UpperSide}, 0, 2*u*f[0])
		if len(c.Points) != len(want.Points) {
			t.Errorf("units %v: %d points, want %d", f, len(c.Points), len(want.Points))
			continue
		}
		for k, b := range c.Points {
			w := want.Points[k]
			if !near(b.At/f[0], w.At, 1e-9) || !near(b.Value/f[1], w.Value, 1e-10) || !near(b.Slope*f[0]/f[1], w.Slope, 1e-9) {
				t.Errorf("units %v: %+v, want %+v", f, b, w)
			}
		}
	}
}

func TestParametricRefuse(t *testing.T) {
	ctx := context.Background()
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, inf), atMost(0.30, springP1...))
	side := SideOf{false, 0, UpperSide}
	for _, span := range [][2]float64{{1, 1}, {2, 1}, {0, inf}, {math.NaN(), 1}, {0, math.NaN()}, {-math.MaxFloat64, math.MaxFloat64}} {
		if _, err := Parametric(ctx, p, nil, side, span[0], span[1]); err == nil {
			t.Errorf("%v accepted", span)
		}
	}
	if _, err := Parametric(ctx, p, nil, SideOf{false, 0, LowerSide}, 0, 1); err == nil {
		t.Error("infinite bound accepted")
	}
	if _, err := ParametricAlong(ctx, p, nil, []Move{{side, math.NaN()}}, 0, 1); err == nil {
		t.Error("NaN rate accepted")
	}
	free := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: inf}, {Upper: 1}}, atMost(1, 0, 1))
	if _, err := Parametric(ctx, free, nil, side, 0, 1); !errors.Is(err, ErrUnbounded) {
		t.Errorf("unbounded: %v", err)
	}
	none := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 1}}, atMost(1, 1), atLeast(2, 1))
	if c, err := Parametric(ctx, none, nil, side, 0, 9); err != nil || c.Status != Infeasible || len(c.Points) != 0 {
		t.Errorf("infeasible: %+v %v", c, err)
	}
	still, err := ParametricAlong(ctx, p, nil, nil, 0, 1)
	if err != nil || len(still.Points) != 2 || still.Points[0].Value != still.Points[1].Value {
		t.Errorf("no moves: %+v %v", still, err)
	}
}

// TestParametricCancelled stops a curve at every poll.
func TestParametricCancelled(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 20, limits: 10, degenerate: true, seed: 1070})
	u := p.Row(0).Upper
	for k := 0; ; k++ {
		_, err := Parametric(&afterPolls{context.Background(), k}, p, nil, SideOf{false, 0, UpperSide}, 0, 3*u)
		if err == nil {
			if k < 10 {
				t.Errorf("only %d polls", k)
			}
			return
		}
		var status *StatusError
		if !errors.As(err, &status) || status.Status != Interrupted {
			t.Fatalf("poll %d: %v", k, err)
		}
	}
}
