package workbook

import (
	"context"
	"os"
	"testing"

	"springbound/plan"
)

// TestDump writes the example workbooks where SPRINGBOUND_DUMP says, for looking at them.
func TestDump(t *testing.T) {
	dir := os.Getenv("SPRINGBOUND_DUMP")
	if dir == "" {
		t.Skip("SPRINGBOUND_DUMP is not set")
	}
	brief, model := plannerBrief(plan.MostYield, nil)
	made, err := plan.Make(context.Background(), brief, model, plan.Options{})
	if err != nil {
		t.Fatal(err)
	}
	made.Title, made.RateUnit = "Made by the planner", "L/s"
	for name, r := range map[string]func() ([]byte, error){"rich": func() ([]byte, error) { return Write(richReport()) }, "made": func() ([]byte, error) { return Write(made) }, "strip": func() ([]byte, error) { return Write(stripReport()) },
		"conflict": func() ([]byte, error) { return Write(conflictReport()) }, "large": func() ([]byte, error) { return Write(largeReport(300, 40)) }} {
		data, err := r()
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if err := os.WriteFile(dir+"/"+name+".xlsx", data, 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

func mustWrite(t testing.TB, r *plan.Report) []byte {
	t.Helper()
	data, err := Write(r)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// layout builds a report's grids without writing them.
func layout(t testing.TB, r *plan.Report) *book {
	t.Helper()
	unit, err := shownUnit(r.RateUnit)
	if err != nil {
		t.Fatal(err)
	}
	f, err := readFacts(r)
	if err != nil {
		t.Fatal(err)
	}
	b := &book{report: r, facts: f, unit: unit, looks: map[look]*look{}, styles: map[*look]int{}}
	b.fill()
	if err := b.err(); err != nil {
		t.Fatal(err)
	}
	return b
}
