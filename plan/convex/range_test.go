package convex

import (
	"context"
	"errors"
	"math"
	"math/big"
	"math/rand/v2"
	"reflect"
	"testing"
	"time"
)

func mustRanges(t testing.TB, p *Problem, s *Solution, sides ...SideOf) []Range {
	t.Helper()
	list, err := Ranges(context.Background(), p, s, sides)
	if err != nil {
		t.Fatal(err)
	}
	return list
}

// withBound returns p with the bound of a side at v, or false when the two bounds would cross.
func withBound(p *Problem, side SideOf, v float64) (*Problem, bool) {
	l := newBoundLine(p, []Move{{side, 1}}, 0)
	l.start(side, v)
	return l.at(0)
}

// exactAt returns the optimum in rational arithmetic with a bound at v; nil when nothing is feasible.
func exactAt(t *testing.T, p *Problem, side SideOf, v float64) *big.Rat {
	t.Helper()
	q, ok := withBound(p, side, v)
	if !ok {
		return nil
	}
	status, value := exactSolve(q)
	if status == Infeasible {
		return nil
	}
	if status != Optimal {
		t.Fatalf("%v at %v", status, v)
	}
	return value
}

// exactStep is the step of the difference quotients: exact in binary, and well below the distance of corners of problems with
// entries of a few units, whose determinants are below 1e5.
const exactStep = 1.0 / (1 << 40)

// beside is how far from an end of an interval, relative to its parameter, the slope is looked at: a thousand times the rounding of
// the end.
const beside = 1e-10

// exactSide checks one side of a range against rational arithmetic: the slope by a difference quotient, then that the line goes on
// up to just before the end and does not go on just beyond.
func exactSide(t *testing.T, p *Problem, r Range, up bool) {
	t.Helper()
	sign, slope, end, kind := -1.0, r.Left, r.From, r.Below
	if up {
		sign, slope, end, kind = 1, r.Right, r.To, r.Above
	}
	at := exactAt(t, p, r.Of, r.At)
	next := exactAt(t, p, r.Of, r.At+sign*exactStep)
	if next == nil {
		if !math.IsInf(slope, 0) || end != r.At || kind.Kind != InfeasibleBeyond {
			t.Errorf("%v: infeasible at once, got slope %v to %v, %v", r.Of, slope, end, kind.Kind)
		}
		return
	}
	exactly := new(big.Rat).Sub(next, at)
	exactly.Quo(exactly, new(big.Rat).SetFloat64(sign*exactStep))
	want, _ := exactly.Float64()
	if !(math.Abs(slope-want) <= rounding*(1+math.Abs(want))) {
		t.Errorf("%v up %v: slope %v, want %v", r.Of, up, slope, want)
		return
	}
	onLine := func(v float64) (bool, *big.Rat) {
		value := exactAt(t, p, r.Of, v)
		if value == nil {
			return false, nil
		}
		line := new(big.Rat).Sub(new(big.Rat).SetFloat64(v), new(big.Rat).SetFloat64(r.At))
		line.Mul(line, exactly).Add(line, at)
		return line.Cmp(value) == 0, value
	}
	if math.IsInf(end, 0) {
		if kind.Kind != Endless {
			t.Errorf("%v: %v at infinity", r.Of, kind.Kind)
		}
		for _, far := range []float64{1, 1e3, 1e9} {
			if ok, _ := onLine(r.At + sign*far); !ok {
				t.Errorf("%v up %v: slope %v does not hold for ever", r.Of, up, slope)
			}
		}
		return
	}
	gap := beside * (1 + math.Abs(end))
	if end != r.At {
		if ok, _ := onLine(end - sign*gap); !ok {
			t.Errorf("%v up %v: slope %v of %v ends before %v", r.Of, up, slope, r.At, end)
		}
	}
	ok, value := onLine(end + sign*gap)
	if ok {
		t.Errorf("%v up %v: slope %v of %v goes on beyond %v", r.Of, up, slope, r.At, end)
	}
	if (value == nil) != (kind.Kind == InfeasibleBeyond) {
		t.Errorf("%v up %v: %v at %v, value beyond %v", r.Of, up, kind.Kind, end, value)
	}
}

