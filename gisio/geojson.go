package gisio

import "github.com/paulmach/orb"

// Feature is one checked feature of a layer.
type Feature struct {
	Index      int            // place in the file, counted from 0
	ID         string         // the feature's "id" member as text, or "" where it has none
	Geometry   orb.Geometry   // orb.Point, MultiPoint, LineString, MultiLineString, Polygon or MultiPolygon; never nil
	Properties map[string]any // string, float64, bool, nil, []any or map[string]any
	Keys       []string       // names of the properties in the order of the file
	Offset     int            // byte offset of the feature in the file
	Line       int            // line of the feature in the file, counted from 1
}

// Name gives the words by which findings name this feature.
func (f Feature) Name() string { return FeatureName(f.Index, f.ID) }

// Layer is what a GeoJSON text holds. Features that have an error are left out of it, and the error is among
// the findings, so a caller can go on collecting problems and must ask Findings.Err before it computes.
type Layer struct {
	File     string
	Features []Feature
	CRS      string // from the old "crs" member, such as "EPSG:32630" or "EPSG:4326"; "" where the text has none
	Findings Findings
}

// LayerOptions says how a layer's text is to be read. The zero value reads longitude and latitude (RFC 7946).
type LayerOptions struct {
	Layer     string // name of the layer, for the findings
	Projected bool   // coordinates are metres in the code EPSG: no degree-range check
	EPSG      string // code that the user states for the layer, such as "EPSG:32630"; "" = none stated
	MaxBytes  int    // largest text that is read; 0 = DefaultMaxLayerBytes [bytes]
}
