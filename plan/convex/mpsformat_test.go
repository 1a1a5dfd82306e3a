package convex

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
)

const smallMPS = `* a comment
NAME  three wells
OBJSENSE
    MAX
ROWS
 N  yield
 L  spring
 G  demand
 E  share
 N  report
COLUMNS
 M1 'MARKER' 'INTORG'
 W1 yield 1 spring 2.5D-3
 W1 demand 1
 M2 'MARKER' 'INTEND'
 W2` + "\t" + `yield 1 spring 1e-3
 W2 demand 1 share -1
 W2 report 7
 W3 yield 1 share 1
RHS
 R spring 3 demand 10
 R yield -5
 other spring 99
RANGES
 A spring 1 demand 20
 A share -4
BOUNDS
 UP B W1 900
 MI B W2
 UP B W2 1e30
 FR B W3
QUADOBJ
 W1 W1 -2
 W2 W1 -0.5
 W2 W2 -3
ENDATA
`

func TestReadMPS(t *testing.T) {
	m, err := ReadMPS(strings.NewReader(smallMPS))
	if err != nil {
		t.Fatal(err)
	}
	p := m.Problem
	if m.Name != "three wells" || m.ObjectiveName != "yield" || m.Constant != 5 || p.Sense() != Maximise || !reflect.DeepEqual(m.Integer, []int{0}) {
		t.Errorf("%+v", m)
	}
	wantColumns := []Column{{"W1", 1, 0, 900}, {"W2", 1, -inf, inf}, {"W3", 1, -inf, inf}}
	for j, want := range wantColumns {
		if got := p.Column(j); got != want {
			t.Errorf("column %d: %+v, want %+v", j, got, want)
		}
	}
	wantRows := []Row{
		{"spring", []float64{2.5e-3, 1e-3, 0}, 2, 3}, {"demand", []float64{1, 1, 0}, 10, 30},
		{"share", []float64{0, -1, 1}, -4, 0}, {"report", []float64{0, 7, 0}, -inf, inf},
	}
	for i, want := range wantRows {
		if got := p.Row(i); !reflect.DeepEqual(got, want) {
			t.Errorf("row %d: %+v, want %+v", i, got, want)
		}
	}
	if got, want := p.HessianEntries(), []HessianEntry{{0, 0, -2}, {1, 0, -0.5}, {1, 1, -3}}; !reflect.DeepEqual(got, want) {
		t.Errorf("Hessian %v, want %v", got, want)
	}
	if len(m.Notes) != 2 {
		t.Errorf("notes %q, want one on the row of kind N and one on the second set", m.Notes)
	}
}

