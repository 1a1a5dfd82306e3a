package plan

import (
	"slices"
	"testing"
)

// TestNotesOfSeveralStates: what each state says alike is said once without a name; a note that itself is about several states names each.
func TestNotesOfSeveralStates(t *testing.T) {
	e := &expansion{parts: []statePart{{name: "average"}, {name: "drought"}}}
	got := e.foldNotes([]string{"blank rate of W2\x1f0\x1f", "blank rate of W2\x1f1\x1f", "W1\x1f0\x1f and W1\x1f1\x1f could trade places"})
	want := []string{"blank rate of W2", "W1 (average) and W1 (drought) could trade places"}
	if !slices.Equal(got, want) {
		t.Errorf("notes %q, want %q", got, want)
	}
}

// TestPassedQuotaInItsOwnBasis: a yearly quantity is passed by a volume in a year.
func TestPassedQuotaInItsOwnBasis(t *testing.T) {
	q := QuotaResult{Basis: "per year", Entered: 780000, Limit: 780000 / daysPerYear, Headroom: -57563 / daysPerYear}
	if got := passedText(q); got != "57563 m³ per year" {
		t.Errorf("passed by %q", got)
	}
}
