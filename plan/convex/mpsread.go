package convex

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// ReadMPS reads a linear or quadratic model in the MPS format or its quadratic extension.
//
// Fields may be separated by blanks or TABs, or stand in the fixed columns 2-3, 5-12, 15-22, 25-36, 40-47 and 50-61, which allows
// blanks within names; fixed columns are tried when reading by blanks fails. Sections: NAME, OBJSENSE, ROWS, COLUMNS with integer
// markers, RHS, RANGES, BOUNDS (UP LO FX FR MI PL BV UI LI), QUADOBJ or QSECTION (lower triangle, each entry off the diagonal once,
// one half implied), QMATRIX (both triangles), ENDATA. The first N row is the objective; further ones become rows without bounds. A
// right-hand side of the objective row is minus its constant. Only the first set of right-hand sides, ranges and bounds is read.
//
// A bad file gives a *FormatError with line numbers, bad data a *DataError.
func ReadMPS(r io.Reader) (*Model, error) {
	lines, err := mpsLines(r)
	if err != nil {
		return nil, err
	}
	first := parseMPS(lines, strings.Fields)
	if first.faults == nil {
		return first.model()
	}
	second := parseMPS(lines, fixedFields)
	if second.faults == nil {
		return second.model()
	}
	if second.faults[0].Line > first.faults[0].Line {
		first = second
	}
	return nil, &FormatError{Faults: first.faults}
}

func mpsLines(r io.Reader) ([]string, error) {
	var lines []string
	scan := bufio.NewScanner(r)
	scan.Buffer(nil, mpsLongestLine)
	for scan.Scan() {
		lines = append(lines, scan.Text())
	}
	if err := scan.Err(); err != nil {
		return nil, fmt.Errorf("convex: MPS: line %d: %w", len(lines)+1, err)
	}
	return lines, nil
}

// fixedFields cuts a line at the fixed columns and drops the empty fields.
func fixedFields(line string) []string {
	var fields []string
	for _, c := range [][2]int{{1, 3}, {4, 12}, {14, 22}, {24, 36}, {39, 47}, {49, 61}} {
		if c[0] >= len(line) {
			break
		}
		if f := strings.TrimSpace(line[c[0]:min(c[1], len(line))]); f != "" {
			fields = append(fields, f)
		}
	}
	return fields
}

type mpsRow struct {
	kind        byte
	name        string
	right, span float64
}

type mpsValue struct {
	row   int
	value float64
}

// mpsParser is the state of reading one file.
type mpsParser struct {
	line      int
	faults    []FormatFault
	notes     []string
	noted     map[string]bool
	name      string
	sense     Sense
	objective string
	constant  float64
	rows      []mpsRow
	rowIndex  map[string]int // the objective is -1
	columns   []Column
	colIndex  map[string]int
	entries   [][]mpsValue
	lastEntry []int // by row: the column that last used it, plus one
	costLast  int
	whole     []bool
	inWhole   bool
	set       map[string]string // by section: the name of its first set
	hessian   []HessianEntry
	both      map[[2]int]float64
	given     map[[2]int]bool
	ended     bool
}

func (m *mpsParser) fault(format string, a ...any) {
	if len(m.faults) < maxFaultsShown {
		m.faults = append(m.faults, FormatFault{Line: m.line, Reason: fmt.Sprintf(format, a...)})
	}
}

func (m *mpsParser) note(format string, a ...any) {
	s := fmt.Sprintf(format, a...)
	if !m.noted[s] {
		m.noted[s] = true
		m.notes = append(m.notes, s)
	}
}

func parseMPS(lines []string, split func(string) []string) *mpsParser {
	m := &mpsParser{rowIndex: map[string]int{}, colIndex: map[string]int{}, set: map[string]string{}, noted: map[string]bool{},
		both: map[[2]int]float64{}, given: map[[2]int]bool{}}
	section := ""
	for k, line := range lines {
		m.line = k + 1
		if strings.HasPrefix(line, "*") || strings.TrimSpace(line) == "" {
			continue
		}
		if line[0] != ' ' && line[0] != '\t' {
			section = m.header(line)
			if m.ended {
				break
			}
			continue
		}
		if f := split(strings.TrimRight(line, " \t\r")); len(f) > 0 {
			m.data(section, f)
		}
		if len(m.faults) >= maxFaultsShown {
			break
		}
	}
	if !m.ended {
		m.fault("the file ends without ENDATA")
	}
	if m.objective == "" {
		m.fault("there is no objective: no row of kind N")
	}
	return m
}

