package main

import (
	"fmt"
	"strings"

	"springbound/gisio"
	"springbound/wells"
)

// availableID names the limit after its feature, or by number where the name has nothing that an id may hold.
func availableID(feature, what string, number int) string {
	clean := strings.Map(func(r rune) rune {
		if r == '-' || r == '_' || r == '.' || r >= '0' && r <= '9' || r >= 'A' && r <= 'Z' || r >= 'a' && r <= 'z' {
			return r
		}
		if r == ' ' {
			return '-'
		}
		return -1
	}, feature)
	if clean == "" || len(clean) > 24 {
		clean = fmt.Sprintf("%s-%d", what, number+1)
	}
	return "available-" + clean
}

// limitSources turns every stated available flow of an edge or river into a receptor with a limit: what pumping draws from it may
// not pass it. A lake's is compared after the plan, since no receptor kind watches a lake.
func limitSources(p *gisio.Project) {
	add := func(kind wells.Kind, what, feature string, available *float64, source string, number int) {
		if available == nil {
			return
		}
		id := availableID(feature, what, number)
		p.Receptors = append(p.Receptors, wells.Receptor{ID: id, Name: "available flow of " + what + " " + feature, Kind: kind, Feature: feature, Source: source})
		p.Limits = append(p.Limits, wells.Limit{ID: id, Receptor: id, Quantity: wells.Change, Sense: wells.AtMost, Value: *available,
			Entered: fmt.Sprintf("%.6g m3/d", *available), Baseline: wells.NoPumping, Counts: wells.Cumulative, Source: "available_flow of the layer"})
	}
	for i, e := range p.Site.Edges {
		add(wells.EdgeFlow, "edge", e.Name, e.AvailableFlow, e.Source, i)
	}
	for i, r := range p.Site.Rivers {
		add(wells.RiverReach, "river", r.Name, r.AvailableFlow, r.Source, i)
	}
}
