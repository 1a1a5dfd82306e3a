package main

import (
	"bytes"
	"context"
	"encoding/json"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/gisio"
	"springbound/plan"
	"springbound/wells"
)

// sited runs the siting of a project up to its fields.
func sited(t *testing.T, dir string, q request) *where {
	t.Helper()
	var out, errs bytes.Buffer
	j, err := newJob(context.Background(), solving{common: common{Project: dir, Quiet: true}}, streams{out: &out, err: &errs})
	if err != nil {
		t.Fatal(err)
	}
	w, err := j.where(context.Background(), q)
	if err != nil {
		t.Fatal(err)
	}
	return w
}

// withFurther is the aquifer with one more well at a node of the same mesh.
type withFurther struct {
	job  *job
	with []float64 // its sensitivity in every row of the job's response
}

func (m *withFurther) Linearise(ctx context.Context, rates []float64) (*plan.Response, error) {
	last := len(rates) - 1
	r, err := m.job.Linearise(ctx, rates[:last])
	if err != nil {
		return nil, err
	}
	r.Wells, r.At, r.WellHeads = append(r.Wells, "further"), rates, nil
	for i := range r.Rows {
		r.Rows[i].Slope = append(append([]float64(nil), r.Rows[i].Slope...), m.with[i])
		r.Rows[i].Change += m.with[i] * rates[last]
	}
	return r, nil
}

