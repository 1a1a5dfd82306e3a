package gisio

import (
	"strings"
	"testing"
)

// The starter project states neither efficiencies nor delivery levels nor a demand: least-energy names each well's gap, and reads once
// all are filled.
func TestLeastEnergyNamesWhatIsMissing(t *testing.T) {
	aim := edit{"project.toml", `"most-yield"`, `"least-energy"`}
	_, findings := apply(t, aim).read()
	text := findingLines(findings)
	for _, want := range []string{"demand is missing", `demand is missing in state "drought"`, "the aim least-energy finds the least energy for a demand",
		`(id "W1"): pump_efficiency is missing`, `(id "W4"): delivery_level is missing`} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
	if strings.Contains(text, `(id "N1"): pump_efficiency`) {
		t.Errorf("a fixed well is asked for its efficiency:\n%s", text)
	}
	edits := []edit{aim, {"states.csv", "drought,no,,", "drought,no,40 L/s,"}, {"project.toml", `# demand = "60 L/s"`, `demand = "60 L/s"`},
		{"wells.csv", "quadratic_loss,source", "quadratic_loss,source,pump_efficiency,delivery_level"}, {"wells.csv", "d/m2,d2/m5,", "d/m2,d2/m5,,%,m"}}
	for _, loss := range []string{"W1,North well", "W2,Channel well", "W3,Field well", "W4,Shore well"} {
		row := ""
		for _, line := range strings.Split(apply(t)["wells.csv"], "\n") {
			if strings.HasPrefix(line, loss) {
				row = line
			}
		}
		edits = append(edits, edit{"wells.csv", row, row + ",62,40"})
	}
	p, findings := apply(t, edits...).read()
	if p == nil {
		t.Fatalf("filled in:\n%s", findingLines(findings))
	}
	if w := p.Wells[0]; w.PumpEfficiency == nil || *w.PumpEfficiency != 0.62 || w.DeliveryLevel == nil || *w.DeliveryLevel != 40 {
		t.Errorf("efficiency %v, delivery level %v", w.PumpEfficiency, w.DeliveryLevel)
	}
}

// The starter project states every request.
func TestClosestToRequestsReads(t *testing.T) {
	if p, findings := apply(t, edit{"project.toml", `"most-yield"`, `"closest-to-requests"`}).read(); p == nil {
		t.Errorf("%s", findingLines(findings))
	}
}
