package gisio

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"springbound/wells"
)

// siteLevel is one level of the site's waters.
type siteLevel struct {
	p        placed
	property string
	value    float64
}

// waterLevels collects the levels of edges, rivers, lakes and springs, the lowest and the highest of each.
func (b *builder) waterLevels() []siteLevel {
	var out []siteLevel
	add := func(kind string, i int, property string, values ...float64) {
		if len(values) == 0 {
			return
		}
		p := b.recordOf(kind, i)
		out = append(out, siteLevel{p, property, slices.Min(values)})
		if high := slices.Max(values); high > slices.Min(values) {
			out = append(out, siteLevel{p, property, high})
		}
	}
	for i, e := range b.p.Site.Edges {
		add("edge", i, "level", e.Levels...)
	}
	for i, r := range b.p.Site.Rivers {
		add("river", i, "water_level", r.WaterLevels...)
	}
	for i, l := range b.p.Site.Lakes {
		if l.Area != nil {
			add("lake", i, "water_level", l.WaterLevel)
		}
	}
	for i, s := range b.p.Site.Springs {
		add("spring", i, "outlet_level", s.OutletLevel)
	}
	return out
}

// Bounds of the suspicion that a level is in feet. Levels of one aquifer lie within some tens of metres; one that stands apart from all
// the others by more than their own range and this much, and among them once it is taken for feet, is suspicious.
const (
	leastApart    = 20.0 // [m]
	fewestToJudge = 2    // other levels
)

// checkLevelScale warns of a water level that stands apart from the others and would be among them if it were in feet.
func (b *builder) checkLevelScale() {
	all := b.waterLevels()
	for _, o := range b.p.Observations {
		if o.Kind == wells.PointLevel {
			all = append(all, siteLevel{b.observationRecord(o.ID), "level", o.Value})
		}
	}
	waters := len(b.waterLevels())
	for i, l := range all {
		low, high, n := math.Inf(1), math.Inf(-1), 0
		for j, o := range all[:waters] {
			if j == i || o.p.record == l.p.record {
				continue
			}
			low, high, n = math.Min(low, o.value), math.Max(high, o.value), n+1
		}
		span := math.Max(high-low, leastApart)
		taken := l.value * foot
		if n >= fewestToJudge && (l.value > high+span || l.value < low-span) && taken >= low-span/2 && taken <= high+span/2 {
			l.p.warn(Finding{Property: l.property, Found: fmt.Sprintf("%v m, while the other waters stand at %v to %v m", l.value, low, high), Hint: "is it in feet?"})
		}
	}
	b.checkWellLevels(all[:waters])
	b.checkLimitLevels(all[:waters])
}

// observationRecord returns the record of an observation.
func (b *builder) observationRecord(id string) placed {
	for i, o := range b.p.Observations {
		if o.ID == id {
			return b.recordOf("observation", i)
		}
	}
	panic("gisio: no observation " + id)
}

// highestOf returns the highest of the waters, false where there is none.
func highestOf(all []siteLevel) (float64, bool) {
	highest := math.Inf(-1)
	for _, l := range all {
		highest = math.Max(highest, l.value)
	}
	return highest, len(all) > 0
}

// checkWellLevels warns of a pump or a lowest level above every water: a depth given as an elevation.
func (b *builder) checkWellLevels(all []siteLevel) {
	highest, ok := highestOf(all)
	if !ok {
		return
	}
	for i, w := range b.p.Wells {
		for _, item := range []struct {
			name  string
			value *float64
		}{{"lowest_level", w.LowestLevel}, {"intake", w.Intake}} {
			if item.value != nil && *item.value > highest {
				b.recordOf("well", i).warn(Finding{Property: item.name, Found: fmt.Sprintf("%v m, above every water of the site (highest %v m)", *item.value, highest), Hint: "is it a depth given as an elevation?"})
			}
		}
	}
}

// checkLimitLevels warns of a limit that asks for a level above every water.
func (b *builder) checkLimitLevels(all []siteLevel) {
	highest, ok := highestOf(all)
	if !ok {
		return
	}
	for i, l := range b.p.Limits {
		for _, r := range b.p.Receptors {
			if r.ID == l.Receptor && l.Quantity == wells.Value && l.Sense == wells.AtLeast && r.Kind.Unit() == "m" && l.Value > highest {
				b.recordOf("limit", i).warn(Finding{Property: "value", Found: fmt.Sprintf("a level of at least %v m, above every water of the site (highest %v m)", l.Value, highest), Hint: "a level is an elevation in the datum"})
			}
		}
	}
}

