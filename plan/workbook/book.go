package workbook

import (
	"fmt"
	"reflect"
	"strings"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// A book is the workbook while it is built.
type book struct {
	file     *excelize.File
	report   *plan.Report
	facts    facts
	unit     rateUnit
	looks    map[look]*look
	styles   map[*look]int
	problems []error
	names    nameTable

	readMe, plan, receptors, contributions, sensitivities, capture, inputs, checks *sheet
	states                                                                         *sheet // nil where there is one operating state

	evidence *sheet // the only sheet of an audit's workbook; nil in a plan's

	planRows  planLayout
	stateRows statesLayout
	sens      sensLayout
	quotas    []quotaLine
	limits    []limitLine
	watched   []receptorLine
	agrees    []agreement

	inputWells int      // row of the first well on Inputs and assumptions
	fixedParts []string // limits with a part that does not follow the rates
}

// Write returns the bytes of plan.xlsx for a report. The same report gives the same bytes. It fails, and says which cell or which
// part of the report is at fault, when a number is not finite or the report's parts do not fit together.
func Write(r *plan.Report) ([]byte, error) {
	unit, err := shownUnit(r.RateUnit)
	if err != nil {
		return nil, err
	}
	f, err := readFacts(r)
	if err != nil {
		return nil, err
	}
	b := &book{file: excelize.NewFile(), report: r, facts: f, unit: unit, looks: map[look]*look{}, styles: map[*look]int{}}
	b.fill()
	if len(b.problems) == 0 {
		b.checkNumbers(reflect.ValueOf(r), "")
	}
	if err := b.err(); err != nil {
		return nil, err
	}
	return b.save()
}

// sheetNames are the sheets in the reviewer's order.
var sheetNames = []string{"Read me first", "Plan", "Receptors", "Contributions", "Sensitivities", "Capture", "Inputs and assumptions", "Checks"}

func (b *book) sheets() []*sheet {
	if b.evidence != nil {
		return []*sheet{b.evidence}
	}
	all := []*sheet{b.readMe, b.plan, b.receptors}
	if b.states != nil {
		all = append(all, b.states)
	}
	return append(all, b.contributions, b.sensitivities, b.capture, b.inputs, b.checks)
}

// fill builds the sheets, those first that others refer to.
func (b *book) fill() {
	for i, s := range []**sheet{&b.readMe, &b.plan, &b.receptors, &b.contributions, &b.sensitivities, &b.capture, &b.inputs, &b.checks} {
		*s = &sheet{book: b, name: sheetNames[i], heights: map[int]float64{}}
	}
	b.layPlan()
	b.fillInputs()
	b.fillRates()
	b.fillSensitivities()
	b.fillReceptors()
	b.fillLevels()
	b.fillPlanFoot()
	b.fillStates()
	b.fillContributions()
	b.fillCapture()
	b.fillChecks()
	b.fillReadMe()
	b.fillHeads()
}

// Rows that all sheets share.
const (
	titleRow    = 1
	underRow    = 2
	changedRow  = 3 // live: are the rates those of the plan
	validRow    = 4 // live: does the table still hold
	firstRow    = 6 // of a sheet's own content
	headWords   = "Pumping plan"
	changedText = "changed by hand: prices, capture and checks refer to the plan"
	warnSign    = "▲ "
)

// fillHeads writes the lines that stand in the same place on every sheet.
func (b *book) fillHeads() {
	master := b.plan
	changed := chooseWords(more(b.planRows.changed, number(0)), words(warnSign+b.says(changedText)), words(b.asPlanned()))
	master.phrase(changedRow, 1, changed, banner)
	broken := chooseWords(more(b.brokenSprings(), number(0)), words(warnSign+"table not valid: a spring would stop at these rates, its flow is not linear any more"),
		chooseWords(more(b.brokenLevels(), number(0)), words(warnSign+"table not valid: a level falls below the aquifer's top, the aquifer is not confined there"), words("")))
	master.phrase(validRow, 1, broken, banner)
	for _, column := range []int{b.planRows.idAgain, b.planRows.idLevels} { // further printed pages of Plan
		master.text(titleRow, column, master.name+", continued", title)
		master.phrase(changedRow, column, master.wordRef(master, changedRow, 1), banner)
		master.phrase(validRow, column, master.wordRef(master, validRow, 1), banner)
		master.warnState(column)
	}
	reference := joinFilled(" · ", b.report.Title, b.report.Reference, b.report.PreparedFor)
	for _, s := range b.sheets() {
		s.text(titleRow, 1, s.name, title)
		s.heights[titleRow] = 30
		s.text(underRow, 1, reference, under)
		if s == b.readMe {
			s.text(titleRow, 1, b.report.Title, title)
			s.text(underRow, 1, joinFilled(" · ", headWords, b.report.Reference), under)
		}
		if s != master {
			s.phrase(changedRow, 1, master.wordRef(s, changedRow, 1), banner)
			s.phrase(validRow, 1, master.wordRef(s, validRow, 1), banner)
		}
		s.heights[changedRow] = 18
		s.warnState(1)
	}
}

// asPlanned says what the rates are before anything is edited.
func (b *book) asPlanned() string {
	if b.noPlan() && b.report.Status != plan.StatusInfeasible && b.report.Conflict == nil {
		return warnSign + "There is no plan: the search for one did not end. The rates shown are not a plan."
	}
	if b.noPlan() {
		return warnSign + "No plan keeps all limits. The rates shown are a starting point, not a plan."
	}
	if b.givenRates() {
		return "Rates as given; nothing was planned."
	}
	return "Rates as planned."
}

// warnWidth is about the width of the longest warning, in digits.
const warnWidth = 76

// warnState marks the two lines on the state of the rates where they warn.
func (s *sheet) warnState(column int) {
	last, wide := column, s.width(column)
	for ; wide < warnWidth; last++ {
		wide += s.width(last + 1)
	}
	for row := changedRow; row <= validRow; row++ {
		first := cellName(row, column)
		s.marks = append(s.marks, mark{first + ":" + cellName(row, last), fmt.Sprintf(`LEFT($%s,1)="▲"`, first), warnMark})
		for c := column + 1; c <= last; c++ {
			s.blank(row, c, banner)
		}
	}
}

func joinFilled(between string, parts ...string) string {
	var filled []string
	for _, p := range parts {
		if p != "" {
			filled = append(filled, p)
		}
	}
	return strings.Join(filled, between)
}

// nothing is said in a table that has no lines.
func (s *sheet) nothing(row, last int, words string) {
	s.across(row, 1, last, words, muted)
}

// sectionHead starts a part of a sheet.
func (s *sheet) sectionHead(row, last int, words string) int {
	for c := 1; c <= last; c++ {
		s.blank(row, c, section)
	}
	s.text(row, 1, s.book.says(words), section)
	s.heights[row] = 24
	return row + 1
}

// noPlan tells whether the report says why there is no plan; its rates are then a starting point or the last ones tried.
func (b *book) noPlan() bool {
	switch b.report.Status {
	case plan.StatusInfeasible, plan.StatusNotConverged, plan.StatusNumericalFailure:
		return true
	}
	return b.report.Conflict != nil
}

// givenRates tells whether the report looks at rates that somebody gave, without planning any.
func (b *book) givenRates() bool { return b.report.Status == plan.StatusGivenRates }

// What the workbook's own words become where there is no plan, and where the rates were given.
var (
	startWords = strings.NewReplacer("At the plan", "At the start", "at the plan", "at the start", "Planned rate", "Starting rate", "planned rate", "starting rate",
		"less planned", "less start", "refer to the plan", "refer to the starting rates", "What holds the plan: binding limits", "Limits reached or passed at the starting rates",
		"differs from the plan", "differs from the start", "those of the plan", "the starting ones", "of the plan", "at the starting rates")
	givenWords = strings.NewReplacer("At the plan", "As given", "at the plan", "as given", "Planned rate", "Given rate", "planned rate", "given rate",
		"less planned", "less given", "refer to the plan", "refer to the given rates", "What holds the plan: binding limits", "Limits reached or passed at the given rates",
		"differs from the plan", "differs from the given one", "those of the plan", "the given ones", "of the plan", "at the given rates")
)

// says adapts the workbook's own words to a report that holds no plan; never the report's words.
func (b *book) says(words string) string {
	switch {
	case b.noPlan():
		return startWords.Replace(words)
	case b.givenRates():
		return givenWords.Replace(words)
	}
	return words
}

// paragraph writes words over the first columns and returns the next row.
func (s *sheet) paragraph(row, last int, words string, l look) int {
	s.across(row, 1, last, words, l)
	return row + 1
}

// heads writes a line of column heads from a column on; a head that starts with '>' stands above numbers.
func (s *sheet) heads(row, column int, texts ...string) {
	for k, t := range texts {
		l := head
		if strings.HasPrefix(t, ">") {
			t, l = t[1:], headRight
		}
		s.text(row, column+k, s.book.says(t), l)
	}
}

// An agreement compares what the workbook's formulas give at the planned rates with what the report says.
type agreement struct {
	what          string
	here, report  float64
	scale         float64
	withinAllowed bool
}

// agreeShare is how far a formula at the planned rates may be from the report's number, as a share of the numbers' own size: far
// above round-off in a sum over hundreds of wells, far below what a displayed figure shows.
const agreeShare = 1e-7

// agree notes a comparison.
func (b *book) agree(what string, here, report, scale float64) {
	scale = largest([]float64{here, report, scale})
	a := agreement{what: what, here: here, report: report, scale: scale}
	a.withinAllowed = scale == 0 || abs(here-report) <= agreeShare*scale
	b.agrees = append(b.agrees, a)
}

func abs(x float64) float64 {
	if x < 0 {
		return -x
	}
	return x
}

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}
