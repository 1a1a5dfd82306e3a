package main

import (
	"bytes"
	"context"
	"errors"
	"strings"
	"testing"

	"springbound/aquifer"
)

func TestMemAvailable(t *testing.T) {
	for text, want := range map[string]int64{
		"MemTotal:       24683528 kB\nMemAvailable:   15381234 kB\nBuffers: 1 kB\n": 15381234 * 1024,
		"MemTotal: 24683528 kB\n":     0,
		"MemAvailable: many kB\n":     0,
		"MemAvailable: -5 kB\n":       0,
		"MemAvailable: 15381234 MB\n": 0,
		"":                            0,
	} {
		if got := memAvailable(text); got != want {
			t.Errorf("%q: %d, want %d", text, got, want)
		}
	}
}

// A job that cannot fit is refused before it is meshed, with the numbers; one that fits is not.
func TestTooLittleMemoryIsToldBeforehand(t *testing.T) {
	var sink bytes.Buffer
	p, _, err := readProject(context.Background(), common{Project: standardJob(3, 2, 4000000).write(t), Quiet: true}, streams{out: &sink, err: &sink})
	if err != nil {
		t.Fatal(err)
	}
	need := aquifer.EstimateMemory(4000000).Total()
	if !(need < 9e9 && aquifer.EstimateMemory(1000000).Total() < 2e9) { // what jobs of these sizes may take
		t.Errorf("estimates %d bytes for 4 million nodes, %d for one", need, aquifer.EstimateMemory(1000000).Total())
	}
	_, err = aquifer.Build(context.Background(), &p.Site, aquifer.Options{Nodes: p.Mesh.Nodes, Memory: 2e9})
	var site *aquifer.SiteError
	if !errors.As(err, &site) || !strings.Contains(err.Error(), "4000000 nodes") || !strings.Contains(err.Error(), "2.0 GB are free") {
		t.Errorf("4 million nodes in 2 GB: %v", err)
	}
	if exitCode(err) != exitBadData {
		t.Errorf("exit code %d", exitCode(err))
	}
	if _, err := aquifer.Build(context.Background(), &p.Site, aquifer.Options{Nodes: 3000, Memory: 1e9}); err != nil {
		t.Errorf("3,000 nodes in 1 GB: %v", err)
	}
}
