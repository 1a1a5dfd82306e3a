package sparse

import (
	"context"
	"errors"
	"math"
	"slices"
	"testing"
)

func TestRefusesWhatIsNotPositiveDefinite(t *testing.T) {
	p := jitteredMesh(45, 40, 1, 11)
	s := mustAnalyse(t, p, Options{})
	n := p.Pattern.N
	for _, row := range []int{0, 1, 17, n / 2, n - 1} {
		for name, value := range map[string]float64{"negative": -1, "zero": 0, "NaN": math.NaN(), "infinite": math.Inf(1)} {
			values := slices.Clone(p.Values)
			values[p.Pattern.Ptr[row]] = value
			_, err := s.Factor(context.Background(), values)
			var refused *NotPositiveDefinite
			if !errors.As(err, &refused) {
				t.Fatalf("%s diagonal entry in row %d: error %v", name, row, err)
			}
			if refused.Row != row {
				t.Errorf("%s diagonal entry in row %d: row %d is named", name, row, refused.Row)
			}
		}
	}
}

func TestRefusesNaNBesideTheDiagonal(t *testing.T) {
	p := jitteredMesh(9, 9, 1, 11)
	s := mustAnalyse(t, p, Options{})
	for column := range p.Pattern.N {
		if p.Pattern.Ptr[column+1]-p.Pattern.Ptr[column] < 2 {
			continue
		}
		values := slices.Clone(p.Values)
		values[p.Pattern.Ptr[column]+1] = math.NaN()
		_, err := s.Factor(context.Background(), values)
		var refused *NotPositiveDefinite
		if !errors.As(err, &refused) || refused.Row != column || !math.IsNaN(refused.Pivot) {
			t.Errorf("NaN in column %d: error %v", column, err)
		}
	}
}

func TestRefusesWithTheSameRowForAnyWorkers(t *testing.T) {
	p := jitteredMesh(120, 110, 1, 11)
	values := slices.Clone(p.Values)
	for row := 3; row < p.Pattern.N; row += 1000 {
		values[p.Pattern.Ptr[row]] = -1
	}
	rows := map[int]bool{}
	for _, workers := range []int{1, 2, 3, 8} {
		_, err := mustAnalyse(t, p, Options{Workers: workers}).Factor(context.Background(), values)
		var refused *NotPositiveDefinite
		if !errors.As(err, &refused) {
			t.Fatalf("error %v", err)
		}
		rows[refused.Row] = true
	}
	if len(rows) != 1 {
		t.Errorf("different rows are named: %v", rows)
	}
}

// A part that nothing holds has a last pivot of rounding error alone. Where its sign happens to be positive the matrix may
// pass, but the smallest pivot gives it away.
func TestTellsLaplacianThatNothingHolds(t *testing.T) {
	for seed := range uint64(20) {
		p := jitteredMesh(12+int(seed), 15, 1, seed)
		free := slices.Clone(p.Values)
		for j := range p.Pattern.N {
			free[p.Pattern.Ptr[j]] = 0
		}
		for j := range p.Pattern.N {
			for k := p.Pattern.Ptr[j] + 1; k < p.Pattern.Ptr[j+1]; k++ {
				free[p.Pattern.Ptr[j]] -= free[k]
				free[p.Pattern.Ptr[p.Pattern.Index[k]]] -= free[k]
			}
		}
		s := mustAnalyse(t, p, Options{})
		f, err := s.Factor(context.Background(), free)
		var refused *NotPositiveDefinite
		if errors.As(err, &refused) {
			continue
		}
		if err != nil {
			t.Fatal(err)
		}
		// The pivot is the sum of the rounding errors of all entries, each in units of its own size: at most about n
		// units of the largest entry, which is up to 1e6 times the diagonal entry that the pivot is compared with.
		limit := float64(p.Pattern.N) * 0x1p-52 * 1e6
		if _, share := f.SmallestPivot(); !(share <= limit) {
			t.Errorf("seed %d: smallest pivot is %g of its diagonal, expected at most %g", seed, share, limit)
		}
	}
}

func TestSmallestPivot(t *testing.T) {
	p, slots := NewPattern(3, []int32{0, 1}, []int32{1, 2})
	values := make([]float64, len(p.Index))
	for i, d := range []float64{4, 4, 4} {
		values[slots.Diagonal[i]] = d
	}
	values[slots.Pair[1]] = -3 // 4 - 9/4 = 1.75 whichever goes first
	f := mustFactor(t, problem{Matrix{p, values}, nil, nil}, Options{})
	row, share := f.SmallestPivot()
	// A square root and its square: three roundings.
	if (row != 1 && row != 2) || !(math.Abs(share-1.75/4) <= 3*0x1p-53) {
		t.Errorf("row %d, share %v; want row 1 or 2 and %v", row, share, 1.75/4)
	}
}

