package workbook

import (
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// Columns of the sheet 'Evidence'.
const (
	evidenceEnd = 9
	checkColumn = 2
)

// WriteEvidence returns the bytes of audit.xlsx: one sheet, 'Evidence', that prints. The same evidence gives the same bytes. It fails, and
// says which cell is at fault, when a number is not finite.
func WriteEvidence(e *plan.Evidence) ([]byte, error) {
	r := &plan.Report{Title: e.Title, Reference: e.Reference, PreparedFor: e.PreparedFor, PreparedBy: e.PreparedBy, Program: e.Program, Status: plan.StatusOptimal}
	b := &book{file: excelize.NewFile(), report: r, looks: map[look]*look{}, styles: map[*look]int{}}
	b.evidence = &sheet{book: b, name: "Evidence", heights: map[int]float64{}}
	b.fillEvidence(e)
	if len(b.problems) == 0 {
		b.checkNumbers(reflect.ValueOf(e), "")
	}
	if err := b.err(); err != nil {
		return nil, err
	}
	return b.save()
}

func (b *book) fillEvidence(e *plan.Evidence) {
	s := b.evidence
	s.setWidths(1, 6, 30, 11, 14, 14, 14, 14, 14, 34)
	s.page = pageSetup{landscape: true, wide: 1, freezeRow: changedRow}
	s.text(titleRow, 1, "The evidence", title)
	s.heights[titleRow] = 30
	s.text(underRow, 1, joinFilled(" · ", e.Title, e.Reference, e.PreparedFor, e.Program), under)
	row := s.paragraph(underRow+2, evidenceEnd, e.Plan, wrapped)
	row = s.paragraph(row, evidenceEnd, e.Headline, with(wrapped, func(l *look) { l.bold = true }))
	row = s.evidenceLines(row+1, e)
	row = s.evidenceReasons(row+1, e)
	for i := range e.Balances {
		row = s.evidenceBalance(row+1, &e.Balances[i])
	}
	row = s.evidenceDifferences(row+1, e)
	row = s.evidenceMeshes(row+1, e)
	row = s.evidenceWater(row+1, e)
	for i := range e.Boundaries {
		row = s.evidenceBoundary(row+1, &e.Boundaries[i])
	}
	row = s.evidenceInward(row, e)
	row = s.evidenceRecord(row+1, e)
	s.page.lastRow, s.page.lastColumn = s.evidenceSignature(row+1), evidenceEnd
}

// smallFigure is the size below which a figure is shown with a power of ten.
const smallFigure = 1e-3

func evidenceFormat(x float64) string {
	if size := math.Abs(x); size > 0 && size < smallFigure {
		return "0.0E+00"
	}
	return exactFormat
}

// evidenceLines is the table of results.
func (s *sheet) evidenceLines(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "Checks")
	s.heads(row, 1, "No.", "What is checked", "Result", ">Found", ">Allowed", "Unit", "In words", "", "")
	s.merge(row, 7, evidenceEnd)
	first := row + 1
	for _, l := range e.Lines {
		row++
		s.text(row, 1, strconv.Itoa(l.Number), strong)
		s.text(row, checkColumn, l.Check, line)
		s.text(row, 3, resultWords(l.Result), strong)
		for k, x := range []*float64{l.Figure, l.Allowed} {
			if x == nil {
				s.text(row, 4+k, "–", rightWords)
			} else {
				s.value(row, 4+k, roundFigure(*x), figures(evidenceFormat(*x)))
			}
		}
		s.text(row, 6, l.Unit, line)
		s.across(row, 7, evidenceEnd, l.Sentence, line)
	}
	s.warnWords(3, first, row)
	return row + 1
}

// shownFigures is how many figures a check's result is shown with; audit.json holds it in full.
const shownFigures = 3

func roundFigure(x float64) float64 {
	if x == 0 || math.IsInf(x, 0) || math.IsNaN(x) {
		return x
	}
	power := math.Floor(math.Log10(math.Abs(x))) - (shownFigures - 1)
	if power < 0 {
		scale := math.Pow(10, -power)
		if rounded := math.Round(x*scale) / scale; !math.IsNaN(rounded) && !math.IsInf(rounded, 0) {
			return rounded
		}
		return x
	}
	return math.Round(x)
}

