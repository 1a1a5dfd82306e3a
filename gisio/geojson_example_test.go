package gisio_test

import (
	"fmt"

	"github.com/paulmach/orb"

	"springbound/gisio"
)

// A ring that is not closed is named with its place, and the feature is left out.
func ExampleReadLayer() {
	text := []byte(`{"type": "Feature", "id": "north", "properties": {},
 "geometry": {"type": "Polygon", "coordinates": [[[7, 45], [7.1, 45], [7.1, 45.1], [7, 45.1]]]}}`)
	layer, findings := gisio.ReadLayer("zones.geojson", text, gisio.LayerOptions{Layer: "zones"})
	fmt.Println(len(layer.Features), "features")
	fmt.Println(findings.Err())
	// Output:
	// 0 features
	// zones.geojson, line 2, column 84, layer zones, feature 1 (id "north"): the outer ring is not closed: it starts at [7 45] and ends at [7 45.1]; allowed: a ring whose last position repeats the first; repeat the first position at the end
}

func ExampleWriteFeatures() {
	text, err := gisio.WriteFeatures([]gisio.OutputFeature{{
		ID:         "W1",
		Geometry:   orb.Point{7.123456789, 45},
		Properties: []gisio.Property{{Name: "rate_m3_per_d", Value: 250.0}},
	}})
	fmt.Print(string(text), err)
	// Output:
	// {"type":"FeatureCollection","features":[
	// {"type":"Feature","id":"W1","properties":{"rate_m3_per_d":250},"geometry":{"type":"Point","coordinates":[7.1234568,45]}}
	// ]}
	// <nil>
}
