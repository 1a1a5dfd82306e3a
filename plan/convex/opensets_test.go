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
type tally struct{ solved, certified, undecided, wrong int }

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
	t.Logf("%-10s %5d x %5d  %-18v %20.12g  published %-20s computed %-20s off %.1e  %7.3f s  %4d it  certified %v %s", name, m.Problem.Rows(), m.Problem.Columns(),
		s.Status, got, published, computed, least, took.Seconds(), s.Iterations, certificate.Accepted, certificate.Reason)
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

// TestOpenSetsQuadratic solves the published quadratic programmes.
func TestOpenSetsQuadratic(t *testing.T) {
	dir := sharedData(t, "qp")
	var c tally
	for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
		if only := os.Getenv("SPRINGBOUND_QP_ONLY"); only != "" && only != row["name"] {
			continue
		}
		if number64(row["rows"])*number64(row["cols"]) > 60_000 && !long() {
			continue
		}
		m := openModel(t, filepath.Join(dir, row["file"]))
		c.compare(t, row["name"], m, row["published_objective"], row["computed_objective"], quadraticAgreement, Solve)
	}
	t.Logf("%+v", c)
}