// TestRangesExact compares prices and intervals of every bound with rational arithmetic on problems full of ties.
func TestRangesExact(t *testing.T) {
	cases := 80
	if long() {
		cases = 8000
	}
	kinks, ends := 0, map[EndKind]int{}
	for seed := 0; seed < cases && !t.Failed(); seed++ {
		p := randomInteger(t, rand.New(rand.NewPCG(uint64(seed), exactStream()+100)))
		s := mustSolve(t, p, Options{})
		if s.Status != Optimal {
			continue
		}
		for _, r := range mustRanges(t, p, s, AllSides(p)...) {
			exactSide(t, p, r, false)
			exactSide(t, p, r, true)
			ends[r.Below.Kind]++
			ends[r.Above.Kind]++
			if r.Kink() {
				kinks++
			}
		}
		if t.Failed() {
			t.Logf("seed %d", seed)
		}
	}
	t.Logf("%d kinks at the present bound; ends: %v", kinks, ends)
	if kinks < cases/20 || ends[SlopeChanges] < cases/3 || ends[InfeasibleBeyond] < cases/5 || ends[Endless] < cases/5 {
		t.Error("one-sided cases")
	}
}

// besideSide re-solves in floating point at, before and beyond the end of a slope. The differences are of objectives rounded to
// some 1e-14 of their terms.
func besideSide(t *testing.T, p *Problem, r Range, up bool) {
	t.Helper()
	sign, slope, end := -1.0, r.Left, r.From
	if up {
		sign, slope, end = 1, r.Right, r.To
	}
	value := func(v float64) (float64, bool) {
		q, ok := withBound(p, r.Of, v)
		if !ok {
			return 0, false
		}
		s := mustSolve(t, q, Options{})
		return s.Objective, s.Status == Optimal
	}
	kind := r.Below.Kind
	if up {
		kind = r.Above.Kind
	}
	length := math.Abs(end - r.At)
	if math.IsInf(length, 0) {
		length = 2 * (1 + math.Abs(r.At))
	}
	for _, f := range []float64{0.25, 0.5, 1} {
		if length == 0 {
			break
		}
		v, ok := value(r.At + sign*f*length*(1-1e-9))
		if want := r.Value + sign*slope*f*length*(1-1e-9); !ok || !near(v, want, 1e-10) {
			t.Errorf("%v up %v: at %v of the interval to %v: %v, want %v", r.Of, up, f, end, v, want)
		}
	}
	if kind == Endless {
		return
	}
	by := 1e-3 * (1e-3 + math.Abs(end))
	v, ok := value(end + sign*by)
	if kind == InfeasibleBeyond {
		if ok {
			t.Errorf("%v up %v: feasible beyond %v", r.Of, up, end)
		}
		return
	}
	if line := r.Value + sign*slope*(length+by); !ok || !(math.Abs(v-line) > 1e-12*math.Abs(line)) {
		t.Errorf("%v up %v: slope %v goes on beyond %v: %v on %v", r.Of, up, slope, end, v, line)
	}
}

