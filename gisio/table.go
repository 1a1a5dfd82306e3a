package gisio

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// DefaultMaxTableBytes is the largest table that is read: a survey of a hundred thousand rows is far below it.
const DefaultMaxTableBytes = 64 << 20

// TableOptions says how a table's text is to be read. The zero value finds everything out.
type TableOptions struct {
	Name      string // of the table, for findings and for the sheet: "limits"
	Sheet     string // sheet of a workbook
	Delimiter string // "", ",", ";" or a tab
	Decimal   string // "", "." or ","
}

// Cell is one cell of a table.
type Cell struct {
	Text    string  // as it is written, blanks trimmed
	Number  float64 // where Numeric
	Numeric bool    // a number by type, from a workbook: no decimal mark to settle
}

// Row is one row of a table with the number that the user sees.
type Row struct {
	Number int // line of a CSV file where the row starts, or row of a sheet; counted from 1
	Cells  []Cell
}

// Grid is a table as it stands in the file, blank rows and comments left out.
type Grid struct {
	File      string
	Rows      []Row
	Delimiter rune // of a CSV file, 0 for a workbook
	Decimal   string
}

// ReadGrid reads a CSV text or an XLSX workbook into rows of cells. The findings hold what is wrong with the file as such:
// broken quotes, text that is no UTF-8, error values and formulas without a stored value.
func ReadGrid(file string, data []byte, opt TableOptions) (Grid, Findings) {
	if len(data) > DefaultMaxTableBytes {
		return Grid{File: file}, Findings{{Severity: Error, File: file, Layer: opt.Name, Found: fmt.Sprintf("%d bytes", len(data)), Allowed: fmt.Sprintf("at most %d", DefaultMaxTableBytes)}}
	}
	if bytes.HasPrefix(data, []byte("PK\x03\x04")) {
		return readWorkbook(file, data, opt)
	}
	if bytes.HasPrefix(data, []byte("\xd0\xcf\x11\xe0")) {
		return Grid{File: file}, Findings{{Severity: Error, File: file, Layer: opt.Name, Found: "an old or encrypted workbook", Allowed: "CSV, or XLSX without a password", Hint: "save it as XLSX"}}
	}
	return readCSV(file, data, opt)
}

// readCSV reads a delimited text.
func readCSV(file string, data []byte, opt TableOptions) (Grid, Findings) {
	g := Grid{File: file, Decimal: opt.Decimal}
	fail := func(f Finding) (Grid, Findings) {
		f.Severity, f.File, f.Layer = Error, file, opt.Name
		return g, Findings{f}
	}
	if bytes.HasPrefix(data, []byte("\xff\xfe")) || bytes.HasPrefix(data, []byte("\xfe\xff")) {
		return fail(Finding{Found: "text in UTF-16", Allowed: "UTF-8", Hint: "save it as CSV UTF-8"})
	}
	data = bytes.TrimPrefix(data, []byte("\xef\xbb\xbf"))
	if !utf8.Valid(data) {
		return fail(Finding{Line: lineOfBadText(data), Found: "text that is not UTF-8", Allowed: "UTF-8", Hint: "save it as CSV UTF-8"})
	}
	if i := bytes.IndexByte(data, 0); i >= 0 {
		return fail(Finding{Line: 1 + bytes.Count(data[:i], []byte("\n")), Found: "a zero byte", Allowed: "text"})
	}
	g.Delimiter = findDelimiter(data)
	if opt.Delimiter != "" {
		d := []rune(opt.Delimiter)
		if len(d) != 1 || !strings.ContainsRune(",;\t|", d[0]) {
			return fail(Finding{Property: "delimiter", Found: quoted(opt.Delimiter), Allowed: "a comma, a semicolon, a tab or |"})
		}
		g.Delimiter = d[0]
	}
	r := csv.NewReader(bytes.NewReader(data))
	r.Comma, r.FieldsPerRecord, r.Comment = g.Delimiter, -1, '#'
	for {
		fields, err := r.Read()
		if err == io.EOF {
			return g, nil
		}
		if err != nil {
			var pe *csv.ParseError
			if errors.As(err, &pe) {
				return fail(Finding{Line: pe.StartLine, Found: "a row with a quote that does not open or close as it should", Allowed: `a field in quotes, with "" for a quote inside it`})
			}
			return fail(Finding{Found: err.Error()})
		}
		line, _ := r.FieldPos(0)
		row := Row{Number: line, Cells: make([]Cell, len(fields))}
		for i, f := range fields {
			row.Cells[i].Text = strings.TrimSpace(strings.ReplaceAll(f, "\u00a0", " "))
		}
		if !row.blank() {
			g.Rows = append(g.Rows, row)
		}
	}
}

// blank tells whether every cell of the row is blank.
func (r Row) blank() bool {
	for _, c := range r.Cells {
		if c.Text != "" {
			return false
		}
	}
	return true
}

// cell returns the cell of a column, blank beyond the row's end.
func (r Row) cell(column int) Cell {
	if column < len(r.Cells) {
		return r.Cells[column]
	}
	return Cell{}
}

// lineOfBadText finds the line of the first byte that is no UTF-8.
func lineOfBadText(data []byte) int {
	line := 1
	for len(data) > 0 {
		r, n := utf8.DecodeRune(data)
		if r == utf8.RuneError && n == 1 {
			return line
		}
		if r == '\n' {
			line++
		}
		data = data[n:]
	}
	return line
}

// findDelimiter takes the delimiter that stands most often in the first line that is no comment, quotes left out; a comma where
// none does. A semicolon or a tab wins against commas, which may be decimal marks or part of a header's text.
func findDelimiter(data []byte) rune {
	for len(data) > 0 {
		line := data
		if i := bytes.IndexByte(data, '\n'); i >= 0 {
			line, data = data[:i], data[i+1:]
		} else {
			data = nil
		}
		if t := bytes.TrimSpace(line); len(t) == 0 || t[0] == '#' {
			continue
		}
		counts := map[byte]int{}
		inQuotes := false
		for _, c := range line {
			if c == '"' {
				inQuotes = !inQuotes
			}
			if !inQuotes {
				counts[c]++
			}
		}
		switch {
		case counts['\t'] > 0:
			return '\t'
		case counts[';'] > 0:
			return ';'
		case counts[','] > 0:
			return ','
		case counts['|'] > 0:
			return '|'
		}
	}
	return ','
}
