package convex

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
	"time"
)

func mustNearest(t testing.TB, p *Problem, s *Solution, target, scale []float64) *Tie {
	t.Helper()
	tie, err := Nearest(context.Background(), p, s, target, scale)
	if err != nil {
		t.Fatal(err)
	}
	return tie
}

// optimaOf returns p with the objective held at its optimum by a row, so that its points are the optima, to the solver's tolerance.
func optimaOf(t *testing.T, p *Problem, value float64) *Problem {
	t.Helper()
	q := p.Clone()
	a := make([]float64, p.Columns())
	for j := range a {
		a[j] = p.Column(j).Cost
	}
	if math.Abs(value) < rounding { // a bound of rounding size would be taken for the size of all bounds
		value = 0
	}
	r := Row{Coefficients: a, Lower: value, Upper: inf}
	if p.Sense() == Minimise {
		r.Lower, r.Upper = -inf, value
	}
	if _, err := q.AddRow(r); err != nil {
		t.Fatal(err)
	}
	return q
}

// againstAllOptima checks a tie by linear programmes over all optima, which know nothing of active sets: the nearest point is the one
// from which no optimum lies in a direction of falling distance; and it is the only one when no column has room.
func againstAllOptima(t *testing.T, p *Problem, tie *Tie, target, scale []float64) {
	t.Helper()
	x := tie.Solution.X
	q := optimaOf(t, p, tie.Solution.Objective)
	q.sense = Minimise
	here, size := 0.0, 0.0
	for j := range x {
		g := (x[j] - target[j]) / (scale[j] * scale[j])
		here += g * x[j]
		size += math.Abs(g * x[j])
		q.columns[j].Cost = g
	}
	s := mustSolve(t, q, Options{})
	if s.Status != Optimal || !(s.Objective >= here-1e-8*(1+size+math.Abs(s.Objective))) {
		t.Errorf("another optimum is nearer: %v, %v below %v, at %v, not %v", s.Status, s.Objective, here, s.X, x)
	}
	room := false
	for j := range x {
		for k := range x {
			q.columns[k].Cost = 0
		}
		for _, sign := range []float64{1, -1} {
			q.columns[j].Cost = sign
			s := mustSolve(t, q, Options{})
			room = room || s.Status == Unbounded || math.Abs(s.X[j]-x[j]) > 1e-6*math.Max(1, math.Abs(x[j]))
		}
	}
	if tie.Unique == room {
		t.Errorf("unique %v, room for others %v", tie.Unique, room)
	}
}

// TestNearestEqualWells: by hand. Three equal wells share what the limit leaves so that each moves by the same, or, with scales, in
// proportion to their squares; one that would go beyond its cap stays at it.
func TestNearestEqualWells(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 10), atMost(12, 1, 1, 1), atMost(24, 2, 2, 2))
	s := mustOptimal(t, p, Options{})
	for _, c := range []struct {
		target, scale, want []float64
		distance            float64
	}{
		{[]float64{1, 2, 3}, nil, []float64{3, 4, 5}, math.Sqrt(12)},
		{[]float64{4, 4, 4}, nil, []float64{4, 4, 4}, 0},
		{[]float64{9, 0, 0}, []float64{1, 1, 1}, []float64{10, 1, 1}, math.Sqrt(3)},
		{[]float64{0, 9.5, 0}, nil, []float64{5.0 / 6, 10.0 - 1.0/6 + 0.5, 5.0 / 6}, 0},
		{[]float64{0, 0, 0}, []float64{1, 2, 1}, []float64{2, 8, 2}, math.Sqrt(24)},
		{[]float64{20, 0, 0}, nil, []float64{10, 1, 1}, math.Sqrt(102)},
		{[]float64{-5, 0, 30}, nil, []float64{0, 2, 10}, 0},
	} {
		tie := mustNearest(t, p, s, c.target, c.scale)
		if c.distance == 0 { // worked out below
			c.want, c.distance = sharedByHand(c.target)
		}
		for j, x := range tie.Solution.X {
			check(t, "rate", x, c.want[j], 1e-12)
		}
		check(t, "distance", tie.Distance, c.distance, 1e-12)
		check(t, "total", tie.Solution.Objective, 12, 1e-12)
		if tie.Unique {
			t.Error("called unique")
		}
	}
}

