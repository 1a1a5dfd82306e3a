package main

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// lifted gives the wells of the two canals, whose level without pumping is 10 m, their lifts and an efficiency. They have no lowest
// level: their rows are there for the energy alone.
func lifted(aim string) draft {
	d := twoCanals(turns(1)[0])
	for i, z := range []float64{22, 21, 22.5} {
		p := d.layers["wells"][i].properties
		delete(p, "lowest_level_m")
		delete(p, "lowest_level_reason")
		p["max_m3_per_d"], p["delivery_level_m"], p["pump_efficiency_share"] = 900, 10+z, 0.65
		p["requested_m3_per_d"] = []float64{700, 300, 400}[i]
	}
	d.toml = strings.Replace(d.toml, "aim = \"most-yield\"\n", aim, 1)
	return d
}

// The QP of section 13 of the check values [C] at a demand of 1100: 105.821647 kWh/d at 65 %.
func TestLeastEnergyFromGeoJSON(t *testing.T) {
	dir := lifted("aim = \"least-energy\"\ndemand = \"1100 m3/d\"\n").write(t)
	r := planned(t, dir, exitDone)
	if !r.ModelValid || r.PumpingEnergy == nil {
		t.Fatalf("valid %v: %v, energy %v", r.ModelValid, r.Invalid, r.PumpingEnergy)
	}
	const tolerance = 0.002 // of the linear programme on the default mesh
	near := func(what string, got, want, by float64) {
		if !(math.Abs(got/want-1) <= by) {
			t.Errorf("%s %.6f, want %.6f: off by %.4f %%", what, got, want, 100*(got/want-1))
		}
	}
	near("energy", r.PumpingEnergy.Energy, 105.821647, tolerance)
	near("price of the demand", *r.PumpingEnergy.Demand, 26.660209*plan.EnergyPerLift/0.65, tolerance)
	for i, want := range []float64{652.771795, 171.489016, 275.739189} {
		near(r.Wells[i].ID, r.Wells[i].Rate, want, 5*tolerance) // two binding springs fix the rates: differences of nearly equal slopes
	}
	for i, want := range []float64{4046.468690, 7110.811129} {
		near("price of a spring", r.Receptors[i].Limits[0].ShadowPrice, want*plan.EnergyPerLift/0.65, 10*tolerance)
	}
	for _, c := range r.Checks {
		if strings.HasPrefix(c.Name, "Wells draw on each other") && c.Result != "pass" {
			t.Errorf("%+v", c)
		}
	}
	if _, err := os.Stat(filepath.Join(dir, "out", "plan.xlsx")); err != nil {
		t.Error(err)
	}
	if testing.Verbose() {
		t.Logf("%s; %v", r.Headline, r.Receptors[0].Limits[0].Sentence)
	}
}

// Requests of 1400 in all: the springs keep them back, and the reasons add up.
func TestClosestToRequestsFromGeoJSON(t *testing.T) {
	r := planned(t, lifted("aim = \"closest-to-requests\"\n").write(t), exitDone)
	if !r.ModelValid || r.Requests == nil || !(r.Requests.Short > 100) {
		t.Fatalf("valid %v, requests %+v", r.ModelValid, r.Requests)
	}
	for _, w := range r.Wells {
		sum := 0.0
		for _, reason := range w.Request.Reasons {
			sum += reason.Part
		}
		if !(math.Abs(sum-w.Request.Short) <= 1e-3) { // parts below 1e-7 of a range are left out
			t.Errorf("%s: reasons make %.6f of %.6f: %s", w.ID, sum, w.Request.Short, w.Request.Sentence)
		}
	}
}

// A demand that the springs do not allow is explained in the same files.
func TestEnergyOfTooMuchFromGeoJSON(t *testing.T) {
	r := planned(t, lifted("aim = \"least-energy\"\ndemand = \"1500 m3/d\"\n").write(t), exitNoPlan)
	if r.Status != plan.StatusInfeasible || r.Conflict == nil || len(r.Conflict.Members) < 2 {
		t.Errorf("status %s, conflict %+v", r.Status, r.Conflict)
	}
}
