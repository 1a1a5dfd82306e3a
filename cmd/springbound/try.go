package main

import (
	"context"
	"fmt"
	"path/filepath"

	"springbound/gisio"
	"springbound/plan"
	"springbound/plan/workbook"
)

// runTry holds given rates against every limit; nothing is optimised.
func runTry(ctx context.Context, c solving, table string, s streams) error {
	j, err := newJob(ctx, c, s)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	rates, findings := gisio.ReadStateRates(table, j.project.Wells, j.project.States)
	if !c.Quiet {
		j.progress.clear()
		printWarnings(findings, s)
	}
	if err := findings.Err(); err != nil {
		return err
	}
	maps := newMaps(j)
	j.onField = maps.influence
	r, err := j.evaluate(ctx, rates)
	if err != nil {
		return err
	}
	state, err := j.complete(ctx, r)
	if err != nil {
		return err
	}
	if err := maps.heads(state); err != nil {
		return err
	}
	data, err := plan.Marshal(r)
	if err != nil {
		return err
	}
	book, err := workbook.Write(r)
	if err != nil {
		return err
	}
	dir := c.Out
	if dir == "" {
		dir = filepath.Join(j.project.Dir, "out-try")
	}
	drawn, err := maps.wait()
	if err != nil {
		return err
	}
	if err := writeOutputs(dir, append([]outputFile{{"try.json", data}, {"try.xlsx", book}}, drawn...)); err != nil {
		return err
	}
	if err := dropStale(dir, "influence", drawn); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		if _, err := s.out.Write(data); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
	} else {
		printPlan(s.out, r, dir, "try")
	}
	return nil
}

// evaluate makes the report of given rates, one list an operating state, with the features that act at them.
func (j *job) evaluate(ctx context.Context, rates [][]float64) (*plan.Report, error) {
	b, err := j.brief(ctx)
	if err != nil {
		return nil, err
	}
	if _, err := j.findSwitching(ctx, func(k int) []float64 { return rates[k] }); err != nil {
		return nil, err
	}
	responses := make([]*plan.Response, len(rates))
	for k := range rates {
		var m plan.Model = j
		if len(rates) > 1 {
			m = j.InState(k)
		}
		if responses[k], err = m.Linearise(ctx, rates[k]); err != nil {
			return nil, err
		}
	}
	if len(rates) == 1 {
		return plan.Evaluate(b, responses[0], rates[0])
	}
	return plan.EvaluateStates(b, responses, rates)
}
