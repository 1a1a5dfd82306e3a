package gisio

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// polygonText gives a Feature with the rings as a Polygon.
func polygonText(rings ...string) string {
	return `{"type":"Feature","properties":null,"geometry":{"type":"Polygon","coordinates":[` + strings.Join(rings, ",") + `]}}`
}

// partsText gives a Feature with the parts, each the text of its rings, as a MultiPolygon.
func partsText(parts ...string) string {
	return `{"type":"Feature","properties":null,"geometry":{"type":"MultiPolygon","coordinates":[[` + strings.Join(parts, "],[") + `]]}}`
}

func geometryText(kind, coordinates string) string {
	return `{"type":"Feature","properties":null,"geometry":{"type":"` + kind + `","coordinates":` + coordinates + `}}`
}

func readText(text string, opt LayerOptions) (Layer, Findings) {
	return ReadLayer("a.geojson", []byte(text), opt)
}

const box4 = "[[0,0],[4,0],[4,4],[0,4],[0,0]]"

// Each rule of simple features, with a shape on either side of it; says is a part of the finding, "" = no finding.
func TestShapeRules(t *testing.T) {
	for name, c := range map[string]struct{ text, says string }{
		"figure eight":                     {polygonText("[[0,0],[4,4],[4,0],[0,4],[0,0]]"), "crossing itself"},
		"touching itself at a vertex":      {polygonText("[[0,0],[2,2],[4,0],[4,4],[2,2],[0,4],[0,0]]"), "touching itself at (2, 2)"},
		"touching its own edge":            {polygonText("[[0,0],[4,0],[4,4],[2,0],[0,4],[0,0]]"), "touching itself at (2, 0)"},
		"running along itself":             {polygonText("[[0,0],[4,0],[4,4],[2,4],[2,0],[1,0],[1,4],[0,4],[0,0]]"), "running along itself"},
		"spike inward":                     {polygonText("[[0,0],[4,0],[4,4],[2,4],[2,2],[2,4],[0,4],[0,0]]"), "spike"},
		"spike at the first position":      {polygonText("[[0,-3],[0,0],[4,0],[4,4],[0,4],[0,-3]]"), "spike"},
		"spike along an edge":              {polygonText("[[0,0],[4,0],[3,0],[4,4],[0,4],[0,0]]"), "spike"},
		"twice round":                      {polygonText("[[0,0],[4,0],[4,4],[0,4],[0,0],[4,0],[4,4],[0,4],[0,0]]"), "running along itself"},
		"three vertices":                   {polygonText("[[0,0],[4,0],[0,4],[0,0]]"), ""},
		"hole equal to the outer ring":     {polygonText(box4, box4), "sharing a stretch"},
		"hole touching at two points":      {polygonText(box4, "[[0,0],[2,1],[4,4],[1,2],[0,0]]"), "cuts the area in two"},
		"hole through a vertex":            {polygonText(box4, "[[3,3],[4,4],[5,3],[3,3]]"), "crossing"},
		"hole crossing out by a vertex":    {polygonText(box4, "[[1,1],[4,4],[6,5],[5,6],[1,1]]"), "crossing"},
		"hole touching an edge":            {polygonText(box4, "[[2,0],[3,2],[1,2],[2,0]]"), ""},
		"two holes meeting at a point":     {polygonText(box4, "[[1,1],[2,2],[1,3],[1,1]]", "[[2,2],[3,1],[3,3],[2,2]]"), ""},
		"two holes meeting twice":          {polygonText(box4, "[[1,1],[3,1],[2,2],[3,3],[1,3],[1,1]]", "[[3,1],[3.5,2],[3,3],[3,1]]"), "cuts the area in two"},
		"a chain of holes across":          {polygonText(box4, "[[0,2],[1,1],[2,2],[0,2]]", "[[2,2],[3,1],[4,2],[2,2]]"), "cuts the area in two"},
		"a chain of holes part of the way": {polygonText(box4, "[[0,2],[1,1],[2,2],[0,2]]", "[[2,2],[3,1],[3.5,2],[2,2]]"), ""},
		"hole in a hole":                   {polygonText(box4, "[[1,1],[3,1],[3,3],[1,3],[1,1]]", "[[1.5,1.5],[2,1.5],[2,2],[1.5,1.5]]"), "overlapping hole 1"},
		"hole around a hole":               {polygonText(box4, "[[1.5,1.5],[2,1.5],[2,2],[1.5,1.5]]", "[[1,1],[3,1],[3,3],[1,3],[1,1]]"), "overlapping hole 1"},
		"hole inside by touch, outside":    {polygonText(box4, "[[4,2],[6,1],[6,3],[4,2]]"), "outside of the outer ring"},
		"hole with zero area":              {polygonText(box4, "[[1,1],[2,2],[3,3],[1,1]]"), "zero area"},
		"parts apart":                      {partsText(box4, "[[5,0],[6,0],[6,1],[5,0]]"), ""},
		"parts meeting at a corner":        {partsText(box4, "[[4,4],[6,4],[6,6],[4,4]]"), ""},
		"parts meeting at corner and edge": {partsText(box4, "[[4,4],[5,2],[4,0],[6,2],[4,4]]"), ""},
		"parts sharing an edge":            {partsText(box4, "[[4,0],[6,0],[6,4],[4,4],[4,0]]"), "sharing an edge"},
		"parts overlapping along edges":    {partsText(box4, "[[2,0],[6,0],[6,4],[2,4],[2,0]]"), "sharing a stretch"},
		"parts overlapping at a corner":    {partsText(box4, "[[4,4],[2,1],[5,3],[4,4]]"), "crossing"},
		"part crossing by vertices only":   {partsText(box4, "[[0,0],[4,4],[5,5],[-1,5],[0,0]]"), "overlapping part 1"},
		"equal parts":                      {partsText(box4, box4), "sharing a stretch"},
		"part in a part":                   {partsText(box4, "[[1,1],[2,1],[2,2],[1,1]]"), "overlapping part 1"},
		"part around a part":               {partsText("[[1,1],[2,1],[2,2],[1,1]]", box4), "overlapping part 1"},
		"part in the hole of a part":       {partsText(box4+",[[1,1],[3,1],[3,3],[1,3],[1,1]]", "[[1.5,1.5],[2,1.5],[2,2],[1.5,1.5]]"), ""},
		"part filling the hole of a part":  {partsText(box4+",[[1,1],[3,1],[3,3],[1,3],[1,1]]", "[[1,1],[3,1],[3,3],[1,3],[1,1]]"), "sharing an edge"},
		"part touching a hole from inside": {partsText(box4+",[[1,1],[3,1],[3,3],[1,3],[1,1]]", "[[1,1],[3,2],[2,3],[1,1]]"), ""},
		"part leaving a hole by a vertex":  {partsText(box4+",[[1,1],[3,1],[3,3],[1,3],[1,1]]", "[[3,3],[2,2.5],[2.5,2],[3.5,3.2],[3,3]]"), "crossing"},
	} {
		t.Run(name, func(t *testing.T) {
			_, findings := readText(c.text, LayerOptions{})
			if c.says == "" {
				if len(findings) != 0 {
					t.Errorf("want no finding, got\n%s", findingsText(findings))
				}
				return
			}
			if !strings.Contains(findingsText(findings), c.says) {
				t.Errorf("want %q, got\n%s", c.says, findingsText(findings))
			}
			if (findings.Err() == nil) != (c.says == "sharing an edge") {
				t.Errorf("severity:\n%s", findingsText(findings))
			}
		})
	}
}

