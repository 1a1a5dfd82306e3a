package main

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"sort"
	"strconv"
	"strings"
	"text/tabwriter"

	"springbound/gisio"
	"springbound/plan"
)

// whereResult is what where prints as JSON; a missing number is null.
type whereResult struct {
	Schema         string            `json:"schema"`
	Version        int               `json:"version"`
	Title          string            `json:"title"`
	Aim            string            `json:"aim"`
	TotalRate      float64           `json:"plan_total_m3_per_d"`
	Kept           string            `json:"rates_kept"` // plan, present or others
	Rate           *float64          `json:"rate_asked_m3_per_d"`
	FitsArea       *float64          `json:"area_where_the_rate_fits_m2"`
	Spacing        float64           `json:"spacing_m"`
	Radius         float64           `json:"radius_m"`
	LowestLevel    *float64          `json:"lowest_level_m"`
	Nodes          int               `json:"nodes_looked_at"`
	WorthNodes     *int              `json:"nodes_where_a_well_is_worth_it"`
	Factorisations int               `json:"factorisations"`
	Solves         int               `json:"solves"`
	Limits         []whereLimit      `json:"limits"`
	Places         []wherePlace      `json:"places"`
	Confirmation   whereConfirmation `json:"confirmation"`
	Notes          []string          `json:"notes"`
}

// whereLimit is a limit with what is left of it.
type whereLimit struct {
	Name   string   `json:"name"`
	Unit   string   `json:"unit"`
	Room   float64  `json:"room"` // further change that the rates kept leave, the reserve kept back
	Passed bool     `json:"passed_by_the_rates_kept"`
	Price  *float64 `json:"price_per_unit_of_change"` // null: the aim has none
}

// wherePlace is one of the best places.
type wherePlace struct {
	Rank         int      `json:"rank"`
	Node         int32    `json:"node"`
	X            float64  `json:"x_m"`
	Y            float64  `json:"y_m"`
	Longitude    float64  `json:"longitude_deg"`
	Latitude     float64  `json:"latitude_deg"`
	Value        *float64 `json:"value_m3_per_d_per_m3_per_d"`
	Relief       *float64 `json:"value_by_easing_limits_m3_per_d_per_m3_per_d"` // part of the value; places are not ranked by it
	LargestRate  *float64 `json:"largest_further_rate_m3_per_d"`                // null: no limit is touched
	First        string   `json:"limit_reached_first"`
	OwnLevelRate *float64 `json:"rate_at_its_own_lowest_level_m3_per_d"` // null: not asked for
	Fits         *bool    `json:"rate_asked_fits"`
}

func (p *wherePlace) fit(rate *float64) {
	if rate != nil {
		fits := p.LargestRate == nil || *rate <= *p.LargestRate
		p.Fits = &fits
	}
}

func limitName(l plan.SitingLimit) string {
	if l.Receptor == "" {
		return "lowest level in " + l.Well
	}
	return l.Limit + " on " + l.Receptor
}

// describe fills the result but for the confirmation.
func (w *where) describe() *whereResult {
	j, m := w.job, w.job.field.Model
	r := &whereResult{Schema: whereSchemaName, Version: whereSchemaVersion, Title: w.report.Title, Aim: w.report.Aim, TotalRate: w.report.TotalRate, Kept: w.ask.keep,
		Rate: w.ask.rate, Spacing: w.ask.spacing, Radius: w.ask.radius, LowestLevel: w.ask.lowest, Factorisations: m.Factorisations, Solves: m.Solves(),
		Limits: []whereLimit{}, Places: []wherePlace{}}
	worth := 0
	for i, ok := range w.open {
		if ok {
			r.Nodes++
			if w.value != nil && w.value[i] > 0 {
				worth++
			}
		}
	}
	for _, l := range w.limits {
		x := whereLimit{Name: limitName(l), Unit: l.Unit, Room: l.Room, Passed: l.Passed}
		if price := l.Price; w.value != nil {
			x.Price = &price
		}
		r.Limits = append(r.Limits, x)
	}
	for i, n := range w.places {
		at := m.At(n)
		p := wherePlace{Rank: i + 1, Node: n, X: at[0], Y: at[1], LargestRate: finiteOrNil(w.siting.LargestRate(n)), First: "none is touched"}
		if lon, lat, err := j.project.Plane.Inverse(at[0], at[1]); err == nil {
			p.Longitude, p.Latitude = lon, lat
		}
		if w.value != nil {
			p.Value, p.Relief = &w.value[n], &w.relief[n]
		}
		if k := w.siting.First[n]; k >= 0 {
			p.First = limitName(w.limits[k])
		}
		p.fit(w.ask.rate)
		r.Places = append(r.Places, p)
	}
	if w.value != nil {
		r.WorthNodes = &worth
	}
	r.Notes = w.notes()
	return r
}

