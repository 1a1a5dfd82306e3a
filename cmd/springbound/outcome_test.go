package main

import (
	"bytes"
	"context"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// A demand beyond what the limits allow: the files are written, name a conflict and what would have to give, and the exit code is 4.
func TestInfeasibleDemandIsExplainedInTheSameFiles(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.toml = strings.Replace(d.toml, "aim = \"most-yield\"\n", "aim = \"most-yield\"\ndemand = \"1500 m3/d\"\n", 1)
	dir := d.write(t)
	r := planned(t, dir, exitNoPlan)
	if r.Status != plan.StatusInfeasible || r.Conflict == nil {
		t.Fatalf("status %q, conflict %v", r.Status, r.Conflict)
	}
	if len(r.Conflict.Members) < 2 || len(r.Conflict.Relaxation) == 0 || r.Conflict.Sentence == "" {
		t.Errorf("conflict is thin: %+v", r.Conflict)
	}
	if _, err := os.Stat(filepath.Join(dir, "out", "plan.xlsx")); err != nil {
		t.Error(err)
	}
	// LP-1 allows 1221.986: the demand has to give 278.014 if it alone gives.
	found := false
	for _, m := range r.Conflict.Members {
		if m.Alone != nil && m.Unit == "m3/d" {
			found = true
			if math.Abs(*m.Alone-(1500-1221.986123)) > 0.002*1221.986 { // the tolerance of the total on the default mesh
				t.Errorf("the demand alone would have to give %.3f m³/d, want 278.014", *m.Alone)
			}
		}
	}
	if !found {
		t.Errorf("the demand is not in the conflict: %+v", r.Conflict.Members)
	}
}

// The level in a well is kept with its full loss, the quadratic part included: the bore of W1 stands on its lowest level, and the
// loss is that of its running rate.
func TestTurbulentLossIsKept(t *testing.T) {
	const c = 1e-4 // d²/m⁵
	d := twoCanals(turns(1)[0])
	d.layers["wells"][0].properties["quadratic_loss_d2_per_m5"] = c
	d.layers["wells"][0].properties["lowest_level_m"] = 0
	r := planned(t, d.write(t), exitDone)
	w := r.Wells[0]
	if !r.ModelValid || w.LevelMargin == nil || !(math.Abs(*w.LevelMargin) <= 1e-4) { // a hundredth of a level's printed digit
		t.Errorf("valid %v, margin %v", r.ModelValid, w.LevelMargin)
	}
	if want := c * w.Rate * w.Rate; !(math.Abs(w.WellLoss-want) <= 1e-9*want) || !(w.Rate > 100) {
		t.Errorf("rate %.3f, loss %.6f, want %.6f", w.Rate, w.WellLoss, want)
	}
}

// What a canal is stated to give at most is a limit like any other.
func TestAvailableFlowLimitsThePlan(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.layers["edges"][1].properties["available_flow_m3_per_d"] = 300
	r := planned(t, d.write(t), exitDone)
	for _, c := range r.Capture {
		if c.Feature == "east" && !(math.Abs(c.Flow-300) <= 1e-6) { // it binds: the plan stands on it to the programme's tolerance
			t.Errorf("the east canal gives %.6f m³/d, want 300", c.Flow)
		}
	}
	if !(r.TotalRate < 1221.9) {
		t.Errorf("total %.1f is not below that without the limit", r.TotalRate)
	}
}

// A spring that the plan would dry: the model does not hold, and the report says which.
func TestSpringBelowItsOutletIsNamed(t *testing.T) {
	d := twoCanals(turns(1)[0])
	m := turns(1)[0]
	d.layers["springs"] = []feature{{map[string]any{"name": "Well head", "outlet_level_m": 9.9, "conductance_m2_per_d": 50, "effective_radius_m": 1}, "Point", m.at(1000, 700)}}
	r := planned(t, d.write(t), exitNoPlan)
	if r.ModelValid || !strings.Contains(strings.Join(r.Invalid, " "), "Well head") {
		t.Errorf("valid %v, because %v", r.ModelValid, r.Invalid)
	}
	d.layers["springs"][0].properties["outlet_level_m"] = 10.5
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"plan", d.write(t)}, streams{out: &out, err: &errs}); code != exitBadData || !strings.Contains(errs.String(), "Well head") {
		t.Errorf("dry without pumping: exit code %d\n%s", code, errs.String())
	}
}

// A part of the aquifer where nothing fixes the head is refused by name.
func TestNothingFixesTheHead(t *testing.T) {
	d := twoCanals(turns(1)[0])
	delete(d.layers, "edges")
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"plan", d.write(t)}, streams{out: &out, err: &errs}); code != exitBadData || !strings.Contains(errs.String(), "nothing fixes the head") {
		t.Errorf("exit code %d\n%s", code, errs.String())
	}
}