// A hole 0.1 mm from a meridian four degrees long is inside in degrees, but crosses the chord on the plane.
func TestCheckShapeAfterProjection(t *testing.T) {
	layer, findings := readText(polygonText(box4, "[[1e-9,1],[1e-9,3],[2,3],[2,1],[1e-9,1]]"), LayerOptions{})
	if findings.Err() != nil {
		t.Fatal(findings)
	}
	g := layer.Features[0].Geometry
	if got := CheckShape(g); len(got) != 0 {
		t.Errorf("in degrees: %v", got)
	}
	plane, err := Transform(WGS84, System{code: 32631}, g)
	if err != nil {
		t.Fatal(err)
	}
	if got := CheckShape(plane); got.Err() == nil || !strings.Contains(got[0].String(), "hole 1 is crossing the outer ring") {
		t.Errorf("on the plane: %v", got)
	}
	flat := orb.Polygon{{{0, 0}, {1, 1}, {2, 2}, {0, 0}}}
	if got := CheckShape(orb.MultiPolygon{flat}); got.Err() == nil {
		t.Error("flat ring: want an error")
	}
	if got := CheckShape(orb.MultiPolygon{layer.Features[0].Geometry.(orb.Polygon), {}}); got.Err() == nil {
		t.Error("a part without rings: want an error")
	}
	if got := CheckShape(orb.Point{}); got != nil {
		t.Errorf("point: %v", got)
	}
}

