package gisio

import (
	"context"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// edit replaces a text in one file of a project; with an empty old text the new one becomes the whole file.
type edit struct {
	file, old, new string
}

// apply writes the starter project with edits into a fresh directory and returns the project file's path. An edit whose text is not
// there fails the test, so that no row tests nothing.
func apply(t *testing.T, edits ...edit) string {
	t.Helper()
	dir := t.TempDir()
	files := map[string]string{}
	for _, f := range StarterFiles() {
		files[f.Name] = string(f.Data)
	}
	for _, e := range edits {
		if e.old == "" {
			files[e.file] = e.new
			continue
		}
		if !strings.Contains(files[e.file], e.old) {
			t.Fatalf("%s does not hold %q", e.file, e.old)
		}
		files[e.file] = strings.Replace(files[e.file], e.old, e.new, 1)
	}
	for name, text := range files {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return filepath.Join(dir, "project.toml")
}

// rule is one message rule: edits of the starter project that break it.
type rule struct {
	label string
	edits []edit
}

var update = flag.Bool("update", false, "rewrite the golden files")

// golden is where the findings of every rule stand, under their labels.
const golden = "testdata/messages.golden"

func TestMessageRules(t *testing.T) {
	want := map[string]string{}
	if data, err := os.ReadFile(golden); err == nil {
		for _, part := range strings.Split(string(data), "\n\n") {
			label, text, _ := strings.Cut(strings.TrimPrefix(part, "## "), "\n")
			want[label] = strings.TrimSpace(text)
		}
	} else if !*update {
		t.Fatal(err)
	}
	var all []string
	for _, r := range messageRules {
		if strings.Contains(strings.Join(all, "\n"), "## "+r.label+"\n") {
			t.Errorf("%s: a second row with this label", r.label)
		}
		p, findings := ReadProject(context.Background(), apply(t, r.edits...))
		got := findingLines(findings)
		all = append(all, "## "+r.label+"\n"+got)
		if got == "" {
			t.Errorf("%s: no finding", r.label)
		}
		if !*update && got != want[r.label] {
			t.Errorf("%s: got\n%s\nwant\n%s", r.label, got, want[r.label])
		}
		if (p == nil) != (findings.Err() != nil) {
			t.Errorf("%s: project %v with error %v", r.label, p != nil, findings.Err())
		}
		for _, leak := range []string{"map[", "struct", "float64", "interface", "gisio.", "%!", "<nil>"} {
			if strings.Contains(got, leak) {
				t.Errorf("%s: a message holds %q", r.label, leak)
			}
		}
	}
	if *update {
		if err := os.WriteFile(golden, []byte(strings.Join(all, "\n\n")+"\n"), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// findingLines writes findings one a line, each with its severity.
func findingLines(findings Findings) string {
	var lines []string
	for _, f := range findings {
		lines = append(lines, f.Severity.String()+": "+f.String())
	}
	return strings.Join(lines, "\n")
}
