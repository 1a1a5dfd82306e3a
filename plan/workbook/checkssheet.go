package workbook

import (
	"fmt"
	"math"
	"strings"
)

const checksEnd = 5

// fillChecks writes the checks, the numbers behind them, one check by hand and the workbook's check of itself.
func (b *book) fillChecks() {
	s := b.checks
	s.setWidths(1, 38, 15, 17, 17, 36)
	s.page = pageSetup{wide: 1, freezeRow: changedRow + 2}
	row := b.checkTable(firstRow)
	row = b.handTable(row + 1)
	row = b.resolvedTable(row + 1)
	row = b.agreementTable(row + 1)
	row = b.firmTable(row)
	b.auditTable(row + 1)
}

// resultWords writes a check's result so that it is seen without colour.
func resultWords(result string) string {
	switch result {
	case resultPass:
		return "○ pass"
	case resultFail:
		return "▲ FAIL"
	}
	return "– " + orWords(result, "not done")
}

func (b *book) checkTable(row int) int {
	s := b.checks
	row = s.sectionHead(row, checksEnd, "Checks of the plan")
	if len(b.report.Checks) == 0 {
		s.nothing(row, checksEnd, "Not done: the report holds no checks.")
		return row + 1
	}
	s.across(row, 1, checksEnd, b.checkCount(), label)
	row++
	s.heads(row, 1, "Check", "Result", "Detail", "", "")
	s.merge(row, 3, checksEnd)
	first := row + 1
	for _, c := range b.report.Checks {
		row++
		s.text(row, 1, c.Name, line)
		s.text(row, 2, resultWords(c.Result), strong)
		s.across(row, 3, checksEnd, c.Detail, line)
	}
	s.warnWords(2, first, row)
	return row + 1
}

// checkCount says how many checks passed, failed and were not done.
func (b *book) checkCount() string {
	passed, failed := 0, 0
	for _, c := range b.report.Checks {
		switch c.Result {
		case resultPass:
			passed++
		case resultFail:
			failed++
		}
	}
	return fmt.Sprintf("%d passed, %d failed, %d not done.", passed, failed, len(b.report.Checks)-passed-failed)
}

// handTable writes the hand calculation: the difference of drawdown between two radii around one well (Thiem 1906).
func (b *book) handTable(row int) int {
	s, h := b.checks, b.report.HandFormula
	row = s.sectionHead(row, checksEnd, "One check by hand: drawdown between two radii around a well, Q ln(r2/r1) / (2 pi T) (Thiem 1906)")
	if h == nil {
		s.across(row, 1, checksEnd, "– not done", label)
		return row + 1
	}
	if !(h.Near > 0 && h.Far > 0 && h.Transmissivity > 0) {
		s.across(row, 1, checksEnd, "– not done: the radii or the transmissivity are not above zero", label)
		return row + 1
	}
	s.heads(row, 1, "For well "+h.Well, ">Number", "Unit", "What it is", "")
	s.merge(row, 4, checksEnd)
	start := row + 1
	put := func(name string, x float64, format, unit, note string) {
		row++
		s.text(row, 1, name, line)
		s.value(row, 2, x, figures(format))
		s.text(row, 3, unit, line)
		s.across(row, 4, checksEnd, note, line)
	}
	put("Rate Q", h.Rate, rateFormat(h.Rate), "m³/d", "the planned rate")
	put("Transmissivity T", h.Transmissivity, rateFormat(h.Transmissivity), "m²/d", "at the well")
	put("Near radius r1", h.Near, decimals(figuresOf(h.Near, 4)), "m", "")
	put("Far radius r2", h.Far, decimals(figuresOf(h.Far, 4)), "m", "")
	rate, transmissivity := s.ref(s, start, 2), s.ref(s, start+1, 2)
	near, far := s.ref(s, start+2, 2), s.ref(s, start+3, 2)
	two := number(2)
	byHand := rate.times(logarithm(far.over(near))).over(two.times(circle()).times(transmissivity))
	row++
	hand := row
	s.text(row, 1, "Drawdown at r1 less drawdown at r2, by hand", line)
	s.formula(row, 2, byHand, figures("0.0000"))
	s.text(row, 3, "m", line)
	s.across(row, 4, checksEnd, "formula in the cell", line)
	put("The same in the model", h.ModelDrop, "0.0000", "m", h.Note)
	row++
	s.text(row, 1, "Model over hand, less 1", line)
	if byHand.value == 0 {
		s.text(row, 2, "–", figures(shareFormat))
	} else {
		s.formula(row, 2, s.ref(s, hand+1, 2).over(s.ref(s, hand, 2)).minus(number(1)), figures("0.00%"))
	}
	s.blank(row, 3, line)
	s.across(row, 4, checksEnd, "a few per cent are usual: other wells and edges bend the cone", line)
	return row + 1
}

