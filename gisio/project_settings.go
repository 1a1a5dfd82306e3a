package gisio

import (
	"fmt"

	"springbound/plan"
)

// rootTables are the tables that the top of the project file may hold.
var rootTables = []string{"coordinates", "layers", "tables", "columns", "aquifer", "mesh", "brief", "report"}

// readSettings reads everything of the project file but the layers, tables and the aquifer's properties.
func (b *builder) readSettings() {
	s := b.settings
	top := s.record(&b.reader, &projectSection, s.root, "", rootTables)
	b.p.Title = top.text("title")
	b.readCoordinates()
	b.readMesh()
	b.readBrief()
	b.p.Report.Units = Inside(Rate).Name
	if t := s.table(&b.reader, "report"); t != nil {
		rec := s.record(&b.reader, &reportSection, t, "[report]", nil, "report")
		b.p.Report.PreparedFor, b.p.Report.PreparedBy, b.p.Report.Reference = rec.text("prepared_for"), rec.text("prepared_by"), rec.text("reference")
		if i := rec.word("units", -1); i >= 0 {
			b.p.Report.Units = reportSection.field("units").Words[i]
		}
	}
}

// readCoordinates reads the plane and the vertical datum.
func (b *builder) readCoordinates() {
	s := b.settings
	t := s.table(&b.reader, "coordinates")
	if t == nil {
		t = map[string]any{}
	}
	rec := s.record(&b.reader, &coordinatesSection, t, "[coordinates]", nil, "coordinates")
	b.p.Datum = rec.text("vertical_datum")
	b.datum = b.p.Datum
	code := rec.text("working")
	if code == "" {
		return
	}
	line := rec.find("working", valueRole).line
	plane, err := ParseEPSG(code)
	switch {
	case err != nil:
		rec.fail(Finding{Property: "working", Line: line, Found: quoted(code) + ", no system that is known", Allowed: OfferedSystems()})
	case plane.Geographic():
		rec.fail(Finding{Property: "working", Line: line, Found: quoted(code) + ", a system in degrees", Allowed: "a system in metres", Hint: "leave it out to have the UTM zone of the extent"})
	default:
		b.stated = plane
	}
}

// readMesh reads the wishes for the mesh.
func (b *builder) readMesh() {
	t := b.settings.table(&b.reader, "mesh")
	if t == nil {
		return
	}
	rec := b.settings.record(&b.reader, &meshSection, t, "[mesh]", nil, "mesh")
	b.p.Mesh = MeshSettings{Nodes: rec.whole("nodes"), Finest: rec.numberOr("finest", 0), Growth: rec.numberOr("growth", 0), Accuracy: rec.numberOr("accuracy", 0)}
}

// readBrief reads aim, demand and quotas.
func (b *builder) readBrief() {
	s := b.settings
	t := s.table(&b.reader, "brief")
	if t == nil {
		t = map[string]any{}
	}
	rec := s.record(&b.reader, &briefSection, t, "[brief]", []string{"quota", "together", "exclude"}, "brief")
	if i := rec.word("aim", -1); i >= 0 {
		b.p.Brief.Aim = plan.Aim(briefSection.field("aim").Words[i])
	}
	b.p.Brief.Demand = rec.optional("demand")
	b.brief = rec
	b.readRunning(rec, t)
	list, ok := t["quota"].([]any)
	if _, present := t["quota"]; present && !ok {
		rec.fail(Finding{Property: "quota", Line: s.line("brief", "quota"), Found: valueText(t["quota"]), Allowed: "tables headed [[brief.quota]]"})
	}
	names := map[string]bool{}
	for i, item := range list {
		table, ok := item.(map[string]any)
		if !ok {
			rec.fail(Finding{Property: "quota", Line: s.line("brief", "quota"), Found: valueText(item), Allowed: "tables headed [[brief.quota]]"})
			continue
		}
		q := b.readQuota(i, table)
		if q.Name != "" && names[q.Name] {
			rec.fail(Finding{Property: "quota", Line: s.line("brief", "quota", fmt.Sprint(i)), Found: "a second quota named " + quoted(q.Name), Hint: "give each a name of its own"})
		}
		names[q.Name] = true
		b.p.Brief.Quotas = append(b.p.Brief.Quotas, q)
	}
}

// readQuota reads one quota.
func (b *builder) readQuota(i int, table map[string]any) plan.Quota {
	rec := b.settings.record(&b.reader, &quotaSection, table, "[[brief.quota]]", nil, "brief", "quota", fmt.Sprint(i))
	q := plan.Quota{Name: rec.text("name"), Wells: rec.ids("wells"), PerHour: rec.optional("per_hour"), PerDay: rec.optional("per_day"), PerYear: rec.optional("per_year"),
		StartDay: rec.startDay("start_day"), Months: rec.months("months"), Source: rec.text("source")}
	if !rec.has("per_hour") && !rec.has("per_day") && !rec.has("per_year") {
		rec.fail(Finding{Property: "per_hour, per_day, per_year", Found: "missing, all of them", Allowed: "at least one"})
	}
	return q
}

// columnMaps reads [columns], one list a table.
func (b *builder) columnMaps() map[string][]columnMap {
	s := b.settings
	out := map[string][]columnMap{}
	root := s.table(&b.reader, "columns")
	for _, name := range s.keys(root, "columns") {
		section := tableSections[name]
		at := Finding{File: s.file, Feature: "[columns." + name + "]", Line: s.line("columns", name)}
		table, ok := root[name].(map[string]any)
		if section == nil || !ok {
			at.Feature, at.Property, at.Found, at.Allowed = "[columns]", name, "no table's name", orList(tablesSection.names())
			b.fail(at)
			continue
		}
		if tables, _ := s.root["tables"].(map[string]any); tables[name] == nil {
			f := at
			f.Found, f.Hint = "columns of a table that is not under [tables]", "name its file there"
			b.fail(f)
		}
		for _, key := range s.keys(table, "columns", name) {
			m := columnMap{key: key, line: s.line("columns", name, key)}
			f := at
			f.Line, f.Property = m.line, key
			if _, ok := section.resolve(key); !ok {
				f.Found, f.Allowed, f.Hint = "an unknown field", orList(section.names()), ""
				if near := section.nearestKey(key); near != "" {
					f.Allowed, f.Hint = "", "did you mean "+near+"?"
				}
				b.fail(f)
				continue
			}
			switch v := table[key].(type) {
			case string:
				m.header = v
			case map[string]any:
				var okHeader, okUnit = false, true
				m.header, okHeader = v["header"].(string)
				if u, present := v["unit"]; present {
					m.unit, okUnit = u.(string)
				}
				extra := len(v) - 1
				if _, present := v["unit"]; present {
					extra--
				}
				if !okHeader || !okUnit || extra != 0 {
					f.Found, f.Allowed = "a table", `{header = "...", unit = "..."}`
					b.fail(f)
					continue
				}
			default:
				f.Found, f.Allowed = valueText(v), `a header, or {header = "...", unit = "..."}`
				b.fail(f)
				continue
			}
			out[name] = append(out[name], m)
		}
	}
	return out
}
