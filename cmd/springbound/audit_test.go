package main

import (
	"bytes"
	"context"
	"reflect"
	"sort"
	"testing"

	"springbound/aquifer"
	"springbound/plan"
)

// valley is a site that a brook feeds: two heads far away decide little there. The wells stand shift metres east of the middle, where the brook turns
// away from them; at 2800 m the head at x = 7000 m is 250 m away.
func valley(m turn, shift float64, mesh string) draft {
	w := func(id string, x, y float64, extra map[string]any) feature {
		p := map[string]any{"id": id, "radius_m": 0.2, "max_m3_per_d": 1500, "lowest_level_m": -1000, "lowest_level_reason": "none"}
		for k, v := range extra {
			p[k] = v
		}
		return feature{p, "Point", m.at(x+shift, y)}
	}
	point := func(id string, x, y float64) feature {
		return feature{map[string]any{"id": id, "kind": "point"}, "Point", m.at(x+shift, y)}
	}
	edge := func(name string, level float64, a, b [2]float64) feature {
		return feature{map[string]any{"name": name, "kind": "prescribed_head", "level_m": level}, "LineString", lineString(a, b)}
	}
	return draft{crs: "EPSG:32630", layers: map[string][]feature{
		"extent": {{map[string]any{}, "Polygon", polygon([][2]float64{m.at(0, 0), m.at(7000, 0), m.at(7000, 3000), m.at(0, 3000)})}},
		"edges":  {edge("west", 11, m.at(0, 3000), m.at(0, 0)), edge("east", 10, m.at(7000, 0), m.at(7000, 3000))},
		"rivers": {{map[string]any{"name": "Brook", "water_level_m": 10, "bed_level_m": 0, "width_m": 8, "bed_resistance_d": 0.5}, "LineString",
			lineString(m.at(1500, 1200), m.at(3500, 1300), m.at(5200, 1250))}},
		"wells":     {w("W1", 3500, 900, nil), w("W2", 3900, 1900, nil), w("R9", 3100, 1800, map[string]any{"mode": "off"})},
		"receptors": {point("P1", 3650, 1050), point("P2", 3700, 1650)},
	}, tables: map[string]string{"limits": "id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,0.20,m,invented\nL2,P2,change,at_most,0.30,m,invented\n"},
		toml: "title = \"Valley\"\n[coordinates]\nworking = \"EPSG:32630\"\nvertical_datum = \"local\"\n[aquifer]\ntransmissivity = \"500 m2/d\"\nrecharge = \"0.4 mm/d\"\ntop_m = 0\n" +
			"[brief]\naim = \"most-yield\"\n[mesh]\n" + mesh}
}

// valleyMesh keeps every figure of the valley within the default accuracy; coarseMesh does not: 400 m from one node to the next at wells.
const valleyMesh, coarseMesh = "nodes = 4000\n", "nodes = 100\nfinest = \"400 m\"\ngrowth = 0.9\n"

// audited runs the audit on a project, with faults planted where asked.
func audited(t *testing.T, dir string, alter func(aquifer.Terms), slopes func(row int, slope []float64)) *plan.Evidence {
	t.Helper()
	ctx := context.Background()
	var out, errs bytes.Buffer
	c := solving{common: common{Project: dir, Quiet: true}, Workers: 1}
	j, err := newJob(ctx, c, streams{out: &out, err: &errs})
	if err != nil {
		t.Fatalf("%v\n%s", err, errs.String())
	}
	if alter != nil {
		j.alter = alter
		if err := j.build(ctx, 1); err != nil {
			t.Fatal(err)
		}
	}
	j.field.Alter = slopes
	e, err := j.evidence(ctx, auditOptions{workers: 1, mostNodes: mostRefinedNodes})
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// failing lists the checks that fail, in order of their names.
func failing(e *plan.Evidence) []string {
	out := []string{}
	for _, l := range e.Lines {
		if l.Result == plan.Fail {
			out = append(out, l.Check)
		}
	}
	sort.Strings(out)
	return out
}

const (
	balanceCheck       = "Water balance of every node and feature, recomputed"
	differencesCheck   = "Adjoint sensitivities against differences"
	superpositionCheck = "Superposition at the plan"
	meshCheck          = "Mesh: grid convergence index of every receptor's change and every running well's level"
)

// Every planted fault turns exactly the line that is there for it to fail, and none fails without a fault.
func TestAuditSeesPlantedFaults(t *testing.T) {
	m := turns(1)[0]
	flip := func(row, well int) func(int, []float64) {
		return func(i int, slope []float64) {
			if i == row {
				slope[well] = -slope[well]
			}
		}
	}
	far := m.at(600, 2500)
	for _, c := range []struct {
		name   string
		draft  draft
		alter  func(aquifer.Terms)
		slopes func(int, []float64)
		want   []string
	}{
		{"no fault", valley(m, 0, valleyMesh), nil, nil, []string{}},
		{"one conductance a hundredth too large", valley(m, 0, valleyMesh), func(x aquifer.Terms) { x.ScaleCoupling([2]float64{far[0], far[1]}, 1.01) }, nil, []string{balanceCheck}},
		{"recharge left out", valley(m, 0, valleyMesh), func(x aquifer.Terms) { x.Drop(aquifer.RechargeFeature, "background") }, nil, []string{balanceCheck}},
		{"sign in the adjoint, at a well that rests", valley(m, 0, valleyMesh), nil, flip(0, 2), []string{differencesCheck}},
		{"sign in the adjoint, at a well that runs", valley(m, 0, valleyMesh), nil, flip(1, 0), []string{differencesCheck, superpositionCheck}},
		{"coarse mesh", valley(m, 0, coarseMesh), nil, nil, []string{meshCheck}},
		{"boundary too close", valley(m, 2800, valleyMesh), nil, nil, []string{"Without edge east"}},
	} {
		e := audited(t, c.draft.write(t), c.alter, c.slopes)
		if got := failing(e); !reflect.DeepEqual(got, c.want) {
			t.Errorf("%s: %q fail, want %q", c.name, got, c.want)
			t.Log(string(evidenceText(e)))
		}
	}
}
