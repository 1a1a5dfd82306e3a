package gisio

import (
	"bytes"
	"fmt"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"
)

// largestUnpacked bounds what a workbook may unpack to [bytes], against files made to exhaust memory.
const largestUnpacked = 512 << 20

// readWorkbook reads one sheet of an XLSX workbook.
func readWorkbook(file string, data []byte, opt TableOptions) (g Grid, fs Findings) {
	g = Grid{File: file, Decimal: "."}
	fail := func(f Finding) {
		f.Severity, f.File, f.Layer = Error, file, opt.Name
		fs = append(fs, f)
	}
	// The library is not proof against every damaged file: a panic while it reads the user's bytes is a broken file.
	defer func() {
		if r := recover(); r != nil {
			g.Rows = nil
			fail(Finding{Found: "a damaged workbook", Allowed: "XLSX", Hint: "open and save it again"})
		}
	}()
	f, err := excelize.OpenReader(bytes.NewReader(data), excelize.Options{RawCellValue: true, UnzipSizeLimit: largestUnpacked, UnzipXMLSizeLimit: largestUnpacked / 8})
	if err != nil {
		fail(Finding{Found: "a workbook that cannot be read (" + err.Error() + ")", Allowed: "XLSX without a password"})
		return g, fs
	}
	defer f.Close()
	sheet, ok := chooseSheet(f.GetSheetList(), opt)
	if !ok {
		allowed := strings.Join(f.GetSheetList(), ", ")
		if opt.Sheet != "" {
			fail(Finding{Property: "sheet", Found: quoted(opt.Sheet), Allowed: allowed})
		} else {
			fail(Finding{Property: "sheet", Found: "several sheets, none called " + opt.Name, Allowed: allowed, Hint: `say which: {file = "...", sheet = "..."}`})
		}
		return g, fs
	}
	rows, err := f.GetRows(sheet, excelize.Options{RawCellValue: true})
	if err != nil {
		fail(Finding{Found: "a sheet that cannot be read (" + err.Error() + ")"})
		return g, fs
	}
	for i, texts := range rows {
		row := Row{Number: i + 1}
		for j, text := range texts {
			name, err := excelize.CoordinatesToCellName(j+1, i+1)
			if err != nil {
				fail(Finding{Feature: fmt.Sprintf("row %d", i+1), Found: err.Error()})
				break
			}
			c, problem := sheetCell(f, sheet, name, text)
			if problem != "" {
				fail(Finding{Feature: fmt.Sprintf("row %d", i+1), Property: "cell " + name, Found: problem, Hint: "correct it, or leave the cell blank"})
			}
			row.Cells = append(row.Cells, c)
		}
		if !row.blank() && !strings.HasPrefix(row.Cells[0].Text, "#") {
			g.Rows = append(g.Rows, row)
		}
	}
	return g, fs
}

// chooseSheet picks the stated sheet, the one with the table's name, or the only one.
func chooseSheet(sheets []string, opt TableOptions) (string, bool) {
	want := opt.Sheet
	if want == "" {
		want = opt.Name
	}
	for _, s := range sheets {
		if strings.EqualFold(s, want) {
			return s, true
		}
	}
	if opt.Sheet == "" && len(sheets) == 1 {
		return sheets[0], true
	}
	return "", false
}

// sheetCell reads one cell by its type; problem says in words why it has no value.
func sheetCell(f *excelize.File, sheet, name, text string) (c Cell, problem string) {
	c.Text = strings.TrimSpace(strings.ReplaceAll(text, "\u00a0", " "))
	kind, err := f.GetCellType(sheet, name)
	if err != nil {
		return c, err.Error()
	}
	switch kind {
	case excelize.CellTypeError:
		return Cell{}, "the error value " + quoted(text)
	case excelize.CellTypeBool:
		if c.Text == "1" || strings.EqualFold(c.Text, "true") {
			c.Text = "true"
		} else {
			c.Text = "false"
		}
		return c, ""
	case excelize.CellTypeUnset, excelize.CellTypeNumber, excelize.CellTypeFormula:
		if c.Text == "" {
			if formula, err := f.GetCellFormula(sheet, name); err == nil && formula != "" {
				return c, "a formula without a stored value"
			}
			return c, ""
		}
		if v, err := strconv.ParseFloat(c.Text, 64); err == nil && kind != excelize.CellTypeFormula {
			c.Number, c.Numeric = v, true
			if shown, err := f.GetCellValue(sheet, name, excelize.Options{RawCellValue: false}); err == nil && looksLikeDate(shown) {
				if day, err := excelize.ExcelDateToTime(v, false); err == nil {
					c.Text = day.Format("2006-01-02")
				}
			}
		}
	}
	return c, ""
}

// looksLikeDate tells whether a cell's shown text is a date while its value is a number.
func looksLikeDate(s string) bool {
	return strings.Count(s, "-") == 2 && !strings.HasPrefix(s, "-") || strings.Count(s, "/") == 2
}
