package gisio

import (
	"fmt"

	"springbound/plan"
)

// readRunning reads the rules about which wells run.
func (b *builder) readRunning(rec *record, t map[string]any) {
	if rec.has("at_most_running") {
		n := rec.whole("at_most_running")
		b.p.Brief.AtMostRunning = &n
	}
	b.p.Brief.Together = b.readGroups(rec, t, "together", &togetherSection)
	b.p.Brief.Exclude = b.readGroups(rec, t, "exclude", &excludeSection)
}

// readGroups reads the groups of one rule.
func (b *builder) readGroups(rec *record, t map[string]any, key string, section *Section) []plan.WellGroup {
	value, present := t[key]
	if !present {
		return nil
	}
	line, allowed := b.settings.line("brief", key), "tables headed "+section.Title
	list, ok := value.([]any)
	if !ok {
		rec.fail(Finding{Property: key, Line: line, Found: valueText(value), Allowed: allowed})
		return nil
	}
	var out []plan.WellGroup
	for i, item := range list {
		table, ok := item.(map[string]any)
		if !ok {
			rec.fail(Finding{Property: key, Line: line, Found: valueText(item), Allowed: allowed})
			continue
		}
		r := b.settings.record(&b.reader, section, table, section.Title, nil, "brief", key, fmt.Sprint(i))
		g := plan.WellGroup{Wells: r.ids("wells"), Source: r.text("source")}
		if len(g.Wells) == 1 {
			r.fail(Finding{Property: "wells", Line: b.settings.line("brief", key, fmt.Sprint(i), "wells"), Found: "one well", Allowed: "two or more"})
		}
		out = append(out, g)
	}
	return out
}

// checkGroups holds the wells of the rules about running against the project's.
func (b *builder) checkGroups() {
	for _, rule := range []struct {
		key     string
		section *Section
		groups  []plan.WellGroup
	}{{"together", &togetherSection, b.p.Brief.Together}, {"exclude", &excludeSection, b.p.Brief.Exclude}} {
		for i, g := range rule.groups {
			rec := &record{rd: &b.reader, section: rule.section, at: Finding{File: b.p.File, Feature: rule.section.Title, Line: b.settings.line("brief", rule.key, fmt.Sprint(i), "wells")}}
			b.checkWellIDs(rec, "wells", g.Wells)
		}
	}
}