// sharedByHand shares 12 among three wells with 0 <= x <= 10, nearest to the target: x = target + shift cut to the bounds, with the
// shift found by halving.
func sharedByHand(target []float64) (x []float64, distance float64) {
	low, high := -100.0, 100.0
	x = make([]float64, 3)
	for k := 0; k < 200; k++ {
		shift, sum := (low+high)/2, 0.0
		for j := range x {
			x[j] = math.Min(10, math.Max(0, target[j]+shift))
			sum += x[j]
		}
		if sum < 12 {
			low = shift
		} else {
			high = shift
		}
	}
	for j := range x {
		distance = math.Hypot(distance, x[j]-target[j])
	}
	return x, distance
}

// TestNearestUnique: the plan of the check values is the only one, whatever the target.
func TestNearestUnique(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500), atMost(0.30, springP1...), atMost(0.25, springP2...))
	s := mustOptimal(t, p, Options{})
	tie := mustNearest(t, p, s, []float64{100, 100, 100}, nil)
	if !tie.Unique || tie.Other != nil || !reflect.DeepEqual(tie.Solution.X, s.X) {
		t.Errorf("%+v", tie)
	}
	check(t, "distance", tie.Distance, math.Sqrt(math.Pow(s.X[0]-100, 2)+1e4+math.Pow(s.X[2]-100, 2)), 1e-9)
}

// TestNearestInteger checks ties of small problems full of them by brute force.
func TestNearestInteger(t *testing.T) {
	cases := 1200
	if long() {
		cases = 30000
	}
	ties, unique := 0, 0
	for seed := 0; seed < cases && !t.Failed(); seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), exactStream()+300))
		p := randomInteger(t, rng)
		if seed%2 == 0 { // a flat objective
			for j := range p.columns {
				p.columns[j].Cost = float64(rng.IntN(2))
			}
		}
		s := mustSolve(t, p, Options{})
		if s.Status != Optimal {
			continue
		}
		target, scale := make([]float64, p.Columns()), make([]float64, p.Columns())
		for j := range target {
			target[j], scale[j] = float64(rng.IntN(11)-5), float64(1+rng.IntN(3))
		}
		tie, err := Nearest(context.Background(), p, s, target, scale)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		if !near(tie.Solution.Objective, s.Objective, 1e-11) && math.Abs(tie.Solution.Objective-s.Objective) > 1e-11 {
			t.Errorf("seed %d: objective %v, want %v", seed, tie.Solution.Objective, s.Objective)
		}
		againstAllOptima(t, p, tie, target, scale)
		if t.Failed() {
			t.Logf("seed %d", seed)
		}
		if tie.Unique {
			unique++
		} else {
			ties++
		}
	}
	t.Logf("%d ties, %d unique", ties, unique)
	if ties < cases/10 || unique < cases/10 {
		t.Error("one-sided cases")
	}
}