// TestReadMPSFixedColumns has blanks in names and no name of the set.
func TestReadMPSFixedColumns(t *testing.T) {
	line := func(fields ...any) string { return fmt.Sprintf("    %-8s  %-8s  %12s   %-8s  %12s\n", fields...) }
	text := "NAME\nROWS\n N  COST A\n L  LIM  1\nCOLUMNS\n" + line("W   1", "COST A", "1.0", "LIM  1", "2.0") + "RHS\n" +
		line("", "LIM  1", "4.0", "COST A", "-3.0") + "BOUNDS\n UP BND       W   1              1.5\nENDATA\n"
	m, err := ReadMPS(strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	if c := m.Problem.Column(0); c != (Column{"W   1", 1, 0, 1.5}) || m.Constant != 3 || m.Problem.Row(0).Upper != 4 {
		t.Errorf("%+v %+v %v", c, m.Problem.Row(0), m.Constant)
	}
}

func TestReadMPSBoundKinds(t *testing.T) {
	head := "NAME\nROWS\n N c\nCOLUMNS\n x c 1\nRHS\nBOUNDS\n"
	for _, c := range []struct {
		lines        string
		lower, upper float64
		whole        bool
		reason       string
	}{
		{"", 0, inf, false, "none"}, {" UP b x 4\n", 0, 4, false, "upper"}, {" LO b x -4\n", -4, inf, false, "lower"},
		{" FX b x 4\n", 4, 4, false, "fixed"}, {" FR b x\n", -inf, inf, false, "free"}, {" MI b x\n", -inf, inf, false, "no lower"},
		{" LO b x 3\n PL b x\n", 3, inf, false, "no upper"}, {" BV b x\n", 0, 1, true, "binary"}, {" UI b x 7\n", 0, 7, true, "whole"},
		{" LI b x 2\n", 2, inf, true, "whole"}, {" UP b x -4\n", -inf, -4, false, "negative upper"}, {" UP x 4\n", 0, 4, false, "no set"},
		{" FR x\n", -inf, inf, false, "no set, no number"}, {" BV b x 1\n", 0, 1, true, "number not needed"}, {" UP b x 1e31\n", 0, inf, false, "infinity as a number"},
		{" UP b x inf\n", 0, inf, false, "infinity as a word"}, {" UP a x 4\n UP b x 9\n", 0, 4, false, "second set"},
	} {
		m, err := ReadMPS(strings.NewReader(head + c.lines + "ENDATA\n"))
		if err != nil {
			t.Errorf("%s: %v", c.reason, err)
			continue
		}
		if got := m.Problem.Column(0); got.Lower != c.lower || got.Upper != c.upper || (len(m.Integer) == 1) != c.whole {
			t.Errorf("%s: %+v %v", c.reason, got, m.Integer)
		}
	}
}

func TestReadMPSFaults(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "without ENDATA"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\n", "without ENDATA"},
		{"NAME\nROWS\n L r\nENDATA\n", "no objective"},
		{"NAME\nROWS\n N c\n X r\nENDATA\n", "line 4: a row is"},
		{"NAME\nROWS\n N c\n L r\n L r\nENDATA\n", `line 5: row "r" is given twice`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x d 1\nENDATA\n", `line 5: there is no row "d"`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c one\nENDATA\n", `line 5: "one" is not a number`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c NaN\nENDATA\n", `is not a number`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c Inf\nENDATA\n", `is not finite`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 0x1p3\nENDATA\n", `is not a number`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\n x c 2\nENDATA\n", "line 6: column \"x\" has two numbers"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\n y c 1\n x c 1\nENDATA\n", "in two places"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\nBOUNDS\n SC b x 1\nENDATA\n", "unknown kind of bound"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\nBOUNDS\n UP b y 1\nENDATA\n", `there is no column "y"`},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\nSOS\nENDATA\n", "unknown section"},
		{"NAME\nOBJSENSE SOME\nROWS\n N c\nENDATA\n", "neither MIN nor MAX"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\nQUADOBJ\n x x 1\n x x 2\nENDATA\n", "given twice"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\n y c 1\nQMATRIX\n x y 1\n y x 2\nENDATA\n", "differ"},
		{"NAME\nROWS\n N c\nCOLUMNS\n x c 1\n y c 1\nQMATRIX\n x y 1\nENDATA\n", "no mirror image"},
		{" x\nENDATA\n", "outside of a known section"},
	} {
		_, err := ReadMPS(strings.NewReader(c.text))
		var format *FormatError
		if !errors.As(err, &format) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: %v, want %q", c.text, err, c.want)
		}
	}
	_, err := ReadMPS(strings.NewReader("NAME\nROWS\n N c\nCOLUMNS\n x c 1\nBOUNDS\n LO b x 4\n UP b x 3\nENDATA\n"))
	var data *DataError
	if !errors.As(err, &data) {
		t.Errorf("crossed bounds: %v", err)
	}
	if _, err := ReadMPS(strings.NewReader("NAME\n" + strings.Repeat("x", 2*mpsLongestLine))); err == nil {
		t.Error("a line without end was taken")
	}
}

// roundTrip writes and reads back.
func roundTrip(t testing.TB, m *Model) *Model {
	t.Helper()
	var b bytes.Buffer
	if err := WriteMPS(&b, m); err != nil {
		t.Fatal(err)
	}
	text := b.String()
	back, err := ReadMPS(&b)
	if err != nil {
		t.Fatalf("%v in\n%.2000s", err, text)
	}
	return back
}

// sameModel compares two models but for names that the format cannot hold.
func sameModel(t testing.TB, a, b *Model) {
	t.Helper()
	p, q := a.Problem, b.Problem
	if p.sense != q.sense || a.Constant != b.Constant || !reflect.DeepEqual(a.Integer, b.Integer) || p.Rows() != q.Rows() || p.Columns() != q.Columns() {
		t.Fatalf("sense, constant, whole columns or sizes differ: %+v %+v", a, b)
	}
	for j := range p.columns {
		c, d := p.columns[j], q.columns[j]
		if writable(c.Name) && d.Name != c.Name && !repeated(p, c.Name) {
			t.Errorf("column %q became %q", c.Name, d.Name)
		}
		c.Name, d.Name = "", ""
		if c != d {
			t.Errorf("column %d: %+v became %+v", j, c, d)
		}
	}
	for i := range p.a {
		for j, v := range p.a[i] {
			if v != q.a[i][j] {
				t.Fatalf("entry %d of row %d: %v became %v", j, i, v, q.a[i][j])
			}
		}
	}
	for i := range p.rowLower {
		// A row with two bounds may lose a digit of one of them.
		if !near2(p.rowLower[i], q.rowLower[i]) || !near2(p.rowUpper[i], q.rowUpper[i]) {
			t.Errorf("row %d: %v..%v became %v..%v", i, p.rowLower[i], p.rowUpper[i], q.rowLower[i], q.rowUpper[i])
		}
	}
	if !reflect.DeepEqual(p.HessianEntries(), q.HessianEntries()) {
		t.Errorf("Hessian %v became %v", p.HessianEntries(), q.HessianEntries())
	}
}

