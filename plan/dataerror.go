package plan

import (
	"fmt"
	"math"
	"strings"
)

// DataError lists every fault found in a brief or in a response, each as a sentence.
type DataError struct {
	Problems []string
}

// maxProblemsShown keeps a message readable when every line of a table is wrong.
const maxProblemsShown = 50

// Error lists the problems, at most maxProblemsShown of them.
func (e *DataError) Error() string {
	shown := e.Problems
	more := ""
	if len(shown) > maxProblemsShown {
		more = fmt.Sprintf("; and %d more", len(shown)-maxProblemsShown)
		shown = shown[:maxProblemsShown]
	}
	return "plan: " + strings.Join(shown, "; ") + more
}

// problemList collects faults.
type problemList []string

func (l *problemList) addf(format string, args ...any) { *l = append(*l, fmt.Sprintf(format, args...)) }

// number adds a fault when v is not finite.
func (l *problemList) number(v float64, format string, args ...any) {
	if !finite(v) {
		l.addf("%s is %v, not a finite number", fmt.Sprintf(format, args...), v)
	}
}

// optional is number for a value that may be blank.
func (l *problemList) optional(v *float64, format string, args ...any) {
	if v != nil {
		l.number(*v, format, args...)
	}
}

func (l problemList) err() error {
	if len(l) == 0 {
		return nil
	}
	return &DataError{Problems: l}
}

func finite(v float64) bool { return math.Abs(v) <= math.MaxFloat64 }

// NumericalError says that no trustworthy plan could be computed; the report that comes with it has the status.
type NumericalError struct {
	Status string // of the report: StatusNumericalFailure or StatusNotConverged
	Reason string // with the numbers
}

// Error returns the reason.
func (e *NumericalError) Error() string { return "plan: " + e.Status + ": " + e.Reason }

// notes is a list of sentences without repetitions, in the order of their first mention.
type notes []string

func (n *notes) addf(format string, args ...any) {
	text := fmt.Sprintf(format, args...)
	for _, old := range *n {
		if old == text {
			return
		}
	}
	*n = append(*n, text)
}
