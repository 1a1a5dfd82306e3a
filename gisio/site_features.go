package gisio

import (
	"fmt"
	"strings"

	"github.com/paulmach/orb"

	"springbound/aquifer"
)

// named returns a record's name and notes it in names; a second one is an error. what is "a river", "an edge".
func named(p placed, names map[string]string, what string) string {
	name := p.text("name")
	_, kind, _ := strings.Cut(what, " ")
	p.label = kind + " " + name
	if name == "" {
		return ""
	}
	if other, taken := names[name]; taken {
		p.fail(Finding{Property: "name", Found: quoted(name) + ", which " + other + " has too", Allowed: "a name of its own"})
		return name
	}
	names[name] = what
	return name
}

// buildEdges reads the edges.
func (b *builder) buildEdges() {
	for _, p := range b.placedRecords(&edgesSection, nil) {
		e := aquifer.Edge{Name: named(p, b.names, "an edge"), Saline: p.flag("saline", false), AvailableFlow: p.optional("available_flow"), Source: p.text("source")}
		path, known := geometryOf[orb.LineString](p, "one line along the outline")
		e.Path = path
		kind := p.word("kind", -1)
		e.Kind = aquifer.EdgeKind(max(kind, 0))
		hasLevel := p.has("level") || p.has("levels")
		if kind == int(aquifer.PrescribedFlux) {
			if hasLevel {
				p.fail(Finding{Property: "level", Found: "stated on an edge whose flux is prescribed", Allowed: "flux alone"})
			}
			if !p.has("flux") {
				p.missing("flux", "an edge of this kind needs it")
			}
			e.Flux = p.numberOr("flux", 0)
		} else if kind >= 0 {
			if !hasLevel {
				p.missing("level", "or levels, one a vertex")
			}
			if p.has("flux") {
				p.fail(Finding{Property: "flux", Found: "stated on an edge of kind " + e.Kind.String(), Allowed: "only for prescribed_flux"})
			}
			if known || !p.has("levels") {
				e.Levels = p.levelOrLevels("level", "levels", len(path))
			}
		}
		if kind == int(aquifer.HeadDependent) {
			if !p.has("conductance") {
				p.missing("conductance", "an edge of this kind needs it")
			}
			if c := p.parameter("conductance"); c != nil {
				e.Conductance = *c
			}
		} else if kind >= 0 && p.has("conductance") {
			p.fail(Finding{Property: "conductance", Found: "stated on an edge of kind " + e.Kind.String(), Allowed: "only for head_dependent"})
		}
		if e.Saline && kind > int(aquifer.PrescribedHead) {
			p.fail(Finding{Property: "saline", Found: "true on an edge of kind " + e.Kind.String(), Allowed: "only for prescribed_head"})
		}
		if known {
			b.alongOutline(p, path)
		}
		b.p.Site.Edges = append(b.p.Site.Edges, e)
		b.keepPlace("edge", p)
	}
}

// alongOutline reports an edge that leaves the outline, or jumps from one ring to another.
func (b *builder) alongOutline(p placed, path orb.LineString) {
	if !b.extentKnown {
		return
	}
	best := -1.0
	for _, ring := range b.p.Site.Extent {
		worst := 0.0
		for _, at := range withMiddles(path) {
			worst = max(worst, distanceToLine(orb.LineString(ring), at))
		}
		if best < 0 || worst < best {
			best = worst
		}
	}
	if !(best <= b.tolerance) {
		p.fail(Finding{Property: p.spot(), Found: fmt.Sprintf("a line up to %s m off the outline", roundMetres(best)), Allowed: fmt.Sprintf("within %s m of one ring of the extent", roundMetres(b.tolerance)),
			Hint: "take its points from the extent's"})
	}
}

// buildZones reads the zones.
func (b *builder) buildZones() {
	names := map[string]string{}
	for _, p := range b.placedRecords(&zonesSection, nil) {
		name := named(p, names, "a zone")
		z := b.properties(p.record)
		z.Name = name
		switch g := single(p.geometry).(type) {
		case nil:
		case orb.Polygon:
			z.Area = orb.MultiPolygon{g}
		case orb.MultiPolygon:
			z.Area = g
		default:
			p.fail(Finding{Property: p.spot(), Found: "a " + g.GeoJSONType(), Allowed: "a polygon, or several"})
		}
		if z.LeakageResistance != nil && z.SourceHead == nil && !p.has("source_head") && b.p.Site.Background.SourceHead == nil {
			p.missing("source_head", "leakage needs the level that it comes from")
		}
		if z.Transmissivity == nil && z.Anisotropy == nil && z.Recharge == nil && z.LeakageResistance == nil && z.SourceHead == nil && z.Top == nil && z.Storage == nil {
			p.warn(Finding{Found: "a zone that states nothing", Hint: "it has no effect"})
		}
		b.doubleCounting(p.record, z, false)
		b.p.Site.Zones = append(b.p.Site.Zones, z)
		b.keepPlace("zone", p)
	}
}

