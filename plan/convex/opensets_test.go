package convex

import (
	"compress/gzip"
	"context"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
	"time"
)

const (
	// linearAgreement is the difference at which the data's notes ask to compare with the computed objective.
	linearAgreement = 1e-8
	// quadraticAgreement is the relative difference at which the data's notes ask to compare with the published table.
	quadraticAgreement = 1e-6
	// quadraticNothing is the published objective below which the optimum is zero and the digits are rounding of another solver:
	// S268, HS51 and TAME. The difference counts absolutely there.
	quadraticNothing = 1e-5
)

// openModel reads one gzipped file.
func openModel(t testing.TB, path string) *Model {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	m, err := ReadMPS(z)
	if err != nil {
		t.Fatalf("%s: %v", path, err)
	}
	return m
}

func number64(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

// tally counts the outcomes of a set.
type tally struct {
	solved, certified, undecided, wrong, agreed int
	slowest                                     string // of those with at most mediumRows rows
	longest                                     time.Duration
}

// mediumRows is the number of rows up to which a linear programme of the open sets is asked to take less than two seconds.
const mediumRows = 500

// time keeps the slowest problem of at most mediumRows rows.
func (c *tally) time(name string, rows int, took time.Duration) {
	if rows <= mediumRows && took > c.longest {
		c.slowest, c.longest = name, took
	}
}

// openSetsHead and openSetsLine are the table of results. "off" is the relative difference to the reference, the violations and the gap are
// those of the certificate, each relative to its own terms.
const (
	openSetsHead = "name        rows  columns  status                       objective      off   primal     dual      gap   seconds  certified"
	openSetsLine = "%-10s %5d    %5d  %-18v %20.12g  %.1e  %.1e  %.1e  %.1e  %8.3f  %v %s"
)

// compare solves with the given method, prints a line and books the outcome.
func (c *tally) compare(t *testing.T, name string, m *Model, published, computed string, agreement float64, solve func(context.Context, *Problem, Options) (*Solution, error)) *Solution {
	ctx, cancel := context.WithTimeout(context.Background(), netlibLimit)
	defer cancel()
	begin := time.Now()
	s, err := solve(ctx, m.Problem, Options{})
	if err != nil {
		t.Fatal(err)
	}
	took := time.Since(begin)
	got := s.Objective + m.Constant
	want, other := number64(published), number64(computed)
	off := func(want float64) float64 {
		if math.Abs(want) <= quadraticNothing {
			return math.Abs(got - want)
		}
		return math.Abs(got-want) / math.Abs(want)
	}
	least := off(want)
	if o := off(other); !(least <= o) {
		least = o
	}
	certificate := Certify(m.Problem, s)
	t.Logf(openSetsLine, name, m.Problem.Rows(), m.Problem.Columns(), s.Status, got, least,
		certificate.PrimalViolationScaled, certificate.DualViolationScaled, certificate.Gap, took.Seconds(), certificate.Accepted, certificate.Reason)
	c.time(name, m.Problem.Rows(), took)
	switch s.Status {
	case Optimal:
		if !(least <= agreement) {
			t.Errorf("%s: objective %.12g, published %s, computed %s", name, got, published, computed)
			c.wrong++
			return s
		}
		c.solved++
		if certificate.Accepted {
			c.certified++
		} else {
			t.Errorf("%s: an optimum without an accepted certificate: %s", name, certificate.Reason)
		}
	case Infeasible, Unbounded, NotConvex:
		t.Errorf("%s: called %v", name, s.Status)
		c.wrong++
	default:
		c.undecided++
	}
	return s
}

// second asks for a second opinion on s and books a disagreement.
func (c *tally) second(t *testing.T, name string, m *Model, s *Solution) {
	ctx, cancel := context.WithTimeout(context.Background(), netlibLimit)
	defer cancel()
	begin := time.Now()
	a := SecondOpinion(ctx, m.Problem, s)
	t.Logf("%-10s   second opinion: %-10v difference %.1e  %7.3f s  %4d it  %s", name, a.Verdict, a.Difference, time.Since(begin).Seconds(), iterationsOf(a.Second), a.Reason)
	switch a.Verdict {
	case Agree:
		c.agreed++
	case Disagree:
		t.Errorf("%s: %s", name, a.Reason)
	}
}

func iterationsOf(s *Solution) int {
	if s == nil {
		return 0
	}
	return s.Iterations
}

// Sizes, rows times columns, of the default run; SPRINGBOUND_LONG=1 takes all.
const (
	quadraticShort = 60_000
	secondShort    = 30_000
)

// TestOpenSetsQuadratic solves the published quadratic programmes, at least 98 in a hundred of them.
func TestOpenSetsQuadratic(t *testing.T) {
	t.Log(openSetsHead)
	dir := sharedData(t, "qp")
	var c tally
	count := 0
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		if number64(row["rows"])*number64(row["cols"]) > quadraticShort && !long() {
			continue
		}
		count++
		m := openModel(t, filepath.Join(dir, row["file"]))
		s := c.compare(t, row["name"], m, row["published_objective"], row["computed_objective"], quadraticAgreement, Solve)
		c.second(t, row["name"], m, s)
	}
	t.Logf("quadratic: %d problems, %+v", count, c)
	if c.wrong > 0 {
		t.Errorf("%d wrong", c.wrong)
	}
	if float64(c.solved) < 0.98*float64(count) {
		t.Errorf("only %d of %d solved", c.solved, count)
	}
}