// notes say what the figures mean and what they leave out.
func (w *where) notes() []string {
	out := []string{
		"The largest further rate keeps every other rate as it is, and every limit with its reserve; it leaves out the further well's own level unless one is stated, and then looks at it for the places listed only, on a mesh that was not refined for them (approximate).",
		"Quotas, licences and the demand are about the wells that they name; a further well does not count towards them.",
		"Near a line that fixes the head the model takes the water from that line: state its available_flow, or a limit, where it may not be drawn on.",
		"Not looked at: cost, access, land, water quality, drilling depth, interference with users that are not among the receptors.",
	}
	if w.job.stateNote != "" {
		out = append(out, w.job.stateNote)
	}
	if w.value != nil {
		out = append(out, "The value of a well is what the plan gains per m³/d pumped there once all other wells are planned anew: 1 less the sum of price x influence over the limits that bind. It holds for a small rate; where several limits meet in one point it is at most that. Where pumping eases a limit, as on the far side of a salt front, the gain is part of the value but not of the order of the places.")
	} else {
		out = append(out, "The value of a well is defined for the aim most-yield only: places are in order of the largest further rate.")
	}
	if w.report.Switching != nil && w.value != nil {
		out = append(out, "The plan chooses which wells run: prices, and so the value of a well, hold at this choice.")
	}
	if full := w.usedUp(); full != "" {
		out = append(out, full)
	}
	for _, l := range w.limits {
		if l.Passed {
			out = append(out, fmt.Sprintf("%s is passed already at the rates kept: nothing further fits where it is touched.", limitName(l)))
		}
	}
	if w.job.field.Switching {
		out = append(out, "Features switch (a spring stops, a river loses contact or leakage stops growing): influences are those of the present state of the features and hold near it only.")
	}
	for _, r := range w.keptState.Rows {
		if rec := r.Receptor; rec >= 0 && !r.Linear && r.Place >= 0 {
			out = append(out, fmt.Sprintf("%s is the worst place of an area: the largest further rate keeps its limit all over the area, while the value counts its worst place at the plan only; a well near it may move that place.", w.job.field.Receptors[rec].ID))
		}
	}
	return out
}

// usedUp says so where nothing further fits anywhere beside the rates kept.
func (w *where) usedUp() string {
	var names []string
	seen := make([]bool, len(w.limits))
	for i, ok := range w.open {
		k := w.siting.First[i]
		switch {
		case !ok:
		case k < 0 || !math.IsInf(w.siting.Use[i], 1):
			return ""
		case !seen[k]:
			seen[k] = true
			names = append(names, limitName(w.limits[k]))
		}
	}
	text := "Beside the rates kept nothing further fits anywhere: they use up " + strings.Join(names, ", ") + "."
	if w.ask.keep == "plan" {
		text += " --keep present and --keep others look at other rates instead."
	}
	return text
}

// draw adds the maps.
func (w *where) draw(m *maps) error {
	if w.value != nil {
		low, high := math.Inf(1), math.Inf(-1)
		for _, v := range w.value {
			low, high = math.Min(low, v), math.Max(high, v)
		}
		levels := gisio.NiceLevels(math.Max(low, -1), high, contourCount) // next to a receptor the value falls without end
		if err := m.addLevels("siting/value.geojson", "value_m3_per_d_per_m3_per_d", w.value, levels, nil); err != nil {
			return err
		}
	}
	use := append([]float64(nil), w.siting.Use...)
	rates := w.rateLevels()
	top := 0.0
	levels := make([]float64, len(rates))
	for i, q := range rates {
		levels[i] = 1 / q
		top = math.Max(top, levels[i])
	}
	for i, v := range use {
		if math.IsInf(v, 1) || v > 2*top {
			use[i] = 2 * top // the lines need finite values; none lies beyond top
		}
	}
	label := func(level float64) float64 {
		for i := range levels {
			if levels[i] == level {
				return rates[i]
			}
		}
		return 1 / level
	}
	if err := m.addLevels("siting/largest_rate.geojson", "largest_further_rate_m3_per_d", use, levels, label); err != nil {
		return err
	}
	if w.ask.rate == nil {
		return nil
	}
	return w.drawRegion(m)
}

// drawRegion adds the area where the rate asked for fits.
func (w *where) drawRegion(m *maps) error {
	msh := w.job.field.Model.Mesh
	use := append([]float64(nil), w.siting.Use...)
	for i := 0; i < len(msh.Triangles); i += 3 { // where nothing is left at a corner, nothing is left in the triangle
		corners := msh.Triangles[i : i+3]
		for _, n := range corners {
			if math.IsInf(w.siting.Use[n], 1) {
				use[corners[0]], use[corners[1]], use[corners[2]] = math.Inf(1), math.Inf(1), math.Inf(1)
			}
		}
	}
	region, err := gisio.Region(msh.X, msh.Y, msh.Triangles, use, 1 / *w.ask.rate)
	if err != nil {
		return err
	}
	area := gisio.RegionArea(region)
	w.result.FitsArea = &area
	data, err := gisio.WriteRegion(region, w.job.project.Plane, []gisio.Property{{Name: "rate_that_fits_m3_per_d", Value: *w.ask.rate}, {Name: "area_m2", Value: area}, {Name: "rates_kept", Value: w.result.Kept}})
	if err != nil {
		return err
	}
	m.finished(outputFile{"siting/rate_fits.geojson", data})
	return nil
}

