package gisio

import (
	"fmt"
	"math"
	"strings"

	"github.com/paulmach/orb"

	"springbound/wells"
)

// longestID is the longest id that is taken: it must fit a sheet's column and a formula's name.
const longestID = 40

// id returns an identity field; characters that may not stand in an id are an error.
func (rec *record) id(name string) string {
	id := rec.text(name)
	if id == "" || validID(id) {
		return id
	}
	rec.fail(Finding{Property: rec.find(name, valueRole).key, Found: quoted(id), Allowed: fmt.Sprintf("1 to %d of letters A-Z a-z, digits, _ . and -", longestID), Hint: "free text belongs in name"})
	return ""
}

// validID tells whether a text may be an id.
func validID(id string) bool {
	if len(id) > longestID {
		return false
	}
	for _, c := range []byte(id) {
		if !(c >= 'A' && c <= 'Z' || c >= 'a' && c <= 'z' || c >= '0' && c <= '9' || c == '_' || c == '.' || c == '-') {
			return false
		}
	}
	return id != ""
}

// ids returns a list of ids: a list, or a text with semicolons, commas or blanks between them.
func (rec *record) ids(name string) []string {
	e := rec.find(name, valueRole)
	if e == nil {
		return nil
	}
	var out []string
	if list, ok := e.value.([]any); ok {
		for _, item := range list {
			s, ok := item.(string)
			if !ok {
				rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(item), Allowed: "ids in quotes"})
				continue
			}
			out = append(out, strings.TrimSpace(s))
		}
	} else {
		out = strings.FieldsFunc(rec.text(name), func(r rune) bool { return r == ';' || r == ',' || r == ' ' || r == '|' || r == '\n' || r == '\t' })
	}
	seen := map[string]bool{}
	for _, id := range out {
		if seen[id] {
			rec.fail(Finding{Property: e.key, Line: e.line, Found: quoted(id) + " twice", Allowed: "each id once"})
		}
		seen[id] = true
	}
	return out
}

// merged reads a layer together with a table of the same section: rows with the id of a feature add to it, rows with a place stand
// for themselves, and others are errors unless alone is set.
func (b *builder) merged(section *Section, alone bool) []placed {
	table := b.tables[section.Name]
	if table == nil {
		return b.placedRecords(section, nil)
	}
	inLayer := map[string]bool{}
	if layer := b.layers[section.Name]; layer != nil {
		for _, f := range layer.features {
			id := f.ID
			if v, ok := f.Properties["id"]; ok && !blank(v) {
				id = valueOf([]written{{key: "id", value: v}}, "id")
			}
			inLayer[id] = true
		}
	}
	adds := map[string][]tableRow{}
	var own []tableRow
	for _, r := range table.rows {
		id := rowID(r)
		if id != "" && inLayer[id] {
			adds[id] = append(adds[id], r)
		} else {
			own = append(own, r)
		}
	}
	out := b.placedRecords(section, func(id string) []written {
		var list []written
		for _, r := range adds[id] {
			at := r.at
			for _, w := range r.list {
				if w.as.field.Name == "id" {
					continue
				}
				w.at = &at
				list = append(list, w)
			}
		}
		return list
	})
	for _, p := range b.tableRecords(section, own) {
		if p.geometry == nil && !alone && !p.has("longitude") && !p.has("easting") && !p.has("latitude") && !p.has("northing") {
			hint := "give longitude and latitude, or easting and northing"
			if b.layers[section.Name] != nil {
				hint = "no feature of the layer has this id; " + hint
			}
			p.fail(Finding{Property: "id", Found: quoted(p.text("id")) + " without a place", Hint: hint})
		}
		out = append(out, p)
	}
	return out
}

// rowID returns the id of a row.
func rowID(r tableRow) string {
	for _, w := range r.list {
		if w.as.field.Name == "id" {
			return valueOf([]written{{key: "id", value: w.value}}, "id")
		}
	}
	return ""
}

