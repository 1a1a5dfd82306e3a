package gisio

import (
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// Real outlines are read as valid or refused as the index says (validity there is GEOS's), and keep their area.
func TestReadLayerRealPolygons(t *testing.T) {
	index := sharedData(t, "polygons", "index.csv")
	for _, row := range readTable(t, index) {
		name := row["file"]
		t.Run(name, func(t *testing.T) {
			data, err := os.ReadFile(filepath.Join(filepath.Dir(index), name))
			if err != nil {
				t.Fatal(err)
			}
			layer, findings := ReadLayer(name, data, LayerOptions{})
			if valid := strings.EqualFold(row["valid_ogc"], "true"); valid != (findings.Err() == nil) {
				t.Fatalf("valid: want %v (%s), got\n%s", valid, row["validity_note"], findingsText(findings))
			}
			if findings.Err() != nil {
				return
			}
			want, err := strconv.ParseFloat(row["area_deg2"], 64)
			if err != nil {
				t.Fatal(err)
			}
			// The index prints nine digits.
			if got := planarArea(layer.Features[0].Geometry); math.Abs(got-want) > 1e-8*want {
				t.Errorf("area %v, want %v", got, want)
			}
		})
	}
}
