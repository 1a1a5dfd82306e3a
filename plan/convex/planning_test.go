package convex

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// planningCase describes a random planning problem.
type planningCase struct {
	wells, limits int
	sparse        bool // most responses are exactly zero
	degenerate    bool // limits repeat and caps are equal
	recharging    bool // some wells recharge: rate of at most zero, no yield
	seed          uint64
}

// planningProblem makes a problem: wells and receptors at random in a square, drawdown by a logarithm cut at a radius of influence,
// limits as a share of the drawdown at full rates.
func planningProblem(t testing.TB, c planningCase) *Problem {
	rng := rand.New(rand.NewPCG(c.seed, 77))
	type point struct{ x, y float64 }
	place := func() point { return point{10000 * rng.Float64(), 10000 * rng.Float64()} }
	columns, at := make([]Column, c.wells), make([]point, c.wells)
	for j := range columns {
		at[j] = place()
		most := 200 + 2800*rng.Float64()
		if c.degenerate {
			most = 1000
		}
		columns[j] = Column{Name: fmt.Sprintf("W%d", j), Cost: 1, Upper: most}
		if c.recharging && rng.IntN(5) == 0 {
			columns[j].Cost, columns[j].Lower, columns[j].Upper = 0, -most/2, 0
		}
	}
	p := mustProblem(t, Maximise, columns)
	var last Row
	for i := 0; i < c.limits; i++ {
		if c.degenerate && i%3 == 2 {
			if _, err := p.AddRow(last); err != nil {
				t.Fatal(err)
			}
			continue
		}
		q, reach := place(), 12000.0
		if c.sparse {
			reach = 2500
		}
		row, full := make([]float64, c.wells), 0.0
		for j := range row {
			r := math.Max(1, math.Hypot(q.x-at[j].x, q.y-at[j].y))
			if r < reach {
				row[j] = math.Log(reach/r) / (2 * math.Pi * 500)
			}
			full += row[j] * math.Max(0, columns[j].Upper)
		}
		last = atMost(full*(0.1+0.5*rng.Float64()), row...)
		if _, err := p.AddRow(last); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

// oracleRate is the unit of rates [m³/d] in which the other solver sees numbers near one.
const oracleRate = 1000

// dualOptimum solves the dual of a planning problem by a solver that is not ours: with x = lower + z, the largest c'z under A z <= b,
// z <= u is the least b'y + u'v under A'y + v >= c. Rows without an entry are left out, since they stop that solver. The error is
// its own.
func dualOptimum(p *Problem) (float64, error) {
	n := p.Columns()
	var rows []Row
	for i := 0; i < p.Rows(); i++ {
		r := p.Row(i)
		for _, v := range r.Coefficients {
			if v != 0 {
				rows = append(rows, r)
				break
			}
		}
	}
	m := len(rows)
	c, a, b := make([]float64, m+2*n), mat.NewDense(n, m+2*n, nil), make([]float64, n)
	start, offset := make([]int, n), 0.0
	for j := 0; j < n; j++ {
		col := p.Column(j)
		b[j] = col.Cost
		offset += col.Cost * col.Lower
		c[m+j] = (col.Upper - col.Lower) / oracleRate
		a.Set(j, m+j, 1)
		a.Set(j, m+n+j, -1)
		start[j] = m + j
	}
	for i, r := range rows {
		c[i] = r.Upper
		for j, v := range r.Coefficients {
			c[i] -= v * p.Column(j).Lower
			a.Set(j, i, v*oracleRate)
		}
	}
	// with z = 1000 z' and the value in thousands: least b'y + (u/1000)'v under 1000 A'y + v >= c, all near one
	least, _, err := lp.Simplex(c, a, b, 1e-10, start)
	return oracleRate*least + offset, err
}

// oracleAgreement is the relative difference allowed against the other solver, whose own rounding it is.
const oracleAgreement = 1e-9

// TestPlanningAgainstDual compares optima with another solver's on the dual, and asks for a certificate of each.
func TestPlanningAgainstDual(t *testing.T) {
	compared, refused := 0, 0
	for seed := uint64(0); seed < 240; seed++ {
		rng := rand.New(rand.NewPCG(seed, 1))
		c := planningCase{wells: 5 + rng.IntN(56), limits: 3 + rng.IntN(38), sparse: seed%4 == 1, degenerate: seed%4 == 2,
			recharging: seed%4 == 3, seed: seed}
		p := planningProblem(t, c)
		s := mustOptimal(t, p, Options{})
		want, err := dualOptimum(p)
		if err != nil {
			refused++
			continue
		}
		compared++
		if !near(s.Objective, want, oracleAgreement) {
			t.Errorf("%+v: %.12g, the other solver %.12g", c, s.Objective, want)
		}
	}
	t.Logf("%d compared, %d not solved by the other solver", compared, refused)
	if compared < 220 {
		t.Errorf("only %d comparisons", compared)
	}
}

func TestTighteningNeverImproves(t *testing.T) {
	for seed := uint64(0); seed < 20; seed++ {
		p := planningProblem(t, planningCase{wells: 30, limits: 15, recharging: seed%2 == 1, seed: 400 + seed})
		before := mustOptimal(t, p, Options{})
		for i := 0; i < p.Rows(); i += 4 {
			r := p.Row(i)
			if err := p.SetRowBounds(i, r.Lower, 0.9*r.Upper); err != nil {
				t.Fatal(err)
			}
			after := mustOptimal(t, p, Options{Start: before.Basis})
			if after.Objective > before.Objective*(1+rounding) {
				t.Errorf("seed %d row %d: %v became %v", seed, i, before.Objective, after.Objective)
			}
			before = after
		}
	}
}

// TestPriceIsSlope compares prices with differences of optima over a small change of each binding limit; the optimum is piecewise
// linear, so that they agree to rounding unless a corner lies in between, which a price between the two slopes allows for.
func TestPriceIsSlope(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 30, limits: 15, seed: 501})
	s := mustOptimal(t, p, Options{})
	priced := 0
	for i := 0; i < p.Rows(); i++ {
		r := p.Row(i)
		step := 1e-4 * r.Upper
		value := func(by float64) float64 {
			if err := p.SetRowBounds(i, r.Lower, r.Upper+by); err != nil {
				t.Fatal(err)
			}
			return mustOptimal(t, p, Options{}).Objective
		}
		left, right := (s.Objective-value(-step))/step, (value(step)-s.Objective)/step
		value(0)
		slack := 1e-7 * (1 + s.RowPrice[i]) // objectives near 1e4 rounded, over steps near 1e-4
		if !(s.RowPrice[i] <= left+slack && s.RowPrice[i] >= right-slack) {
			t.Errorf("row %d: price %v, slopes %v and %v", i, s.RowPrice[i], left, right)
		}
		if s.RowPrice[i] > 0 {
			priced++
		}
	}
	if priced == 0 {
		t.Error("no limit binds")
	}
}