// tiedPlanning is a planning problem with wells in groups that every limit sees alike.
func tiedPlanning(t testing.TB, wells, limits int, seed uint64) (*Problem, []float64) {
	base := planningProblem(t, planningCase{wells: wells, limits: limits, seed: seed})
	rng := rand.New(rand.NewPCG(seed, 3))
	columns, target := make([]Column, wells), make([]float64, wells)
	for j := range columns {
		columns[j] = base.Column(j - j%4)
		columns[j].Upper *= 0.5 + rng.Float64()
		target[j] = columns[j].Upper * rng.Float64()
	}
	p := mustProblem(t, Maximise, columns)
	for i := 0; i < limits; i++ {
		r := base.Row(i)
		for j := range r.Coefficients {
			r.Coefficients[j] = r.Coefficients[j-j%4]
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return p, target
}

// TestNearestPlanning: groups of equal wells in planning problems, by brute force; in other units of limits and cost the same plan,
// in other units of rates the same plan in those units.
func TestNearestPlanning(t *testing.T) {
	ties := 0
	for seed := uint64(0); seed < 10; seed++ {
		p, target := tiedPlanning(t, 24, 9, 1100+seed)
		s := mustOptimal(t, p, Options{})
		tie := mustNearest(t, p, s, target, ones(24))
		if !tie.Unique {
			ties++
		}
		if !near(tie.Solution.Objective, s.Objective, 1e-11) {
			t.Errorf("seed %d: objective %v, want %v", seed, tie.Solution.Objective, s.Objective)
		}
		againstAllOptima(t, p, tie, target, ones(24))
		if again := mustNearest(t, p, s, target, nil); !reflect.DeepEqual(again, tie) {
			t.Errorf("seed %d: another answer the second time", seed)
		}
		for _, f := range []float64{1e6, 1e-6} {
			q, want, moved := p.Clone(), mustNearest(t, p, s, target, nil).Solution.X, make([]float64, len(target))
			for i, row := range p.a {
				for j, v := range row {
					q.a[i][j] = v / f
				}
			}
			for j := range q.columns {
				q.columns[j].Lower, q.columns[j].Upper, moved[j] = q.columns[j].Lower*f, q.columns[j].Upper*f, target[j]*f
			}
			got := mustNearest(t, q, mustOptimal(t, q, Options{}), moved, nil)
			for j, x := range got.Solution.X {
				if !(math.Abs(x/f-want[j]) <= 1e-8*(1+want[j])) {
					t.Errorf("seed %d, rates times %g: well %d at %v, want %v", seed, f, j, x/f, want[j])
				}
			}
			for i, row := range p.a {
				for j, v := range row {
					q.a[i][j] = v * f
				}
			}
			copy(q.columns, p.columns)
			for i := range q.rowUpper {
				q.rowUpper[i] = p.rowUpper[i] * f
			}
			got = mustNearest(t, q, mustOptimal(t, q, Options{}), target, nil)
			for j, x := range got.Solution.X {
				if !(math.Abs(x-want[j]) <= 1e-8*(1+want[j])) {
					t.Errorf("seed %d, limits times %g: well %d at %v, want %v", seed, f, j, x, want[j])
				}
			}
		}
	}
	if ties < 8 {
		t.Errorf("only %d ties", ties)
	}
}

// TestNearestFarTarget: a target of another size loses digits in proportion and no more.
func TestNearestFarTarget(t *testing.T) {
	p, target := tiedPlanning(t, 24, 9, 1150)
	s := mustOptimal(t, p, Options{})
	for _, f := range []float64{1e3, 1e6, -1e6, 0} {
		far := make([]float64, len(target))
		for j := range far {
			far[j] = f * target[j]
		}
		tie := mustNearest(t, p, s, far, nil)
		if !Certify(p, tie.Solution).Accepted {
			t.Errorf("target times %g refused", f)
		}
	}
}

func TestCheckTieRefuses(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 10), atMost(12, 1, 1, 1))
	s := mustOptimal(t, p, Options{})
	target := []float64{1, 2, 3}
	for _, spoil := range []func(*Tie){
		func(c *Tie) { c.Solution.X[0] += 1e-3; c.Solution.X[1] -= 1e-3 },
		func(c *Tie) { c.RowPull[0] *= 1.001 },
		func(c *Tie) { c.RowPull[0] = 0 },
		func(c *Tie) { c.Solution.X = []float64{0, 2, 10} },
		func(c *Tie) { c.RowPull[0] = math.NaN() },
	} {
		tie := mustNearest(t, p, s, target, nil)
		spoil(tie)
		if CheckTie(p, tie, target, ones(3)) == nil {
			t.Errorf("accepted %+v", tie)
		}
	}
}

func TestNearestRefuse(t *testing.T) {
	ctx := context.Background()
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 10), atMost(12, 1, 1, 1))
	s := mustOptimal(t, p, Options{})
	for _, v := range []float64{math.NaN(), inf, -inf} {
		if _, err := Nearest(ctx, p, s, []float64{0, v, 0}, nil); err == nil {
			t.Errorf("target %v accepted", v)
		}
	}
	for _, v := range []float64{math.NaN(), inf, 0, -1} {
		if _, err := Nearest(ctx, p, s, []float64{0, 0, 0}, []float64{1, 1, v}); err == nil {
			t.Errorf("scale %v accepted", v)
		}
	}
	if _, err := Nearest(ctx, p, &Solution{Status: Unbounded}, []float64{0, 0, 0}, nil); !errors.Is(err, ErrNotOptimal) {
		t.Errorf("not an optimum: %v", err)
	}
	defer func() {
		if recover() == nil {
			t.Error("wrong length accepted")
		}
	}()
	_, _ = Nearest(ctx, p, s, []float64{0}, nil)
}

