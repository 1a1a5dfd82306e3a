package convex

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// WriteMPS writes a model in the free MPS format with QUADOBJ for the Hessian, numbers to the last digit, so that ReadMPS gives back
// the same problem. A name that the format cannot hold (empty, with blanks or control characters, or used twice) is replaced by
// the number of its row or column; a row with two bounds that no right-hand side and range give exactly may lose one digit.
func WriteMPS(w io.Writer, m *Model) error {
	for _, j := range m.Integer {
		m.Problem.mustColumn(j)
	}
	b := bufio.NewWriter(w)
	x := &mpsWriter{w: b, m: m, p: m.Problem}
	x.names()
	x.rows()
	x.columnSection()
	x.rightSides()
	x.boundSection()
	x.hessianSection()
	fmt.Fprintln(b, "ENDATA")
	if err := b.Flush(); err != nil {
		return fmt.Errorf("convex: MPS: %w", err)
	}
	return nil
}

type mpsWriter struct {
	w        *bufio.Writer
	m        *Model
	p        *Problem
	cost     string
	row, col []string
}

// writable tells that the free format can hold the name.
func writable(name string) bool {
	if name == "" || name[0] == '*' || name[0] == '\'' || len(name) > mpsLongestLine/8 {
		return false
	}
	for _, r := range name {
		if r <= ' ' || r == 0x7f || r == 0x85 || r == 0xa0 || r > 0x2000 && strings.TrimSpace(string(r)) == "" || r == 0x1680 {
			return false
		}
	}
	return true
}

// distinct replaces names that cannot stand.
func distinct(names []string, prefix string, taken map[string]bool) []string {
	out := make([]string, len(names))
	count := map[string]int{}
	for _, n := range names {
		count[n]++
	}
	for i, n := range names {
		if writable(n) && count[n] == 1 && !taken[n] {
			out[i], taken[n] = n, true
		}
	}
	for i := range out {
		for k := 0; out[i] == ""; k++ {
			n := prefix + strconv.Itoa(i+1) + strings.Repeat("_", k)
			if !taken[n] {
				out[i], taken[n] = n, true
			}
		}
	}
	return out
}

func (x *mpsWriter) names() {
	rows, columns := map[string]bool{}, map[string]bool{}
	x.cost = "cost"
	if writable(x.m.ObjectiveName) {
		x.cost = x.m.ObjectiveName
	}
	rows[x.cost] = true
	x.row = distinct(x.p.rowName, "row", rows)
	names := make([]string, x.p.Columns())
	for j := range names {
		names[j] = x.p.columns[j].Name
	}
	x.col = distinct(names, "column", columns)
}

func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// kind returns how row i is written: the letter, the right-hand side, and the range or NaN.
func (x *mpsWriter) kind(i int) (letter string, right, span float64) {
	lower, upper := x.p.rowLower[i], x.p.rowUpper[i]
	switch {
	case lower == upper:
		return "E", lower, math.NaN()
	case !finite(lower) && !finite(upper):
		return "N", 0, math.NaN()
	case !finite(upper):
		return "G", lower, math.NaN()
	case !finite(lower):
		return "L", upper, math.NaN()
	}
	span = upper - lower
	for _, s := range [3]float64{span, math.Nextafter(span, math.Inf(1)), math.Nextafter(span, 0)} {
		if lower+s == upper {
			return "G", lower, s
		}
		if upper-s == lower {
			return "L", upper, s
		}
	}
	return "G", lower, span
}

func (x *mpsWriter) rows() {
	name := strings.Join(strings.Fields(x.m.Name), " ")
	fmt.Fprintln(x.w, strings.TrimSpace("NAME "+name))
	if x.p.sense == Maximise {
		fmt.Fprintln(x.w, "OBJSENSE\n    MAX")
	}
	fmt.Fprintln(x.w, "ROWS\n N", x.cost)
	for i, n := range x.row {
		letter, _, _ := x.kind(i)
		fmt.Fprintf(x.w, " %s %s\n", letter, n)
	}
}

func (x *mpsWriter) columnSection() {
	fmt.Fprintln(x.w, "COLUMNS")
	whole := make([]bool, len(x.col))
	for _, j := range x.m.Integer {
		whole[j] = true
	}
	in, markers := false, 0
	mark := func(to bool) {
		if to == in {
			return
		}
		word := "INTEND"
		if to {
			word = "INTORG"
		}
		markers++
		fmt.Fprintf(x.w, " MARKER%d 'MARKER' '%s'\n", markers, word)
		in = to
	}
	for j, n := range x.col {
		mark(whole[j])
		fmt.Fprintf(x.w, " %s %s %s\n", n, x.cost, number(x.p.columns[j].Cost))
		for i, r := range x.row {
			if v := x.p.a[i][j]; v != 0 {
				fmt.Fprintf(x.w, " %s %s %s\n", n, r, number(v))
			}
		}
	}
	mark(false)
}

func (x *mpsWriter) rightSides() {
	fmt.Fprintln(x.w, "RHS")
	if x.m.Constant != 0 {
		fmt.Fprintf(x.w, " right %s %s\n", x.cost, number(-x.m.Constant))
	}
	var ranges []string
	for i, n := range x.row {
		_, right, span := x.kind(i)
		if right != 0 {
			fmt.Fprintf(x.w, " right %s %s\n", n, number(right))
		}
		if span >= 0 {
			ranges = append(ranges, fmt.Sprintf(" range %s %s", n, number(span)))
		}
	}
	if len(ranges) > 0 {
		fmt.Fprintln(x.w, "RANGES")
		fmt.Fprintln(x.w, strings.Join(ranges, "\n"))
	}
}

func (x *mpsWriter) boundSection() {
	fmt.Fprintln(x.w, "BOUNDS")
	for j, n := range x.col {
		lower, upper := x.p.columns[j].Lower, x.p.columns[j].Upper
		switch {
		case !finite(lower) && !finite(upper):
			fmt.Fprintf(x.w, " FR bound %s\n", n)
			continue
		case lower == upper:
			fmt.Fprintf(x.w, " FX bound %s %s\n", n, number(lower))
			continue
		case !finite(lower):
			fmt.Fprintf(x.w, " MI bound %s\n", n)
		case lower != 0:
			fmt.Fprintf(x.w, " LO bound %s %s\n", n, number(lower))
		}
		if finite(upper) {
			fmt.Fprintf(x.w, " UP bound %s %s\n", n, number(upper))
		}
	}
}

func (x *mpsWriter) hessianSection() {
	entries := x.p.HessianEntries()
	if len(entries) == 0 {
		return
	}
	fmt.Fprintln(x.w, "QUADOBJ")
	for _, e := range entries {
		fmt.Fprintf(x.w, " %s %s %s\n", x.col[e.Column], x.col[e.Row], number(e.Value))
	}
}
