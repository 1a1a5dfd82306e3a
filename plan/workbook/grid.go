package workbook

import (
	"errors"
	"fmt"
	"math"
	"strings"

	"github.com/xuri/excelize/v2"
)

// A cell holds words, a number or nothing, perhaps with the formula that gives it.
type cell struct {
	kind    cellKind
	number  float64
	words   string
	formula string
	look    *look // shared by all cells of that look, never changed; nil is none
}

type cellKind int

const (
	emptyCell cellKind = iota
	numberCell
	wordCell
)

// A sheet is a grid that is filled in any order and written row by row. Rows and columns count from 1.
type sheet struct {
	book    *book
	name    string
	rows    [][]cell
	heights map[int]float64
	widths  []float64 // of column 1, 2, ...
	merges  [][4]int  // first row, first column, last row, last column
	marks   []mark
	checks  []validation
	page    pageSetup
}

// A mark is a conditional format: cells of a block take a look while the formula (relative to the block's first cell) holds.
type mark struct {
	block   string
	formula string
	look    look
}

// A validation asks for a number in a block.
type validation struct{ block string }

// maxErrors is the number of problems that are reported together.
const maxErrors = 50

func (b *book) fail(format string, args ...any) {
	if len(b.problems) < maxErrors {
		b.problems = append(b.problems, fmt.Errorf(format, args...))
	}
}

func (b *book) err() error {
	if len(b.problems) == 0 {
		return nil
	}
	return fmt.Errorf("the workbook was not written: %w", errors.Join(b.problems...))
}

func (s *sheet) at(row, column int) *cell {
	for len(s.rows) < row {
		s.rows = append(s.rows, nil)
	}
	if line := s.rows[row-1]; len(line) < column {
		if cap(line) < column {
			grown := make([]cell, len(line), max(column, 2*cap(line), leastColumns))
			copy(grown, line)
			line = grown
		}
		s.rows[row-1] = line[:column]
	}
	return &s.rows[row-1][column-1]
}

// leastColumns is the room that a new row starts with.
const leastColumns = 16

// text puts words that are never taken for a formula.
func (s *sheet) text(row, column int, words string, l look) {
	*s.at(row, column) = cell{kind: wordCell, words: cleanText(words), look: s.book.shared(l)}
}

// blank puts an empty cell that has a look.
func (s *sheet) blank(row, column int, l look) { *s.at(row, column) = cell{look: s.book.shared(l)} }

// value puts a number; a number that is not finite is a problem that names the cell.
func (s *sheet) value(row, column int, x float64, l look) {
	s.finite(row, column, x)
	*s.at(row, column) = cell{kind: numberCell, number: x + 0, look: s.book.shared(l)}
}

// known puts a number, or leaves the cell empty where it is not known.
func (s *sheet) known(row, column int, x *float64, l look) {
	if x == nil {
		s.blank(row, column, l)
		return
	}
	s.value(row, column, *x, l)
}

// formula puts a numeric formula with its value.
func (s *sheet) formula(row, column int, t term, l look) {
	s.finite(row, column, t.value)
	*s.at(row, column) = cell{kind: numberCell, number: t.value + 0, formula: t.text, look: s.book.shared(l)}
}

// phrase puts a formula that gives words.
func (s *sheet) phrase(row, column int, p phrase, l look) {
	*s.at(row, column) = cell{kind: wordCell, words: p.value, formula: p.text, look: s.book.shared(l)}
}

func (s *sheet) finite(row, column int, x float64) {
	if !(math.Abs(x) <= math.MaxFloat64) {
		what := ""
		if first := s.at(row, 1); first.kind == wordCell && column > 1 {
			what = fmt.Sprintf(" (line %q)", first.words)
		}
		s.book.fail("cell %s of sheet %q%s is not a finite number", cellName(row, column), s.name, what)
	}
}

// span joins the cells of a row from one column to another and puts a look on all of them.
func (s *sheet) merge(row, first, last int) {
	if last <= first {
		return
	}
	l := s.lookOf(row, first)
	for c := first + 1; c <= last; c++ {
		s.blank(row, c, l)
	}
	s.merges = append(s.merges, [4]int{row, first, row, last})
}

