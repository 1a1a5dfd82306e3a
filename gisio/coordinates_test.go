package gisio

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// projectedPoints were computed with gdaltransform of GDAL 3.6.2 (PROJ), without network or grids:
//
//	echo "LON LAT" | gdaltransform -s_srs EPSG:SOURCE -t_srs EPSG:CODE -output_xy
//
// SOURCE being longitude and latitude on the same datum (4326, 4258, 4269, 4283, 7844), so that no shift enters.
var projectedPoints = []struct {
	code     int
	lon, lat float64
	x, y     float64
	why      string
}{
	{32630, -3, 0, 499999.999999999, 0, "equator on the central meridian"},
	{32630, -3, 54.25, 499999.999999999, 6011337.36378342, "central meridian"},
	{32630, -6, 51.5, 291783.12782402, 5709696.98357332, "western edge"},
	{32630, 0, 51.5, 708216.872175979, 5709696.98357332, "eastern edge"},
	{32630, -1.4321098, 50.9087654, 610231.04244446, 5640850.06770772, "mid zone"},
	{32631, 0, 0, 166021.443080541, 0, "corner of zone at the equator"},
	{32601, -180, 10, 171071.263941313, 1106908.85424314, "antimeridian from the east"},
	{32601, -177, 83.9, 500000, 9316930.15406656, "far north, central meridian"},
	{32633, 18, 83.9, 535575.680189575, 9317856.46614826, "far north, edge"},
	{32660, 179.999999, -1e-06, 833978.44549076, -0.110682755885417, "antimeridian from the west, just south of the equator"},
	{32632, 3.2, 60.4, 180682.675475781, 6710030.40950835, "widened zone of Norway, plain rule zone 31 point in zone 32"},
	{32633, 25, 78.5, 721523.41624182, 8733166.37934718, "Svalbard, ten degrees off"},
	{32618, -75.5, -12.25, 445620.495207723, -1354248.7395925, "northern grid used south of the equator"},
	{32637, 57, 20, 2407101.12718422, 2316374.31023696, "18 degrees off the central meridian"},
	{32735, 24, -33.9, 222584.016482091, 6244878.75706353, "southern, western edge"},
	{32735, 30, -25, 802818.68778492, 7231699.78122639, "southern, eastern edge"},
	{32719, -70.6693, -33.4489, 344846.720310103, 6297700.15560968, "southern, mid zone"},
	{32756, 151.2, -79.9, 464765.861128953, 1129030.75055753, "far south"},
	{32723, -45, 0, 500000, 10000000, "equator on the southern grid"},
	{32760, 178.4419, -18.1416, 652534.085880901, 7993550.56478063, "southern, near the antimeridian"},
	{25832, 9.9937, 53.5511, 565834.364011528, 5934037.95100072, "ETRS89"},
	{25830, -6, 36, 229578.629988107, 3988111.96223516, "ETRS89, edge"},
	{25835, 31.5, 70.1, 670812.336568801, 7783336.1866337, "ETRS89, beyond the edge"},
	{26910, -123.1207, 49.2827, 491221.770667044, 5458889.97998112, "NAD83"},
	{26919, -66, 44.9, 736857.332743838, 4976220.82802076, "NAD83, eastern edge"},
	{26901, -180, 52.1, 294530.572713095, 5776406.92375709, "NAD83, antimeridian"},
	{28356, 151.2093, -33.8688, 334368.633647252, 6250948.34548856, "GDA94"},
	{28350, 114, -21.9, 190017.899939314, 7575212.75283034, "GDA94, western edge"},
	{7850, 115.8605, -31.9505, 392307.202713491, 6464484.23586893, "GDA2020"},
	{7855, 150, -43.6, 742137.899756826, 5168179.05150594, "GDA2020, eastern edge"},
	{7846, 90.5, -10.1, 226013.263894683, 8882482.37869523, "GDA2020, first zone"},
	{7859, 174, -29, 792271.071071222, 6788302.62674754, "GDA2020, last zone, edge"},
}

// projectedTolerance: gdaltransform prints 15 digits, so the last one of a northing is worth 1e-8 m; the sixth-order
// series and float64 add less than that again [m].
const projectedTolerance = 2e-8