// header starts a section.
func (m *mpsParser) header(line string) string {
	f := strings.Fields(line)
	switch f[0] {
	case "NAME":
		m.name = strings.TrimSpace(line[len("NAME"):])
	case "OBJSENSE":
		if len(f) > 1 {
			m.setSense(f[1])
		}
	case "ENDATA":
		m.ended = true
	case "ROWS", "COLUMNS", "RHS", "RANGES", "BOUNDS", "QUADOBJ", "QSECTION", "QMATRIX":
	default:
		m.fault("unknown section %q", f[0])
	}
	return f[0]
}

func (m *mpsParser) setSense(word string) {
	switch strings.ToUpper(word) {
	case "MIN", "MINIMIZE", "MINIMISE":
		m.sense = Minimise
	case "MAX", "MAXIMIZE", "MAXIMISE":
		m.sense = Maximise
	default:
		m.fault("the sense %q is neither MIN nor MAX", word)
	}
}

func (m *mpsParser) data(section string, f []string) {
	switch section {
	case "OBJSENSE":
		m.setSense(f[0])
	case "ROWS":
		m.row(f)
	case "COLUMNS":
		m.column(f)
	case "RHS", "RANGES":
		m.sides(section, f)
	case "BOUNDS":
		m.bound(f)
	case "QUADOBJ", "QSECTION", "QMATRIX":
		m.quadratic(section, f)
	default:
		m.fault("data outside of a known section")
	}
}

// number reads a number; a D may stand for the E of the exponent.
func (m *mpsParser) number(s string) (float64, bool) {
	v, err := strconv.ParseFloat(strings.Map(func(r rune) rune {
		switch r {
		case 'D', 'd':
			return 'E'
		case '_', 'x', 'X':
			return '?'
		}
		return r
	}, s), 64)
	if err != nil || math.IsNaN(v) {
		m.fault("%q is not a number", s)
		return 0, false
	}
	return v, true
}

// finiteNumber reads a number that must be finite.
func (m *mpsParser) finiteNumber(s string) (float64, bool) {
	v, ok := m.number(s)
	if ok && !finite(v) {
		m.fault("%q is not finite", s)
	}
	return v, ok && finite(v)
}

func (m *mpsParser) row(f []string) {
	if len(f) != 2 || len(f[0]) != 1 || !strings.Contains("NLGE", f[0]) {
		m.fault("a row is a kind (N, L, G or E) and a name, not %q", strings.Join(f, " "))
		return
	}
	if _, ok := m.rowIndex[f[1]]; ok {
		m.fault("row %q is given twice", f[1])
		return
	}
	if f[0] == "N" && m.objective == "" {
		m.objective = f[1]
		m.rowIndex[f[1]] = -1
		return
	}
	if f[0] == "N" {
		m.note("rows of kind N after the objective are kept as rows without bounds")
	}
	m.rowIndex[f[1]] = len(m.rows)
	m.rows = append(m.rows, mpsRow{kind: f[0][0], name: f[1], span: math.NaN()})
	m.lastEntry = append(m.lastEntry, 0)
}

func (m *mpsParser) column(f []string) {
	if len(f) >= 3 && f[1] == "'MARKER'" {
		switch f[2] {
		case "'INTORG'":
			m.inWhole = true
		case "'INTEND'":
			m.inWhole = false
		default:
			m.fault("unknown marker %q", f[2])
		}
		return
	}
	if len(f) != 3 && len(f) != 5 {
		m.fault("a column is a name and one or two pairs of row and number, not %q", strings.Join(f, " "))
		return
	}
	j, ok := m.colIndex[f[0]]
	switch {
	case !ok:
		j = len(m.columns)
		m.colIndex[f[0]] = j
		m.columns = append(m.columns, Column{Name: f[0], Upper: math.Inf(1)})
		m.entries = append(m.entries, nil)
		m.whole = append(m.whole, m.inWhole)
	case j != len(m.columns)-1:
		m.fault("column %q is given in two places", f[0])
		return
	}
	for k := 1; k+1 < len(f); k += 2 {
		m.coefficient(j, f[k], f[k+1])
	}
}

func (m *mpsParser) coefficient(j int, row, number string) {
	i, ok := m.rowIndex[row]
	if !ok {
		m.fault("there is no row %q", row)
		return
	}
	v, ok := m.finiteNumber(number)
	if !ok {
		return
	}
	last := &m.costLast
	if i >= 0 {
		last = &m.lastEntry[i]
	}
	if *last == j+1 {
		m.fault("column %q has two numbers for row %q", m.columns[j].Name, row)
		return
	}
	*last = j + 1
	if i < 0 {
		m.columns[j].Cost = v
		return
	}
	m.entries[j] = append(m.entries[j], mpsValue{i, v})
}
