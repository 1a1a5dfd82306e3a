package convex

import (
	"math"
	"math/big"
	"math/rand/v2"
	"os"
	"strconv"
	"testing"
)

// exactSolve solves a problem in rational arithmetic: every variable is split or shifted to one that is not negative, every bound
// becomes a row, and the two-phase simplex method with smallest indices (Bland 1977) runs on the tableau. Slow and simple.
func exactSolve(p *Problem) (Status, *big.Rat) {
	x := newExact(p)
	art := x.addArtificials()
	phase := make([]*big.Rat, x.cols)
	for j := range phase {
		phase[j] = new(big.Rat)
		if j >= art {
			phase[j].SetInt64(1)
		}
	}
	if status := x.minimise(phase, x.cols); status != Optimal {
		panic("phase one is bounded")
	}
	if x.value(phase).Sign() > 0 {
		return Infeasible, nil
	}
	x.driveOut(art)
	cost := make([]*big.Rat, x.cols)
	for j := range cost {
		cost[j] = new(big.Rat)
	}
	for j := range p.columns {
		c := new(big.Rat).SetFloat64(p.columns[j].Cost)
		if p.sense == Maximise {
			c.Neg(c)
		}
		cost[2*j].Set(c)
		cost[2*j+1].Neg(c)
	}
	if x.minimise(cost, art) == Unbounded {
		return Unbounded, nil
	}
	v := x.value(cost)
	if p.sense == Maximise {
		v.Neg(v)
	}
	return Optimal, v
}

// exact is a tableau: rows of coefficients with the right-hand side last, and the basic column of each row.
type exact struct {
	cols  int
	rows  [][]*big.Rat
	basic []int
}

// newExact writes each column as the difference of two, 2j and 2j+1, and each finite bound as a row with a slack.
func newExact(p *Problem) *exact {
	type line struct {
		a     []float64
		right float64
		slack int64 // +1 at most, -1 at least, 0 equal
	}
	var lines []line
	add := func(a []float64, lower, upper float64) {
		switch {
		case lower == upper:
			lines = append(lines, line{a, lower, 0})
			return
		case finite(lower):
			lines = append(lines, line{a, lower, -1})
		}
		if finite(upper) {
			lines = append(lines, line{a, upper, 1})
		}
	}
	n := p.Columns()
	for i := 0; i < p.Rows(); i++ {
		r := p.Row(i)
		add(r.Coefficients, r.Lower, r.Upper)
	}
	for j := 0; j < n; j++ {
		a := make([]float64, n)
		a[j] = 1
		add(a, p.Column(j).Lower, p.Column(j).Upper)
	}
	x := &exact{cols: 2*n + len(lines)}
	for k, l := range lines {
		row := make([]*big.Rat, x.cols+1)
		for j := range row {
			row[j] = new(big.Rat)
		}
		for j, v := range l.a {
			row[2*j].SetFloat64(v)
			row[2*j+1].Neg(row[2*j])
		}
		row[2*n+k].SetInt64(l.slack)
		row[x.cols].SetFloat64(l.right)
		if row[x.cols].Sign() < 0 {
			for _, v := range row {
				v.Neg(v)
			}
		}
		x.rows = append(x.rows, row)
	}
	return x
}

func (x *exact) addArtificials() int {
	first, m := x.cols, len(x.rows)
	for i, row := range x.rows {
		right := row[first]
		row = row[:first]
		for k := 0; k < m; k++ {
			v := new(big.Rat)
			if k == i {
				v.SetInt64(1)
			}
			row = append(row, v)
		}
		x.rows[i] = append(row, right)
		x.basic = append(x.basic, first+i)
	}
	x.cols += m
	return first
}

func (x *exact) value(cost []*big.Rat) *big.Rat {
	sum := new(big.Rat)
	for i, j := range x.basic {
		sum.Add(sum, new(big.Rat).Mul(cost[j], x.rows[i][x.cols]))
	}
	return sum
}

func (x *exact) minimise(cost []*big.Rat, usable int) Status {
	for {
		q := -1
		for j := 0; j < usable && q < 0; j++ {
			d := new(big.Rat).Set(cost[j])
			for i, b := range x.basic {
				d.Sub(d, new(big.Rat).Mul(cost[b], x.rows[i][j]))
			}
			if d.Sign() < 0 {
				q = j
			}
		}
		if q < 0 {
			return Optimal
		}
		p, least := -1, new(big.Rat)
		for i, row := range x.rows {
			if row[q].Sign() <= 0 {
				continue
			}
			r := new(big.Rat).Quo(row[x.cols], row[q])
			if c := r.Cmp(least); p < 0 || c < 0 || (c == 0 && x.basic[i] < x.basic[p]) {
				p, least = i, r
			}
		}
		if p < 0 {
			return Unbounded
		}
		x.pivot(p, q)
	}
}

func (x *exact) pivot(p, q int) {
	by := new(big.Rat).Inv(x.rows[p][q])
	for _, v := range x.rows[p] {
		v.Mul(v, by)
	}
	for i, row := range x.rows {
		if i == p || row[q].Sign() == 0 {
			continue
		}
		f := new(big.Rat).Set(row[q])
		for j, v := range row {
			v.Sub(v, new(big.Rat).Mul(f, x.rows[p][j]))
		}
	}
	x.basic[p] = q
}

// driveOut takes artificial columns out of the basis, or drops their rows, which are then empty.
func (x *exact) driveOut(art int) {
	for i := 0; i < len(x.rows); i++ {
		if x.basic[i] < art {
			continue
		}
		q := -1
		for j := 0; j < art && q < 0; j++ {
			if x.rows[i][j].Sign() != 0 {
				q = j
			}
		}
		if q >= 0 {
			x.pivot(i, q)
			continue
		}
		x.rows = append(x.rows[:i], x.rows[i+1:]...)
		x.basic = append(x.basic[:i], x.basic[i+1:]...)
		i--
	}
}

