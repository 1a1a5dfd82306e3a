package gisio

import (
	"archive/zip"
	"bytes"
	"io"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

func TestCellNumbers(t *testing.T) {
	for _, c := range []struct {
		text, decimal string
		want          float64
		ok            bool
		reason        string
	}{
		{"12.5", ".", 12.5, true, "plain"},
		{"12,5", ",", 12.5, true, "decimal comma"},
		{"-0,25", ",", -0.25, true, "sign"},
		{"\u22123,5", ",", -3.5, true, "typographic minus"},
		{"1,234.5", ".", 1234.5, true, "both marks leave no doubt"},
		{"1.234,5", ",", 1234.5, true, "both marks leave no doubt"},
		{"1,234,567", ".", 1234567, true, "two separators cannot be decimal marks"},
		{"1.234.567", ",", 1234567, true, "two separators cannot be decimal marks"},
		{"1 234,5", ",", 1234.5, true, "a blank is no decimal mark"},
		{"1\u202f234", ".", 1234, true, "a narrow blank"},
		{"1'234'567.5", ".", 1234567.5, true, "apostrophes"},
		{"1e-5", ".", 1e-5, true, "exponent"},
		{"1,5e3", ",", 1500, true, "exponent behind a decimal comma"},
		{"1,234", ".", 0, false, "may be 1.234 or 1234"},
		{"1.234", ",", 0, false, "may be 1.234 or 1234"},
		{"12,34.5", ".", 0, false, "no group of three"},
		{"1,2345", ".", 0, false, "no group of three"},
		{"1 23", ".", 0, false, "no group of three"},
		{"1.2.3", ".", 0, false, "two decimal marks"},
		{"1.234,567.8", ".", 0, false, "separators on both sides"},
		{"1e999", ".", 0, false, "not finite"},
	} {
		v, err := parseCellNumber(c.text, c.decimal)
		if (err == nil) != c.ok || v != c.want {
			t.Errorf("%q with %q: %v, %v; want %v, %v (%s)", c.text, c.decimal, v, err, c.want, c.ok, c.reason)
		}
	}
}

func TestDecimalEvidence(t *testing.T) {
	for text, want := range map[string]decimalEvidence{"12": noEvidence, "1,234": noEvidence, "1.234": noEvidence, "0,234": commaIsDecimal, "0.234": pointIsDecimal, "12,5": commaIsDecimal,
		"12.5": pointIsDecimal, "1234,567": commaIsDecimal, "1.234,5": commaIsDecimal, "1,234.5": pointIsDecimal, "1.234.567": commaIsDecimal, "1,234,567": pointIsDecimal, "": noEvidence} {
		if got := evidenceOf(text); got != want {
			t.Errorf("%q: %v, want %v", text, got, want)
		}
	}
}

func TestDelimiterIsFound(t *testing.T) {
	for text, want := range map[string]rune{"a,b\n": ',', "a;b,c\n": ';', "a\tb;c\n": '\t', "# x;y\n\na,b\n": ',', "\"a;b\",c\n": ',', "a|b\n": '|', "a": ','} {
		if got := findDelimiter([]byte(text)); got != want {
			t.Errorf("%q: %q, want %q", text, got, want)
		}
	}
}

func TestGridKeepsRowNumbers(t *testing.T) {
	g, fs := ReadGrid("x.csv", []byte("\ufeff# comment\n\nid, name\n\"a\nb\",\"c \"\"d\"\"\"\n,\nW1,\u00a0x\n"), TableOptions{Name: "wells"})
	if len(fs) > 0 {
		t.Fatal(fs)
	}
	want := []Row{{3, []Cell{{Text: "id"}, {Text: "name"}}}, {4, []Cell{{Text: "a\nb"}, {Text: `c "d"`}}}, {7, []Cell{{Text: "W1"}, {Text: "x"}}}}
	if len(g.Rows) != len(want) {
		t.Fatalf("%d rows, want %d: blank ones and comments are left out", len(g.Rows), len(want))
	}
	for i, r := range g.Rows {
		if r.Number != want[i].Number || len(r.Cells) != 2 || r.Cells[0] != want[i].Cells[0] || r.Cells[1] != want[i].Cells[1] {
			t.Errorf("row %d is %v, want %v", i, r, want[i])
		}
	}
}

func TestFilesThatAreNoTables(t *testing.T) {
	book := func(change func(f *excelize.File)) []byte {
		f := excelize.NewFile()
		change(f)
		var b bytes.Buffer
		if err := f.Write(&b); err != nil {
			t.Fatal(err)
		}
		return b.Bytes()
	}
	for _, c := range []struct {
		label string
		data  []byte
		opt   TableOptions
		want  string
	}{
		{"UTF-16", []byte("\xff\xfea\x00"), TableOptions{}, "UTF-16"},
		{"Latin-1", []byte("a,b\nd\xe9but,1\n"), TableOptions{}, "line 2: found text that is not UTF-8"},
		{"zero byte", []byte("a,b\n\x00"), TableOptions{}, "line 2: found a zero byte"},
		{"old workbook", []byte("\xd0\xcf\x11\xe0\xa1"), TableOptions{}, "an old or encrypted workbook"},
		{"broken workbook", []byte("PK\x03\x04 rubbish"), TableOptions{}, "a workbook that cannot be read"},
		{"delimiter of two characters", []byte("a"), TableOptions{Delimiter: "ab"}, `delimiter is "ab"`},
		{"sheet that is not there", book(func(*excelize.File) {}), TableOptions{Name: "wells", Sheet: "bores"}, `sheet is "bores"; allowed: Sheet1`},
		{"several sheets", book(func(f *excelize.File) { f.NewSheet("b") }), TableOptions{Name: "wells"}, "several sheets, none called wells; allowed: Sheet1, b"},
		{"formula without a value", book(func(f *excelize.File) { f.SetCellFormula("Sheet1", "B2", "1+1"); f.SetCellValue("Sheet1", "C2", 1) }), TableOptions{}, "row 2: cell B2 is a formula without a stored value"},
		{"error value", withErrorCell(t, book(func(f *excelize.File) { f.SetCellValue("Sheet1", "B2", 7) })), TableOptions{}, `row 2: cell B2 is the error value "#DIV/0!"`},
	} {
		_, fs := ReadGrid("x", c.data, c.opt)
		if len(fs) != 1 || !strings.Contains(fs[0].String(), c.want) {
			t.Errorf("%s: %v, want one finding with %q", c.label, fs, c.want)
		}
	}
}

// withErrorCell turns the cell with the value 7 into one with an error value.
func withErrorCell(t *testing.T, book []byte) []byte {
	t.Helper()
	r, err := zip.NewReader(bytes.NewReader(book), int64(len(book)))
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	w := zip.NewWriter(&out)
	changed := false
	for _, f := range r.File {
		in, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		data, err := io.ReadAll(in)
		if err != nil {
			t.Fatal(err)
		}
		text := strings.Replace(string(data), `<c r="B2"><v>7</v>`, `<c r="B2" t="e"><v>#DIV/0!</v>`, 1)
		changed = changed || text != string(data)
		part, err := w.Create(f.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := part.Write([]byte(text)); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil || !changed {
		t.Fatal(err, "no cell was changed")
	}
	return out.Bytes()
}

func TestSheetCells(t *testing.T) {
	f := excelize.NewFile()
	style, err := f.NewStyle(&excelize.Style{NumFmt: 14})
	if err != nil {
		t.Fatal(err)
	}
	f.SetSheetRow("Sheet1", "A1", &[]any{"id", "when", "level [m]", "checked"})
	f.SetSheetRow("Sheet1", "A2", &[]any{"P1", 45000, 12.34567890123, true})
	f.SetCellStyle("Sheet1", "B2", "B2", style)
	var b bytes.Buffer
	if err := f.Write(&b); err != nil {
		t.Fatal(err)
	}
	g, fs := ReadGrid("x.xlsx", b.Bytes(), TableOptions{Name: "observations"})
	if len(fs) > 0 || len(g.Rows) != 2 {
		t.Fatal(fs, g)
	}
	c := g.Rows[1].Cells
	if c[1].Text != "2023-03-15" { // day 45000 of the 1900 calendar
		t.Errorf("a date reads as %q", c[1].Text)
	}
	if !c[2].Numeric || c[2].Number != 12.34567890123 {
		t.Errorf("a number reads as %v", c[2])
	}
	if c[3].Text != "true" {
		t.Errorf("a truth value reads as %q", c[3].Text)
	}
}

func FuzzTable(f *testing.F) {
	for _, s := range []string{"id,receptor,quantity,sense,value\nL1,R1,change,at_most,1 m\n", "id;value [m]\nL1;1,5\n", "\ufeffid\tvalue_m\nL1\t1.234\n", "# x\nid,value,unit\n,m,\nL1,\"1,2\n", "id,value\n[-],[m]\nL,−1 234,5",
		"PK\x03\x04", "value_m,value_ft,max\n1,2,3,4\n", "id,per_day (m3/d),wells\nA,12,W1;W2\n"} {
		f.Add([]byte(s), ".")
	}
	f.Fuzz(func(t *testing.T, data []byte, decimal string) {
		const largest = 1 << 16 // more only costs time
		if len(data) > largest {
			return
		}
		if decimal != "." && decimal != "," {
			decimal = ""
		}
		for _, s := range []*Section{&limitsSection, &wellsSection, &licencesSection} {
			var rd reader
			g, fs := ReadGrid("x", data, TableOptions{Name: s.Name, Decimal: decimal})
			for _, row := range rd.rows(g, s, nil, "p") {
				rec := rd.newRecord(s, row.at, row.list)
				for _, fd := range s.Fields {
					switch {
					case fd.Class == Level:
						rec.level(fd.Name)
					case fd.Class.numeric() && fd.Kind != LimitValue:
						rec.number(fd.Name)
					case fd.Class == Flag:
						rec.flag(fd.Name, false)
					case fd.Class == Word:
						rec.word(fd.Name, 0)
					case fd.Class == IDList:
						rec.ids(fd.Name)
					default:
						rec.text(fd.Name)
					}
				}
			}
			for _, fd := range append(fs, rd.findings...) {
				if strings.ContainsAny(fd.String(), "\n\r\x00") {
					t.Errorf("a finding over several lines: %q", fd)
				}
			}
		}
	})
}
