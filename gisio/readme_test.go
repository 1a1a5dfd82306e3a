package gisio

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const (
	referenceBegin = "<!-- reference: go test ./gisio -run README -update -->\n"
	referenceEnd   = "<!-- end of reference -->\n"
)

// The README's reference is what the reader reads.
func TestREADMEReferenceInStep(t *testing.T) {
	path := filepath.Join("..", "README.md")
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	head, rest, ok := strings.Cut(string(data), referenceBegin)
	_, tail, ok2 := strings.Cut(rest, referenceEnd)
	if *update {
		if !ok || !ok2 {
			head, tail = string(data), ""
		}
		if err := os.WriteFile(path, []byte(head+referenceBegin+ReferenceMarkdown()+referenceEnd+tail), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if !ok || !ok2 {
		t.Fatal("the README has no reference between its marks")
	}
	if want := head + referenceBegin + ReferenceMarkdown() + referenceEnd + tail; want != string(data) {
		t.Error("the README's reference is out of step with the reader: run go test ./gisio -run README -update")
	}
}
