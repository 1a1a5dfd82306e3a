package gisio

import (
	"fmt"
	"math"
	"strings"

	"github.com/paulmach/orb"
)

// geometryTypes lists the types of RFC 7946, section 1.4.
var geometryTypes = []string{"Point", "MultiPoint", "LineString", "MultiLineString", "Polygon", "MultiPolygon", "GeometryCollection"}

// positionDepth is how deep the positions of a type lie in its coordinates: 1 = the coordinates are one position.
var positionDepth = map[string]int{"Point": 1, "MultiPoint": 2, "LineString": 2, "MultiLineString": 3, "Polygon": 3, "MultiPolygon": 4}

func geometryTypeList() string { return `"` + strings.Join(geometryTypes, `", "`) + `"` }

// Bounds of coordinates.
const (
	// nearDegrees is the shortest edge that is kept in longitude and latitude: 0.1 mm on the ground, far below any
	// survey, and well above what float64 resolves at 180 degrees (3e-14) [degree].
	nearDegrees = 1e-9
	// nearMetres is the shortest edge that is kept in metres [m].
	nearMetres = 1e-4
	// largestMetres is more than any projected coordinate on the Earth, false origins included [m].
	largestMetres = 1e8
)

// path is a line or ring on its way from the text to a geometry, with the offset of each position.
type path struct {
	points []orb.Point
	at     []int32
}

// geometry reads a geometry object; nil when it has an error.
func (r *layerReader) geometry(v *jsonValue) orb.Geometry {
	kind, ok := r.typeOf(v, "the geometry", geometryTypeList())
	if !ok {
		return nil
	}
	if crs := v.member("crs"); crs != nil && v != &r.json.root {
		r.nestedCRS(crs)
	}
	if kind == "GeometryCollection" {
		return r.singleOf(v)
	}
	depth, known := positionDepth[kind]
	if !known {
		r.unknownType(v, kind, geometryTypeList())
		return nil
	}
	r.forbidden(v, "geometries", "geometry", "properties", "features")
	c := v.member("coordinates")
	switch {
	case c == nil:
		r.add(Error, int(v.offset), `member "coordinates"`, "missing", "an array of positions", r.caseHint(v, "coordinates"))
		return nil
	case c.kind != jsonArray && c.kind != jsonNumbers:
		r.add(Error, int(c.offset), `member "coordinates"`, c.describe(), "an array of positions", "")
		return nil
	case c.kind == jsonArray && len(c.items) == 0:
		r.add(Error, int(c.offset), `member "coordinates"`, "empty: the feature has an empty geometry", "an array of positions", "draw the feature or remove it")
		return nil
	}
	if !r.depth(c, kind, depth) {
		return nil
	}
	return r.build(c, kind)
}

// singleOf takes the one geometry out of a collection.
func (r *layerReader) singleOf(v *jsonValue) orb.Geometry {
	list := v.member("geometries")
	switch {
	case list == nil || list.kind != jsonArray:
		r.add(Error, int(v.offset), `member "geometries"`, "not an array", "an array with one geometry", r.caseHint(v, "geometries"))
		return nil
	case len(list.items) == 1:
		return r.geometry(&list.items[0])
	}
	r.add(Error, int(list.offset), "the geometry", fmt.Sprintf("a GeometryCollection of %d geometries", len(list.items)),
		"one geometry for each feature", "split it into features, or make it a geometry of several parts")
	return nil
}

// depth checks that every position lies as deep as the type asks.
func (r *layerReader) depth(c *jsonValue, kind string, depth int) bool {
	wrong, found := wrongDepth(c, 1, depth)
	if wrong == nil {
		return true
	}
	switch {
	case found > 0:
		r.add(Error, int(wrong.offset), `an entry of "coordinates"`, fmt.Sprintf("a position at depth %d", found),
			fmt.Sprintf("positions at depth %d for a %s: %s", depth, kind, nesting(depth)), "")
	case wrong.kind == jsonArray && len(wrong.items) == 0:
		r.add(Error, int(wrong.offset), `an entry of "coordinates"`, "an empty array", nesting(depth), "")
	default:
		r.add(Error, int(wrong.offset), `an entry of "coordinates"`, wrong.describe(), "numbers, without quotes", "")
	}
	return false
}

func nesting(depth int) string {
	return [...]string{"", "a position", "an array of positions", "an array of rings or lines, each an array of positions",
		"an array of polygons, each an array of rings, each an array of positions"}[depth]
}

// wrongDepth gives the first value that breaks the nesting, and at which depth a position was found; depth 0 = it is
// something else. Empty arrays of rings or positions are left to the rules for rings and lines.
func wrongDepth(v *jsonValue, level, depth int) (*jsonValue, int) {
	if v.kind == jsonNumbers {
		if level == depth {
			return nil, 0
		}
		return v, level
	}
	if v.kind != jsonArray {
		return v, 0
	}
	if level == depth {
		for i := range v.items {
			switch v.items[i].kind {
			case jsonNumber:
			case jsonArray, jsonNumbers:
				return v, level + levelsDown(v)
			default:
				return &v.items[i], 0
			}
		}
		return v, 0
	}
	for i := range v.items {
		if wrong, found := wrongDepth(&v.items[i], level+1, depth); wrong != nil {
			return wrong, found
		}
	}
	return nil, 0
}

// levelsDown counts the arrays within an array on the way to a position.
func levelsDown(v *jsonValue) int {
	n := 0
	for v.kind == jsonArray && len(v.items) > 0 {
		v = &v.items[0]
		n++
	}
	return n
}

