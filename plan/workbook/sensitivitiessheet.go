package workbook

import "springbound/plan"

// sensLayout says where things stand on Sensitivities: wells down, receptors across, and below, wells down and wells' nodes across.
type sensLayout struct {
	first, last         int         // rows of the wells in the first table
	rate, own, existing int         // columns
	present, licensed   int         // columns
	column              map[int]int // column of a receptor, by its index in the report
	wellFirst, wellLast int         // rows of the wells in the second table
	wellColumn          map[int]int // column of a well's node in the second table, by its index in the report
}

const (
	sensHeadRow  = 8
	sensLeading  = 8 // columns before the first receptor
	matrixWidth  = 11.0
	idWidth      = 11.0
	nameWidth    = 18.0
	widestOnPage = 190.0 // digits; wider tables run over several pages across
)

// fillSensitivities writes the two matrices that all live figures come from.
func (b *book) fillSensitivities() {
	s, r := b.sensitivities, b.report
	n := len(r.Wells)
	b.sens = sensLayout{first: sensHeadRow + 3, last: sensHeadRow + 2 + n, rate: 4, own: 5, existing: 6, present: 7, licensed: 8,
		column: map[int]int{}, wellColumn: map[int]int{}}
	l := &b.sens
	s.setWidths(1, idWidth, nameWidth, 9, 10, 7.5, 8.5, 10, 10)
	across := max(len(b.facts.assessed), len(b.facts.wellDrop))
	for k := 0; k < across; k++ {
		s.setWidths(sensLeading+1+k, matrixWidth)
	}
	s.page = pageSetup{landscape: true, titleColumns: 2, freezeRow: changedRow + 2, freezeColumn: 3, wide: 1}
	if b.totalWidth(s) > widestOnPage {
		s.page.wide = 0
	}
	s.text(firstRow, 1, "Change of each receptor per unit rate of each well. Wells run down and receptors across, so a column times the rates, summed, is a receptor's change.", under)
	s.sectionHead(sensHeadRow-1, sensLeading+max(1, len(b.facts.assessed)), "Receptors: change per rate")
	s.heads(sensHeadRow, 1, "Well", "Name", "Whose", ">Rate now\nm³/d", ">Own well\n1 yes, 0 no", ">Existing user\n1 yes, 0 no", ">Present rate\nm³/d", ">Licensed rate\nm³/d")
	for c := 1; c <= sensLeading; c++ {
		s.blank(sensHeadRow+1, c, head)
		s.blank(sensHeadRow+2, c, head)
	}
	s.text(sensHeadRow+1, 1, "Receptor's name", head)
	s.text(sensHeadRow+2, 1, "Unit", head)
	for k, i := range b.facts.assessed {
		column := sensLeading + 1 + k
		l.column[i] = column
		rec := r.Receptors[i]
		s.text(sensHeadRow, column, rec.ID, headRight)
		s.text(sensHeadRow+1, column, rec.Name, headRight)
		s.text(sensHeadRow+2, column, changeUnitPerRate(rec.Unit), headRight)
	}
	l.last = l.first + n - 1
	for i := range r.Wells {
		b.sensitivityRow(i)
	}
	if len(b.facts.assessed) == 0 {
		s.text(sensHeadRow, sensLeading+1, "No receptor was assessed.", under)
	}
	if n > longTable {
		s.page.titleRows = [2]int{sensHeadRow, sensHeadRow + 2}
		s.page.lastRow, s.page.lastColumn = l.last+2, sensLeading+max(1, len(b.facts.assessed))
	}
	row := b.fillWellMatrix(l.last + 2)
	row = b.fillErrorMatrix(row+1, "Receptors: what the mesh makes of the change per rate (estimate, computed less exact)", r.SensitivityErrors)
	b.fillErrorMatrix(row+1, "Receptors: the same, from terms that cannot cancel (bound)", r.SensitivityErrorBounds)
}

// fillErrorMatrix writes the mesh's errors of the sensitivities, as the first table stands, and returns the row below; nothing where they were not
// estimated.
func (b *book) fillErrorMatrix(row int, title string, errors plan.Table) int {
	if len(errors.Values) == 0 {
		return row
	}
	s, l := b.sensitivities, &b.sens
	row = s.sectionHead(row+1, sensLeading+max(1, len(b.facts.assessed)), title)
	s.heads(row, 1, "Well", "Name")
	for c := 3; c <= sensLeading; c++ {
		s.blank(row, c, head)
	}
	of := map[string][]float64{}
	for k, id := range errors.Receptors {
		of[id] = errors.Values[k]
	}
	for _, i := range b.facts.assessed {
		s.text(row, l.column[i], b.report.Receptors[i].ID, headRight)
	}
	for j, w := range b.report.Wells {
		row++
		s.text(row, 1, w.ID, strong)
		s.text(row, 2, w.Name, line)
		for c := 3; c <= sensLeading; c++ {
			s.blank(row, c, line)
		}
		for _, i := range b.facts.assessed {
			if values := of[b.report.Receptors[i].ID]; values != nil {
				s.value(row, l.column[i], values[j], figures(scienceFormat))
			}
		}
	}
	return row + 1
}

