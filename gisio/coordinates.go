package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// System is a coordinate system: geographic (longitude and latitude in degrees), or a zone of a universal
// transverse Mercator grid (metres). The zero value is no system. Systems may be compared with ==.
type System struct {
	code int // EPSG code; 0 = no system
}

// WGS84 is longitude and latitude on WGS 84, the system of RFC 7946. Its order is longitude, latitude.
var WGS84 = System{code: 4326}

// family is a run of EPSG codes that share datum, ellipsoid and rule: code = base + zone.
type family struct {
	base, firstZone, lastZone int // lastZone 0: one geographic code
	south                     bool
	datum                     string
	title                     string // zone number is appended
	ellipsoid                 ellipsoid
	projection                *transverseMercator
}

var (
	projectionWGS84 = newTransverseMercator(ellipsoidWGS84)
	projectionGRS80 = newTransverseMercator(ellipsoidGRS80)
)

// families lists what is offered, in the order in which messages list it.
var families = [...]family{
	{4326, 0, 0, false, "WGS 84", "WGS 84", ellipsoidWGS84, nil},
	{4258, 0, 0, false, "ETRS89", "ETRS89", ellipsoidGRS80, nil},
	{4269, 0, 0, false, "NAD83", "NAD83", ellipsoidGRS80, nil},
	{4283, 0, 0, false, "GDA94", "GDA94", ellipsoidGRS80, nil},
	{7844, 0, 0, false, "GDA2020", "GDA2020", ellipsoidGRS80, nil},
	{32600, 1, 60, false, "WGS 84", "WGS 84 / UTM zone ", ellipsoidWGS84, &projectionWGS84},
	{32700, 1, 60, true, "WGS 84", "WGS 84 / UTM zone ", ellipsoidWGS84, &projectionWGS84},
	{25800, 28, 38, false, "ETRS89", "ETRS89 / UTM zone ", ellipsoidGRS80, &projectionGRS80},
	{26900, 1, 23, false, "NAD83", "NAD83 / UTM zone ", ellipsoidGRS80, &projectionGRS80},
	{28300, 48, 58, true, "GDA94", "GDA94 / MGA zone ", ellipsoidGRS80, &projectionGRS80},
	{7800, 46, 59, true, "GDA2020", "GDA2020 / MGA zone ", ellipsoidGRS80, &projectionGRS80},
}

// Constants of every zone (EPSG methods 16001-16060, 16101-16160).
const (
	zoneScale          = 0.9996   // scale at the central meridian [-]
	zoneFalseEasting   = 500000   // [m]
	zoneFalseNorthing  = 10000000 // southern hemisphere [m]
	zoneWidth          = 6        // [degree]
	degree             = math.Pi / 180
	utmSouthernLimit   = -80 // latitudes for which the grid is defined [degree]
	utmNorthernLimit   = 84  // [degree]
	longitudeWholeTurn = 360 // [degree]
)

// zoneReach is how far from its central meridian a zone is computed [degree]. The series is good to a micrometre
// that far out; beyond it a point is surely a mistake, since a zone is meant for 3 degrees either way.
const zoneReach = 30

// zoneReachSlack keeps a point on the very edge of the reach inside after rounding [degree].
const zoneReachSlack = 1e-9

// family gives the row of families for s, or nil.
func (s System) family() *family {
	for i := range families {
		f := &families[i]
		zone := s.code - f.base
		if zone >= f.firstZone && zone <= f.lastZone {
			return f
		}
	}
	return nil
}

// Valid tells whether s is one of the offered systems.
func (s System) Valid() bool { return s.family() != nil }

// Code gives the EPSG code, such as 32630.
func (s System) Code() int { return s.code }

// String gives the code as users write it, such as "EPSG:32630".
func (s System) String() string {
	if s.code == 0 {
		return "no coordinate system"
	}
	return "EPSG:" + strconv.Itoa(s.code)
}

// Name gives the name, such as "WGS 84 / UTM zone 30N".
func (s System) Name() string {
	f := s.family()
	switch {
	case f == nil:
		return ""
	case f.projection == nil:
		return f.title
	case strings.Contains(f.title, "UTM") && f.south:
		return fmt.Sprintf("%s%dS", f.title, s.Zone())
	case strings.Contains(f.title, "UTM"):
		return fmt.Sprintf("%s%dN", f.title, s.Zone())
	}
	return fmt.Sprintf("%s%d", f.title, s.Zone())
}

