package main

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"springbound/plan"
)

// turn is a rotation and an offset in the plane of EPSG:32630.
type turn struct{ sin, cos, dx, dy float64 }

func (m turn) at(x, y float64) [2]float64 {
	return [2]float64{m.dx + m.cos*x - m.sin*y, m.dy + m.sin*x + m.cos*y}
}

func turns(n int) []turn {
	rng := rand.New(rand.NewPCG(41, 20261201))
	var out []turn
	for range n {
		s, c := math.Sincos(rng.Float64() * 2 * math.Pi)
		out = append(out, turn{s, c, 400000 + rng.Float64()*2e5, 4e6 + rng.Float64()*5e5})
	}
	return out
}

// twoCanals is BM4 of the check values as a project.
func twoCanals(m turn) draft {
	w := func(id string, x, y float64) feature {
		return feature{map[string]any{"id": id, "radius_m": 0.2, "max_m3_per_d": 2500, "present_m3_per_d": 0, "lowest_level_m": -1000, "lowest_level_reason": "none"}, "Point", m.at(x, y)}
	}
	p := func(id string, x, y float64) feature {
		return feature{map[string]any{"id": id, "kind": "point"}, "Point", m.at(x, y)}
	}
	canal := func(name string, a, b [2]float64) feature {
		return feature{map[string]any{"name": name, "kind": "prescribed_head", "level_m": 10}, "LineString", lineString(a, b)}
	}
	return draft{crs: "EPSG:32630", layers: map[string][]feature{
		"extent":    {{map[string]any{}, "Polygon", polygon([][2]float64{m.at(0, 0), m.at(3000, 0), m.at(3000, 2000), m.at(0, 2000)})}},
		"edges":     {canal("west", m.at(0, 2000), m.at(0, 0)), canal("east", m.at(3000, 0), m.at(3000, 2000))},
		"wells":     {w("W1", 700, 600), w("W2", 1500, 1400), w("W3", 2200, 800)},
		"receptors": {p("P1", 1200, 1000), p("P2", 1900, 1300)},
	}, tables: map[string]string{"limits": "id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,0.30,m,invented\nL2,P2,change,at_most,0.25,m,invented\n"},
		toml: "title = \"Two canals\"\n[coordinates]\nworking = \"EPSG:32630\"\nvertical_datum = \"local\"\n[aquifer]\ntransmissivity = \"800 m2/d\"\n[brief]\naim = \"most-yield\"\n"}
}

// TestTwoCanalsFromGeoJSON: LP-1 of section 13 of the check values [C]: total 1221.986123, both springs bind.
func TestTwoCanalsFromGeoJSON(t *testing.T) {
	const total, tolerance = 1221.986123, 0.002
	for k, m := range turns(5) {
		r := planned(t, twoCanals(m).write(t), exitDone)
		if rel := r.TotalRate/total - 1; !(math.Abs(rel) <= tolerance) {
			t.Errorf("placing %d: total %.4f, want %.4f: off by %.4f %%", k, r.TotalRate, total, 100*rel)
		}
		for i, want := range []float64{2969.775953, 1324.213347} {
			l := r.Receptors[i].Limits[0]
			if rel := l.ShadowPrice/want - 1; !l.Binds || !(math.Abs(rel) <= tolerance) {
				t.Errorf("placing %d: price of %s %.3f, want %.3f, binds %v", k, l.ID, l.ShadowPrice, want, l.Binds)
			}
		}
		if testing.Verbose() {
			t.Logf("total %.4f (%.4f %%), %d nodes", r.TotalRate, 100*(r.TotalRate/total-1), r.Mesh.Nodes)
		}
	}
}

// sharedData finds the data folder beside the project; the test is skipped where it is absent.
func sharedData(t testing.TB) string {
	t.Helper()
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for ; dir != filepath.Dir(dir); dir = filepath.Dir(dir) {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			data := filepath.Join(dir, "..", "shared", "data")
			if _, err := os.Stat(data); err != nil {
				t.Skipf("the shared data folder %s is absent", data)
			}
			return data
		}
	}
	t.Fatal("no go.mod above the test")
	return ""
}

func readTable(t testing.TB, path string) (rows []map[string]string) {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, line := range all[1:] {
		row := map[string]string{}
		for i, v := range line {
			row[all[0][i]] = v
		}
		rows = append(rows, row)
	}
	return rows
}

