package gisio

import (
	"github.com/paulmach/orb"
)

// single takes the one part out of a geometry of several parts; other counts stay as they are.
func single(g orb.Geometry) orb.Geometry {
	switch m := g.(type) {
	case orb.MultiPoint:
		if len(m) == 1 {
			return m[0]
		}
	case orb.MultiLineString:
		if len(m) == 1 {
			return m[0]
		}
	case orb.MultiPolygon:
		if len(m) == 1 {
			return m[0]
		}
	}
	return g
}

// geometryOf takes a record's geometry as the wanted type; another type is an error. It is false where the geometry is not known.
func geometryOf[G orb.Geometry](p placed, wanted string) (G, bool) {
	var zero G
	if p.geometry == nil {
		return zero, false
	}
	g, ok := single(p.geometry).(G)
	if !ok {
		p.fail(Finding{Property: p.spot(), Found: "a " + p.geometry.GeoJSONType(), Allowed: wanted})
		return zero, false
	}
	return g, true
}
