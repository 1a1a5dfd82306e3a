package convex

import (
	"fmt"
	"math"
	"strings"
)

// Fault is a kind of bad data.
type Fault int

// The kinds of bad data.
const (
	BadSense       Fault = iota + 1 // neither minimise nor maximise
	BadSize                         // wrong number of values
	NotFinite                       // NaN or an infinity where a number is needed
	BoundsCrossed                   // lower above upper
	BoundsInfinite                  // a lower bound of +Inf or an upper bound of -Inf
	BadHessian                      // not symmetric, or a part of it given twice
)

const (
	partProblem = "problem"
	partColumn  = "column"
	partRow     = "row"
)

// DataFault is one fault of the data of a problem.
type DataFault struct {
	Kind   Fault
	Part   string  // "problem", "column" or "row"
	Index  int     // index of the column or row
	Name   string  // its name, may be empty
	Value  float64 // the value found [-]
	Reason string  // what is wrong with it
}

// Error states the fault in one sentence.
func (f DataFault) Error() string {
	if f.Part == partProblem {
		return f.Reason
	}
	if f.Name == "" {
		return fmt.Sprintf("%s %d: %s", f.Part, f.Index, f.Reason)
	}
	return fmt.Sprintf("%s %d (%s): %s", f.Part, f.Index, f.Name, f.Reason)
}

// DataError lists every fault found in the data of a problem.
type DataError struct {
	Faults []DataFault
}

// maxFaultsShown keeps a message readable when every value of a table is wrong.
const maxFaultsShown = 50

// Error lists the faults, at most maxFaultsShown of them.
func (e *DataError) Error() string {
	lines := make([]string, 0, len(e.Faults))
	for i, f := range e.Faults {
		if i == maxFaultsShown {
			lines = append(lines, fmt.Sprintf("and %d more", len(e.Faults)-i))
			break
		}
		lines = append(lines, f.Error())
	}
	return "convex: " + strings.Join(lines, "; ")
}

// faultList collects faults.
type faultList []DataFault

func (l *faultList) add(kind Fault, part string, index int, name string, value float64, reason string) {
	*l = append(*l, DataFault{Kind: kind, Part: part, Index: index, Name: name, Value: value, Reason: reason})
}

func (l *faultList) err() error {
	if len(*l) == 0 {
		return nil
	}
	return &DataError{Faults: *l}
}

func (l *faultList) checkCost(j int, name string, cost float64) {
	if !finite(cost) {
		l.add(NotFinite, partColumn, j, name, cost, fmt.Sprintf("cost %v is not a finite number", cost))
	}
}

func (l *faultList) checkBounds(part string, index int, name string, lower, upper float64) {
	if math.IsNaN(lower) {
		l.add(NotFinite, part, index, name, lower, "the lower bound is not a number")
	}
	if math.IsNaN(upper) {
		l.add(NotFinite, part, index, name, upper, "the upper bound is not a number")
	}
	if math.IsInf(lower, 1) {
		l.add(BoundsInfinite, part, index, name, lower, "the lower bound is +Inf, which nothing can reach")
	}
	if math.IsInf(upper, -1) {
		l.add(BoundsInfinite, part, index, name, upper, "the upper bound is -Inf, which nothing can reach")
	}
	if lower > upper {
		l.add(BoundsCrossed, part, index, name, lower, fmt.Sprintf("the lower bound %v is above the upper bound %v", lower, upper))
	}
}
