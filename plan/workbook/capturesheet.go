package workbook

// fillCapture writes where the pumped water comes from: by feature at the plan and now, and each well's shares below. Wells run
// down and features across in the lower table, so that a column of shares times the rates is a feature's flow.
func (b *book) fillCapture() {
	s, r := b.capture, b.report
	s.setWidths(1, 13, 20, 12, 11, 12, 11, 13)
	const summaryEnd, leading = 7, 4
	for c := leading; c < leading+len(r.Capture)+1; c++ {
		if c+1 > summaryEnd {
			s.setWidths(c+1, 12)
		}
	}
	s.page = pageSetup{landscape: true, wide: 1, freezeRow: changedRow + 2, titleColumns: 2}
	if b.totalWidth(s) > widestOnPage {
		s.page.wide = 0
	}
	s.text(firstRow, 1, "At steady state all pumped water is water that would otherwise have gone elsewhere: more from one feature, or less to another.", under)
	row := s.sectionHead(firstRow+1, max(summaryEnd, leading+len(r.Capture)+1), "Where the pumped water comes from")
	if len(r.Capture) == 0 {
		s.nothing(row, summaryEnd, "Not done: the report holds no capture.")
		return
	}
	summary := row
	table := summary + 1 + len(r.Capture) + 2
	if len(r.CaptureWells) > longTable {
		s.page.titleRows = [2]int{table + 1, table + 2}
	}
	b.captureByWell(table, leading)
	b.captureSummary(summary, table+3, leading)
}

// captureSummary writes each feature's flow and share; the shares by well begin at the row lower.
func (b *book) captureSummary(summary, lower, leading int) {
	s, r := b.capture, b.report
	first := summary + 1
	total := first + len(r.Capture)
	last := lower + len(r.CaptureWells) - 1
	s.heads(summary, 1, "Feature", "", "Kind", ">Flow at the plan\nm³/d", ">Share at the plan", ">Flow now\nm³/d", ">Share now")
	s.heads(summary, 8, ">Available flow\nm³/d")
	s.setWidths(8, 12)
	s.merge(summary, 1, 2)
	flows := make([]float64, len(r.Capture))
	for k, c := range r.Capture {
		flows[k] = c.Flow
	}
	format := rateFormat(flows...)
	rates := s.down(s, 4, lower, last)
	for k, c := range r.Capture {
		row := first + k
		s.across(row, 1, 2, c.Feature, line)
		s.text(row, 3, kindWords(c.Kind), line)
		s.value(row, 4, c.Flow, figures(format))
		if c.Share != nil {
			s.value(row, 5, *c.Share, figures(shareFormat))
		} else {
			s.text(row, 5, "–", figures(shareFormat))
		}
		s.formula(row, 6, sumProduct(s.down(s, leading+1+k, lower, last), rates), figures(format))
		s.known(row, 8, c.Available, figures(rateFormat(value(c.Available))))
		b.agree("water captured from "+c.Feature, s.at(row, 6).number, c.Flow, largest(flows))
	}
	s.across(total, 1, 3, "All features", lineTotal)
	s.formula(total, 4, sumOf(s.down(s, 4, first, total-1)), totals(format))
	s.formula(total, 5, sumOf(s.down(s, 5, first, total-1)), totals(shareFormat))
	s.formula(total, 6, sumOf(s.down(s, 6, first, total-1)), totals(format))
	whole := s.ref(s, total, 6)
	for k := range r.Capture {
		s.formula(first+k, 7, guarded(whole, s.ref(s, first+k, 6)), figures(shareFormat))
	}
	s.formula(total, 7, sumOf(s.down(s, 7, first, total-1)), totals(shareFormat))
	s.blank(total, 8, lineTotal)
}

// captureByWell writes each well's shares.
func (b *book) captureByWell(row, leading int) {
	s, r := b.capture, b.report
	row = s.sectionHead(row, leading+len(r.Capture)+1, "Share of each well's water, whatever its rate")
	s.heads(row, 1, "Well", "Name", "Whose", ">Rate now\nm³/d")
	for c := 1; c <= leading; c++ {
		s.blank(row+1, c, head)
	}
	s.text(row+1, 1, "Kind of feature", head)
	for k, c := range r.Capture {
		s.text(row, leading+1+k, c.Feature, headRight)
		s.text(row+1, leading+1+k, kindWords(c.Kind), headRight)
	}
	end := leading + 1 + len(r.Capture)
	s.text(row, end, "Sum", headRight)
	s.blank(row+1, end, headRight)
	row += 2
	for j, id := range r.CaptureWells {
		i := b.facts.well[id]
		s.text(row, 1, id, strong)
		s.text(row, 2, r.Wells[i].Name, line)
		s.text(row, 3, whoseWords(r.Wells[i].Others), line)
		planRow := b.planRows.first + i
		s.formula(row, 4, b.plan.ref(s, planRow, b.planRows.now), figures(b.plan.lookOf(planRow, b.planRows.now).format))
		for k, c := range r.Capture {
			s.value(row, leading+1+k, c.ShareByWell[j], figures(shareFormat))
		}
		s.formula(row, end, sumOf(s.along(s, row, leading+1, end-1)), figures(shareFormat))
		row++
	}
}
