package convex

import (
	"fmt"
	"strings"
)

// Model is a problem with what an MPS file tells beyond it.
type Model struct {
	Name          string
	Problem       *Problem
	ObjectiveName string
	Constant      float64  // added to the objective [-]
	Integer       []int    // columns that are to be whole numbers, rising
	Notes         []string // what the reader passed over or took for granted, in the order of the file
}

// FormatFault is one fault of an MPS file.
type FormatFault struct {
	Line   int // from 1
	Reason string
}

// FormatError lists the faults of an MPS file, at most maxFaultsShown of them.
type FormatError struct {
	Faults []FormatFault
}

// Error lists the faults by line.
func (e *FormatError) Error() string {
	lines := make([]string, len(e.Faults))
	for i, f := range e.Faults {
		lines[i] = fmt.Sprintf("line %d: %s", f.Line, f.Reason)
	}
	return "convex: MPS: " + strings.Join(lines, "; ")
}

// Sizes beyond which a file is refused before memory is taken for it.
const (
	mpsLargestMatrix = 1 << 27 // rows x columns, a gigabyte
	mpsLongestLine   = 1 << 16 // bytes
	// mpsInfinite is the number from which a bound counts as missing; files use 1e30 or larger for infinity.
	mpsInfinite = 1e30
)
