package gisio

import (
	"strconv"
	"strings"

	"springbound/aquifer"
	"springbound/plan"
)

// basis returns a value's basis: measured, estimated, assumed or nothing.
func (rec *record) basis(name string) string {
	e := rec.find(name, basisRole)
	if e == nil {
		return ""
	}
	words := []string{string(aquifer.Measured), string(aquifer.Estimated), string(aquifer.Assumed)}
	text, _ := e.value.(string)
	for _, w := range words {
		if strings.EqualFold(strings.TrimSpace(text), w) {
			return w
		}
	}
	rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: orList(words)})
	return ""
}

// sourceOf returns a value's own source, or else the record's.
func (rec *record) sourceOf(name string) string {
	if e := rec.find(name, sourceRole); e != nil {
		s, ok := e.value.(string)
		if !ok {
			rec.fail(Finding{Property: e.key, Line: e.line, Found: valueText(e.value), Allowed: "a text"})
		}
		return strings.TrimSpace(s)
	}
	if f := rec.section.field("source"); f != nil {
		return rec.text("source")
	}
	return ""
}

// assume notes a value in use for the list of assumptions.
func (rec *record) assume(name string, best float64, low, high *float64) {
	if rec.label == "" {
		return
	}
	f := rec.section.field(name)
	show := Inside(f.Kind).show
	value := show(best)
	if unit, other := rec.enteredUnit(name, f.Kind); other {
		show = func(v float64) string {
			return strconv.FormatFloat(unit.Out(v), 'g', enteredDigits, 64) + " " + unit.Name
		}
		value = show(best) + " = " + strconv.FormatFloat(best, 'g', enteredDigits, 64) + " " + Inside(f.Kind).Name
	}
	a := plan.Assumption{What: rec.label + ": " + strings.ReplaceAll(name, "_", " "), Value: value, Basis: rec.quietBasis(name), Source: rec.sourceOf(name)}
	if low != nil {
		a.Low = show(*low)
	}
	if high != nil {
		a.High = show(*high)
	}
	rec.rd.assumptions = append(rec.rd.assumptions, a)
}

// enteredDigits is enough for any value that a person enters, and hides the last bits of a conversion.
const enteredDigits = 7

// enteredUnit is the unit that a value was written in, and whether it is another than the one used inside.
func (rec *record) enteredUnit(name string, kind Kind) (Unit, bool) {
	e := rec.find(name, valueRole)
	if e == nil {
		return Unit{}, false
	}
	_, unit, err := e.quantity(e.value, kind)
	if err != nil || unit.Kind != kind || unit.Name == Inside(kind).Name {
		return Unit{}, false
	}
	return unit, true
}

// quietBasis is the basis for the list of assumptions; a wrong word is reported where a parameter is read.
func (rec *record) quietBasis(name string) string {
	if e := rec.find(name, basisRole); e != nil {
		if s, ok := e.value.(string); ok {
			return strings.ToLower(strings.TrimSpace(s))
		}
	}
	return "not stated"
}

// assumeDefault notes a value that was filled in because the field is blank.
func (rec *record) assumeDefault(name, value, why string) {
	rec.rd.assumptions = append(rec.rd.assumptions, plan.Assumption{What: rec.label + ": " + strings.ReplaceAll(name, "_", " "), Value: value, Basis: string(aquifer.Assumed), Source: why})
}
