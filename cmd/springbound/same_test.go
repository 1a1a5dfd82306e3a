package main

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"runtime"
	"sort"
	"strings"
	"testing"
)

// outputsOf runs the main job on the example with a number of processors and returns every file.
func outputsOf(t *testing.T, processors int) map[string][]byte {
	t.Helper()
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(processors))
	dir := t.TempDir()
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"plan", "--out", dir, filepath.Join(moduleRoot(t), "examples", "varrow-bight")}, streams{out: &out, err: &errs}); code != exitDone {
		t.Fatalf("exit code %d\n%s", code, errs.String())
	}
	files := map[string][]byte{}
	err := filepath.WalkDir(dir, func(path string, d os.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		data, err := os.ReadFile(path)
		files[strings.TrimPrefix(path, dir)] = data
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

// Same input, same bytes, whatever the number of processors: every file, the workbook's included.
func TestSameBytesForAnyNumberOfProcessors(t *testing.T) {
	one, two := outputsOf(t, 1), outputsOf(t, 2)
	var names []string
	for name := range one {
		names = append(names, name)
	}
	sort.Strings(names)
	if len(names) < 6 || len(two) != len(one) {
		t.Fatalf("%d and %d files", len(one), len(two))
	}
	for _, name := range names {
		if !bytes.Equal(one[name], two[name]) {
			t.Errorf("%s differs", name)
		}
	}
}

// An interrupted run leaves nothing behind.
func TestInterruptedRunWritesNothing(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	dir := filepath.Join(t.TempDir(), "out")
	var out, errs bytes.Buffer
	if code := run(ctx, []string{"plan", "--out", dir, filepath.Join(moduleRoot(t), "examples", "varrow-bight")}, streams{out: &out, err: &errs}); code != exitInterrupted {
		t.Errorf("exit code %d, want %d", code, exitInterrupted)
	}
	if _, err := os.Stat(dir); !os.IsNotExist(err) {
		t.Error("something was written")
	}
}

// The commands' exit codes and what a user sees.
func TestCommandLine(t *testing.T) {
	example := filepath.Join(moduleRoot(t), "examples", "varrow-bight")
	dir := filepath.Join(t.TempDir(), "site")
	for _, c := range []struct {
		args   []string
		code   int
		says   string
		reason string
	}{
		{nil, exitDone, "springbound plan  my-site", "no arguments: help that teaches"},
		{[]string{"--version"}, exitDone, "springbound", "version"},
		{[]string{"plane"}, exitUsage, "", "unknown command"},
		{[]string{"check", filepath.Join(dir, "nowhere")}, exitUsage, "", "no such project"},
		{[]string{"check", example}, exitDone, "0 errors", "the example reads"},
		{[]string{"check", "--json", example}, exitDone, `"errors": 0`, "as JSON"},
		{[]string{"start", dir}, exitDone, "project.toml", "a starter project"},
		{[]string{"start", dir}, exitUsage, "", "never over a project"},
		{[]string{"check", dir}, exitDone, "0 errors", "the starter project reads"},
		{[]string{"drivers", dir}, exitDone, "strongest wells first", "drivers of the starter project"},
		{[]string{"drivers", "--json", dir}, exitDone, `"sensitivity_in_unit_per_m3_per_d"`, "as JSON"},
		{[]string{"plan", dir}, exitDone, "Largest yearly mean of the total rate", "plan of the starter project"},
	} {
		var out, errs bytes.Buffer
		code := run(context.Background(), c.args, streams{out: &out, err: &errs})
		if code != c.code || !strings.Contains(out.String(), c.says) {
			t.Errorf("%s: %v: exit code %d, want %d\n%s%s", c.reason, c.args, code, c.code, out.String(), errs.String())
		}
		if code == exitUsage && errs.Len() == 0 {
			t.Errorf("%s: no message", c.reason)
		}
	}
}
