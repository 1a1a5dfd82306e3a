package convex

import (
	"context"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
	"time"
)

const (
	// netlibAgreement is the relative difference at which the data's notes ask to compare with computed_objective.
	netlibAgreement = 1e-8
	// netlibShort is the largest rows x columns of the default run.
	netlibShort = 200_000
	// netlibLimit ends a solve that does not get anywhere; an honest "interrupted" then.
	netlibLimit = 150 * time.Second
)

func long() bool { return os.Getenv("SPRINGBOUND_LONG") == "1" }

func eachNetlib(t *testing.T, folder string, f func(name string, index map[string]string, p *Problem, constant float64)) {
	dir := sharedData(t, folder)
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		m, _ := strconv.Atoi(row["rows"])
		n, _ := strconv.Atoi(row["cols"])
		if m*n > netlibShort && !long() {
			continue
		}
		if only := os.Getenv("SPRINGBOUND_NETLIB_ONLY"); only != "" && only != row["name"] {
			continue
		}
		p, constant := readMPS(t, filepath.Join(dir, row["file"]))
		if p.Rows() != m || p.Columns() != n {
			t.Errorf("%s: %d x %d, index says %d x %d", row["name"], p.Rows(), p.Columns(), m, n)
		}
		f(row["name"], row, p, constant)
	}
}

// TestNetlib compares with objectives computed by other solvers. An answer may be missing, never wrong.
func TestNetlib(t *testing.T) {
	solved, missing := 0, 0
	eachNetlib(t, "lp", func(name string, index map[string]string, p *Problem, constant float64) {
		ctx, cancel := context.WithTimeout(context.Background(), netlibLimit)
		defer cancel()
		begin := time.Now()
		s, err := Solve(ctx, p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		took := time.Since(begin)
		want, err := strconv.ParseFloat(index["computed_objective"], 64)
		if err != nil {
			want, err = strconv.ParseFloat(index["computed_glpk"], 64)
		}
		if err != nil {
			t.Fatalf("%s: no objective in the index", name)
		}
		c := Certify(p, s)
		got := s.Objective + constant
		off := math.Abs(got-want) / math.Max(1, math.Abs(want))
		t.Logf("%-10s %4d x %4d %-18v %8.3fs %6d it (%5d primal) off %.1e viol %.1e/%.1e gap %.1e ok=%v %s", name, p.Rows(), p.Columns(), s.Status,
			took.Seconds(), s.Iterations, s.Primal, off, c.PrimalViolationScaled, c.DualViolationScaled, c.Gap, c.Accepted, c.Reason)
		switch s.Status {
		case Optimal:
			if !(off <= netlibAgreement) {
				t.Errorf("%s: objective %.12g, want %.12g", name, got, want)
				return
			}
			if c.Accepted {
				solved++
			} else {
				missing++
			}
		case Infeasible, Unbounded:
			t.Errorf("%s: called %v", name, s.Status)
		default:
			missing++
		}
	})
	t.Logf("%d solved and certified, %d without a certified answer", solved, missing)
}

// TestNetlibInfeasible asks for proofs. cplex2 is infeasible by 1e-9 only, so that it may stay undecided.
func TestNetlibInfeasible(t *testing.T) {
	proven, missing := 0, 0
	eachNetlib(t, "lp-infeasible", func(name string, _ map[string]string, p *Problem, _ float64) {
		ctx, cancel := context.WithTimeout(context.Background(), netlibLimit)
		defer cancel()
		begin := time.Now()
		s, err := Solve(ctx, p, Options{})
		if err != nil {
			t.Fatal(err)
		}
		c := Certify(p, s)
		t.Logf("%-10s %4d x %4d %-18v %8.3fs %6d it margin %.1e ok=%v %s", name, p.Rows(), p.Columns(), s.Status,
			time.Since(begin).Seconds(), s.Iterations, c.ProofMargin, c.Accepted, c.Reason)
		switch {
		case s.Status == Infeasible && c.Accepted:
			proven++
		case (s.Status == Optimal || s.Status == Unbounded) && c.Accepted && name != "cplex2":
			t.Errorf("%s: called %v", name, s.Status)
		default:
			missing++
		}
	})
	t.Logf("%d proven infeasible, %d undecided", proven, missing)
}
