package mesh

import (
	"context"
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/paulmach/orb"
)

// dataDir finds ../shared/data beside the project root, or skips the test.
func dataDir(t testing.TB) string {
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for ; dir != filepath.Dir(dir); dir = filepath.Dir(dir) {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			data := filepath.Join(dir, "..", "shared", "data")
			if _, err := os.Stat(data); err == nil {
				return data
			}
			break
		}
	}
	t.Skip("the test data in ../shared/data is not here")
	return ""
}

// earthRadius for the local projection of the test polygons [m].
const earthRadius = 6371000.0

// readPolygon reads a GeoJSON polygon and projects it by a local equirectangular map to metres.
func readPolygon(t testing.TB, file string) Domain {
	raw, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Coordinates [][][]float64
		Geometry    *struct{ Coordinates [][][]float64 }
		Features    []struct {
			Geometry struct{ Coordinates [][][]float64 }
		}
	}
	if err := json.Unmarshal(raw, &doc); err != nil {
		t.Fatal(err)
	}
	rings := doc.Coordinates
	if doc.Geometry != nil {
		rings = doc.Geometry.Coordinates
	}
	if len(doc.Features) > 0 {
		rings = doc.Features[0].Geometry.Coordinates
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, p := range rings[0] {
		lo, hi = min(lo, p[1]), max(hi, p[1])
	}
	sy := earthRadius * math.Pi / 180
	sx := sy * math.Cos((lo+hi)/2*math.Pi/180)
	project := func(r [][]float64) orb.Ring {
		var out orb.Ring
		for _, p := range r {
			out = append(out, orb.Point{sx * (p[0] - rings[0][0][0]), sy * (p[1] - rings[0][0][1])})
		}
		return out
	}
	var d Domain
	d.Outer = project(rings[0])
	for _, r := range rings[1:] {
		d.Holes = append(d.Holes, project(r))
	}
	return d
}

// long says whether the longer proofs are asked for.
func long() bool { return os.Getenv("SPRINGBOUND_LONG") == "1" }

func TestPolygons(t *testing.T) {
	files, err := filepath.Glob(filepath.Join(dataDir(t), "polygons", "*.geojson"))
	if err != nil || len(files) == 0 {
		t.Fatal("no polygons", err)
	}
	for i, f := range files {
		name := strings.TrimSuffix(filepath.Base(f), ".geojson")
		if !long() && i%6 != 0 && !strings.HasPrefix(name, "defect") {
			continue
		}
		t.Run(name, func(t *testing.T) {
			d := readPolygon(t, f)
			t0 := time.Now()
			m, err := Build(context.Background(), d, Options{Nodes: 2000})
			if strings.HasPrefix(name, "defect") {
				checkDefect(t, name, m, err)
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range faultsOf(m, d, false) {
				t.Error(f)
			}
			q := m.Quality
			if q.Nodes < 1500 || q.Nodes > 50000 { // 2,000 asked for: a fifth less at most, and a coast's own vertices more
				t.Errorf("%d nodes", q.Nodes)
			}
			if q.BudgetHit || q.PoorOther > 0 || q.EncroachedLeft > 0 || q.MinAngleFreeDeg < 25 {
				t.Errorf("quality %+v", q)
			}
			t.Logf("%d nodes in %v, min angle %.2f (free %.2f), at sharp %d, obtuse %.3f, notes %v", q.Nodes, time.Since(t0), q.MinAngleDeg, q.MinAngleFreeDeg, q.PoorAtSharpInput, q.ObtuseShare, m.Notes)
		})
	}
}

// checkDefect asserts what each defective source polygon must give.
func checkDefect(t *testing.T, name string, m *Mesh, err error) {
	var de *DomainError
	switch {
	case !strings.Contains(name, "bratsk"): // repeated points only: dropped and told, and what is left is a ring
		if err != nil {
			t.Fatal(err)
		}
		if len(m.Notes) == 0 || !strings.Contains(m.Notes[0].Text, "repeats") {
			t.Errorf("notes %v", m.Notes)
		}
	case !errors.As(err, &de):
		t.Errorf("error %v", err)
	case len(de.Problems) != 1:
		t.Errorf("want one problem, have %v", err)
	case de.Problems[0].Kind != RingTouchesItself:
		t.Errorf("have %v", err)
	}
}
