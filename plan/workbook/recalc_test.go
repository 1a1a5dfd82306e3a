package workbook

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"testing"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// recalcShare is how far a recalculated number may be from the stored one, as a share of its size; both follow the same operations
// in the same order, so only the order within a program's own sums differs.
const recalcShare = 1e-9

// recalcFloor is the size below which differences are not judged: headroom is rounded to roundDigits decimals, and the last of
// them may fall either way.
const recalcFloor = 2e-9

func nearlyEqual(a, b float64) bool {
	return math.Abs(a-b) <= math.Max(recalcShare*math.Max(math.Abs(a), math.Abs(b)), recalcFloor)
}

// A formulaCell is a formula with the value stored beside it.
type formulaCell struct{ sheet, cell, formula, stored string }

// formulaCells lists all formulas of a workbook.
func formulaCells(t testing.TB, data []byte) (*excelize.File, []formulaCell) {
	t.Helper()
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { f.Close() })
	var cells []formulaCell
	for _, sheet := range f.GetSheetList() {
		rows, err := f.GetRows(sheet, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Fatal(err)
		}
		for r, row := range rows {
			for c := range row {
				name, _ := excelize.CoordinatesToCellName(c+1, r+1)
				formula, err := f.GetCellFormula(sheet, name)
				if err != nil {
					t.Fatal(err)
				}
				if formula != "" {
					cells = append(cells, formulaCell{sheet, name, formula, row[c]})
				}
			}
		}
	}
	return f, cells
}

// errNoOffice says that LibreOffice is not installed.
var errNoOffice = errors.New("soffice is not installed")

// recalculate lets LibreOffice recalculate every formula of a workbook and returns the result as a workbook. Without the profile's
// setting it would keep the stored numbers, and a comparison would prove nothing.
func recalculate(dir string, data []byte) ([]byte, error) {
	office, err := exec.LookPath("soffice")
	if err != nil {
		return nil, errNoOffice
	}
	const settings = `<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>`
	profile := filepath.Join(dir, "profile")
	if err := os.MkdirAll(filepath.Join(profile, "user"), 0o755); err != nil {
		return nil, err
	}
	if err := os.WriteFile(filepath.Join(profile, "user", "registrymodifications.xcu"), []byte(settings), 0o644); err != nil {
		return nil, err
	}
	in := filepath.Join(dir, "in.xlsx")
	if err := os.WriteFile(in, data, 0o644); err != nil {
		return nil, err
	}
	out := filepath.Join(dir, "out")
	command := exec.Command(office, "-env:UserInstallation=file://"+profile, "--headless", "--convert-to", "xlsx", "--outdir", out, in)
	if message, err := command.CombinedOutput(); err != nil {
		return nil, fmt.Errorf("soffice: %w: %s", err, message)
	}
	return os.ReadFile(filepath.Join(out, "in.xlsx"))
}

// compareRecalculated reports formula cells whose recalculated value differs from the expected one.
func compareRecalculated(t *testing.T, cells []formulaCell, after *excelize.File, expected func(formulaCell) string) {
	t.Helper()
	bad := 0
	for _, c := range cells {
		got, err := after.GetCellValue(c.sheet, c.cell, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Fatal(err)
		}
		want := expected(c)
		if sameContent(got, want) {
			continue
		}
		if bad++; bad <= 20 {
			t.Errorf("%s!%s: %q after recalculation, %q stored; formula %s", c.sheet, c.cell, got, want, c.formula)
		}
	}
	if bad > 20 {
		t.Errorf("and %d more", bad-20)
	}
}

func sameContent(a, b string) bool {
	x, errX := strconv.ParseFloat(a, 64)
	y, errY := strconv.ParseFloat(b, 64)
	if errX == nil && errY == nil {
		return nearlyEqual(x, y)
	}
	return a == b
}

// Stored values must be those that an independent formula engine gets.
func TestFormulasGiveStoredValues(t *testing.T) {
	for name, report := range map[string][]byte{"rich": mustWrite(t, richReport()), "strip": mustWrite(t, stripReport()), "conflict": mustWrite(t, conflictReport())} {
		f, cells := formulaCells(t, report)
		if len(cells) < 50 {
			t.Fatalf("%s: only %d formulas", name, len(cells))
		}
		for _, c := range cells {
			got, err := f.CalcCellValue(c.sheet, c.cell, excelize.Options{RawCellValue: true})
			if err != nil {
				t.Errorf("%s, %s!%s %s: %v", name, c.sheet, c.cell, c.formula, err)
				continue
			}
			if !sameContent(got, c.stored) {
				t.Errorf("%s, %s!%s: %q computed, %q stored; formula %s", name, c.sheet, c.cell, got, c.stored, c.formula)
			}
		}
	}
}

