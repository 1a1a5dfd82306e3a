package main

import (
	"bytes"
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// The plan's own rates, tried, give the plan's own receptors; other rates give what superposition says.
func TestTryAgreesWithThePlan(t *testing.T) {
	dir := twoCanals(turns(1)[0]).write(t)
	want := planned(t, dir, exitDone)
	try := func(table string) *plan.Report {
		var out, errs bytes.Buffer
		if code := run(context.Background(), []string{"try", dir, table}, streams{out: &out, err: &errs}); code != exitDone {
			t.Fatalf("exit code %d\n%s", code, errs.String())
		}
		data, err := os.ReadFile(filepath.Join(dir, "out-try", "try.json"))
		if err != nil {
			t.Fatal(err)
		}
		var r plan.Report
		if err := json.Unmarshal(data, &r); err != nil {
			t.Fatal(err)
		}
		return &r
	}
	const same = 1e-9 // relative: two full solves
	got := try(filepath.Join(dir, "out", "rates.csv"))
	for i := range want.Receptors {
		if !(math.Abs(got.Receptors[i].Change/want.Receptors[i].Change-1) <= same) {
			t.Errorf("%s: %.12f, planned %.12f", got.Receptors[i].ID, got.Receptors[i].Change, want.Receptors[i].Change)
		}
	}
	save(t, dir, "mine.csv", []byte("id;rate [L/s]\nW1;2,5\nW3;1,25\n"))
	got = try(filepath.Join(dir, "mine.csv"))
	for i := range got.Receptors {
		s := want.Sensitivities.Values[i]
		sum := 86.4 * (2.5*s[0] + 1.25*s[2])
		if !(math.Abs(got.Receptors[i].Change/sum-1) <= same) {
			t.Errorf("%s: %.12f, superposed %.12f", got.Receptors[i].ID, got.Receptors[i].Change, sum)
		}
	}
	if got.Status != plan.StatusGivenRates {
		t.Errorf("status %q", got.Status)
	}
}

func TestTryNamesFaultsOfTheTable(t *testing.T) {
	dir := twoCanals(turns(1)[0]).write(t)
	for _, c := range []struct{ table, says, reason string }{
		{"id,rate [L/s]\nW9,1\n", "W9", "no such well"},
		{"id,rate\nW1,1\n", "rate", "a rate without a unit"},
		{"id,rate [m3/d]\nW1,1\nW1,2\n", "second time", "a well twice"},
		{"id,rate [m3/d]\nW1,\n", "rate", "a blank rate"},
		{"well,flow\n", "headers", "no known headers"},
	} {
		save(t, dir, "rates.csv", []byte(c.table))
		var out, errs bytes.Buffer
		if code := run(context.Background(), []string{"try", dir, filepath.Join(dir, "rates.csv")}, streams{out: &out, err: &errs}); code != exitBadData || !strings.Contains(errs.String(), c.says) {
			t.Errorf("%s: exit code %d\n%s", c.reason, code, errs.String())
		}
	}
	if _, err := os.Stat(filepath.Join(dir, "out-try")); !os.IsNotExist(err) {
		t.Error("something was written")
	}
}