// TestRangesThreeWells: the check values' prices hold over intervals that re-solves confirm.
func TestRangesThreeWells(t *testing.T) {
	first := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500), atMost(0.30, springP1...), atMost(0.25, springP2...))
	capped := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 600), atMost(0.30, springP1...), atMost(0.25, springP2...))
	demand := mustProblem(t, Minimise, threeWells(springP1, 600), equal(1000, 1, 1, 1))
	for _, p := range []*Problem{first, capped, demand} {
		s := mustOptimal(t, p, Options{})
		for _, r := range mustRanges(t, p, s, AllSides(p)...) {
			besideSide(t, p, r, false)
			besideSide(t, p, r, true)
		}
	}
	springs := mustRanges(t, first, mustOptimal(t, first, Options{}), SideOf{false, 0, UpperSide}, SideOf{false, 1, UpperSide})
	for i, want := range []float64{2969.775953, 1324.213347} {
		check(t, "price to the left", springs[i].Left, want, 5e-7)
		check(t, "price to the right", springs[i].Right, want, 5e-7)
	}
	// closed form: the first spring's limit may move until one of the two wells stands still, with the second spring at 0.25
	check(t, "least limit", springs[0].From, 0.25*springP1[2]/springP2[2], 1e-12)
	check(t, "largest limit", springs[0].To, 0.25*springP1[0]/springP2[0], 1e-12)
	if springs[0].Below.Binds != (SideOf{true, 0, LowerSide}) || springs[0].Above.Binds != (SideOf{true, 2, LowerSide}) {
		t.Errorf("ends: %+v %+v", springs[0].Below, springs[0].Above)
	}
	need := mustRanges(t, demand, mustOptimal(t, demand, Options{}), SideOf{false, 0, BothSides})[0]
	check(t, "price of the demand", need.Right, springP1[0], 1e-18)
	check(t, "least demand", need.From, 600, 1e-9)
	check(t, "largest demand", need.To, 1200, 1e-9)
}

// TestRangesPlanning confirms every end of planning problems by re-solves, with repeated limits, equal wells, and limits that leave
// no headroom.
func TestRangesPlanning(t *testing.T) {
	for seed := uint64(0); seed < 12; seed++ {
		c := planningCase{wells: 6 + int(seed), limits: 4 + int(seed)/2, sparse: seed%4 == 1, degenerate: seed%4 == 2, recharging: seed%4 == 3, seed: 900 + seed}
		p := planningProblem(t, c)
		s := mustOptimal(t, p, Options{})
		if seed%3 == 0 { // every limit ends exactly where the plan is, so that none leaves headroom
			for i := 0; i < p.Rows(); i++ {
				if err := p.SetRowBounds(i, -inf, s.RowValue[i]); err != nil {
					t.Fatal(err)
				}
			}
			s = mustOptimal(t, p, Options{})
		}
		for _, r := range mustRanges(t, p, s, AllSides(p)...) {
			besideSide(t, p, r, false)
			besideSide(t, p, r, true)
			if !(r.Left >= r.Right) || !(r.From <= r.At && r.At <= r.To) {
				t.Errorf("seed %d: not concave: %+v", seed, r)
			}
		}
	}
}

// TestRangesEqualWells: two equal wells with equal caps and a limit given twice. By hand: raising one of the two copies is worth
// nothing, lowering it costs as much as lowering both.
func TestRangesEqualWells(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 10), atMost(12, 1, 1, 2), atMost(12, 1, 1, 2))
	r := mustRanges(t, p, mustOptimal(t, p, Options{}), SideOf{false, 0, UpperSide})[0]
	if r.Left != 1 || r.Right != 0 || r.From != 0 || !math.IsInf(r.To, 1) {
		t.Errorf("%+v", r)
	}
	if r.Below.Kind != InfeasibleBeyond || r.Above.Kind != Endless {
		t.Errorf("%+v %+v", r.Below, r.Above)
	}
}

// TestRangesUnits: in other units of limits, rates and cost the same prices and ends, factors of powers of ten included, which
// round each entry once.
func TestRangesUnits(t *testing.T) {
	base := planningProblem(t, planningCase{wells: 14, limits: 8, degenerate: true, seed: 950})
	sides := AllSides(base)
	want := mustRanges(t, base, mustOptimal(t, base, Options{}), sides...)
	for _, f := range [][3]float64{{1e6, 1, 1}, {1e-6, 1, 1}, {1, 1e6, 1}, {1, 1e-6, 1}, {1, 1, 1e6}, {1, 1, 1e-6}, {1e-6, 1e6, 1e-6}} {
		row, col, cost := f[0], f[1], f[2]
		columns := make([]Column, base.Columns())
		for j := range columns {
			c := base.Column(j)
			columns[j] = Column{Cost: c.Cost * cost / col, Lower: c.Lower * col, Upper: c.Upper * col}
		}
		p := mustProblem(t, Maximise, columns)
		for i := 0; i < base.Rows(); i++ {
			r := base.Row(i)
			for j := range r.Coefficients {
				r.Coefficients[j] *= row / col
			}
			r.Upper *= row
			if _, err := p.AddRow(r); err != nil {
				t.Fatal(err)
			}
		}
		for k, r := range mustRanges(t, p, mustOptimal(t, p, Options{}), sides...) {
			unit := row
			if r.Of.Column {
				unit = col
			}
			for _, c := range [][2]float64{{r.Left * unit / cost, want[k].Left}, {r.Right * unit / cost, want[k].Right},
				{r.From / unit, want[k].From}, {r.To / unit, want[k].To}} {
				if !(c[0] == c[1]) && !near(c[0], c[1], 1e-9) {
					t.Errorf("%v, units %v: %v, want %v", r.Of, f, c[0], c[1])
				}
			}
			if r.Below.Kind != want[k].Below.Kind || r.Above.Kind != want[k].Above.Kind {
				t.Errorf("%v, units %v: %v %v", r.Of, f, r.Below, r.Above)
			}
		}
	}
}

