package gisio

import (
	"strings"
	"testing"
)

// TestPlantedMistakes plants sixteen mistakes in four files; one reading must report every one that can be known and warn of the rest.
func TestPlantedMistakes(t *testing.T) {
	const lakes = `{"type": "FeatureCollection", "features": [
 {"type": "Feature", "properties": {"name": "Lang Burn", "water_level_m": 44.3, "bed_resistance": 5}, "geometry": {"type": "Polygon", "coordinates": [[[-30.58,47.03],[-30.57,47.03],[-30.57,47.04],[-30.58,47.04],[-30.58,47.03]]]}},
 {"type": "Feature", "properties": {"name": "Far Pool", "water_level_m": 8, "bed_resistance_d": 5}, "geometry": {"type": "Polygon", "coordinates": [[[-30.52,47.03],[-30.51,47.03],[-30.51,47.04],[-30.52,47.04]]]}}
]}`
	p, findings := apply(t,
		edit{"project.toml", "aim = ", "demnd = \"60 L/s\"\naim = "},
		edit{"project.toml", `recharge = "0.5 mm/d"`, "recharge = 0.5"},
		edit{"project.toml", "# lakes = ", "lakes = "},
		edit{"wells.csv", "1440,,1800,", "1440,,20.8,"},
		edit{"wells.csv", "W3,Field", "W2,Field"},
		edit{"wells.csv", "1280,300,1600", "1280,300,"},
		edit{"wells.csv", "N1,Croft well,-30.561817,47.023386,200", "N1,Croft well,-30.961817,47.023386,n/a"},
		edit{"wells.csv", "-30.539434,47.028782,350", "47.028782,-30.539434,3500"},
		edit{"rivers.geojson", `"width_m": 8`, `"width_m": 8, "datum": "chart datum"`},
		edit{"rivers.geojson", "[11.9, 8.3, 4.2, 0.6]", "[11.9, 9.3, 4.2, 0.6]"},
		edit{"rivers.geojson", `"bed_resistance_d": 4`, `"bed_resistance_days": 4`},
		edit{"lakes.geojson", "", lakes},
	).read()
	if p != nil {
		t.Error("a project in spite of errors")
	}
	for _, m := range []struct {
		reason   string
		severity Severity
		parts    []string
	}{
		{"unknown key", Error, []string{"project.toml", "demnd", "did you mean demand?"}},
		{"bare number", Error, []string{"project.toml", "recharge is 0.5, a number without a unit"}},
		{"litres per second as cubic metres per day", Warning, []string{"wells.csv", "20.8 m3/d", "is it in L/s?"}},
		{"duplicate id", Error, []string{"wells.csv", `"W2" for a second time`}},
		{"blank for a value", Error, []string{"wells.csv", `"W4"`, "max is missing or blank"}},
		{"well outside", Error, []string{"wells.csv", `"N1"`, "a well outside the extent"}},
		{"placeholder", Error, []string{"wells.csv", `"n/a"`, "leave it blank"}},
		{"exchanged coordinates", Error, []string{"wells.csv", `"W2"`, "longitude and latitude look exchanged"}},
		{"diameter of a pond", Warning, []string{"wells.csv", "3.5 m", "is the unit right?"}},
		{"another datum", Error, []string{"rivers.geojson", `"chart datum"`, "convert the levels"}},
		{"bed above the water", Error, []string{"rivers.geojson", "9.3 m, above the water at 9 m"}},
		{"unknown unit in a key", Error, []string{"rivers.geojson", "bed_resistance_days", "bed_resistance_d, bed_resistance_yr"}},
		{"feet as metres", Warning, []string{"lakes.geojson", "44.3 m", "is it in feet?"}},
		{"duplicate name", Error, []string{"lakes.geojson", `"Lang Burn", which a river has too`}},
		{"number without unit", Error, []string{"lakes.geojson", "bed_resistance is 5, a number without a unit"}},
		{"ring left open", Error, []string{"lakes.geojson", "not closed"}},
		{"one water twice", Warning, []string{"rivers.geojson", "runs through the lake"}},
	} {
		found := false
		for _, f := range findings {
			hits := f.Severity == m.severity
			for _, part := range m.parts {
				hits = hits && strings.Contains(f.String(), part)
			}
			found = found || hits
		}
		if !found {
			t.Errorf("%s: no %v with %q among\n%s", m.reason, m.severity, m.parts, findingLines(findings))
		}
	}
}

// TestNothingStopsTheReader gives files that are no files of their kind; each must end in findings, not in a panic.
func TestNothingStopsTheReader(t *testing.T) {
	for _, f := range StarterFiles() {
		for _, text := range []string{"\x00", "{}", "[]", "a", "\n\n", "PK\x03\x04", "\xff\xfe", ";", "\"", "id", "id,id", "name\nx", "[layers]", "title = 3", `{"type":"FeatureCollection","features":[]}`,
			`{"type":"Feature","properties":null,"geometry":null}`} {
			p, findings := apply(t, edit{f.Name, "", text}).read()
			if len(findings) == 0 {
				t.Errorf("%s as %q: no finding, project %v", f.Name, text, p != nil)
			}
		}
	}
}

// TestPlaceInAHole: a well in a hole is not merely outside, and the message says so.
func TestPlaceInAHole(t *testing.T) {
	const hole = `[-30.6, 47.0]], [[-30.5410, 47.0275], [-30.5410, 47.0300], [-30.5380, 47.0300], [-30.5380, 47.0275], [-30.5410, 47.0275]]]`
	_, findings := apply(t, edit{"extent.geojson", "[-30.6, 47.0]]]", hole}).read()
	for _, f := range findings {
		if text := f.String(); f.Severity == Error && strings.Contains(text, `"W2"`) && strings.Contains(text, "it is in a hole of the extent") {
			return
		}
	}
	t.Errorf("no word on the hole among\n%s", findingLines(findings))
}

// TestSalineFrontWithoutSaltWater: a front is watched, but nothing says where the salt water stands.
func TestSalineFrontWithoutSaltWater(t *testing.T) {
	warned := func(edits ...edit) bool {
		_, findings := apply(t, edits...).read()
		for _, f := range findings {
			if f.Severity == Warning && strings.Contains(f.String(), "while no edge is saline") {
				return true
			}
		}
		return false
	}
	if warned() {
		t.Error("warned although the coast is saline")
	}
	if !warned(edit{"edges.geojson", `"saline": true, `, ""}) {
		t.Error("no warning where no edge is saline")
	}
}
