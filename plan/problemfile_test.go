package plan

import (
	"bytes"
	"context"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"springbound/plan/convex"
	"springbound/wells"
)

// sameOptimum is the relative difference of two solutions of one problem: each is certified to a gap of 1e-9.
const sameOptimum = 1e-9

// drafted plans and returns the report with its problem file.
func drafted(t *testing.T, s *site) (*Report, *ProblemFile) {
	t.Helper()
	var file *ProblemFile
	r, err := Make(context.Background(), s.brief, s.table, Options{Problem: func(f *ProblemFile) { file = f }})
	if err != nil {
		t.Fatal(err)
	}
	if file == nil {
		t.Fatal("no problem file")
	}
	return r, file
}

// readBack writes the problem file, reads it and solves it.
func readBack(t *testing.T, f *ProblemFile) (text string, status convex.Status, value float64) {
	t.Helper()
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	m, err := convex.ReadMPS(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatalf("%v\n%s", err, b.String())
	}
	if len(m.Integer) > 0 && !m.Problem.Quadratic() {
		sol, err := convex.SolveMixed(context.Background(), &convex.MixedProblem{Problem: m.Problem, Integer: m.Integer}, convex.MixedOptions{})
		if err != nil {
			t.Fatal(err)
		}
		switch sol.Status {
		case convex.MixedOptimal:
			return b.String(), convex.Optimal, sol.Objective + m.Constant
		case convex.MixedInfeasible:
			return b.String(), convex.Infeasible, 0
		}
		t.Fatal(sol.Status)
	}
	sol, err := convex.Solve(context.Background(), m.Problem, convex.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return b.String(), sol.Status, sol.Objective + m.Constant
}

// problemSites are briefs of every kind, with what their problem's optimum must be.
func problemSites() map[string]struct {
	s   *site
	aim func(*Report) float64
} {
	type one = struct {
		s   *site
		aim func(*Report) float64
	}
	total := func(r *Report) float64 { return -r.TotalRate }
	energy := func(r *Report) float64 { return r.PumpingEnergy.Energy }
	yield := canalStrip(MostYield, 2500)
	yield.limit("L1 of the north, \"old\"", "P1", 0.30)
	yield.limit("L2", "P2", 0.25)
	yield.brief.Wells[0].ID, yield.table.response.Wells[0] = "Ø 1", "Ø 1"
	yield.brief.Wells[1].ID, yield.table.response.Wells[1] = "Å 1", "Å 1"
	yield.brief.Quotas = []Quota{{Name: "two of\nthree", Wells: []string{"Ø 1", "W3"}, PerDay: number(1200)}}
	room := canalStrip(MostHeadroom, 900)
	room.brief.Demand = number(700)
	room.limit("L1", "P1", 0.30)
	room.limit("L2", "P2", 0.25)
	requests := canalStrip(ClosestToRequests, 900)
	requests.limit("L1", "P1", 0.30)
	for i, q := range []float64{700, 300, 400} {
		requests.brief.Wells[i].Requested = number(q)
	}
	mixed := newSite(MostYield)
	*mixed = *newSite(MostYield, decidedWell("A", 432, 900), decidedWell("B", 432, 900), decidedWell("C", 300, 700), decidedWell("D", 0, 150))
	mixed.receptor("R", wells.PointLevel, 10, 0.001, 0.0011, 0.0012, 0.001)
	mixed.limit("L", "R", 1)
	two := 2
	mixed.brief.AtMostRunning = &two
	simple := newSite(MostYield)
	*simple = *newSite(MostYield, decidedWell("A", 432, 900), decidedWell("B", 432, 900), decidedWell("C", 300, 700))
	simple.receptor("R", wells.PointLevel, 10, 0.001, 0.0011, 0.0012)
	simple.limit("L", "R", 1)
	return map[string]one{
		"yield": {yield, total}, "headroom": {room, func(r *Report) float64 { return -*r.WorstMargin }},
		"requests": {requests, func(r *Report) float64 { return r.Requests.Squares }},
		"energy":   {canalEnergy(1100, 0.65), energy}, "turbulent": {turbulentPair(600, 4e-6, 3e-6), energy},
		"mixed": {mixed, total}, "least rates alone": {simple, total},
	}
}

// A problem file read back has the plan's optimum, and names and tells what is what.
func TestProblemFileReadBack(t *testing.T) {
	for name, c := range problemSites() {
		r, f := drafted(t, c.s)
		text, status, value := readBack(t, f)
		if status != convex.Optimal {
			t.Fatalf("%s: %v\n%s", name, status, text)
		}
		if want := c.aim(r); !(math.Abs(value-want) <= sameOptimum*math.Abs(want)) {
			t.Errorf("%s: %.15g read back, %.15g planned", name, value, want)
		}
		head, body, _ := strings.Cut(text, "NAME")
		for _, line := range strings.Split(body, "\n") {
			for _, r := range line {
				if r > '~' {
					t.Errorf("%s: line %q", name, line)
				}
			}
		}
		for _, w := range c.s.brief.Wells {
			if w.Mode == wells.Decided && !strings.Contains(head, "rate of well "+w.ID+", m3/d") {
				t.Errorf("%s: no word on well %s", name, w.ID)
			}
		}
		for _, l := range c.s.brief.Limits {
			if !strings.Contains(head, "row limit_"+strings.Split(l.ID, " ")[0]) {
				t.Errorf("%s: no word on limit %s in\n%s", name, l.ID, head)
			}
		}
		if strings.Contains(name, "mixed") != strings.Contains(text, "rule_") && name != "least rates alone" {
			t.Errorf("%s: rules\n%s", name, text)
		}
		if (name == "turbulent") != strings.Contains(head, "last quadratic problem") {
			t.Errorf("%s: %s", name, head)
		}
	}
}

// The problem file of a brief without a plan has no solution either.
func TestProblemFileOfAConflict(t *testing.T) {
	mixed := problemSites()["mixed"].s
	mixed.brief.Demand = number(1500)
	for name, s := range map[string]*site{"energy": canalEnergy(1222, 0.6), "mixed": mixed} {
		r, f := drafted(t, s)
		if r.Status != StatusInfeasible {
			t.Fatalf("%s: %s", name, r.Status)
		}
		if text, status, _ := readBack(t, f); status != convex.Infeasible || !strings.Contains(text, "no solution") {
			t.Errorf("%s: %v\n%s", name, status, text)
		}
	}
}

// outsideOptimum is the relative difference allowed to a solver that is not ours, with its default tolerances.
const outsideOptimum = 1e-6

// An outside solver finds the same optimum of the linear and mixed problems.
func TestProblemFileWithAnOutsideSolver(t *testing.T) {
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		t.Skip("set SPRINGBOUND_LONG=1 to run")
	}
	solver, err := exec.LookPath("glpsol")
	if err != nil {
		t.Skip("no glpsol on the path")
	}
	objective := regexp.MustCompile(`(?m)^Objective:\s+\S+ = (\S+)`)
	for name, c := range problemSites() {
		r, f := drafted(t, c.s)
		if f.Model.Problem.Quadratic() {
			continue
		}
		dir := t.TempDir()
		var b bytes.Buffer
		if err := f.Write(&b); err != nil {
			t.Fatal(err)
		}
		in, out := filepath.Join(dir, "problem.mps"), filepath.Join(dir, "answer.txt")
		if err := os.WriteFile(in, b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
		if said, err := exec.Command(solver, "--freemps", in, "-o", out).CombinedOutput(); err != nil {
			t.Fatalf("%s: %v\n%s", name, err, said)
		}
		answer, err := os.ReadFile(out)
		if err != nil {
			t.Fatal(err)
		}
		found := objective.FindSubmatch(answer)
		if found == nil {
			t.Fatalf("%s: no objective in\n%s", name, answer)
		}
		value, err := strconv.ParseFloat(string(found[1]), 64)
		if want := c.aim(r); err != nil || !(math.Abs(value-want) <= outsideOptimum*math.Abs(want)) {
			t.Errorf("%s: %v by the outside solver, %v planned (%v)", name, value, want, err)
		}
	}
}

// With least rates and a curved aim the file is a mixed quadratic programme: the plan keeps its rows, and its aim is the plan's.
func TestProblemFileOfAMixedCurvedAim(t *testing.T) {
	s := canalEnergy(800, 0.65)
	for i := range s.brief.Wells {
		s.brief.Wells[i].Min = 250
	}
	two := 2
	s.brief.AtMostRunning = &two
	r, f := drafted(t, s)
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	m, err := convex.ReadMPS(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	p := m.Problem
	if len(m.Integer) != 3 || !p.Quadratic() || len(r.Switching.StandStill) == 0 {
		t.Fatalf("%d whole columns, quadratic %v, %+v", len(m.Integer), p.Quadratic(), r.Switching)
	}
	x := make([]float64, p.Columns())
	for i, w := range r.Wells {
		if x[i] = w.Rate; w.Rate > 0 {
			x[m.Integer[i]] = 1
		}
	}
	value := m.Constant
	for j, v := range x {
		c := p.Column(j)
		value += c.Cost * v
		if !(v >= c.Lower-1e-6 && v <= c.Upper+1e-6) { // rates of hundreds, solved to 1e-9 of themselves
			t.Errorf("column %s at %v outside %v to %v", c.Name, v, c.Lower, c.Upper)
		}
	}
	for _, e := range p.HessianEntries() {
		part := e.Value * x[e.Row] * x[e.Column]
		if e.Row == e.Column {
			part /= 2
		}
		value += part
	}
	for i := 0; i < p.Rows(); i++ {
		row := p.Row(i)
		if v := dot(row.Coefficients, x); !(v >= row.Lower-1e-6 && v <= row.Upper+1e-6) {
			t.Errorf("row %s: %v outside %v to %v", row.Name, v, row.Lower, row.Upper)
		}
	}
	if want := r.PumpingEnergy.Energy; !(math.Abs(value-want) <= sameOptimum*want) {
		t.Errorf("%.12g in the file, %.12g in the plan", value, want)
	}
}
