package convex

import (
	"context"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

const (
	// mixedAgreement is the relative difference allowed against the objectives of the index, which are given to nine digits or more
	// by solvers that accept whole values 1e-6 off.
	mixedAgreement = 1e-6
	// mixedLimit is the time in which the share mixedShare of the files must be proven.
	mixedLimit = 120 * time.Second
	mixedShare = 0.6
	// mixedShort is the most nodes of a file of the default run.
	mixedShort = 2000
)

// TestOpenSetsMixed compares with objectives computed by other solvers. A proof may be missing, an answer never wrong.
func TestOpenSetsMixed(t *testing.T) {
	dir := sharedData(t, "mip")
	proven, total := 0, 0
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		name := row["name"]
		if only := os.Getenv("SPRINGBOUND_MIXED_ONLY"); only != "" && only != name {
			continue
		}
		if !long() && !strings.Contains(" egout flugpl lseu p0033 mod008 p0282 rgn ", " "+name+" ") {
			continue
		}
		m := openModel(t, filepath.Join(dir, row["file"]))
		p, constant := &MixedProblem{Problem: m.Problem, Integer: m.Integer}, m.Constant
		if want, _ := strconv.Atoi(row["integer_cols"]); want != len(p.Integer) {
			t.Errorf("%s: %d whole columns, the index says %d", name, len(p.Integer), want)
		}
		want, err := strconv.ParseFloat(row["computed_objective"], 64)
		if err != nil {
			t.Fatal(err)
		}
		o := MixedOptions{NodeLimit: mixedShort}
		ctx, cancel := context.WithCancel(context.Background())
		if long() {
			o.NodeLimit = 0
			ctx, cancel = context.WithTimeout(context.Background(), mixedLimit)
		}
		begin := time.Now()
		s, err := SolveMixed(ctx, p, o)
		cancel()
		if err != nil {
			t.Fatal(err)
		}
		took := time.Since(begin)
		off := (s.Objective + constant - want) / math.Max(1, math.Abs(want))
		boundOff := (s.Bound + constant - want) / math.Max(1, math.Abs(want))
		violation := math.NaN()
		if len(s.X) == p.Columns() {
			violation = CertifyMixed(p, s).Linear.PrimalViolationScaled
		}
		t.Logf("%-9s %4d x %4d %-10v %20.12g violation %.1e %7.2fs %6d nodes %7d pivots %4d cuts gap %.1e off %.1e bound off %.1e presolve %+v", name, p.Rows(), p.Columns(), s.Status,
			s.Objective+constant, violation, took.Seconds(), s.Nodes, s.Pivots, s.Cuts, s.Gap, off, boundOff, s.Presolve)
		total++
		if !(boundOff <= mixedAgreement) {
			t.Errorf("%s: bound %.12g is beyond the optimum %.12g", name, s.Bound+constant, want)
		}
		switch s.Status {
		case MixedOptimal:
			proven++
			if !(math.Abs(off) <= mixedAgreement) {
				t.Errorf("%s: objective %.12g, want %.12g", name, s.Objective+constant, want)
			}
		case MixedFeasible:
			if !(off >= -mixedAgreement) {
				t.Errorf("%s: objective %.12g is better than the optimum %.12g", name, s.Objective+constant, want)
			}
		case MixedUndecided:
		default:
			t.Errorf("%s: called %v", name, s.Status)
		}
	}
	t.Logf("%d of %d proven", proven, total)
	if os.Getenv("SPRINGBOUND_MIXED_ONLY") == "" && !(float64(proven) >= mixedShare*float64(total)) {
		t.Errorf("only %d of %d proven", proven, total)
	}
}
