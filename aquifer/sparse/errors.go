package sparse

import "fmt"

// NotPositiveDefinite tells that a factorisation met a pivot that is not positive, or a value that is not finite.
type NotPositiveDefinite struct {
	Row   int     // in the caller's numbering
	Pivot float64 // the pivot, or the value that is not finite [unit of the matrix]
}

func (e *NotPositiveDefinite) Error() string {
	return fmt.Sprintf("matrix is not positive definite: row %d has pivot %g", e.Row, e.Pivot)
}

// Interrupted tells that the context ended before the work was done, and how far it got.
type Interrupted struct {
	Stage string // analyse, factor, solve
	Done  int    // units of work done
	Total int    // units of work planned
	Cause error  // the context's error
}

func (e *Interrupted) Error() string {
	return fmt.Sprintf("%s stopped after %d of %d steps: %v", e.Stage, e.Done, e.Total, e.Cause)
}

// Unwrap returns the context's error, so that errors.Is(err, context.Canceled) holds.
func (e *Interrupted) Unwrap() error { return e.Cause }
