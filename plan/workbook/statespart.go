package workbook

import "strings"

// statesPart lists the operating states on page one: total, demand and what binds in each; nothing where there is one.
func (b *book) statesPart(row int) int {
	s, states := b.readMe, b.report.States
	if len(states) == 0 {
		return row
	}
	row = s.sectionHead(row+1, readEnd, "Operating states, planned together")
	s.heads(row, 1, "State", ">Days a year", ">Total at the plan\nm³/d", "What binds in it", "")
	s.merge(row, 4, readEnd)
	for _, st := range states {
		row++
		s.text(row, 1, st.Name, strong)
		s.known(row, 2, st.Days, figures(exactFormat))
		s.value(row, 3, st.Total, figures(rateFormat(st.Total)))
		s.across(row, 4, readEnd, orWords(strings.Join(st.Binds, "; "), "no limit"), line)
	}
	for _, y := range b.report.YearQuotas {
		row++
		words := "Yearly: " + y.Quota.Name + ", " + figureText(y.Quota.Sum*daysPerYear) + " m³ of " + figureText(y.Quota.Entered) + " m³"
		if y.Quota.Binds {
			words += "; binds"
		}
		s.across(row, 1, readEnd, words, line)
	}
	row++
	return s.paragraph(row, readEnd, "The other sheets show the state "+b.report.State+"; sheet Operating states holds them all.", muted) + 1
}