// What is not a polygon, and the frame around geometries.
func TestReadLayerRules(t *testing.T) {
	for name, c := range map[string]struct {
		text, says string // says "" = no finding
		warning    bool
	}{
		"point":                   {text: geometryText("Point", "[1,2]")},
		"point without numbers":   {geometryText("Point", "[]"), "empty geometry", false},
		"point with text":         {geometryText("Point", `[1,"2"]`), "without quotes", false},
		"point with an object":    {geometryText("Point", `[1,{}]`), "an object", false},
		"point too deep":          {geometryText("Point", "[[1,2]]"), "a position at depth 2", false},
		"coordinates not a list":  {geometryText("Point", "7"), "the number 7", false},
		"four coordinates":        {geometryText("Point", "[1,2,3,4]"), "more than three", true},
		"points":                  {text: geometryText("MultiPoint", "[[1,2],[1,2]]")},
		"an empty position":       {geometryText("MultiPoint", "[[1,2],[]]"), "an empty array", false},
		"line":                    {text: geometryText("LineString", "[[1,2],[3,4]]")},
		"line of one":             {geometryText("LineString", "[[1,2]]"), "made of 1 position;", false},
		"line of no length":       {geometryText("LineString", "[[1,2],[1,2]]"), "of no length", false},
		"line with a repeat":      {geometryText("LineString", "[[1,2],[1,2],[3,4]]"), "repeat", true},
		"lines":                   {text: geometryText("MultiLineString", "[[[1,2],[3,4]],[[1,2],[3,5]]]")},
		"an empty line":           {geometryText("MultiLineString", "[[[1,2],[3,4]],[]]"), "line 2 is made of 0 positions", false},
		"a part without rings":    {geometryText("MultiPolygon", "[["+box4+"],[]]"), "part 2 is without rings", false},
		"latitude beyond a pole":  {geometryText("Point", "[0,90.1]"), "latitude", false},
		"longitude past 180":      {geometryText("Point", "[180.1,0]"), "antimeridian", true},
		"longitude past 360":      {geometryText("Point", "[360.1,0]"), "EPSG", false},
		"null geometry":           {`{"type":"Feature","properties":null,"geometry":null}`, "empty geometry", false},
		"geometry not an object":  {`{"type":"Feature","properties":null,"geometry":[]}`, "an empty array", false},
		"feature not an object":   {`{"type":"FeatureCollection","features":[3]}`, "an array of numbers", false},
		"no features":             {text: `{"type":"FeatureCollection","features":[]}`},
		"features missing":        {`{"type":"FeatureCollection","Features":[]}`, `write "features", not "Features"`, false},
		"features not a list":     {`{"type":"FeatureCollection","features":{}}`, "an object", false},
		"type not a text":         {`{"type":3}`, "the number 3", false},
		"geometry of wrong case":  {`{"type":"Feature","properties":{},"Geometry":{}}`, `write "geometry"`, false},
		"coordinates, wrong case": {`{"type":"Point","Coordinates":[1,2]}`, `write "coordinates"`, false},
		"properties not a map":    {`{"type":"Feature","properties":[1],"geometry":{"type":"Point","coordinates":[1,2]}}`, "an array", false},
		"id neither text nor num": {`{"type":"Feature","id":{},"properties":{},"geometry":{"type":"Point","coordinates":[1,2]}}`, "an object", true},
		"empty collection":        {`{"type":"GeometryCollection","geometries":[]}`, "0 geometries", false},
		"collection of two":       {`{"type":"GeometryCollection","geometries":[{"type":"Point","coordinates":[1,2]},{"type":"Point","coordinates":[1,2]}]}`, "2 geometries", false},
		"repeated property":       {`{"type":"Feature","properties":{"a":1,"a":2},"geometry":{"type":"Point","coordinates":[1,2]}}`, `"a" a second time`, false},
		"repeat by an escape":     {`{"type":"Feature","properties":{"a":1,"\u0061":2},"geometry":{"type":"Point","coordinates":[1,2]}}`, `"a" a second time`, false},
		"huge property":           {`{"type":"Feature","properties":{"a":1e999},"geometry":{"type":"Point","coordinates":[1,2]}}`, "1e999", false},
		"features on a Feature":   {`{"type":"Feature","features":[],"properties":{},"geometry":{"type":"Point","coordinates":[1,2]}}`, "out of place", true},
		"half a surrogate":        {`{"type":"\ud800"}`, "surrogate", false},
		"control character":       {"{\"type\":\"a\nb\"}", "escape", false},
		"bad UTF-8":               {"{\"type\":\"a\xff\"}", "not UTF-8", false},
		"a point at a pole":       {text: geometryText("Point", "[180,-90]")},
	} {
		t.Run(name, func(t *testing.T) {
			layer, findings := readText(c.text, LayerOptions{})
			if c.says == "" && len(findings) != 0 || !strings.Contains(findingsText(findings), c.says) {
				t.Errorf("want %q, got\n%s", c.says, findingsText(findings))
			}
			if want := c.says == "" || c.warning; want != (findings.Err() == nil) {
				t.Errorf("severity:\n%s", findingsText(findings))
			}
			if findings.Err() != nil && len(layer.Features) != 0 {
				t.Error("a feature with an error was kept")
			}
		})
	}
}

