package gisio

import (
	"fmt"

	"github.com/paulmach/orb"
	"github.com/paulmach/orb/planar"

	"springbound/aquifer"
	"springbound/wells"
)

// buildReceptors reads the receptors.
func (b *builder) buildReceptors() {
	ids := map[string]string{}
	for _, p := range b.merged(&receptorsSection, true) {
		r := wells.Receptor{ID: p.id("id"), Name: p.text("name"), Feature: p.text("feature"), Owner: p.text("owner"), Use: p.text("use"), Source: p.text("source"),
			Date: p.text("date"), FieldChecked: p.flag("field_checked", false)}
		p.label = "receptor " + r.ID
		unique(p, ids, r.ID)
		kind := p.word("kind", -1)
		if kind >= 0 {
			r.Kind = wells.Kind(kind)
			b.receptorPlace(p, &r)
		}
		b.p.Receptors = append(b.p.Receptors, r)
		b.keepPlace("receptor", p)
	}
}

// receptorPlace reads what the kind needs: a point, a polygon, a line or the name of a feature.
func (b *builder) receptorPlace(p placed, r *wells.Receptor) {
	switch r.Kind {
	case wells.PointLevel, wells.NeighbourWell:
		b.noFeature(p, r)
		b.pointReceptor(p, r)
	case wells.Wetland, wells.WetlandWorst:
		b.noFeature(p, r)
		b.areaReceptor(p, r)
	case wells.SalineFront:
		b.noFeature(p, r)
		b.frontReceptor(p, r)
	case wells.SpringFlow:
		for _, s := range b.p.Site.Springs {
			if s.Name != r.Feature {
				continue
			}
			r.At = s.At
			if at, ok := single(p.geometry).(orb.Point); ok && b.extentKnown && planar.Distance(at, s.At) > b.tolerance {
				p.warn(Finding{Property: p.spot(), Found: "a point " + roundMetres(planar.Distance(at, s.At)) + " m from the spring " + quoted(s.Name), Hint: "the spring's own place is used"})
			}
		}
		b.mustName(p, r.Feature, "spring", b.springNames())
	case wells.RiverReach:
		b.mustName(p, r.Feature, "river", b.riverNames())
		b.reachReceptor(p, r)
	case wells.EdgeFlow:
		b.mustName(p, r.Feature, "edge", b.edgeNames())
	case wells.PumpingLevel:
		var names []string
		for _, w := range b.p.Wells {
			names = append(names, w.ID)
			if w.ID == r.Feature {
				r.At = w.At
			}
		}
		b.mustName(p, r.Feature, "well", names)
	}
}

func (b *builder) springNames() (names []string) {
	for _, s := range b.p.Site.Springs {
		names = append(names, s.Name)
	}
	return names
}

func (b *builder) riverNames() (names []string) {
	for _, r := range b.p.Site.Rivers {
		names = append(names, r.Name)
	}
	return names
}

func (b *builder) edgeNames() (names []string) {
	for _, e := range b.p.Site.Edges {
		names = append(names, e.Name)
	}
	return names
}

// mustName reports a feature that is missing or is none of the names.
func (b *builder) mustName(p placed, name, what string, names []string) {
	if name == "" {
		p.missing("feature", "name of the "+what)
		return
	}
	if contains(names, name) || b.broken[what+"s"] {
		return
	}
	hint := nearestHint(name, names)
	if hint == "" && len(names) == 0 {
		hint = "there is none"
	}
	p.fail(Finding{Property: "feature", Found: quoted(name) + ", no " + what + " of the project", Allowed: listSome(names), Hint: hint})
}

// listSome lists names, a dozen at most.
func listSome(names []string) string {
	const shown = 12 // more would hide the message
	var named []string
	for _, n := range names {
		if n != "" && !contains(named, n) {
			named = append(named, n)
		}
	}
	names = named
	if len(names) > shown {
		return orList(append(names[:shown:shown], fmt.Sprintf("one of %d more", len(names)-shown)))
	}
	return orList(names)
}

// noFeature warns of a feature named by a receptor that has a place of its own.
func (b *builder) noFeature(p placed, r *wells.Receptor) {
	if r.Feature != "" {
		p.warn(Finding{Property: "feature", Found: quoted(r.Feature), Hint: "not used for a receptor of kind " + r.Kind.String()})
	}
}

// outside marks a receptor that lies outside the extent.
func (b *builder) outside(p placed, r *wells.Receptor, at orb.Point) {
	r.Outside = true
	p.warn(Finding{Property: p.spot(), Found: "a receptor outside the extent", Hint: "listed as outside and not assessed; " + b.outsideHint(at)})
}

