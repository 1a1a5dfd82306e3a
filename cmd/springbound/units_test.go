package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
)

// The two canals with their wells in a table: as metric with points, with decimal commas and semicolons, and in feet and US gallons a minute.
func TestUnitsAndSheetsGiveTheSamePlan(t *testing.T) {
	const foot, gallonPerMinute = 0.3048, 5.450992992 // m; m³/d: 3.785411784 L x 1440 / 1000, exact
	m := turns(1)[0]
	places := map[string][2]float64{"W1": m.at(700, 600), "W2": m.at(1500, 1400), "W3": m.at(2200, 800)}
	number := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	table := func(head string, separator string, comma bool, radius, rate float64) string {
		var b strings.Builder
		b.WriteString(head + "\n")
		for _, id := range []string{"W1", "W2", "W3"} {
			cells := []string{id, number(places[id][0]), number(places[id][1]), number(0.2 / radius), number(750.5 / rate), number(0 / rate)}
			if comma {
				for i := range cells[1:] {
					cells[i+1] = strings.ReplaceAll(cells[i+1], ".", ",")
				}
			}
			b.WriteString(strings.Join(cells, separator) + "\n")
		}
		return b.String()
	}
	limits := func(unit string, factor float64) string {
		return fmt.Sprintf("id,receptor,quantity,sense,value,unit,source\nL1,P1,change,at_most,%s,%s,invented\nL2,P2,change,at_most,%s,%s,invented\n", number(0.30/factor), unit, number(0.25/factor), unit)
	}
	base := func() draft {
		d := twoCanals(m)
		delete(d.layers, "wells")
		return d
	}
	metric := base()
	metric.tables["wells"] = table("id,easting,northing,radius [m],max [m3/d],present [m3/d]", ",", false, 1, 1)
	comma := base()
	comma.tables["wells"] = table("id;easting;northing;radius [m];max [m3/d];present [m3/d]", ";", true, 1, 1)
	feet := base()
	feet.tables["wells"] = table("id,easting,northing,radius [ft],max [gpm_us],present [gpm_us]", ",", false, foot, gallonPerMinute)
	feet.tables["limits"] = limits("ft", foot)
	feet.toml = strings.Replace(feet.toml, `"800 m2/d"`, `"`+number(800/(foot*foot))+` ft2/d"`, 1)
	for _, e := range feet.layers["edges"] {
		delete(e.properties, "level_m")
		e.properties["level_ft"] = 10 / foot
	}
	want := planned(t, metric.write(t), exitDone)
	if want.Wells[0].Rate < 700 {
		t.Fatalf("W1 pumps %.1f m³/d", want.Wells[0].Rate)
	}
	const same = 1e-9 // as promised, relative
	for name, d := range map[string]draft{"decimal commas": comma, "feet and gallons": feet} {
		got := planned(t, d.write(t), exitDone)
		if !(math.Abs(got.TotalRate/want.TotalRate-1) <= same) {
			t.Errorf("%s: total %.12f, want %.12f", name, got.TotalRate, want.TotalRate)
		}
		for i := range want.Wells {
			if !(math.Abs(got.Wells[i].Rate-want.Wells[i].Rate) <= same*want.TotalRate) {
				t.Errorf("%s: %s pumps %.12f, want %.12f", name, want.Wells[i].ID, got.Wells[i].Rate, want.Wells[i].Rate)
			}
		}
		for i := range want.Receptors {
			if !(math.Abs(got.Receptors[i].Change/want.Receptors[i].Change-1) <= same) {
				t.Errorf("%s: %s changes by %.12f, want %.12f", name, want.Receptors[i].ID, got.Receptors[i].Change, want.Receptors[i].Change)
			}
		}
	}
}
