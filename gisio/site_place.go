package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"github.com/paulmach/orb"

	"springbound/aquifer"
)

// outlineShare is how far an edge may lie off the outline, as a share of the extent's diagonal: digitising the same line twice
// agrees to that, and a line on the wrong side of anything does not.
const outlineShare = 1e-3

// choosePlane settles the working plane: the stated one, that of the extent's layer where it is in metres, or the UTM zone of the
// extent. Then every layer is brought into it.
func (b *builder) choosePlane() {
	b.checkSwapped()
	switch extent := b.layers["extent"]; {
	case b.stated.Valid():
		b.p.Plane = b.stated
		b.p.PlaneNote = fmt.Sprintf("the plane is %v (%s), stated in the project file", b.stated, b.stated.Name())
	case extent == nil || len(extent.features) == 0 || extent.swapped:
	case !extent.system.Geographic():
		b.p.Plane = extent.system
		b.p.PlaneNote = fmt.Sprintf("the plane is %v (%s), that of the extent's layer", extent.system, extent.system.Name())
	default:
		plane, note, err := UTMForExtent(extent.features[0].Geometry.Bound())
		if err != nil {
			b.fail(Finding{File: extent.file, Layer: "extent", Found: "an extent without a UTM zone: " + err.Error(), Hint: "check the coordinates, or state working under [coordinates]"})
			break
		}
		b.p.Plane, b.p.PlaneNote = plane, note
	}
	if !b.p.Plane.Valid() {
		return
	}
	for _, f := range layersSection.Fields {
		layer := b.layers[f.Name]
		if layer == nil || layer.swapped {
			continue
		}
		if note := DatumNote(layer.system, b.p.Plane); note != "" && len(layer.features) > 0 {
			b.warn(Finding{File: layer.file, Layer: f.Name, Found: "another datum than the plane's", Hint: note})
		}
		for i, feature := range layer.features {
			g, err := Transform(layer.system, b.p.Plane, feature.Geometry)
			if err != nil {
				b.fail(Finding{File: layer.file, Layer: f.Name, Feature: feature.Name(), Line: feature.Line, Found: err.Error(), Hint: "check the coordinates, or state the layer's crs"})
				continue
			}
			layer.plane[i] = g
		}
	}
}

// checkSwapped looks for layers in degrees that lie off the extent but on it once longitude and latitude are exchanged, and for an
// extent of which that holds against all the others.
func (b *builder) checkSwapped() {
	extent := b.layers["extent"]
	for _, f := range layersSection.Fields {
		if l := b.layers[f.Name]; l != nil {
			l.plane = make([]orb.Geometry, len(l.features))
		}
	}
	if extent == nil || len(extent.features) == 0 || !extent.system.Geographic() {
		return
	}
	box := extent.features[0].Geometry.Bound()
	mirrored := orb.Bound{Min: exchange(box.Min), Max: exchange(box.Max)}
	var swapped []*layerData
	var names []string
	all := true
	for _, f := range layersSection.Fields[1:] {
		l := b.layers[f.Name]
		if l == nil || len(l.features) == 0 || !l.system.Geographic() {
			continue
		}
		outside, fits := 0, 0
		for _, feature := range l.features {
			fb := feature.Geometry.Bound()
			if !fb.Intersects(box) {
				outside++
				if fb.Intersects(mirrored) {
					fits++
				}
			}
		}
		if outside == len(l.features) && fits == outside {
			swapped, names = append(swapped, l), append(names, f.Name)
		} else {
			all = false
		}
	}
	if len(swapped) > 1 && all {
		extent.swapped = true
		b.fail(Finding{File: extent.file, Layer: "extent", Found: "an extent that meets no other layer, but all of them with longitude and latitude exchanged", Allowed: "longitude first, then latitude",
			Hint: "exchange the two"})
		return
	}
	for i, l := range swapped {
		l.swapped = true
		b.fail(Finding{File: l.file, Layer: names[i], Found: "coordinates off the extent that would lie on it with longitude and latitude exchanged", Allowed: "longitude first, then latitude",
			Hint: "exchange the two"})
	}
}

// exchange swaps a point's coordinates.
func exchange(p orb.Point) orb.Point { return orb.Point{p[1], p[0]} }

// placed is a record with its geometry in the plane; nil where it is not known.
type placed struct {
	*record
	geometry  orb.Geometry
	fromTable bool
}

// spot names where a record's place is written.
func (p placed) spot() string {
	if p.fromTable {
		return "place"
	}
	return "geometry"
}

