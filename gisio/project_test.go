package gisio

import (
	"context"
	"flag"
	"os"
	"strings"
	"testing"
)

// edit replaces a text in one file of a project; with an empty old text the new one becomes the whole file.
type edit struct {
	file, old, new string
}

// files is a project in memory.
type files map[string]string

// read reads the project.
func (f files) read() (*Project, Findings) {
	return readProject(context.Background(), ".", "project.toml", func(name string, limit int64) ([]byte, string) {
		text, ok := f[name]
		if !ok {
			return nil, "no such file"
		}
		return []byte(text), ""
	})
}

// apply makes the starter project with edits. An edit whose text is not there fails the test, so that no row tests nothing.
func apply(t *testing.T, edits ...edit) files {
	t.Helper()
	all := files{}
	for _, f := range StarterFiles() {
		all[f.Name] = string(f.Data)
	}
	for _, e := range edits {
		if e.old == "" {
			all[e.file] = e.new
			continue
		}
		if !strings.Contains(all[e.file], e.old) {
			t.Fatalf("%s does not hold %q", e.file, e.old)
		}
		all[e.file] = strings.Replace(all[e.file], e.old, e.new, 1)
	}
	return all
}

// rule is one message rule: edits of the starter project that break it.
type rule struct {
	label string
	edits []edit
}

var update = flag.Bool("update", false, "rewrite the golden files")

// golden is where the findings of every rule stand, under their labels.
const golden = "testdata/messages.golden"

// mostFindings is how many findings one mistake may give: where it stands, and in the few places that depend on it.
const mostFindings = 4

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
		p, findings := apply(t, r.edits...).read()
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
		if len(findings) > mostFindings && r.label != "too many cells" && r.label != "extent of a garden" { // wrong in every column, for every feature
			t.Errorf("%s: %d findings for one mistake", r.label, len(findings))
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
