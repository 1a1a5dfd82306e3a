package convex

import (
	"context"
	"fmt"
	"math"
	"math/big"
	"math/rand/v2"
	"testing"
)

// plainPlans and exactPlans are the numbers of random planning problems: those of the second kind are small, and compared with rational
// arithmetic. SPRINGBOUND_LONG=1 takes all, the default run the first tenth of the exact ones and a thirtieth of the others.
const (
	plainPlans = 9500
	exactPlans = 500
)

// variety says what is awkward about a random planning problem.
type variety struct {
	twins       bool // wells and limits repeat
	emptyColumn bool // wells that no limit feels
	emptyRow    bool // limits that no well reaches
	noHeadroom  bool // limits that are used up already
	equations   bool // sums of wells that are given, some of them twice
	demand      bool // least cost of a demand instead of largest yield
	impossible  bool // more asked for than there is, or a limit overdrawn already
	units       int  // 0 none, 1 of rows, 2 of columns, 3 of everything, 4 of rows and columns one by one
}

func varietyOf(rng *rand.Rand) variety {
	one := func(in int) bool { return rng.IntN(in) == 0 }
	return variety{twins: one(3), emptyColumn: one(5), emptyRow: one(5), noHeadroom: one(4), equations: one(3), demand: one(3), impossible: one(5),
		units: max(0, rng.IntN(8)-3)}
}

