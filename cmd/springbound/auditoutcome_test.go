package main

import (
	"bytes"
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// lineOf finds a check by the beginning of its name.
func lineOf(t *testing.T, e *plan.Evidence, name string) plan.EvidenceLine {
	t.Helper()
	for _, l := range e.Lines {
		if strings.HasPrefix(l.Check, name) {
			return l
		}
	}
	t.Fatalf("no check %q", name)
	return plan.EvidenceLine{}
}

// smallCanals is the two canals on a small mesh.
func smallCanals() draft {
	d := twoCanals(turns(1)[0])
	d.toml += "[mesh]\nnodes = 500\nfinest = \"30 m\"\n"
	return d
}

// What an audit says of sites that ask something of it.
func TestAuditOutcomes(t *testing.T) {
	for _, c := range []struct {
		name          string
		change        func(d *draft)
		check, result string
		says          string
	}{
		{"one canal alone fixes the head", func(d *draft) { d.layers["edges"] = d.layers["edges"][:1] }, "Without edge west", plan.NotDone, "only thing that fixes the head"},
		{"a limit watches the canal that is taken away", func(d *draft) { d.layers["edges"][1].properties["available_flow_m3_per_d"] = 300 }, "Without edge east", plan.Fail, "planned anew, the total is"},
		{"without the canal the brook dries up and nothing fixes the head", func(d *draft) {
			d.layers["edges"] = d.layers["edges"][:1]
			d.layers["rivers"] = []feature{{map[string]any{"name": "Brook", "water_level_m": 10.1, "bed_level_m": 10, "width_m": 2, "bed_resistance_d": 20}, "LineString", lineString(turns(1)[0].at(1000, 300), turns(1)[0].at(2500, 300))}}
		}, "Without edge west", plan.Fail, "no steady state"},
		{"a lake that has less than it gives", func(d *draft) {
			m := turns(1)[0]
			d.layers["lakes"] = []feature{{map[string]any{"name": "Tarn", "water_level_m": 10, "bed_resistance_d": 5, "available_flow_m3_per_d": 1}, "Polygon",
				polygon([][2]float64{m.at(900, 300), m.at(1300, 300), m.at(1300, 600), m.at(900, 600)})}}
		}, "Where the pumped water comes from", plan.Fail, "Lake Tarn would have to give"},
		{"two canals share", func(d *draft) {}, "Where the pumped water comes from", plan.Pass, "Edge west"},
		{"no limits", func(d *draft) { delete(d.tables, "limits") }, "Without edge west", plan.NotDone, "No receptor carries a limit"},
		{"salt water comes in", func(d *draft) { d.layers["edges"][0].properties["saline"] = true }, "Salt water drawn in", plan.Fail, "through edge west"},
		{"no salt water", func(d *draft) {}, "Salt water drawn in", plan.NotDone, "No edge is marked saline"},
		{"head below the top", func(d *draft) { d.toml = strings.Replace(d.toml, "[aquifer]\n", "[aquifer]\ntop_m = 9.9\n", 1) }, "Head above the top", plan.Fail, "below the top"},
		{"no top is given", func(d *draft) {}, "Head above the top", plan.NotDone, "no top of aquifer"},
		{"requests", func(d *draft) {
			d.toml = strings.Replace(d.toml, "most-yield", "closest-to-requests", 1)
			for _, w := range d.layers["wells"] {
				w.properties["requested_m3_per_d"] = 600
			}
		}, "The optimum by a second method", plan.Pass, "Both methods"},
		{"a well that may stand still", func(d *draft) { d.layers["wells"][0].properties["min_m3_per_d"] = 300 }, "The optimum by a second method", plan.Pass, "choice of running wells"},
	} {
		d := smallCanals()
		c.change(&d)
		l := lineOf(t, audited(t, d.write(t), nil, nil), c.check)
		if l.Result != c.result || !strings.Contains(l.Sentence, c.says) {
			t.Errorf("%s: %s: %q, want %s and %q", c.name, l.Result, l.Sentence, c.result, c.says)
		}
	}
}

// Where there is no plan the model is checked all the same, at the rates shown.
func TestAuditWithoutAPlan(t *testing.T) {
	d := smallCanals()
	d.toml = strings.Replace(d.toml, "aim = \"most-yield\"", "aim = \"most-yield\"\ndemand = \"1500 m3/d\"", 1)
	dir := d.write(t)
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"audit", "-q", dir}, streams{out: &out, err: &errs}); code != exitNoPlan {
		t.Fatalf("exit code %d, want %d\n%s", code, exitNoPlan, errs.String())
	}
	for _, name := range []string{"audit.json", "audit.txt", "audit.xlsx"} {
		if _, err := os.Stat(filepath.Join(dir, "out-audit", name)); err != nil {
			t.Error(err)
		}
	}
	e := audited(t, dir, nil, nil)
	if e.PlanStatus != plan.StatusInfeasible {
		t.Errorf("status %q", e.PlanStatus)
	}
	if l := lineOf(t, e, balanceCheck); l.Result != plan.Pass {
		t.Errorf("balance: %s", l.Sentence)
	}
	if l := lineOf(t, e, "Demand"); l.Result != plan.Fail {
		t.Errorf("demand: %s %s", l.Result, l.Sentence)
	}
}