func TestReadLayerFeatures(t *testing.T) {
	text := `{"type": "FeatureCollection", "name": "wells", "features": [
  {"type": "Feature", "id": "W4", "properties": {"name": "Höhe", "rate": 12.5, "off": false, "note": null, "list": [1, "a", [2]], "more": {"b": 1}, "numbers": [1, 2]},
   "geometry": {"type": "Point", "coordinates": [1, 2, 300]}},
  {"type": "Feature", "id": 0012e0, "properties": {}, "geometry": {"type": "Point", "coordinates": [1, 2]}},
  {"type": "Feature", "id": 17, "properties": null, "geometry": {"type": "Point", "coordinates": [1, 95]}},
  {"type": "Feature", "id": 18, "properties": null, "geometry": {"type": "Point", "coordinates": [-0.0, 5, 7]}}
]}`
	if _, findings := readText(text, LayerOptions{}); !strings.Contains(findings.Err().Error(), "leading zeros") {
		t.Errorf("an id with leading zeros is not JSON: %v", findings)
	}
	text = strings.Replace(text, "0012e0", "12e0", 1)
	layer, findings := readText(text, LayerOptions{Layer: "wells"})
	if len(findings.Errors()) != 1 || len(findings.Warnings()) != 1 {
		t.Fatalf("findings:\n%s", findingsText(findings))
	}
	const bad = `a.geojson, line 5, column 98, layer wells, feature 3 (id "17"): a position is (1, 95); allowed: longitude within`
	if got := findings.Errors()[0].String(); !strings.HasPrefix(got, bad) {
		t.Errorf("got %s", got)
	}
	if w := findings.Warnings()[0]; !strings.Contains(w.String(), "third coordinate") || w.Line != 3 {
		t.Errorf("one warning of third coordinates a layer: %v", w)
	}
	if len(layer.Features) != 3 {
		t.Fatalf("%d features", len(layer.Features))
	}
	f := layer.Features[0]
	if f.Index != 0 || f.ID != "W4" || f.Line != 2 || text[f.Offset] != '{' || f.Name() != `feature 1 (id "W4")` {
		t.Errorf("%+v", f)
	}
	if !slices.Equal(f.Keys, []string{"name", "rate", "off", "note", "list", "more", "numbers"}) {
		t.Errorf("keys %v", f.Keys)
	}
	if got := fmt.Sprint(f.Properties); got != "map[list:[1 a [2]] more:map[b:1] name:Höhe note:<nil> numbers:[1 2] off:false rate:12.5]" {
		t.Errorf("properties %v", got)
	}
	if layer.Features[1].ID != "12e0" || layer.Features[2].ID != "18" || layer.Features[2].Index != 3 {
		t.Errorf("ids %q %q", layer.Features[1].ID, layer.Features[2].ID)
	}
	if p := layer.Features[2].Geometry.(orb.Point); math.Signbit(p[0]) {
		t.Error("-0 was kept")
	}
}

