package gisio

import (
	"bytes"
	"encoding/csv"
	"os"
	"path/filepath"
	"strconv"

	"springbound/wells"
)

// ratesSection is the table that rates to be tried are read from.
var ratesSection = Section{Name: "rates", Title: "Table of rates to try", About: "Given to the command `try`. Wells that it does not list keep the rate that stands for them: a fixed well its own, every other none.",
	Fields: with([]Field{
		{Name: "id", Class: Identity, Required: "yes", Meaning: "id of the well", Example: `W4`},
		{Name: "rate", Class: Number, Kind: Rate, Required: "yes", Meaning: "daily mean rate; recharge is negative", Example: `rate [L/s]`},
	}, commonFields)}

// ReadRates reads rates to be tried from a CSV or XLSX file: one a well, in the order of the wells [m³/d]. Wells that the table leaves out keep their
// fixed rate, or 0. Every problem is a finding; the rates are nil when one of them is an error.
func ReadRates(path string, ws []wells.Well) ([]float64, Findings) {
	name := filepath.Base(path)
	rd := &reader{}
	data, err := os.ReadFile(path)
	if err != nil {
		rd.fail(Finding{File: name, Layer: ratesSection.Name, Found: "the file cannot be read: " + err.Error()})
		return nil, rd.findings
	}
	grid, findings := ReadGrid(name, data, TableOptions{Name: ratesSection.Name})
	rd.findings = append(rd.findings, findings...)
	if findings.Err() != nil {
		return nil, rd.findings
	}
	rates := make([]float64, len(ws))
	at := map[string]int{}
	for i, w := range ws {
		at[w.ID] = i
		if w.Mode == wells.Fixed && !w.Outage {
			rates[i] = w.FixedRate
		}
	}
	b := &builder{p: &Project{}, tables: map[string]*tableData{}}
	b.reader = *rd
	rows := b.rows(grid, &ratesSection, nil, name)
	b.tables[ratesSection.Name] = &tableData{file: name, rows: rows}
	seen := map[string]bool{}
	for _, p := range b.tableRecords(&ratesSection, rows) {
		id := p.id("id")
		v, ok := p.number("rate")
		i, known := at[id]
		switch {
		case id == "":
		case !known:
			p.fail(Finding{Property: "id", Found: quoted(id) + ", no well of the project", Allowed: "ids of its wells"})
		case seen[id]:
			p.fail(Finding{Property: "id", Found: quoted(id) + " for a second time", Allowed: "each well once"})
		case ok:
			rates[i] = v
		}
		seen[id] = true
	}
	if len(rows) == 0 && b.findings.Err() == nil {
		b.fail(Finding{File: name, Layer: ratesSection.Name, Found: "no rows", Allowed: "one row a well"})
	}
	if b.findings.Err() != nil {
		return nil, b.findings
	}
	return rates, b.findings
}

// WriteRates gives a table of rates that ReadRates reads, with full digits [m³/d].
func WriteRates(ids []string, rates []float64) []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	lines := [][]string{{"id", "rate [m3/d]"}}
	for i, id := range ids {
		lines = append(lines, []string{id, strconv.FormatFloat(rates[i], 'g', -1, 64)})
	}
	_ = w.WriteAll(lines) // a bytes.Buffer does not fail
	return b.Bytes()
}