// LibreOffice must agree with every stored number, and an edited rate must move receptors as the sensitivities say.
func TestLibreOfficeAgrees(t *testing.T) {
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		t.Skip("set SPRINGBOUND_LONG=1 for the recalculation by LibreOffice")
	}
	recalculationAgrees(t, richReport())
}

// The same for the example's own plan, where the main job has left it.
func TestLibreOfficeAgreesOnTheExample(t *testing.T) {
	if os.Getenv("SPRINGBOUND_LONG") != "1" {
		t.Skip("set SPRINGBOUND_LONG=1 for the recalculation by LibreOffice")
	}
	data, err := os.ReadFile(filepath.Join("..", "..", "examples", "varrow-bight", "out", "plan.json"))
	if err != nil {
		t.Skipf("run the README's main job first: %v", err)
	}
	var report plan.Report
	if err := json.Unmarshal(data, &report); err != nil {
		t.Fatal(err)
	}
	recalculationAgrees(t, &report)
}

func recalculationAgrees(t *testing.T, report *plan.Report) {
	t.Helper()
	data := mustWrite(t, report)
	f, cells := formulaCells(t, data)
	t.Logf("%d formulas", len(cells))
	again, err := recalculate(t.TempDir(), data)
	if errors.Is(err, errNoOffice) {
		t.Skip(err)
	}
	if err != nil {
		t.Fatal(err)
	}
	after, err := excelize.OpenReader(bytes.NewReader(again))
	if err != nil {
		t.Fatal(err)
	}
	defer after.Close()
	compareRecalculated(t, cells, after, func(c formulaCell) string { return c.stored })

	compareAfterEdit(t, f, cells, report)
}

// compareAfterEdit changes one rate, lets LibreOffice recalculate, and checks every formula and what the receptors do.
func compareAfterEdit(t *testing.T, f *excelize.File, cells []formulaCell, report *plan.Report) {
	t.Helper()
	const edited, added = 0, 100.0 // well W1 by 100 m³/d
	b := layout(t, report)
	cell := cellName(b.planRows.first+edited, b.planRows.now)
	if err := f.SetCellFloat("Plan", cell, report.Wells[edited].Rate+added, -1, 64); err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := f.Write(&out); err != nil {
		t.Fatal(err)
	}
	again, err := recalculate(t.TempDir(), out.Bytes())
	if err != nil {
		t.Fatal(err)
	}
	moved, err := excelize.OpenReader(bytes.NewReader(again))
	if err != nil {
		t.Fatal(err)
	}
	defer moved.Close()
	// Two engines must agree on every formula after the edit, and what they agree on must be what the sensitivities say.
	edit, err := excelize.OpenReader(bytes.NewReader(out.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	defer edit.Close()
	compareRecalculated(t, cells, moved, func(c formulaCell) string {
		text, err := edit.CalcCellValue(c.sheet, c.cell, excelize.Options{RawCellValue: true})
		if err != nil {
			t.Errorf("%s!%s: %v", c.sheet, c.cell, err)
		}
		return text
	})
	for _, w := range b.watched {
		if !w.live {
			continue
		}
		rec := report.Receptors[w.index]
		slope := b.facts.slope[w.index][edited]
		change := number64(t, moved, "Receptors", w.row, recChange)
		if want := rec.Change + slope*added; !nearlyEqual(change, want) {
			t.Errorf("receptor %s: change %v after the edit, want %v", rec.ID, change, want)
		}
		if got, want := number64(t, moved, "Receptors", w.row, recNow), rec.Value-slope*added; !nearlyEqual(got, want) {
			t.Errorf("receptor %s: value %v after the edit, want %v", rec.ID, got, want)
		}
	}
	for _, sheet := range sheetNames {
		text, err := moved.GetCellValue(sheet, cellName(changedRow, 1))
		if err != nil || text != warnSign+changedText {
			t.Errorf("%s: line on edits reads %q (%v)", sheet, text, err)
		}
	}
}

func number64(t testing.TB, f *excelize.File, sheet string, row, column int) float64 {
	t.Helper()
	text, err := f.GetCellValue(sheet, cellName(row, column), excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatalf("%s!%s holds %q", sheet, cellName(row, column), text)
	}
	return x
}

func excelizeNumber(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }
