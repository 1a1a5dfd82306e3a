package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// draft is a project written by a test: layers of features, tables as text, the project file.
type draft struct {
	crs    string
	layers map[string][]feature
	tables map[string]string
	toml   string // everything but the layers and tables sections
}

type feature struct {
	properties map[string]any
	kind       string
	at         any
}

func (f feature) json() map[string]any {
	return map[string]any{"type": "Feature", "properties": f.properties, "geometry": map[string]any{"type": f.kind, "coordinates": f.at}}
}

func lineString(p ...[2]float64) any { return p }

func polygon(rings ...[][2]float64) any {
	var out [][][2]float64
	for _, r := range rings {
		if r[0] != r[len(r)-1] {
			r = append(append([][2]float64(nil), r...), r[0])
		}
		out = append(out, r)
	}
	return out
}

// write lays the draft into a new folder and returns it.
func (d draft) write(t testing.TB) string {
	t.Helper()
	dir := t.TempDir()
	layerNames := []string{"extent", "edges", "zones", "rivers", "lakes", "springs", "wells", "receptors", "observations"}
	var top, rest strings.Builder
	top.WriteString("[layers]\n")
	for _, name := range layerNames {
		fs, ok := d.layers[name]
		if !ok {
			continue
		}
		list := make([]map[string]any, len(fs))
		for i, f := range fs {
			list[i] = f.json()
		}
		data, err := json.Marshal(map[string]any{"type": "FeatureCollection", "features": list})
		if err != nil {
			t.Fatal(err)
		}
		save(t, dir, name+".geojson", data)
		if d.crs == "" {
			fmt.Fprintf(&top, "%s = %q\n", name, name+".geojson")
		} else {
			fmt.Fprintf(&top, "%s = {file = %q, crs = %q}\n", name, name+".geojson", d.crs)
		}
	}
	if len(d.tables) > 0 {
		top.WriteString("[tables]\n")
	}
	for _, name := range []string{"wells", "limits", "licences", "states"} {
		if text, ok := d.tables[name]; ok {
			save(t, dir, name+".csv", []byte(text))
			fmt.Fprintf(&top, "%s = %q\n", name, name+".csv")
		}
	}
	head, sections, _ := strings.Cut(d.toml, "\n[")
	rest.WriteString(head + "\n" + top.String() + "\n[" + sections)
	save(t, dir, "project.toml", []byte(rest.String()))
	return dir
}

func save(t testing.TB, dir, name string, data []byte) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(dir, name), data, 0o644); err != nil {
		t.Fatal(err)
	}
}

// planned runs the main job and reads its plan.json.
func planned(t testing.TB, dir string, wantCode int) *plan.Report {
	t.Helper()
	var out, errs bytes.Buffer
	code := run(context.Background(), []string{"plan", dir}, streams{out: &out, err: &errs})
	if code != wantCode {
		t.Fatalf("exit code %d, want %d\n%s%s", code, wantCode, out.String(), errs.String())
	}
	data, err := os.ReadFile(filepath.Join(dir, "out", "plan.json"))
	if err != nil {
		t.Fatal(err)
	}
	var r plan.Report
	if err := json.Unmarshal(data, &r); err != nil {
		t.Fatal(err)
	}
	return &r
}
