package main

import (
	"context"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"springbound/adjoint"
	"springbound/plan"
	"springbound/wells"
)

// planBeside plans the whole job anew with one more well of at most the given rate at a node of the same mesh: its own influences, its own
// rows, the factorisation that is there.
func planBeside(t *testing.T, j *job, node int32, most float64) *plan.Report {
	t.Helper()
	zero, n := 0.0, len(j.project.Wells)
	p, m := *j.project, *j.field.Model
	p.Wells = append(slices.Clone(p.Wells), wells.Well{ID: "further", At: m.At(node), Radius: 0.2, Present: &zero, Max: most, MaxSource: "test", DutyHours: 24})
	m.RequestNode = slices.Insert(slices.Clone(m.RequestNode), n, node)
	m.Radii = slices.Insert(slices.Clone(m.Radii), n, m.Radii[0])
	field, err := adjoint.NewField(&m, p.Wells, p.Receptors)
	if err != nil {
		t.Fatal(err)
	}
	other := &job{project: &p, field: field, progress: j.progress, relativeRecharge: j.relativeRecharge, withoutFirm: true}
	r, err := other.makePlan(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if r.Status != plan.StatusOptimal {
		t.Fatalf("node %d: %s", node, r.Status)
	}
	if m.Factorisations != j.field.Model.Factorisations {
		t.Errorf("%d factorisations, the map has %d", m.Factorisations, j.field.Model.Factorisations)
	}
	return r
}

// The example's map of values agrees with plans made anew beside a small well at places all over it, and at the best place.
func TestValueEqualsReplansOnTheExample(t *testing.T) {
	// The value is a derivative: with 1 m³/d the same limits bind. Totals of 5000 m³/d with limits kept to 1e-7 of their size leave 1e-3 of
	// the gain; 1 % of the further well's rate is asked for.
	const rate, tolerance = 1.0, 0.01
	count := 6
	if os.Getenv("SPRINGBOUND_LONG") == "1" {
		count = 50
	}
	w := sited(t, filepath.Join(moduleRoot(t), "examples", "varrow-bight"), request{spacing: 500, count: 5, keep: "plan", radius: 0.2})
	if w.result.Factorisations != 1 {
		t.Errorf("%d factorisations, want 1", w.result.Factorisations)
	}
	nodes := append(w.places[:1:1], someNodes(w, count)...)
	without := w.report.TotalRate
	worst, worth := 0.0, 0
	for _, n := range nodes {
		r := planBeside(t, w.job, n, rate)
		got, want := (r.TotalRate-without)/rate, math.Max(0, w.value[n]) // a well that is not worth it stands still
		if want > 0 {
			worth++
		}
		worst = math.Max(worst, math.Abs(got-want))
		if !(math.Abs(got-want) <= tolerance) {
			t.Errorf("node %d at %.0f: value %.6f, gain of a new plan %.6f", n, w.job.field.Model.At(n), w.value[n], got)
		}
	}
	if worth < 2 {
		t.Errorf("only %d of %d places are worth a well: the test says little", worth, len(nodes))
	}
	t.Logf("largest difference %.1e at %d places, of which %d are worth a well", worst, len(nodes), worth)
}
