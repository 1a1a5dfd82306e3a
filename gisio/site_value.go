package gisio

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// missingMarks are numbers that older files write for 'not known'; they are refused, since they would be taken for values.
var missingMarks = []float64{-99, -999, -9999, -99999, -999999, -32768, 1e30, -1e30, 9999999}

// convert turns an entry's value into the inside unit of a kind; false after an error was noted.
func (rec *record) convert(e *entry, kind Kind) (float64, bool) {
	if _, reported := e.value.(known); reported {
		return 0, false
	}
	v, _, err := e.quantity(e.value, kind)
	if err == nil {
		return v, true
	}
	var q *QuantityError
	if !errors.As(err, &q) {
		q = &QuantityError{Found: err.Error()}
	}
	rec.fail(Finding{Property: e.key, Line: e.line, Found: q.Found, Allowed: q.Allowed, Hint: q.Hint})
	return 0, false
}

// quantity reads one value of a kind, with its unit from the key, the column or the value itself.
func (e *entry) quantity(value any, kind Kind) (float64, Unit, error) {
	unit := e.resolved.unit
	if e.written.unit != nil {
		unit = e.written.unit
	}
	switch v := value.(type) {
	case float64:
		return e.withUnit(v, "", valueText(v), unit, kind)
	case int64:
		return e.withUnit(float64(v), "", strconv.FormatInt(v, 10), unit, kind)
	case cellNumber:
		return e.withUnit(v.value, v.unit, quoted(v.text), unit, kind)
	case string:
		number, unitText := splitQuantity(v)
		if number == "" {
			hint := ""
			if placeholder(v) {
				hint = "leave it blank where it is not known"
			}
			return 0, Unit{}, &QuantityError{quoted(v), quantityAllowed(kind), hint}
		}
		n, err := parsePointNumber(number)
		if err != nil {
			return 0, Unit{}, err
		}
		return e.withUnit(n, unitText, quoted(v), unit, kind)
	}
	return 0, Unit{}, &QuantityError{valueText(value), quantityAllowed(kind), ""}
}

// placeholder tells whether a text stands for 'not known'.
func placeholder(s string) bool {
	switch strings.ToLower(strings.TrimSpace(s)) {
	case "-", "--", "n/a", "na", "nan", "null", "none", "nil", "unknown", "?", "tbd", "#n/a":
		return true
	}
	return false
}

// withUnit settles which unit a number carries.
func (e *entry) withUnit(n float64, unitText, shown string, unit *Unit, kind Kind) (float64, Unit, error) {
	if math.IsNaN(n) || math.IsInf(n, 0) {
		return 0, Unit{}, &QuantityError{shown, "a finite number", ""}
	}
	for _, m := range missingMarks {
		if n == m {
			return 0, Unit{}, &QuantityError{shown + ", which looks like a mark for 'not known'", quantityAllowed(kind), "leave it blank where it is not known"}
		}
	}
	if kind == Plain {
		if unitText != "" {
			return 0, Unit{}, &QuantityError{shown, "a number without a unit", ""}
		}
		return n, Inside(Plain), nil
	}
	if unitText != "" {
		u, err := FindUnit(unitText, kind)
		if err != nil {
			return 0, Unit{}, err
		}
		if unit != nil && unit.Name != u.Name {
			return 0, Unit{}, &QuantityError{shown + ", while its key or column says " + unit.Name, "one unit", "state it once"}
		}
		return u.In(n), u, nil
	}
	if unit == nil {
		if e.field.Class == Level && e.role == depthRole {
			return 0, Unit{}, &QuantityError{shown + ", a number without a unit", e.key + "_m or another length", "or write the unit behind the number"}
		}
		return 0, Unit{}, &QuantityError{shown + ", a number without a unit", e.field.keysOf(), "or write the unit behind the number"}
	}
	if unit.Kind != kind { // a limit's value: its key may name any unit
		u, err := FindUnit(unit.Name, kind)
		if err != nil {
			return 0, Unit{}, err
		}
		return u.In(n), u, nil
	}
	return unit.In(n), *unit, nil
}

// checkBound holds a value against the field's bound and its usual range; only the bound makes it wrong.
func (rec *record) checkBound(e *entry, v float64) bool {
	f := e.field
	ok := true
	switch f.Bound {
	case "> 0":
		ok = v > 0
	case ">= 0":
		ok = v >= 0
	case ">= 1":
		ok = v >= 1
	}
	if !ok {
		rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: f.Bound})
		return false
	}
	if f.UsualWhy != "" && !(v >= f.Usual[0] && v <= f.Usual[1]) {
		in := Inside(f.Kind)
		rec.warn(Finding{Property: e.key, Line: e.line, Found: withInside(e.value, in, v), Allowed: fmt.Sprintf("usually %s to %s", in.show(f.Usual[0]), in.show(f.Usual[1])), Hint: f.UsualWhy})
	}
	return true
}

