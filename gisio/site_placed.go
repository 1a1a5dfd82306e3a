package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"github.com/paulmach/orb"
)

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
