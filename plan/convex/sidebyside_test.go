//go:build linux

package convex

import (
	"bufio"
	"context"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"syscall"
	"testing"
	"time"
)

// Planning problems in plain files, so that other solvers can be timed on the same numbers (.ci/side-by-side/planner). A file holds
// little-endian numbers: columns n, rows m, 1 for a Hessian or 0 (64-bit integers), then 64-bit floats: costs to be made small (n),
// upper bounds, the lower ones being zero (n), the Hessian's diagonal (n), upper limits (m), the matrix row after row (m x n), and the
// least sum of all columns with a Hessian, else zero.
type sideProblem struct {
	n, m, curved           int64
	cost, upper, h, limits []float64
	a                      []float64
	demand                 float64
}

// The wells lie at random in a square of squareSide; drawdown per rate is that of a well in a leaky aquifer (Hantush & Jacob 1955).
const (
	squareSide     = 10000.0 // [m]
	leakageFactor  = 3000.0  // [m]
	transmissivity = 500.0   // [m²/d]
	rateUnit       = 1000.0  // rates are in thousands, so that all numbers are near one [m³/d]
	demandShare    = 0.95    // demand of a curved problem, of the most that its limits allow
)

// besselK0 is the modified Bessel function of order zero (Abramowitz & Stegun 1964, 9.8.1, 9.8.5 and 9.8.6).
func besselK0(x float64) float64 {
	polynomial := func(t float64, c ...float64) float64 {
		v := 0.0
		for i := len(c) - 1; i >= 0; i-- {
			v = v*t + c[i]
		}
		return v
	}
	if x > 2 {
		return math.Exp(-x) / math.Sqrt(x) * polynomial(2/x, 1.25331414, -0.07832358, 0.02189568, -0.01062446, 0.00587872, -0.00251540, 0.00053208)
	}
	i0 := polynomial(x*x/3.75/3.75, 1, 3.5156229, 3.0899424, 1.2067492, 0.2659732, 0.0360768, 0.0045813)
	return -math.Log(x/2)*i0 + polynomial(x*x/4, -0.57721566, 0.42278420, 0.23069756, 0.03488590, 0.00262698, 0.00010750, 0.00000740)
}

func newSideProblem(wells, limits int, seed uint64) *sideProblem {
	rng := rand.New(rand.NewPCG(seed, 2026))
	type point struct{ x, y float64 }
	place := func() point { return point{squareSide * rng.Float64(), squareSide * rng.Float64()} }
	s := &sideProblem{n: int64(wells), m: int64(limits)}
	at := make([]point, wells)
	for j := range at {
		at[j] = place()
		s.upper = append(s.upper, 0.2+2.8*rng.Float64())
		s.cost = append(s.cost, -1)
		s.h = append(s.h, 0)
	}
	for i := 0; i < limits; i++ {
		q, full := place(), 0.0
		for j, w := range at {
			r := math.Max(1, math.Hypot(q.x-w.x, q.y-w.y))
			s.a = append(s.a, rateUnit/(2*math.Pi*transmissivity)*besselK0(r/leakageFactor))
			full += s.a[i*wells+j] * s.upper[j]
		}
		s.limits = append(s.limits, full*(0.1+0.5*rng.Float64()))
	}
	return s
}

// closest turns a linear problem into that of least squares of (rate - request) / largest rate with a demand.
func (s *sideProblem) closest(most float64, seed uint64) {
	rng := rand.New(rand.NewPCG(seed, 95))
	s.curved, s.demand = 1, demandShare*most
	for j, u := range s.upper {
		request := u * (0.4 + 0.6*rng.Float64())
		s.h[j], s.cost[j] = 2/(u*u), -2*request/(u*u)
	}
}

func (s *sideProblem) parts() []any {
	return []any{s.cost, s.upper, s.h, s.limits, s.a, &s.demand}
}

func (s *sideProblem) write(name string) error {
	f, err := os.Create(name)
	if err != nil {
		return err
	}
	w := bufio.NewWriter(f)
	for _, part := range append([]any{s.n, s.m, s.curved}, s.parts()...) {
		if err := binary.Write(w, binary.LittleEndian, part); err != nil {
			return err
		}
	}
	if err := w.Flush(); err != nil {
		return err
	}
	return f.Close()
}

func readSideProblem(name string) (*sideProblem, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	r := bufio.NewReader(f)
	s := &sideProblem{}
	for _, part := range []any{&s.n, &s.m, &s.curved} {
		if err := binary.Read(r, binary.LittleEndian, part); err != nil {
			return nil, err
		}
	}
	s.cost, s.upper, s.h = make([]float64, s.n), make([]float64, s.n), make([]float64, s.n)
	s.limits, s.a = make([]float64, s.m), make([]float64, s.m*s.n)
	for _, part := range s.parts() {
		if err := binary.Read(r, binary.LittleEndian, part); err != nil {
			return nil, err
		}
	}
	return s, nil
}

