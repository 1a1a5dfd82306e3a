package gisio

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"
	"unicode/utf8"

	"github.com/paulmach/orb"
)

// Feature is one checked feature of a layer.
type Feature struct {
	Index      int            // place in the file, counted from 0
	ID         string         // the feature's "id" member as text, or "" where it has none
	Geometry   orb.Geometry   // orb.Point, MultiPoint, LineString, MultiLineString, Polygon or MultiPolygon; never nil
	Properties map[string]any // string, float64, bool, nil, []any or map[string]any; never nil
	Keys       []string       // names of the properties in the order of the file
	Offset     int            // byte offset of the feature in the file
	Line       int            // line of the feature in the file, counted from 1
}

// Name gives the words by which findings name this feature.
func (f Feature) Name() string { return FeatureName(f.Index, f.ID) }

// Layer is what a GeoJSON text holds. Features that have an error are left out of it, and the error is among
// the findings, so a caller can go on collecting problems and must ask Findings.Err before it computes.
type Layer struct {
	File     string
	Features []Feature
	CRS      string // from the old "crs" member, such as "EPSG:32630" or "EPSG:4326"; "" where the text has none
	Findings Findings
}

// LayerOptions says how a layer's text is to be read. The zero value reads longitude and latitude (RFC 7946).
type LayerOptions struct {
	Layer     string // name of the layer, for the findings
	Projected bool   // coordinates are metres in the code EPSG: no degree-range check
	EPSG      string // code that the user states for the layer, such as "EPSG:32630"; "" = none stated
	MaxBytes  int    // largest text that is read; 0 = DefaultMaxLayerBytes [bytes]
}

// DefaultMaxLayerBytes is the largest text that is read unless LayerOptions says otherwise: over a million positions.
const DefaultMaxLayerBytes = 64 << 20

const hardMaxLayerBytes = math.MaxInt32 - 1 // places in the text are held in 32 bits

// maxLayerFindings bounds what one layer reports; the rest is counted.
const maxLayerFindings = 1000

// ReadLayer reads a GeoJSON text (RFC 7946) strictly and checks it: every fault is a Finding with its place, nothing
// is guessed, and whatever is mended is warned of. It takes a FeatureCollection, a Feature or a bare geometry; a
// GeometryCollection only where it holds a single geometry. Polygons come out closed, valid by the simple-feature
// rules (see shape.check), outer rings counterclockwise, holes clockwise. Parts that were cut at ±180 are joined, and
// their longitudes run on past 180. The findings are those of the Layer.
//
// What counts as which fault is the list in the tests; errors leave the feature out, and errors in the text as a whole
// leave the layer empty.
func ReadLayer(file string, data []byte, opt LayerOptions) (Layer, Findings) {
	r := &layerReader{file: file, opt: opt, projected: opt.Projected}
	if s, err := ParseEPSG(opt.EPSG); err == nil {
		r.projected = !s.Geographic()
	}
	r.read(data)
	layer := Layer{File: file, Features: r.features, CRS: r.crs, Findings: r.close()}
	return layer, layer.Findings
}

// layerReader carries one reading.
type layerReader struct {
	file      string
	opt       LayerOptions
	text      string
	json      *jsonText
	lines     []int // offsets of the first byte of each line
	crs       string
	projected bool
	features  []Feature
	findings  Findings
	unlisted  [2]int // findings of each severity beyond the bound

	// The feature that is being read.
	name    string // for findings
	faulty  bool   // an error was found
	noticed map[string]bool

	// Once a layer.
	thirdAt    int // offset of the first position with a third coordinate, or -1
	furtherAt  int // offset of the first position with more
	positions  int
	likeDegree bool // all positions so far could be degrees
}

// add records a finding at an offset of the text; offset -1 = no place.
func (r *layerReader) add(s Severity, offset int, property, found, allowed, hint string) {
	if s == Error {
		r.faulty = true
	}
	if len(r.findings) >= maxLayerFindings {
		r.unlisted[s]++
		return
	}
	f := Finding{Severity: s, File: r.file, Layer: r.opt.Layer, Feature: r.name, Property: property, Found: found, Allowed: allowed, Hint: hint}
	if offset >= 0 {
		f.Line, f.Column = r.position(offset)
	}
	r.findings = append(r.findings, f)
}

