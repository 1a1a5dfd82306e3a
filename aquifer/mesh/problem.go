package mesh

import (
	"fmt"
	"strings"

	"github.com/paulmach/orb"
)

// ProblemKind says what is wrong with a domain.
type ProblemKind string

// The kinds of problem.
const (
	NonFinite          ProblemKind = "coordinate is not a finite number"
	TooFewVertices     ProblemKind = "fewer than three different vertices"
	RingCrossesItself  ProblemKind = "ring crosses itself"
	RingTouchesItself  ProblemKind = "ring touches itself"
	Spike              ProblemKind = "ring has a spike"
	ZeroArea           ProblemKind = "ring has no area"
	HoleOutside        ProblemKind = "hole outside the outline"
	HoleCrossesOutline ProblemKind = "hole crosses the outline"
	HoleSharesEdge     ProblemKind = "hole shares an edge"
	HolesOverlap       ProblemKind = "holes overlap"
	HoleInHole         ProblemKind = "hole inside a hole"
	PointOutside       ProblemKind = "point outside the domain"
	PointsCoincide     ProblemKind = "two points at the same place"
	BadSize            ProblemKind = "size is negative or not a number"
	BadOption          ProblemKind = "option out of range"
)

// Problem is one thing wrong with a domain.
type Problem struct {
	Kind  ProblemKind
	Names []string  // the things concerned: "outline", "hole 2", "well W4"
	At    orb.Point // where [m]
	Text  string    // one sentence with the values found
}

// DomainError holds all that is wrong with a domain, one Problem a cause.
type DomainError struct {
	Problems []Problem
}

// Error lists the problems, one a line.
func (e *DomainError) Error() string {
	var b strings.Builder
	fmt.Fprintf(&b, "mesh: the domain has %d problem(s)", len(e.Problems))
	for _, p := range e.Problems {
		b.WriteString("\n  ")
		b.WriteString(p.Text)
	}
	return b.String()
}
