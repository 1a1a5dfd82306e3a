package workbook

import (
	"bytes"
	"context"
	"errors"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
	"springbound/wells"
)

// seasons is the strip in several operating states: each has its own values without pumping, and slopes of its own where they are bent.
type seasons struct{ states []*strip }

func (m *seasons) Linearise(ctx context.Context, rates []float64) (*plan.Response, error) {
	return m.states[0].Linearise(ctx, rates)
}
func (m *seasons) InState(k int) plan.Model { return m.states[k] }

// statesReport plans the benchmark in three states; in the last every sensitivity is a tenth larger, as where features switch.
func statesReport(t testing.TB, edit func(*plan.Brief)) *plan.Report {
	t.Helper()
	b, first := plannerBrief(plan.MostYield, nil)
	m := &seasons{states: []*strip{first}}
	for k, name := range []string{"average", "peak month", "drought"} {
		b.States = append(b.States, wells.OperatingState{Name: name, Default: k == 0, Days: []float64{275.25, 30, 60}[k], RechargeFactor: []float64{1, 1, 0.6}[k]})
		b.StateTerms = append(b.StateTerms, append([]plan.WellTerm(nil), b.WellTerms...))
		if k == 0 {
			continue
		}
		s := &strip{response: first.response}
		s.response.Rows = append([]plan.Row(nil), first.response.Rows...)
		for i := range s.response.Rows {
			r := &s.response.Rows[i]
			if k == 2 {
				r.Base *= 0.97
				r.Slope = append([]float64(nil), r.Slope...)
				for w := range r.Slope {
					r.Slope[w] *= 1.1
				}
			}
		}
		m.states = append(m.states, s)
		for w := range b.StateTerms[k] {
			if k == 2 {
				b.StateTerms[k][w].StaticLevel *= 0.97
			}
		}
	}
	b.States[1].Demand = ptr(800)
	edit(&b)
	r, err := plan.Make(context.Background(), b, m, plan.Options{})
	if err != nil {
		t.Fatal(err)
	}
	r.Title, r.RateUnit = "Three states", "L/s"
	return r
}

// The sheet on operating states says what the report says, number by number, and stands in the book only where there are several.
func TestStatesSheet(t *testing.T) {
	r := statesReport(t, func(*plan.Brief) {})
	b := layout(t, r)
	if b.states == nil || len(b.fixedParts) > 0 {
		t.Fatalf("no sheet, or parts that do not follow the rates: %v", b.fixedParts)
	}
	inStates := 0
	for _, a := range b.agrees {
		if !a.withinAllowed {
			t.Errorf("%s: workbook %v, report %v", a.what, a.here, a.report)
		}
		if strings.Contains(a.what, " in ") || strings.Contains(a.what, "over the year") {
			inStates++
		}
	}
	// 8 limits twice over, 4 quotas, in each of three states; one yearly quota
	if want := 3*(8*2+3) + 1; inStates < want {
		t.Errorf("%d comparisons for the states, want %d", inStates, want)
	}
	text := map[string]bool{}
	for _, row := range b.states.rows {
		for _, c := range row {
			text[c.words] = true
		}
	}
	for _, want := range []string{"Limits in the state peak month", "Limits in the state drought", "drought", "field", "○ met", "● binds",
		"Sensitivities in the state drought, where they are not those of sheet Sensitivities: change per rate"} {
		if !text[want] {
			t.Errorf("no cell reads %q", want)
		}
	}
	plannerBrief, m := plannerBrief(plan.MostYield, nil)
	one, err := plan.Make(context.Background(), plannerBrief, m, plan.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if layout(t, one).states != nil {
		t.Error("a report about one state has a sheet on several")
	}
	mustWrite(t, statesReport(t, func(b *plan.Brief) { b.States[1].Demand = ptr(5000) }))
	mustWrite(t, statesReport(t, func(b *plan.Brief) {
		for k := range b.States {
			b.States[k].Days = 0
		}
		b.Quotas[0].PerYear = nil
	}))
}

// Stored numbers are those of another engine, also after a rate of the drought and one of Plan have been edited.
func TestStatesSheetComputes(t *testing.T) {
	r := statesReport(t, func(*plan.Brief) {})
	f, cells := formulaCells(t, mustWrite(t, r))
	b := layout(t, r)
	for _, c := range cells {
		if c.sheet != statesName {
			continue
		}
		got, err := f.CalcCellValue(c.sheet, c.cell, excelize.Options{RawCellValue: true})
		if err != nil || !sameContent(got, c.stored) {
			t.Errorf("%s %s: %q computed, %q stored (%v)", c.cell, c.formula, got, c.stored, err)
		}
	}
	const added = 100.0
	edits := map[string]float64{
		statesName + "!" + cellName(b.stateRows.first, nowColumn(2)): r.States[2].Wells[0].Rate + added,
		"Plan!" + cellName(b.planRows.first+1, b.planRows.now):       r.Wells[1].Rate + added,
	}
	for at, v := range edits {
		sheet, cell, _ := strings.Cut(at, "!")
		if err := f.SetCellFloat(sheet, cell, v, -1, 64); err != nil {
			t.Fatal(err)
		}
	}
	row := 0
	for i := range b.states.rows {
		if b.states.at(i+1, stID).words == "all" {
			row = i + 1
		}
	}
	got, err := f.CalcCellValue(statesName, cellName(row, stNow), excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	want := r.YearQuotas[0].Quota.Sum*daysPerYear + added*(275.25+60)
	if !nearlyEqual(parsed(t, got), want) {
		t.Errorf("sum over the year %s after the edits, want %v", got, want)
	}
	if banner, err := f.CalcCellValue("Plan", cellName(changedRow, 1)); err != nil || !strings.HasPrefix(banner, warnSign) {
		t.Errorf("Plan reads %q (%v)", banner, err)
	}
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		return
	}
	var out bytes.Buffer
	if err := f.Write(&out); err != nil {
		t.Fatal(err)
	}
	again, err := recalculate(t.TempDir(), out.Bytes())
	if errors.Is(err, errNoOffice) {
		t.Skip(err)
	}
	if err != nil {
		t.Fatal(err)
	}
	moved, err := excelize.OpenReader(bytes.NewReader(again))
	if err != nil {
		t.Fatal(err)
	}
	defer moved.Close()
	edited, err := excelize.OpenReader(bytes.NewReader(out.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	defer edited.Close()
	compareRecalculated(t, cells, moved, func(c formulaCell) string {
		text, err := edited.CalcCellValue(c.sheet, c.cell, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Errorf("%s!%s: %v", c.sheet, c.cell, err)
		}
		return text
	})
}

// LibreOffice agrees with every stored number of a report on three states.
func TestLibreOfficeAgreesOnStates(t *testing.T) {
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		t.Skip("set SPRINGBOUND_LONG=1 for the recalculation by LibreOffice")
	}
	recalculationAgrees(t, statesReport(t, func(*plan.Brief) {}))
}

func parsed(t testing.TB, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}
