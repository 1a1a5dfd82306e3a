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

// A spring that the plan dries: it gives nothing then, drawdown is larger than with the spring acting, and the report says so. The plan's own
// statement agrees with a full solve.
func TestSpringThatStopsIsSettled(t *testing.T) {
	m := turns(1)[0]
	with := func(outlet float64) draft {
		d := twoCanals(m)
		d.layers["springs"] = []feature{{map[string]any{"name": "Well head", "outlet_level_m": outlet, "conductance_m2_per_d": 200, "effective_radius_m": 1}, "Point", m.at(1000, 700)}}
		d.layers["receptors"] = append(d.layers["receptors"], feature{map[string]any{"id": "S", "kind": "spring", "feature": "Well head"}, "Point", m.at(1000, 700)})
		return d
	}
	dries := planned(t, with(9.9).write(t), exitDone)
	free := planned(t, twoCanals(m).write(t), exitDone)
	acts := planned(t, with(-100).write(t), exitDone)
	if !strings.Contains(strings.Join(dries.Cautions, " "), "Well head") {
		t.Errorf("the spring that stops is not named: %v", dries.Cautions)
	}
	s := dries.Receptors[2]
	if !(s.NoPumping > 10) || s.Value != 0 || math.Abs(s.Change-s.NoPumping) > 1e-9 {
		t.Errorf("flow without pumping %.3f, at the plan %.3f, lost %.3f", s.NoPumping, s.Value, s.Change)
	}
	// A dry spring gives the wells nothing more, so the plan stands between that without a spring and that with one that always acts.
	if !(dries.TotalRate > free.TotalRate+1) || !(dries.TotalRate < acts.TotalRate-1) {
		t.Errorf("totals: without %.2f, drying %.2f, always acting %.2f", free.TotalRate, dries.TotalRate, acts.TotalRate)
	}
	for _, rec := range dries.Receptors[:2] {
		if d := math.Abs(rec.Change - rec.ChangeResolved); !(d <= 1e-6) { // m, as promised
			t.Errorf("%s: change %.9f, from a full solve %.9f", rec.ID, rec.Change, rec.ChangeResolved)
		}
		if !(rec.Change <= rec.Limits[0].Limit+1e-6) {
			t.Errorf("%s: change %.9f passes its limit", rec.ID, rec.Change)
		}
	}
	// Dry without pumping already: the spring does nothing at all.
	idle := planned(t, with(10.5).write(t), exitDone)
	if math.Abs(idle.TotalRate/free.TotalRate-1) > 1e-3 { // another mesh: the spring asks for a node
		t.Errorf("total with an idle spring %.4f, without %.4f", idle.TotalRate, free.TotalRate)
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

// What needs no mesh to be seen is reported by check, not first by plan.
func TestCheckSeesTheSiteAsAWhole(t *testing.T) {
	for _, c := range []struct {
		label string
		spoil func(d *draft)
		says  string
	}{
		{"touching edges of different levels", func(d *draft) {
			m := turns(1)[0]
			d.layers["edges"] = append(d.layers["edges"], feature{map[string]any{"name": "south", "kind": "prescribed_head", "level_m": 9}, "LineString", lineString(m.at(0, 0), m.at(3000, 0))})
		}, "where they touch"},
		{"nothing fixes the head", func(d *draft) { delete(d.layers, "edges") }, "nothing fixes the head"},
		{"two wells at one place", func(d *draft) { d.layers["wells"][1].at = d.layers["wells"][0].at }, "W2"},
	} {
		d := twoCanals(turns(1)[0])
		c.spoil(&d)
		var out, errs bytes.Buffer
		if code := run(context.Background(), []string{"check", d.write(t)}, streams{out: &out, err: &errs}); code != exitBadData || !strings.Contains(out.String(), c.says) {
			t.Errorf("%s: exit code %d\n%s%s", c.label, code, out.String(), errs.String())
		}
	}
}

// Leakage lowers the drop between two circles below Thiem's; the circles stay where that is small, and the plan stays valid.
func TestHandFormulaInLeakyGround(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.toml = strings.Replace(d.toml, "transmissivity = \"800 m2/d\"\n", "transmissivity = \"800 m2/d\"\nleakage_resistance = \"3000 d\"\nsource_head_m = 11\n", 1)
	r := planned(t, d.write(t), exitDone)
	if r.HandFormula == nil || r.HandFormula.Far > 1600.0/15 { // sqrt(800 m²/d x 3000 d) = 1549 m
		t.Fatalf("hand formula %+v", r.HandFormula)
	}
	for _, c := range r.Checks {
		if strings.HasPrefix(c.Name, "Hand formula") && c.Result != "pass" {
			t.Errorf("%s: %s, %s", c.Name, c.Result, c.Detail)
		}
	}
}

// The folder for results must be a folder, and maps of receptors that are gone do not stay behind.
func TestOutputFolder(t *testing.T) {
	d := twoCanals(turns(1)[0])
	dir := d.write(t)
	save(t, dir, "file", []byte("x"))
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"plan", "--out", filepath.Join(dir, "file"), dir}, streams{out: &out, err: &errs}); code != exitUsage {
		t.Errorf("a file as folder: exit code %d\n%s", code, errs.String())
	}
	planned(t, dir, exitDone)
	old := filepath.Join(dir, "out", "influence", "GONE.geojson")
	if err := os.WriteFile(old, []byte("{}"), 0o644); err != nil {
		t.Fatal(err)
	}
	planned(t, dir, exitDone)
	if _, err := os.Stat(old); !os.IsNotExist(err) {
		t.Error("an old map stayed")
	}
}

// Water at rest: both canals at one level, no recharge, no well running. Nothing flows, and the balance is not judged by its rounding.
func TestWaterAtRest(t *testing.T) {
	d := twoCanals(turns(1)[0])
	for _, w := range d.layers["wells"] {
		w.properties["max_m3_per_d"] = 0.0
		w.properties["mode"] = "off"
		delete(w.properties, "max_m3_per_d")
	}
	d.layers["wells"][0].properties["mode"] = "decided"
	d.layers["wells"][0].properties["max_m3_per_d"] = 100.0
	d.tables["limits"] = "id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,0,m,invented\n"
	r := planned(t, d.write(t), exitDone)
	for _, c := range r.Checks {
		if c.Name == "Water balance closes" && c.Result != "pass" {
			t.Errorf("%s: %s", c.Result, c.Detail)
		}
	}
	if r.TotalRate != 0 {
		t.Errorf("total %v", r.TotalRate)
	}
}
