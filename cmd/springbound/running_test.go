package main

import (
	"math"
	"strings"
	"testing"

	"springbound/plan"
)

// Wells with a least rate of 4 L/s (345.6 m³/d) under limits that allow about 1222 m³/d in all: W1 and W3 run together or W2 alone,
// the report says who stands still, and the firm capacity is planned.
func TestWellsMayStandStill(t *testing.T) {
	d := twoCanals(turns(1)[0])
	for _, w := range d.layers["wells"] {
		w.properties["min_L_per_s"] = 4
	}
	d.toml += "demand = \"100 m3/d\"\n[[brief.together]]\nwells = [\"W1\", \"W3\"]\n[[brief.exclude]]\nwells = [\"W2\", \"W3\"]\n"
	r := planned(t, d.write(t), exitDone)
	if !r.ModelValid || r.Status != plan.StatusOptimal || r.Switching == nil || !r.Switching.Proven {
		t.Fatalf("%s, %q, %+v", r.Status, r.Invalid, r.Switching)
	}
	running := 0
	for _, w := range r.Wells {
		if w.Rate == 0 {
			continue
		}
		running++
		if !(w.Rate >= 345.6*(1-1e-9)) { // a rate on its end is put on it exactly
			t.Errorf("well %s at %.3f", w.ID, w.Rate)
		}
	}
	if running == 0 || running == 3 || len(r.Switching.StandStill) != 3-running || len(r.Switching.Rules) != 2 {
		t.Errorf("%d run, %+v", running, r.Switching)
	}
	for _, text := range r.NotAssessed {
		if strings.Contains(text, "stand still") {
			t.Error(text)
		}
	}
	f := r.Firm
	if f == nil || len(f.Lines) != running || !(math.Abs(f.AllInService-r.TotalRate) <= 1e-6*r.TotalRate) { // the demand of 100 does not bind
		t.Fatalf("%+v, total %.3f", f, r.TotalRate)
	}
	found := false
	for _, c := range r.Checks {
		found = found || (c.Name == "Demand with the largest well out of service" && c.Result != "not done")
	}
	if !found {
		t.Error("the demand with a well out of service is not judged")
	}
}