// evidenceSignature leaves room for the reviewer.
func (s *sheet) evidenceSignature(row int) int {
	row = s.sectionHead(row, evidenceEnd, "Review")
	row = s.paragraph(row, evidenceEnd, "This is a planning aid. It must be reviewed and signed by a qualified person under local rules. A check that fails is a reason to look, a check that passes is none to stop looking.", wrapped)
	field := with(wrapped, func(l *look) { l.bottom, l.unlocked, l.upright = borderThin, true, "bottom" })
	for _, name := range []string{"Name, licence number", "Remarks", "Date, signature"} {
		s.across(row, 1, 2, name, with(plain, func(l *look) { l.upright = "bottom" }))
		s.blank(row, 3, field)
		s.merge(row, 3, evidenceEnd)
		s.heights[row] = 26
		row++
	}
	return row
}

// evidenceReasons says how each check is made, why that much is allowed and what to do.
func (s *sheet) evidenceReasons(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "How it is checked, why that much is allowed, and what to do when it fails")
	s.heads(row, 1, "No.", "What is checked", "How", "", "", "Allowed because", "", "", "When it fails")
	s.merge(row, 3, 5)
	s.merge(row, 6, 8)
	for _, l := range e.Lines {
		row++
		s.text(row, 1, strconv.Itoa(l.Number), strong)
		s.text(row, checkColumn, l.Check, line)
		s.across(row, 3, 5, l.How, line)
		s.across(row, 6, 8, l.Reason, line)
		s.text(row, 9, l.Remedy, line)
	}
	return row + 1
}

// evidenceBalance sets the recomputed flows of a state beside the model's own.
func (s *sheet) evidenceBalance(row int, state *plan.EvidenceBalance) int {
	row = s.sectionHead(row, evidenceEnd, "Water balance "+state.State+", m³/d: recomputed, and as the model books it")
	s.heads(row, 1, "Feature", "", "Kind", ">In", ">Out", ">In, model", ">Out, model", ">Net, recomputed less model", "")
	s.merge(row, 1, 2)
	var all []float64
	for _, l := range state.Lines {
		all = append(all, l.In, l.Out)
	}
	format := figures(rateFormat(all...))
	first := row + 1
	for _, l := range state.Lines {
		row++
		s.across(row, 1, 2, l.Feature, line)
		s.text(row, 3, kindWords(l.Kind), line)
		for k, x := range []float64{l.In, l.Out, l.ModelIn, l.ModelOut} {
			s.value(row, 4+k, x, format)
		}
		s.formula(row, 8, s.ref(s, row, 4).minus(s.ref(s, row, 5)).minus(s.ref(s, row, 6)).plus(s.ref(s, row, 7)), figures("0.0E+00"))
		s.blank(row, 9, line)
	}
	row++
	s.across(row, 1, 3, "All", lineTotal)
	for c := 4; c <= 8; c++ {
		f := rateFormat(all...)
		if c == 8 {
			f = "0.0E+00"
		}
		s.formula(row, c, sumOf(s.down(s, c, first, row-1)), totals(f))
	}
	s.blank(row, 9, lineTotal)
	return s.paragraph(row+1, evidenceEnd, fmt.Sprintf("The largest residual of a node is %.1e m³/d, at %s.", state.Worst, state.WorstPlace), muted)
}

