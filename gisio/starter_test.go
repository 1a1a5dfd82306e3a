package gisio

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"math"
	"os"
	"path/filepath"
	"testing"

	"springbound/plan"
)

// writeStarter writes the starter project into a fresh directory and returns the project file's path.
func writeStarter(t *testing.T) string {
	t.Helper()
	dir := t.TempDir()
	for _, f := range StarterFiles() {
		if err := os.WriteFile(filepath.Join(dir, f.Name), f.Data, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return filepath.Join(dir, "project.toml")
}

func TestStarterIsAccepted(t *testing.T) {
	p, findings := ReadProject(context.Background(), writeStarter(t))
	for _, f := range findings {
		t.Errorf("%v: %v", f.Severity, f)
	}
	if p == nil {
		t.Fatal("no project")
	}
	if got, want := len(p.Wells), 5; got != want {
		t.Errorf("%d wells, want %d", got, want)
	}
	if got, want := len(p.Receptors), 5; got != want {
		t.Errorf("%d receptors, want %d", got, want)
	}
	if got, want := len(p.Limits), 5; got != want {
		t.Errorf("%d limits, want %d", got, want)
	}
	if got, want := len(p.Inputs), len(StarterFiles()); got != want {
		t.Errorf("%d inputs, want every one of the %d files", got, want)
	}
	if got, want := len(p.Site.Nodes), 5+1+2; got != want { // wells, the neighbour's well, the two ends of the front
		t.Errorf("%d nodes asked for, want %d", got, want)
	}
	for _, a := range p.Assumptions {
		if a.What == "" || a.Value == "" || a.Basis == "" {
			t.Errorf("an assumption without what, value or basis: %+v", a)
		}
	}
	sum := sha256.Sum256(StarterFiles()[0].Data)
	if got, want := p.Inputs[0], (plan.InputFile{File: "project.toml", SHA256: hex.EncodeToString(sum[:])}); got != want {
		t.Errorf("first input %v, want %v", got, want)
	}
	at, err := p.ToLonLat(p.Wells[0].At)
	const written = 1e-9 // degrees: the file has six decimals, the projection a micrometre
	if err != nil || math.Abs(at[0]+30.530217) > written || math.Abs(at[1]-47.036877) > written {
		t.Errorf("well W1 at %v, %v; the table says -30.530217, 47.036877", at, err)
	}
	b := p.PlanBrief()
	if len(b.Wells) != 5 || len(b.Limits) != 5 || len(b.Licences) != 1 || len(b.States) != 2 || len(b.Quotas) != 1 || b.Aim != plan.MostYield {
		t.Errorf("the brief lacks something: %+v", b)
	}
}

func TestReadingStopsWhenAsked(t *testing.T) {
	ctx, stop := context.WithCancel(context.Background())
	stop()
	p, findings := ReadProject(ctx, writeStarter(t))
	if p != nil || len(findings.Errors()) != 1 {
		t.Errorf("project %v, findings %v; want one error", p != nil, findings)
	}
}

func TestProjectThatIsNotThere(t *testing.T) {
	for _, path := range []string{filepath.Join(t.TempDir(), "none.toml"), t.TempDir()} {
		if p, findings := ReadProject(context.Background(), path); p != nil || len(findings.Errors()) != 1 {
			t.Errorf("%s: project %v, findings %v; want one error", path, p != nil, findings)
		}
	}
}

func TestStarterOrderIsFixed(t *testing.T) {
	for i, f := range StarterFiles() {
		if f.Name != starterNames[i] || len(f.Data) == 0 {
			t.Errorf("file %d is %s with %d bytes", i, f.Name, len(f.Data))
		}
	}
}
