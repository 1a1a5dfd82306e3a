package gisio

import (
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// sharedData gives the path of a file of the shared test data, and skips the test where it is absent.
func sharedData(t testing.TB, parts ...string) string {
	t.Helper()
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			break
		}
		up := filepath.Dir(dir)
		if up == dir {
			t.Skip("no go.mod above the test's directory")
		}
		dir = up
	}
	path := filepath.Join(append([]string{dir, "..", "shared", "data"}, parts...)...)
	if _, err := os.Stat(path); err != nil {
		t.Skipf("shared test data are absent: %v", err)
	}
	return path
}

// planarArea gives the area of a polygon or of several parts in the units of the coordinates squared.
func planarArea(g orb.Geometry) float64 {
	sum := 0.0
	switch g := g.(type) {
	case orb.Polygon:
		for _, r := range g {
			sum += ringArea(r)
		}
	case orb.MultiPolygon:
		for _, p := range g {
			sum += planarArea(p)
		}
	}
	return sum
}

func readTable(t testing.TB, path string) []map[string]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, row := range rows[1:] {
		m := make(map[string]string)
		for i, name := range rows[0] {
			m[name] = row[i]
		}
		out = append(out, m)
	}
	return out
}

var areaPattern = regexp.MustCompile(`area ([0-9.]+)( deg|$|;| )`)

// edgeExpectation holds what the index says in words only.
var edgeExpectation = map[string]struct {
	width float64 // longitude from west to east [degree]; 0 = not looked at
	says  string  // a word that a finding must hold
}{
	"antimeridian-cut.geojson":                       {width: 20},
	"antimeridian-uncut-over180.geojson":             {width: 20},
	"antimeridian-uncut-jump.geojson":                {width: 20, says: "longer than 180 degrees"},
	"ring-unclosed.geojson":                          {says: "not closed"},
	"ring-closing-nearly.geojson":                    {says: "not closed"},
	"ring-order-hole-first.geojson":                  {says: "outside of the outer ring"},
	"coords-3d-closing-z-differs.geojson":            {says: "not closed"},
	"coords-1d.geojson":                              {says: "one number"},
	"coords-mixed-dim.geojson":                       {says: "third coordinate"},
	"coords-string-numbers.geojson":                  {says: "without quotes"},
	"coords-empty.geojson":                           {says: "empty geometry"},
	"coords-empty-ring.geojson":                      {says: "0 positions"},
	"coords-missing.geojson":                         {says: "coordinates"},
	"coords-wrong-depth-shallow.geojson":             {says: "depth 2"},
	"coords-wrong-depth-deep.geojson":                {says: "depth 3"},
	"projected-metres.geojson":                       {says: "EPSG"},
	"duplicate-consecutive.geojson":                  {says: "repeat"},
	"duplicate-near-consecutive.geojson":             {says: "0.1 mm"},
	"spike.geojson":                                  {says: "spike"},
	"zero-area.geojson":                              {says: "zero area"},
	"hole-outside.geojson":                           {says: "outside"},
	"hole-crosses-shell.geojson":                     {says: "crossing"},
	"hole-shares-edge.geojson":                       {says: "sharing"},
	"holes-overlap.geojson":                          {says: "crossing"},
	"geometry-missing.geojson":                       {says: "geometry"},
	"properties-missing.geojson":                     {says: "properties"},
	"type-wrong-case.geojson":                        {says: `write "Polygon"`},
	"type-missing.geojson":                           {says: "type"},
	"type-unknown.geojson":                           {says: "Circle"},
	"featurecollection-in-featurecollection.geojson": {says: "FeatureCollection"},
	"foreign-members.geojson":                        {says: "geometries"},
	"json-nan.geojson":                               {says: "column 87"},
	"json-huge-exponent.geojson":                     {says: "out of range"},
	"json-large-finite.geojson":                      {says: "1e+200"},
	"json-leading-plus.geojson":                      {says: "syntax"},
	"json-leading-zero.geojson":                      {says: "leading zeros"},
	"json-trailing-comma.geojson":                    {says: "syntax"},
	"json-bom.geojson":                               {says: "byte order mark"},
	"json-utf16le.geojson":                           {says: "UTF-16"},
	"json-duplicate-key.geojson":                     {says: "second time"},
	"json-deep-nesting.geojson":                      {says: "deep"},
	"json-deep-nesting-20000.geojson":                {says: "deep"},
	"json-trailing-garbage.geojson":                  {says: "after the end"},
	"json-two-documents.geojson":                     {says: "second JSON value"},
	"json-empty-file.geojson":                        {says: "empty"},
	"json-null-document.geojson":                     {says: "null"},
	"json-geojson-as-array.geojson":                  {says: "array"},
}

// The index of the edge cases says for each file whether it is to be read, and what area comes out.
func TestReadLayerEdgeCases(t *testing.T) {
	index := sharedData(t, "geojson-edge", "index.csv")
	for _, row := range readTable(t, index) {
		name := row["file"]
		t.Run(name, func(t *testing.T) {
			data, err := os.ReadFile(filepath.Join(filepath.Dir(index), name))
			if err != nil {
				t.Fatal(err)
			}
			layer, findings := ReadLayer(name, data, LayerOptions{Layer: "extent"})
			errs, warnings := len(findings.Errors()), len(findings.Warnings())
			switch verdict := row["verdict"]; verdict {
			case "accept":
				if errs != 0 || warnings != 0 {
					t.Fatalf("want no finding, got %v", findings)
				}
			case "accept-warn":
				if errs != 0 || warnings == 0 {
					t.Fatalf("want warnings only, got %v", findings)
				}
			case "reject", "null-geometry", "reject-or-flag":
				if errs == 0 {
					t.Fatalf("want an error, got %v", findings)
				}
			case "accept-or-reject":
			default:
				t.Fatalf("unknown verdict %q", verdict)
			}
			want := edgeExpectation[name]
			if text := findingsText(findings); !strings.Contains(text, want.says) {
				t.Errorf("findings do not say %q:\n%s", want.says, text)
			}
			if errs > 0 {
				if len(layer.Features) != 0 {
					t.Errorf("a feature with an error was kept")
				}
				return
			}
			if len(layer.Features) != 1 || layer.Features[0].Geometry == nil {
				t.Fatalf("features: %+v", layer.Features)
			}
			checkEdgeArea(t, row["expected_reading"], layer.Features[0].Geometry, want.width)
		})
	}
}

func checkEdgeArea(t *testing.T, expected string, g orb.Geometry, width float64) {
	t.Helper()
	if got := g.Bound().Max[0] - g.Bound().Min[0]; width != 0 && got != width {
		t.Errorf("width %v, want %v", got, width)
	}
	area := planarArea(g)
	if strings.Contains(expected, "same as ok-square") {
		expected = "area 16 deg"
	}
	if m := areaPattern.FindStringSubmatch(expected); m != nil {
		want, err := strconv.ParseFloat(m[1], 64)
		if err != nil {
			t.Fatal(err)
		}
		// The shapes have coordinates up to 12 with sums of a dozen products: 1e-14 is above their rounding, 1e-12 above
		// that of areas printed with twelve digits.
		if math.Abs(area-want) > 1e-12*want {
			t.Errorf("area %v, want %v", area, want)
		}
	} else if !(area > 0) {
		t.Errorf("area %v, want more than 0", area)
	}
}

func findingsText(fs Findings) string {
	var b strings.Builder
	for _, f := range fs {
		b.WriteString(f.Severity.String() + ": " + f.String() + "\n")
	}
	return b.String()
}