// The plan on file is compared with the one found again; a changed file or rate is seen.
func TestAuditOfThePlanOnFile(t *testing.T) {
	const check = "The plan on file is this plan"
	d := smallCanals()
	dir := d.write(t)
	if l := lineOf(t, audited(t, dir, nil, nil), check); l.Result != plan.NotDone {
		t.Errorf("no plan yet: %s %s", l.Result, l.Sentence)
	}
	planned(t, dir, exitDone)
	if l := lineOf(t, audited(t, dir, nil, nil), check); l.Result != plan.Pass {
		t.Errorf("the same plan: %s %s", l.Result, l.Sentence)
	}
	limits := strings.Replace(d.tables["limits"], "0.30", "0.31", 1)
	save(t, dir, "limits.csv", []byte(limits))
	if l := lineOf(t, audited(t, dir, nil, nil), check); l.Result != plan.Fail || !strings.Contains(l.Sentence, "other files") {
		t.Errorf("another limit: %s %s", l.Result, l.Sentence)
	}
	save(t, filepath.Join(dir, "out"), "plan.json", []byte("{"))
	if l := lineOf(t, audited(t, dir, nil, nil), check); l.Result != plan.Fail {
		t.Errorf("a broken file: %s %s", l.Result, l.Sentence)
	}
}

// Too large to refine: that is said, and two coarser meshes stand in.
func TestAuditScalesTheOtherWay(t *testing.T) {
	var out, errs bytes.Buffer
	ctx := context.Background()
	j, err := newJob(ctx, solving{common: common{Project: valley(turns(1)[0], 0, valleyMesh).write(t), Quiet: true}}, streams{out: &out, err: &errs})
	if err != nil {
		t.Fatal(err)
	}
	e, err := j.evidence(ctx, auditOptions{mostNodes: 10000})
	if err != nil {
		t.Fatal(err)
	}
	l := lineOf(t, e, meshCheck)
	if !strings.Contains(l.Sentence, "more than 10000: not done; two coarser meshes") || l.Result != plan.Pass {
		t.Errorf("%s %s", l.Result, l.Sentence)
	}
	if !e.Meshes[2].OfPlan || !(e.Meshes[0].Nodes < e.Meshes[1].Nodes && e.Meshes[1].Nodes < e.Meshes[2].Nodes) {
		t.Errorf("meshes %+v", e.Meshes)
	}
}