func TestReadLayerCRS(t *testing.T) {
	withCRS := func(crs, coordinates string) string {
		return `{"type":"FeatureCollection","crs":` + crs + `,"features":[` + geometryText("Point", coordinates) + `]}`
	}
	named := func(name string) string { return `{"type":"name","properties":{"name":"` + name + `"}}` }
	metres, degrees := "[500000,5000000]", "[7,45]"
	for name, c := range map[string]struct {
		text string
		opt  LayerOptions
		crs  string
		says string
	}{
		"EPSG urn":               {withCRS(named("urn:ogc:def:crs:EPSG::32632"), metres), LayerOptions{}, "EPSG:32632", ""},
		"versioned urn":          {withCRS(named("urn:ogc:def:crs:EPSG:9.8.2:25832"), metres), LayerOptions{}, "EPSG:25832", ""},
		"short":                  {withCRS(named("EPSG:4326"), degrees), LayerOptions{}, "EPSG:4326", ""},
		"web address":            {withCRS(named("http://www.opengis.net/def/crs/EPSG/0/28355"), metres), LayerOptions{}, "EPSG:28355", ""},
		"old kind":               {withCRS(`{"type":"EPSG","properties":{"code":32632}}`, metres), LayerOptions{}, "EPSG:32632", ""},
		"equal to stated":        {withCRS(named("EPSG:32632"), metres), LayerOptions{EPSG: "epsg:32632", Projected: true}, "EPSG:32632", ""},
		"stated without Project": {withCRS(named("EPSG:32632"), metres), LayerOptions{EPSG: "EPSG:32632"}, "EPSG:32632", ""},
		"other than stated":      {withCRS(named("EPSG:32632"), metres), LayerOptions{EPSG: "EPSG:32633", Projected: true}, "", "EPSG:32633"},
		"label not offered":      {withCRS(named("EPSG:27700"), metres), LayerOptions{EPSG: "EPSG:27700", Projected: true}, "EPSG:27700", ""},
		"not offered":            {withCRS(named("urn:ogc:def:crs:EPSG::3857"), metres), LayerOptions{}, "", "32601-32660"},
		"unknown":                {withCRS(named("my grid"), metres), LayerOptions{}, "", "my grid"},
		"link":                   {withCRS(`{"type":"link","properties":{"href":"a"}}`, metres), LayerOptions{}, "", "kind that can be read"},
		"null":                   {withCRS(`null`, degrees), LayerOptions{}, "", "null"},
		"null but stated":        {withCRS(`null`, metres), LayerOptions{EPSG: "EPSG:32632", Projected: true}, "", ""},
		"text":                   {withCRS(`"EPSG:32632"`, metres), LayerOptions{}, "", "kind that can be read"},
		"properties null":        {withCRS(`{"type":"name","properties":null}`, metres), LayerOptions{}, "", "kind that can be read"},
		"degrees for metres":     {withCRS(named("EPSG:4326"), degrees), LayerOptions{Projected: true}, "", "in metres"},
		"metres in degrees":      {withCRS(named("EPSG:4326"), metres), LayerOptions{}, "EPSG:4326", "state the EPSG code"},
		"degrees in metres":      {withCRS(named("EPSG:32632"), degrees), LayerOptions{}, "EPSG:32632", "metres in EPSG:32632"},
		"stated metres":          {geometryText("Point", metres), LayerOptions{Projected: true, EPSG: "EPSG:32632"}, "", ""},
		"stated, far off":        {geometryText("Point", "[1e9,0]"), LayerOptions{Projected: true, EPSG: "EPSG:32632"}, "", "1e8"},
		"in a feature, same":     {strings.Replace(geometryText("Point", degrees), `"geometry":{`, `"geometry":{"crs":`+named("EPSG:4326")+`,`, 1), LayerOptions{}, "", ""},
		"in a feature, other":    {strings.Replace(geometryText("Point", degrees), `"geometry":{`, `"geometry":{"crs":`+named("EPSG:32632")+`,`, 1), LayerOptions{}, "", "of this feature alone"},
	} {
		t.Run(name, func(t *testing.T) {
			layer, findings := readText(c.text, c.opt)
			if c.says == "" && len(findings) != 0 || !strings.Contains(findingsText(findings), c.says) {
				t.Errorf("want %q, got\n%s", c.says, findingsText(findings))
			}
			if layer.CRS != c.crs {
				t.Errorf("CRS %q, want %q", layer.CRS, c.crs)
			}
		})
	}
}

