package gisio

import (
	"errors"
	"fmt"
	"strings"

	"github.com/paulmach/orb"
)

// WriteContours gives contours as a GeoJSON FeatureCollection in longitude and latitude, one feature for each line,
// in the order of the contours. key names the property that holds the level, with its unit, such as "drawdown_m"; a
// second property "closed" tells whether the line is a loop. plane is the system of the points. Lines shorter than the
// last decimal written are left out.
//
// Errors: an empty key, and points that cannot be taken to longitude and latitude (*PointError). Panics when plane is
// not an offered system.
func WriteContours(contours []Contour, plane System, key string) ([]byte, error) {
	if strings.TrimSpace(key) == "" {
		return nil, errors.New("contours: the property for the level needs a name with its unit, such as \"drawdown_m\"")
	}
	var features []OutputFeature
	for _, c := range contours {
		for _, line := range c.Lines {
			g, err := Transform(plane, WGS84, line.Points)
			if err != nil {
				return nil, fmt.Errorf("contour %v: %w", c.Level, err)
			}
			if rounded, err := roundPoints(g.(orb.LineString)); err == nil && len(rounded) < 2 {
				continue
			}
			features = append(features, OutputFeature{Geometry: g, Properties: []Property{{key, c.Level}, {"closed", line.Closed}}})
		}
	}
	return WriteFeatures(features)
}
