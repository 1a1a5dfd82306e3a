package gisio

import (
	"github.com/paulmach/orb"

	"springbound/wells"
)

// observationKinds are the kinds in the order of the section's words.
var observationKinds = []wells.Kind{wells.PointLevel, wells.SpringFlow, wells.RiverReach}

// buildObservations reads measured levels and flows.
func (b *builder) buildObservations() {
	ids := map[string]string{}
	for _, p := range b.merged(&observationsSection, true) {
		o := wells.Observation{ID: p.id("id"), Feature: p.text("feature"), Date: p.text("date"), Source: p.text("source")}
		unique(p, ids, o.ID)
		kind := p.word("kind", -1)
		if kind < 0 {
			continue
		}
		o.Kind = observationKinds[kind]
		wanted, other := "flow", "level"
		if o.Kind == wells.PointLevel {
			wanted, other = other, wanted
		}
		if !p.has(wanted) {
			p.missing(wanted, "the measured value")
		}
		if p.has(other) {
			p.fail(Finding{Property: other, Found: "a " + other + " on an observation of kind " + o.Kind.String(), Allowed: wanted})
		}
		switch o.Kind {
		case wells.PointLevel:
			if v := p.level("level"); v != nil {
				o.Value = *v
			}
			at, known := geometryOf[orb.Point](p, "one point")
			if p.fromTable && !p.has("longitude") && !p.has("easting") {
				p.fail(Finding{Property: p.spot(), Found: "missing", Allowed: "a point", Hint: "give longitude and latitude, or easting and northing"})
			}
			o.At = at
			if known && !b.inside(at) {
				p.warn(Finding{Property: p.spot(), Found: "an observation outside the extent", Hint: "it is left out; " + b.outsideHint(at)})
				continue
			}
		case wells.SpringFlow:
			b.mustName(p, o.Feature, "spring", b.springNames())
			o.Value = p.numberOr("flow", 0)
		case wells.RiverReach:
			b.mustName(p, o.Feature, "river", b.riverNames())
			o.Value = p.numberOr("flow", 0)
		}
		b.p.Observations = append(b.p.Observations, o)
		b.keepPlace("observation", p)
	}
}