func changeUnitPerRate(unit string) string {
	switch unit {
	case "m":
		return "m per m³/d"
	case unitFlow:
		return "m³/d per m³/d"
	}
	return "1 per m³/d"
}

func (b *book) totalWidth(s *sheet) float64 {
	var sum float64
	for c := range s.widths {
		sum += s.width(c + 1)
	}
	return sum
}

// sensitivityRow writes one well: its rate now, whose it is, its rates in the baselines and its sensitivities.
func (b *book) sensitivityRow(i int) {
	s, l, w := b.sensitivities, &b.sens, b.report.Wells[i]
	row := l.first + i
	s.text(row, 1, w.ID, strong)
	s.text(row, 2, w.Name, line)
	s.text(row, 3, whoseWords(w.Others), line)
	s.formula(row, l.rate, b.plan.ref(s, b.planRows.first+i, b.planRows.now), figures(b.plan.lookOf(b.planRows.first+i, b.planRows.now).format))
	own, existing := 1.0, 0.0
	if w.Others {
		own, existing = 0, 1
	}
	s.value(row, l.own, own, figures(countFormat))
	s.value(row, l.existing, existing, figures(countFormat))
	s.known(row, l.present, w.Present, figures(rateFormat(value(w.Present))))
	s.known(row, l.licensed, w.Licensed, figures(rateFormat(value(w.Licensed))))
	for _, k := range b.facts.assessed {
		s.value(row, l.column[k], b.facts.slope[k][i], figures(scienceFormat))
	}
}

func value(x *float64) float64 {
	if x == nil {
		return 0
	}
	return *x
}

// longTable is the number of wells from which a table runs over several pages: its heads repeat, and matrices of wells by wells stay
// on the screen.
const longTable = 25

// fillWellMatrix writes the drawdown per rate at the wells' nodes and returns the row below.
func (b *book) fillWellMatrix(row int) int {
	s, l := b.sensitivities, &b.sens
	nodes := b.facts.wellDrop
	row = s.sectionHead(row+1, sensLeading+max(1, len(nodes)), "Wells: drawdown in the aquifer at each well per rate (head of a column: the well where the level falls)")
	if len(nodes) == 0 {
		s.nothing(row, sensLeading, "Not known: levels in wells do not follow the rates in this workbook.")
		return row + 1
	}
	s.heads(row, 1, "Pumping well", "Name")
	if s.page.lastRow > 0 {
		s.text(row-2, 1, "Not printed: the drawdown per rate at the wells, below on this sheet.", under)
	}
	for c := 3; c <= sensLeading; c++ {
		s.blank(row, c, head)
		s.blank(row+1, c, head)
	}
	s.text(row+1, 1, "Unit", head)
	s.blank(row+1, 2, head)
	for k, i := range nodes {
		column := sensLeading + 1 + k
		l.wellColumn[i] = column
		s.text(row, column, b.report.Wells[i].ID, headRight)
		s.text(row+1, column, "m per m³/d", headRight)
	}
	l.wellFirst = row + 2
	l.wellLast = l.wellFirst + len(b.report.Wells) - 1
	for j, w := range b.report.Wells {
		s.text(l.wellFirst+j, 1, w.ID, strong)
		s.text(l.wellFirst+j, 2, w.Name, line)
		for c := 3; c <= sensLeading; c++ {
			s.blank(l.wellFirst+j, c, line)
		}
		for _, i := range nodes {
			s.value(l.wellFirst+j, l.wellColumn[i], b.report.Wells[i].DrawdownByWell[j], figures(scienceFormat))
		}
	}
	return l.wellLast + 1
}

// slopes is a receptor's column of sensitivities, as the sheet from refers to it.
func (b *book) slopes(from *sheet, receptor int) span {
	return b.sensitivities.down(from, b.sens.column[receptor], b.sens.first, b.sens.last)
}

func (b *book) wellColumn(from *sheet, column int) span {
	return b.sensitivities.down(from, column, b.sens.first, b.sens.last)
}
