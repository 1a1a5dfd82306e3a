package gisio

import (
	"context"
	"os"
	"path/filepath"
	"testing"
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
		t.Log(a)
	}
}
