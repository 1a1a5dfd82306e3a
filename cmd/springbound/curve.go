package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"text/tabwriter"

	"springbound/plan"
)

// curving are the flags of curve.
type curving struct {
	solving
	Limit string   `required:"" placeholder:"ID" help:"Id of the limit, name of the licence or quota (with its basis, as in 'A-17 per year', where it has several), or 'demand'."`
	From  *float64 `placeholder:"X" help:"First value, in the unit in which the limit was entered; left out: none."`
	To    *float64 `placeholder:"Y" help:"Last value; left out: twice the limit."`
	State string   `placeholder:"NAME" help:"Operating state; left out: the default one. The other states are left out."`
}

// shownUnit is the unit in which a curve's limit was entered: one of these is shown in it, others in metres and m³/d.
type shownUnit struct {
	name string
	per  float64 // of it in one unit of the curve
}

var enteredUnits = []shownUnit{{"cm", 100}, {"mm", 1000}, {"ft", 1 / 0.3048}, {"in", 1 / 0.0254}, {"m", 1}, {"L/s", 1 / 86.4}, {"ML/d", 1e-3}, {"m3/d", 1}, {"%", 100}}

// unitOfCurve finds the unit of a limit as it was entered; its number must say the same as the value, so that depths are not taken for levels.
func unitOfCurve(r *plan.CurveReport, limits []limitText) shownUnit {
	for _, l := range limits {
		number, unit, _ := strings.Cut(l.entered, " ")
		v, err := strconv.ParseFloat(number, 64)
		if l.id != r.Limit || err != nil {
			continue
		}
		for _, u := range enteredUnits {
			if u.name == unit && math.Abs(v-l.value*u.per) <= 1e-9*math.Abs(v) { // rounding of the conversion
				return u
			}
		}
	}
	return shownUnit{map[string]string{"m": "m", "m3/d": "m³/d", "m3": "m³ " + r.Per, "1": "as a share or gradient"}[r.Unit], 1}
}

type limitText struct {
	id, entered string
	value       float64
}

// runCurve draws the aim against one limit.
func runCurve(ctx context.Context, c curving, s streams) error {
	j, err := newJobInState(ctx, c.solving, s, c.State)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	// A first plan settles whether features switch; where they do, every plan of the curve is made with tangents.
	if _, err := j.makePlan(ctx); err != nil {
		return err
	}
	b, err := j.brief(ctx)
	if err != nil {
		return err
	}
	var texts []limitText
	for _, l := range b.Limits {
		texts = append(texts, limitText{l.ID, l.Entered, l.Value})
	}
	unit := unitOfCurve(&plan.CurveReport{Limit: c.Limit}, texts)
	j.progress.report("following the limit", 0, 1)
	inside := func(v *float64) *float64 {
		if v == nil {
			return nil
		}
		x := *v / unit.per
		return &x
	}
	r, err := plan.Curve(ctx, b, j, c.Limit, inside(c.From), inside(c.To))
	if err != nil {
		return err
	}
	r.Title = j.project.Title
	if j.stateNote != "" {
		r.Method += ". " + strings.TrimSuffix(j.stateNote, ".")
	}
	unit = unitOfCurve(r, texts)
	data, err := json.MarshalIndent(r, "", "  ")
	if err != nil {
		return fmt.Errorf("curve: %w", err)
	}
	data = append(data, '\n')
	dir := c.outDir(j)
	files := []outputFile{{"curve.json", data}, {"curve.csv", curveCSV(r, unit)}, {"curve.svg", curvePicture(r, unit)}}
	if err := writeOutputs(dir, files); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		_, err := s.out.Write(data)
		return err
	}
	printCurve(s.out, r, unit)
	fmt.Fprintf(s.out, "\nwritten to %s: curve.json, curve.csv, curve.svg\n", dir)
	return nil
}

// aimScale is the factor and unit in which the aim is shown.
func aimScale(r *plan.CurveReport) (factor float64, unit string) {
	if r.AimUnit == "1" {
		return 100, "%"
	}
	return 1, "m³/d"
}

// digits writes a number with enough digits to tell values of a size apart.
func digits(v, size float64) string {
	decimals := 0
	if size > 0 {
		decimals = min(max(3-int(math.Floor(math.Log10(size))), 0), 9)
	}
	text := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(text, "-0.") == "" {
		text = strings.TrimPrefix(text, "-")
	}
	return text
}

func printCurve(w io.Writer, r *plan.CurveReport, unit shownUnit) {
	factor, aim := aimScale(r)
	fmt.Fprintf(w, "%s\n%s against: %s\n%s\n\n", r.Title, upper(r.What), r.Words, upper(r.Method)+".")
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "limit, %s\t%s, %s\tslope, %s per %s\twhat changes\n", unit.name, r.What, aim, aim, oneOf(unit.name))
	top, steep := 0.0, 0.0
	for _, x := range r.Points {
		if x.Value != nil {
			top = math.Max(top, math.Abs(factor**x.Value))
		}
		if x.Slope != nil {
			steep = math.Max(steep, math.Abs(factor**x.Slope/unit.per))
		}
	}
	size := math.Max(math.Abs(r.From), math.Abs(r.To)) * unit.per
	for _, x := range r.Points {
		value, slope, note := "no plan", "", x.Changes
		if x.Value != nil {
			value = digits(factor**x.Value, top)
		}
		if x.Slope != nil {
			slope = digits(factor**x.Slope/unit.per, steep)
		}
		if x.Present {
			note = strings.TrimPrefix(note+"; the present limit", "; ")
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\n", digits(x.At*unit.per, size), value, slope, note)
	}
	t.Flush()
	for _, end := range []struct{ where, why string }{{"below the first value", r.Before}, {"above the last value", r.Beyond}} {
		if end.why != "" {
			fmt.Fprintf(w, "%s: %s\n", end.where, end.why)
		}
	}
}

func oneOf(unit string) string { return strings.TrimPrefix(unit, "as a ") }

func upper(text string) string {
	if text == "" {
		return text
	}
	return strings.ToUpper(text[:1]) + text[1:]
}

// curveCSV is the table of the points.
func curveCSV(r *plan.CurveReport, unit shownUnit) []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	factor, aim := aimScale(r)
	w.Write([]string{"limit [" + unit.name + "]", r.What + " [" + aim + "]", "slope [" + aim + " per " + oneOf(unit.name) + "]", "what changes", "present limit"})
	number := func(v *float64, f float64) string {
		if v == nil {
			return ""
		}
		return strconv.FormatFloat(*v*f, 'g', 12, 64)
	}
	for _, x := range r.Points {
		present := ""
		if x.Present {
			present = "yes"
		}
		w.Write([]string{number(&x.At, unit.per), number(x.Value, factor), number(x.Slope, factor/unit.per), x.Changes, present})
	}
	w.Flush()
	return b.Bytes()
}
