package gisio

import (
	"errors"
	"fmt"
	"strings"
	"testing"
)

func TestFindingString(t *testing.T) {
	for want, f := range map[string]Finding{
		`wells.geojson, line 12, column 8, layer wells, feature 3 (id "W4"): radius_m is "-3"; allowed: more than 0; give the radius of the screen`: {
			Severity: Error, File: "wells.geojson", Layer: "wells", Feature: FeatureName(2, "W4"), Property: "radius_m", Found: `"-3"`,
			Allowed: "more than 0", Hint: "give the radius of the screen", Line: 12, Column: 8},
		"limits.csv, row 4: found an empty row":         {File: "limits.csv", Feature: "row 4", Found: "an empty row"},
		"a.toml, line 3: key x is not right; remove it": {File: "a.toml", Line: 3, Property: "key x", Hint: "remove it"},
		"problem in the input":                          {},
		`found a\u001b[31mb\u000ac\u202e`:               {Found: "a\x1b[31mb\nc\u202e"},
	} {
		if got := f.String(); got != want {
			t.Errorf("got  %s\nwant %s", got, want)
		}
	}
}

func TestFindingsErr(t *testing.T) {
	var fs Findings
	if fs.Err() != nil {
		t.Error("no findings: want nil")
	}
	fs = append(fs, Finding{Severity: Warning, Found: "w"})
	if fs.Err() != nil || len(fs.Warnings()) != 1 {
		t.Error("a warning alone is no error")
	}
	for i := range 57 {
		fs = append(fs, Finding{Severity: Error, Found: fmt.Sprint("fault ", i)}, Finding{Severity: Warning, Found: "w"})
	}
	err := fmt.Errorf("reading: %w", fs.Err())
	var in *InputError
	if !errors.As(err, &in) || len(in.Findings) != 57 {
		t.Fatalf("want an InputError with all 57, got %v", err)
	}
	lines := strings.Split(in.Error(), "\n")
	if len(lines) != 1+MaxShownFindings+1 || !strings.Contains(lines[1], "fault 0") || !strings.Contains(lines[50], "fault 49") || !strings.Contains(lines[51], "and 7 more") {
		t.Errorf("shown:\n%s", in.Error())
	}
	for i, f := range fs.Errors() {
		if f.Found != fmt.Sprint("fault ", i) {
			t.Fatalf("order: %d is %s", i, f.Found)
		}
	}
	if one := (Findings{{Severity: Error, Found: "x"}}).Err().Error(); one != "found x" {
		t.Errorf("one error: %q", one)
	}
}

func TestSeverityString(t *testing.T) {
	if Warning.String() != "warning" || Error.String() != "error" || Severity(7).String() != "severity 7" {
		t.Error(Warning, Error, Severity(7))
	}
}
