package workbook

import (
	"archive/zip"
	"bytes"
	"encoding/xml"
	"io"
	"math"
	"reflect"
	"regexp"
	"runtime"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"springbound/plan"
)

// hostileNames try to become formulas, markup, references or damage.
var hostileNames = []string{"=1+1", "+SUM(A1)", "-2", "@SUM(A1)", "<script>alert(1)</script>", `"&A1&"`, "]]>", "&amp;", "'quoted'", "a\tb\nc", "\x00\x01\x1b", "\xff\xfe", "=HYPERLINK(\"http://example.invalid\")", "日本語の井戸", strings.Repeat("long ", 9000)}

// hostileIDs are legal ids that look like addresses or reserved words of a spreadsheet.
var hostileIDs = []string{"W1", "R1C1", "C", "R", "A1", "w1", "W-1", "W.1", "TRUE", "1", "-", "XFD1048576", "a.b-c_d", strings.Repeat("x", 40)}

func hostileReport() *plan.Report {
	r := largeReport(len(hostileIDs), len(hostileNames))
	rename := map[string]string{}
	for i := range r.Wells {
		rename[r.Wells[i].ID] = hostileIDs[i]
		r.Wells[i].ID = hostileIDs[i]
		r.Wells[i].Name, r.Wells[i].Owner, r.Wells[i].Source = hostileNames[i], hostileNames[(i+1)%len(hostileNames)], hostileNames[(i+2)%len(hostileNames)]
	}
	for i := range r.Sensitivities.Wells {
		r.Sensitivities.Wells[i] = rename[r.Sensitivities.Wells[i]]
		r.CaptureWells[i] = rename[r.CaptureWells[i]]
	}
	r.Contributions.Wells = r.Sensitivities.Wells
	for k := range r.Receptors {
		rec := &r.Receptors[k]
		rec.Name, rec.Use, rec.Place = hostileNames[k], hostileNames[k], hostileNames[k]
		rec.Limits[0].Sentence, rec.Limits[0].Entered = hostileNames[k], hostileNames[k]
		rec.Limits[0].ID = hostileIDs[k%len(hostileIDs)]
	}
	r.Title, r.Reference, r.PreparedBy = "=1+1 & <b>\"9\" &P of &N", "&D&T", "@x"
	r.NotAssessed, r.Cautions, r.Findings = hostileNames, hostileNames, hostileNames
	r.Quotas = []plan.QuotaResult{quotaOf(r, "=1+1", "<x>", "per day", 1e5, 1e5, 1, hostileIDs[:3]...)}
	return r
}

func TestHostileNamesStayText(t *testing.T) {
	r := hostileReport()
	data := mustWrite(t, r)
	f, cells := formulaCells(t, data)
	allowed := regexp.MustCompile(`^[A-Za-z0-9$!:,.()*/+<>="'▲●○◐– -]*$`)
	for _, c := range cells {
		body := c.formula
		for _, own := range []string{changedText, "a spring would stop at these rates, its flow is not linear any more", "a level falls below the aquifer's top, the aquifer is not confined there"} {
			body = strings.ReplaceAll(body, own, "")
		}
		if !allowed.MatchString(body) || strings.Contains(body, "HYPERLINK") || strings.Contains(body, "script") {
			t.Errorf("%s!%s: a name went into the formula %s", c.sheet, c.cell, c.formula)
		}
	}
	b := layout(t, r)
	for i := range r.Wells {
		name := cellName(b.planRows.first+i, b.planRows.name)
		got, err := f.GetCellValue("Plan", name)
		if err != nil {
			t.Fatal(err)
		}
		if want := cleanText(hostileNames[i]); got != want {
			t.Errorf("name of well %d reads %q, want %q", i, got, want)
		}
		if formula, _ := f.GetCellFormula("Plan", name); formula != "" {
			t.Errorf("name of well %d became the formula %s", i, formula)
		}
	}
	wellFormed(t, data)
}

// wellFormed reads every part of the file as XML.
func wellFormed(t *testing.T, data []byte) {
	t.Helper()
	z, err := zip.NewReader(bytes.NewReader(data), int64(len(data)))
	if err != nil {
		t.Fatal(err)
	}
	for _, part := range z.File {
		in, err := part.Open()
		if err != nil {
			t.Fatal(err)
		}
		decoder := xml.NewDecoder(in)
		for {
			if _, err := decoder.Token(); err == io.EOF {
				break
			} else if err != nil {
				t.Errorf("%s: %v", part.Name, err)
				break
			}
		}
		in.Close()
	}
}