func TestReadLayerLimits(t *testing.T) {
	if _, findings := readText(polygonText(box4), LayerOptions{MaxBytes: 20}); !strings.Contains(findingsText(findings), "up to 20 bytes") {
		t.Errorf("size: %v", findings)
	}
	var b strings.Builder
	b.WriteString(`{"type":"FeatureCollection","features":[`)
	for i := range 1500 {
		if i > 0 {
			b.WriteString(",\n")
		}
		b.WriteString(geometryText("Point", "[0,91]"))
	}
	b.WriteString("]}")
	_, findings := readText(b.String(), LayerOptions{})
	if n := len(findings); n != maxLayerFindings+1 || !strings.Contains(findings[n-1].String(), "500 further errors") {
		t.Errorf("%d findings, the last %v", n, findings[len(findings)-1])
	}
	for text, fits := range map[string]bool{"[[],[],[]]": true, "[[],[],[],[]]": false, "[1,2,3,4,5,6,7]": true, `[1,2,3,{}]`: false} {
		if got := parseJSON(text, 4); (got.fatal == nil) != fits {
			t.Errorf("%s with at most four values: %+v", text, got.fatal)
		}
	}
}

// A text cut off at any byte, or with any byte changed, gives findings or features and never a panic.
func TestReadLayerDamagedText(t *testing.T) {
	text := polygonText(box4, "[[1,1],[1,3],[3,3],[1,1]]")
	for i := range len(text) {
		if _, findings := readText(text[:i], LayerOptions{}); findings.Err() == nil {
			t.Errorf("cut at %d: want an error", i)
		}
		for _, c := range []byte{0, '"', '[', ']', '}', ',', '9', '-', 0xff} {
			damaged := text[:i] + string([]byte{c}) + text[i+1:]
			if layer, findings := readText(damaged, LayerOptions{}); findings.Err() == nil && len(layer.Features) != 1 {
				t.Errorf("byte %d as %q: neither features nor an error", i, c)
			}
		}
	}
}
