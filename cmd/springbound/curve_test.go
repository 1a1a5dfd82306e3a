package main

import (
	"bytes"
	"context"
	"encoding/json"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// The curve of the two canals' first limit has its corners where W1 starts and where W3 comes to rest [C, ratios of responses].
func TestCurveOfTwoCanals(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.tables["limits"] = strings.Replace(d.tables["limits"], "at_most,0.30,m,", "at_most,30,cm,", 1)
	dir := d.write(t)
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"curve", dir, "--limit", "L1"}, streams{out: &out, err: &errs}); code != exitDone {
		t.Fatalf("exit code %d\n%s%s", code, out.String(), errs.String())
	}
	for _, want := range []string{"limit, cm", "W3 stands still", "the present limit", "Exact"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("%q is not in\n%s", want, out.String())
		}
	}
	read := func(name string) []byte {
		data, err := os.ReadFile(filepath.Join(dir, "out", name))
		if err != nil {
			t.Fatal(err)
		}
		return data
	}
	var r plan.CurveReport
	if err := json.Unmarshal(read("curve.json"), &r); err != nil {
		t.Fatal(err)
	}
	const tolerance = 0.002 // of the total on the default mesh
	want := []float64{0, 0.25 * 2.069615201665e-4 / 2.910185545674e-4, 0.30, 0.25 * 2.712079621525e-4 / 1.469348697956e-4, 0.60}
	if len(r.Points) != len(want) {
		t.Fatalf("%+v", r.Points)
	}
	for k, x := range r.Points {
		if math.Abs(x.At-want[k]) > 2*tolerance*0.6 {
			t.Errorf("corner %d at %.6f m, want %.6f", k, x.At, want[k])
		}
	}
	if x := r.Points[2]; !x.Present || math.Abs(*x.Value/1221.986123-1) > tolerance || math.Abs(*x.Slope/2969.775953-1) > tolerance {
		t.Errorf("present limit: %+v", x)
	}
	if lines := strings.Count(string(read("curve.csv")), "\n"); lines != len(want)+1 {
		t.Errorf("%d lines in curve.csv", lines)
	}
	picture := read("curve.svg")
	for decoder := xml.NewDecoder(bytes.NewReader(picture)); ; {
		if _, err := decoder.Token(); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
	}
	for _, want := range []string{"present limit 30 cm", "limit, cm", "m³/d"} {
		if !bytes.Contains(picture, []byte(want)) {
			t.Errorf("%q is not in the picture", want)
		}
	}

	// a part of the range in the unit entered, as JSON
	out.Reset()
	if code := run(context.Background(), []string{"curve", dir, "--limit", "L1", "--from", "20", "--to", "40", "--json"}, streams{out: &out, err: &errs}); code != exitDone {
		t.Fatalf("exit code %d\n%s", code, errs.String())
	}
	if err := json.Unmarshal(out.Bytes(), &r); err != nil || math.Abs(r.From-0.2) > 1e-12 || math.Abs(r.To-0.4) > 1e-12 { // rounding
		t.Errorf("%v, from %v to %v", err, r.From, r.To)
	}
	for _, c := range []struct {
		args []string
		code int
		says string
	}{
		{[]string{"curve", dir}, exitUsage, "--limit"},
		{[]string{"curve", dir, "--limit", "L9"}, exitBadData, "there is L1 and L2"},
		{[]string{"curve", dir, "--limit", "L1", "--from", "40", "--to", "20"}, exitBadData, "below the second"},
	} {
		errs.Reset()
		if code := run(context.Background(), c.args, streams{out: &out, err: &errs}); code != c.code || !strings.Contains(errs.String(), c.says) {
			t.Errorf("%v: exit code %d, %s", c.args, code, errs.String())
		}
	}
}

func TestTicks(t *testing.T) {
	for _, c := range []struct{ low, high float64 }{{0, 1}, {0, 4512}, {-3, 7}, {0.0011, 0.0013}, {26.4, 26.9}, {0, 1e-9}} {
		got := ticks(c.low, c.high)
		if len(got) < 4 || len(got) > 11 || got[0] < c.low-1e-9*(c.high-c.low) || got[len(got)-1] > c.high+1e-9*(c.high-c.low) { // rounding
			t.Errorf("%v to %v: %v", c.low, c.high, got)
		}
	}
}