// TestUnitsDoNotMatter scales rows, columns and all data by powers of ten.
func TestUnitsDoNotMatter(t *testing.T) {
	base := planningProblem(t, planningCase{wells: 40, limits: 20, seed: 600})
	want := mustOptimal(t, base, Options{}).Objective
	for _, c := range []struct {
		name           string
		row, col, cost func(k int) float64
	}{
		{"limits in other units", func(i int) float64 { return math.Pow(10, float64(i%13-6)) }, one, one},
		{"rates in other units", one, func(j int) float64 { return math.Pow(10, float64(j%13-6)) }, one},
		{"all rates small", one, func(int) float64 { return 1e6 }, one},
		{"all rates large", one, func(int) float64 { return 1e-6 }, one},
		{"all limits small", func(int) float64 { return 1e-6 }, one, one},
		{"all limits large", func(int) float64 { return 1e6 }, one, one},
		{"cost small", one, one, func(int) float64 { return 1e-6 }},
		{"cost large", one, one, func(int) float64 { return 1e6 }},
	} {
		t.Run(c.name, func(t *testing.T) {
			columns := make([]Column, base.Columns())
			for j := range columns {
				col := base.Column(j)
				columns[j] = Column{Cost: col.Cost * c.col(j) * c.cost(j), Lower: col.Lower / c.col(j), Upper: col.Upper / c.col(j)}
			}
			p := mustProblem(t, Maximise, columns)
			for i := 0; i < base.Rows(); i++ {
				r := base.Row(i)
				for j := range r.Coefficients {
					r.Coefficients[j] *= c.row(i) * c.col(j)
				}
				r.Upper *= c.row(i)
				if _, err := p.AddRow(r); err != nil {
					t.Fatal(err)
				}
			}
			got := mustOptimal(t, p, Options{}).Objective / c.cost(0)
			if !near(got, want, 1e-11) { // the changed units round every entry once
				t.Errorf("%.14g, want %.14g", got, want)
			}
		})
	}
}