// unique notes an id; a second one, or one that differs in case only, is reported.
func unique(p placed, ids map[string]string, id string) {
	if id == "" {
		return
	}
	lower := strings.ToLower(id)
	switch old, taken := ids[lower]; {
	case !taken:
		ids[lower] = id
	case old == id:
		p.fail(Finding{Property: "id", Found: quoted(id) + " for a second time", Allowed: "each id once"})
	default:
		p.warn(Finding{Property: "id", Found: quoted(id) + " beside " + quoted(old), Hint: "they differ in capitals only and are taken as two"})
	}
}

// buildWells reads the wells.
func (b *builder) buildWells() {
	if b.layers["wells"] == nil && b.tables["wells"] == nil {
		if b.settings != nil && !b.named("layers", "wells") && !b.named("tables", "wells") {
			b.fail(Finding{File: b.p.File, Property: "wells", Found: "missing under [layers] and [tables]", Allowed: "a layer or a table of wells"})
		}
		return
	}
	ids := map[string]string{}
	for _, p := range b.merged(&wellsSection, false) {
		w := wells.Well{ID: p.id("id"), Name: p.text("name"), Owner: p.text("owner"), Aquifer: p.text("aquifer"), Source: p.text("source")}
		p.label = "well " + w.ID
		unique(p, ids, w.ID)
		w.Radius = p.radius()
		b.wellRates(p, &w)
		b.wellLevels(p, &w)
		b.wellForAim(p, &w)
		at, known := geometryOf[orb.Point](p, "one point")
		if known {
			w.At = at
			if !b.inside(at) {
				p.fail(Finding{Property: p.spot(), Found: "a well outside the extent", Hint: b.outsideHint(at)})
			}
			for i, other := range b.p.Wells {
				if b.recordOf("well", i).geometry != nil && !(math.Hypot(at[0]-other.At[0], at[1]-other.At[1]) > w.Radius+other.Radius) {
					p.fail(Finding{Property: p.spot(), Found: "the place of well " + other.ID, Allowed: "wells that stand apart"})
				}
			}
		}
		b.p.Wells = append(b.p.Wells, w)
		b.node("well "+w.ID, w.At, w.Radius, true)
		b.keepPlace("well", p)
	}
	if len(b.p.Wells) == 0 && b.findings.Err() == nil {
		b.fail(Finding{File: b.p.File, Property: "wells", Found: "no well", Allowed: "at least one"})
	}
}

// named tells whether the project file names a file under [layers] or [tables].
func (b *builder) named(table, key string) bool {
	t, _ := b.settings.root[table].(map[string]any)
	return t[key] != nil
}

// radius reads a bore's radius or diameter.
func (rec *record) radius() float64 {
	switch r, d := rec.has("radius"), rec.has("diameter"); {
	case r && d:
		rec.fail(Finding{Property: "diameter", Found: "stated beside radius", Allowed: "one of the two"})
	case d:
		return rec.numberOr("diameter", 0) / 2
	case r:
		return rec.numberOr("radius", 0)
	default:
		rec.missing("radius", "or diameter")
	}
	return 0
}