func TestEmptyAndSingle(t *testing.T) {
	empty, _ := NewPattern(0, nil, nil)
	f := mustFactor(t, problem{Matrix: Matrix{Pattern: empty}}, Options{})
	if x := mustSolve(t, f, nil, 3); len(x) != 0 {
		t.Errorf("solution of nothing: %v", x)
	}
	if f.symbolic.NonZeros() != 0 || f.symbolic.Flops() != 0 {
		t.Error("the factor of nothing is not empty")
	}
	single, _ := NewPattern(1, nil, nil)
	f = mustFactor(t, problem{Matrix{single, []float64{4}}, []float64{0}, []float64{0}}, Options{})
	if x := mustSolve(t, f, []float64{2, 8}, 2); x[0] != 0.5 || x[1] != 2 {
		t.Errorf("2/4 and 8/4 give %v", x)
	}
}

// star returns a centre with arms, places on a circle or all in one point.
func star(arms int, spread float64) problem {
	i, j, c := make([]int32, arms), make([]int32, arms), make([]float64, arms)
	x, y := make([]float64, arms+1), make([]float64, arms+1)
	for k := range arms {
		i[k], j[k], c[k] = 0, int32(k+1), float64(k%7+1)
		x[k+1], y[k+1] = spread*math.Cos(float64(k)), spread*math.Sin(float64(k))
	}
	return laplacian(arms+1, i, j, c, []int32{1}, x, y)
}

func TestStarsHaveNoFill(t *testing.T) {
	for _, arms := range []int{1, 2, 30, 3000, 40000} {
		for _, spread := range []float64{0, 1} {
			p := star(arms, spread)
			s := mustAnalyse(t, p, Options{})
			// Amalgamation may add zeros, at most as many entries again as its rules allow; order alone adds none.
			if limit := int64(2 * len(p.Pattern.Index)); s.NonZeros() > limit {
				t.Errorf("%d arms: %d entries, limit %d", arms, s.NonZeros(), limit)
			}
			f := mustFactor(t, p, Options{})
			b := randomVector(arms+1, 3)
			if r := p.Residual(mustSolve(t, f, b, 1), b); !(r <= residualLimit) {
				t.Errorf("%d arms: residual %g, limit %g", arms, r, residualLimit)
			}
		}
	}
}

func TestDisconnected(t *testing.T) {
	var i, j []int32
	var c, x, y []float64
	n := 0
	for part := range 40 { // chains of 0 to 39 nodes, in places that overlap
		for k := range part {
			if k > 0 {
				i, j, c = append(i, int32(n-1)), append(j, int32(n)), append(c, 1+float64(k))
			}
			x, y = append(x, float64(k%5)), append(y, float64(part%3))
			n++
		}
	}
	all := make([]int32, n)
	for k := range all {
		all[k] = int32(k)
	}
	p := laplacian(n, i, j, c, all, x, y)
	for _, coordinates := range []bool{true, false} {
		if !coordinates {
			p.x, p.y = nil, nil
		}
		b := randomVector(n, 4)
		if r := p.Residual(mustSolve(t, mustFactor(t, p, Options{}), b, 1), b); !(r <= residualLimit) {
			t.Errorf("residual %g, limit %g", r, residualLimit)
		}
	}
}

func TestStrangeCoordinates(t *testing.T) {
	p := jitteredMesh(30, 30, 1, 3)
	n := p.Pattern.N
	b := randomVector(n, 4)
	for name, change := range map[string]func(k int) (float64, float64){
		"all in one point": func(int) (float64, float64) { return 7, 7 },
		"on a line":        func(k int) (float64, float64) { return float64(k), 0 },
		"huge":             func(k int) (float64, float64) { return p.x[k] * 1e300, p.y[k] * 1e300 },
		"far away":         func(k int) (float64, float64) { return p.x[k] + 1e12, p.y[k] },
		"shuffled":         func(k int) (float64, float64) { return p.x[(k*7919)%n], p.y[(k*104729)%n] },
		"NaN":              func(k int) (float64, float64) { return math.NaN(), p.y[k] },
		"infinite":         func(k int) (float64, float64) { return math.Inf(1 - 2*(k%2)), p.y[k] },
	} {
		q := problem{p.Matrix, make([]float64, n), make([]float64, n)}
		for k := range n {
			q.x[k], q.y[k] = change(k)
		}
		if r := p.Residual(mustSolve(t, mustFactor(t, q, Options{}), b, 1), b); !(r <= residualLimit) {
			t.Errorf("%s: residual %g, limit %g", name, r, residualLimit)
		}
	}
}