// TestHugeNumberForNoBound: 1e9 to 1e30 in place of "no cap" must give the optimum of the problem without caps.
func TestHugeNumberForNoBound(t *testing.T) {
	for seed := uint64(0); seed < 8; seed++ {
		p := planningProblem(t, planningCase{wells: 40, limits: 20, seed: 650 + seed})
		set := func(upper float64) *Solution {
			for j := 0; j < p.Columns(); j++ {
				if err := p.SetBounds(j, 0, upper); err != nil {
					t.Fatal(err)
				}
			}
			return mustOptimal(t, p, Options{})
		}
		want := set(inf).Objective
		for _, huge := range []float64{1e9, 1e15, 1e20, 1e30} {
			if s := set(huge); !near(s.Objective, want, rounding) {
				t.Errorf("seed %d, %g for no cap: %.14g, want %.14g", seed, huge, s.Objective, want)
			}
		}
	}
}

func one(int) float64 { return 1 }

// TestWarmStart adds limits to a solved problem: the optimum is that of a cold start, with far fewer pivots.
func TestWarmStart(t *testing.T) {
	warm, cold := 0, 0
	for seed := uint64(0); seed < 10; seed++ {
		whole := planningProblem(t, planningCase{wells: 120, limits: 60, seed: 700 + seed})
		columns := make([]Column, whole.Columns())
		for j := range columns {
			columns[j] = whole.Column(j)
		}
		p := mustProblem(t, Maximise, columns)
		var s *Solution
		for i := 0; i < whole.Rows(); i++ {
			if _, err := p.AddRow(whole.Row(i)); err != nil {
				t.Fatal(err)
			}
			if i < 40 || i%5 != 0 {
				continue
			}
			o := Options{}
			if s != nil {
				o.Start = s.Basis
			}
			first := s == nil
			s = mustOptimal(t, p, o)
			full := mustOptimal(t, p, Options{})
			if !near(s.Objective, full.Objective, rounding) {
				t.Errorf("seed %d row %d: warm %v, cold %v", seed, i, s.Objective, full.Objective)
			}
			if !first {
				warm += s.Iterations
				cold += full.Iterations
			}
		}
		s = mustOptimal(t, p, Options{Start: s.Basis})
		if again := mustOptimal(t, p, Options{Start: s.Basis}); again.Iterations != 0 {
			t.Errorf("seed %d: %d pivots from the basis of the optimum", seed, again.Iterations)
		}
	}
	t.Logf("%d pivots warm, %d cold", warm, cold)
	if !(warm*3 < cold) {
		t.Errorf("%d pivots warm against %d cold", warm, cold)
	}
}

// TestHostileStart starts from places that make no basis.
func TestHostileStart(t *testing.T) {
	p := planningProblem(t, planningCase{wells: 30, limits: 15, degenerate: true, seed: 801})
	want := mustOptimal(t, p, Options{}).Objective
	rng := rand.New(rand.NewPCG(8, 1))
	for k := 0; k < 50; k++ {
		b := &Basis{columns: make([]Place, p.Columns()), rows: make([]Place, p.Rows())}
		for j := range b.columns {
			b.columns[j] = Place(rng.IntN(4))
		}
		for i := range b.rows {
			b.rows[i] = Place(rng.IntN(4))
		}
		if s := mustOptimal(t, p, Options{Start: b}); !near(s.Objective, want, rounding) {
			t.Errorf("start %d: %v, want %v", k, s.Objective, want)
		}
	}
}