// across puts words over several columns.
func (s *sheet) across(row, first, last int, words string, l look) {
	s.text(row, first, words, l)
	s.merge(row, first, last)
}

// lookOf is a cell's look.
func (s *sheet) lookOf(row, column int) look {
	if l := s.at(row, column).look; l != nil {
		return *l
	}
	return look{}
}

// oneLine keeps a cell's words from being wrapped.
func (s *sheet) oneLine(row, column int) {
	s.at(row, column).look = s.book.shared(with(s.lookOf(row, column), func(l *look) { l.wrap = false }))
}

func cellName(row, column int) string {
	name, err := excelize.CoordinatesToCellName(column, row)
	if err != nil {
		panic("workbook: " + err.Error())
	}
	return name
}

func fixedName(row, column int) string {
	name, err := excelize.CoordinatesToCellName(column, row, true)
	if err != nil {
		panic("workbook: " + err.Error())
	}
	return name
}

// ref is a reference to a cell as the sheet from writes it.
func (s *sheet) ref(from *sheet, row, column int) term {
	return term{s.prefix(from) + fixedName(row, column), s.at(row, column).number, bondAtom}
}

// wordRef is a reference to a cell that holds words.
func (s *sheet) wordRef(from *sheet, row, column int) phrase {
	return phrase{s.prefix(from) + fixedName(row, column), s.at(row, column).words}
}

func (s *sheet) prefix(from *sheet) string {
	if from == s {
		return ""
	}
	if strings.ContainsAny(s.name, " '") {
		return "'" + strings.ReplaceAll(s.name, "'", "''") + "'!"
	}
	return s.name + "!"
}

// down is a block of one column; cells without a number count as zero.
func (s *sheet) down(from *sheet, column, first, last int) span {
	values := make([]float64, 0, last-first+1)
	for r := first; r <= last; r++ {
		values = append(values, s.at(r, column).number)
	}
	return span{s.blockText(from, first, column, last, column), values}
}

// wordsDown is a block of one column that holds words.
func (s *sheet) wordsDown(from *sheet, column, first, last int) wordSpan {
	values := make([]string, 0, last-first+1)
	for r := first; r <= last; r++ {
		values = append(values, s.at(r, column).words)
	}
	return wordSpan{s.blockText(from, first, column, last, column), values}
}

// along is a block of one row.
func (s *sheet) along(from *sheet, row, first, last int) span {
	values := make([]float64, 0, last-first+1)
	for c := first; c <= last; c++ {
		values = append(values, s.at(row, c).number)
	}
	return span{s.blockText(from, row, first, row, last), values}
}

func (s *sheet) blockText(from *sheet, row1, column1, row2, column2 int) string {
	return s.prefix(from) + fixedName(row1, column1) + ":" + fixedName(row2, column2)
}

func (s *sheet) width(column int) float64 {
	if column <= len(s.widths) && s.widths[column-1] > 0 {
		return s.widths[column-1]
	}
	return defaultWidth
}

func (s *sheet) setWidths(first int, widths ...float64) {
	for len(s.widths) < first-1+len(widths) {
		s.widths = append(s.widths, 0)
	}
	copy(s.widths[first-1:], widths)
}

// cleanText drops what a cell cannot hold: control characters other than a line break, and anything past the format's length.
func cleanText(s string) string {
	s = strings.ToValidUTF8(s, "?")
	s = strings.Map(func(r rune) rune {
		switch {
		case r == '\n':
			return r
		case r == '\t' || r == '\r':
			return ' '
		case r < 0x20 || r == 0x7f || r == 0xfffe || r == 0xffff:
			return '?'
		}
		return r
	}, s)
	if units := []rune(s); len(units) > maxText {
		return string(units[:maxText-1]) + "…"
	}
	return s
}

// maxText is a safe length of a cell's text in characters; the format holds 32,767 UTF-16 units, and a character takes two at most.
const maxText = 16000