func TestForwardAgainstPublishedProgram(t *testing.T) {
	worst := 0.0
	for _, p := range projectedPoints {
		s := System{code: p.code}
		x, y, err := s.Forward(p.lon, p.lat)
		if err != nil {
			t.Fatalf("%s: %v", p.why, err)
		}
		d := math.Hypot(x-p.x, y-p.y)
		worst = math.Max(worst, d)
		if !(d <= projectedTolerance) {
			t.Errorf("%v %s: off by %g m", s, p.why, d)
		}
		lon, lat, err := s.Inverse(p.x, p.y)
		if err != nil {
			t.Fatalf("%s: %v", p.why, err)
		}
		// The same tolerance on the ground.
		dLon := math.Remainder(lon-p.lon, 360) * math.Cos(p.lat*degree)
		if d := math.Hypot(dLon, lat-p.lat) * degree * 6378137; !(d <= projectedTolerance) {
			t.Errorf("%v %s: inverse off by %g m", s, p.why, d)
		}
	}
	t.Logf("worst %g m", worst)
}

// Going forth and back gives the same degrees over the whole reach of every kind of zone.
func TestInverseUndoesForward(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	for _, code := range []int{32601, 32630, 32760, 25832, 26910, 28355, 7850} {
		s := System{code: code}
		for range 2000 {
			lon := s.CentralMeridian() + zoneReach*(2*random.Float64()-1)
			lat := 89.9 * (2*random.Float64() - 1)
			x, y, err := s.Forward(lon, lat)
			if err != nil {
				t.Fatal(err)
			}
			lon2, lat2, err := s.Inverse(x, y)
			if err != nil {
				t.Fatalf("%v (%v, %v): %v", s, lon, lat, err)
			}
			const tolerance = 1e-9 // a tenth of a millimetre, what the tables and the reader resolve [degree]
			if !(math.Abs(math.Remainder(lon2-lon, 360)) <= tolerance && math.Abs(lat2-lat) <= tolerance) {
				t.Fatalf("%v: (%v, %v) came back as (%v, %v)", s, lon, lat, lon2, lat2)
			}
			if !(lon2 >= -180 && lon2 <= 180) {
				t.Fatalf("longitude %v", lon2)
			}
		}
	}
}

// Scale and convergence are the length and direction of the image of a short step north, by central differences.
func TestScaleAndConvergenceAgainstDifferences(t *testing.T) {
	const step = 1e-4 // [degree]; truncation is step² times a curvature below 1, rounding 1e-9 m over 11 m
	for _, p := range projectedPoints {
		if math.Abs(p.lat) > 89 {
			continue
		}
		s := System{code: p.code}
		e := s.family().ellipsoid
		f := 1 / e.inverseFlattening
		e2 := f * (2 - f)
		sin := math.Sin(p.lat * degree)
		meridian := e.semiMajor * (1 - e2) / math.Pow(1-e2*sin*sin, 1.5) // radius of curvature of the meridian [m]
		x1, y1, err1 := s.Forward(p.lon, p.lat-step)
		x2, y2, err2 := s.Forward(p.lon, p.lat+step)
		scale, err3 := s.ScaleFactor(p.lon, p.lat)
		convergence, err4 := s.Convergence(p.lon, p.lat)
		if err := errors.Join(err1, err2, err3, err4); err != nil {
			t.Fatal(err)
		}
		const tolerance = 1e-8
		if want := math.Hypot(x2-x1, y2-y1) / (2 * step * degree * meridian); !(math.Abs(scale-want) <= tolerance) {
			t.Errorf("%v %s: scale %.10f, by differences %.10f", s, p.why, scale, want)
		}
		// True north on the plane leans to the west by the convergence where grid north lies east of it.
		if want := math.Atan2(x1-x2, y2-y1) / degree; !(math.Abs(convergence-want) <= 1e-6) {
			t.Errorf("%v %s: convergence %.9f, by differences %.9f", s, p.why, convergence, want)
		}
	}
}

