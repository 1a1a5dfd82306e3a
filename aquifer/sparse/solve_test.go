package sparse

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"sync"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// residualLimit bounds the scaled residual of a backward stable solve: the error of a row is at most about its number of
// terms in units of rounding (2^-53); no row of these problems has more than a few hundred terms, and errors average out.
const residualLimit = 100 * 0x1p-53

func mustAnalyse(t testing.TB, p problem, o Options) *Symbolic {
	t.Helper()
	s, err := Analyse(context.Background(), p.Pattern, p.x, p.y, o)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func mustFactor(t testing.TB, p problem, o Options) *Factor {
	t.Helper()
	f, err := mustAnalyse(t, p, o).Factor(context.Background(), p.Values)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func mustSolve(t testing.TB, f *Factor, b []float64, k int) []float64 {
	t.Helper()
	x := slices.Clone(b)
	if err := f.Solve(context.Background(), x, k); err != nil {
		t.Fatal(err)
	}
	return x
}

func denseOf(m Matrix) *mat.SymDense {
	d := mat.NewSymDense(m.Pattern.N, nil)
	for j := range m.Pattern.N {
		for k := m.Pattern.Ptr[j]; k < m.Pattern.Ptr[j+1]; k++ {
			d.SetSym(int(m.Pattern.Index[k]), j, m.Values[k])
		}
	}
	return d
}

// randomDominant makes a matrix with about share of its entries, random signs, and a diagonal that dominates by at least
// one, so that its condition number is at most about 2n.
func randomDominant(n int, share float64, seed uint64) problem {
	random := rand.New(rand.NewPCG(seed, 3))
	var i, j []int32
	for a := range n {
		for b := range a {
			if random.Float64() < share {
				i, j = append(i, int32(a)), append(j, int32(b))
			}
		}
	}
	p, slots := NewPattern(n, i, j)
	values := make([]float64, len(p.Index))
	for k := range i {
		v := random.NormFloat64()
		values[slots.Pair[k]] = v
		values[slots.Diagonal[i[k]]] += math.Abs(v)
		values[slots.Diagonal[j[k]]] += math.Abs(v)
	}
	x, y := make([]float64, n), make([]float64, n)
	for v := range n {
		values[slots.Diagonal[v]]++
		x[v], y[v] = random.Float64(), random.Float64()
	}
	return problem{Matrix{p, values}, x, y}
}

func TestEqualsDenseCholesky(t *testing.T) {
	for _, n := range []int{1, 2, 3, 4, 5, 10, 11, 50, 200} {
		for _, share := range []float64{0, 0.1, 0.4, 1} {
			p := randomDominant(n, share, uint64(n))
			var chol mat.Cholesky
			if !chol.Factorize(denseOf(p.Matrix)) {
				t.Fatal("the reference refuses the matrix")
			}
			b := randomVector(n, 5)
			var want mat.VecDense
			if err := chol.SolveVecTo(&want, mat.NewVecDense(n, b)); err != nil {
				t.Fatal(err)
			}
			// Both are backward stable: the difference is some units of rounding times the condition number.
			limit := 100 * 0x1p-53 * chol.Cond() * maxNorm(want.RawVector().Data)
			for _, coordinates := range []bool{true, false} {
				q := p
				if !coordinates {
					q.x, q.y = nil, nil
				}
				x := mustSolve(t, mustFactor(t, q, Options{}), b, 1)
				for i := range x {
					if d := math.Abs(x[i] - want.AtVec(i)); !(d <= limit) {
						t.Errorf("n %d share %g row %d: %v, want %v, limit %g", n, share, i, x[i], want.AtVec(i), limit)
					}
				}
			}
		}
	}
}

func TestSolveMeshes(t *testing.T) {
	for _, grade := range []float64{1, 1000} {
		for _, side := range []int{1, 2, 3, 4, 5, 10, 11, 50, 120} {
			p := jitteredMesh(side, side+side/2, grade, uint64(side))
			for _, coordinates := range []bool{true, false} {
				if !coordinates {
					p.x, p.y = nil, nil
				}
				f := mustFactor(t, p, Options{})
				n := p.Pattern.N
				for _, k := range []int{0, 1, 3, 8, 19} {
					b := randomVector(n*k, 7)
					x := mustSolve(t, f, b, k)
					for c := range k {
						if r := p.Residual(x[c*n:(c+1)*n], b[c*n:(c+1)*n]); !(r <= residualLimit) {
							t.Errorf("side %d grade %g: column %d of %d has residual %g, limit %g", side, grade, c, k, r, residualLimit)
						}
					}
				}
			}
		}
	}
}

func TestColumnDoesNotDependOnBlock(t *testing.T) {
	p := jitteredMesh(40, 31, 100, 2)
	f := mustFactor(t, p, Options{})
	n := p.Pattern.N
	b := randomVector(n*19, 4)
	whole := mustSolve(t, f, b, 19)
	for c := range 19 {
		if !sameBits(mustSolve(t, f, b[c*n:(c+1)*n], 1), whole[c*n:(c+1)*n]) {
			t.Errorf("column %d alone differs from column %d of 19", c, c)
		}
	}
	if !sameBits(mustSolve(t, f, b[:5*n], 5), whole[:5*n]) {
		t.Error("the first five columns alone differ")
	}
}

func TestRenumberingChangesNothingButRounding(t *testing.T) {
	p := jitteredMesh(30, 23, 1, 9)
	n := p.Pattern.N
	random := rand.New(rand.NewPCG(8, 8))
	to := random.Perm(n)
	var i, j []int32
	for c := range n {
		for k := p.Pattern.Ptr[c]; k < p.Pattern.Ptr[c+1]; k++ {
			i, j = append(i, int32(to[c])), append(j, int32(to[p.Pattern.Index[k]]))
		}
	}
	pattern, slots := NewPattern(n, i, j)
	q := problem{Matrix{pattern, make([]float64, len(pattern.Index))}, make([]float64, n), make([]float64, n)}
	for k, slot := range slots.Pair {
		q.Values[slot] = p.Values[k]
	}
	b, c := randomVector(n, 1), make([]float64, n)
	for v := range n {
		q.x[to[v]], q.y[to[v]], c[to[v]] = p.x[v], p.y[v], b[v]
	}
	f, g := mustFactor(t, p, Options{}), mustFactor(t, q, Options{})
	x, z := mustSolve(t, f, b, 1), mustSolve(t, g, c, 1)
	back := make([]float64, n)
	for v := range n {
		back[v] = z[to[v]]
	}
	if r := p.Residual(back, b); !(r <= residualLimit) {
		t.Errorf("renumbered solution leaves residual %g, limit %g", r, residualLimit)
	}
	// Two backward stable solutions of a system with a condition number below 1e10 (six decades of conductance, one
	// side held) agree to 1e10 units of rounding, 1e-6.
	for v := range n {
		if !(math.Abs(back[v]-x[v]) <= 1e-6*maxNorm(x)) {
			t.Fatalf("row %d: %v renumbered, %v before", v, back[v], x[v])
		}
	}
}

func TestSelectedEqualsSolve(t *testing.T) {
	for _, coordinates := range []bool{true, false} {
		p := jitteredMesh(95, 78, 1000, 6) // several subtrees
		if !coordinates {
			p.x, p.y = nil, nil
		}
		n := p.Pattern.N
		random := rand.New(rand.NewPCG(1, 7))
		rhs := make([]SparseVector, 21)
		block := make([]float64, n*len(rhs))
		for r := range rhs {
			for range r % 4 {
				i := random.IntN(n)
				v := random.NormFloat64()
				rhs[r].Index, rhs[r].Value = append(rhs[r].Index, int32(i)), append(rhs[r].Value, v)
				block[r*n+i] += v
			}
		}
		var wanted []int32
		for range 30 {
			wanted = append(wanted, int32(random.IntN(n)))
		}
		for _, refine := range []bool{false, true} {
			f := mustFactor(t, p, Options{Refine: refine})
			whole := mustSolve(t, f, block, len(rhs))
			for range 2 { // the second time on used memory
				values, err := f.SolveSelected(context.Background(), rhs, wanted)
				if err != nil {
					t.Fatal(err)
				}
				for r := range rhs {
					for w, i := range wanted {
						// Skipped products are exact zeros, so even the last bit agrees.
						if values[r][w] != whole[r*n+int(i)] {
							t.Fatalf("right-hand side %d row %d: %v, whole solve %v", r, i, values[r][w], whole[r*n+int(i)])
						}
					}
				}
			}
		}
	}
}

func TestRefineLowersResidual(t *testing.T) {
	p := jitteredMesh(60, 60, 1000, 12)
	n := p.Pattern.N
	b := randomVector(3*n, 2)
	x := mustSolve(t, mustFactor(t, p, Options{Refine: true}), b, 3)
	for c := range 3 {
		// After one step a row's error is that of forming its own residual: its ten terms or so, not the factor's.
		if r := p.Residual(x[c*n:(c+1)*n], b[c*n:(c+1)*n]); !(r <= 10*0x1p-53) {
			t.Errorf("column %d: residual %g after refinement, limit %g", c, r, 10*0x1p-53)
		}
	}
}

func TestSameBytesForAnyWorkers(t *testing.T) {
	p := jitteredMesh(130, 120, 1000, 5)
	n := p.Pattern.N
	b := randomVector(20*n, 3)
	var order []int32
	var panels, solution []float64
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(0))
	for _, workers := range []int{1, 2, 8} {
		runtime.GOMAXPROCS(workers)
		f := mustFactor(t, p, Options{})
		x := mustSolve(t, f, b, 20)
		if order == nil {
			order, panels, solution = f.symbolic.order, f.panels, x
			continue
		}
		if !slices.Equal(order, f.symbolic.order) {
			t.Errorf("%d workers: another order", workers)
		}
		if !sameBits(panels, f.panels) {
			t.Errorf("%d workers: another factor", workers)
		}
		if !sameBits(solution, x) {
			t.Errorf("%d workers: another solution", workers)
		}
	}
}

// A dense matrix is one front, whose updates the workers share.
func TestSharedFrontGivesTheSameBytes(t *testing.T) {
	const n = 700
	p := randomDominant(n, 1, 3)
	if work := float64(n-blockColumns) * float64(n-blockColumns) * blockColumns; work < sharedWork {
		t.Fatalf("the front is too small to be shared: %g", work)
	}
	one, four := mustFactor(t, p, Options{Workers: 1}), mustFactor(t, p, Options{Workers: 4})
	if !sameBits(one.panels, four.panels) {
		t.Error("four workers make another factor than one")
	}
	b := randomVector(n, 1)
	// A row has n terms, whose errors average out to about sqrt(n) units.
	if r, limit := p.Residual(mustSolve(t, four, b, 1), b), math.Sqrt(n)*0x1p-53; !(r <= limit) {
		t.Errorf("residual %g, limit %g", r, limit)
	}
}

func TestSeveralFactorsAtOnce(t *testing.T) {
	p := jitteredMesh(60, 50, 1, 5)
	s := mustAnalyse(t, p, Options{Workers: 4})
	b := randomVector(p.Pattern.N*9, 3)
	var group sync.WaitGroup
	for scale := range 3 {
		group.Add(1)
		go func() {
			defer group.Done()
			factor := math.Ldexp(1, scale) // exact, so solutions are exact multiples of each other
			values := slices.Clone(p.Values)
			for k := range values {
				values[k] *= factor * factor
			}
			f, err := s.Factor(context.Background(), values)
			if err != nil {
				t.Error(err)
				return
			}
			if err := f.Refactor(context.Background(), values); err != nil {
				t.Error(err)
				return
			}
			var inner sync.WaitGroup
			for range 2 {
				inner.Add(1)
				go func() {
					defer inner.Done()
					x := slices.Clone(b)
					if err := f.Solve(context.Background(), x, 9); err != nil {
						t.Error(err)
					}
					m := Matrix{p.Pattern, values}
					n := p.Pattern.N
					if r := m.Residual(x[:n], b[:n]); !(r <= residualLimit) {
						t.Errorf("residual %g, limit %g", r, residualLimit)
					}
				}()
			}
			inner.Wait()
		}()
	}
	group.Wait()
}

func TestRefactorEqualsFactor(t *testing.T) {
	p := jitteredMesh(50, 40, 1, 5)
	s := mustAnalyse(t, p, Options{})
	f, err := s.Factor(context.Background(), p.Values)
	if err != nil {
		t.Fatal(err)
	}
	first := slices.Clone(f.panels)
	other := slices.Clone(p.Values)
	for k := range other {
		other[k] *= 3
	}
	bad := slices.Clone(p.Values)
	bad[p.Pattern.Ptr[7]] = -1
	if err := f.Refactor(context.Background(), other); err != nil {
		t.Fatal(err)
	}
	if err := f.Refactor(context.Background(), bad); err == nil {
		t.Fatal("a negative diagonal entry was accepted")
	}
	if err := f.Refactor(context.Background(), p.Values); err != nil {
		t.Fatal(err)
	}
	if !sameBits(first, f.panels) {
		t.Error("the factor of the same values differs after others were in its memory")
	}
}

func TestSteadySolveAllocatesLittle(t *testing.T) {
	p := jitteredMesh(40, 40, 1, 5)
	f := mustFactor(t, p, Options{Workers: 1})
	b := randomVector(p.Pattern.N*16, 3)
	// The closure, the list of finished panels and now and then a panel that the garbage collector took from the pool.
	if a := testing.AllocsPerRun(20, func() {
		if err := f.Solve(context.Background(), b, 16); err != nil {
			t.Fatal(err)
		}
	}); !(a <= 8) {
		t.Errorf("%g allocations a solve", a)
	}
}

func TestFailedFactorCannotBeUsed(t *testing.T) {
	p := jitteredMesh(5, 5, 1, 5)
	f := mustFactor(t, p, Options{})
	bad := slices.Clone(p.Values)
	bad[0] = math.NaN()
	var refused *NotPositiveDefinite
	if err := f.Refactor(context.Background(), bad); !errors.As(err, &refused) {
		t.Fatalf("error %v", err)
	}
	defer func() {
		if recover() == nil {
			t.Error("solving with it did not panic")
		}
	}()
	_ = f.Solve(context.Background(), randomVector(25, 1), 1)
}
