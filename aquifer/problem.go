package aquifer

import (
	"fmt"
	"strings"

	"github.com/paulmach/orb"
)

// Problem is one thing in a site that keeps it from being modelled.
type Problem struct {
	Feature string    // "edge Coast", "river Aln", "well W4"
	Text    string    // one sentence with the values found and what to do
	At      orb.Point // where, in the working plane [m]
}

// SiteError holds all the problems of a site.
type SiteError struct{ Problems []Problem }

// Error lists the problems, one a line.
func (e *SiteError) Error() string {
	lines := make([]string, len(e.Problems))
	for i, p := range e.Problems {
		lines[i] = p.Feature + ": " + p.Text
	}
	return strings.Join(lines, "\n")
}

// problems collects.
type problems struct{ list []Problem }

func (p *problems) add(feature string, at orb.Point, format string, args ...any) {
	p.list = append(p.list, Problem{Feature: feature, Text: fmt.Sprintf(format, args...), At: at})
}

func (p *problems) err() error {
	if len(p.list) == 0 {
		return nil
	}
	return &SiteError{Problems: p.list}
}