func TestForwardRefuses(t *testing.T) {
	zone := System{code: 32630}
	for _, p := range [][2]float64{
		{math.NaN(), 0}, {0, math.NaN()}, {math.Inf(1), 0}, {0, math.Inf(-1)},
		{0, 90.0000001}, {0, -91}, {28, 0}, {-34, 0}, {177, 10}, {361, 0},
	} {
		_, _, err := zone.Forward(p[0], p[1])
		var pe *PointError
		if !errors.As(err, &pe) {
			t.Errorf("%v: want a PointError, got %v", p, err)
		}
		if _, err := zone.ScaleFactor(p[0], p[1]); err == nil {
			t.Errorf("scale at %v: want an error", p)
		}
	}
	for _, p := range [][2]float64{
		{math.NaN(), 0}, {0, math.NaN()}, {math.Inf(1), 0}, {500000, 1.1e7}, {1e9, 0}, {4.5e6, 0}, {500000, math.Inf(1)},
	} {
		if _, _, err := zone.Inverse(p[0], p[1]); err == nil {
			t.Errorf("inverse of %v: want an error", p)
		}
	}
	if _, _, err := zone.Forward(27, 0); err != nil {
		t.Errorf("edge of the reach: %v", err)
	}
	if _, _, err := WGS84.Forward(0, 91); err == nil {
		t.Error("latitude 91 in degrees: want an error")
	}
}

func TestParseEPSG(t *testing.T) {
	names := map[string]string{
		"EPSG:4326": "WGS 84", "epsg:32630": "WGS 84 / UTM zone 30N", " EPSG:32701 ": "WGS 84 / UTM zone 1S",
		"EPSG:25832": "ETRS89 / UTM zone 32N", "EPSG:26910": "NAD83 / UTM zone 10N", "EPSG:28356": "GDA94 / MGA zone 56",
		"EPSG:7855": "GDA2020 / MGA zone 55", "EPSG:4283": "GDA94",
	}
	for text, name := range names {
		s, err := ParseEPSG(text)
		if err != nil || s.Name() != name {
			t.Errorf("%q: %q, %v", text, s.Name(), err)
		}
		if !strings.EqualFold(s.String(), strings.TrimSpace(text)) {
			t.Errorf("%q writes as %q", text, s)
		}
	}
	for _, text := range []string{"", "EPSG:", "32630", "EPSG:32600", "EPSG:32661", "EPSG:32700", "EPSG:25827", "EPSG:25839", "EPSG:26924",
		"EPSG:28347", "EPSG:28359", "EPSG:7845", "EPSG:7860", "EPSG:3857", "EPSG:-1", "EPSG:32630.5", "EPSG:99999999999", "ESRI:102", "EPSG:0"} {
		_, err := ParseEPSG(text)
		var se *SystemError
		if !errors.As(err, &se) {
			t.Errorf("%q: want a SystemError, got %v", text, err)
			continue
		}
		if !strings.Contains(err.Error(), "32601-32660") || !strings.Contains(err.Error(), "7846-7859") {
			t.Errorf("%q: the message does not list what is offered: %v", text, err)
		}
	}
}

func TestUTMFor(t *testing.T) {
	for _, c := range []struct {
		lon, lat float64
		code     int
	}{
		{-180, 10, 32601}, {-174.0000001, 10, 32601}, {-174, 10, 32602}, {0, 0, 32631}, {-1e-9, 51, 32630}, {179.9, -1, 32760},
		{180, 10, 32601}, {185, 10, 32601}, {-190, 10, 32659}, {3.5, 60.5, 32631}, {10, 78, 32632}, {151, -33, 32756}, {-1e-300, -0.1, 32731},
	} {
		s, err := UTMFor(c.lon, c.lat)
		if err != nil || s.Code() != c.code {
			t.Errorf("(%v, %v): %v %v, want %d", c.lon, c.lat, s, err, c.code)
		}
	}
	for _, p := range [][2]float64{{math.NaN(), 0}, {0, math.NaN()}, {0, 84.1}, {0, -80.1}, {400, 0}, {math.Inf(1), 0}} {
		if _, err := UTMFor(p[0], p[1]); err == nil {
			t.Errorf("%v: want an error", p)
		}
	}
}

func TestUTMForExtent(t *testing.T) {
	s, note, err := UTMForExtent(orb.Bound{Min: orb.Point{-3.5, 50}, Max: orb.Point{-2.5, 51}})
	if err != nil || s.Code() != 32630 {
		t.Fatal(s, err)
	}
	for _, want := range []string{"EPSG:32630", "-0.040 %", "areas twice"} {
		if !strings.Contains(note, want) {
			t.Errorf("note does not say %q: %s", want, note)
		}
	}
	if _, _, err := UTMForExtent(orb.Bound{Min: orb.Point{-50, 0}, Max: orb.Point{50, 10}}); err == nil {
		t.Error("an extent of 100 degrees: want an error")
	}
}

