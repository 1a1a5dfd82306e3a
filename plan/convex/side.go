package convex

import (
	"fmt"
	"math"
)

// Side is one of the two bounds of a row or column.
type Side int

// The sides.
const (
	LowerSide Side = iota + 1
	UpperSide
)

// String returns the name of the side.
func (s Side) String() string {
	switch s {
	case LowerSide:
		return "lower"
	case UpperSide:
		return "upper"
	}
	return fmt.Sprintf("Side(%d)", int(s))
}

// Bound names one bound of a row or of a column.
type Bound struct {
	Index int // of the row or column
	Side  Side
}

// without returns the two bounds with one side removed.
func without(lower, upper float64, s Side) (float64, float64) {
	if s == LowerSide {
		return math.Inf(-1), upper
	}
	return lower, math.Inf(1)
}

// sidesOf lists the finite sides of two bounds.
func sidesOf(index int, lower, upper float64) []Bound {
	var list []Bound
	if finite(lower) {
		list = append(list, Bound{index, LowerSide})
	}
	if finite(upper) {
		list = append(list, Bound{index, UpperSide})
	}
	return list
}
