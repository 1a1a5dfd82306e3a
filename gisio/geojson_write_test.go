package gisio

import (
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

func TestWriteFeatures(t *testing.T) {
	square := orb.Ring{{0, 0}, {0, 4}, {4, 4}, {4, 0}, {0, 0}} // clockwise
	hole := orb.Ring{{1, 1}, {3, 1}, {3, 3}, {1, 1}}           // counterclockwise
	text, err := WriteFeatures([]OutputFeature{
		{ID: "a\"</script>", Geometry: orb.Point{-0.00000001, 12.123456789}, Properties: []Property{{"z", 1.5}, {"a\n", "=1+1"}, {"n", nil}, {"i", 3}}},
		{Geometry: orb.Polygon{square, hole}},
	})
	if err != nil {
		t.Fatal(err)
	}
	const want = `{"type":"FeatureCollection","features":[
{"type":"Feature","id":"a\"\u003c/script\u003e","properties":{"z":1.5,"a\n":"=1+1","n":null,"i":3},"geometry":{"type":"Point","coordinates":[0,12.1234568]}},
{"type":"Feature","properties":{},"geometry":{"type":"Polygon","coordinates":[[[0,0],[4,0],[4,4],[0,4],[0,0]],[[1,1],[3,3],[3,1],[1,1]]]}}
]}
`
	if string(text) != want {
		t.Errorf("got\n%s\nwant\n%s", text, want)
	}
	empty, err := WriteFeatures(nil)
	if err != nil || string(empty) != "{\"type\":\"FeatureCollection\",\"features\":[]}\n" {
		t.Errorf("%s %v", empty, err)
	}
	if _, findings := ReadLayer("a", empty, LayerOptions{}); len(findings) != 0 {
		t.Errorf("%v", findings)
	}
}

func TestWriteFeaturesRefuses(t *testing.T) {
	deep := any(1.0)
	for range maxJSONDepth {
		deep = []any{deep}
	}
	for name, f := range map[string]OutputFeature{
		"no geometry":        {},
		"NaN":                {Geometry: orb.Point{math.NaN(), 0}},
		"infinite":           {Geometry: orb.LineString{{0, 0}, {math.Inf(1), 0}}},
		"latitude":           {Geometry: orb.Point{0, 90.1}},
		"longitude":          {Geometry: orb.Point{361, 0}},
		"short line":         {Geometry: orb.LineString{{0, 0}, {1e-9, 0}}},
		"empty line":         {Geometry: orb.LineString{}},
		"no lines":           {Geometry: orb.MultiLineString{}},
		"no points":          {Geometry: orb.MultiPoint{}},
		"no rings":           {Geometry: orb.Polygon{}},
		"open ring":          {Geometry: orb.Polygon{{{0, 0}, {4, 0}, {4, 4}, {0, 4}}}},
		"flat ring":          {Geometry: orb.Polygon{{{0, 0}, {4, 0}, {2, 1e-9}, {0, 0}}}},
		"a ring":             {Geometry: orb.Ring{{0, 0}, {4, 0}, {2, 1}, {0, 0}}},
		"property NaN":       {Geometry: orb.Point{}, Properties: []Property{{"a", math.NaN()}}},
		"property inner Inf": {Geometry: orb.Point{}, Properties: []Property{{"a", []any{map[string]any{"b": math.Inf(1)}}}}},
		"property of a kind": {Geometry: orb.Point{}, Properties: []Property{{"a", struct{}{}}}},
		"property deep":      {Geometry: orb.Point{}, Properties: []Property{{"a", deep}}},
		"property twice":     {Geometry: orb.Point{}, Properties: []Property{{"a", 1}, {"a", 2}}},
	} {
		if text, err := WriteFeatures([]OutputFeature{f}); err == nil {
			t.Errorf("%s: want an error, got %s", name, text)
		}
	}
}

// Shapes that cross the antimeridian are cut there, and reading joins them again.
func TestAntimeridianCutAndJoined(t *testing.T) {
	for name, g := range map[string]orb.Geometry{
		"square":        orb.Polygon{{{170, 40}, {190, 40}, {190, 50}, {170, 50}, {170, 40}}},
		"from the west": orb.Polygon{{{-190, 40}, {-170, 40}, {-170, 50}, {-190, 50}, {-190, 40}}},
		"hole across":   orb.Polygon{{{170, 40}, {190, 40}, {190, 50}, {170, 50}, {170, 40}}, {{175, 42}, {175, 48}, {185, 48}, {185, 42}, {175, 42}}},
		"holes beside":  orb.Polygon{{{170, 40}, {190, 40}, {190, 50}, {170, 50}, {170, 40}}, {{172, 42}, {174, 48}, {176, 42}, {172, 42}}, {{182, 42}, {184, 48}, {186, 42}, {182, 42}}},
		"comb":          orb.Polygon{{{175, 40}, {185, 40}, {185, 42}, {178, 42}, {178, 44}, {185, 44}, {185, 46}, {175, 46}, {175, 40}}},
		"vertices on":   orb.Polygon{{{175, 40}, {180, 38}, {185, 40}, {180, 45}, {175, 40}}},
		"touching":      orb.Polygon{{{175, 40}, {180, 42}, {175, 44}, {170, 42}, {175, 40}}},
		"notch touches": orb.Polygon{{{185, 40}, {185, 50}, {175, 50}, {180, 45}, {175, 40}, {185, 40}}},
		"edge along":    orb.Polygon{{{175, 40}, {180, 40}, {180, 43}, {185, 43}, {185, 46}, {180, 46}, {180, 48}, {175, 48}, {175, 40}}},
		"line":          orb.LineString{{170, 40}, {190, 50}},
		"winding line":  orb.LineString{{170, 40}, {190, 50}, {170, 55}, {190, 60}},
		"line along":    orb.LineString{{170, 40}, {180, 40}, {180, 50}, {190, 50}},
		"parts":         orb.MultiPolygon{{{{170, 40}, {190, 40}, {190, 50}, {170, 50}, {170, 40}}}, {{{191, 40}, {192, 40}, {192, 41}, {191, 40}}}},
	} {
		t.Run(name, func(t *testing.T) {
			text, err := WriteFeatures([]OutputFeature{{Geometry: g}})
			if err != nil {
				t.Fatal(err)
			}
			raw := parseJSON(string(text), maxJSONValues)
			for i := 0; i < len(raw.numbers); i += 2 {
				if math.Abs(raw.numbers[i]) > 180 {
					t.Fatalf("longitude %v was written", raw.numbers[i])
				}
			}
			layer, findings := ReadLayer("a", text, LayerOptions{})
			if len(findings) != 0 {
				t.Fatalf("%s%s", findingsText(findings), text)
			}
			back := layer.Features[0].Geometry
			want, got := g.Bound(), back.Bound()
			if got.Max[0]-got.Min[0] != want.Max[0]-want.Min[0] || got.Min[1] != want.Min[1] || got.Max[1] != want.Max[1] {
				t.Errorf("from %v to %v\n%s", want, got, text)
			}
			// Cut points are rounded to 1e-7 degree, over shapes of some 20 degrees, a few times.
			const tolerance = 1e-5
			if math.Abs(planarArea(back)-planarArea(g)) > tolerance {
				t.Errorf("area %v, was %v", planarArea(back), planarArea(g))
			}
			if l, ok := g.(orb.LineString); ok {
				joined, ok := back.(orb.LineString)
				if !ok || math.Abs(length(joined)-length(l)) > tolerance {
					t.Errorf("came back as %v", back)
				}
			}
			if p, ok := back.(orb.MultiPolygon); ok {
				if parts, several := g.(orb.MultiPolygon); !several || len(parts) != len(p) {
					t.Errorf("came back in %d parts\n%s", len(p), text)
				}
			}
		})
	}
}

// Real outlines moved over the antimeridian are cut into many parts and come back whole: as many holes, the same area.
func TestRealPolygonsCutAndJoined(t *testing.T) {
	for _, name := range []string{"coast-great-britain-10m", "holes-stikine-icecap-10m", "holes-alaska-glacier-10m", "lake-vilyuy-reservoir-10m", "thin-cuba-10m"} {
		data, err := os.ReadFile(sharedData(t, "polygons", name+".geojson"))
		if err != nil {
			t.Fatal(err)
		}
		layer, findings := ReadLayer(name, data, LayerOptions{})
		if findings.Err() != nil {
			t.Fatal(findings)
		}
		p := layer.Features[0].Geometry.(orb.Polygon)
		box := p.Bound()
		for k := range 5 {
			// The antimeridian runs through the middle, a quarter, and three vertices in turn.
			by := 180 - [...]float64{(box.Min[0] + box.Max[0]) / 2, box.Min[0] + (box.Max[0]-box.Min[0])/4, p[0][0][0], p[0][len(p[0])/3][0], p[0][len(p[0])/2][0]}[k]
			moved := make(orb.Polygon, len(p))
			for i, ring := range p {
				for _, v := range ring {
					moved[i] = append(moved[i], orb.Point{roundDegrees(v[0] + by), v[1]})
				}
			}
			text, err := WriteFeatures([]OutputFeature{{Geometry: moved}})
			if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
			again, findings := ReadLayer(name, text, LayerOptions{})
			if findings.Err() != nil {
				t.Fatalf("%s: %v", name, findings)
			}
			back, ok := again.Features[0].Geometry.(orb.Polygon)
			if !ok || len(back) != len(p) {
				t.Fatalf("%s came back as %T of %d rings, not %d", name, again.Features[0].Geometry, len(back), len(p))
			}
			// Each of some tens of cut points moves by up to 5e-8 degree along edges of up to a degree.
			if a, b := planarArea(p), planarArea(back); math.Abs(a-b) > 1e-5 {
				t.Errorf("%s: area %v came back as %v", name, a, b)
			}
		}
	}
}

func TestAntimeridianReading(t *testing.T) {
	for name, c := range map[string]struct {
		text, says string
		width      float64
		parts      int
	}{
		"islands on both sides":       {partsText("[[178,-17],[180,-17],[180,-16],[178,-17]]", "[[-180,-17],[-179,-17],[-180,-16],[-180,-17]]", "[[-178,-18],[-177,-18],[-177,-17],[-178,-18]]"), "", 5, 2},
		"uneven seam":                 {partsText("[[178,-18],[180,-18],[180,-16],[178,-16],[178,-18]]", "[[-180,-17],[-179,-17],[-179,-15],[-180,-15],[-180,-17]]"), "", 3, 1},
		"touching at one latitude":    {partsText("[[178,-18],[180,-18],[180,-16],[178,-16],[178,-18]]", "[[-180,-16],[-179,-16],[-179,-15],[-180,-15],[-180,-16]]"), "", 3, 2},
		"two doors leave a hole":      {partsText("[[178,0],[180,0],[180,1],[179,1],[179,2],[180,2],[180,3],[178,3],[178,0]]", "[[-180,0],[-178,0],[-178,3],[-180,3],[-180,2],[-179,2],[-179,1],[-180,1],[-180,0]]"), "", 4, 1},
		"one side only":               {partsText("[[178,-18],[180,-18],[180,-16],[178,-18]]", "[[170,-18],[171,-18],[171,-16],[170,-18]]"), "", 10, 2},
		"a part spiked at the seam":   {partsText("[[178,0],[180,0],[180,1],[180,0.5],[178,1],[178,0]]", "[[-180,0],[-179,0],[-180,1],[-180,0]]"), "spike", 0, 0},
		"hole outside its part there": {partsText("[[178,0],[180,0],[180,1],[178,1],[178,0]],[[170,0],[171,0],[171,1],[170,0]]", "[[-180,0],[-179,0],[-180,1],[-180,0]]"), "outside", 0, 0},
		"hole on the far side":        {polygonText("[[170,0],[-170,0],[-170,10],[170,10],[170,0]]", "[[-175,2],[-173,2],[-173,4],[-175,2]]"), "longer than 180", 20, 1},
		"round a pole":                {polygonText("[[0,80],[120,80],[-120,80],[0,80]]"), "right round the Earth", 0, 0},
		"line with a jump":            {geometryText("LineString", "[[179,0],[-179,1]]"), "longer than 180", 2, 0},
		"lines cut":                   {geometryText("MultiLineString", "[[[179,0],[180,1]],[[-180,1],[-179,2]],[[-178,1],[-177,2]]]"), "", 4, 0},
	} {
		t.Run(name, func(t *testing.T) {
			layer, findings := readText(c.text, LayerOptions{})
			if c.says == "" && len(findings) != 0 || !strings.Contains(findingsText(findings), c.says) {
				t.Fatalf("want %q, got\n%s", c.says, findingsText(findings))
			}
			if c.width == 0 {
				if findings.Err() == nil {
					t.Error("want an error")
				}
				return
			}
			g := layer.Features[0].Geometry
			if got := g.Bound().Max[0] - g.Bound().Min[0]; got != c.width {
				t.Errorf("width %v, want %v: %v", got, c.width, g)
			}
			parts := 0
			switch g := g.(type) {
			case orb.Polygon:
				parts = 1
			case orb.MultiPolygon:
				parts = len(g)
			}
			if parts != c.parts {
				t.Errorf("%d parts, want %d", parts, c.parts)
			}
		})
	}
}

// checkRoundTrip writes what was read without an error and reads it again.
func checkRoundTrip(t *testing.T, data []byte) {
	layer, findings := ReadLayer("a", data, LayerOptions{})
	if findings.Err() != nil {
		return
	}
	var out []OutputFeature
	exact := true // nothing is rounded or cut on the way
	for _, f := range layer.Features {
		o := OutputFeature{ID: f.ID, Geometry: f.Geometry}
		for _, key := range f.Keys {
			o.Properties = append(o.Properties, Property{key, f.Properties[key]})
		}
		out = append(out, o)
		eachPoint(f.Geometry, func(p orb.Point) {
			exact = exact && math.Abs(p[0]) <= 180 && p[0] == roundDegrees(p[0]) && p[1] == roundDegrees(p[1])
		})
	}
	text, err := WriteFeatures(out)
	if !exact || err != nil && strings.Contains(err.Error(), "nested more than") {
		return
	}
	if err != nil {
		t.Fatalf("cannot be written: %v\n%s", err, data)
	}
	again, findings := ReadLayer("a", text, LayerOptions{})
	if findings.Err() != nil || len(again.Features) != len(layer.Features) {
		t.Fatalf("%v\n%s", findings, text)
	}
	for i, f := range layer.Features {
		g := again.Features[i]
		if !orb.Equal(f.Geometry, g.Geometry) || f.ID != g.ID || !reflect.DeepEqual(f.Properties, g.Properties) || !slices.Equal(f.Keys, g.Keys) {
			t.Fatalf("feature %d: %+v came back as %+v", i, f, g)
		}
	}
}

func eachPoint(g orb.Geometry, visit func(orb.Point)) {
	switch g := g.(type) {
	case orb.Point:
		visit(g)
	case orb.MultiPoint:
		for _, p := range g {
			visit(p)
		}
	case orb.LineString:
		for _, p := range g {
			visit(p)
		}
	case orb.MultiLineString:
		for _, l := range g {
			eachPoint(l, visit)
		}
	case orb.Polygon:
		for _, r := range g {
			eachPoint(orb.LineString(r), visit)
		}
	case orb.MultiPolygon:
		for _, p := range g {
			eachPoint(p, visit)
		}
	}
}

func TestRoundTripOfSharedData(t *testing.T) {
	for _, folder := range []string{"geojson-edge", "polygons"} {
		files, err := filepath.Glob(filepath.Join(sharedData(t, folder), "*.geojson"))
		if err != nil {
			t.Fatal(err)
		}
		for _, file := range files {
			data, err := os.ReadFile(file)
			if err != nil {
				t.Fatal(err)
			}
			checkRoundTrip(t, data)
		}
	}
}

func FuzzReadLayer(f *testing.F) {
	for _, s := range []string{
		polygonText(box4, "[[1,1],[1,3],[3,3],[1,1]]"),
		partsText(box4, "[[5,0],[6,0],[6,1],[5,0]]"),
		partsText("[[178,-18],[180,-18],[180,-16],[178,-16],[178,-18]]", "[[-180,-17],[-179,-17],[-179,-15],[-180,-15],[-180,-17]]"),
		geometryText("MultiLineString", "[[[179,0],[180,1]],[[-180,1],[-179,2]]]"),
		geometryText("LineString", "[[179,0],[-179,1,3]]"),
		geometryText("MultiPoint", "[[1,2],[3,4]]"),
		`{"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"EPSG:32630"}},"features":[{"type":"Feature","id":7,"properties":{"a":[1,{"b":null}],"c":-0.0},"geometry":{"type":"GeometryCollection","geometries":[{"type":"Point","coordinates":[1,2]}]}}]}`,
	} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, data []byte) { checkRoundTrip(t, data) })
}