// TestNearestCancelled stops at every poll.
func TestNearestCancelled(t *testing.T) {
	p, target := tiedPlanning(t, 40, 12, 1160)
	s := mustOptimal(t, p, Options{})
	for k := 0; ; k++ {
		_, err := Nearest(&afterPolls{context.Background(), k}, p, s, target, nil)
		if err == nil {
			if k < 5 {
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

// TestNearestFast holds 300 wells in 75 groups to a time that a page may wait for; the bound is ten times what was measured.
func TestNearestFast(t *testing.T) {
	p, target := tiedPlanning(t, 300, 40, 1170)
	s := mustOptimal(t, p, Options{})
	begin := time.Now()
	tie := mustNearest(t, p, s, target, nil)
	took := time.Since(begin)
	t.Logf("%d steps, unique %v, %v", tie.Steps, tie.Unique, took)
	if took > 3*time.Second {
		t.Errorf("took %v", took)
	}
}

// TestNearestManyTies checks problems of middle size in which almost everything is tied.
func TestNearestManyTies(t *testing.T) {
	cases := 80
	if long() {
		cases = 3000
	}
	ties := 0
	for seed := 0; seed < cases && !t.Failed(); seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 1300))
		p := manyTies(t, rng)
		for j := range p.columns {
			if seed%3 > 0 {
				p.columns[j].Cost = float64(rng.IntN(seed % 3 * 2))
			}
			if p.columns[j].Lower == -inf && seed%2 == 0 {
				p.columns[j].Lower = -float64(rng.IntN(3))
			}
		}
		s := mustSolve(t, p, Options{})
		if s.Status != Optimal {
			continue
		}
		target, scale := make([]float64, p.Columns()), make([]float64, p.Columns())
		for j := range target {
			target[j], scale[j] = float64(rng.IntN(9)-2), float64(int(1)<<rng.IntN(3))
		}
		tie, err := Nearest(context.Background(), p, s, target, scale)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		if !tie.Unique {
			ties++
		}
		if seed%8 == 0 {
			againstAllOptima(t, p, tie, target, scale)
		}
		if t.Failed() {
			t.Logf("seed %d", seed)
		}
	}
	t.Logf("%d ties", ties)
	if ties < cases/8 {
		t.Error("one-sided cases")
	}
}

// TestNearestLeastCost: the demand of 200 equal wells by hand: all move by the same from their target until their caps.
func TestNearestLeastCost(t *testing.T) {
	const wells = 200
	columns, a, target := make([]Column, wells), make([]float64, wells), make([]float64, wells)
	sum, rng := 0.0, rand.New(rand.NewPCG(13, 1))
	for j := range columns {
		columns[j], a[j] = Column{Cost: 0.1, Upper: 1000}, 1
		target[j] = 300 + 400*rng.Float64()
		sum += target[j]
	}
	p := mustProblem(t, Minimise, columns, equal(sum+wells*50, a...))
	tie := mustNearest(t, p, mustOptimal(t, p, Options{}), target, nil)
	for j, x := range tie.Solution.X {
		check(t, "rate", x, target[j]+50, 1e-9)
	}
	check(t, "distance", tie.Distance, 50*math.Sqrt(wells), 1e-9)
	if tie.Unique || tie.Other == nil {
		t.Error("called unique")
	}
}

// TestNearestNearlyEqualLimits: two limits that differ in their ninth digit and meet in the plan; the answer must be certified or
// refused, and here it can be certified.
func TestNearestNearlyEqualLimits(t *testing.T) {
	for _, apart := range []float64{1e-3, 1e-6, 1e-9, 1e-12, 0} {
		p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1 - 1e-3}, 10), atMost(12, 1, 1, 2), atMost(12+4*apart, 1, 1+apart, 2), atMost(12, 1+apart, 1, 2))
		s := mustOptimal(t, p, Options{})
		tie, err := Nearest(context.Background(), p, s, []float64{1, 7, 0}, nil)
		if err != nil {
			t.Errorf("apart %g: %v", apart, err)
			continue
		}
		if !near(tie.Solution.Objective, s.Objective, 1e-10) {
			t.Errorf("apart %g: %v, want %v", apart, tie.Solution.Objective, s.Objective)
		}
	}
}

// TestNearestEveryPlan takes a flat objective, so that every feasible plan is an optimum, and asks for the one nearest to all caps:
// many limits and bounds end up active.
func TestNearestEveryPlan(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 300, limits: 40, sparse: true, seed: 1180})
	target, scale := make([]float64, 300), make([]float64, 300)
	for j := range p.columns {
		p.columns[j].Cost = 0
		target[j], scale[j] = p.columns[j].Upper, p.columns[j].Upper
	}
	tie := mustNearest(t, p, mustOptimal(t, p, Options{}), target, scale)
	binding := 0
	for i, pull := range tie.RowPull {
		if pull > 0 || math.IsNaN(pull) {
			t.Errorf("an upper limit pulls upwards: row %d, %v", i, pull)
		}
		if pull < 0 {
			binding++
			if !near(tie.Solution.RowValue[i], p.rowUpper[i], 1e-11) {
				t.Errorf("row %d pulls and does not bind", i)
			}
		}
	}
	t.Logf("%d steps, %d limits bind", tie.Steps, binding)
	if tie.Unique || binding < 5 {
		t.Errorf("unique %v, %d limits bind", tie.Unique, binding)
	}
}
