package aquifer

import (
	"fmt"
	"math"

	"springbound/aquifer/mesh"
)

// region holds the properties of one connected set of triangles.
type region struct {
	tensor       mesh.Tensor // [m²/d]
	mean         float64     // T* = sqrt(det T) [m²/d]
	anisotropic  bool
	zoneT        int     // zone that states T; -1 the background
	recharge     float64 // [m/d]
	zoneRecharge int
	leak         float64 // 1/c; 0: none [1/d]
	sourceHead   float64 // [m]
	zoneLeak     int
	top          float64 // elevation of the aquifer's top; NaN: not stated [m]
	storage      float64 // NaN: not stated [-]
	lakes        []int
	areas        []int // Site.Outlines
}

// Overlap tells that a later zone changed a value that an earlier one had stated.
type Overlap struct {
	Property string
	Earlier  string
	Later    string
	Area     float64 // [m²]
}

// String is a sentence for the findings.
func (o Overlap) String() string {
	return fmt.Sprintf("zone %s overlaps zone %s over %.4g m² and sets its %s there", o.Later, o.Earlier, o.Area, o.Property)
}

// tensorOf turns a mean transmissivity and a zone's anisotropy into a tensor in plane coordinates.
func tensorOf(mean float64, a *Anisotropy) mesh.Tensor {
	if a == nil || a.Ratio == 1 {
		return mesh.Tensor{Txx: mean, Tyy: mean}
	}
	major, minor := mean*math.Sqrt(a.Ratio), mean/math.Sqrt(a.Ratio)
	sin, cos := math.Sincos(a.AngleDeg * math.Pi / 180)
	return mesh.Tensor{
		Txx: major*cos*cos + minor*sin*sin,
		Txy: (major - minor) * sin * cos,
		Tyy: major*sin*sin + minor*cos*cos,
	}
}

// properties overlays background and zones at a place: later zones win, property by property.
func (s *Site) properties(at [2]float64) (region, []Overlap) {
	r := region{zoneT: -1, zoneRecharge: -1, zoneLeak: -1, top: math.NaN(), storage: math.NaN()}
	var over []Overlap
	name := func(i int) string { return s.Zones[i].Name }
	mean, aniso, zoneA := 0.0, (*Anisotropy)(nil), -1
	zoneTop, zoneSource, zoneStorage := -1, -1, -1
	apply := func(i int, z *Zone) {
		note := func(property string, earlier *int) {
			if *earlier >= 0 && i >= 0 {
				over = append(over, Overlap{Property: property, Earlier: name(*earlier), Later: name(i)})
			}
			*earlier = i
		}
		if z.Transmissivity != nil {
			mean = z.Transmissivity.Best
			note("transmissivity", &r.zoneT)
			if z.Anisotropy == nil { // a zone that states T alone is isotropic
				aniso, zoneA = nil, i
			}
		}
		if z.Anisotropy != nil {
			aniso = z.Anisotropy
			note("anisotropy", &zoneA)
		}
		if z.Recharge != nil {
			r.recharge = z.Recharge.Best
			note("recharge", &r.zoneRecharge)
		}
		if z.LeakageResistance != nil {
			r.leak = 1 / z.LeakageResistance.Best
			note("leakage resistance", &r.zoneLeak)
		}
		if z.SourceHead != nil {
			r.sourceHead = *z.SourceHead
			note("source head", &zoneSource)
		}
		if z.Top != nil {
			r.top = *z.Top
			note("top of aquifer", &zoneTop)
		}
		if z.Storage != nil {
			r.storage = z.Storage.Best
			note("storage", &zoneStorage)
		}
	}
	apply(-1, &s.Background)
	for i := range s.Zones {
		if inMultiPolygon(at, s.Zones[i].Area) {
			apply(i, &s.Zones[i])
		}
	}
	for i, l := range s.Lakes {
		if inPolygon(at, l.Area) {
			r.lakes = append(r.lakes, i)
		}
	}
	for i, a := range s.Outlines {
		if inPolygon(at, a.Area) {
			r.areas = append(r.areas, i)
		}
	}
	r.tensor, r.mean = tensorOf(mean, aniso), mean
	r.anisotropic = aniso != nil && aniso.Ratio != 1
	return r, over
}

// buildRegions gives every mesh region its properties and lists the overlaps that changed a value.
func (m *Model) buildRegions(bad *problems) {
	m.regions = make([]region, len(m.Mesh.Regions))
	type key struct{ property, earlier, later string }
	at := map[key]int{}
	for i, reg := range m.Mesh.Regions {
		r, over := m.Site.properties(reg.At)
		m.regions[i] = r
		if !(r.mean > 0) || math.IsInf(r.mean, 0) {
			bad.add("aquifer", reg.At, "transmissivity is %v m²/d in the part around (%.1f, %.1f); it must be above 0: state it in [aquifer] or by a zone", r.mean, reg.At[0], reg.At[1])
		}
		for _, o := range over {
			k := key{o.Property, o.Earlier, o.Later}
			n, ok := at[k]
			if !ok {
				n = len(m.Overlaps)
				at[k] = n
				m.Overlaps = append(m.Overlaps, o)
			}
			m.Overlaps[n].Area += reg.Area
		}
	}
}

// zoneName names the zone that states a property; -1 is the background.
func (s *Site) zoneName(i int) string {
	if i < 0 {
		return "background"
	}
	return s.Zones[i].Name
}
