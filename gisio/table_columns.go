package gisio

import (
	"errors"
	"fmt"
	"strings"
)

// columnMap ties a field's key to a header, and to a unit where it states one: [columns] of the project file.
type columnMap struct {
	key    string // field, perhaps with a role or a unit
	header string
	unit   string
	line   int
}

// column is one column of a table.
type column struct {
	header string
	res    *resolved // nil: not known
	unit   *Unit
	wrong  bool // its unit is wrong or missing, which is reported: its numbers are not looked at
}

// numeric tells whether the column holds numbers.
func (c column) numeric() bool {
	return c.res != nil && c.res.field.Class.numeric() && c.res.role != basisRole && c.res.role != sourceRole
}

// tableRow is one row ready to become a record.
type tableRow struct {
	at   Finding
	list []written
}

// headerRows is how many rows from the top may be titles above the headers.
const headerRows = 10

// rows turns a grid into rows of a section, by the headers, the units row and the column map.
func (rd *reader) rows(g Grid, section *Section, maps []columnMap, mapFile string) []tableRow {
	at := Finding{File: g.File, Layer: section.Name}
	header := findHeader(g, section, maps)
	if header < 0 {
		if len(g.Rows) > 0 {
			f := at
			f.Found, f.Allowed, f.Hint = "no row of headers that names a known field", strings.Join(section.names(), ", "), "tie other headers to fields under [columns."+section.Name+"]"
			rd.fail(f)
		}
		return nil
	}
	columns := rd.columns(g.Rows[header], section, maps, at, mapFile)
	body := g.Rows[header+1:]
	if len(body) > 0 && rd.unitRow(body[0], columns, at) {
		body = body[1:]
	}
	decimal := rd.settleDecimal(g, body, columns, at)
	rd.bareColumns(body, columns, at)
	var out []tableRow
	for _, r := range body {
		row := tableRow{at: at}
		row.at.Feature = fmt.Sprintf("row %d", r.Number)
		for i, c := range columns {
			if c.res == nil {
				continue
			}
			w := written{key: c.header, as: c.res, unit: c.unit}
			if c.wrong {
				w.value = unreadable(r.cell(i))
				row.list = append(row.list, w)
				continue
			}
			value, err := cellValue(r.cell(i), c, decimal)
			if err != nil {
				f := row.at
				f.Property, f.Found, f.Allowed, f.Hint = c.header, err.Found, err.Allowed, err.Hint
				rd.fail(f)
				value = unreadable(r.cell(i))
			}
			w.value = value
			row.list = append(row.list, w)
		}
		for i := len(columns); i < len(r.Cells); i++ {
			if r.Cells[i].Text != "" {
				f := row.at
				f.Found, f.Allowed = fmt.Sprintf("%d cells", len(r.Cells)), fmt.Sprintf("at most %d, one a header", len(columns))
				f.Hint = "a cell that holds the delimiter stands in quotes"
				rd.fail(f)
				break
			}
		}
		out = append(out, row)
	}
	return out
}

// columns resolves the headers. Two columns for one field, a wrong unit and a mapped header that is absent are errors; columns that
// are not known are listed in one warning.
func (rd *reader) columns(head Row, section *Section, maps []columnMap, at Finding, mapFile string) []column {
	at.Feature = fmt.Sprintf("row %d", head.Number)
	used := make([]bool, len(maps))
	var columns []column
	var unknown []string
	for _, c := range head.Cells {
		col := column{header: c.Text}
		res, unitText, mapped := section.header(c.Text, maps)
		if mapped > 0 {
			used[mapped-1] = true
		}
		switch {
		case res == nil && c.Text != "":
			base, unit := splitHeader(c.Text)
			if f := section.miswritten(written{key: plainHeader(base), value: 0.0}); f != nil && unit == "" {
				rd.fail(place(at, Finding{Property: c.Text, Found: "a header that starts like " + f.Name + " but ends in no known unit", Allowed: f.keysOf()}))
				break
			}
			unknown = append(unknown, unknownName(c.Text, section.nearestKey(plainHeader(base))))
		case res != nil:
			col.res = res
			col.unit = res.unit
			if unitText != "" && col.numeric() {
				rd.columnUnit(&col, unitText, at)
			}
			for _, other := range columns {
				if other.res != nil && other.res.field == res.field && other.res.role == res.role {
					rd.fail(place(at, Finding{Property: c.Text, Found: "a second column for " + res.field.Name, Hint: "the first is " + quoted(other.header)}))
					col.res = nil
				}
			}
		}
		columns = append(columns, col)
	}
	if len(unknown) > 0 {
		rd.warn(place(at, Finding{Found: "columns that are not read: " + strings.Join(unknown, ", "), Hint: "tie them to fields under [columns." + section.Name + "] if they matter"}))
	}
	for i, m := range maps {
		if _, ok := section.resolve(m.key); ok && !used[i] {
			rd.fail(Finding{File: mapFile, Line: m.line, Property: "columns." + section.Name + "." + m.key, Found: "the header " + quoted(m.header) + ", which the table " + at.File + " does not have"})
		}
	}
	return columns
}