// A shape that crosses the antimeridian keeps together on the plane and on the way back.
func TestTransformAcrossAntimeridian(t *testing.T) {
	s := System{code: 32760}
	for _, in := range []orb.LineString{{{179, -17}, {181, -17}}, {{179, -17}, {-179, -17}}} {
		plane, err := Transform(WGS84, s, in)
		if err != nil {
			t.Fatal(err)
		}
		l := plane.(orb.LineString)
		// Two degrees at 17 degrees south are 2 x 111.3 km x cos 17° = 213 km.
		if d := l[1][0] - l[0][0]; math.Abs(d-213e3) > 1e3 {
			t.Errorf("%v: %v m to the east", in, d)
		}
		back, err := Transform(s, WGS84, plane)
		if err != nil {
			t.Fatal(err)
		}
		if b := back.(orb.LineString); math.Abs(b[1][0]-181) > 1e-9 || math.Abs(b[0][0]-179) > 1e-9 {
			t.Errorf("came back as %v", b)
		}
	}
	lon, _, err := s.Inverse(mustForward(s, t, 181, -17))
	if err != nil || math.Abs(lon+179) > 1e-9 {
		t.Errorf("a single point comes back within -180 to 180: %v %v", lon, err)
	}
}

func mustForward(s System, t *testing.T, lon, lat float64) (x, y float64) {
	t.Helper()
	x, y, err := s.Forward(lon, lat)
	if err != nil {
		t.Fatal(err)
	}
	return x, y
}

func TestTransformEveryKind(t *testing.T) {
	ring := orb.Ring{{-3, 50}, {-2, 50}, {-2, 51}, {-3, 50}}
	zone, mga := System{code: 32630}, System{code: 25830}
	for _, g := range []orb.Geometry{
		orb.Point{-3, 50}, orb.MultiPoint{{-3, 50}, {-2, 51}}, orb.LineString{{-3, 50}, {-2, 51}},
		orb.MultiLineString{{{-3, 50}, {-2, 51}}}, ring, orb.Polygon{ring}, orb.MultiPolygon{{ring}, {ring}}, orb.Collection{orb.Point{-3, 50}, ring},
	} {
		before := orb.Clone(g)
		plane, err := Transform(WGS84, zone, g)
		if err != nil {
			t.Fatal(err)
		}
		back, err := Transform(zone, WGS84, plane)
		if err != nil {
			t.Fatal(err)
		}
		if !orb.Equal(g, before) {
			t.Errorf("%T was changed", g)
		}
		if a, b := back.Bound(), g.Bound(); math.Abs(a.Min[0]-b.Min[0]) > 1e-9 || math.Abs(a.Max[1]-b.Max[1]) > 1e-9 || back.GeoJSONType() != g.GeoJSONType() {
			t.Errorf("%T came back as %v", g, back)
		}
		same, err := Transform(zone, zone, plane)
		if err != nil || !orb.Equal(same, plane) {
			t.Errorf("%T to its own system: %v %v", g, same, err)
		}
	}
	if _, err := Transform(WGS84, zone, orb.LineString{{-3, 50}, {math.NaN(), 50}}); err == nil {
		t.Error("NaN: want an error")
	}
	if DatumNote(WGS84, zone) != "" || !strings.Contains(DatumNote(WGS84, mga), "without a datum shift") {
		t.Errorf("notes %q, %q", DatumNote(WGS84, zone), DatumNote(WGS84, mga))
	}
}

// Zones of one datum join without a seam: a point on the boundary has mirrored eastings in both.
func TestNeighbouringZonesMirror(t *testing.T) {
	for _, lat := range []float64{-79, -30, 0, 12.5, 60, 83.9} {
		xWest, yWest := mustForward(System{code: 32630}, t, 0, lat)
		xEast, yEast := mustForward(System{code: 32631}, t, 0, lat)
		const rounding = 1e-8 // of numbers up to 1e7 m in some twenty operations [m]
		if math.Abs(xWest-500000+xEast-500000) > rounding || math.Abs(yWest-yEast) > rounding {
			t.Errorf("latitude %v: (%v, %v) and (%v, %v)", lat, xWest, yWest, xEast, yEast)
		}
	}
}

func BenchmarkForward(b *testing.B) {
	s := System{code: 32630}
	for b.Loop() {
		if _, _, err := s.Forward(-1.5, 52.25); err != nil {
			b.Fatal(err)
		}
	}
}