// TestRangesOrder: each range is the same alone, in any order and when asked twice.
func TestRangesOrder(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 30, limits: 15, degenerate: true, seed: 960})
	s := mustOptimal(t, p, Options{})
	sides := AllSides(p)
	want := mustRanges(t, p, s, sides...)
	if !reflect.DeepEqual(want, mustRanges(t, p, s, sides...)) {
		t.Error("another answer the second time")
	}
	for k, side := range sides {
		if one, err := PriceRange(context.Background(), p, s, side); err != nil || one != want[k] {
			t.Errorf("alone %+v, among others %+v, %v", one, want[k], err)
		}
	}
}

func TestRangesRefuse(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, inf), atMost(0.30, springP1...))
	s := mustOptimal(t, p, Options{})
	for _, side := range []SideOf{{false, 1, UpperSide}, {false, -1, UpperSide}, {true, 3, UpperSide}, {true, 0, UpperSide},
		{false, 0, LowerSide}, {false, 0, BothSides}, {false, 0, Side(7)}} {
		if _, err := PriceRange(context.Background(), p, s, side); err == nil {
			t.Errorf("%v accepted", side)
		}
	}
	if _, err := PriceRange(context.Background(), p, &Solution{Status: Infeasible}, SideOf{false, 0, UpperSide}); !errors.Is(err, ErrNotOptimal) {
		t.Errorf("not an optimum: %v", err)
	}
}

// TestRangesCancelled: an interrupted call says so.
func TestRangesCancelled(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 40, limits: 20, degenerate: true, seed: 970})
	s := mustOptimal(t, p, Options{})
	finished := false
	for k := 0; k < 20000 && !finished; k += 1 + k/8 {
		_, err := Ranges(&afterPolls{context.Background(), k}, p, s, AllSides(p))
		var status *StatusError
		switch {
		case err == nil:
			finished = true
		case !errors.As(err, &status) || status.Status != Interrupted:
			t.Fatalf("poll %d: %v", k, err)
		}
	}
	if !finished {
		t.Error("never came to an end")
	}
}

// TestRangesFast holds all limits of 300 wells to a time that a page may wait for; the bound is ten times what was measured.
func TestRangesFast(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 300, limits: 40, seed: 1})
	s := mustOptimal(t, p, Options{})
	begin := time.Now()
	list := mustRanges(t, p, s, AllSides(p)...)
	took := time.Since(begin)
	t.Logf("%d bounds in %v", len(list), took)
	if took > 3*time.Second {
		t.Errorf("%d bounds took %v", len(list), took)
	}
}

func BenchmarkRanges(b *testing.B) {
	for _, degenerate := range []bool{false, true} {
		p := planningProblem(b, planningCase{wells: 300, limits: 40, degenerate: degenerate, seed: 1})
		s := mustSolve(b, p, Options{})
		for _, rowsOnly := range []bool{true, false} {
			sides := AllSides(p)
			if rowsOnly {
				sides = sides[:p.Rows()]
			}
			name := map[bool]string{false: "plain", true: "degenerate"}[degenerate] + map[bool]string{false: " all", true: " rows"}[rowsOnly]
			b.Run(name, func(b *testing.B) {
				for b.Loop() {
					mustRanges(b, p, s, sides...)
				}
			})
		}
	}
}