// Bounds of the suspicion that a rate is in another unit than it says.
const (
	smallestMax   = 5.0  // a decided well below this [m³/d] is a garden well, or L/s taken for m³/d
	litreFactor   = 86.4 // m³/d in a litre per second
	litreFactorBy = 3.0  // how far from the factor a ratio may be and still suggest it
)

// sameRateBy is how near the ratio of two rates of one well must come to the factor between the units to suggest it.
const sameRateBy = 1.15

// checkRateScale warns of rates that look like litres per second taken for cubic metres per day, against the other wells and within one
// well, and of a present rate above the largest.
func (b *builder) checkRateScale() {
	for i, w := range b.p.Wells {
		b.checkOwnRates(b.recordOf("well", i), w)
		if w.Mode != wells.Decided || !(w.Max > 0) {
			continue
		}
		var others []float64
		for j, o := range b.p.Wells {
			if j != i && o.Mode == wells.Decided && o.Max > 0 {
				others = append(others, o.Max)
			}
		}
		p := b.recordOf("well", i)
		shown := Inside(Rate).show(w.Max)
		if w.Max < smallestMax {
			p.warn(Finding{Property: "max", Found: shown, Hint: "very little for a well: is it in L/s?"})
			continue
		}
		if len(others) < fewestToJudge {
			continue
		}
		sort.Float64s(others)
		ratio := others[len(others)/2] / w.Max
		if ratio > litreFactor/litreFactorBy && ratio < litreFactor*litreFactorBy {
			p.warn(Finding{Property: "max", Found: fmt.Sprintf("%s, about %.0f times less than the other wells", shown, ratio), Hint: "is it in L/s?"})
		}
	}
}

// checkOwnRates compares the rates of one well with its largest.
func (b *builder) checkOwnRates(p placed, w wells.Well) {
	if w.Mode != wells.Decided || !(w.Max > 0) {
		return
	}
	for _, item := range []struct {
		name string
		rate *float64
	}{{"present", w.Present}, {"recent", w.Recent}, {"licensed", w.Licensed}, {"requested", w.Requested}} {
		if item.rate == nil || !(*item.rate > 0) {
			continue
		}
		ratio := w.Max / *item.rate
		for _, r := range []float64{ratio, 1 / ratio} {
			if r > litreFactor/sameRateBy && r < litreFactor*sameRateBy {
				p.warn(Finding{Property: item.name, Found: fmt.Sprintf("%s beside a largest rate of %s", Inside(Rate).show(*item.rate), Inside(Rate).show(w.Max)), Hint: "is one of the two in L/s?"})
			}
		}
		if ratio < 1 && (item.name == "present" || item.name == "recent") && ratio > 1/litreFactor*sameRateBy {
			p.warn(Finding{Property: item.name, Found: Inside(Rate).show(*item.rate) + ", above the largest rate " + Inside(Rate).show(w.Max)})
		}
	}
}

// stepTestRadius is the distance to which a step test's linear term reaches [m]: drawdown there is small within a day.
const stepTestRadius = 100.0

// checkLinearLoss warns of a linear loss that is as large as the aquifer's own drawdown around the well: a step test's whole linear term,
// B >= ln(100 m/rw)/(2 pi T), which the model already holds (Jacob 1947).
func (b *builder) checkLinearLoss() {
	for i, w := range b.p.Wells {
		p := b.recordOf("well", i)
		if !(w.LinearLoss > 0) || !(w.Radius > 0) || p.geometry == nil {
			continue
		}
		t := b.p.Site.Background.Transmissivity
		for _, z := range b.p.Site.Zones {
			for _, area := range z.Area {
				if z.Transmissivity != nil && polygonContains(area, w.At) {
					t = z.Transmissivity
				}
			}
		}
		if t == nil {
			continue
		}
		own := math.Log(stepTestRadius/w.Radius) / (2 * math.Pi * t.Best)
		if own > 0 && w.LinearLoss >= own {
			p.warn(Finding{Property: "linear_loss", Found: Inside(LinearLoss).show(w.LinearLoss), Allowed: fmt.Sprintf("usually well below %.2g d/m2, the aquifer's own drawdown to %v m", own, stepTestRadius),
				Hint: "is it the whole linear term of a step test? The model adds the aquifer's part itself"})
		}
	}
}
