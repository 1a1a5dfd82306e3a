package workbook

// rowsOnPage is about how many lines a landscape page takes.
const rowsOnPage = 28

// fillContributions writes each well's part of each receptor's change, and its share, from the rates now.
func (b *book) fillContributions() {
	s, l := b.contributions, &b.sens
	receptors := b.facts.assessed
	s.setWidths(1, idWidth, nameWidth, 10, 11)
	const leading = 4
	for k := range receptors {
		s.setWidths(leading+1+k, matrixWidth)
	}
	s.page = pageSetup{landscape: true, titleColumns: 2, freezeRow: changedRow + 2, freezeColumn: 3, wide: 1}
	if b.totalWidth(s) > widestOnPage {
		s.page.wide = 0
	}
	s.text(firstRow, 1, "Contribution = sensitivity times rate now. A negative part comes from a recharging well; shares are of the whole change and add up to 100 %.", under)
	if len(receptors) == 0 {
		s.nothing(firstRow+1, leading, "No receptor was assessed.")
		return
	}
	last := leading + len(receptors)
	row := s.sectionHead(firstRow+1, last, "Contributions")
	if len(b.report.Wells) > longTable {
		s.page.titleRows = [2]int{row, row + 1}
	}
	row = b.receptorHeads(s, row, leading, true)
	first := row
	formats := b.contributionFormats()
	for i := range b.report.Wells {
		b.contributionLead(s, row, i)
		for k, rec := range receptors {
			slope := b.sensitivities.ref(s, l.first+i, l.column[rec])
			rate := b.sensitivities.ref(s, l.first+i, l.rate)
			s.formula(row, leading+1+k, slope.times(rate), figures(formats[k]))
		}
		row++
	}
	total := row
	s.across(row, 1, leading, "Change of the receptor", lineTotal)
	for k, rec := range receptors {
		s.formula(row, leading+1+k, sumOf(s.down(s, leading+1+k, first, row-1)), totals(formats[k]))
		b.agreeContributions(rec)
		b.agree("contributions to "+b.report.Receptors[rec].ID, s.at(row, leading+1+k).number, b.report.Receptors[rec].Change, b.gross(rec))
	}
	b.contributionShares(row+2, leading, first, total)
}

// contributionShares writes each part over the whole change; the parts begin at the row first and their sums stand in total.
func (b *book) contributionShares(row, leading, first, total int) {
	s, receptors := b.contributions, b.facts.assessed
	last := leading + len(receptors)
	if row > rowsOnPage/2 {
		s.page.rowBreaks = append(s.page.rowBreaks, row)
	}
	row = s.sectionHead(row, last, "Shares")
	row = b.receptorHeads(s, row, leading, false)
	firstShare := row
	for i := range b.report.Wells {
		b.contributionLead(s, row, i)
		for k := range receptors {
			sum := s.ref(s, total, leading+1+k)
			part := s.ref(s, first+i, leading+1+k)
			s.formula(row, leading+1+k, guarded(sum, part), figures(shareFormat))
		}
		row++
	}
	s.across(row, 1, leading, "Sum", lineTotal)
	for k := range receptors {
		s.formula(row, leading+1+k, sumOf(s.down(s, leading+1+k, firstShare, row-1)), totals(shareFormat))
	}
}

// agreeContributions compares the parts with those that the report lists.
func (b *book) agreeContributions(receptor int) {
	t := b.report.Contributions
	id := b.report.Receptors[receptor].ID
	for k, name := range t.Receptors {
		if name != id || k >= len(t.Values) {
			continue
		}
		for c, well := range t.Wells {
			if i, known := b.facts.well[well]; known && c < len(t.Values[k]) {
				b.agree("contribution of "+well+" to "+id, b.facts.slope[receptor][i]*b.report.Wells[i].Rate, t.Values[k][c], b.gross(receptor))
			}
		}
	}
}

// guarded is part/whole, or zero where the whole is zero.
func guarded(whole, part term) term {
	if whole.value == 0 {
		return call("IF", 0, whole.text+"=0", "0", part.within(bondProduct)+"/"+whole.within(bondAtom))
	}
	share := part.over(whole)
	return call("IF", share.value, whole.text+"=0", "0", share.text)
}

// gross is the sum of the sizes of a receptor's contributions at the plan; round-off is judged against it.
func (b *book) gross(receptor int) float64 {
	var sum float64
	for i, w := range b.report.Wells {
		sum += abs(b.facts.slope[receptor][i] * w.Rate)
	}
	return sum
}

func (b *book) contributionFormats() []string {
	formats := make([]string, len(b.facts.assessed))
	for k, rec := range b.facts.assessed {
		r := b.report.Receptors[rec]
		var parts []float64
		for i, w := range b.report.Wells {
			parts = append(parts, b.facts.slope[rec][i]*w.Rate)
		}
		formats[k] = unitFormat(r.Unit, smallLimits(r.Limits), parts...)
		if r.Unit == "m" {
			formats[k] = "#,##0.000" // parts of a drawdown that is itself shown to 0.01 m
		}
	}
	return formats
}

func (b *book) contributionLead(s *sheet, row, i int) {
	w := b.report.Wells[i]
	s.text(row, 1, w.ID, strong)
	s.text(row, 2, w.Name, line)
	s.text(row, 3, whoseWords(w.Others), line)
	from := b.sensitivities.lookOf(b.sens.first+i, b.sens.rate)
	s.formula(row, 4, b.sensitivities.ref(s, b.sens.first+i, b.sens.rate), from)
}

// receptorHeads writes the heads of a table with receptors across and returns the next row.
func (b *book) receptorHeads(s *sheet, row, leading int, units bool) int {
	s.heads(row, 1, "Well", "Name", "Whose", ">Rate now\nm³/d")
	for c := 1; c <= leading; c++ {
		s.blank(row+1, c, head)
		if units {
			s.blank(row+2, c, head)
		}
	}
	s.text(row+1, 1, "Receptor's name", head)
	for k, i := range b.facts.assessed {
		rec := b.report.Receptors[i]
		s.text(row, leading+1+k, rec.ID, headRight)
		s.text(row+1, leading+1+k, rec.Name, headRight)
		if units {
			s.text(row+2, leading+1+k, unitWords(rec.Unit), headRight)
		}
	}
	if units {
		s.text(row+2, 1, "Unit", head)
		return row + 3
	}
	return row + 2
}