func TestZerosAreKept(t *testing.T) {
	p, slots := NewPattern(3, []int32{0, 1}, []int32{1, 2})
	values := make([]float64, len(p.Index))
	for i, d := range []float64{2, 4, 8} {
		values[slots.Diagonal[i]] = d
	}
	q := problem{Matrix{p, values}, nil, nil}
	s := mustAnalyse(t, q, Options{})
	f, err := s.Factor(context.Background(), values)
	if err != nil {
		t.Fatal(err)
	}
	for i, v := range mustSolve(t, f, []float64{2, 4, 8}, 1) {
		if !(math.Abs(v-1) <= 3*0x1p-53) { // a square root and two divisions
			t.Errorf("row %d of a diagonal matrix: %v, want 1", i, v)
		}
	}
	values[slots.Pair[0]], values[slots.Pair[1]] = -1, -1 // the same analysis takes values where zeros were
	if err := f.Refactor(context.Background(), values); err != nil {
		t.Fatal(err)
	}
	b := []float64{1, 2, 7} // A (1, 1, 1)
	for i, v := range mustSolve(t, f, b, 1) {
		if !(math.Abs(v-1) <= 10*0x1p-53) { // ten roundings of numbers near one
			t.Errorf("row %d: %v, want 1", i, v)
		}
	}
}

// countdown is a context that ends at the k-th look at it.
type countdown struct {
	context.Context
	left chan struct{}
}

func newCountdown(k int) countdown {
	c := countdown{context.Background(), make(chan struct{}, k)}
	for range k {
		c.left <- struct{}{}
	}
	return c
}

func (c countdown) Err() error {
	select {
	case <-c.left:
		return nil
	default:
		return context.Canceled
	}
}

func TestStopsAtEveryLook(t *testing.T) {
	p := jitteredMesh(70, 60, 1, 3)
	n := p.Pattern.N
	b := randomVector(n*17, 4)
	full := mustFactor(t, p, Options{Workers: 2})
	steps := map[string]func(ctx context.Context) error{
		"analyse": func(ctx context.Context) error {
			_, err := Analyse(ctx, p.Pattern, p.x, p.y, Options{Workers: 2})
			return err
		},
		"factor": func(ctx context.Context) error {
			_, err := full.symbolic.Factor(ctx, p.Values)
			return err
		},
		"solve": func(ctx context.Context) error { return full.Solve(ctx, slices.Clone(b), 17) },
		"selected": func(ctx context.Context) error {
			_, err := full.SolveSelected(ctx, make([]SparseVector, 20), []int32{1})
			return err
		},
	}
	for name, do := range steps {
		finished := false
		for k := 0; k < 2000 && !finished; k++ {
			err := do(newCountdown(k))
			var stopped *Interrupted
			switch {
			case err == nil:
				finished = true
			case !errors.As(err, &stopped) || !errors.Is(err, context.Canceled):
				t.Fatalf("%s at look %d: error %v", name, k, err)
			case stopped.Done >= stopped.Total:
				t.Fatalf("%s at look %d: stopped after %d of %d", name, k, stopped.Done, stopped.Total)
			}
		}
		if !finished {
			t.Errorf("%s never finishes", name)
		}
	}
	if r := p.Residual(mustSolve(t, full, b[:n], 1), b[:n]); !(r <= residualLimit) {
		t.Errorf("residual %g after stopped solves, limit %g", r, residualLimit)
	}
}

func TestWrongLengthsPanic(t *testing.T) {
	p := jitteredMesh(4, 4, 1, 3)
	f := mustFactor(t, p, Options{})
	ctx := context.Background()
	wrong := map[string]func(){
		"coordinates":       func() { _, _ = Analyse(ctx, p.Pattern, p.x[:3], p.y, Options{}) },
		"workers":           func() { _, _ = Analyse(ctx, p.Pattern, p.x, p.y, Options{Workers: -1}) },
		"values":            func() { _, _ = f.symbolic.Factor(ctx, p.Values[:5]) },
		"block":             func() { _ = f.Solve(ctx, make([]float64, 16), 2) },
		"vector":            func() { _, _ = f.SolveSelected(ctx, []SparseVector{{Index: []int32{1}}}, nil) },
		"index":             func() { _, _ = f.SolveSelected(ctx, []SparseVector{{[]int32{16}, []float64{1}}}, nil) },
		"wanted":            func() { _, _ = f.SolveSelected(ctx, nil, []int32{-1}) },
		"product":           func() { p.MulVec(make([]float64, 3), make([]float64, 16)) },
		"block of products": func() { p.MulBlock(make([]float64, 16), make([]float64, 16), 2) },
	}
	for name, do := range wrong {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			do()
		})
	}
}
