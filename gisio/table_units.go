package gisio

import (
	"fmt"
	"strings"
)

// unitRow tells whether a row below the headers holds units, and gives them to the columns: no cell of a numeric column starts with a
// number, and most that are not blank are units; the others are then reported.
func (rd *reader) unitRow(r Row, columns []column, at Finding) bool {
	at.Feature = fmt.Sprintf("row %d", r.Number)
	texts := make([]string, len(columns))
	good, bad := 0, 0
	for i, c := range r.Cells {
		t := c.Text
		bracketed := len(t) > 1 && (t[0] == '[' && t[len(t)-1] == ']' || t[0] == '(' && t[len(t)-1] == ')')
		if bracketed {
			t = strings.TrimSpace(t[1 : len(t)-1])
		}
		if i >= len(columns) || columns[i].res == nil || t == "" {
			continue
		}
		f := columns[i].res.field
		if !columns[i].numeric() {
			if !bracketed && t != "-" && f.Class == Identity {
				return false
			}
			continue
		}
		if n, _ := splitQuantity(t); n != "" && t != perThousand {
			return false
		}
		if f.Kind == Plain {
			continue
		}
		if _, err := FindUnit(t, f.Kind); err == nil || bracketed || anyUnit(t) {
			good++
		} else {
			bad++
		}
		texts[i] = t
	}
	if good <= bad {
		return false
	}
	for i, t := range texts {
		if t != "" {
			rd.columnUnit(&columns[i], t, at)
		}
	}
	return true
}

// bareColumns reports each column whose unit could be doubted once, with its first bare number, and not again for every row.
func (rd *reader) bareColumns(body []Row, columns []column, at Finding) {
	for i := range columns {
		c := &columns[i]
		if !c.numeric() || c.unit != nil || c.wrong {
			continue
		}
		f := c.res.field
		if f.Kind == Plain || f.Kind == LimitValue {
			continue
		}
		for _, r := range body {
			text := r.cell(i).Text
			if number, unit := splitQuantity(text); number == "" || unit != "" {
				continue
			}
			rd.fail(place(at, Finding{Feature: fmt.Sprintf("row %d", r.Number), Property: c.header, Found: quoted(text) + ", a number without a unit",
				Allowed: f.keysOf() + " as header", Hint: "or a unit in brackets behind the header, in a row below the headers, or behind each number"}))
			c.wrong = true
			break
		}
	}
}

// anyUnit tells whether a text is a unit of any kind, or a doubtful one.
func anyUnit(t string) bool {
	if _, ok := doubtfulUnits[plainUnit(t)]; ok {
		return true
	}
	for k := Rate; k < LimitValue; k++ {
		if _, err := FindUnit(t, k); err == nil && t != "-" {
			return true
		}
	}
	return false
}