// A defined name must not look like a cell's address in either notation, and must not repeat whatever its case.
func TestDefinedNamesAreLegal(t *testing.T) {
	for _, r := range []*plan.Report{richReport(), hostileReport()} {
		f, err := excelize.OpenReader(bytes.NewReader(mustWrite(t, r)))
		if err != nil {
			t.Fatal(err)
		}
		legal := regexp.MustCompile(`^[A-Za-z_][A-Za-z0-9_.]*$`)
		address := regexp.MustCompile(`(?i)^([a-z]{1,3}[0-9]{1,7}|r[0-9]*c?[0-9]*|c[0-9]*)$`)
		refers := regexp.MustCompile(`^('[^']+'|[A-Za-z]+)!\$[A-Z]+\$[0-9]+(:\$[A-Z]+\$[0-9]+)?$`)
		seen := map[string]bool{}
		rates := 0
		for _, n := range f.GetDefinedName() {
			if strings.HasPrefix(n.Name, "_xlnm.") {
				continue
			}
			if !legal.MatchString(n.Name) || address.MatchString(n.Name) || len(n.Name) > maxName+5 || !refers.MatchString(n.RefersTo) {
				t.Errorf("name %q for %q is not legal", n.Name, n.RefersTo)
			}
			if seen[strings.ToLower(n.Name)] {
				t.Errorf("name %q stands twice", n.Name)
			}
			seen[strings.ToLower(n.Name)] = true
			if strings.HasPrefix(n.Name, "rate_") {
				rates++
			}
		}
		if rates != len(r.Wells) {
			t.Errorf("%d names of rates for %d wells", rates, len(r.Wells))
		}
		f.Close()
	}
}

// Any number of the report that is not finite must stop the writer with an error, never reach a cell.
func TestNonFiniteNumbersAreRefused(t *testing.T) {
	fields := func(r *plan.Report) []reflect.Value {
		var out []reflect.Value
		var walk func(v reflect.Value)
		walk = func(v reflect.Value) {
			switch v.Kind() {
			case reflect.Pointer:
				if !v.IsNil() {
					walk(v.Elem())
				}
			case reflect.Struct:
				for i := 0; i < v.NumField(); i++ {
					walk(v.Field(i))
				}
			case reflect.Slice:
				for i := 0; i < v.Len(); i++ {
					walk(v.Index(i))
				}
			case reflect.Float64:
				out = append(out, v)
			}
		}
		walk(reflect.ValueOf(r).Elem())
		return out
	}
	total := len(fields(richReport()))
	const step = 23 // some of the fields, so that the test stays short; the offsets change with the kind of number
	for k, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		for i := k; i < total; i += step {
			r := richReport()
			fields(r)[i].SetFloat(bad)
			if _, err := Write(r); err == nil {
				t.Errorf("field %d = %v was written", i, bad)
			}
		}
	}
	r := richReport()
	r.Receptors[2].NoPumping = math.NaN()
	if _, err := Write(r); err == nil || !strings.Contains(err.Error(), "of sheet \"Receptors\" (line \"P3\")") {
		t.Errorf("error does not name the cell: %v", err)
	}
}

func TestSameReportSameBytes(t *testing.T) {
	before := runtime.GOMAXPROCS(1)
	defer runtime.GOMAXPROCS(before)
	first := mustWrite(t, richReport())
	for _, n := range []int{1, 2, 8} {
		runtime.GOMAXPROCS(n)
		if !bytes.Equal(first, mustWrite(t, richReport())) {
			t.Errorf("bytes differ with %d processors", n)
		}
	}
}

// Large fields must stay quick to write and small to send.
func TestLargeFieldIsQuickAndSmall(t *testing.T) {
	const wells, receptors = 300, 40
	const most = 3 << 20               // bytes
	const longest = 10 * time.Second   // far above the second that it takes, since other work may share the machine
	r := largeReport(wells, receptors) // 300 x 300 drawdowns, 300 x 40 sensitivities and two formulas for each
	start := time.Now()
	data := mustWrite(t, r)
	took := time.Since(start)
	t.Logf("%d wells, %d receptors: %v, %d bytes", wells, receptors, took, len(data))
	if len(data) > most || took > longest {
		t.Errorf("%d bytes in %v", len(data), took)
	}
}

func TestReportsThatDoNotFitTogether(t *testing.T) {
	for name, spoil := range map[string]func(*plan.Report){
		"twin well":      func(r *plan.Report) { r.Wells[1].ID = r.Wells[0].ID },
		"duty hours":     func(r *plan.Report) { r.Wells[0].DutyHours = 0 },
		"nan hours":      func(r *plan.Report) { r.Wells[0].DutyHours = math.NaN() },
		"short slopes":   func(r *plan.Report) { r.Sensitivities.Values[0] = r.Sensitivities.Values[0][:2] },
		"unknown unit":   func(r *plan.Report) { r.RateUnit = "buckets" },
		"unknown well":   func(r *plan.Report) { r.Quotas[0].Wells = []string{"nobody"} },
		"short capture":  func(r *plan.Report) { r.Capture[0].ShareByWell = nil },
		"short drawdown": func(r *plan.Report) { r.Wells[0].DrawdownByWell = r.Wells[0].DrawdownByWell[:1] },
		"no wells":       func(r *plan.Report) { r.Wells = nil },
		"twin receptor":  func(r *plan.Report) { r.Receptors[1].ID = r.Receptors[0].ID },
	} {
		r := richReport()
		spoil(r)
		if _, err := Write(r); err == nil {
			t.Errorf("%s: written without an error", name)
		}
	}
}