// resolvedTable sets each receptor's superposed change beside the one of a full solve at the plan.
func (b *book) resolvedTable(row int) int {
	s := b.checks
	row = s.sectionHead(row, checksEnd, "Superposition: each receptor's change at the plan, and from a full solve at the plan")
	if len(b.facts.assessed) == 0 {
		s.nothing(row, checksEnd, "Not done: no receptor was assessed.")
		return row + 1
	}
	s.heads(row, 1, "Receptor", "Unit", ">Superposed", ">Full solve", ">Difference")
	for _, i := range b.facts.assessed {
		row++
		r := b.report.Receptors[i]
		f := figures(decimals(min(figuresOf(abs(r.Change), 5), 10)))
		s.text(row, 1, joinFilled(" · ", r.ID, r.Name), line)
		s.text(row, 2, unitWords(r.Unit), line)
		s.value(row, 3, r.Change, f)
		s.value(row, 4, r.ChangeResolved, f)
		s.formula(row, 5, s.ref(s, row, 3).minus(s.ref(s, row, 4)), figures("0.0E+00"))
	}
	return row + 1
}

// agreementTable says whether the workbook's formulas at the planned rates give what the report says.
func (b *book) agreementTable(row int) int {
	s := b.checks
	row = s.sectionHead(row, checksEnd, "The workbook against the plan: formulas at the planned rates beside the plan's own numbers")
	worst, failures := 0.0, 0
	for _, a := range b.agrees {
		if !a.withinAllowed {
			failures++
		}
		if a.scale > 0 {
			worst = math.Max(worst, abs(a.here-a.report)/a.scale)
		}
	}
	s.across(row, 1, checksEnd, fmt.Sprintf("%s compared, %d differ by more than %.0e of their size; the largest difference is %.1e of its size.",
		plural(len(b.agrees), "number was", "numbers were"), failures, agreeShare, worst), label)
	row++
	if len(b.fixedParts) > 0 {
		row = s.paragraph(row, checksEnd, "These limits carry a part that does not follow the rates, set so that the plan's own figure comes out: "+strings.Join(b.fixedParts, ", ")+".", wrapped)
	}
	if failures == 0 {
		return row
	}
	s.heads(row, 1, "What differs", "Result", ">Workbook", ">Plan", "")
	first := row + 1
	for _, a := range b.agrees {
		if a.withinAllowed {
			continue
		}
		row++
		s.text(row, 1, a.what, line)
		s.text(row, 2, resultWords(resultFail), strong)
		s.value(row, 3, a.here, figures(exactFormat))
		s.value(row, 4, a.report, figures(exactFormat))
		s.blank(row, 5, line)
	}
	s.warnWords(2, first, row)
	return row + 1
}

func (b *book) auditTable(row int) {
	s, a := b.checks, b.report.Audit
	row = s.sectionHead(row, checksEnd, "Numbers behind the checks")
	s.heads(row, 1, "Number", ">Value", "What it is", "", "")
	s.merge(row, 3, checksEnd)
	for _, l := range []struct {
		name, format string
		value        float64
		words        string
	}{
		{"Water balance error", "0.0E+00", a.BalanceError, "share of the throughflow, worst state"},
		{"Superposition error", "0.0E+00", a.SuperpositionError, "largest difference between superposed and re-solved changes, over the largest change"},
		{"Linear residual", "0.0E+00", a.LinearResidual, "of the solved equations, scaled"},
		{"Reciprocity error", "0.0E+00", a.Reciprocity, "exchange of receptor and well"},
		{"Capture sum error", "0.0E+00", a.CaptureSumError, "shares of a well's water add up to 1"},
		{"Violation of the limits in the optimum", "0.0E+00", a.PrimalViolation, "scaled"},
		{"Violation of the price conditions", "0.0E+00", a.DualViolation, "scaled"},
		{"Gap of the optimum", "0.0E+00", a.DualGap, "between the plan's aim and its bound, relative"},
		{"Factorisations", countFormat, float64(a.Factorisations), "of the aquifer's equations"},
		{"Solves", countFormat, float64(a.Solves), "with them"},
		{"Receptor quantities", countFormat, float64(a.Functionals), "each with one solve for its sensitivities"},
		{"Steps of the optimiser", countFormat, float64(a.Iterations), ""},
		{"Couplings of the wrong sign", countFormat, float64(a.WrongSigns), "in the aquifer's equations; none is best"},
	} {
		row++
		s.text(row, 1, l.name, line)
		s.value(row, 2, l.value, figures(l.format))
		s.across(row, 3, checksEnd, l.words, line)
	}
	row++
	s.text(row, 1, "Sensitivities below zero", line)
	s.value(row, 2, float64(len(a.NegativeSensitivities)), figures(countFormat))
	s.across(row, 3, checksEnd, wellList(a.NegativeSensitivities), line)
}