// addOnce records a warning once a feature.
func (r *layerReader) addOnce(key string, offset int, property, found, allowed, hint string) {
	if r.noticed[key] {
		return
	}
	if r.noticed == nil {
		r.noticed = make(map[string]bool)
	}
	r.noticed[key] = true
	r.add(Warning, offset, property, found, allowed, hint)
}

// position gives line and column, both from 1, of an offset.
func (r *layerReader) position(offset int) (line, column int) {
	if r.lines == nil {
		r.lines = []int{0}
		for i := 0; i < len(r.text); i++ {
			if r.text[i] == '\n' {
				r.lines = append(r.lines, i+1)
			}
		}
	}
	line = sort.SearchInts(r.lines, offset+1)
	return line, utf8.RuneCountInString(r.text[r.lines[line-1]:min(offset, len(r.text))]) + 1
}

// close ends the list of findings with those of the layer as a whole.
func (r *layerReader) close() Findings {
	r.name = ""
	for s, n := range r.unlisted {
		if n > 0 {
			r.findings = append(r.findings, Finding{Severity: Severity(s), File: r.file, Layer: r.opt.Layer,
				Found: fmt.Sprintf("%d further %ss that are not listed", n, Severity(s)), Hint: "mend the listed ones first"})
		}
	}
	return r.findings
}

func (r *layerReader) read(data []byte) {
	limit := r.opt.MaxBytes
	if limit <= 0 {
		limit = DefaultMaxLayerBytes
	}
	limit = min(limit, hardMaxLayerBytes)
	if len(data) > limit {
		r.add(Error, -1, "", fmt.Sprintf("a file of %d bytes", len(data)), fmt.Sprintf("up to %d bytes", limit), "simplify the layer or cut it to the extent")
		return
	}
	if len(data) >= 2 && (data[0] == 0xff && data[1] == 0xfe || data[0] == 0xfe && data[1] == 0xff) {
		r.add(Error, -1, "", "text in UTF-16", "text in UTF-8", "save the file in the encoding UTF-8")
		return
	}
	r.text = string(data)
	if strings.HasPrefix(r.text, "\ufeff") {
		r.text = r.text[len("\ufeff"):]
		r.add(Warning, -1, "", "a byte order mark at the start of the file", "UTF-8 without it", "it was skipped")
	}
	r.json = parseJSON(r.text, maxJSONValues)
	if p := r.json.fatal; p != nil {
		r.add(Error, p.offset, "", p.found, p.allowed, p.hint)
		return
	}
	root := &r.json.root
	if root.kind != jsonObject {
		hint := ""
		if root.kind == jsonArray {
			hint = `wrap the features as {"type": "FeatureCollection", "features": [...]}`
		}
		r.add(Error, int(root.offset), "", root.describe(), "one GeoJSON object: a FeatureCollection, a Feature or a geometry", hint)
		return
	}
	r.thirdAt, r.furtherAt, r.likeDegree = -1, -1, true
	if !r.readCRS(root) {
		return
	}
	r.root(root)
	r.wholeLayer()
}

// root reads the outermost object.
func (r *layerReader) root(v *jsonValue) {
	kind, ok := r.typeOf(v, "the outermost object", `"FeatureCollection", "Feature" or a geometry type`)
	if !ok {
		return
	}
	switch kind {
	case "FeatureCollection":
		list := v.member("features")
		if list == nil || list.kind != jsonArray {
			found, at := "missing", v
			if list != nil {
				found, at = list.describe(), list
			}
			r.add(Error, int(at.offset), `member "features"`, found, "an array of features", r.caseHint(v, "features"))
			return
		}
		r.forbidden(v, "coordinates", "geometries", "geometry", "properties")
		for i := range list.items {
			r.feature(&list.items[i], i)
		}
	case "Feature":
		r.feature(v, 0)
	default:
		if !slices.Contains(geometryTypes, kind) {
			r.unknownType(v, kind, `"FeatureCollection", "Feature", `+geometryTypeList())
			return
		}
		r.begin(v, 0, "")
		if g := r.geometry(v); g != nil {
			r.keep(v, Feature{Properties: map[string]any{}, Geometry: g})
		}
	}
}