// rateLevels gives the rates to draw lines for: 1, 2 and 5 times powers of ten over the middle nine tenths of the finite rates, the three
// largest decades at most.
func (w *where) rateLevels() []float64 {
	var rates []float64
	for i, ok := range w.open {
		if q := w.siting.LargestRate(int32(i)); ok && q > 0 && !math.IsInf(q, 1) {
			rates = append(rates, q)
		}
	}
	if len(rates) == 0 {
		return nil
	}
	sort.Float64s(rates)
	low, high := rates[len(rates)/20], rates[len(rates)-1-len(rates)/20]
	low = math.Max(low, high/1000)
	var out []float64
	for e := int(math.Floor(math.Log10(low))); e <= int(math.Ceil(math.Log10(high))); e++ {
		for _, digit := range []string{"1", "2", "5"} {
			if q, err := strconv.ParseFloat(digit+"e"+strconv.Itoa(e), 64); err == nil && q >= low && q <= high {
				out = append(out, q)
			}
		}
	}
	return out
}

// csv is the table of places.
func (r *whereResult) csv() []byte {
	var b bytes.Buffer
	t := csv.NewWriter(&b)
	full := func(v *float64) string {
		if v == nil {
			return ""
		}
		return strconv.FormatFloat(*v, 'g', -1, 64)
	}
	t.Write([]string{"rank", "longitude_deg", "latitude_deg", "x_m", "y_m", "value_m3_per_d_per_m3_per_d", "value_by_easing_limits_m3_per_d_per_m3_per_d", "largest_further_rate_m3_per_d", "limit_reached_first", "rate_at_its_own_lowest_level_m3_per_d", "rate_asked_fits"})
	for _, p := range r.Places {
		fits := ""
		if p.Fits != nil {
			fits = strconv.FormatBool(*p.Fits)
		}
		t.Write([]string{strconv.Itoa(p.Rank), strconv.FormatFloat(p.Longitude, 'f', 7, 64), strconv.FormatFloat(p.Latitude, 'f', 7, 64), strconv.FormatFloat(p.X, 'f', 2, 64),
			strconv.FormatFloat(p.Y, 'f', 2, 64), full(p.Value), full(p.Relief), full(p.LargestRate), p.First, full(p.OwnLevelRate), fits})
	}
	t.Flush()
	return b.Bytes()
}

func times(n int) string {
	if n == 1 {
		return "once"
	}
	return strconv.Itoa(n) + " times"
}

// keptWords say which rates are kept.
var keptWords = map[string]string{"plan": "the planned rates", "present": "the present rates", "others": "the wells that the plan does not decide, the others off"}

// print is the short result on standard output.
func (r *whereResult) print(out io.Writer, dir string) {
	fmt.Fprintf(out, "%s\nWhere a further well could go, beside %s. The plan gives %.1f m³/d.\n\n", r.Title, keptWords[r.Kept], r.TotalRate)
	short := func(v *float64, decimals int, none string) string {
		if v == nil {
			return none
		}
		return strconv.FormatFloat(*v, 'f', decimals, 64)
	}
	if len(r.Places) == 0 {
		fmt.Fprintln(out, "No place is worth a further well: wherever it stood, the others would have to give up as much as it pumps.")
	} else {
		t := tabwriter.NewWriter(out, 0, 0, 2, ' ', 0)
		fmt.Fprintln(t, "place\tlongitude\tlatitude\tx, m\ty, m\tgain per m³/d, planned anew\tlargest rate beside the rates kept, m³/d\tlimit reached first")
		for _, p := range r.Places {
			fmt.Fprintf(t, "%d\t%.5f\t%.5f\t%.0f\t%.0f\t%s\t%s\t%s\n", p.Rank, p.Longitude, p.Latitude, p.X, p.Y, short(p.Value, 3, "-"), short(p.LargestRate, 1, "no limit touched"), p.First)
		}
		t.Flush()
	}
	if r.Rate != nil {
		fmt.Fprintf(out, "\n%.1f m³/d fits beside %s in an area of %.3f km².\n", *r.Rate, keptWords[r.Kept], *r.FitsArea/1e6)
	}
	fmt.Fprintf(out, "\n%s\n", r.Confirmation.Sentence)
	for _, n := range r.Notes {
		fmt.Fprintln(out, "-", n)
	}
	fmt.Fprintf(out, "\n%d places looked at with %d solves, factored %s; written to %s: where.json, where.csv, siting/\n", r.Nodes, r.Solves, times(r.Factorisations), dir)
	fmt.Fprintln(out, planningAid)
}