// problem builds s through the public functions.
func (s *sideProblem) problem() (*Problem, error) {
	n := int(s.n)
	columns := make([]Column, n)
	for j := range columns {
		columns[j] = Column{Cost: s.cost[j], Upper: s.upper[j]}
	}
	p, err := NewProblem(Minimise, columns)
	if err != nil {
		return nil, err
	}
	for i, limit := range s.limits {
		if _, err := p.AddRow(Row{Coefficients: s.a[i*n : i*n+n], Lower: math.Inf(-1), Upper: limit}); err != nil {
			return nil, err
		}
	}
	if s.curved == 0 {
		return p, nil
	}
	all := make([]float64, n)
	for j := range all {
		all[j] = 1
	}
	if _, err := p.AddRow(Row{Coefficients: all, Lower: s.demand, Upper: math.Inf(1)}); err != nil {
		return nil, err
	}
	return p, p.SetHessian(Hessian{Diagonal: s.h})
}

// sideFolder is the folder of the files, which only .ci/side-by-side/planner gives.
func sideFolder(t *testing.T) string {
	folder := os.Getenv("SPRINGBOUND_SIDE_BY_SIDE")
	if folder == "" {
		t.Skip("SPRINGBOUND_SIDE_BY_SIDE names no folder for the files; .ci/side-by-side/planner does")
	}
	return folder
}

func TestWriteSideProblems(t *testing.T) {
	folder := sideFolder(t)
	for _, size := range []struct {
		wells, limits int
		curved        bool
	}{{300, 40, true}, {1000, 200, true}, {5000, 500, true}, {2000, 2000, false}} {
		s := newSideProblem(size.wells, size.limits, 1)
		name := fmt.Sprintf("%dx%d.bin", size.wells, size.limits)
		if err := s.write(filepath.Join(folder, "lp-"+name)); err != nil {
			t.Fatal(err)
		}
		if !size.curved {
			continue
		}
		p, err := s.problem()
		if err != nil {
			t.Fatal(err)
		}
		s.closest(-mustOptimal(t, p, Options{}).Objective, 1)
		if err := s.write(filepath.Join(folder, "qp-"+name)); err != nil {
			t.Fatal(err)
		}
	}
}

// instant is a time by two clocks.
type instant struct {
	elapsed   time.Time
	processor time.Duration // that the process has used so far, collecting garbage included
}

func now(t *testing.T) instant {
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		t.Fatal(err)
	}
	return instant{time.Now(), time.Duration(u.Utime.Nano() + u.Stime.Nano())}
}

// until is the time between two instants [s]. Short times are elapsed ones, since the processor's clock may be coarse; long ones are
// processor time, which others' work on the machine disturbs less.
func (a instant) until(b instant) float64 {
	if elapsed := b.elapsed.Sub(a.elapsed); elapsed < 50*time.Millisecond {
		return elapsed.Seconds()
	}
	return (b.processor - a.processor).Seconds()
}

// TestTimeSideProblem solves one file and prints a line for each repetition: time to build and to solve [s], iterations, objective, largest
// violation of a limit, and the number of limits that bind.
func TestTimeSideProblem(t *testing.T) {
	folder := sideFolder(t)
	s, err := readSideProblem(filepath.Join(folder, os.Getenv("SPRINGBOUND_SIDE_PROBLEM")+".bin"))
	if err != nil {
		t.Fatal(err)
	}
	const spend, least, most = time.Second, 3, 25
	begin := time.Now()
	for k := 0; k <= most && (k <= least || time.Since(begin) < spend); k++ {
		start := now(t)
		p, err := s.problem()
		if err != nil {
			t.Fatal(err)
		}
		built := now(t)
		sol, err := Solve(context.Background(), p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		solved := now(t)
		if sol.Status != Optimal {
			t.Fatal(sol.Status)
		}
		if k == 0 { // the first warms up, as in the other programs
			if c := Certify(p, sol); !c.Accepted {
				t.Error(c.Reason)
			}
			continue
		}
		binding, violation := 0, 0.0
		for i, limit := range s.limits {
			violation = math.Max(violation, sol.RowValue[i]-limit)
			if sol.RowPrice[i] != 0 {
				binding++
			}
		}
		fmt.Printf("run springbound %.9f %.9f %d %.15g %.3g %d\n", start.until(built), built.until(solved), sol.Iterations,
			sol.Objective, violation, binding)
	}
}
