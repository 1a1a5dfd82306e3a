package workbook

import (
	"bytes"
	"fmt"

	"github.com/xuri/excelize/v2"
)

// fixedTime is the file's date of making and of change: a date of the run would make equal plans unequal files. The run is known
// by the hashes of its inputs.
const fixedTime = "2000-01-01T00:00:00Z"

// save writes the grids into the file and returns its bytes.
func (b *book) save() ([]byte, error) {
	f := b.file
	defer f.Close()
	if err := f.SetDefaultFont(fontPlain); err != nil {
		return nil, fmt.Errorf("workbook: %w", err)
	}
	for i, s := range b.sheets() {
		if err := b.saveSheet(i, s); err != nil {
			return nil, fmt.Errorf("workbook, sheet %q: %w", s.name, err)
		}
	}
	if err := b.saveProperties(); err != nil {
		return nil, fmt.Errorf("workbook: %w", err)
	}
	var out bytes.Buffer
	if err := f.Write(&out); err != nil {
		return nil, fmt.Errorf("workbook: %w", err)
	}
	data, err := inOrder(out.Bytes())
	if err != nil {
		return nil, fmt.Errorf("workbook: %w", err)
	}
	return data, nil
}

func (b *book) saveSheet(i int, s *sheet) error {
	f := b.file
	if i == 0 {
		if err := f.SetSheetName(f.GetSheetName(0), s.name); err != nil {
			return err
		}
	} else if _, err := f.NewSheet(s.name); err != nil {
		return err
	}
	s.fitWidths()
	if err := s.setUp(f); err != nil {
		return err
	}
	w, err := f.NewStreamWriter(s.name)
	if err != nil {
		return err
	}
	if err := s.writeRows(w); err != nil {
		return err
	}
	if err := s.writeMarks(f); err != nil {
		return err
	}
	if err := s.finish(f, b.report.Title); err != nil {
		return err
	}
	return w.Flush()
}

func (s *sheet) writeRows(w *excelize.StreamWriter) error {
	for c := range s.widths {
		if err := w.SetColWidth(c+1, c+1, s.width(c+1)); err != nil {
			return err
		}
	}
	if s.page.freezeRow > 0 {
		corner := cellName(s.page.freezeRow, max(1, s.page.freezeColumn))
		panes := &excelize.Panes{Freeze: true, YSplit: s.page.freezeRow - 1, XSplit: max(0, s.page.freezeColumn-1), TopLeftCell: corner, ActivePane: "bottomLeft"}
		if panes.XSplit > 0 {
			panes.ActivePane = "bottomRight"
		}
		if err := w.SetPanes(panes); err != nil {
			return err
		}
	}
	joined := map[[2]int]int{}
	for _, m := range s.merges {
		joined[[2]int{m[0], m[1]}] = m[3]
		if err := w.MergeCell(cellName(m[0], m[1]), cellName(m[2], m[3])); err != nil {
			return err
		}
	}
	for r := 1; r <= len(s.rows); r++ {
		line, err := s.excelRow(r)
		if err != nil {
			return err
		}
		height, set := s.heights[r]
		if !set {
			ends := map[int]int{}
			for c := range s.rows[r-1] {
				if to, ok := joined[[2]int{r, c + 1}]; ok {
					ends[c+1] = to
				}
			}
			height = s.rowHeight(r, ends)
		}
		if len(line) == 0 && height == 0 {
			continue
		}
		if err := w.SetRow(cellName(r, 1), line, excelize.RowOpts{Height: height}); err != nil {
			return err
		}
	}
	for _, c := range s.page.groupEnds {
		if c < s.page.groupEnds[len(s.page.groupEnds)-1] {
			if err := w.InsertPageBreak(cellName(1, c+1)); err != nil {
				return err
			}
		}
	}
	for _, r := range s.page.rowBreaks {
		if err := w.InsertPageBreak(cellName(r, 1)); err != nil {
			return err
		}
	}
	return nil
}

func (s *sheet) excelRow(r int) ([]any, error) {
	line := make([]any, len(s.rows[r-1]))
	for c := range s.rows[r-1] {
		from := &s.rows[r-1][c]
		if from.look == nil {
			continue
		}
		id, err := s.book.style(from.look)
		if err != nil {
			return nil, err
		}
		to := excelize.Cell{StyleID: id, Formula: from.formula}
		switch from.kind {
		case numberCell:
			to.Value = from.number
		case wordCell:
			to.Value = from.words
		}
		line[c] = to
	}
	return line, nil
}

func (s *sheet) writeMarks(f *excelize.File) error {
	for _, m := range s.marks {
		id, err := f.NewConditionalStyle(m.look.excel(false))
		if err != nil {
			return err
		}
		if err := f.SetConditionalFormat(s.name, m.block, []excelize.ConditionalFormatOptions{{Type: "formula", Criteria: m.formula, Format: &id}}); err != nil {
			return err
		}
	}
	for _, v := range s.checks {
		rule := excelize.NewDataValidation(true)
		rule.Sqref = v.block
		if err := rule.SetRange(-largestRate, largestRate, excelize.DataValidationTypeDecimal, excelize.DataValidationOperatorBetween); err != nil {
			return err
		}
		rule.SetInput("Rate to try", "Daily mean in m³/d; pumping is positive, recharge negative.")
		rule.SetError(excelize.DataValidationErrorStyleStop, "Not a rate", "Enter a number in m³/d.")
		if err := f.AddDataValidation(s.name, rule); err != nil {
			return err
		}
	}
	return nil
}

// largestRate bounds what may be typed as a rate, only to keep out what is no rate at all [m³/d].
const largestRate = 1e9

func (b *book) saveProperties() error {
	f := b.file
	for _, n := range b.names.list {
		if err := f.SetDefinedName(&excelize.DefinedName{Name: n.name, RefersTo: n.refersTo}); err != nil {
			return fmt.Errorf("name %s for %s: %w", n.name, n.refersTo, err)
		}
	}
	for _, s := range b.sheets() {
		if s.page.lastRow > 0 {
			area := s.blockText(nil, 1, 1, s.page.lastRow, s.page.lastColumn)
			if err := f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Area", RefersTo: area, Scope: s.name}); err != nil {
				return err
			}
		}
		if t := s.printTitles(); t != "" {
			if err := f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", RefersTo: t, Scope: s.name}); err != nil {
				return err
			}
		}
	}
	if err := f.SetDocProps(&excelize.DocProperties{Title: cleanText(b.report.Title), Creator: cleanText(b.report.PreparedBy), Subject: headWords,
		Description: standingLine, Created: fixedTime, Modified: fixedTime, LastModifiedBy: cleanText(b.report.Program)}); err != nil {
		return err
	}
	if err := f.SetAppProps(&excelize.AppProperties{Application: "springbound"}); err != nil {
		return err
	}
	return f.SetCalcProps(&excelize.CalcPropsOptions{FullCalcOnLoad: pointer(true)})
}

// printTitles is the reference of the rows and columns that repeat on every printed page.
func (s *sheet) printTitles() string {
	var parts []string
	if n := s.page.titleColumns; n > 0 {
		last := cellName(1, n)
		parts = append(parts, s.prefix(nil)+"$A:$"+last[:len(last)-1])
	}
	if t := s.page.titleRows; t[0] > 0 {
		parts = append(parts, fmt.Sprintf("%s$%d:$%d", s.prefix(nil), t[0], t[1]))
	}
	return joinFilled(",", parts...)
}