// manyPlan makes a problem of wells x limits with responses that fall with distance, quotas and demands. Whole makes all numbers dyadic
// with few digits, units included, so that nothing is rounded.
func manyPlan(t testing.TB, rng *rand.Rand, v variety, wells, limits int, whole bool) *Problem {
	short := func(x float64) float64 {
		if whole {
			return math.Round(64*x) / 64
		}
		return x
	}
	columns, at := make([]Column, wells), make([][2]float64, wells)
	for j := range columns {
		at[j] = [2]float64{rng.Float64(), rng.Float64()}
		columns[j] = Column{Cost: 1, Upper: short(1 + 9*rng.Float64())}
		if v.demand {
			columns[j].Cost = short(0.5 + rng.Float64())
		}
		if v.twins && j > 0 && rng.IntN(2) == 0 {
			at[j], columns[j] = at[j-1], columns[j-1]
		}
		if rng.IntN(12) == 0 {
			columns[j].Upper = 0 // a well out of service
		}
	}
	empty := make([]bool, wells)
	for j := range empty {
		empty[j] = v.emptyColumn && rng.IntN(4) == 0
	}
	sense := Maximise
	if v.demand {
		sense = Minimise
	}
	p := mustProblem(t, sense, columns)
	add := func(r Row) {
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	for i := 0; i < limits; i++ {
		if v.twins && i > 0 && rng.IntN(3) == 0 {
			add(p.Row(i - 1))
			continue
		}
		add(limitRow(rng, v, columns, at, empty, short))
	}
	addSums(rng, v, p, add, short)
	return inOtherUnits(t, rng, v, p, whole)
}

// limitRow is a drawdown limit: the response falls with the distance and is cut at a reach.
func limitRow(rng *rand.Rand, v variety, columns []Column, at [][2]float64, empty []bool, short func(float64) float64) Row {
	x, y, reach := rng.Float64(), rng.Float64(), 0.3+rng.Float64()
	a, full := make([]float64, len(columns)), 0.0
	for j := range a {
		r := math.Max(0.01, math.Hypot(x-at[j][0], y-at[j][1]))
		if r < reach && !empty[j] {
			a[j] = short(math.Log(reach / r))
		}
		full += a[j] * columns[j].Upper
	}
	limit := short(full * (0.05 + 0.6*rng.Float64()))
	switch {
	case v.emptyRow && rng.IntN(3) == 0:
		clear(a)
		limit = short(rng.Float64())
	case v.noHeadroom && rng.IntN(3) == 0:
		limit = 0
	}
	if v.impossible && rng.IntN(12) == 0 {
		limit = -short(0.1 + rng.Float64())
	}
	return atMost(limit, a...)
}

// addSums appends quotas, a demand and equations over groups of wells.
func addSums(rng *rand.Rand, v variety, p *Problem, add func(Row), short func(float64) float64) {
	group := func(in int) (a []float64, most float64) {
		a = make([]float64, p.Columns())
		for j := range a {
			if rng.IntN(in) == 0 {
				a[j] = 1
				most += p.Column(j).Upper
			}
		}
		return a, most
	}
	for k := rng.IntN(3); k > 0; k-- {
		a, most := group(3)
		add(atMost(short(most*(0.2+rng.Float64())), a...))
	}
	if v.equations {
		a, most := group(4)
		add(equal(short(most*0.3*rng.Float64()), a...))
		if rng.IntN(2) == 0 {
			r := p.Row(p.Rows() - 1)
			for j := range r.Coefficients {
				r.Coefficients[j] *= 2
			}
			add(equal(2*r.Upper, r.Coefficients...))
		}
	}
	if v.demand || v.impossible && rng.IntN(2) == 0 {
		a, most := group(1)
		share := 0.3 * rng.Float64()
		if v.impossible {
			share = 0.2 + rng.Float64()
		}
		add(atLeast(short(most*share), a...))
	}
}

// inOtherUnits rewrites p in other units, by a million either way; whole takes 2^20 instead.
func inOtherUnits(t testing.TB, rng *rand.Rand, v variety, p *Problem, whole bool) *Problem {
	million := 1e6
	if whole {
		million = 0x1p20
	}
	pick := func() float64 { return []float64{million, 1 / million}[rng.IntN(2)] }
	row, col, cost := make([]float64, p.Rows()), make([]float64, p.Columns()), 1.0
	allRows, allColumns := 1.0, 1.0
	switch v.units {
	case 1:
		allRows = pick()
	case 2:
		allColumns = pick()
	case 3:
		allRows, allColumns, cost = pick(), pick(), pick()
	}
	for i := range row {
		if row[i] = allRows; v.units == 4 && rng.IntN(2) == 0 {
			row[i] = pick()
		}
	}
	columns := make([]Column, p.Columns())
	for j := range columns {
		if col[j] = allColumns; v.units == 4 && rng.IntN(2) == 0 {
			col[j] = pick()
		}
		c := p.Column(j)
		columns[j] = Column{Cost: c.Cost * col[j] * cost, Lower: c.Lower / col[j], Upper: c.Upper / col[j]}
	}
	q := mustProblem(t, p.Sense(), columns)
	for i := range row {
		r := p.Row(i)
		for j := range r.Coefficients {
			r.Coefficients[j] *= row[i] * col[j]
		}
		r.Lower, r.Upper = r.Lower*row[i], r.Upper*row[i]
		if _, err := q.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return q
}

// rationalProof recomputes in rational arithmetic, rounding nothing, what the prices or multipliers of a solution prove when every column
// has two bounds: the distance of the objective from the bound that they set (weak duality), relative to its terms or to the
// natural unit of the objective, or that no point exists. Multipliers that meet an infinite bound of a row count as zero.
func rationalProof(p *Problem, s *Solution) (gap float64, empty bool) {
	rat := func(v float64) *big.Rat { return new(big.Rat).SetFloat64(v) }
	y, prices := s.RowPrice, s.Status == Optimal
	sign := 1.0 // multipliers of a largest value
	if prices && p.Sense() == Minimise {
		sign = -1
	}
	if !prices {
		y = s.Ray.Rows
	}
	z, top := make([]*big.Rat, p.Columns()), new(big.Rat)
	for j := range z {
		z[j] = new(big.Rat)
		if prices {
			z[j] = rat(sign * p.Column(j).Cost)
		}
	}
	take := func(v *big.Rat, lower, upper float64) {
		bound := upper
		if v.Sign() < 0 {
			bound = lower
		}
		top.Add(top, new(big.Rat).Mul(v, rat(bound)))
	}
	for i := range y {
		r, v := p.Row(i), sign*y[i]
		if v == 0 || v > 0 && math.IsInf(r.Upper, 1) || v < 0 && math.IsInf(r.Lower, -1) {
			continue
		}
		take(rat(v), r.Lower, r.Upper)
		for j, a := range r.Coefficients {
			if a != 0 {
				z[j].Sub(z[j], new(big.Rat).Mul(rat(v), rat(a)))
			}
		}
	}
	terms := 0.0
	for j := range z {
		c := p.Column(j)
		take(z[j], c.Lower, c.Upper)
		if prices {
			top.Sub(top, new(big.Rat).Mul(rat(sign*c.Cost), rat(s.X[j])))
			terms += math.Abs(c.Cost * s.X[j])
		}
	}
	off, _ := top.Float64()
	if !prices {
		return 0, top.Sign() < 0
	}
	return share(math.Abs(off), math.Max(terms, measure(p).worth)), false
}

// planTally counts how the problems ended.
type planTally struct {
	optimal, infeasible, exact, agreed, undecided int
	worst                                         float64
}

func (c planTally) String() string {
	return fmt.Sprintf("%d optimal and %d infeasible, all certified; %d compared with the exact optimum; second method: %d agree, %d undecided; largest gap of the rational proof %.1e",
		c.optimal, c.infeasible, c.exact, c.agreed, c.undecided, c.worst)
}

// judge solves p, asks for a certificate and for the rational proof.
func (c *planTally) judge(t *testing.T, name string, p *Problem) *Solution {
	t.Helper()
	s := mustSolve(t, p, Options{})
	if v := Certify(p, s); (s.Status != Optimal && s.Status != Infeasible) || !v.Accepted {
		t.Errorf("%s: %v, %s", name, s.Status, v.Reason)
		return nil
	}
	gap, empty := rationalProof(p, s)
	c.worst = math.Max(c.worst, gap)
	switch {
	case s.Status == Optimal:
		c.optimal++
		if !(gap <= CertifiedGap) {
			t.Errorf("%s: prices prove the objective to %g of its terms only", name, gap)
		}
	default:
		c.infeasible++
		if !empty {
			t.Errorf("%s: called infeasible; in rational arithmetic the multipliers prove nothing", name)
		}
	}
	return s
}

// TestManyPlansExactly compares small planning problems with their optimum in rational arithmetic.
func TestManyPlansExactly(t *testing.T) {
	var c planTally
	cases := exactPlans / 10
	if long() {
		cases = exactPlans
	}
	for seed := 0; seed < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 1001))
		v := varietyOf(rng)
		p := manyPlan(t, rng, v, 1+rng.IntN(7), rng.IntN(6), true)
		name := fmt.Sprintf("seed %d %+v", seed, v)
		s := c.judge(t, name, p)
		want, value := exactSolve(p)
		if s == nil || s.Status != want {
			t.Errorf("%s: not %v", name, want)
			continue
		}
		c.exact++
		if want != Optimal {
			continue
		}
		terms := 0.0
		for j, x := range s.X {
			terms += math.Abs(p.Column(j).Cost * x)
		}
		exactly, _ := value.Float64()
		if !(math.Abs(s.Objective-exactly) <= rounding*terms) {
			t.Errorf("%s: objective %.17g, exactly %.17g", name, s.Objective, exactly)
		}
	}
	t.Log(c)
}

// TestManyPlans solves planning problems with all that is awkward about them; the second method must not disagree, and where it stays
// undecided the rational proof, which all of them have, stands alone.
func TestManyPlans(t *testing.T) {
	var c planTally
	cases := plainPlans / 30
	if long() {
		cases = plainPlans
	}
	for seed := 0; seed < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), 1002))
		v := varietyOf(rng)
		p := manyPlan(t, rng, v, 2+rng.IntN(40), rng.IntN(25), false)
		name := fmt.Sprintf("seed %d %+v", seed, v)
		s := c.judge(t, name, p)
		if s == nil {
			continue
		}
		switch a := SecondOpinion(context.Background(), p, s); a.Verdict {
		case Agree:
			c.agreed++
		case Undecided:
			c.undecided++
		default:
			t.Errorf("%s: %s", name, a.Reason)
		}
	}
	t.Log(c)
}
