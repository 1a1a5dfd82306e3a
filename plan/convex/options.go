package convex

import "fmt"

// Options steer Solve. The zero value is the documented default.
type Options struct {
	// Start is the basis to start from; nil starts from the rows. With a definite Hessian it is a guess of the active set, which the
	// basis of a linear programme may be; the interior method takes none.
	Start *Basis
	// MaxIterations ends the solve with IterationLimit; 0 stands for 20,000 + 50 (rows + columns), in the interior method for 200.
	MaxIterations int
	// Progress, when given, is called now and then from the calling goroutine.
	Progress func(Progress)
}

// Progress tells how far a solve is.
type Progress struct {
	Stage      string  // "dual", "primal", "active set" or "interior"
	Iterations int     // pivots so far
	Infeasible float64 // sum of the violations found so far in the scaled problem [-]
}

// Validate returns an error that names the field at fault.
func (o Options) Validate() error {
	if o.MaxIterations < 0 {
		return fmt.Errorf("convex: Options.MaxIterations %d is negative", o.MaxIterations)
	}
	return nil
}

func (o Options) iterationLimit(rows, columns int) int {
	if o.MaxIterations > 0 {
		return o.MaxIterations
	}
	return 20000 + 50*(rows+columns)
}