// Datum gives the datum, such as "WGS 84".
func (s System) Datum() string {
	if f := s.family(); f != nil {
		return f.datum
	}
	return ""
}

// Geographic tells whether coordinates are longitude and latitude in degrees rather than metres.
func (s System) Geographic() bool {
	f := s.family()
	return f != nil && f.projection == nil
}

// Zone gives the zone number 1 to 60, or 0 for a geographic system.
func (s System) Zone() int {
	if f := s.family(); f != nil {
		return s.code - f.base
	}
	return 0
}

// CentralMeridian gives the longitude of the zone's middle [degree], or 0 for a geographic system.
func (s System) CentralMeridian() float64 {
	if s.Zone() == 0 {
		return 0
	}
	return float64(zoneWidth*s.Zone() - 183)
}

// OfferedSystems lists in words the EPSG codes that ParseEPSG takes.
func OfferedSystems() string {
	var geographic, zones []string
	for _, f := range families {
		if f.projection == nil {
			geographic = append(geographic, fmt.Sprintf("%d (%s)", f.base, f.datum))
			continue
		}
		name := strings.TrimSuffix(f.title, " zone ")
		if f.base == 32600 {
			name += " north"
		}
		if f.base == 32700 {
			name += " south"
		}
		zones = append(zones, fmt.Sprintf("%d-%d (%s)", f.base+f.firstZone, f.base+f.lastZone, name))
	}
	return "longitude and latitude " + strings.Join(geographic, ", ") + "; metres " + strings.Join(zones, ", ")
}

// SystemError says that a text does not name an offered coordinate system.
type SystemError struct {
	Given  string
	Reason string
}

// Error gives the sentence for the user, with the list of what is offered.
func (e *SystemError) Error() string {
	return printable(fmt.Sprintf("coordinate system %q: %s; offered are the EPSG codes %s", e.Given, e.Reason, OfferedSystems()))
}

// ParseEPSG reads a code such as "EPSG:32630"; upper or lower case, blanks around it allowed. Any text that does
// not name an offered system is a *SystemError.
func ParseEPSG(text string) (System, error) {
	const prefix = "EPSG:"
	t := strings.TrimSpace(text)
	if len(t) < len(prefix) || !strings.EqualFold(t[:len(prefix)], prefix) {
		return System{}, &SystemError{text, `must be written as "EPSG:" and a number, such as "EPSG:32630"`}
	}
	digits := strings.TrimSpace(t[len(prefix):])
	code, err := strconv.ParseUint(digits, 10, 31)
	if err != nil {
		return System{}, &SystemError{text, `the part after "EPSG:" must be a whole number`}
	}
	s := System{code: int(code)}
	if !s.Valid() {
		return System{}, &SystemError{text, "this code is not offered; project the data to one that is"}
	}
	return s, nil
}

// PointError says that a point cannot be projected.
type PointError struct {
	System System
	X, Y   float64 // as given; in degrees where the system is geographic [m]
	Reason string
}

// Error gives the sentence for the user.
func (e *PointError) Error() string {
	return fmt.Sprintf("point (%v, %v) in %v: %s", e.X, e.Y, e.System, e.Reason)
}

// Forward projects longitude and latitude [degree] to x and y of s: metres, or the same degrees where s is
// geographic. No datum shift is applied. Longitudes may run past ±180: only their distance from the central
// meridian counts. A point that is not finite, beyond a pole, or more than 30 degrees from the central meridian is
// a *PointError. Panics when s is not an offered system. Method: see transverseMercator (Krüger 1912, Karney 2011).
func (s System) Forward(lon, lat float64) (x, y float64, err error) {
	f := s.mustFamily()
	lambda, err := s.fromMeridian(lon, lat)
	if err != nil {
		return 0, 0, err
	}
	if f.projection == nil {
		return lon, lat, nil
	}
	x, y = f.projection.forward(lat*degree, lambda*degree)
	x, y = zoneFalseEasting+zoneScale*x, zoneScale*y
	if f.south {
		y += zoneFalseNorthing
	}
	return x, y, nil
}

// Inverse gives longitude and latitude [degree] of x and y in s, the longitude within -180 to 180. Errors, panic
// and method as for Forward.
func (s System) Inverse(x, y float64) (lon, lat float64, err error) {
	lon, lat, err = s.inverseContinuous(x, y)
	if err != nil || s.Geographic() {
		return lon, lat, err
	}
	return normalLongitude(lon), lat, nil
}

