package main

import (
	"context"
	"errors"
	"fmt"

	"springbound/aquifer"
	"springbound/aquifer/mesh"
	"springbound/gisio"
	"springbound/plan"
)

// The exit codes.
const (
	exitDone        = 0
	exitUsage       = 2
	exitBadData     = 3
	exitNoPlan      = 4 // no plan can meet the limits, the plan is not valid, or a check of the audit fails
	exitNumerical   = 5
	exitInterrupted = 130
)

// exitCode sorts an error into its kind.
func exitCode(err error) int {
	var (
		input  *gisio.InputError
		site   *aquifer.SiteError
		domain *mesh.DomainError
		brief  *plan.DataError
		usage  *usageError
		noPlan *noPlanError
		listed *badInputError
	)
	switch {
	case err == nil:
		return exitDone
	case errors.Is(err, context.Canceled):
		return exitInterrupted
	case errors.As(err, &usage):
		return exitUsage
	case errors.As(err, &listed), errors.As(err, &input), errors.As(err, &site), errors.As(err, &domain), errors.As(err, &brief):
		return exitBadData
	case errors.As(err, &noPlan):
		return exitNoPlan
	}
	return exitNumerical
}

// usageError is a command line that cannot be understood.
type usageError struct{ text string }

func (e *usageError) Error() string { return e.text }

// noPlanError says that files were written but that they hold no valid plan.
type noPlanError struct{ text string }

func (e *noPlanError) Error() string { return e.text }

func usagef(format string, args ...any) error { return &usageError{fmt.Sprintf(format, args...)} }
