package gisio

import (
	"math"
	"math/rand/v2"
	"testing"
)

// grid is a square of n by n cells of 50 m, each cut in two, in the plane of EPSG:32630.
func grid(n int) (x, y []float64, triangles []int32) {
	for j := 0; j <= n; j++ {
		for i := 0; i <= n; i++ {
			x, y = append(x, 500000+50*float64(i)), append(y, 4500000+50*float64(j))
		}
	}
	for j := 0; j < n; j++ {
		for i := 0; i < n; i++ {
			a := int32(j*(n+1) + i)
			b, c, d := a+1, a+int32(n)+1, a+int32(n)+2
			triangles = append(triangles, a, b, d, a, d, c)
		}
	}
	return x, y, triangles
}

// A disc, a ring and everything: area, number of polygons and holes.
func TestRegionOfKnownShapes(t *testing.T) {
	x, y, triangles := grid(80)
	distance := make([]float64, len(x))
	off := make([]float64, len(x))
	for i := range x {
		distance[i] = math.Hypot(x[i]-502003, y[i]-4502011)
		off[i] = math.Abs(distance[i] - 1000)
	}
	for _, c := range []struct {
		name            string
		values          []float64
		level, area     float64
		polygons, holes int
	}{
		{"disc", distance, 900, math.Pi * 900 * 900, 1, 0},
		{"ring", off, 300, math.Pi * (1300*1300 - 700*700), 1, 1},
		{"everything", distance, 1e5, 4000 * 4000, 1, 0},
		{"nothing", distance, -1, 0, 0, 0},
	} {
		region, err := Region(x, y, triangles, c.values, c.level)
		if err != nil {
			t.Fatal(err)
		}
		holes := 0
		for _, p := range region {
			holes += len(p) - 1
		}
		// chords of a 50 m grid in a circle of 700 m or more: (50/700)²/8 of the radius, doubled for the area
		if a := RegionArea(region); len(region) != c.polygons || holes != c.holes || !(math.Abs(a-c.area) <= 0.003*c.area) {
			t.Errorf("%s: %d polygons, %d holes, %.0f m², want %d, %d, %.0f m²", c.name, len(region), holes, a, c.polygons, c.holes, c.area)
		}
	}
}

// Noise makes islands in lakes in islands and rings that meet in points: what is written reads back without a fault, with the area that the
// cut triangles have, and a region and its complement fill the square.
func TestRegionOfNoiseIsValid(t *testing.T) {
	x, y, triangles := grid(30)
	plane, err := ParseEPSG("EPSG:32630")
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(7, 1712))
	for k := range 20 {
		values, opposite := make([]float64, len(x)), make([]float64, len(x))
		for i := range values {
			values[i] = rng.Float64()*2 - 1
			if k%2 == 1 { // a chequerboard: saddles everywhere
				values[i] = math.Round(values[i]*2) + 0.5
			}
			opposite[i] = -values[i]
		}
		region, err := Region(x, y, triangles, values, 0)
		if err != nil {
			t.Fatal(err)
		}
		rest, err := Region(x, y, triangles, opposite, 0)
		if err != nil {
			t.Fatal(err)
		}
		// each ring under smallestRing that is left out takes up to 1 m²; none arises at this spacing but by chance
		if sum := RegionArea(region) + RegionArea(rest); !(math.Abs(sum-1500*1500) <= 10) {
			t.Errorf("field %d: region and complement cover %.2f m² of %d", k, sum, 1500*1500)
		}
		data, err := WriteRegion(region, plane, []Property{{"area_m2", RegionArea(region)}})
		if err != nil {
			t.Fatal(err)
		}
		layer, findings := ReadLayer("region.geojson", data, LayerOptions{})
		if len(findings) > 0 || len(layer.Features) != 1 {
			t.Errorf("field %d: %d features, %v", k, len(layer.Features), findings)
		}
	}
}

// Infinite values are outside, next to their neighbours; a value that is not a number is refused; no polygons make an empty collection.
func TestRegionHostile(t *testing.T) {
	x, y, triangles := grid(4)
	values := make([]float64, len(x))
	values[12] = math.Inf(1)
	region, err := Region(x, y, triangles, values, 1)
	if err != nil || len(region) != 1 || len(region[0]) != 2 {
		t.Fatalf("%v %v", region, err)
	}
	// the six triangles at the node, 1250 m² each, less what regionShift leaves of them
	if a := RegionArea(region); !(a >= 40000-6*1250 && a <= 40000-6*1250+100) {
		t.Errorf("%.1f m²", a)
	}
	values[12] = math.NaN()
	if _, err := Region(x, y, triangles, values, 1); err == nil {
		t.Error("a value that is not a number was taken")
	}
	plane, err := ParseEPSG("EPSG:32630")
	if err != nil {
		t.Fatal(err)
	}
	if data, err := WriteRegion(nil, plane, nil); err != nil || string(data) != "{\"type\":\"FeatureCollection\",\"features\":[]}\n" {
		t.Errorf("%s %v", data, err)
	}
}