// further returns the brief and the aquifer with a further well of at most the given rate at a node.
func further(t *testing.T, w *where, node int32, most float64) (plan.Brief, *withFurther) {
	t.Helper()
	ctx := context.Background()
	solved, err := adjoint.Solve(ctx, w.job.field.Model, w.job.field.Model, w.job.field.FixedFunctionals(), []int32{node}, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	m := &withFurther{job: w.job}
	for _, z := range solved.At {
		m.with = append(m.with, z[0])
	}
	b, err := w.job.brief(ctx)
	if err != nil {
		t.Fatal(err)
	}
	b.Wells = append(append([]wells.Well(nil), b.Wells...), wells.Well{ID: "further", At: w.job.field.Model.At(node), Radius: 0.2, Max: most, DutyHours: 24})
	b.WellTerms = append(append([]plan.WellTerm(nil), b.WellTerms...), plan.WellTerm{})
	return b, m
}

// someNodes picks open nodes at random.
func someNodes(w *where, n int) (out []int32) {
	rng := rand.New(rand.NewPCG(3, 50))
	for len(out) < n {
		if i := rng.IntN(len(w.open)); w.open[i] {
			out = append(out, int32(i))
		}
	}
	return out
}

// The value of a well at 50 places equals the gain of a plan made afresh with a small well there, and the model is factored once.
func TestValueEqualsReplans(t *testing.T) {
	// A rate of 0.01 m³/d leaves the same limits binding; totals near 1200 are solved to about 1e-9 of themselves, 1e-4 of the gain. The
	// tie rule and the rows' tolerance stay below the 1 % asked for.
	const rate, tolerance = 0.01, 0.01
	w := sited(t, twoCanals(turns(1)[0]).write(t), request{spacing: 200, count: 10, keep: "plan", radius: 0.2})
	if w.result.Factorisations != 1 || w.job.field.Model.Factorisations != 1 {
		t.Errorf("%d factorisations, want 1", w.result.Factorisations)
	}
	worst, worth := 0.0, 0
	for _, n := range someNodes(w, 50) {
		b, m := further(t, w, n, rate)
		r, err := plan.Make(context.Background(), b, m, plan.Options{})
		if err != nil {
			t.Fatal(err)
		}
		got, want := (r.TotalRate-w.report.TotalRate)/rate, math.Max(0, w.value[n]) // a well that is not worth it stands still
		if want > 0 {
			worth++
		}
		worst = math.Max(worst, math.Abs(got-want))
		if !(math.Abs(got-want) <= tolerance) {
			t.Errorf("node %d: value %.6f, gain of a new plan %.6f", n, w.value[n], got)
		}
	}
	if worth < 10 {
		t.Errorf("only %d of 50 places are worth a well: the test says little", worth)
	}
	t.Logf("largest difference %.1e, %d of 50 places worth a well", worst, worth)
}

// The largest further rate beside idle wells takes exactly what is left of the limit that it names, and passes none.
func TestLargestRateEqualsSuperposition(t *testing.T) {
	// superposition and influence are the same solves in another order
	const tolerance = 1e-9
	rate := 500.0
	w := sited(t, twoCanals(turns(1)[0]).write(t), request{spacing: 200, count: 10, keep: "others", radius: 0.2, rate: &rate})
	for _, n := range someNodes(w, 50) {
		most := w.siting.LargestRate(n)
		b, m := further(t, w, n, most)
		rates := make([]float64, len(b.Wells))
		rates[len(rates)-1] = most
		response, err := m.Linearise(context.Background(), rates)
		if err != nil {
			t.Fatal(err)
		}
		r, err := plan.Evaluate(b, response, rates)
		if err != nil {
			t.Fatal(err)
		}
		for _, rec := range r.Receptors {
			l, first := rec.Limits[0], limitName(w.limits[w.siting.First[n]])
			if !(l.Headroom >= -tolerance*l.Limit) || (l.ID+" on "+rec.ID == first && !(l.Headroom <= tolerance*l.Limit)) {
				t.Errorf("node %d, %.3f m³/d: headroom %.3e m of %s, %s reached first", n, most, l.Headroom, l.ID, first)
			}
		}
	}
	for i := range w.places {
		if p := w.result.Places[i]; *p.Fits != (*p.LargestRate >= rate) {
			t.Errorf("place %d: largest rate %.1f, fits %v", p.Rank, *p.LargestRate, *p.Fits)
		}
	}
}

// whereFiles runs where on a folder and returns its files.
func whereFiles(t *testing.T, code int, dir string, flags ...string) (files map[string][]byte, out string) {
	t.Helper()
	to := t.TempDir()
	var o, e bytes.Buffer
	if got := run(context.Background(), append([]string{"where", "--out", to, dir}, flags...), streams{out: &o, err: &e}); got != code {
		t.Fatalf("exit code %d, want %d\n%s%s", got, code, o.String(), e.String())
	}
	files = map[string][]byte{}
	for _, name := range []string{"where.json", "where.csv", "siting/value.geojson", "siting/largest_rate.geojson", "siting/rate_fits.geojson"} {
		if data, err := os.ReadFile(filepath.Join(to, filepath.FromSlash(name))); err == nil {
			files[name] = data
		}
	}
	return files, o.String() + e.String()
}

// The example: files read back, the best place is confirmed, the same bytes for any number of processors, and no forbidden promise.
func TestWhereOnTheExample(t *testing.T) {
	example := filepath.Join(moduleRoot(t), "examples", "varrow-bight")
	flags := []string{"--rate", "20 L/s", "--keep", "others", "--count", "4", "--spacing", "500 m", "--lowest-level=-14 m"}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	files, out := whereFiles(t, exitDone, example, flags...)
	runtime.GOMAXPROCS(2)
	again, _ := whereFiles(t, exitDone, example, flags...)
	if len(files) != 5 {
		t.Fatalf("%d files", len(files))
	}
	for name, data := range files {
		if !bytes.Equal(data, again[name]) {
			t.Errorf("%s differs with the number of processors", name)
		}
		if filepath.Ext(name) != ".geojson" {
			continue
		}
		if layer, findings := gisio.ReadLayer(name, data, gisio.LayerOptions{}); len(findings) > 0 || len(layer.Features) == 0 {
			t.Errorf("%s: %d features, %v", name, len(layer.Features), findings)
		}
	}
	var r whereResult
	if err := json.Unmarshal(files["where.json"], &r); err != nil {
		t.Fatal(err)
	}
	if len(r.Places) != 4 || r.Factorisations != 1 || strings.Count(string(files["where.csv"]), "\n") != 5 {
		t.Errorf("%d places, %d factorisations", len(r.Places), r.Factorisations)
	}
	for i, p := range r.Places {
		for _, q := range r.Places[:i] {
			if d := math.Hypot(p.X-q.X, p.Y-q.Y); d < r.Spacing {
				t.Errorf("places %d and %d are %.0f m apart", p.Rank, q.Rank, d)
			}
			if *p.Value-*p.Relief > *q.Value-*q.Relief {
				t.Errorf("place %d is worth more than place %d", p.Rank, q.Rank)
			}
		}
		if p.OwnLevelRate == nil || *p.LargestRate > *p.OwnLevelRate {
			t.Errorf("place %d passes its own lowest level", p.Rank)
		}
	}
	if !r.Confirmation.Done || len(r.Confirmation.Steps) != 2 {
		t.Fatalf("not confirmed: %s", r.Confirmation.Sentence)
	}
	for _, s := range r.Confirmation.Steps { // another mesh: 1 % of the well's rate, several times what meshes differ by
		if !(math.Abs(s.Predicted-s.Confirmed) <= 0.01*s.Most) {
			t.Errorf("at most %.0f m³/d: predicted %.4f, confirmed %.4f", s.Most, s.Predicted, s.Confirmed)
		}
	}
	for _, word := range []string{"catchment", "protection zone", "safe", "approved"} {
		if strings.Contains(strings.ToLower(out), word) {
			t.Errorf("the result says %q", word)
		}
	}
	if !strings.Contains(out, planningAid) {
		t.Error("the usual last line is missing")
	}
}

// What cannot be sited is refused or said: no plan, another aim, flags that cannot be read.
func TestWhereRefusals(t *testing.T) {
	d := twoCanals(turns(1)[0])
	dir := d.write(t)
	for _, flags := range [][]string{{"--rate", "10"}, {"--rate=-3 L/s"}, {"--spacing", "0 m"}, {"--count", "0"}, {"--keep", "all"}, {"--radius", "0 m"}} {
		if files, _ := whereFiles(t, exitUsage, dir, flags...); len(files) > 0 {
			t.Errorf("%v: files were written", flags)
		}
	}
	d.toml += "demand = \"900 L/s\"\n"
	if files, out := whereFiles(t, exitNoPlan, d.write(t)); len(files) > 0 || !strings.Contains(out, "no valid plan") {
		t.Errorf("without a plan: %d files\n%s", len(files), out)
	}
	d = twoCanals(turns(1)[0])
	d.toml = strings.Replace(d.toml, "most-yield", "most-headroom", 1) + "demand = \"800 m3/d\"\n"
	files, out := whereFiles(t, exitDone, d.write(t))
	if files["siting/value.geojson"] != nil || !strings.Contains(out, "defined for the aim most-yield only") {
		t.Errorf("another aim: %s", out)
	}
}

// A limit on the worst place of an area holds all over it: checked by full solves with a well at nodes in and around the area.
func TestLargestRateKeepsAWorstPlace(t *testing.T) {
	w := sited(t, filepath.Join(moduleRoot(t), "examples", "varrow-bight"), request{spacing: 200, count: 10, keep: "others", radius: 0.2})
	m, area := w.job.field.Model, -1
	for i, o := range m.Site.Outlines {
		if o.Name == "receptor SEDGE-LOW" {
			area = i
		}
	}
	places := m.NodesIn(area)
	checked := 0
	for i, k := range w.siting.First {
		if !w.open[i] || k < 0 || limitName(w.limits[k]) != "fen-worst on SEDGE-LOW" || checked == 10 {
			continue
		}
		checked++
		sinks := append(w.job.field.Sinks(w.keptState.Rates), aquifer.Sink{Node: int32(i), Rate: w.siting.LargestRate(int32(i))})
		h, err := m.Heads(context.Background(), sinks)
		if err != nil {
			t.Fatal(err)
		}
		largest := 0.0
		for _, n := range places {
			largest = math.Max(largest, w.keptState.Base[n]-h[n])
		}
		// the limit is 0.75 m; heads of 10 m and changes by the same solves leave about 1e-12 m
		if !(math.Abs(largest-0.75) <= 1e-9) {
			t.Errorf("node %d: largest drawdown %.12f m, limit 0.75 m", i, largest)
		}
	}
	if checked == 0 {
		t.Error("the limit is reached first nowhere: nothing was checked")
	}
}

// Where features switch, the result says that it is local.
func TestWhereSaysLocalWhereFeaturesSwitch(t *testing.T) {
	m := turns(1)[0]
	d := twoCanals(m)
	d.layers["springs"] = []feature{{map[string]any{"name": "idle", "outlet_level_m": 10.5, "conductance_m2_per_d": 200, "effective_radius_m": 2}, "Point", m.at(1500, 300)}}
	w := sited(t, d.write(t), request{spacing: 200, count: 3, keep: "plan", radius: 0.2})
	if !w.job.field.Switching || !strings.Contains(strings.Join(w.result.Notes, " "), "hold near it only") {
		t.Errorf("switching %v: %v", w.job.field.Switching, w.result.Notes)
	}
}