// pointReceptor takes one point and asks for a node there.
func (b *builder) pointReceptor(p placed, r *wells.Receptor) {
	at, ok := geometryOf[orb.Point](p, "one point")
	if !ok {
		b.needPlace(p, "a point")
		return
	}
	r.At = at
	if !b.inside(at) {
		b.outside(p, r, at)
		return
	}
	b.node("receptor "+r.ID, at, 0, false)
}

// needPlace reports a receptor of a table without a place, where its kind needs one.
func (b *builder) needPlace(p placed, what string) {
	if p.fromTable && !p.has("longitude") && !p.has("easting") {
		p.fail(Finding{Property: p.spot(), Found: "missing", Allowed: what, Hint: "give longitude and latitude of a point; draw anything else in the layer"})
	}
}

// areaReceptor takes one polygon and asks for its border in the mesh.
func (b *builder) areaReceptor(p placed, r *wells.Receptor) {
	area, ok := geometryOf[orb.Polygon](p, "one polygon")
	if !ok {
		b.needPlace(p, "a polygon")
		return
	}
	r.Area = area
	r.At, _ = planar.CentroidArea(area)
	ins, out := 0, 0
	worst := area[0][0]
	for _, at := range withMiddles(orb.LineString(area[0])) {
		switch {
		case b.inside(at):
			ins++
		case b.extentKnown && distanceToPolygon(b.p.Site.Extent, at) > b.tolerance:
			out++
			worst = at
		}
	}
	switch {
	case out > 0 && ins == 0:
		b.outside(p, r, worst)
	default:
		if out > 0 {
			p.warn(Finding{Property: p.spot(), Found: "a polygon partly outside the extent", Hint: "only the part inside counts"})
		}
		b.p.Site.Outlines = append(b.p.Site.Outlines, aquifer.AreaRequest{Name: "receptor " + r.ID, Area: area})
	}
}

// frontReceptor takes a line of two points, inland first, and asks for both nodes.
func (b *builder) frontReceptor(p placed, r *wells.Receptor) {
	line, ok := geometryOf[orb.LineString](p, "a line of two points, from inland towards the salt water")
	if !ok {
		b.needPlace(p, "a line of two points")
		return
	}
	if len(line) != 2 {
		p.fail(Finding{Property: p.spot(), Found: fmt.Sprintf("a line of %d points", len(line)), Allowed: "two, from inland towards the salt water"})
		return
	}
	r.At, r.To = line[0], line[1]
	for _, at := range line {
		if !b.inside(at) {
			b.outside(p, r, at)
			return
		}
	}
	saline := false
	for _, e := range b.p.Site.Edges {
		saline = saline || e.Saline
		if e.Saline && len(e.Path) > 1 && distanceToLine(e.Path, r.At) < distanceToLine(e.Path, r.To) {
			p.warn(Finding{Property: p.spot(), Found: "a line whose first point is nearer to the saline edge " + quoted(e.Name), Allowed: "from inland towards the salt water", Hint: "is it drawn the wrong way round?"})
		}
	}
	if !saline {
		p.warn(Finding{Property: "kind", Found: "saline_front, while no edge is saline", Allowed: "a prescribed_head edge with saline = true where the salt water stands", Hint: "without it no inward flow of salt water is looked for"})
	}
	b.node("receptor "+r.ID, r.At, 0, false)
	b.node("receptor "+r.ID+" to", r.To, 0, false)
}

// reachReceptor takes a stretch of a river where one is drawn.
func (b *builder) reachReceptor(p placed, r *wells.Receptor) {
	if p.geometry == nil {
		return
	}
	line, ok := geometryOf[orb.LineString](p, "a line along the river")
	if !ok {
		return
	}
	r.Reach = line
	r.At = line[len(line)/2]
	for _, river := range b.p.Site.Rivers {
		if river.Name != r.Feature || len(river.Path) < 2 || !b.extentKnown {
			continue
		}
		worst := 0.0
		for _, at := range withMiddles(line) {
			worst = max(worst, distanceToLine(river.Path, at))
		}
		if !(worst <= b.tolerance) {
			p.fail(Finding{Property: p.spot(), Found: fmt.Sprintf("a line up to %s m off the river", roundMetres(worst)), Allowed: fmt.Sprintf("within %s m of it", roundMetres(b.tolerance)), Hint: "take its points from the river's"})
		}
	}
}
