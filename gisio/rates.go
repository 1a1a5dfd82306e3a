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
		{Name: "state", Class: Text, Meaning: "operating state that the rate is for; left out: every one", Example: `drought`},
		{Name: "id", Class: Identity, Required: "yes", Meaning: "id of the well", Example: `W4`},
		{Name: "rate", Class: Number, Kind: Rate, Required: "yes", Meaning: "daily mean rate; recharge is negative", Example: `rate [L/s]`},
	}, commonFields)}

// ReadRates reads rates to be tried from a CSV or XLSX file: one a well, in the order of the wells [m³/d]. Wells that the table leaves out keep their
// fixed rate, or 0. Every problem is a finding; the rates are nil when one of them is an error.
func ReadRates(path string, ws []wells.Well) ([]float64, Findings) {
	rates, findings := ReadStateRates(path, ws, nil)
	if rates == nil {
		return nil, findings
	}
	return rates[0], findings
}

// ReadStateRates is ReadRates for several operating states: one list of rates a state, in their order. A row without a state, or a table
// without that column, holds in every state. No states are one without a name.
func ReadStateRates(path string, ws []wells.Well, states []wells.OperatingState) ([][]float64, Findings) {
	if len(states) == 0 {
		states = make([]wells.OperatingState, 1)
	}
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
	rates := make([][]float64, len(states))
	at := map[string]int{}
	for k := range rates {
		rates[k] = make([]float64, len(ws))
		for i, w := range ws {
			at[w.ID] = i
			if w.Mode == wells.Fixed && !w.Outage {
				rates[k][i] = w.FixedRate
			}
		}
	}
	b := &builder{p: &Project{}, tables: map[string]*tableData{}}
	b.reader = *rd
	rows := b.rows(grid, &ratesSection, nil, name)
	b.tables[ratesSection.Name] = &tableData{file: name, rows: rows}
	seen := map[[2]string]bool{}
	for _, p := range b.tableRecords(&ratesSection, rows) {
		id := p.id("id")
		v, ok := p.number("rate")
		i, known := at[id]
		state := p.text("state")
		var in []int
		var names []string
		twice := false
		for k, s := range states {
			names = append(names, s.Name)
			if state == "" || state == s.Name {
				in = append(in, k)
				twice = twice || seen[[2]string{id, s.Name}]
				seen[[2]string{id, s.Name}] = true
			}
		}
		switch {
		case id == "":
		case !known:
			p.fail(Finding{Property: "id", Found: quoted(id) + ", no well of the project", Allowed: "ids of its wells"})
		case len(in) == 0:
			p.fail(Finding{Property: "state", Found: quoted(state) + ", no operating state of the project", Allowed: orList(names) + ", or blank for every one", Hint: nearestHint(state, names)})
		case twice && len(states) == 1:
			p.fail(Finding{Property: "id", Found: quoted(id) + " for a second time", Allowed: "each well once"})
		case twice:
			p.fail(Finding{Property: "id", Found: quoted(id) + " for a second time", Allowed: "each well once in a state"})
		case ok:
			for _, k := range in {
				rates[k][i] = v
			}
		}
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

// WriteStateRates gives a table of the rates of several operating states that ReadStateRates reads, with full digits [m³/d].
func WriteStateRates(ids, states []string, rates [][]float64) []byte {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	lines := [][]string{{"state", "id", "rate [m3/d]"}}
	for k, state := range states {
		for i, id := range ids {
			lines = append(lines, []string{state, id, strconv.FormatFloat(rates[k][i], 'g', -1, 64)})
		}
	}
	_ = w.WriteAll(lines) // a bytes.Buffer does not fail
	return b.Bytes()
}