// evidenceDifferences shows, of each receptor, the largest sensitivity and the one farthest from its difference.
func (s *sheet) evidenceDifferences(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "Adjoint sensitivities beside the difference of two full solves, unit per m³/d")
	if len(e.Differences) == 0 {
		s.nothing(row, evidenceEnd, "Not done.")
		return row + 1
	}
	s.heads(row, 1, "Receptor", "", "Well", "Unit", ">Adjoint", ">Difference", ">Step\nm³/d", ">Error, share", "Which")
	s.merge(row, 1, 2)
	var order []string
	by := map[string][]int{}
	for i, d := range e.Differences {
		if by[d.Receptor] == nil {
			order = append(order, d.Receptor)
		}
		by[d.Receptor] = append(by[d.Receptor], i)
	}
	farthest := 0
	for i := range e.Differences {
		if share(e.Differences[i].Error) > share(e.Differences[farthest].Error) {
			farthest = i
		}
	}
	for _, r := range order {
		largest := by[r][0]
		for _, i := range by[r] {
			if math.Abs(e.Differences[i].Adjoint) > math.Abs(e.Differences[largest].Adjoint) {
				largest = i
			}
		}
		row++
		s.evidenceDifference(row, &e.Differences[largest], "largest sensitivity")
	}
	row++
	s.evidenceDifference(row, &e.Differences[farthest], "of all, the farthest from its difference")
	return s.paragraph(row+1, evidenceEnd, fmt.Sprintf("audit.json holds all %d. The error is a share of the receptor's largest sensitivity.", len(e.Differences)), muted)
}

func share(x *float64) float64 {
	if x == nil {
		return -1
	}
	return *x
}

func (s *sheet) evidenceDifference(row int, d *plan.DifferenceLine, which string) {
	s.across(row, 1, 2, d.Receptor, line)
	s.text(row, 3, d.Well, line)
	s.text(row, 4, unitWords(d.Unit), line)
	s.value(row, 5, d.Adjoint, figures("0.00000E+00"))
	s.known(row, 6, d.Difference, figures("0.00000E+00"))
	s.value(row, 7, d.Step, figures(rateFormat(d.Step)))
	s.known(row, 8, d.Error, figures("0.0E+00"))
	s.text(row, 9, joinFilled("; ", which, d.Note), line)
}

// evidenceMeshes shows the figures of the plan on three meshes.
func (s *sheet) evidenceMeshes(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "The plan's rates on three meshes: observed order and grid convergence index (Roache 1994)")
	if len(e.Convergence) == 0 || len(e.Meshes) != 3 {
		s.nothing(row, evidenceEnd, "Not done.")
		return row + 1
	}
	s.heads(row, 1, "Figure", "", "Unit", ">Coarse", ">Middle", ">Fine", ">Observed order", ">Index of the plan's mesh\n%", "Behaviour; Richardson's value")
	s.merge(row, 1, 2)
	row++
	s.across(row, 1, 3, "Nodes", line)
	for k, m := range e.Meshes {
		s.value(row, 4+k, float64(m.Nodes), figures(countFormat))
	}
	for c := 7; c <= 8; c++ {
		s.blank(row, c, line)
	}
	of := "the plan's mesh is the coarse one"
	if e.Meshes[2].OfPlan {
		of = "the plan's mesh is the fine one"
	}
	s.text(row, 9, of, line)
	for _, c := range e.Convergence {
		row++
		s.across(row, 1, 2, c.What+" "+c.ID, line)
		s.text(row, 3, unitWords(c.Unit), line)
		format := figures(decimals(min(figuresOf(largest(c.Values), 6), 10)))
		for k, v := range c.Values {
			s.value(row, 4+k, v, format)
		}
		s.known(row, 7, c.Order, figures("0.00"))
		s.known(row, 8, c.Index, figures("0.000"))
		words := c.Behaviour
		if c.Richardson != nil {
			words += fmt.Sprintf("; %.6g", *c.Richardson)
		}
		s.text(row, 9, words, line)
	}
	return row + 1
}

