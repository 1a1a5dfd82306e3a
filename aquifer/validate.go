package aquifer

import (
	"math"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

// Check finds every problem of a site that can be known without a mesh; the error is a *SiteError or a *mesh.DomainError.
func (s *Site) Check() error {
	if len(s.Extent) == 0 {
		return &SiteError{Problems: []Problem{{Feature: "extent", Text: "there is no outline; give a polygon"}}}
	}
	bad := &problems{}
	if s.validate(bad); len(bad.list) > 0 {
		return bad.err()
	}
	d := s.plan(Options{Scale: 1}, bad)
	d.touching(s, bad)
	if !s.fixesHead() {
		bad.add("aquifer", orb.Point{}, "nothing fixes the head: give a prescribed-head or head-dependent edge, a river, a lake, a spring or leakage")
	}
	if err := bad.err(); err != nil {
		return err
	}
	return mesh.Validate(d.domain, 0)
}

// fixesHead tells whether anything in the site could fix the head.
func (s *Site) fixesHead() bool {
	for _, e := range s.Edges {
		if e.Kind != PrescribedFlux {
			return true
		}
	}
	leaks := s.Background.LeakageResistance != nil
	for _, z := range s.Zones {
		leaks = leaks || z.LeakageResistance != nil
	}
	return leaks || len(s.Rivers)+len(s.Lakes)+len(s.Springs) > 0
}

// touching reports prescribed-head edges that meet with different levels.
func (d *domainPlan) touching(s *Site, bad *problems) {
	for i, a := range d.stretches {
		for j, b := range d.stretches {
			ea, eb := s.Edges[a.edge], s.Edges[b.edge]
			if i == j || a.ring != b.ring || ea.Kind != PrescribedHead || eb.Kind != PrescribedHead {
				continue
			}
			cum := d.outline.cum[a.ring]
			perimeter := cum[len(cum)-1]
			end := math.Mod(a.start+a.span, perimeter)
			if gap := math.Abs(end - b.start); math.Min(gap, perimeter-gap) > sameVertex*d.outline.diag {
				continue
			}
			if la, lb := a.level(a.span), b.level(0); !sameLevels(la, lb) {
				at := eb.Path[0]
				bad.add("edge "+eb.Name, at, differingLevels, lb, ea.Name, la)
			}
		}
	}
}

// differingLevels is what is said of two touching edges.
const differingLevels = "its level %.6g m differs from edge %s's %.6g m where they touch; give both the same level there or leave a gap"

func sameLevels(a, b float64) bool { return math.Abs(a-b) <= sameLevel*math.Max(1, math.Abs(b)) }

// validate refuses what no model can be made of. Every guard accepts what is right, so NaN never passes.
func (s *Site) validate(bad *problems) {
	v := validator{bad}
	for k, ring := range s.Extent {
		v.places("extent", ring)
		if len(openRing(ring)) < 3 {
			bad.add("extent", orb.Point{}, "ring %d has fewer than three points", k)
		}
	}
	v.zone("background", &s.Background)
	for i := range s.Zones {
		v.zone("zone "+s.Zones[i].Name, &s.Zones[i])
	}
	for i := range s.Edges {
		v.edge(&s.Edges[i])
	}
	for i := range s.Rivers {
		r := &s.Rivers[i]
		name := "river " + r.Name
		v.path(name, r.Path)
		v.levels(name, "water levels", r.WaterLevels, r.Path, true)
		v.levels(name, "bed levels", r.BedLevels, r.Path, false)
		v.positive(name, "width [m]", r.Width)
		v.positive(name, "bed resistance [d]", r.BedResistance.Best)
		v.available(name, r.AvailableFlow)
	}
	for i := range s.Lakes {
		l := &s.Lakes[i]
		name := "lake " + l.Name
		v.area(name, l.Area)
		v.finite(name, "water level [m]", l.WaterLevel)
		v.optional(name, "bed level [m]", l.BedLevel)
		v.positive(name, "bed resistance [d]", l.BedResistance.Best)
		v.available(name, l.AvailableFlow)
	}
	for i := range s.Springs {
		v.spring(&s.Springs[i])
	}
	for _, n := range s.Nodes {
		v.places(n.Name, []orb.Point{n.At})
		if !(n.Radius >= 0) || math.IsInf(n.Radius, 0) {
			bad.add(n.Name, n.At, "radius is %v m; it must be 0 (none) or more", n.Radius)
		}
		v.finite(n.Name, "present rate [m³/d]", n.PresentRate)
	}
	for _, a := range s.Outlines {
		v.area(a.Name, a.Area)
	}
}

type validator struct{ bad *problems }

func (v validator) finite(feature, what string, x float64) {
	if !(math.Abs(x) <= math.MaxFloat64) {
		v.bad.add(feature, orb.Point{}, "%s is %v; it must be a finite number", what, x)
	}
}

func (v validator) optional(feature, what string, x *float64) {
	if x != nil {
		v.finite(feature, what, *x)
	}
}

func (v validator) positive(feature, what string, x float64) {
	if !(x > 0 && x <= math.MaxFloat64) {
		v.bad.add(feature, orb.Point{}, "%s is %v; it must be above 0", what, x)
	}
}

func (v validator) available(feature string, x *float64) {
	if x != nil && !(*x >= 0 && *x <= math.MaxFloat64) {
		v.bad.add(feature, orb.Point{}, "available flow [m³/d] is %v; it must be 0 or more", *x)
	}
}

func (v validator) places(feature string, points []orb.Point) {
	for i, p := range points {
		if !(math.Abs(p[0]) <= math.MaxFloat64 && math.Abs(p[1]) <= math.MaxFloat64) {
			v.bad.add(feature, orb.Point{}, "point %d is at (%v, %v); both must be finite", i, p[0], p[1])
		}
	}
}

func (v validator) path(feature string, path orb.LineString) {
	v.places(feature, path)
	if len(path) < 2 {
		v.bad.add(feature, orb.Point{}, "the path has %d point(s); give at least two", len(path))
	}
}

func (v validator) area(feature string, area orb.Polygon) {
	if len(area) == 0 || len(openRing(area[0])) < 3 {
		v.bad.add(feature, orb.Point{}, "the polygon has fewer than three points")
	}
	for _, r := range area {
		v.places(feature, r)
	}
}

func (v validator) levels(feature, what string, levels []float64, path orb.LineString, needed bool) {
	if n := len(levels); n != 1 && n != len(path) && (needed || n != 0) {
		v.bad.add(feature, orb.Point{}, "there are %d %s for %d points; give one for all or one a point", n, what, len(path))
	}
	for _, l := range levels {
		v.finite(feature, what+" [m]", l)
	}
}

func (v validator) zone(feature string, z *Zone) {
	for _, p := range z.Area {
		v.area(feature, p)
	}
	if z.Transmissivity != nil {
		v.positive(feature, "transmissivity [m²/d]", z.Transmissivity.Best)
	}
	if a := z.Anisotropy; a != nil {
		if !(a.Ratio >= 1 && a.Ratio <= math.MaxFloat64) {
			v.bad.add(feature, orb.Point{}, "anisotropy ratio is %v; it must be 1 or more", a.Ratio)
		}
		v.finite(feature, "anisotropy angle [°]", a.AngleDeg)
	}
	if z.Recharge != nil {
		v.finite(feature, "recharge [m/d]", z.Recharge.Best)
	}
	if z.LeakageResistance != nil {
		v.positive(feature, "leakage resistance [d]", z.LeakageResistance.Best)
	}
	v.optional(feature, "source head [m]", z.SourceHead)
	v.optional(feature, "top [m]", z.Top)
	if z.Storage != nil {
		v.positive(feature, "storage coefficient", z.Storage.Best)
	}
}

func (v validator) edge(e *Edge) {
	name := "edge " + e.Name
	v.path(name, e.Path)
	v.available(name, e.AvailableFlow)
	switch e.Kind {
	case PrescribedHead:
		v.levels(name, "levels", e.Levels, e.Path, true)
	case PrescribedFlux:
		v.finite(name, "flux [m²/d]", e.Flux)
	case HeadDependent:
		v.levels(name, "levels", e.Levels, e.Path, true)
		v.positive(name, "conductance [m/d]", e.Conductance.Best)
	default:
		v.bad.add(name, orb.Point{}, "its kind %d is not known", int(e.Kind))
	}
}

func (v validator) spring(s *Spring) {
	name := "spring " + s.Name
	v.places(name, []orb.Point{s.At})
	v.finite(name, "outlet level [m]", s.OutletLevel)
	v.positive(name, "effective radius [m]", s.EffectiveRadius)
	switch {
	case s.Conductance != nil:
		v.positive(name, "conductance [m²/d]", s.Conductance.Best)
	case s.MeasuredFlow != nil:
		v.positive(name, "measured flow [m³/d]", *s.MeasuredFlow)
	default:
		v.bad.add(name, s.At, "it has neither a conductance nor a measured flow; give one")
	}
}
