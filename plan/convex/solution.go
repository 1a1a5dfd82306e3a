package convex

import "fmt"

// Status says how a solve ended.
type Status int

// The ways a solve may end.
const (
	Optimal          Status = iota + 1
	Infeasible              // no values meet all rows and bounds; Ray proves it
	Unbounded               // the cost can be improved without end; X is feasible and Ray is the direction
	IterationLimit          // stopped by Options.MaxIterations
	Interrupted             // stopped by the context
	NumericalTrouble        // rounding prevented a trustworthy answer
	NotConvex               // the Hessian bends the wrong way along Ray.Columns, so that a local optimum need not be the best
)

// String returns the name of the status.
func (s Status) String() string {
	switch s {
	case Optimal:
		return "optimal"
	case Infeasible:
		return "infeasible"
	case Unbounded:
		return "unbounded"
	case IterationLimit:
		return "iteration limit"
	case Interrupted:
		return "interrupted"
	case NumericalTrouble:
		return "numerical trouble"
	case NotConvex:
		return "not convex"
	}
	return fmt.Sprintf("Status(%d)", int(s))
}

// Solution is the outcome of Solve. For statuses other than Optimal the values are those of the last basis and only the
// fields named with the status have a meaning.
type Solution struct {
	Status      Status
	X           []float64 // value of each column [-]
	Objective   float64   // cost'x + 1/2 x'Hx [-]
	RowValue    []float64 // value of each row [-]
	RowPrice    []float64 // change of the objective per unit of the row's active bound, in the problem's own sense [-]
	ReducedCost []float64 // change of the objective per unit of the column's active bound, in the problem's own sense [-]
	Basis       *Basis    // with a Hessian: the active set, in which more columns may be basic than there are rows
	Ray         *Ray      // Infeasible: the proof; Unbounded: the direction; otherwise nil
	Iterations  int       // pivots, dual and primal; steps of the active set; iterations of the interior method
	Primal      int       // the primal ones among them

	// PrimalDegenerate tells that a solved-for value sits on its bound: prices may then have other values, and left and right
	// prices may differ.
	PrimalDegenerate bool
	// DualDegenerate tells that a value at its bound has price zero: other plans may then be just as good.
	DualDegenerate bool

	Scaling Scaling
}

// Ray is a proof or a direction.
//
// For an infeasible problem Rows holds multipliers y and Columns holds z = -A'y. With r = Ax, y'r + z'x is zero for all x, while
// its largest value within the bounds of rows and columns is below zero.
//
// For an unbounded problem Columns holds a direction d and Rows holds A d.
type Ray struct {
	Rows    []float64 // [-]
	Columns []float64 // [-]
}

// Scaling tells what the factors did that made the entries alike; all are powers of two, so that they round nothing.
type Scaling struct {
	SpreadBefore float64 // largest entry over the smallest, in absolute value [-]
	SpreadAfter  float64 // the same after scaling [-]
	Passes       int     // sweeps over the entries
}
