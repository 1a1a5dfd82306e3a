package gisio

import (
	"strings"

	"springbound/aquifer"
)

// buildProperties reads [aquifer].
func (b *builder) buildProperties() {
	t := b.settings.table(&b.reader, "aquifer")
	if t == nil {
		b.fail(Finding{File: b.p.File, Property: "[aquifer]", Found: "missing", Allowed: "at least transmissivity", Hint: aquiferSection.Fields[0].Example})
		return
	}
	rec := b.settings.record(&b.reader, &aquiferSection, t, "[aquifer]", nil, "aquifer")
	rec.label = "aquifer"
	z := b.properties(rec)
	if z.Transmissivity == nil && !rec.has("transmissivity") && !rec.has("conductivity") && !rec.has("thickness") {
		rec.missing("transmissivity", "or conductivity and thickness")
	}
	if z.Recharge == nil && !rec.has("recharge") {
		rec.warn(Finding{Property: "recharge", Found: "not stated", Hint: `none is counted outside zones that state it; write recharge = "0 mm/d" if that is meant`})
	}
	if z.LeakageResistance != nil && z.SourceHead == nil && !rec.has("source_head") {
		rec.missing("source_head", "leakage needs the level that it comes from")
	}
	b.doubleCounting(rec, z, true)
	b.p.Site.Background = z
}

// properties reads what the aquifer and its zones may state.
func (b *builder) properties(rec *record) aquifer.Zone {
	z := aquifer.Zone{
		Transmissivity:    rec.direct("transmissivity", "conductivity", "thickness", times),
		Recharge:          rec.parameter("recharge"),
		LeakageResistance: rec.direct("leakage_resistance", "confining_thickness", "confining_vertical_conductivity", over),
		SourceHead:        rec.level("source_head"),
		Top:               rec.level("top"),
		Storage:           rec.parameter("storage"),
	}
	ratio, angle := rec.optional("anisotropy_ratio"), rec.optional("anisotropy_angle_deg")
	switch {
	case rec.has("anisotropy_ratio") != rec.has("anisotropy_angle_deg"):
		rec.fail(Finding{Property: "anisotropy_ratio, anisotropy_angle_deg", Found: "given one without the other", Allowed: "both or neither"})
	case ratio != nil && angle != nil:
		z.Anisotropy = &aquifer.Anisotropy{Ratio: *ratio, AngleDeg: *angle}
	}
	return z
}

// times and over combine two parameters.
func times(a, b float64) float64 { return a * b }
func over(a, b float64) float64  { return a / b }

// direct reads a parameter, or combines two others in its place: transmissivity from conductivity and thickness.
func (rec *record) direct(name, first, second string, combine func(a, b float64) float64) *aquifer.Parameter {
	parts := rec.has(first) || rec.has(second)
	p := rec.parameter(name)
	if !parts {
		return p
	}
	if rec.has(name) {
		rec.fail(Finding{Property: name, Found: "stated beside " + first + " or " + second, Allowed: "one way or the other"})
		return nil
	}
	if !rec.has(first) || !rec.has(second) {
		rec.fail(Finding{Property: first + ", " + second, Found: "given one without the other", Allowed: "both, or " + name})
		return nil
	}
	a, b := rec.parameter(first), rec.parameter(second)
	if a == nil || b == nil {
		return nil
	}
	return combined(*a, *b, combine)
}

// combined puts two parameters together; its range is that of all four corners, where a range is stated at all.
func combined(a, b aquifer.Parameter, combine func(a, b float64) float64) *aquifer.Parameter {
	p := &aquifer.Parameter{Best: combine(a.Best, b.Best), Source: a.Source}
	if a.Basis == b.Basis {
		p.Basis = a.Basis
	}
	if b.Source != a.Source {
		p.Source = strings.TrimPrefix(a.Source+"; "+b.Source, "; ")
	}
	if a.Low == nil && a.High == nil && b.Low == nil && b.High == nil {
		return p
	}
	low, high := p.Best, p.Best
	for _, x := range ends(a) {
		for _, y := range ends(b) {
			v := combine(x, y)
			low, high = min(low, v), max(high, v)
		}
	}
	p.Low, p.High = &low, &high
	return p
}

// ends returns the ends of a parameter's range, the best value for one that is not stated.
func ends(p aquifer.Parameter) [2]float64 {
	e := [2]float64{p.Best, p.Best}
	if p.Low != nil {
		e[0] = *p.Low
	}
	if p.High != nil {
		e[1] = *p.High
	}
	return e
}

// doubleCounting warns of recharge together with leakage at one place.
func (b *builder) doubleCounting(rec *record, z aquifer.Zone, background bool) {
	recharge, leakage := z.Recharge, z.LeakageResistance
	own := recharge != nil || leakage != nil
	if !background {
		if recharge == nil {
			recharge = b.p.Site.Background.Recharge
		}
		if leakage == nil {
			leakage = b.p.Site.Background.LeakageResistance
		}
	}
	if own && recharge != nil && recharge.Best != 0 && leakage != nil {
		rec.warn(Finding{Found: "recharge and leakage at one place", Hint: "water that comes through the confining layer may be counted twice"})
	}
}
