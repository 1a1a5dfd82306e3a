package gisio

import (
	"strings"
)

// findHeader returns the index of the row, among the first, that names the most known fields; -1 where none does.
func findHeader(g Grid, section *Section, maps []columnMap) int {
	best, most := -1, 1 // one known word may be a cell of the body
	for i, r := range g.Rows {
		if i == headerRows {
			break
		}
		n := 0
		for _, c := range r.Cells {
			if res, _, _ := section.header(c.Text, maps); res != nil {
				n++
			}
		}
		if n > most {
			best, most = i, n
		}
	}
	return best
}

// header finds what a header stands for: by the column map, as a key, or as a field's name with a unit in brackets. unitText is the
// unit that the header or the map states, mapped the index in maps plus one.
func (s *Section) header(text string, maps []columnMap) (res *resolved, unitText string, mapped int) {
	text = strings.TrimSpace(text)
	if text == "" {
		return nil, "", 0
	}
	base, unit := splitHeader(text)
	for i, m := range maps {
		mapBase, mapUnit := splitHeader(m.header)
		if sameHeader(text, m.header) || sameHeader(base, mapBase) && (unit == "" || mapUnit == "" || unit == mapUnit) {
			if r, ok := s.resolve(m.key); ok {
				for _, u := range []string{m.unit, mapUnit, unit} {
					if u != "" {
						return &r, u, i + 1
					}
				}
				return &r, "", i + 1
			}
		}
	}
	for _, key := range []string{text, plainHeader(base), strings.ToLower(plainHeader(base))} {
		if r, ok := s.resolve(key); ok {
			return &r, unit, 0
		}
	}
	return nil, unit, 0
}

// splitHeader cuts a unit in brackets off a header: "Max yield [L/s]"; round brackets only where they hold a unit.
func splitHeader(h string) (base, unit string) {
	h = strings.TrimSpace(h)
	if strings.HasSuffix(h, "]") {
		if i := strings.LastIndexByte(h, '['); i > 0 {
			return strings.TrimSpace(h[:i]), strings.TrimSpace(h[i+1 : len(h)-1])
		}
	}
	if strings.HasSuffix(h, ")") {
		if i := strings.LastIndexByte(h, '('); i > 0 {
			inner := strings.TrimSpace(h[i+1 : len(h)-1])
			for k := Rate; k < LimitValue; k++ {
				if _, err := FindUnit(inner, k); err == nil {
					return strings.TrimSpace(h[:i]), inner
				}
			}
		}
	}
	return h, ""
}

// sameHeader compares headers without regard to case and blanks.
func sameHeader(a, b string) bool {
	return strings.EqualFold(strings.Join(strings.Fields(a), " "), strings.Join(strings.Fields(b), " "))
}

// plainHeader writes a header as a key.
func plainHeader(h string) string {
	return strings.Join(strings.FieldsFunc(h, func(r rune) bool { return r == ' ' || r == '-' || r == '_' || r == '\t' || r == '\n' }), "_")
}
