package main

import (
	"bytes"
	"context"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan/convex"
)

// The programme of a plan stands beside the results, and read back it has the plan's total.
func TestProblemFileBesideThePlan(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.toml += "[mesh]\nnodes = 600\n"
	dir := d.write(t)
	file := filepath.Join(dir, "plan.mps")
	run := func(code int, args ...string) string {
		t.Helper()
		var out, errs bytes.Buffer
		if got := run(context.Background(), append([]string{"plan", dir}, args...), streams{out: &out, err: &errs}); got != code {
			t.Fatalf("%v: exit code %d, want %d\n%s", args, got, code, errs.String())
		}
		return errs.String()
	}
	run(exitDone, "--problem", file)
	r := planned(t, dir, exitDone)
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	m, err := convex.ReadMPS(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	sol, err := convex.Solve(context.Background(), m.Problem, convex.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if !(math.Abs(-sol.Objective-r.TotalRate) <= 1e-9*r.TotalRate) { // both are certified to that
		t.Errorf("%v read back, %v planned", -sol.Objective, r.TotalRate)
	}
	before, err := os.ReadFile(filepath.Join(dir, "project.toml"))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ path, says string }{
		{dir, "is a folder"},
		{filepath.Join(dir, "nowhere", "plan.mps"), "there is no folder"},
		{filepath.Join(dir, "project.toml", "plan.mps"), "not a directory"},
		{filepath.Join(dir, "project.toml"), "which the project is read from"},
		{filepath.Join(dir, "wells.geojson"), "which the project is read from"},
		{filepath.Join(dir, "out", "plan.json"), "could replace another result"},
		{os.DevNull, "not a file that can be replaced"},
	} {
		if said := run(exitUsage, "--problem", c.path); !strings.Contains(said, c.says) {
			t.Errorf("%s: %q", c.path, said)
		}
	}
	if after, err := os.ReadFile(filepath.Join(dir, "project.toml")); err != nil || !bytes.Equal(before, after) {
		t.Errorf("the project file changed: %v", err)
	}
}
