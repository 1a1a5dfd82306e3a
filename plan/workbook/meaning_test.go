package workbook

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// figures at the planned rates must be those of the report, limit by limit.
func TestLimitsAgreeWithTheReport(t *testing.T) {
	for name, r := range map[string]*plan.Report{"rich": richReport(), "strip": stripReport(), "large": largeReport(30, 12)} {
		b := layout(t, r)
		for _, a := range b.agrees {
			if !a.withinAllowed {
				t.Errorf("%s, %s: workbook %v, report %v", name, a.what, a.here, a.report)
			}
		}
		if len(b.fixedParts) > 0 {
			t.Errorf("%s: limits %v carry a part that does not follow the rates", name, b.fixedParts)
		}
		for _, line := range b.limits {
			l := r.Receptors[line.receptor].Limits[line.limit]
			got := b.receptors.at(line.row, recOthers).words
			want := wordHolds
			switch {
			case !line.live:
				want = wordNotAssessed
			case l.Passed:
				want = wordPassed
			case l.Binds:
				want = wordBinds
			}
			if got != want {
				t.Errorf("%s, limit %s reads %q, want %q (headroom %v)", name, l.ID, got, want, l.Headroom)
			}
		}
	}
}

// The strip's optimum is known in closed form; the workbook must show its total, both limits binding and no difference.
func TestStripOptimumIsShown(t *testing.T) {
	b := layout(t, stripReport())
	const total, share = 1221.986123, 1e-9 // printed to nine decimals of a thousand
	if got := b.planRows.totalNow.value; !(math.Abs(got-total) <= share*total) {
		t.Errorf("total %v, want %v", got, total)
	}
	for _, line := range b.limits {
		if got := b.receptors.at(line.row, recOthers).words; got != wordBinds {
			t.Errorf("limit %d reads %q", line.limit, got)
		}
	}
	if got := b.plan.at(changedRow, 1).words; got != "Rates as planned." {
		t.Errorf("the line on edits reads %q", got)
	}
}

// A limit on a bore whose turbulent loss cannot be followed, and one whose baseline is not the sum of sensitivities, must still give
// the plan's own figure and be named.
func TestPartsThatDoNotFollowTheRates(t *testing.T) {
	r := richReport()
	r.Receptors[6].Feature = ""
	fen := &r.Receptors[5].Limits[0]
	fen.Value += 0.01
	fen.Headroom += 0.01
	b := layout(t, r)
	if got := strings.Join(b.fixedParts, " "); got != "P6-a P7-a P7-b" {
		t.Errorf("named are %q", got)
	}
	for _, a := range b.agrees {
		if !a.withinAllowed {
			t.Errorf("%s: workbook %v, report %v", a.what, a.here, a.report)
		}
	}
}

// A report whose parts contradict each other must show as a failed check, not be adjusted.
func TestContradictionShowsOnChecks(t *testing.T) {
	r := richReport()
	r.Receptors[0].Change += 0.02
	data := mustWrite(t, r)
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	found, err := f.SearchSheet("Checks", "change of P1")
	if err != nil || len(found) != 1 {
		t.Fatalf("the contradiction is not listed: %v, %v", found, err)
	}
	row := strings.TrimPrefix(found[0], "A")
	if got, _ := f.GetCellValue("Checks", "B"+row); got != resultWords(resultFail) {
		t.Errorf("it reads %q", got)
	}
}

// Only the rates to edit and the sign-off are open, every sheet is protected, and the sign-off is empty.
func TestOnlyRatesAndSignOffAreOpen(t *testing.T) {
	r := richReport()
	b := layout(t, r)
	open := map[string]int{}
	for _, s := range b.sheets() {
		for row := range s.rows {
			for c := range s.rows[row] {
				cell := &s.rows[row][c]
				if cell.look == nil || !cell.look.unlocked {
					continue
				}
				open[s.name]++
				if s == b.readMe && cell.kind != emptyCell {
					t.Errorf("the sign-off holds %q", cell.words)
				}
				if s == b.plan && c+1 != b.planRows.now {
					t.Errorf("cell %s of Plan is open", cellName(row+1, c+1))
				}
			}
		}
	}
	if len(open) != 2 || open["Plan"] != len(r.Wells) || open["Read me first"] == 0 {
		t.Errorf("open cells: %v", open)
	}
	f, err := excelize.OpenReader(bytes.NewReader(mustWrite(t, r)))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for _, sheet := range sheetNames {
		p, err := f.GetSheetProtection(sheet)
		if err != nil || p.Password != "" {
			t.Errorf("%s: protection %+v, %v", sheet, p, err)
		}
	}
	if got := f.GetSheetList(); strings.Join(got, "|") != strings.Join(sheetNames, "|") {
		t.Errorf("sheets are %v", got)
	}
	if props, err := f.GetCalcProps(); err != nil || props.FullCalcOnLoad == nil || !*props.FullCalcOnLoad {
		t.Errorf("the workbook does not ask for recalculation: %v", err)
	}
}

