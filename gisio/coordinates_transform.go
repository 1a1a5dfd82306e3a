package gisio

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

// UTMFor gives the WGS 84 / UTM zone that a longitude and latitude [degree] lies in by the plain rule of 6-degree
// zones from -180 eastwards, a zone's western meridian included, north of and on the equator the northern grid.
// The widened zones that maps use in south-west Norway and around Svalbard are not applied: whoever wants one of
// them states its code. Latitudes outside -80 to 84, where the grid is not defined, are a *PointError, and so are
// numbers that are not finite or longitudes outside -180 to 360.
func UTMFor(lon, lat float64) (System, error) {
	switch {
	case !finite(lon) || !finite(lat):
		return System{}, &PointError{WGS84, lon, lat, "not a finite number"}
	case !(lat >= utmSouthernLimit && lat <= utmNorthernLimit):
		return System{}, &PointError{WGS84, lon, lat, "latitude must be within -80 to 84, where the UTM grid is defined; the order is longitude, latitude"}
	case !(math.Abs(lon) <= longitudeWholeTurn):
		return System{}, &PointError{WGS84, lon, lat, "longitude must be within -180 to 180"}
	}
	fromWest := math.Mod(lon+180, longitudeWholeTurn)
	if fromWest < 0 {
		fromWest += longitudeWholeTurn
	}
	zone := min(int(fromWest/zoneWidth)+1, 60)
	if lat < 0 {
		return System{code: 32700 + zone}, nil
	}
	return System{code: 32600 + zone}, nil
}

// UTMForExtent gives the zone of the middle of a box in longitude and latitude [degree], and a note in words for
// the report: which zone, and by how much lengths are off at the corners at most. A box so wide that a corner is
// out of the zone's reach is a *PointError.
func UTMForExtent(box orb.Bound) (System, string, error) {
	s, err := UTMFor((box.Min[0]+box.Max[0])/2, (box.Min[1]+box.Max[1])/2)
	if err != nil {
		return System{}, "", err
	}
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range [...]orb.Point{
		box.Min, box.Max, {box.Min[0], box.Max[1]}, {box.Max[0], box.Min[1]},
		{(box.Min[0] + box.Max[0]) / 2, box.Min[1]}, {(box.Min[0] + box.Max[0]) / 2, box.Max[1]},
	} {
		scale, err := s.ScaleFactor(p[0], p[1])
		if err != nil {
			return System{}, "", err
		}
		low, high = math.Min(low, scale), math.Max(high, scale)
	}
	note := fmt.Sprintf("the plane is %v (%s), the zone of the middle of the extent; lengths on it are %+.3f %% to %+.3f %% off, areas twice that, and this is not corrected",
		s, s.Name(), 100*(low-1), 100*(high-1))
	return s, note, nil
}

// DatumNote says in words what is neglected between two systems, for the report; it is empty where both have the
// same datum.
func DatumNote(from, to System) string {
	if from.Datum() == to.Datum() {
		return ""
	}
	return fmt.Sprintf("coordinates were taken from %s to %s without a datum shift: the two differ by up to about two metres on the ground",
		from.Datum(), to.Datum())
}

// Transform brings a geometry from one system into another, by way of longitude and latitude and without a datum
// shift (see DatumNote). The result shares no memory with g. Longitudes that come out run on past ±180 where a
// shape crosses the antimeridian, so that it keeps together. The first point that cannot be projected is a
// *PointError. Panics when a system is not offered.
func Transform(from, to System, g orb.Geometry) (orb.Geometry, error) {
	from.mustFamily()
	to.mustFamily()
	t := transformer{from: from, to: to}
	out := t.geometry(g)
	if t.err != nil {
		return nil, t.err
	}
	return out, nil
}

// transformer carries the first error through the walk over a geometry.
type transformer struct {
	from, to System
	err      error
}

func (t *transformer) point(p orb.Point) orb.Point {
	if t.err != nil {
		return p
	}
	if t.from == t.to {
		if !finite(p[0]) || !finite(p[1]) {
			t.err = &PointError{t.from, p[0], p[1], "not a finite number"}
		}
		return p
	}
	lon, lat, err := t.from.inverseContinuous(p[0], p[1])
	if err != nil {
		t.err = err
		return p
	}
	x, y, err := t.to.Forward(lon, lat)
	if err != nil {
		t.err = err
		return p
	}
	return orb.Point{x, y}
}

func (t *transformer) points(in []orb.Point) []orb.Point {
	out := make([]orb.Point, len(in))
	for i, p := range in {
		out[i] = t.point(p)
	}
	return out
}

func (t *transformer) polygon(in orb.Polygon) orb.Polygon {
	out := make(orb.Polygon, len(in))
	for i, r := range in {
		out[i] = t.points(r)
	}
	return out
}

func (t *transformer) geometry(g orb.Geometry) orb.Geometry {
	switch g := g.(type) {
	case orb.Point:
		return t.point(g)
	case orb.MultiPoint:
		return orb.MultiPoint(t.points(g))
	case orb.LineString:
		return orb.LineString(t.points(g))
	case orb.Ring:
		return orb.Ring(t.points(g))
	case orb.MultiLineString:
		out := make(orb.MultiLineString, len(g))
		for i, l := range g {
			out[i] = t.points(l)
		}
		return out
	case orb.Polygon:
		return t.polygon(g)
	case orb.MultiPolygon:
		out := make(orb.MultiPolygon, len(g))
		for i, p := range g {
			out[i] = t.polygon(p)
		}
		return out
	case orb.Collection:
		out := make(orb.Collection, len(g))
		for i, p := range g {
			out[i] = t.geometry(p)
		}
		return out
	case orb.Bound:
		panic("gisio: Transform of an orb.Bound: its sides do not stay straight; give its polygon")
	}
	panic(fmt.Sprintf("gisio: Transform of a %T", g))
}