func number(t testing.TB, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// pick returns the first of the named numbers that a feature carries.
func pick(t testing.TB, properties map[string]any, names ...string) float64 {
	t.Helper()
	for _, n := range names {
		if v, ok := properties[n].(float64); ok {
			return v
		}
	}
	t.Skipf("a feature carries none of %v: %v", names, properties)
	return 0
}

// referenceSite turns a site's plain inputs into a project. The local plane is the UTM plane less an offset.
func referenceSite(t testing.TB, dir string) draft {
	t.Helper()
	read := func(name string, to any) {
		data, err := os.ReadFile(filepath.Join(dir, name))
		if err != nil {
			t.Fatal(err)
		}
		if err := json.Unmarshal(data, to); err != nil {
			t.Fatalf("%s: %v", name, err)
		}
	}
	var site struct {
		Coordinates struct {
			E0, N0    float64
			Projected string
		}
	}
	read("site.json", &site)
	type collection struct {
		Features []struct {
			Properties map[string]any
			Geometry   struct {
				Type        string
				Coordinates json.RawMessage
			}
		}
	}
	shift := func(p [2]float64) [2]float64 {
		return [2]float64{p[0] + site.Coordinates.E0, p[1] + site.Coordinates.N0}
	}
	geometry := func(kind string, raw json.RawMessage) any {
		if kind == "Point" {
			var p [2]float64
			if err := json.Unmarshal(raw, &p); err != nil {
				t.Fatal(err)
			}
			return shift(p)
		}
		if kind == "Polygon" {
			var rings [][][2]float64
			if err := json.Unmarshal(raw, &rings); err != nil {
				t.Fatal(err)
			}
			for _, r := range rings {
				for i := range r {
					r[i] = shift(r[i])
				}
			}
			return rings
		}
		var line [][2]float64
		if err := json.Unmarshal(raw, &line); err != nil {
			t.Fatal(err)
		}
		for i := range line {
			line[i] = shift(line[i])
		}
		return line
	}
	d := draft{crs: site.Coordinates.Projected, layers: map[string][]feature{}, tables: map[string]string{}}
	var c collection
	read("boundary_metric.geojson", &c)
	d.layers["extent"] = []feature{{map[string]any{}, "Polygon", geometry("Polygon", c.Features[0].Geometry.Coordinates)}}
	var zones, features collection
	read("zones_metric.geojson", &zones)
	for _, z := range zones.Features {
		major, minor := z.Properties["transmissivity_major_m2_per_d"].(float64), z.Properties["transmissivity_minor_m2_per_d"].(float64)
		p := map[string]any{"name": "T " + z.Properties["id"].(string), "transmissivity_m2_per_d": math.Sqrt(major * minor)}
		if major != minor {
			p["anisotropy_ratio"], p["anisotropy_angle_deg"] = major/minor, z.Properties["major_axis_angle_deg_ccw_from_local_x"]
		}
		d.layers["zones"] = append(d.layers["zones"], feature{p, "Polygon", geometry("Polygon", z.Geometry.Coordinates)})
	}
	read("features_metric.geojson", &features)
	for _, f := range features.Features {
		id, at := f.Properties["id"], geometry(f.Geometry.Type, f.Geometry.Coordinates)
		switch f.Properties["kind"] {
		case "prescribed_head":
			d.layers["edges"] = append(d.layers["edges"], feature{map[string]any{"name": id, "kind": "prescribed_head", "level_m": f.Properties["head_m"]}, "LineString", at})
		case "head_dependent":
			d.layers["edges"] = append(d.layers["edges"], feature{map[string]any{"name": id, "kind": "head_dependent", "level_m": f.Properties["outside_head_m"], "conductance_m_per_d": f.Properties["conductance_per_length_m_per_d"]}, "LineString", at})
		case "recharge_area":
			d.layers["zones"] = append(d.layers["zones"], feature{map[string]any{"name": fmt.Sprintf("recharge %v", id), "recharge_m_per_d": f.Properties["recharge_m_per_d"]}, "Polygon", at})
		case "river":
			c := pick(t, f.Properties, "conductance_per_length_m_per_d")
			d.layers["rivers"] = append(d.layers["rivers"], feature{map[string]any{"name": id, "width_m": 1, "bed_resistance_d": 1 / c, "water_level_m": pick(t, f.Properties, "head_m", "level_m", "water_level_m", "stage_m")}, "LineString", at})
		case "leakage_area":
			d.layers["zones"] = append(d.layers["zones"], feature{map[string]any{"name": fmt.Sprintf("leakage %v", id), "leakage_resistance_d": 1 / pick(t, f.Properties, "leakance_per_d"),
				"source_head_m": pick(t, f.Properties, "source_head_m", "head_m")}, "Polygon", at})
		case "spring":
			d.layers["springs"] = append(d.layers["springs"], feature{map[string]any{"name": id, "conductance_m2_per_d": pick(t, f.Properties, "conductance_m2_per_d"),
				"outlet_level_m": pick(t, f.Properties, "outlet_level_m", "head_m", "level_m"), "effective_radius_m": pick(t, f.Properties, "radius_m", "effective_radius_m")}, "Point", at})
		default:
			t.Skipf("feature kind %v is not known to this test", f.Properties["kind"])
		}
	}
	limits := []string{"id,receptor,quantity,sense,value,unit,source"}
	for _, w := range readTable(t, filepath.Join(dir, "wells.csv")) {
		d.layers["wells"] = append(d.layers["wells"], feature{map[string]any{"id": w["id"], "radius_m": number(t, w["radius_m"]), "max_m3_per_d": number(t, w["capacity_m3_per_d"]), "present_m3_per_d": 0,
			"lowest_level_m": -1000, "lowest_level_reason": "none"}, "Point", shift([2]float64{number(t, w["x_m"]), number(t, w["y_m"])})})
	}
	for _, p := range readTable(t, filepath.Join(dir, "controls.csv")) {
		d.layers["receptors"] = append(d.layers["receptors"], feature{map[string]any{"id": p["id"], "kind": "point"}, "Point", shift([2]float64{number(t, p["x_m"]), number(t, p["y_m"])})})
		limits = append(limits, fmt.Sprintf("L-%s,%s,change,at_most,%s,m,invented", p["id"], p["id"], p["limit"]))
	}
	d.tables["limits"] = strings.Join(limits, "\n") + "\n"
	d.toml = "title = \"Reference site\"\n[coordinates]\nworking = \"" + d.crs + "\"\nvertical_datum = \"local\"\n[aquifer]\ntransmissivity = \"1 m2/d\"\n[brief]\naim = \"most-yield\"\n"
	return d
}

// Tolerances promised for the reference sites, relative.
const (
	siteTolerance = 0.003 // sensitivities and totals
	ownTolerance  = 0.002 // drawdown in the pumped well itself
)

func TestReferenceSites(t *testing.T) {
	data := sharedData(t)
	folders, err := filepath.Glob(filepath.Join(data, "reference-sites", "*", "site.json"))
	if err != nil || len(folders) == 0 {
		t.Fatalf("no reference sites: %v", err)
	}
	for _, file := range folders {
		dir := filepath.Dir(file)
		t.Run(filepath.Base(dir), func(t *testing.T) {
			r := planned(t, referenceSite(t, dir).write(t), exitDone)
			wells := map[string]int{}
			for i, w := range r.Wells {
				wells[w.ID] = i
			}
			worst := 0.0
			for _, row := range readTable(t, filepath.Join(dir, "expected", "sensitivities.csv")) {
				for k, id := range r.Sensitivities.Receptors {
					if id != row["control"] {
						continue
					}
					for w, i := range wells {
						want := number(t, row[w])
						rel := r.Sensitivities.Values[k][i]/want - 1
						worst = math.Max(worst, math.Abs(rel))
						if !(math.Abs(rel) <= siteTolerance) {
							t.Errorf("%s to %s: %.6e, want %.6e: off by %.4f %%", id, w, r.Sensitivities.Values[k][i], want, 100*rel)
						}
					}
				}
			}
			worstOwn := 0.0
			for _, row := range readTable(t, filepath.Join(dir, "expected", "own_well.csv")) {
				w := r.Wells[wells[row["well"]]]
				got := w.DrawdownByWell[wells[row["well"]]] + w.OwnPerRate
				rel := got/number(t, row["drawdown_per_rate_m_per_m3_per_d"]) - 1
				worstOwn = math.Max(worstOwn, math.Abs(rel))
				if !(math.Abs(rel) <= ownTolerance) {
					t.Errorf("own drawdown of %s: off by %.4f %%", w.ID, 100*rel)
				}
			}
			for _, row := range readTable(t, filepath.Join(dir, "expected", "heads.csv")) {
				if i, ok := wells[row["id"]]; ok {
					want := number(t, row["head_without_pumping_m"])
					if d := r.Wells[i].StaticLevel - want; !(math.Abs(d) <= siteTolerance*math.Abs(want)) {
						t.Errorf("head at %s without pumping: %.5f, want %.5f", row["id"], r.Wells[i].StaticLevel, want)
					}
				}
			}
			checkOptimum(t, r, filepath.Join(dir, "expected", "lp.json"))
			t.Logf("%d nodes; sensitivities off by at most %.4f %%, own wells %.4f %%", r.Mesh.Nodes, 100*worst, 100*worstOwn)
		})
	}
}

func checkOptimum(t *testing.T, r *plan.Report, file string) {
	t.Helper()
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	var lp struct {
		Total    float64 `json:"optimal_total_m3_per_d"`
		Controls []struct {
			ID      string
			Binding bool
			Dual    float64 `json:"dual_m3_per_d_per_unit"`
		}
	}
	if err := json.Unmarshal(data, &lp); err != nil {
		t.Fatal(err)
	}
	if rel := r.TotalRate/lp.Total - 1; !(math.Abs(rel) <= siteTolerance) {
		t.Errorf("total %.3f, want %.3f: off by %.4f %%", r.TotalRate, lp.Total, 100*rel)
	}
	for _, c := range lp.Controls {
		for _, rec := range r.Receptors {
			if rec.ID == c.ID && rec.Limits[0].Binds != c.Binding {
				t.Errorf("limit of %s binds: %v, want %v", c.ID, rec.Limits[0].Binds, c.Binding)
			}
		}
	}
	t.Logf("total %.4f against %.4f", r.TotalRate, lp.Total)
}