func (r *layerReader) build(c *jsonValue, kind string) orb.Geometry {
	switch kind {
	case "Point":
		p, ok := r.point(c)
		if !ok {
			return nil
		}
		return p
	case "MultiPoint":
		p, ok := r.path(c)
		if !ok {
			return nil
		}
		return orb.MultiPoint(p.points)
	case "LineString":
		l, ok := r.line(c, "the line")
		if !ok {
			return nil
		}
		return l
	case "MultiLineString":
		return r.multiLine(c)
	case "Polygon":
		p, ok := r.rings(c, 1, 0)
		if !ok {
			return nil
		}
		return r.polygons([][]path{p})
	}
	parts := make([][]path, len(c.items))
	good := true
	for i := range c.items {
		p, ok := r.rings(&c.items[i], len(c.items), i)
		parts[i] = p
		good = good && ok
	}
	if !good {
		return nil
	}
	return r.polygons(parts)
}

// point reads and checks one position.
func (r *layerReader) point(v *jsonValue) (orb.Point, bool) {
	n := r.json.elements(v)
	if len(n) < 2 {
		r.add(Error, int(v.offset), "a position", "one number", "two numbers: longitude and latitude, or x and y", "")
		return orb.Point{}, false
	}
	r.positions++
	if len(n) > 2 && r.thirdAt < 0 {
		r.thirdAt = int(v.offset)
	}
	if len(n) > 3 && r.furtherAt < 0 {
		r.furtherAt = int(v.offset)
	}
	p := orb.Point{n[0] + 0, n[1] + 0} // -0 becomes 0
	if !finite(p[0]) || !finite(p[1]) {
		r.faulty = true // listed among the faults of the text
		return p, false
	}
	return p, r.inRange(v, p)
}

func (r *layerReader) inRange(v *jsonValue, p orb.Point) bool {
	degrees := math.Abs(p[0]) <= 180 && math.Abs(p[1]) <= 90
	r.likeDegree = r.likeDegree && degrees
	switch {
	case r.projected:
		if !(math.Abs(p[0]) <= largestMetres && math.Abs(p[1]) <= largestMetres) {
			r.add(Error, int(v.offset), "a position", pointText(p), "metres within ±1e8", "")
			return false
		}
	case math.Abs(p[0]) > longitudeWholeTurn || math.Abs(p[1]) > 90:
		r.add(Error, int(v.offset), "a position", pointText(p), "longitude within -180 to 180 and latitude within -90 to 90, in this order",
			"if these are metres, "+crsHint)
		return false
	case !degrees:
		r.addOnce("beyond 180", int(v.offset), "a position", "at longitude "+fmt.Sprint(p[0]), "longitudes within -180 to 180",
			"read as running on past the antimeridian")
	}
	return true
}

// path reads the positions of a line or ring, and stops at the first fault.
func (r *layerReader) path(v *jsonValue) (path, bool) {
	out := path{make([]orb.Point, len(v.items)), make([]int32, len(v.items))}
	for i := range v.items {
		p, ok := r.point(&v.items[i])
		if !ok {
			return path{}, false
		}
		out.points[i], out.at[i] = p, v.items[i].offset
	}
	return out, true
}

func (r *layerReader) multiLine(c *jsonValue) orb.Geometry {
	var out orb.MultiLineString
	good := true
	for i := range c.items {
		l, ok := r.line(&c.items[i], fmt.Sprintf("line %d", i+1))
		good = good && ok
		out = append(out, l)
	}
	if !good {
		return nil
	}
	if !r.projected {
		out = joinLines(out)
	}
	if len(out) == 1 {
		return out[0]
	}
	return out
}

// line reads a line of at least two distinct positions.
func (r *layerReader) line(v *jsonValue, name string) (orb.LineString, bool) {
	if len(v.items) < 2 {
		r.add(Error, int(v.offset), name, "made of "+positionCount(len(v.items)), "at least 2 positions", "")
		return nil, false
	}
	p, ok := r.path(v)
	if !ok {
		return nil, false
	}
	p, _ = r.unwrap(p, false, name)
	p = r.dropRepeated(p, name)
	if len(p.points) < 2 {
		r.add(Error, int(v.offset), name, "of no length", "at least 2 different positions", "")
		return nil, false
	}
	return p.points, true
}

func positionCount(n int) string {
	if n == 1 {
		return "1 position"
	}
	return fmt.Sprintf("%d positions", n)
}

// dropRepeated drops positions that repeat the one before or lie nearer to it than a tenth of a millimetre.
func (r *layerReader) dropRepeated(p path, name string) path {
	near := nearDegrees
	if r.projected {
		near = nearMetres
	}
	kept := path{p.points[:1:1], p.at[:1:1]}
	same, close, first := 0, 0, int32(-1)
	for i := 1; i < len(p.points); i++ {
		last := kept.points[len(kept.points)-1]
		dx, dy := math.Abs(p.points[i][0]-last[0]), math.Abs(p.points[i][1]-last[1])
		switch {
		case dx == 0 && dy == 0:
			same++
		case dx < near && dy < near:
			close++
		default:
			kept.points, kept.at = append(kept.points, p.points[i]), append(kept.at, p.at[i])
			continue
		}
		if first < 0 {
			first = p.at[i]
		}
	}
	switch {
	case close > 0:
		r.add(Warning, int(first), name, "drawn with "+positionCount(same+close)+" less than 0.1 mm from the one before, or the same",
			"positions that lie apart", "they were dropped")
	case same > 0:
		r.add(Warning, int(first), name, "drawn with "+positionCount(same)+" that only repeat the one before", "each position once", "they were dropped")
	}
	return kept
}
