package gisio

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"strconv"

	"github.com/paulmach/orb"
)

// lonLatDecimals is the number of decimals that longitudes and latitudes are written with: 1e-7 degree is about a centimetre.
const lonLatDecimals = 7

// Property is one named value of a feature to be written.
type Property struct {
	Name  string // with its unit where it has one, such as "drawdown_m"
	Value any    // string, bool, nil, an integer, a finite float64, or []any and map[string]any of these
}

// OutputFeature is one feature to be written.
type OutputFeature struct {
	ID         string       // "" = none
	Geometry   orb.Geometry // longitude and latitude on WGS 84 [degree]; Point, MultiPoint, LineString, MultiLineString, Polygon, MultiPolygon
	Properties []Property   // written in this order
}

// WriteFeatures gives a GeoJSON FeatureCollection (RFC 7946) as text: longitude and latitude with 7 decimals, no
// "crs" member, outer rings counterclockwise and holes clockwise, shapes that cross ±180 cut there, one feature a line,
// properties in their order. Names and texts are data: whatever they hold is escaped.
//
// Positions that fall together by rounding are written once. Errors: a value that is not finite or not of a listed
// kind, a name used twice in a feature, a latitude beyond a pole, a longitude beyond ±360, a geometry that is nil, empty
// or of no size at 7 decimals.
func WriteFeatures(features []OutputFeature) ([]byte, error) {
	var b bytes.Buffer
	b.WriteString(`{"type":"FeatureCollection","features":[`)
	for i, f := range features {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteByte('\n')
		if err := writeFeature(&b, f); err != nil {
			return nil, fmt.Errorf("GeoJSON, %s: %w", FeatureName(i, f.ID), err)
		}
	}
	if len(features) > 0 {
		b.WriteByte('\n')
	}
	b.WriteString("]}\n")
	return b.Bytes(), nil
}

func writeFeature(b *bytes.Buffer, f OutputFeature) error {
	b.WriteString(`{"type":"Feature"`)
	if f.ID != "" {
		b.WriteString(`,"id":`)
		if err := writeJSON(b, f.ID); err != nil {
			return err
		}
	}
	b.WriteString(`,"properties":{`)
	seen := make(map[string]bool, len(f.Properties))
	for i, p := range f.Properties {
		if seen[p.Name] {
			return fmt.Errorf("property %q is there twice", p.Name)
		}
		seen[p.Name] = true
		if i > 0 {
			b.WriteByte(',')
		}
		if err := writeJSON(b, p.Name); err != nil {
			return err
		}
		b.WriteByte(':')
		if err := writeJSON(b, p.Value); err != nil {
			return fmt.Errorf("property %q: %w", p.Name, err)
		}
	}
	b.WriteString(`},"geometry":`)
	if err := writeGeometry(b, f.Geometry); err != nil {
		return err
	}
	b.WriteByte('}')
	return nil
}

// writeJSON writes a value by encoding/json after making sure that it is of a kind that can be read back.
func writeJSON(b *bytes.Buffer, v any) error {
	if err := checkValue(v, 0); err != nil {
		return err
	}
	text, err := json.Marshal(v)
	if err != nil {
		return err
	}
	b.Write(text)
	return nil
}

func checkValue(v any, depth int) error {
	const deepest = maxJSONDepth - 4 // a property lies four levels down
	switch v := v.(type) {
	case nil, string, bool, int, int32, int64:
		return nil
	case float64:
		if !finite(v) {
			return fmt.Errorf("the number %v cannot be written", v)
		}
		return nil
	case []any:
		if depth == deepest {
			return fmt.Errorf("nested more than %d deep", deepest)
		}
		for _, item := range v {
			if err := checkValue(item, depth+1); err != nil {
				return err
			}
		}
		return nil
	case map[string]any:
		if depth == deepest {
			return fmt.Errorf("nested more than %d deep", deepest)
		}
		for _, item := range v {
			if err := checkValue(item, depth+1); err != nil {
				return err
			}
		}
		return nil
	}
	return fmt.Errorf("a value of type %T cannot be written", v)
}

// writeGeometry writes a geometry after rounding, cutting and turning it.
func writeGeometry(b *bytes.Buffer, g orb.Geometry) error {
	kind, coordinates, err := outputShape(g)
	if err != nil {
		return err
	}
	fmt.Fprintf(b, `{"type":%q,"coordinates":`, kind)
	writeCoordinates(b, coordinates)
	b.WriteByte('}')
	return nil
}

func writeCoordinates(b *bytes.Buffer, g orb.Geometry) {
	switch g := g.(type) {
	case orb.Point:
		b.WriteByte('[')
		writeDegrees(b, g[0])
		b.WriteByte(',')
		writeDegrees(b, g[1])
		b.WriteByte(']')
	case orb.MultiPoint:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	case orb.LineString:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	case orb.Ring:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	case orb.MultiLineString:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	case orb.Polygon:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	case orb.MultiPolygon:
		writeList(b, len(g), func(i int) { writeCoordinates(b, g[i]) })
	}
}

func writeList(b *bytes.Buffer, n int, item func(i int)) {
	b.WriteByte('[')
	for i := range n {
		if i > 0 {
			b.WriteByte(',')
		}
		item(i)
	}
	b.WriteByte(']')
}

// writeDegrees writes a rounded number without trailing zeros.
func writeDegrees(b *bytes.Buffer, x float64) {
	text := strconv.AppendFloat(nil, x, 'f', lonLatDecimals, 64)
	text = bytes.TrimRight(text, "0")
	b.Write(bytes.TrimSuffix(text, []byte{'.'}))
}

// roundDegrees gives the float64 nearest to x at 7 decimals; never -0.
func roundDegrees(x float64) float64 {
	const scale = 1e7
	return math.Round(x*scale)/scale + 0
}

// roundPoint rounds a position after checking it.
func roundPoint(p orb.Point) (orb.Point, error) {
	if !finite(p[0]) || !finite(p[1]) || !(math.Abs(p[0]) <= longitudeWholeTurn && math.Abs(p[1]) <= 90) {
		return p, fmt.Errorf("the position %s is not a longitude and latitude", pointText(p))
	}
	return orb.Point{roundDegrees(p[0]), roundDegrees(p[1])}, nil
}

// roundPoints rounds positions and leaves out those that then repeat the one before.
func roundPoints(in []orb.Point) ([]orb.Point, error) {
	out := make([]orb.Point, 0, len(in))
	for _, p := range in {
		q, err := roundPoint(p)
		if err != nil {
			return nil, err
		}
		if n := len(out); n == 0 || out[n-1] != q {
			out = append(out, q)
		}
	}
	return out, nil
}
