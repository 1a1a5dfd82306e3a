package convex

import (
	"bufio"
	"compress/gzip"
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// sharedData finds the folder of shared test data beside the project, or skips.
func sharedData(t testing.TB, parts ...string) string {
	t.Helper()
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			break
		}
		up := filepath.Dir(dir)
		if up == dir {
			t.Skip("no go.mod above the test")
		}
		dir = up
	}
	path := filepath.Join(append([]string{dir, "..", "shared", "data"}, parts...)...)
	if _, err := os.Stat(path); err != nil {
		t.Skipf("shared data absent: %v", err)
	}
	return path
}

// readIndex returns the rows of an index.csv as maps from heading to value, in file order.
func readIndex(t testing.TB, path string) []map[string]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.FieldsPerRecord = -1
	all, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	out := []map[string]string{}
	for _, rec := range all[1:] {
		m := map[string]string{}
		for i, v := range rec {
			if i < len(all[0]) {
				m[all[0][i]] = v
			}
		}
		out = append(out, m)
	}
	return out
}

// mpsFile is what the test reader keeps of an MPS file.
type mpsFile struct {
	t        testing.TB
	kind     []byte
	rowIndex map[string]int
	rhs      []float64
	span     []float64
	colIndex map[string]int
	cols     []Column
	entries  [][]mpsEntry
	cost     string
	constant float64
}

type mpsEntry struct {
	row   int
	value float64
}

func (m *mpsFile) number(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		m.t.Fatalf("number %q: %v", s, err)
	}
	return v
}

// readMPS reads a gzipped MPS file into a problem and its objective constant.
func readMPS(t testing.TB, path string) (*Problem, float64) {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	m := &mpsFile{t: t, rowIndex: map[string]int{}, colIndex: map[string]int{}}
	section := ""
	scan := bufio.NewScanner(z)
	for scan.Scan() {
		line := scan.Text()
		if strings.HasPrefix(line, "*") || strings.TrimSpace(line) == "" {
			continue
		}
		fields := strings.Fields(line)
		if line[0] != ' ' && line[0] != '\t' {
			section = fields[0]
			continue
		}
		m.line(section, fields)
	}
	return m.problem(), m.constant
}

func (m *mpsFile) line(section string, f []string) {
	switch section {
	case "ROWS":
		if f[0] == "N" {
			if m.cost == "" {
				m.cost = f[1]
			}
			m.rowIndex[f[1]] = -1
			return
		}
		m.rowIndex[f[1]] = len(m.kind)
		m.kind = append(m.kind, f[0][0])
		m.rhs = append(m.rhs, 0)
		m.span = append(m.span, math.NaN())
	case "COLUMNS":
		j, ok := m.colIndex[f[0]]
		if !ok {
			j = len(m.cols)
			m.colIndex[f[0]] = j
			m.cols = append(m.cols, Column{Name: f[0], Upper: math.Inf(1)})
			m.entries = append(m.entries, nil)
		}
		for k := 1; k+1 < len(f); k += 2 {
			m.coefficient(j, f[k], m.number(f[k+1]))
		}
	case "RHS", "RANGES":
		for k := len(f) % 2; k+1 < len(f); k += 2 {
			m.side(section, f[k], m.number(f[k+1]))
		}
	case "BOUNDS":
		m.bound(f)
	}
}

func (m *mpsFile) coefficient(j int, row string, v float64) {
	i, ok := m.rowIndex[row]
	if !ok {
		m.t.Fatalf("no row %q", row)
	}
	if row == m.cost {
		m.cols[j].Cost += v
	}
	if i >= 0 {
		m.entries[j] = append(m.entries[j], mpsEntry{i, v})
	}
}

func (m *mpsFile) side(section, row string, v float64) {
	i := m.rowIndex[row]
	switch {
	case section == "RHS" && row == m.cost:
		m.constant = -v
	case i < 0:
	case section == "RHS":
		m.rhs[i] = v
	default:
		m.span[i] = v
	}
}

func (m *mpsFile) bound(f []string) {
	value := f[0] == "UP" || f[0] == "LO" || f[0] == "FX"
	at, v := len(f)-1, 0.0
	if value {
		v = m.number(f[at])
		at--
	}
	j, ok := m.colIndex[f[at]]
	if !ok {
		m.t.Fatalf("no column %q", f[at])
	}
	c := &m.cols[j]
	switch f[0] {
	case "UP":
		c.Upper = v
		if v < 0 && c.Lower == 0 {
			c.Lower = math.Inf(-1)
		}
	case "LO":
		c.Lower = v
	case "FX":
		c.Lower, c.Upper = v, v
	case "FR":
		c.Lower, c.Upper = math.Inf(-1), math.Inf(1)
	case "MI":
		c.Lower = math.Inf(-1)
	case "PL":
		c.Upper = math.Inf(1)
	default:
		m.t.Fatalf("bound type %q", f[0])
	}
}

func (m *mpsFile) problem() *Problem {
	p, err := NewProblem(Minimise, m.cols)
	if err != nil {
		m.t.Fatal(err)
	}
	rows := make([]Row, len(m.kind))
	for i := range rows {
		lower, upper := m.rhs[i], m.rhs[i]
		span := math.Abs(m.span[i])
		switch {
		case m.kind[i] == 'L':
			lower = math.Inf(-1)
			if span >= 0 {
				lower = upper - span
			}
		case m.kind[i] == 'G':
			upper = math.Inf(1)
			if span >= 0 {
				upper = lower + span
			}
		case m.span[i] > 0:
			upper += span
		case m.span[i] < 0:
			lower -= span
		}
		rows[i] = Row{Coefficients: make([]float64, len(m.cols)), Lower: lower, Upper: upper}
	}
	for j, list := range m.entries {
		for _, e := range list {
			rows[e.row].Coefficients[j] += e.value
		}
	}
	for _, r := range rows {
		if _, err := p.AddRow(r); err != nil {
			m.t.Fatal(err)
		}
	}
	return p
}
