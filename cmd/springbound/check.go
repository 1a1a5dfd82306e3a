package main

import (
	"context"
	"encoding/json"
	"fmt"

	"springbound/gisio"
)

// runCheck reads everything and reports every problem; nothing is solved.
func runCheck(ctx context.Context, c common, s streams) error {
	name, err := projectFile(c.Project)
	if err != nil {
		return err
	}
	p, findings := gisio.ReadProject(ctx, name)
	if err := ctx.Err(); err != nil {
		return err
	}
	errs, warnings := findings.Errors(), findings.Warnings()
	if c.JSON {
		type line struct {
			Severity string `json:"severity"`
			Text     string `json:"text"`
			File     string `json:"file"`
			Feature  string `json:"feature"`
			Property string `json:"property"`
			Found    string `json:"found"`
			Allowed  string `json:"allowed"`
			Hint     string `json:"hint"`
			Line     int    `json:"line"`
		}
		lines := []line{}
		for _, f := range findings {
			lines = append(lines, line{f.Severity.String(), f.String(), f.File, f.Feature, f.Property, f.Found, f.Allowed, f.Hint, f.Line})
		}
		e := json.NewEncoder(s.out)
		e.SetIndent("", "  ")
		if err := e.Encode(map[string]any{"project": name, "errors": len(errs), "warnings": len(warnings), "findings": lines}); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
	} else {
		for _, f := range errs {
			fmt.Fprintln(s.out, "error:", f)
		}
		if !c.Quiet {
			for _, f := range warnings {
				fmt.Fprintln(s.out, "warning:", f)
			}
		}
		fmt.Fprintf(s.out, "%d errors, %d warnings", len(errs), len(warnings))
		if p != nil {
			fmt.Fprintf(s.out, "; %s: %d wells, %d receptors, %d limits, plane %s, levels above %s", p.Title, len(p.Wells), len(p.Receptors), len(p.Limits), p.PlaneNote, p.Datum)
		}
		fmt.Fprintln(s.out)
	}
	if len(errs) > 0 {
		return &badInputError{len(errs)}
	}
	return nil
}

// badInputError says that the errors were printed already.
type badInputError struct{ count int }

func (e *badInputError) Error() string {
	return fmt.Sprintf("%d errors must be mended before anything can be computed", e.count)
}