// Where there is no plan, page one says so in plain words and no cell calls the rates planned.
func TestNoPlanIsSaidPlainly(t *testing.T) {
	b := layout(t, conflictReport())
	if got := b.readMe.at(firstRow, 1).words; got != "No plan keeps all the limits entered" {
		t.Errorf("page one begins with %q", got)
	}
	for _, s := range b.sheets() {
		for row := range s.rows {
			for c := range s.rows[row] {
				if cell := &s.rows[row][c]; cell.look != nil && cell.look.fill == fillHead && strings.Contains(strings.ToLower(cell.words), "planned") {
					t.Errorf("%s!%s reads %q", s.name, cellName(row+1, c+1), cell.words)
				}
			}
		}
	}
}

// An empty report of one well must be written with every gap said, not left out.
func TestBarestReport(t *testing.T) {
	r := &plan.Report{Title: "Bare", Wells: []plan.WellResult{{ID: "W1", Mode: "decided", DutyHours: 24, Max: 10}}}
	data := mustWrite(t, r)
	f, err := excelize.OpenReader(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for sheet, words := range map[string]string{"Capture": "Not done: the report holds no capture.", "Checks": "Not done: the report holds no checks.",
		"Receptors": "No receptor of this kind was entered.", "Inputs and assumptions": "Not calibrated: no observation was given to compare the model with.",
		"Read me first": "Not calibrated: the model was not compared with any observed level or flow."} {
		if found, err := f.SearchSheet(sheet, words); err != nil || len(found) == 0 {
			t.Errorf("%s does not say %q (%v)", sheet, words, err)
		}
	}
	wellFormed(t, data)
}

// Terms must print what they compute: checked against an independent formula engine, with precedence that needs parentheses.
func TestTermsKeepPrecedence(t *testing.T) {
	a, b, c := number(7.5), number(-2), number(3)
	for _, x := range []term{a.minus(b.minus(c)), a.over(b.times(c)), a.minus(b).times(c), a.times(b.plus(c)).over(b.minus(c)), absolute(b.times(c)).minus(a),
		rounded(a.over(c), 4).times(b), a.over(b.over(c)), choose(less(b, c), a.plus(c), b).times(b)} {
		f := excelize.NewFile()
		if err := f.SetCellFormula("Sheet1", "A1", x.text); err != nil {
			t.Fatal(err)
		}
		got, err := f.CalcCellValue("Sheet1", "A1", excelize.Options{RawCellValue: true})
		if err != nil {
			t.Errorf("%s: %v", x.text, err)
			continue
		}
		want := excelizeNumber(x.value)
		if !sameContent(got, want) {
			t.Errorf("%s gives %s, want %s", x.text, got, want)
		}
		f.Close()
	}
}

// Joined cells that overlap make a damaged file.
func TestJoinedCellsDoNotOverlap(t *testing.T) {
	for _, r := range []*plan.Report{richReport(), stripReport(), conflictReport(), hostileReport()} {
		for _, s := range layout(t, r).sheets() {
			taken := map[[2]int]bool{}
			for _, m := range s.merges {
				for row := m[0]; row <= m[2]; row++ {
					for c := m[1]; c <= m[3]; c++ {
						if taken[[2]int{row, c}] {
							t.Errorf("%s!%s is joined twice", s.name, cellName(row, c))
						}
						taken[[2]int{row, c}] = true
						if c > m[1] && s.at(row, c).kind != emptyCell {
							t.Errorf("%s!%s lies under joined cells and holds %q", s.name, cellName(row, c), s.at(row, c).words)
						}
					}
				}
			}
		}
	}
}

// Beyond the range in which superposition holds, every sheet must say so.
func TestTableNotValidIsSaid(t *testing.T) {
	for words, spoil := range map[string]func(*plan.Report){
		"":                     func(r *plan.Report) {},
		"a spring would stop":  func(r *plan.Report) { r.Receptors[2].NoPumping = 100 },
		"a level falls below":  func(r *plan.Report) { r.Wells[0].AquiferTop = ptr(40.9) },
		"a spring would stop ": func(r *plan.Report) { r.Receptors[2].NoPumping, r.Wells[0].AquiferTop = 100, ptr(40.9) },
	} {
		r := richReport()
		spoil(r)
		b := layout(t, r)
		for _, s := range b.sheets() {
			got := s.at(validRow, 1).words
			if (got == "") != (words == "") || !strings.Contains(got, words) {
				t.Errorf("%s reads %q where %q is to be said", s.name, got, words)
			}
		}
	}
}

// No head's word may be cut and no number may show as a row of hashes: every width must cover the estimate.
func TestWidthsCoverNumbersAndHeads(t *testing.T) {
	for _, r := range []*plan.Report{richReport(), largeReport(40, 8)} {
		for _, s := range layout(t, r).sheets() {
			s.fitWidths()
			for row := range s.rows {
				for c := range s.rows[row] {
					cell := &s.rows[row][c]
					if cell.kind != numberCell || cell.look.size != textSize {
						continue
					}
					if need := textPixels(shownNumber(cell.number, cell.look.format), *cell.look); need > s.width(c+1)*digitPixels && !s.isJoined(row+1, c+1) {
						t.Errorf("%s!%s needs %.0f pixels and has %.0f", s.name, cellName(row+1, c+1), need, s.width(c+1)*digitPixels)
					}
				}
			}
		}
	}
}

func (s *sheet) isJoined(row, column int) bool {
	for _, m := range s.merges {
		if m[0] == row && m[1] <= column && column <= m[3] {
			return true
		}
	}
	return false
}