// bed reads a bed's resistance, directly or from thickness and vertical conductivity.
func (rec *record) bed() aquifer.Parameter {
	if !rec.has("bed_resistance") && !rec.has("bed_thickness") && !rec.has("bed_vertical_conductivity") {
		rec.missing("bed_resistance", "or bed_thickness and bed_vertical_conductivity")
	}
	if p := rec.direct("bed_resistance", "bed_thickness", "bed_vertical_conductivity", over); p != nil {
		return *p
	}
	return aquifer.Parameter{}
}

// buildRivers reads the rivers.
func (b *builder) buildRivers() {
	for _, p := range b.placedRecords(&riversSection, nil) {
		r := aquifer.River{Name: named(p, b.names, "a river")}
		path, known := geometryOf[orb.LineString](p, "one line")
		r.Path = path
		if !p.has("water_level") && !p.has("water_levels") {
			p.missing("water_level", "or water_levels, one a vertex")
		}
		if known || !p.has("water_levels") && !p.has("bed_levels") {
			r.WaterLevels = p.levelOrLevels("water_level", "water_levels", len(path))
			r.BedLevels = p.levelOrLevels("bed_level", "bed_levels", len(path))
		}
		r.Width = p.numberOr("width", 0)
		r.BedResistance = p.bed()
		r.AvailableFlow = p.optional("available_flow")
		r.Source = p.text("source")
		for i := range max(len(r.WaterLevels), len(r.BedLevels)) {
			if len(r.WaterLevels) == 0 || len(r.BedLevels) == 0 {
				break
			}
			if w, bed := r.WaterLevels[min(i, len(r.WaterLevels)-1)], r.BedLevels[min(i, len(r.BedLevels)-1)]; !(w >= bed) {
				p.fail(Finding{Property: "bed_level", Found: fmt.Sprintf("%v m, above the water at %v m", bed, w), Allowed: "a bed below the water"})
				break
			}
		}
		if known {
			b.keepInside(p, withMiddles(path))
		}
		b.p.Site.Rivers = append(b.p.Site.Rivers, r)
		b.keepPlace("river", p)
	}
}

// buildLakes reads the lakes.
func (b *builder) buildLakes() {
	for _, p := range b.placedRecords(&lakesSection, nil) {
		l := aquifer.Lake{Name: named(p, b.names, "a lake")}
		area, known := geometryOf[orb.Polygon](p, "one polygon")
		l.Area = area
		if v := p.level("water_level"); v != nil {
			l.WaterLevel = *v
		}
		l.BedLevel = p.level("bed_level")
		l.BedResistance = p.bed()
		l.AvailableFlow = p.optional("available_flow")
		l.Source = p.text("source")
		if l.BedLevel != nil && p.has("water_level") && !(l.WaterLevel >= *l.BedLevel) {
			p.fail(Finding{Property: "bed_level", Found: fmt.Sprintf("%v m, above the water at %v m", *l.BedLevel, l.WaterLevel), Allowed: "a bed below the water"})
		}
		if known {
			b.keepInside(p, withMiddles(orb.LineString(area[0])))
		}
		b.p.Site.Lakes = append(b.p.Site.Lakes, l)
		b.keepPlace("lake", p)
	}
}

// buildSprings reads the springs.
func (b *builder) buildSprings() {
	for _, p := range b.placedRecords(&springsSection, nil) {
		s := aquifer.Spring{Name: named(p, b.names, "a spring")}
		at, known := geometryOf[orb.Point](p, "one point")
		s.At = at
		if v := p.level("outlet_level"); v != nil {
			s.OutletLevel = *v
		}
		if p.has("conductance") == p.has("measured_flow") {
			found := "stated, both of them"
			if !p.has("conductance") {
				found = "missing, both of them"
			}
			p.fail(Finding{Property: "conductance, measured_flow", Found: found, Allowed: "one of the two"})
		}
		s.Conductance = p.parameter("conductance")
		s.MeasuredFlow = p.optional("measured_flow")
		s.EffectiveRadius = p.numberOr("effective_radius", 0)
		s.Source = p.text("source")
		if known && !b.inside(at) {
			p.fail(Finding{Property: p.spot(), Found: "a spring outside the extent", Hint: b.outsideHint(at)})
		}
		b.p.Site.Springs = append(b.p.Site.Springs, s)
		b.keepPlace("spring", p)
	}
}

// keepPlace notes the record of the next feature of a kind, for findings about it later. Features of a kind come in order.
func (b *builder) keepPlace(kind string, p placed) {
	b.kept[kind] = append(b.kept[kind], p)
}

// recordOf returns the record of a feature of a kind.
func (b *builder) recordOf(kind string, index int) placed { return b.kept[kind][index] }