// inverseContinuous is Inverse with the longitude counted on from the central meridian, so that lines keep
// together where they cross ±180.
func (s System) inverseContinuous(x, y float64) (lon, lat float64, err error) {
	f := s.mustFamily()
	if !finite(x) || !finite(y) {
		return 0, 0, &PointError{s, x, y, "not a finite number"}
	}
	if f.projection == nil {
		_, err = s.fromMeridian(x, y)
		return x, y, err
	}
	east, north := (x-zoneFalseEasting)/zoneScale, y
	if f.south {
		north -= zoneFalseNorthing
	}
	north /= zoneScale
	t := f.projection
	// A quarter meridian is A π/2 long. At the reach, η is asinh(tan 30°), reckoned on the sphere; 1 % covers the ellipsoid.
	furthest := 1.01 * math.Asinh(math.Tan(zoneReach*degree)) * t.rectifyingRadius
	if !(math.Abs(north) <= t.rectifyingRadius*math.Pi/2 && math.Abs(east) <= furthest) {
		return 0, 0, &PointError{s, x, y, "too far from the zone; are these metres of this zone, in the order east, north?"}
	}
	phi, lambda := t.inverse(east, north)
	lon, lat = s.CentralMeridian()+lambda/degree, phi/degree
	if _, err := s.fromMeridian(lon, lat); err != nil {
		return 0, 0, &PointError{s, x, y, "too far from the zone; are these metres of this zone, in the order east, north?"}
	}
	return lon, lat, nil
}

// ScaleFactor gives the point scale at a longitude and latitude [degree]: length on the plane over length on the
// ellipsoid [-]; 1 for a geographic system. Errors and panic as for Forward.
func (s System) ScaleFactor(lon, lat float64) (float64, error) {
	scale, _, err := s.distortion(lon, lat)
	return scale, err
}

// Convergence gives the bearing of grid north at a longitude and latitude, clockwise from true north [degree]; 0 for
// a geographic system. Errors and panic as for Forward.
func (s System) Convergence(lon, lat float64) (float64, error) {
	_, convergence, err := s.distortion(lon, lat)
	return convergence, err
}

func (s System) distortion(lon, lat float64) (scale, convergence float64, err error) {
	f := s.mustFamily()
	lambda, err := s.fromMeridian(lon, lat)
	if err != nil {
		return 0, 0, err
	}
	if f.projection == nil {
		return 1, 0, nil
	}
	scale, convergence = f.projection.distortion(lat*degree, lambda*degree)
	return zoneScale * scale, convergence / degree, nil
}

// fromMeridian gives the longitude from the central meridian [degree] after checking that the point can be projected.
func (s System) fromMeridian(lon, lat float64) (float64, error) {
	switch {
	case !finite(lon) || !finite(lat):
		return 0, &PointError{s, lon, lat, "not a finite number"}
	case !(math.Abs(lat) <= 90):
		return 0, &PointError{s, lon, lat, "latitude must be within -90 to 90; the order is longitude, latitude"}
	case !(math.Abs(lon) <= longitudeWholeTurn):
		return 0, &PointError{s, lon, lat, "longitude must be within -180 to 180"}
	}
	if s.Zone() == 0 {
		return lon, nil
	}
	lambda := math.Remainder(lon-s.CentralMeridian(), longitudeWholeTurn)
	if !(math.Abs(lambda) <= zoneReach+zoneReachSlack) {
		return 0, &PointError{s, lon, lat, fmt.Sprintf("longitude must be within %d degrees of the zone's central meridian %v", zoneReach, s.CentralMeridian())}
	}
	return lambda, nil
}

func (s System) mustFamily() *family {
	f := s.family()
	if f == nil {
		panic(fmt.Sprintf("gisio: EPSG code %d is not an offered coordinate system", s.code))
	}
	return f
}

func finite(x float64) bool { return math.Abs(x) <= math.MaxFloat64 }

// normalLongitude brings a longitude into -180 to 180 [degree]; numbers that are there already keep their bits.
func normalLongitude(lon float64) float64 {
	if lon >= -180 && lon <= 180 {
		return lon
	}
	return math.Remainder(lon, longitudeWholeTurn)
}