// evidenceWater shows where the pumped water comes from.
func (s *sheet) evidenceWater(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "Where the pumped water comes from")
	if len(e.Capture) == 0 {
		s.nothing(row, evidenceEnd, "Not done.")
		return row + 1
	}
	s.heads(row, 1, "Feature", "", "Kind", ">m³/d", ">Share", ">Available\nm³/d", "", "", "")
	s.merge(row, 1, 2)
	var flows []float64
	for _, c := range e.Capture {
		flows = append(flows, c.Flow)
	}
	for _, c := range e.Capture {
		row++
		s.across(row, 1, 2, c.Feature, line)
		s.text(row, 3, kindWords(c.Kind), line)
		s.value(row, 4, c.Flow, figures(rateFormat(flows...)))
		s.known(row, 5, c.Share, figures(shareFormat))
		s.known(row, 6, c.Available, figures(rateFormat(flows...)))
		for col := 7; col <= evidenceEnd; col++ {
			s.blank(row, col, line)
		}
	}
	return row + 1
}

// evidenceBoundary shows the receptors with one source taken away.
func (s *sheet) evidenceBoundary(row int, b *plan.BoundaryLine) int {
	row = s.sectionHead(row, evidenceEnd, "The plan's rates without "+kindWords(b.Kind)+" "+b.Feature)
	row = s.paragraph(row, evidenceEnd, b.Outcome, wrapped)
	if len(b.Receptors) == 0 || b.Receptors[0].Unit == "" {
		return row
	}
	s.heads(row, 1, "Receptor", "", "Unit", ">Change", ">Change without", ">Times", "Limited", "Passed without", "")
	s.merge(row, 1, 2)
	s.merge(row, 8, evidenceEnd)
	for _, r := range b.Receptors {
		row++
		format := figures(unitFormat(r.Unit, nil, r.With, r.Without))
		s.across(row, 1, 2, r.Receptor, line)
		s.text(row, 3, unitWords(r.Unit), line)
		s.value(row, 4, r.With, format)
		s.value(row, 5, r.Without, format)
		if r.Factor == nil {
			s.text(row, 6, "–", rightWords)
		} else {
			s.formula(row, 6, s.ref(s, row, 5).over(s.ref(s, row, 4)), figures("0.00"))
		}
		limited := ""
		if r.Limited {
			limited = "yes"
		}
		s.text(row, 7, limited, line)
		s.across(row, 8, evidenceEnd, strings.Join(r.Passed, ", "), line)
	}
	return row + 1
}

// evidenceInward lists where water comes in through a prescribed head.
func (s *sheet) evidenceInward(row int, e *plan.Evidence) int {
	if len(e.Inward) == 0 {
		return row
	}
	row = s.sectionHead(row+1, evidenceEnd, "Where water comes in through a prescribed head")
	s.heads(row, 1, "Edge, state", "", "Saline", ">Whole edge without pumping\nm³/d", ">At the plan\nm³/d", ">Length\nm", "Most near", "", "")
	s.merge(row, 1, 2)
	s.merge(row, 7, evidenceEnd)
	for _, t := range e.Inward {
		row++
		s.across(row, 1, 2, joinFilled(", ", t.Edge, t.State), line)
		salt := "no"
		if t.Saline {
			salt = "yes"
		}
		s.text(row, 3, salt, line)
		s.value(row, 4, t.NoPumping, figures(rateFormat(t.AtPlan, t.NoPumping)))
		s.value(row, 5, t.AtPlan, figures(rateFormat(t.AtPlan, t.NoPumping)))
		s.value(row, 6, t.Length, figures(countFormat))
		s.across(row, 7, evidenceEnd, t.Place, line)
	}
	return row + 1
}

// evidenceRecord lists what the audit was run with.
func (s *sheet) evidenceRecord(row int, e *plan.Evidence) int {
	row = s.sectionHead(row, evidenceEnd, "Settings and files")
	for _, x := range e.Settings {
		s.across(row, 1, 2, x.Name, line)
		s.across(row, 3, evidenceEnd, x.Value, line)
		row++
	}
	s.heads(row, 1, "File", "", "SHA-256", "", "", "", "", "", "")
	s.merge(row, 1, 2)
	s.merge(row, 3, evidenceEnd)
	for _, f := range e.Inputs {
		row++
		s.across(row, 1, 2, f.File, line)
		s.across(row, 3, evidenceEnd, f.SHA256, with(line, func(l *look) { l.font = fontEven }))
	}
	return row + 1
}