// Sequences of which the order and the limit are known.
func TestJudgeConvergence(t *testing.T) {
	near := func(got *float64, want float64) bool { return got != nil && math.Abs(*got-want) <= 1e-9*math.Abs(want) } // rounding of a logarithm
	at := func(c, p float64) []float64 {                                                                              // 5 + c h^p at h = 1, 1/2, 1/4
		return []float64{5 + c, 5 + c*math.Exp2(-p), 5 + c*math.Exp2(-2*p)}
	}
	for _, x := range []struct {
		name              string
		values            []float64
		ofPlan            int
		order, limit      float64 // 0: none
		index             float64 // per cent
		behaviour, reason string
	}{
		{"second order", at(0.1, 2), 0, 2, 5, 100 * 1.25 * 0.1 / 5, "settles", "the error is 0.1"},
		{"second order, the finest is the plan's", at(0.1, 2), 2, 2, 5, 100 * 1.25 * 0.1 / 16 / 5, "settles", "the error is 0.1/16"},
		{"first order", at(-0.1, 1), 0, 1, 5, 100 * 1.25 * 0.1 / 5, "settles", "the error is 0.1"},
		{"third order is not counted on", at(0.1, 3), 0, 3, 0, 100 * 1.25 * (0.1 * 7 / 8 * 4 / 3) / 5, "settles", "as if second order"},
		{"slow", at(0.1, 0.25), 0, 0.25, 5, 100 * 3 * 0.1 / 5, "settles slowly", "factor 3"},
		{"swings", []float64{5.1, 4.9, 5.05}, 0, 0, 0, 100 * 3 * 0.2 / 5, "swings", "factor 3 on the largest difference"},
		{"grows", []float64{5, 5.1, 5.3}, 0, 0, 0, 100 * 3 * 0.3 / 5, "does not settle yet", "factor 3 on the whole way"},
		{"still", []float64{5, 5, 5}, 0, 0, 0, 0, "too small to tell", "no difference"},
	} {
		c := plan.ConvergenceLine{Values: x.values, Scale: 5}
		judgeConvergence(&c, x.ofPlan)
		if c.Behaviour != x.behaviour || !near(c.Index, x.index) && !(x.index == 0 && c.Index != nil && *c.Index == 0) {
			t.Errorf("%s: %q, index %v; want %q and %v (%s)", x.name, c.Behaviour, figureText(c.Index), x.behaviour, x.index, x.reason)
		}
		if x.order != 0 && !near(c.Order, x.order) || x.order == 0 && c.Order != nil {
			t.Errorf("%s: order %s, want %v", x.name, figureText(c.Order), x.order)
		}
		if x.limit != 0 && !near(c.Richardson, x.limit) {
			t.Errorf("%s: limit %s, want %v", x.name, figureText(c.Richardson), x.limit)
		}
	}
	c := plan.ConvergenceLine{Values: []float64{0, 0, 0}}
	if judgeConvergence(&c, 0); c.Index != nil || !strings.Contains(c.Behaviour, "no change") {
		t.Errorf("no scale: %+v", c)
	}
}

// Same input, same bytes, whatever the number of processors; they fit the schema; and an interrupted audit leaves nothing behind.
func TestAuditBytesAndInterruption(t *testing.T) {
	dir := valley(turns(1)[0], 0, "nodes = 1500\n").write(t)
	read := func(workers, name string) map[string][]byte {
		var out, errs bytes.Buffer
		to := filepath.Join(t.TempDir(), name)
		if code := run(context.Background(), []string{"audit", "-q", "--workers", workers, "--out", to, dir}, streams{out: &out, err: &errs}); code != exitDone && code != exitNoPlan {
			t.Fatalf("exit code %d\n%s", code, errs.String())
		}
		files := map[string][]byte{}
		for _, f := range []string{"audit.json", "audit.txt", "audit.xlsx"} {
			data, err := os.ReadFile(filepath.Join(to, f))
			if err != nil {
				t.Fatal(err)
			}
			files[f] = data
		}
		return files
	}
	one, two := read("1", "one"), read("2", "two")
	for name := range one {
		if !bytes.Equal(one[name], two[name]) {
			t.Errorf("%s differs between one and two processors", name)
		}
	}
	var schema, written map[string]any
	if err := json.Unmarshal(plan.EvidenceSchema(), &schema); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(one["audit.json"], &written); err != nil {
		t.Fatal(err)
	}
	if faults := schemaFaults(schema, schema, written, ""); len(faults) > 0 {
		t.Errorf("audit.json does not fit its schema: %q", faults)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	to := filepath.Join(t.TempDir(), "stopped")
	var out, errs bytes.Buffer
	if code := run(ctx, []string{"audit", "--out", to, dir}, streams{out: &out, err: &errs}); code != exitInterrupted {
		t.Errorf("exit code %d, want %d", code, exitInterrupted)
	}
	if _, err := os.Stat(to); !os.IsNotExist(err) {
		t.Error("something was written")
	}
}

// The example, as the README tells it: of all checks the coast alone fails, and without it the fen falls by two thirds more.
func TestAuditOfTheExample(t *testing.T) {
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		t.Skip("set SPRINGBOUND_LONG=1: it solves on half a million nodes")
	}
	e := audited(t, filepath.Join(moduleRoot(t), "examples", "varrow-bight"), nil, nil)
	if got := failing(e); len(got) != 1 || got[0] != "Without edge Coast" {
		t.Errorf("%q fail", got)
	}
	for _, r := range e.Boundaries[0].Receptors {
		if r.Receptor == "SEDGE" && !(math.Abs(*r.Factor-5.0/3) < 0.05) {
			t.Errorf("the fen falls by %.2f times as much", *r.Factor)
		}
	}
	for _, c := range e.Convergence[:6] { // the receptors: heads are smooth there, and three meshes tell the order to a tenth or two
		if c.Order == nil || !(math.Abs(*c.Order-2) <= 0.2) {
			t.Errorf("%s %s: order %s", c.What, c.ID, figureText(c.Order))
		}
	}
}
