package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"springbound/aquifer"
	"springbound/plan"
)

// reader collects findings and assumptions while a project is read.
type reader struct {
	findings    Findings
	assumptions []plan.Assumption
	datum       string // vertical_datum of the project
}

// fail notes an error.
func (rd *reader) fail(f Finding) {
	f.Severity = Error
	rd.findings = append(rd.findings, f)
}

// warn notes a warning.
func (rd *reader) warn(f Finding) {
	f.Severity = Warning
	rd.findings = append(rd.findings, f)
}

// written is one key with its value as it stands in a file.
type written struct {
	key   string
	value any // nil, string, bool, float64, int64, []any or cellNumber
	unit  *Unit
	as    *resolved // set where [columns] or a header says what the key stands for
	line  int
	at    *Finding // where it is, when that is another file than the record's
}

// cellNumber is a table's cell that starts with a number: the decimal mark is settled, the unit not yet looked up.
type cellNumber struct {
	value float64
	unit  string // text behind the number
	text  string // as it is written
}

// entry is a written value whose key is known.
type entry struct {
	written
	resolved
}

// record is one feature, one row or one table of the project file, with its known keys.
type record struct {
	rd      *reader
	section *Section
	at      Finding // file, layer, feature, line: where the record is
	label   string  // names the record in assumptions: "zone Gravel"
	entries []entry
	unknown []string // keys that are not in the section
	written int      // keys with a value
}

// newRecord resolves the keys. What is written twice, and a missing field that is always needed, are errors; unknown keys are
// left to the caller, except those that start as a numeric field does and so are surely meant as one.
func (rd *reader) newRecord(section *Section, at Finding, list []written) *record {
	rec := &record{rd: rd, section: section, at: at}
	for _, w := range list {
		res, ok := section.resolve(w.key)
		if w.as != nil {
			res, ok = *w.as, true
		}
		if !ok {
			if f := section.miswritten(w); f != nil {
				rec.fail(Finding{Property: w.key, Line: w.line, Found: "a key that starts like " + f.Name + " but ends in no known unit", Allowed: f.keysOf(),
					Hint: "or " + f.Name + " with the unit in the value"})
				continue
			}
			rec.unknown = append(rec.unknown, w.key)
			continue
		}
		if blank(w.value) {
			continue
		}
		rec.written++
		if old := rec.find(res.field.Name, res.role); old != nil {
			rec.statedTwice(w, old)
			continue
		}
		rec.entries = append(rec.entries, entry{w, res})
	}
	return rec
}

// statedTwice reports a value that stands in two places. The same text in a layer and in its table is let pass.
func (rec *record) statedTwice(w written, old *entry) {
	text, isText := w.value.(string)
	if oldText, ok := old.value.(string); ok && isText && w.at != nil && strings.TrimSpace(text) == strings.TrimSpace(oldText) {
		return
	}
	f := Finding{Property: w.key, Line: w.line, Found: "stated twice", Hint: "it stands under " + old.key + " too; leave one out"}
	if w.at == nil {
		rec.fail(f)
		return
	}
	f.Hint = "it stands in " + rec.at.File + " too; leave one out"
	rec.rd.fail(place(*w.at, f))
}

// needAlways reports fields that are needed in every record and are missing.
func (rec *record) needAlways() {
	for _, f := range rec.section.Fields {
		if f.Required == "yes" && !rec.has(f.Name) {
			rec.missing(f.Name, f.Meaning)
		}
	}
}

// miswritten returns the numeric field that an unknown key with a number seems to mean.
func (s *Section) miswritten(w written) *Field {
	switch v := w.value.(type) {
	case float64, int64, cellNumber, []any:
	case string:
		if n, _ := splitQuantity(v); n == "" {
			return nil
		}
	default:
		return nil
	}
	for i := range s.Fields {
		f := &s.Fields[i]
		if f.Class.numeric() && f.Kind != Plain && strings.HasPrefix(w.key, f.Name+"_") {
			return f
		}
	}
	return nil
}

// blank tells whether a value is not stated: null, or a text of blanks.
func blank(v any) bool {
	if v == nil {
		return true
	}
	s, ok := v.(string)
	return ok && strings.TrimSpace(s) == ""
}

// find returns the entry of a field in a role, or nil. A level's depth and elevation are the same role here.
func (rec *record) find(name string, r role) *entry {
	for i := range rec.entries {
		e := &rec.entries[i]
		same := e.role == r || (r == valueRole && e.role == depthRole) || (r == depthRole && e.role == valueRole)
		if e.field.Name == name && same {
			return e
		}
	}
	return nil
}

// has tells whether a field has a value.
func (rec *record) has(name string) bool { return rec.find(name, valueRole) != nil }

// fill puts the record's place into a finding.
func (rec *record) fill(f Finding) Finding {
	at := rec.at
	for i := range rec.entries {
		if e := &rec.entries[i]; e.at != nil && e.key == f.Property {
			at = *e.at
		}
	}
	f.File, f.Layer, f.Feature = at.File, at.Layer, at.Feature
	if f.Line == 0 {
		f.Line = at.Line
	}
	return f
}

func (rec *record) fail(f Finding) { rec.rd.fail(rec.fill(f)) }
func (rec *record) warn(f Finding) { rec.rd.warn(rec.fill(f)) }