// withInside shows a value as written, and in the inside unit where that is something else.
func withInside(value any, in Unit, v float64) string {
	shown, inside := valueText(value), in.show(v)
	if shown == inside || shown == quoted(inside) || shown == strings.TrimSuffix(inside, " "+in.Name) || in.Name == "" {
		return shown
	}
	return shown + " (" + inside + ")"
}

// level returns a level's elevation, or nil where it is blank or wrong. A depth counts down from its reference's elevation.
func (rec *record) level(name string) *float64 {
	e := rec.find(name, valueRole)
	if e == nil {
		return nil
	}
	v, ok := rec.convert(e, Length)
	if !ok {
		return nil
	}
	if e.role == depthRole {
		if !(v >= 0) {
			rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "a depth >= 0", Hint: "a level above its reference is given as an elevation"})
			return nil
		}
		ref := rec.reference(e)
		if ref == nil {
			return nil
		}
		v = *ref - v
	}
	rec.assume(name, v, nil, nil)
	return &v
}

// reference returns the elevation that a depth counts from; a missing one is an error.
func (rec *record) reference(e *entry) *float64 {
	r := rec.find(e.reference, valueRole)
	f := rec.section.field(e.reference)
	switch {
	case f == nil:
		rec.fail(Finding{Property: e.key, Line: e.line, Found: "a depth below " + spaced(e.reference), Allowed: "an elevation, or a depth below ground_level"})
		return nil
	case r == nil:
		rec.fail(Finding{Property: e.key, Line: e.line, Found: "a depth whose reference has no elevation", Allowed: f.keysOf() + " beside it", Hint: "or give " + e.field.Name + " as an elevation"})
		return nil
	case r.role == depthRole:
		rec.fail(Finding{Property: r.key, Line: r.line, Found: "a depth", Allowed: "the elevation of the reference itself"})
		return nil
	}
	v, ok := rec.convert(r, Length)
	if !ok {
		return nil
	}
	return &v
}

// spaced writes a name with blanks.
func spaced(name string) string { return strings.ReplaceAll(name, "_", " ") }

// levels returns a list of elevations, one a vertex; nil where it is blank or wrong.
func (rec *record) levels(name string, vertices int) []float64 {
	e := rec.find(name, valueRole)
	if e == nil {
		return nil
	}
	list, ok := e.value.([]any)
	if !ok {
		rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "a list of levels, one a vertex"})
		return nil
	}
	if len(list) != vertices {
		rec.fail(Finding{Property: e.key, Line: e.line, Found: fmt.Sprintf("%d levels", len(list)), Allowed: fmt.Sprintf("%d, one a vertex", vertices)})
		return nil
	}
	out := make([]float64, len(list))
	for i, item := range list {
		v, _, err := e.quantity(item, Length)
		if err != nil {
			var q *QuantityError
			errors.As(err, &q)
			rec.fail(Finding{Property: fmt.Sprintf("%s, vertex %d", e.key, i+1), Line: e.line, Found: q.Found, Allowed: q.Allowed, Hint: q.Hint})
			return nil
		}
		out[i] = v
	}
	if rec.label != "" {
		low, high := out[0], out[0]
		for _, v := range out {
			low, high = min(low, v), max(high, v)
		}
		rec.assumeRange(name, low, high)
	}
	return out
}

// assumeRange notes levels along a line for the list of assumptions.
func (rec *record) assumeRange(name string, low, high float64) {
	m := Inside(Length)
	value := m.show(low)
	if low != high {
		value += " to " + m.show(high) + " along the line"
	}
	rec.assume(name, low, nil, nil)
	rec.rd.assumptions[len(rec.rd.assumptions)-1].Value = value
}

// levelOrLevels reads a level for a whole line or one a vertex: one or vertices values, nil where both are blank or wrong.
func (rec *record) levelOrLevels(one, many string, vertices int) []float64 {
	if rec.has(one) && rec.has(many) {
		rec.fail(Finding{Property: many, Found: "stated beside " + one, Allowed: "one of the two"})
		return nil
	}
	if v := rec.level(one); v != nil {
		return []float64{*v}
	}
	return rec.levels(many, vertices)
}
