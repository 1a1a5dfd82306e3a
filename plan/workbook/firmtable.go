package workbook

import "strings"

// firmTable writes what the field gives with one well out of service; nothing where it was not planned.
func (b *book) firmTable(row int) int {
	s, f := b.checks, b.report.Firm
	if f == nil || len(f.Lines) == 0 {
		return row
	}
	row = s.sectionHead(row+1, checksEnd, "Firm capacity: the largest total with one well out of service, whatever the demand")
	s.across(row, 1, checksEnd, "Planned without "+f.Note+"; every limit is kept.", label)
	row++
	s.heads(row, 1, "Well out of service", ">Total\nm³/d", ">Change\nm³/d", "What binds then", "")
	s.merge(row, 4, checksEnd)
	row++
	format := rateFormat(f.AllInService)
	s.text(row, 1, "none", line)
	s.value(row, 2, f.AllInService, figures(format))
	s.blank(row, 3, line)
	s.across(row, 4, checksEnd, "", line)
	for _, l := range f.Lines {
		row++
		name, binds := l.Well, strings.Join(l.Binds, "; ")
		if l.Recharges {
			name += " (recharges)"
		}
		switch {
		case !l.Feasible:
			binds = "▲ no rates keep every limit"
		case !l.Settled:
			binds += " (not settled to the last digit)"
		}
		s.text(row, 1, name, line)
		s.known(row, 2, l.Total, figures(format))
		s.known(row, 3, l.Change, figures(format))
		s.across(row, 4, checksEnd, binds, line)
	}
	return row + 1
}
