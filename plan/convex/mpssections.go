package convex

import (
	"fmt"
	"math"
	"strings"
)

// firstSet tells that name is the first set of its section.
func (m *mpsParser) firstSet(section, name string) bool {
	first, ok := m.set[section]
	if !ok {
		m.set[section] = name
		return true
	}
	if first != name {
		m.note("only the first set %q of section %s is read", first, section)
	}
	return first == name
}

// sides reads right-hand sides and ranges; the name of the set may be missing.
func (m *mpsParser) sides(section string, f []string) {
	if len(f) < 2 || len(f) > 5 {
		m.fault("a line of %s is a set and one or two pairs of row and number, not %q", section, strings.Join(f, " "))
		return
	}
	name := ""
	if len(f)%2 == 1 {
		name, f = f[0], f[1:]
	}
	if !m.firstSet(section, name) {
		return
	}
	for k := 0; k+1 < len(f); k += 2 {
		i, ok := m.rowIndex[f[k]]
		if !ok {
			m.fault("there is no row %q", f[k])
			continue
		}
		v, ok := m.finiteNumber(f[k+1])
		switch {
		case !ok:
		case i < 0 && section == "RHS":
			m.constant = -v
		case i < 0 || m.rows[i].kind == 'N':
			m.note("a number of section %s for a row of kind N says nothing", section)
		case section == "RHS":
			m.rows[i].right = v
		default:
			m.rows[i].span = v
		}
	}
}

// bound reads one bound; the name of the set may be missing.
func (m *mpsParser) bound(f []string) {
	needs := map[string]bool{"UP": true, "LO": true, "FX": true, "UI": true, "LI": true, "FR": false, "MI": false, "PL": false, "BV": false}
	number, known := needs[f[0]]
	if !known {
		m.fault("unknown kind of bound %q", f[0])
		return
	}
	kind, f := f[0], f[1:]
	if number && len(f) < 2 || len(f) < 1 || len(f) > 3 {
		m.fault("a bound %s with %d fields", kind, len(f))
		return
	}
	// Without a number, two fields are a set and a column, or a column and a number that is not needed.
	name := ""
	if (number && len(f) == 3) || (!number && len(f) >= 2 && m.hasColumn(f[1])) {
		name, f = f[0], f[1:]
	}
	j, ok := m.colIndex[f[0]]
	if !ok {
		m.fault("there is no column %q", f[0])
		return
	}
	if !m.firstSet("BOUNDS", name) {
		return
	}
	v := 0.0
	if number {
		if v, ok = m.number(f[1]); !ok {
			return
		}
		if math.Abs(v) >= mpsInfinite {
			v = math.Inf(int(math.Copysign(1, v)))
		}
	}
	m.setBound(kind, j, v)
}

func (m *mpsParser) hasColumn(name string) bool {
	_, ok := m.colIndex[name]
	return ok
}

func (m *mpsParser) setBound(kind string, j int, v float64) {
	c := &m.columns[j]
	switch kind {
	case "UP", "UI":
		c.Upper = v
		if v < 0 && c.Lower == 0 {
			c.Lower = math.Inf(-1)
			m.note("a negative upper bound of a column without a lower one takes the lower bound zero away")
		}
	case "LO", "LI":
		c.Lower = v
	case "FX":
		c.Lower, c.Upper = v, v
	case "FR":
		c.Lower, c.Upper = math.Inf(-1), math.Inf(1)
	case "MI":
		c.Lower = math.Inf(-1)
	case "PL":
		c.Upper = math.Inf(1)
	case "BV":
		c.Lower, c.Upper = 0, 1
	}
	if kind == "BV" || kind == "UI" || kind == "LI" {
		m.whole[j] = true
	}
}

func (m *mpsParser) quadratic(section string, f []string) {
	if len(f) != 3 && len(f) != 5 {
		m.fault("a line of %s is a column and one or two pairs of column and number, not %q", section, strings.Join(f, " "))
		return
	}
	i, ok := m.colIndex[f[0]]
	if !ok {
		m.fault("there is no column %q", f[0])
		return
	}
	for k := 1; k+1 < len(f); k += 2 {
		j, ok := m.colIndex[f[k]]
		if !ok {
			m.fault("there is no column %q", f[k])
			continue
		}
		v, ok := m.finiteNumber(f[k+1])
		if !ok {
			continue
		}
		at := [2]int{i, j}
		if section != "QMATRIX" {
			at = [2]int{max(i, j), min(i, j)}
		}
		if m.given[at] {
			m.fault("the entry of columns %q and %q is given twice", f[0], f[k])
			continue
		}
		m.given[at] = true
		if section == "QMATRIX" {
			m.mirrored(at, v)
			continue
		}
		m.hessian = append(m.hessian, HessianEntry{at[0], at[1], v})
	}
}

// mirrored takes an entry of both triangles once its mirror image is there.
func (m *mpsParser) mirrored(at [2]int, v float64) {
	if at[0] == at[1] {
		m.hessian = append(m.hessian, HessianEntry{at[0], at[1], v})
		return
	}
	mirror := [2]int{at[1], at[0]}
	w, ok := m.both[mirror]
	if !ok {
		m.both[at] = v
		return
	}
	if v != w {
		m.fault("the entries of columns %q and %q differ: %v and %v", m.columns[at[0]].Name, m.columns[at[1]].Name, v, w)
		return
	}
	delete(m.both, mirror)
	m.hessian = append(m.hessian, HessianEntry{at[0], at[1], v})
}

// bounds returns the bounds of a row from its kind, right-hand side and range.
func (r mpsRow) bounds() (lower, upper float64) {
	span := math.Abs(r.span)
	switch {
	case r.kind == 'N':
		return math.Inf(-1), math.Inf(1)
	case r.kind == 'L' && span >= 0:
		return r.right - span, r.right
	case r.kind == 'L':
		return math.Inf(-1), r.right
	case r.kind == 'G' && span >= 0:
		return r.right, r.right + span
	case r.kind == 'G':
		return r.right, math.Inf(1)
	case r.span > 0:
		return r.right, r.right + span
	case r.span < 0:
		return r.right - span, r.right
	}
	return r.right, r.right
}

// model builds the problem.
func (m *mpsParser) model() (*Model, error) {
	if len(m.both) > 0 {
		return nil, &FormatError{Faults: []FormatFault{{m.line, fmt.Sprintf("%d entries of QMATRIX have no mirror image", len(m.both))}}}
	}
	if len(m.rows)*max(len(m.columns), 1) > mpsLargestMatrix {
		return nil, &FormatError{Faults: []FormatFault{{m.line, fmt.Sprintf("%d rows by %d columns are too many for dense rows", len(m.rows), len(m.columns))}}}
	}
	p, err := NewProblem(m.sense, m.columns)
	if err != nil {
		return nil, err
	}
	n := len(m.columns)
	a := make([]float64, len(m.rows)*n)
	for j, list := range m.entries {
		for _, e := range list {
			a[e.row*n+j] = e.value
		}
	}
	for i, r := range m.rows {
		lower, upper := r.bounds()
		if _, err := p.AddRow(Row{Name: r.name, Coefficients: a[i*n : i*n+n], Lower: lower, Upper: upper}); err != nil {
			return nil, err
		}
	}
	if err := p.SetHessian(Hessian{Entries: m.hessian}); err != nil {
		return nil, err
	}
	out := &Model{Name: m.name, Problem: p, ObjectiveName: m.objective, Constant: m.constant, Notes: m.notes}
	for j, w := range m.whole {
		if w {
			out.Integer = append(out.Integer, j)
		}
	}
	return out, nil
}