// TestOpenSetsLinear compares the simplex method with the published objectives and asks for the second opinion of the interior
// method; without SPRINGBOUND_LONG=1 on the small ones only. One command prints the table of all open sets:
//
//	SPRINGBOUND_LONG=1 go test -v -timeout 90m -run OpenSets ./plan/convex
func TestOpenSetsLinear(t *testing.T) {
	t.Log(openSetsHead)
	dir := sharedData(t, "lp")
	var c tally
	count := 0
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		size := number64(row["rows"]) * number64(row["cols"])
		if size > secondShort && !long() {
			continue
		}
		m := openModel(t, filepath.Join(dir, row["file"]))
		other := row["computed_objective"]
		if other == "" {
			other = row["computed_glpk"]
		}
		count++
		s := c.compare(t, row["name"], m, row["published_objective"], other, linearAgreement, Solve)
		c.second(t, row["name"], m, s)
	}
	t.Logf("linear: %d problems, %+v; slowest with at most %d rows: %s, %.2f s", count, c, mediumRows, c.slowest, c.longest.Seconds())
	if c.wrong > 0 || float64(c.solved) < 0.98*float64(count) || float64(c.agreed) < 0.9*float64(count) {
		t.Errorf("%d wrong, only %d of %d solved, %d second opinions agree", c.wrong, c.solved, count, c.agreed)
	}
}

// TestOpenSetsInfeasible asks both methods for proofs.
func TestOpenSetsInfeasible(t *testing.T) {
	dir := sharedData(t, "lp-infeasible")
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		if number64(row["rows"])*number64(row["cols"]) > secondShort && !long() {
			continue
		}
		m := openModel(t, filepath.Join(dir, row["file"]))
		for _, method := range []string{"Solve", "SolveInterior"} {
			ctx, cancel := context.WithTimeout(context.Background(), netlibLimit)
			begin := time.Now()
			s, err := bothMethods[method](ctx, m.Problem, Options{})
			cancel()
			if err != nil {
				t.Fatal(err)
			}
			v := Certify(m.Problem, s)
			t.Logf("%-10s %5d x %5d  %-13s  %-18v  margin %.1e  %7.3f s  %4d it  certified %v %s", row["name"], m.Problem.Rows(), m.Problem.Columns(), method,
				s.Status, v.ProofMargin, time.Since(begin).Seconds(), s.Iterations, v.Accepted, v.Reason)
			// cplex2 is infeasible by 1e-9 only, so that a point within the tolerances exists.
			if method == "Solve" && row["name"] != "cplex2" && !(v.Accepted && s.Status == Infeasible) {
				t.Errorf("%s: not proven infeasible: %v, %s", row["name"], s.Status, v.Reason)
			}
			if v.Accepted && s.Status != Infeasible && row["name"] != "cplex2" {
				t.Errorf("%s: %s calls it %v", row["name"], method, s.Status)
			}
		}
	}
}
