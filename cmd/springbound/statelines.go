package main

import (
	"fmt"
	"io"
	"strings"

	"springbound/plan"
)

// overdrawnShare is the share of a yearly quantity by which more is pumped before the line says 'passed': what the planner's own tolerance leaves.
const overdrawnShare = 1e-6

// printStates prints one line an operating state, with its total and what binds, and the yearly quotas that bind.
func printStates(w io.Writer, r *plan.Report) {
	if len(r.States) == 0 {
		return
	}
	fmt.Fprintln(w, "\nOperating states (the table above is that of", r.State+"):")
	for _, s := range r.States {
		text := fmt.Sprintf("%s: %.1f m³/d", s.Name, s.Total)
		if s.Demand != nil {
			text += fmt.Sprintf(" for a demand of %.1f m³/d", *s.Demand)
		}
		if s.Days != nil {
			text += fmt.Sprintf(", %g days", *s.Days)
		}
		if len(s.Binds) > 0 {
			text += "; binds: " + strings.Join(s.Binds, ", ")
		} else {
			text += "; no limit binds"
		}
		fmt.Fprintln(w, text+".")
	}
	for _, y := range r.YearQuotas {
		q, binds := y.Quota, ""
		switch {
		case q.Binds && q.Headroom < -overdrawnShare*q.Limit:
			binds = "; passed"
		case q.Binds:
			binds = "; binds"
		}
		fmt.Fprintf(w, "%s, per year: %.0f m³ of %.0f m³%s.\n", q.Name, q.Sum*365.25, q.Entered, binds)
	}
}