// placedRecords makes a record of every feature of a layer; more adds what a table says of the same id. Keys that are not known are
// listed in one warning.
func (b *builder) placedRecords(section *Section, more func(id string) []written) []placed {
	layer := b.layers[section.Name]
	if layer == nil {
		return nil
	}
	var out []placed
	var unknown []string
	seen := map[string]bool{}
	for i, f := range layer.features {
		id := f.ID
		var list []written
		for _, k := range f.Keys {
			list = append(list, written{key: k, value: f.Properties[k]})
		}
		if id != "" && valueOf(list, "id") == "" && section.field("id") != nil {
			list = append(list, written{key: "id", value: id})
		}
		if own := valueOf(list, "id"); own != "" {
			id = own
		} else if id == "" {
			id = valueOf(list, "name")
		}
		if more != nil {
			list = append(list, more(id)...)
		}
		at := Finding{File: layer.file, Layer: section.Name, Feature: FeatureName(f.Index, id), Line: f.Line}
		rec := b.newRecord(section, at, list)
		rec.needAlways()
		b.checkDatum(rec)
		for _, k := range rec.unknown {
			if !seen[k] {
				seen[k] = true
				unknown = append(unknown, unknownName(k, section.nearestKey(k)))
			}
		}
		out = append(out, placed{record: rec, geometry: layer.plane[i]})
	}
	if len(unknown) > 0 {
		b.warn(Finding{File: layer.file, Layer: section.Name, Found: "properties that are not read: " + strings.Join(unknown, ", ")})
	}
	return out
}

// valueOf returns the text of a key's value, empty where it is blank or no text.
func valueOf(list []written, key string) string {
	for _, w := range list {
		if w.key != key {
			continue
		}
		switch v := w.value.(type) {
		case string:
			return strings.TrimSpace(v)
		case float64:
			return strconv.FormatFloat(v, 'f', -1, 64)
		}
	}
	return ""
}

// tableRecords makes a record of every row of a table.
func (b *builder) tableRecords(section *Section, rows []tableRow) []placed {
	table := b.tables[section.Name]
	var out []placed
	for _, r := range rows {
		for _, w := range r.list {
			if w.as.field.Name == "id" || w.as.field.Name == "name" && section.field("id") == nil {
				if s, ok := w.value.(string); ok && s != "" {
					r.at.Feature += fmt.Sprintf(" (id %q)", s)
				}
			}
		}
		rec := b.newRecord(section, r.at, r.list)
		rec.needAlways()
		b.checkDatum(rec)
		p := placed{record: rec, fromTable: true}
		if section.field("longitude") != nil {
			if at, ok := b.tablePlace(rec, table); ok {
				p.geometry = at
			}
		}
		out = append(out, p)
	}
	return out
}

// tablePlace reads a row's place and brings it into the plane.
func (b *builder) tablePlace(rec *record, table *tableData) (orb.Point, bool) {
	pairs := [2][2]string{{"longitude", "latitude"}, {"easting", "northing"}}
	chosen := -1
	for i, pair := range pairs {
		first, second := rec.has(pair[0]), rec.has(pair[1])
		switch {
		case first != second:
			rec.fail(Finding{Property: pair[0] + ", " + pair[1], Found: "given one without the other", Allowed: "both or neither"})
			return orb.Point{}, false
		case first && chosen >= 0:
			rec.fail(Finding{Property: pair[0], Found: "stated beside longitude and latitude", Allowed: "one of the two pairs"})
			return orb.Point{}, false
		case first:
			chosen = i
		}
	}
	if chosen < 0 {
		return orb.Point{}, false
	}
	x, okX := rec.number(pairs[chosen][0])
	y, okY := rec.number(pairs[chosen][1])
	if !okX || !okY {
		return orb.Point{}, false
	}
	system := table.system
	if chosen == 0 {
		if !system.Valid() || !system.Geographic() {
			system = WGS84
		}
		if !(math.Abs(x) <= 360) || !(math.Abs(y) <= 90) {
			rec.fail(Finding{Property: "longitude, latitude", Found: fmt.Sprintf("%v, %v", x, y), Allowed: "degrees: latitude within -90 to 90", Hint: "metres are given as easting and northing"})
			return orb.Point{}, false
		}
	} else if !system.Valid() {
		system = b.stated
	}
	if !system.Valid() || chosen == 1 && system.Geographic() {
		rec.fail(Finding{Property: "easting, northing", Found: "metres without a system", Allowed: `{file = "...", crs = "EPSG:..."} for the table`, Hint: "or state working under [coordinates]"})
		return orb.Point{}, false
	}
	if !b.p.Plane.Valid() {
		return orb.Point{}, false
	}
	g, err := Transform(system, b.p.Plane, orb.Point{x, y})
	if err != nil {
		hint := ""
		if g, err := Transform(system, b.p.Plane, orb.Point{y, x}); err == nil && b.extentKnown && b.inside(g.(orb.Point)) {
			hint = exchangedHint
		}
		rec.fail(Finding{Property: strings.Join(pairs[chosen][:], ", "), Found: "a " + err.Error(), Hint: hint})
		return orb.Point{}, false
	}
	return g.(orb.Point), true
}