func repeated(p *Problem, name string) bool {
	count := 0
	for _, c := range p.columns {
		if c.Name == name {
			count++
		}
	}
	return count > 1
}

func near2(a, b float64) bool {
	return a == b || math.Abs(a-b) <= 0x1p-52*math.Max(math.Abs(a), math.Abs(b))*4
}

func TestMPSRoundTrip(t *testing.T) {
	m, err := ReadMPS(strings.NewReader(smallMPS))
	if err != nil {
		t.Fatal(err)
	}
	sameModel(t, m, roundTrip(t, m))
	for seed := uint64(0); seed < 50; seed++ {
		rng := rand.New(rand.NewPCG(seed, 19))
		p := randomQuadratic(t, rng, 1+rng.IntN(8), rng.IntN(8))
		names := []string{"", "well", "well", "two words", "*star", "W1", "column3", "tab\tname", "Quelle Süd", "Süd"}
		for j := range p.columns {
			p.columns[j].Name = names[rng.IntN(len(names))]
		}
		m := &Model{Name: " a  name ", Problem: p, ObjectiveName: []string{"", "row1", "my cost"}[rng.IntN(3)], Constant: rng.NormFloat64()}
		for j := range p.columns {
			if rng.IntN(3) == 0 {
				m.Integer = append(m.Integer, j)
			}
		}
		sameModel(t, m, roundTrip(t, m))
	}
}

// failingWriter fails at its n-th byte.
type failingWriter struct{ left int }

func (w *failingWriter) Write(b []byte) (int, error) {
	if w.left -= len(b); w.left < 0 {
		return 0, errors.New("disk full")
	}
	return len(b), nil
}

func TestWriteMPSReportsFailure(t *testing.T) {
	m, err := ReadMPS(strings.NewReader(smallMPS))
	if err != nil {
		t.Fatal(err)
	}
	for n := 0; n < 100; n += 7 {
		if err := WriteMPS(&failingWriter{n}, m); err == nil {
			t.Errorf("no error with room for %d bytes", n)
		}
	}
}

// TestReadMPSOpenSets reads every file of the open sets, compares the sizes with the index, and writes and reads back the small ones.
func TestReadMPSOpenSets(t *testing.T) {
	for _, folder := range []string{"lp", "lp-infeasible", "qp", "mip"} {
		dir := sharedData(t, folder)
		for _, row := range readIndex(t, filepath.Join(dir, "index.csv")) {
			size := number64(row["rows"]) * number64(row["cols"])
			if size > netlibShort && !long() {
				continue
			}
			m := openModel(t, filepath.Join(dir, row["file"]))
			free := 0
			for i := range m.Problem.Rows() {
				if !finite(m.Problem.rowLower[i]) && !finite(m.Problem.rowUpper[i]) {
					free++
				}
			}
			if float64(m.Problem.Rows()-free) != number64(row["rows"]) || float64(m.Problem.Columns()) != number64(row["cols"]) {
				t.Errorf("%s/%s: %d rows, %d of them free, %d columns; index %s, %s", folder, row["name"], m.Problem.Rows(), free, m.Problem.Columns(), row["rows"], row["cols"])
			}
			if w, ok := row["integer_cols"]; ok && float64(len(m.Integer)) != number64(w) {
				t.Errorf("%s/%s: %d whole columns, index %s", folder, row["name"], len(m.Integer), w)
			}
			if size < 20_000 {
				sameModel(t, m, roundTrip(t, m))
			}
		}
	}
}

func FuzzReadMPS(f *testing.F) {
	f.Add(smallMPS)
	f.Add("NAME\nROWS\n N  COST A\n L  LIM  1\nCOLUMNS\n    W   1     COST A          1.0   LIM  1          2.0\nRHS\nENDATA\n")
	f.Add("NAME\nROWS\n N c\n E e\nCOLUMNS\n x c 1 e 1e300\nRHS\n r e 1e300\nRANGES\n r e -1e300\nBOUNDS\n BV b x\nENDATA\n")
	f.Add("NAME\nROWS\n N c\nCOLUMNS\n x c 1\n y c 1\nQMATRIX\n x y 1\n y x 1\nENDATA\n")
	f.Fuzz(func(t *testing.T, text string) {
		m, err := ReadMPS(strings.NewReader(text))
		if err != nil {
			return
		}
		sameModel(t, m, roundTrip(t, m))
	})
}
