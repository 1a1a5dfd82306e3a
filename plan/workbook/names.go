package workbook

import (
	"fmt"
	"strings"
)

// A nameTable gives defined names that are legal and unique. Every name has a prefix with an underscore, so it cannot look like a
// cell's address or like R and C, which the format reserves.
type nameTable struct {
	used map[string]bool // in lower case: the format does not tell cases apart
	list []definedName
}

type definedName struct{ name, refersTo string }

// maxName keeps names far below the 255 characters that the format allows.
const maxName = 80

// add defines a name for a cell and returns it.
func (t *nameTable) add(prefix, id string, s *sheet, row, column int) string {
	if t.used == nil {
		t.used = map[string]bool{}
	}
	base := prefix + "_" + strings.Map(func(r rune) rune {
		switch {
		case r >= 'a' && r <= 'z', r >= 'A' && r <= 'Z', r >= '0' && r <= '9', r == '_', r == '.':
			return r
		}
		return '_'
	}, id)
	if len(base) > maxName {
		base = base[:maxName]
	}
	name := base
	for n := 2; t.used[strings.ToLower(name)]; n++ {
		name = fmt.Sprintf("%s__%d", base, n)
	}
	t.used[strings.ToLower(name)] = true
	t.list = append(t.list, definedName{name, s.prefix(nil) + fixedName(row, column)})
	return name
}

// addBlock defines a name for a block of one column.
func (t *nameTable) addBlock(name string, s *sheet, column, first, last int) {
	if t.used == nil {
		t.used = map[string]bool{}
	}
	t.used[strings.ToLower(name)] = true
	t.list = append(t.list, definedName{name, s.blockText(nil, first, column, last, column)})
}
