package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"strings"

	"springbound/aquifer"
	"springbound/aquifer/mesh"
	"springbound/gisio"
)

// runCheck reads everything and reports every problem; nothing is solved.
func runCheck(ctx context.Context, c common, s streams) error {
	name, err := projectFile(c.Project)
	if err != nil {
		return err
	}
	p, findings, err := readProject(ctx, c, s)
	if ctx.Err() != nil {
		return ctx.Err()
	}
	if p != nil {
		findings = append(findings, siteFindings(err)...)
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

// siteFindings puts what is wrong with the site as a whole beside the files' findings.
func siteFindings(err error) gisio.Findings {
	var out gisio.Findings
	var site *aquifer.SiteError
	var domain *mesh.DomainError
	switch {
	case errors.As(err, &site):
		for _, p := range site.Problems {
			out = append(out, gisio.Finding{Severity: gisio.Error, Layer: "site", Feature: p.Feature, Found: p.Text})
		}
	case errors.As(err, &domain):
		for _, p := range domain.Problems {
			out = append(out, gisio.Finding{Severity: gisio.Error, Layer: "site", Feature: strings.Join(p.Names, ", "), Found: p.Text})
		}
	}
	return out
}

// badInputError says that the errors were printed already.
type badInputError struct{ count int }

func (e *badInputError) Error() string {
	return fmt.Sprintf("%d errors must be mended before anything can be computed", e.count)
}
