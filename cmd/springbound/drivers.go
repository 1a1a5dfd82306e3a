package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"sort"
	"strconv"
	"strings"
	"text/tabwriter"
)

// driverTable is what drivers prints as JSON.
type driverTable struct {
	Schema    string      `json:"schema"`
	Version   int         `json:"version"`
	Receptors []string    `json:"receptors"`
	Kinds     []string    `json:"kinds"`
	Units     []string    `json:"units"`
	Wells     []string    `json:"wells"`
	Values    [][]float64 `json:"sensitivity_in_unit_per_m3_per_d"`
	Solves    int         `json:"solves"`
}

// runDrivers tells which wells drive each receptor, without a plan.
func runDrivers(ctx context.Context, c solving, s streams) error {
	j, err := newJob(ctx, c, s)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	maps := newMaps(j)
	j.onField = maps.influence
	r, err := j.Linearise(ctx, make([]float64, len(j.field.Wells)))
	if err != nil {
		return err
	}
	if j.field.Switching {
		base, err := j.field.Changes(ctx, r.At)
		if err != nil {
			return err
		}
		if err := j.sensitivities(ctx, base, j.onField); err != nil {
			return err
		}
	}
	t := driverTable{Schema: "springbound/drivers", Version: 1, Wells: r.Wells, Solves: j.field.Model.Solves()}
	for _, row := range r.Rows {
		if row.Receptor == "" {
			continue
		}
		t.Receptors, t.Units, t.Values = append(t.Receptors, row.Receptor), append(t.Units, row.Unit), append(t.Values, row.Slope)
	}
	for _, id := range t.Receptors {
		for _, rec := range j.field.Receptors {
			if rec.ID == id {
				t.Kinds = append(t.Kinds, rec.Kind.String())
			}
		}
	}
	data, err := json.MarshalIndent(t, "", "  ")
	if err != nil {
		return fmt.Errorf("drivers: %w", err)
	}
	data = append(data, '\n')
	drawn, err := maps.wait()
	if err != nil {
		return err
	}
	files := append([]outputFile{{"drivers.json", data}, {"sensitivities.csv", t.csv()}}, drawn...)
	if err := writeOutputs(c.outDir(j), files); err != nil {
		return err
	}
	if err := dropStale(c.outDir(j), "influence", files); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		_, err := s.out.Write(data)
		return err
	}
	tw := tabwriter.NewWriter(s.out, 0, 0, 2, ' ', 0)
	fmt.Fprintln(tw, "receptor\tkind\tchange for 1000 m³/d pumped, strongest wells first")
	for i, id := range t.Receptors {
		fmt.Fprintf(tw, "%s\t%s\t%s\n", id, t.Kinds[i], t.strongest(i))
	}
	tw.Flush()
	for _, rec := range j.field.Receptors {
		if rec.Outside {
			fmt.Fprintf(s.out, "%s lies outside the model: not assessed\n", rec.ID)
		}
	}
	fmt.Fprintf(s.out, "\n%d solves for %d wells; written to %s\n", t.Solves, len(t.Wells), c.outDir(j))
	return nil
}

// strongest lists the wells of a row by the size of their sensitivity.
func (t driverTable) strongest(i int) string {
	order := make([]int, len(t.Wells))
	for k := range order {
		order[k] = k
	}
	row := t.Values[i]
	sort.SliceStable(order, func(a, b int) bool { return math.Abs(row[order[a]]) > math.Abs(row[order[b]]) })
	unit := map[string]string{"m": " m", "m3/d": " m³/d", "1": ""}[t.Units[i]]
	var parts []string
	for _, k := range order[:min(5, len(order))] {
		parts = append(parts, fmt.Sprintf("%s %s%s", t.Wells[k], strconv.FormatFloat(1000*row[k], 'g', 3, 64), unit))
	}
	return strings.Join(parts, ", ")
}

// csv is the table with wells down and receptors across.
func (t driverTable) csv() []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	head := []string{"well"}
	for i, id := range t.Receptors {
		head = append(head, id+" ["+strings.ReplaceAll(t.Units[i], "1", "-")+" per m3/d]")
	}
	w.Write(head)
	for k, id := range t.Wells {
		line := []string{id}
		for i := range t.Receptors {
			line = append(line, strconv.FormatFloat(t.Values[i][k], 'g', -1, 64))
		}
		w.Write(line)
	}
	w.Flush()
	return b.Bytes()
}