// begin starts a feature: faults from now on are its own.
func (r *layerReader) begin(v *jsonValue, index int, id string) {
	r.name = FeatureName(index, id)
	r.faulty = false
	clear(r.noticed)
	for _, p := range r.json.problems {
		if p.offset >= int(v.offset) && p.offset < int(v.end) {
			r.faulty = true
		}
	}
}

// keep adds the feature unless a fault was found in it.
func (r *layerReader) keep(v *jsonValue, f Feature) {
	if r.faulty {
		return
	}
	f.Offset = int(v.offset)
	f.Line, _ = r.position(f.Offset)
	r.features = append(r.features, f)
}

// wholeLayer records what concerns the layer as a whole.
func (r *layerReader) wholeLayer() {
	r.name = ""
	for _, p := range r.json.problems {
		r.add(Error, p.offset, "", p.found, p.allowed, p.hint)
	}
	if r.thirdAt >= 0 {
		r.add(Warning, r.thirdAt, "", "positions with a third coordinate", "longitude and latitude, or x and y",
			"it is ignored: a level is taken from properties only")
	}
	if r.furtherAt >= 0 {
		r.add(Warning, r.furtherAt, "", "positions with more than three numbers", "two numbers", "the rest is ignored")
	}
	if r.projected && r.likeDegree && r.positions > 0 {
		r.add(Warning, -1, "", "coordinates that all lie within -180 to 180 and -90 to 90 in a layer of metres", "metres in "+r.systemText(),
			"if these are degrees, state no code or EPSG:4326 for the layer")
	}
}

func (r *layerReader) systemText() string {
	switch {
	case r.opt.EPSG != "":
		return r.opt.EPSG
	case r.crs != "":
		return r.crs
	}
	return "a stated EPSG code"
}

// typeOf gives the "type" member as text.
func (r *layerReader) typeOf(v *jsonValue, what, allowed string) (string, bool) {
	if v.kind != jsonObject {
		r.add(Error, int(v.offset), what, v.describe(), "an object with the member \"type\"", "")
		return "", false
	}
	t := v.member("type")
	switch {
	case t == nil:
		r.add(Error, int(v.offset), what, `without the member "type"`, allowed, r.caseHint(v, "type"))
		return "", false
	case t.kind != jsonString:
		r.add(Error, int(t.offset), `member "type"`, t.describe(), allowed, "")
		return "", false
	}
	return t.text, true
}

// unknownType reports a type that is not offered, with the right spelling where only the case differs.
func (r *layerReader) unknownType(v *jsonValue, kind, allowed string) {
	hint := ""
	for _, known := range append([]string{"Feature", "FeatureCollection"}, geometryTypes...) {
		if strings.EqualFold(known, kind) && known != kind {
			hint = fmt.Sprintf("case counts: write %q", known)
		}
	}
	r.add(Error, int(v.member("type").offset), `member "type"`, fmt.Sprintf("the text %q", shorten(kind)), allowed, hint)
}

// caseHint helps where a member is there but for its case.
func (r *layerReader) caseHint(v *jsonValue, name string) string {
	for i := range v.items {
		if got := v.items[i].name; got != name && strings.EqualFold(got, name) {
			return fmt.Sprintf("member names are told apart by case: write %q, not %q", name, got)
		}
	}
	return ""
}

// forbidden warns of members that define another kind of object (RFC 7946, section 7.1).
func (r *layerReader) forbidden(v *jsonValue, names ...string) {
	for _, name := range names {
		if m := v.member(name); m != nil {
			r.add(Warning, int(m.offset), fmt.Sprintf("member %q", name), "out of place in this object", "only the members of its type (RFC 7946, section 7.1)", "it is ignored")
		}
	}
}