// missing reports a field that is needed and has no value.
func (rec *record) missing(name, hint string) {
	f := rec.section.field(name)
	allowed := ""
	if f.Class == Word {
		allowed = orList(f.Words)
	} else if f.Class.numeric() {
		allowed = f.keysOf()
	}
	rec.fail(Finding{Property: name, Found: "missing or blank", Allowed: allowed, Hint: hint})
}

// text returns a text field; numbers become text as they are written.
func (rec *record) text(name string) string {
	e := rec.find(name, valueRole)
	if e == nil {
		return ""
	}
	switch v := e.value.(type) {
	case string:
		return strings.TrimSpace(v)
	case float64:
		return strconv.FormatFloat(v, 'f', -1, 64)
	case int64:
		return strconv.FormatInt(v, 10)
	case cellNumber:
		return strings.TrimSpace(v.text)
	}
	rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "a text"})
	return ""
}

// word returns the index of a word field's value in its list, or missing where the field is blank; unknown words are errors.
func (rec *record) word(name string, missing int) int {
	f := rec.section.field(name)
	text := rec.text(name)
	if text == "" {
		return missing
	}
	plain := strings.NewReplacer(" ", "_", "-", "_").Replace(strings.ToLower(text))
	for i, w := range f.Words {
		if text == w || plain == strings.ReplaceAll(strings.ToLower(w), "-", "_") {
			return i
		}
	}
	e := rec.find(name, valueRole)
	rec.fail(Finding{Property: e.key, Line: e.line, Found: quoted(text), Allowed: orList(f.Words), Hint: nearestHint(text, f.Words)})
	return missing
}

// flag returns a true-or-false field, with the value where it is blank.
func (rec *record) flag(name string, missing bool) bool {
	e := rec.find(name, valueRole)
	if e == nil {
		return missing
	}
	switch v := e.value.(type) {
	case bool:
		return v
	case string:
		switch strings.ToLower(strings.TrimSpace(v)) {
		case "true", "yes":
			return true
		case "false", "no":
			return false
		}
	}
	rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "true or false, yes or no"})
	return missing
}

// number returns a numeric field in its inside unit; false where it is blank or wrong.
func (rec *record) number(name string) (float64, bool) {
	e := rec.find(name, valueRole)
	if e == nil {
		return 0, false
	}
	v, ok := rec.convert(e, e.field.Kind)
	if !ok {
		return 0, false
	}
	ok = rec.checkBound(e, v)
	if ok {
		rec.assume(name, v, nil, nil)
	}
	return v, ok
}

// optional returns a numeric field or nil.
func (rec *record) optional(name string) *float64 {
	if v, ok := rec.number(name); ok {
		return &v
	}
	return nil
}

// numberOr returns a numeric field, or a value where it is blank.
func (rec *record) numberOr(name string, missing float64) float64 {
	if v, ok := rec.number(name); ok {
		return v
	}
	return missing
}

// parameter returns a parameter with its range, or nil where it is blank or wrong.
func (rec *record) parameter(name string) *aquifer.Parameter {
	e := rec.find(name, valueRole)
	if e == nil {
		for _, r := range []role{lowRole, highRole} {
			if o := rec.find(name, r); o != nil {
				rec.fail(Finding{Property: o.key, Line: o.line, Found: "a range without a best value", Allowed: name + " beside it"})
			}
		}
		return nil
	}
	best, ok := rec.convert(e, e.field.Kind)
	ok = ok && rec.checkBound(e, best)
	p := &aquifer.Parameter{Best: best, Basis: aquifer.Basis(rec.basis(name)), Source: rec.sourceOf(name)}
	p.Low, ok = rec.rangeEnd(name, lowRole, ok)
	p.High, ok = rec.rangeEnd(name, highRole, ok)
	if !ok {
		return nil
	}
	if p.Low != nil && !(*p.Low <= best) || p.High != nil && !(best <= *p.High) {
		rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value) + ", outside its own range", Allowed: "low <= best <= high"})
		return nil
	}
	rec.assume(name, best, p.Low, p.High)
	return p
}

// rangeEnd reads the low or high end of a parameter's range.
func (rec *record) rangeEnd(name string, r role, ok bool) (*float64, bool) {
	e := rec.find(name, r)
	if e == nil {
		return nil, ok
	}
	v, good := rec.convert(e, e.field.Kind)
	if !good || !rec.checkBound(e, v) {
		return nil, false
	}
	return &v, ok
}

// whole returns a whole-number field, or 0 where it is blank or wrong.
func (rec *record) whole(name string) int {
	e := rec.find(name, valueRole)
	if e == nil {
		return 0
	}
	const largest = 1 << 30 // what an int holds everywhere
	v, ok := rec.convert(e, Plain)
	if ok && (v != math.Trunc(v) || math.Abs(v) > largest) {
		rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "a whole number"})
		return 0
	}
	if !ok || !rec.checkBound(e, v) {
		return 0
	}
	return int(v)
}

// valueText shows a value as it is written.
func valueText(v any) string {
	switch v := v.(type) {
	case nil:
		return "blank"
	case string:
		return quoted(v)
	case cellNumber:
		return quoted(v.text)
	case float64:
		return strconv.FormatFloat(v, 'g', -1, 64)
	case []any:
		return fmt.Sprintf("a list of %d", len(v))
	case map[string]any:
		return "a table"
	}
	return fmt.Sprint(v)
}