// checkDatum holds a record's own datum against the project's.
func (b *builder) checkDatum(rec *record) {
	if rec.section.field("datum") == nil {
		return
	}
	own := rec.text("datum")
	if own != "" && b.datum != "" && !sameHeader(own, b.datum) {
		rec.fail(Finding{Property: rec.find("datum", valueRole).key, Found: quoted(own), Allowed: quoted(b.datum) + ", the project's vertical_datum", Hint: "convert the levels"})
	}
}

// single takes the one part out of a geometry of several parts; other counts stay as they are.
func single(g orb.Geometry) orb.Geometry {
	switch m := g.(type) {
	case orb.MultiPoint:
		if len(m) == 1 {
			return m[0]
		}
	case orb.MultiLineString:
		if len(m) == 1 {
			return m[0]
		}
	case orb.MultiPolygon:
		if len(m) == 1 {
			return m[0]
		}
	}
	return g
}

// geometryOf takes a record's geometry as the wanted type; another type is an error. It is false where the geometry is not known.
func geometryOf[G orb.Geometry](p placed, wanted string) (G, bool) {
	var zero G
	if p.geometry == nil {
		return zero, false
	}
	g, ok := single(p.geometry).(G)
	if !ok {
		p.fail(Finding{Property: p.spot(), Found: "a " + p.geometry.GeoJSONType(), Allowed: wanted})
		return zero, false
	}
	return g, true
}

// buildExtent takes the one polygon of the extent's layer.
func (b *builder) buildExtent() {
	layer := b.layers["extent"]
	if layer == nil {
		return
	}
	ps := b.placedRecords(&extentSection, nil)
	if len(layer.features) != 1 {
		if len(layer.features) > 1 || b.findings.Err() == nil {
			b.fail(Finding{File: layer.file, Layer: "extent", Found: fmt.Sprintf("%d features", len(layer.features)), Allowed: "one polygon"})
		}
		if len(ps) == 0 {
			return
		}
	}
	if poly, ok := geometryOf[orb.Polygon](ps[0], "one polygon"); ok {
		b.p.Site.Extent = poly
		b.extentKnown = true
		box := poly.Bound()
		b.tolerance = outlineShare * math.Hypot(box.Max[0]-box.Min[0], box.Max[1]-box.Min[1])
	}
}

// inside tells whether a place lies in the extent; true where the extent is not known.
func (b *builder) inside(at orb.Point) bool {
	return !b.extentKnown || polygonContains(b.p.Site.Extent, at)
}

const exchangedHint = "longitude and latitude look exchanged"

// outsideHint says why a place may be outside: exchanged coordinates.
func (b *builder) outsideHint(at orb.Point) string {
	if lon, lat, err := b.p.Plane.Inverse(at[0], at[1]); err == nil && math.Abs(lon) <= 90 {
		if x, y, err := b.p.Plane.Forward(lat, lon); err == nil && b.inside(orb.Point{x, y}) {
			return exchangedHint
		}
	}
	return fmt.Sprintf("it is %s m from the outline", roundMetres(distanceToPolygon(b.p.Site.Extent, at)))
}

// roundMetres writes a distance for messages.
func roundMetres(d float64) string {
	if math.Abs(d) >= 1000 {
		return fmt.Sprintf("%.0f", d)
	}
	return fmt.Sprintf("%.4g", d)
}

// keepInside reports a shape that leaves the extent by more than the outline's tolerance.
func (b *builder) keepInside(p placed, points []orb.Point) bool {
	if !b.extentKnown {
		return true
	}
	worst := 0.0
	for _, at := range points {
		if !b.inside(at) {
			worst = math.Max(worst, distanceToPolygon(b.p.Site.Extent, at))
		}
	}
	if worst <= b.tolerance {
		return true
	}
	p.fail(Finding{Property: p.spot(), Found: fmt.Sprintf("a part up to %s m outside the extent", roundMetres(worst)), Allowed: "inside the extent", Hint: "cut it at the outline"})
	return false
}

// nodes asks for a mesh node.
func (b *builder) node(name string, at orb.Point, radius float64, well bool) {
	b.p.Site.Nodes = append(b.p.Site.Nodes, aquifer.NodeRequest{Name: name, At: at, Radius: radius, Well: well})
}