// randomInteger makes a small problem with entries of a few units, so that ties, zeros and dependent rows are common.
func randomInteger(t testing.TB, rng *rand.Rand) *Problem {
	n, m := 1+rng.IntN(6), rng.IntN(7)
	whole := func(span int) float64 { return float64(rng.IntN(2*span+1) - span) }
	span := 1 + rng.IntN(4)
	columns := make([]Column, n)
	for j := range columns {
		columns[j] = Column{Cost: whole(span), Upper: inf}
		switch rng.IntN(8) {
		case 0:
			columns[j].Lower = -inf
		case 1:
			columns[j].Lower, columns[j].Upper = -inf, whole(span)
		case 2, 3, 4:
			columns[j].Lower = whole(span)
			columns[j].Upper = columns[j].Lower + float64(rng.IntN(4))
		}
	}
	p := mustProblem(t, Sense(rng.IntN(2)), columns)
	for i := 0; i < m; i++ {
		a := make([]float64, n)
		for j := range a {
			a[j] = whole(span)
		}
		r := atMost(whole(span), a...)
		switch rng.IntN(5) {
		case 0:
			r.Lower = r.Upper
		case 1:
			r.Lower, r.Upper = r.Upper, inf
		case 2:
			r.Lower = r.Upper - float64(rng.IntN(4))
		}
		if i > 0 && rng.IntN(6) == 0 {
			r.Coefficients = p.Row(i - 1).Coefficients
		}
		if _, err := p.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	return p
}

// exactStream is 5 unless SPRINGBOUND_EXACT_STREAM names another stream of random problems.
func exactStream() uint64 {
	if v, err := strconv.ParseUint(os.Getenv("SPRINGBOUND_EXACT_STREAM"), 10, 64); err == nil {
		return v
	}
	return 5
}

// TestExactSmall compares status and optimum with rational arithmetic on problems full of ties.
func TestExactSmall(t *testing.T) {
	count := map[Status]int{}
	cases := 2000
	if long() {
		cases = 30_000
	}
	for seed := 0; seed < cases; seed++ {
		rng := rand.New(rand.NewPCG(uint64(seed), exactStream()))
		p := randomInteger(t, rng)
		want, value := exactSolve(p)
		s := mustSolve(t, p, Options{})
		count[want]++
		if s.Status != want {
			t.Fatalf("seed %d: %v, want %v", seed, s.Status, want)
		}
		if c := Certify(p, s); !c.Accepted {
			t.Fatalf("seed %d: certificate of %v refused: %s", seed, want, c.Reason)
		}
		if want != Optimal {
			continue
		}
		exactly, _ := value.Float64()
		if math.Abs(s.Objective-exactly) > rounding*math.Max(1, math.Abs(exactly)) {
			t.Fatalf("seed %d: objective %.17g, want %.17g", seed, s.Objective, exactly)
		}
	}
	t.Logf("%d optimal, %d infeasible, %d unbounded", count[Optimal], count[Infeasible], count[Unbounded])
	for _, s := range []Status{Optimal, Infeasible, Unbounded} {
		if count[s] < cases/20 {
			t.Errorf("only %d cases are %v", count[s], s)
		}
	}
}

// TestTieOfLastFlip has a row that is met exactly when a well goes from its cap to zero; with rounding in the last digit the walk
// over the caps ends a hair short of the limit, which is no proof of infeasibility.
func TestTieOfLastFlip(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Lower: -inf, Upper: inf}, {Cost: 1, Upper: 1}, {Cost: 2, Upper: inf}},
		equal(0, 2, 0, -2), atMost(2, 0, 1, -2), equal(2, 1, 1, 1), atMost(1, -2, -2, 1), atMost(0, -2, -2, 1), equal(0, -2, 1, 2))
	if s := mustOptimal(t, p, Options{}); !near(s.Objective, 2, rounding) {
		t.Errorf("objective %v", s.Objective)
	}
}

// TestExactWarm changes one thing at a time in a solved problem and starts from its basis.
func TestExactWarm(t *testing.T) {
	for seed := uint64(0); seed < 150; seed++ {
		rng := rand.New(rand.NewPCG(seed, 6))
		p := randomInteger(t, rng)
		s := mustSolve(t, p, Options{})
		for k := 0; k < 4; k++ {
			j := rng.IntN(p.Columns())
			lower := float64(rng.IntN(5) - 2)
			var err error
			switch rng.IntN(3) {
			case 0:
				err = p.SetBounds(j, lower, lower+float64(rng.IntN(3)))
			case 1:
				err = p.SetCost(j, lower)
			default:
				a := make([]float64, p.Columns())
				a[j], a[0] = 1, lower
				_, err = p.AddRow(atMost(lower, a...))
			}
			if err != nil {
				t.Fatal(err)
			}
			s = mustSolve(t, p, Options{Start: s.Basis})
			want, value := exactSolve(p)
			if s.Status != want || !Certify(p, s).Accepted {
				t.Fatalf("seed %d step %d: %v, want %v; %s", seed, k, s.Status, want, Certify(p, s).Reason)
			}
			if want == Optimal {
				exactly, _ := value.Float64()
				if math.Abs(s.Objective-exactly) > rounding*math.Max(1, math.Abs(exactly)) {
					t.Fatalf("seed %d step %d: %v, want %v", seed, k, s.Objective, exactly)
				}
			}
		}
	}
}