// place puts the place of at into a finding.
func place(at, f Finding) Finding {
	f.File, f.Layer = at.File, at.Layer
	if f.Feature == "" {
		f.Feature = at.Feature
	}
	if f.Line == 0 {
		f.Line = at.Line
	}
	return f
}

// columnUnit gives a column its unit; a wrong or a second, different one is an error.
func (rd *reader) columnUnit(col *column, text string, at Finding) bool {
	f := col.res.field
	if f.Kind == Plain {
		return true
	}
	u, err := FindUnit(text, f.Kind)
	if err != nil {
		var q *QuantityError
		errors.As(err, &q)
		rd.fail(place(at, Finding{Property: col.header, Found: q.Found, Allowed: q.Allowed, Hint: q.Hint}))
		col.wrong = true
		return false
	}
	if col.unit != nil && col.unit.Name != u.Name {
		rd.fail(place(at, Finding{Property: col.header, Found: "the units " + col.unit.Name + " and " + u.Name, Allowed: "one unit"}))
		return false
	}
	col.unit = &u
	return true
}

// settleDecimal finds the decimal mark of a table from its numbers; contradicting numbers are an error.
func (rd *reader) settleDecimal(g Grid, body []Row, columns []column, at Finding) string {
	if g.Decimal != "" {
		return g.Decimal
	}
	var first [3]string
	for _, r := range body {
		for i, c := range columns {
			if !c.numeric() && (c.res == nil || c.res.field.Class != Whole) {
				continue
			}
			number, _ := splitQuantity(r.cell(i).Text)
			if e := evidenceOf(number); e != noEvidence && first[e] == "" {
				first[e] = fmt.Sprintf("%s in row %d", quoted(number), r.Number)
			}
			if i := strings.Index(number, "."); i >= 0 && first[noEvidence] == "" && evidenceOf(number) == noEvidence {
				first[noEvidence] = fmt.Sprintf("%s in row %d", quoted(number), r.Number)
			}
		}
	}
	switch {
	case first[pointIsDecimal] != "" && first[commaIsDecimal] != "":
		rd.fail(place(at, Finding{Found: first[pointIsDecimal] + " and " + first[commaIsDecimal], Allowed: "one decimal mark", Hint: `state decimal = "," or "." for the table`}))
	case first[commaIsDecimal] != "":
		return ","
	case first[pointIsDecimal] == "" && first[noEvidence] != "" && g.Delimiter == ';':
		// where semicolons part the columns the comma is often the decimal mark, and the point parts thousands
		rd.fail(place(at, Finding{Found: first[noEvidence] + ", which may be a decimal number or have a thousands separator", Allowed: "numbers that leave no doubt", Hint: `state decimal = "," or "." for the table`}))
	}
	return "."
}

// known marks a value that is there but cannot be read, which is reported already.
type known struct{}

// unreadable is the value of a cell that is reported already: there, so that nobody misses it, but without a number.
func unreadable(c Cell) any {
	if c.Text == "" {
		return nil
	}
	return known{}
}

// cellValue turns a cell into a value for its column.
func cellValue(c Cell, col column, decimal string) (any, *QuantityError) {
	if c.Text == "" {
		return nil, nil
	}
	if !col.numeric() && col.res.field.Class != Whole {
		return c.Text, nil
	}
	if c.Numeric {
		return c.Number, nil
	}
	number, unit := splitQuantity(c.Text)
	if number == "" {
		return c.Text, nil
	}
	v, err := parseCellNumber(number, decimal)
	if err != nil {
		var q *QuantityError
		errors.As(err, &q)
		return nil, q
	}
	return cellNumber{value: v, unit: unit, text: c.Text}, nil
}

// unknownName names an unknown key or column, with the nearest known one.
func unknownName(name, near string) string {
	if near == "" {
		return quoted(name)
	}
	return quoted(name) + " (did you mean " + near + "?)"
}
