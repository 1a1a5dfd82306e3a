package gisio

import (
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
	unit := Inside(f.Kind)
	a := plan.Assumption{What: rec.label + ": " + strings.ReplaceAll(name, "_", " "), Value: unit.show(best), Basis: rec.quietBasis(name), Source: rec.sourceOf(name)}
	if low != nil {
		a.Low = unit.show(*low)
	}
	if high != nil {
		a.High = unit.show(*high)
	}
	rec.rd.assumptions = append(rec.rd.assumptions, a)
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
