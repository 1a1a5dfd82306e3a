package workbook

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// evidence is a record with a line of every result, hostile words and every table.
func evidence() *plan.Evidence {
	x, allowed, index, share := 2.34567e-14, 1e-9, 0.12, 0.4
	e := &plan.Evidence{Title: "=HYPERLINK(\"x\")", Reference: "R & D", Program: "springbound test", Plan: "Largest total.", Inputs: []plan.InputFile{{File: "a.csv", SHA256: strings.Repeat("ab", 32)}},
		Balances: []plan.EvidenceBalance{{State: "at the plan", In: 10, Out: 10, WorstPlace: "x 1", Lines: []plan.EvidenceBalanceLine{
			{Feature: "Sea", Kind: "edge", In: 10, ModelIn: 9}, {Feature: "wells", Kind: "wells", Out: 10, ModelOut: 10}}}},
		Differences: []plan.DifferenceLine{{Receptor: "P1", Well: "W1", Unit: "m", Adjoint: 1e-4, Difference: &x, Step: -100, Error: &x, Allowed: 1e-6}, {Receptor: "P1", Well: "W2", Unit: "m", Adjoint: 2e-4, Note: "switches"}},
		Meshes:      []plan.EvidenceMesh{{Nodes: 100, OfPlan: true}, {Nodes: 400}, {Nodes: 1600}},
		Convergence: []plan.ConvergenceLine{{What: "change at", ID: "P1", Unit: "m", Values: []float64{1, 1.1, 1.12}, Scale: 1, Index: &index, Behaviour: "settles"}},
		Capture:     []plan.Capture{{Feature: "Sea", Kind: "edge", Flow: 10, Share: &share}},
		Boundaries:  []plan.BoundaryLine{{Feature: "Sea", Kind: "edge", Outcome: "It gives 40 %.", Receptors: []plan.BoundaryChange{{Receptor: "P1", Unit: "m", With: 0.5, Without: 1, Factor: &share, Limited: true, Passed: []string{"L1"}}}}},
		Inward:      []plan.InwardStretch{{Edge: "Sea", Saline: true, AtPlan: 4, Length: 100, Place: "x 2"}},
		Settings:    []plan.EvidenceSetting{{Name: "aim", Value: "most-yield"}},
	}
	e.Add(plan.EvidenceLine{Check: "balance", Result: plan.Pass, Figure: &x, Allowed: &allowed, Unit: "share", Sentence: "+1 is no formula"})
	e.Add(plan.EvidenceLine{Check: "boundary", Result: plan.Fail})
	e.Add(plan.EvidenceLine{Check: "salt", Result: plan.NotDone})
	e.Conclude()
	return e
}

func TestEvidenceSheet(t *testing.T) {
	data, err := WriteEvidence(evidence())
	if err != nil {
		t.Fatal(err)
	}
	again, err := WriteEvidence(evidence())
	if err != nil || !bytes.Equal(data, again) {
		t.Errorf("the same evidence gives other bytes: %v", err)
	}
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if got := f.GetSheetList(); len(got) != 1 || got[0] != "Evidence" {
		t.Errorf("sheets %v", got)
	}
	rows, err := f.GetRows("Evidence")
	if err != nil {
		t.Fatal(err)
	}
	text := ""
	for _, r := range rows {
		text += strings.Join(r, "|") + "\n"
	}
	for _, want := range []string{"○ pass", "▲ FAIL", "– not done", "+1 is no formula", "2.3E-14", "P1", "L1", "a.csv", "=HYPERLINK"} {
		if !strings.Contains(text, want) {
			t.Errorf("the sheet does not show %q", want)
		}
	}
	for r := range rows { // what looks like a formula in the words stays words; the sheet's own formulas are few and known
		for c := range rows[r] {
			name := cellName(r+1, c+1)
			formula, err := f.GetCellFormula("Evidence", name)
			if err != nil {
				t.Fatal(err)
			}
			if strings.Contains(formula, "HYPERLINK") {
				t.Errorf("%s holds the formula %q", name, formula)
			}
			if formula == "" {
				continue
			}
			// recalculated by another program's rules, the formula gives the number that is stored
			value, err := f.CalcCellValue("Evidence", name, excelize.Options{RawCellValue: true})
			stored, err2 := f.GetCellValue("Evidence", name, excelize.Options{RawCellValue: true})
			if err != nil || err2 != nil || value != stored {
				t.Errorf("%s: %q gives %q, stored %q (%v, %v)", name, formula, value, stored, err, err2)
			}
		}
	}
}

func TestEvidenceThatIsNotFiniteIsRefused(t *testing.T) {
	e := evidence()
	e.Balances[0].Lines[0].In = math.NaN()
	if _, err := WriteEvidence(e); err == nil || !strings.Contains(err.Error(), "not a finite number") {
		t.Errorf("got %v", err)
	}
	if _, err := WriteEvidence(&plan.Evidence{}); err != nil {
		t.Errorf("an empty record: %v", err)
	}
}