// TestCheckRange accepts the ranges of planning and tied problems and refuses spoiled ones.
func TestCheckRange(t *testing.T) {
	ctx := context.Background()
	checked := 0
	for seed := uint64(0); seed < 24; seed++ {
		p := manyTies(t, rand.New(rand.NewPCG(seed, 1200)))
		if seed%2 == 0 {
			p = planningProblem(t, planningCase{wells: 12, limits: 9, degenerate: true, seed: 1200 + seed})
		}
		s := mustSolve(t, p, Options{})
		if s.Status != Optimal {
			continue
		}
		sides := AllSides(p)
		for k, r := range mustRanges(t, p, s, sides...) {
			if k%9 != int(seed)%9 && !long() {
				continue
			}
			checked++
			if err := CheckRange(ctx, p, r); err != nil {
				t.Errorf("seed %d: %v", seed, err)
			}
		}
	}
	t.Logf("%d ranges", checked)
	if checked < 100 {
		t.Errorf("only %d ranges", checked)
	}
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500), atMost(0.30, springP1...), atMost(0.25, springP2...))
	good := mustRanges(t, p, mustOptimal(t, p, Options{}), SideOf{false, 0, UpperSide})[0]
	if err := CheckRange(ctx, p, good); err != nil {
		t.Fatal(err)
	}
	for k, spoil := range []func(*Range){
		func(r *Range) { r.Left *= 1.0001 },
		func(r *Range) { r.Right *= 0.9999 },
		func(r *Range) { r.Value++ },
		func(r *Range) { r.From *= 1.01 },
		func(r *Range) { r.To *= 0.99 },
		func(r *Range) { r.To *= 1.01 },
		func(r *Range) { r.To, r.Above.Kind = inf, Endless },
		func(r *Range) { r.Below.Kind = InfeasibleBeyond },
		func(r *Range) { r.Right = math.NaN() },
	} {
		bad := good
		spoil(&bad)
		if CheckRange(ctx, p, bad) == nil {
			t.Errorf("spoiled range %d accepted", k)
		}
	}
}

// TestRangesHugeCaps: 1e9 to 1e30 in place of "no cap" must give the ranges of the problem without caps, and for the caps themselves
// the rates at which they would begin to matter.
func TestRangesHugeCaps(t *testing.T) {
	for seed := uint64(0); seed < 6; seed++ {
		p := planningProblem(t, planningCase{wells: 12, limits: 8, degenerate: seed%2 == 1, seed: 1400 + seed})
		set := func(upper float64) []Range {
			for j := 0; j < p.Columns(); j++ {
				if err := p.SetBounds(j, 0, upper); err != nil {
					t.Fatal(err)
				}
			}
			return mustRanges(t, p, mustOptimal(t, p, Options{}), AllSides(p)...)
		}
		want := map[SideOf]Range{}
		for _, r := range set(inf) {
			want[r.Of] = r
		}
		caps := map[SideOf]float64{}
		for _, huge := range []float64{1e6, 1e9, 1e15, 1e30} {
			for _, r := range set(huge) {
				w, ok := want[r.Of]
				switch {
				case !ok:
					if last, ok := caps[r.Of]; ok && !(math.Abs(r.From-last) <= 1e-9*(1+last)) {
						t.Errorf("seed %d, %g for no cap: %v matters from %v, before from %v", seed, huge, r.Of, r.From, last)
					}
					caps[r.Of] = r.From
				case !near(r.Left, w.Left, 1e-9) || !near(r.Right, w.Right, 1e-9) || (r.From != w.From && !near(r.From, w.From, 1e-9)):
					t.Errorf("seed %d, %g for no cap: %+v, want %+v", seed, huge, r, w)
				case r.To != w.To && !near(r.To, w.To, 1e-9) && !(r.To > 1e3*r.At):
					t.Errorf("seed %d, %g for no cap: %+v, want %+v", seed, huge, r, w)
				}
			}
		}
	}
}