// wellRates reads mode and rates.
func (b *builder) wellRates(p placed, w *wells.Well) {
	w.Others = p.flag("others", false)
	missing := int(wells.Decided)
	if w.Others {
		missing = int(wells.Fixed)
	}
	w.Mode = wells.Mode(p.word("mode", missing))
	if w.Others && w.Mode == wells.Decided {
		p.warn(Finding{Property: "mode", Found: "decided for an existing user's well", Hint: "the plan may then set the rate of somebody else"})
	}
	w.Outage = p.flag("outage", false)
	w.Present, w.Recent, w.Licensed, w.Requested = p.optional("present"), p.optional("recent"), p.optional("licensed"), p.optional("requested")
	w.DutyHours = 24
	if p.has("duty_hours") {
		w.DutyHours = p.numberOr("duty_hours", 24)
		if !(w.DutyHours <= 24) {
			p.fail(Finding{Property: "duty_hours", Found: fmt.Sprint(w.DutyHours), Allowed: "0 < hours <= 24"})
		}
	} else {
		p.assumeDefault("duty_hours", "24", "not stated: taken to run all day")
	}
	fixed, low, high := p.optional("fixed_rate"), p.optional("min"), p.optional("max")
	w.MaxSource = p.sourceOf("max")
	switch w.Mode {
	case wells.Fixed:
		switch {
		case fixed != nil:
			w.FixedRate = *fixed
		case p.has("fixed_rate"):
		case w.Others && w.Licensed != nil:
			w.FixedRate = *w.Licensed
			p.assumeDefault("fixed_rate", Inside(Rate).show(w.FixedRate), "not stated: the licensed rate")
		case w.Others:
			p.fail(Finding{Property: "fixed_rate, licensed", Found: "missing, both of them", Allowed: "one of them", Hint: "the rate of an existing user must be known"})
		default:
			p.missing("fixed_rate", "the rate of a fixed well must be known")
		}
	case wells.Decided:
		if !p.has("max") {
			p.missing("max", "the largest rate of a decided well must be known")
		}
	}
	if low != nil {
		w.Min = *low
	}
	if high != nil {
		w.Max = *high
	}
	if w.Mode == wells.Decided && high != nil {
		p.rateRange(*w, low != nil)
	}
}

// rateRange checks the range of a decided well.
func (p placed) rateRange(w wells.Well, minStated bool) {
	rate := Inside(Rate)
	switch {
	case !(w.Min <= w.Max):
		hint := ""
		if !minStated {
			hint = "a well that recharges has a negative min and a max up to 0"
		}
		p.fail(Finding{Property: "min, max", Found: rate.show(w.Min) + " and " + rate.show(w.Max), Allowed: "min <= max", Hint: hint})
	case w.Min < 0 && w.Max > 0:
		p.fail(Finding{Property: "min, max", Found: rate.show(w.Min) + " to " + rate.show(w.Max) + ", pumping and recharge", Allowed: "one of the two",
			Hint: "split it into a well that pumps and one that recharges"})
	case w.Min == 0 && w.Max == 0:
		p.warn(Finding{Property: "max", Found: "0", Hint: "the well can only be off; is a value missing?"})
	}
}

// wellLevels reads levels, losses and the pump.
func (b *builder) wellLevels(p placed, w *wells.Well) {
	w.Intake, w.LowestLevel, w.DeliveryLevel = p.level("intake"), p.level("lowest_level"), p.level("delivery_level")
	w.LowestLevelReason = p.text("lowest_level_reason")
	w.LinearLoss, w.QuadraticLoss = p.numberOr("linear_loss", 0), p.numberOr("quadratic_loss", 0)
	w.PumpEfficiency = p.optional("pump_efficiency")
	if w.PumpEfficiency != nil && !(*w.PumpEfficiency <= 1) {
		p.fail(Finding{Property: p.find("pump_efficiency", valueRole).key, Found: Inside(Share).show(*w.PumpEfficiency), Allowed: "at most 1, or 100 %"})
	}
	if w.LowestLevel != nil && w.LowestLevelReason == "" {
		p.warn(Finding{Property: "lowest_level_reason", Found: "not stated", Hint: "a reviewer will ask why the level may fall no lower"})
	}
	if w.Intake != nil && w.LowestLevel == nil && w.Mode == wells.Decided {
		p.warn(Finding{Property: "lowest_level", Found: "not stated, while the intake is", Hint: "the pumping level is not limited without it"})
	}
	if w.Intake != nil && w.LowestLevel != nil && !(*w.LowestLevel >= *w.Intake) {
		p.warn(Finding{Property: "lowest_level", Found: fmt.Sprintf("%v m, below the intake at %v m", *w.LowestLevel, *w.Intake), Hint: "the pump would draw air first"})
	}
}
