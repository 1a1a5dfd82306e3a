package main

import (
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"springbound/plan"
)

// dryingSite is the two canals with springs near the wells and a perched river, which some plans dry or part from the aquifer.
func dryingSite(rng *rand.Rand) draft {
	m := turns(1)[0]
	d := twoCanals(m)
	level := func(low, high float64) float64 { return math.Round(1000*(low+(high-low)*rng.Float64())) / 1000 }
	for i := range 2 {
		name := string(rune('A' + i))
		at := m.at(400+2200*rng.Float64(), 300+1400*rng.Float64())
		d.layers["springs"] = append(d.layers["springs"], feature{map[string]any{"name": name, "outlet_level_m": level(9.4, 10.1), "conductance_m2_per_d": 30 + 300*rng.Float64(), "effective_radius_m": 1}, "Point", at})
	}
	bed := level(9.3, 9.9)
	y := 250 + 1500*rng.Float64()
	d.layers["rivers"] = []feature{{map[string]any{"name": "Brook", "water_level_m": bed + 0.3, "bed_level_m": bed, "width_m": 3, "bed_resistance_d": 2 + 30*rng.Float64()}, "LineString",
		lineString(m.at(300, y), m.at(2700, y+100*rng.Float64()))}}
	d.tables["limits"] = "id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,0.60,m,invented\nL2,P2,change,at_most,0.70,m,invented\n"
	d.toml += "[mesh]\nnodes = 600\n"
	return d
}

// settledTolerance is by how much a plan's own statement may differ from a full solve at its rates [m], as promised.
const settledTolerance = 1e-6

// Every plan over random sites that switch ends, states what a full solve finds, and keeps its limits; tightening a limit never gives more.
func TestPlansOverSitesThatSwitch(t *testing.T) {
	count := 12
	if os.Getenv("SPRINGBOUND_LONG") == "1" {
		count = 200
	}
	rng := rand.New(rand.NewPCG(99, 1))
	switched := 0
	for k := range count {
		d := dryingSite(rng)
		r := planned(t, d.write(t), exitDone)
		if r.Status != plan.StatusOptimal || !r.ModelValid {
			t.Fatalf("site %d: %s, valid %v: %v", k, r.Status, r.ModelValid, r.Invalid)
		}
		for _, c := range r.Checks {
			if c.Name == "Features that switch" && c.Detail[:4] != "none" {
				switched++
			}
		}
		for _, rec := range r.Receptors {
			if d := math.Abs(rec.Change - rec.ChangeResolved); !(d <= settledTolerance) {
				t.Errorf("site %d, %s: stated %.9f, solved %.9f", k, rec.ID, rec.Change, rec.ChangeResolved)
			}
			if over := rec.ChangeResolved - rec.Limits[0].Limit; over > settledTolerance {
				t.Errorf("site %d, %s: passes its limit by %.2e m", k, rec.ID, over)
			}
		}
		if k%4 == 0 {
			d.tables["limits"] = "id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,0.55,m,invented\nL2,P2,change,at_most,0.70,m,invented\n"
			if tight := planned(t, d.write(t), exitDone); tight.TotalRate > r.TotalRate*(1+1e-6) {
				t.Errorf("site %d: %.6f with a tighter limit, %.6f without", k, tight.TotalRate, r.TotalRate)
			}
		}
	}
	if switched < count/4 {
		t.Errorf("only %d of %d plans switch anything", switched, count)
	}
	t.Logf("%d of %d plans switch something", switched, count)
}
