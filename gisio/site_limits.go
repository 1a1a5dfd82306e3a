package gisio

import (
	"errors"
	"fmt"
	"strconv"
	"strings"

	"springbound/wells"
)

// rowsOf makes records of a table that has no layer.
func (b *builder) rowsOf(section *Section) []placed {
	if t := b.tables[section.Name]; t != nil {
		if len(t.rows) == 0 && !b.broken[section.Name] {
			b.warn(Finding{File: t.file, Layer: section.Name, Found: "a table without rows"})
		}
		return b.tableRecords(section, t.rows)
	}
	return nil
}

// buildStates reads the operating states. Without a table there is one default state.
func (b *builder) buildStates() {
	names := map[string]bool{}
	defaults := 0
	var last placed
	var zero *placed // the default state, where it has no recharge
	for _, p := range b.rowsOf(&statesSection) {
		s := wells.OperatingState{Name: p.text("name"), Default: p.flag("default", false), RechargeFactor: 1}
		p.label = "state " + s.Name
		s.Demand = p.optional("demand")
		s.RechargeFactor = p.numberOr("recharge_factor", 1)
		s.Days = p.numberOr("days", 0)
		s.Months = p.months("months")
		if s.Name != "" && names[s.Name] {
			p.fail(Finding{Property: "name", Found: quoted(s.Name) + " for a second time", Allowed: "each name once"})
		}
		if !(s.Days <= 366) {
			p.fail(Finding{Property: "days", Found: fmt.Sprint(s.Days), Allowed: "at most 366"})
		}
		if s.Default && s.RechargeFactor == 0 {
			zero = &p
		}
		names[s.Name] = true
		if s.Default {
			defaults++
		}
		b.p.States = append(b.p.States, s)
		last = p
	}
	switch n := len(b.p.States); {
	case n == 0:
		b.p.States = []wells.OperatingState{{Name: "average", Default: true, RechargeFactor: 1}}
	case n == 1:
		b.p.States[0].Default = true
	case defaults != 1:
		last.fail(Finding{Property: "default", Found: fmt.Sprintf("%d default states", defaults), Allowed: "one"})
	case zero != nil:
		zero.fail(Finding{Property: "recharge_factor", Found: "0 in the default state", Allowed: "above 0 there, as the other states' recharge is scaled from it", Hint: "make another state the default"})
	}
	b.checkDemands()
}

// buildLimits reads the limits.
func (b *builder) buildLimits() {
	ids := map[string]string{}
	for _, p := range b.rowsOf(&limitsSection) {
		l := wells.Limit{ID: p.id("id"), Receptor: p.text("receptor"), Source: p.text("source"), Date: p.text("date"), State: p.text("state")}
		unique(p, ids, l.ID)
		quantity, sense := p.word("quantity", -1), p.word("sense", -1)
		l.Quantity, l.Sense = wells.Quantity(max(quantity, 0)), wells.Sense(max(sense, 0))
		l.Baseline, l.Counts = wells.Baseline(p.word("baseline", 0)), wells.Counts(p.word("counts", 0))
		l.Reserve = p.numberOr("reserve", 0)
		if !(l.Reserve < 1) {
			p.fail(Finding{Property: "reserve", Found: Inside(Share).Format(l.Reserve), Allowed: "0 to below 1, or below 100 %"})
		}
		b.checkState(p, l.State)
		receptor, ok := b.limitReceptor(p, l.Receptor)
		if ok && quantity >= 0 {
			b.limitValue(p, &l, receptor.Kind)
		}
		if quantity >= 0 && sense >= 0 {
			b.limitSense(p, l)
		}
		if l.Source == "" {
			p.warn(Finding{Property: "source", Found: "not stated", Hint: "a reviewer will ask where the limit comes from"})
		}
		b.p.Limits = append(b.p.Limits, l)
		b.keepPlace("limit", p)
	}
	if len(b.p.Limits) == 0 && !b.named("tables", "limits") {
		b.warn(Finding{File: b.p.File, Property: "limits", Found: "no table of limits", Hint: "only rates, quotas and pumping levels bound the plan"})
	}
}

// checkState reports an operating state that does not exist.
func (b *builder) checkState(p placed, name string) {
	if name == "" || b.broken["states"] {
		return
	}
	var names []string
	for _, s := range b.p.States {
		names = append(names, s.Name)
	}
	if !contains(names, name) {
		p.fail(Finding{Property: "state", Found: quoted(name) + ", no operating state of the project", Allowed: orList(names) + ", or blank for every one", Hint: nearestHint(name, names)})
	}
}

// limitReceptor finds the receptor of a limit.
func (b *builder) limitReceptor(p placed, id string) (wells.Receptor, bool) {
	var ids []string
	for _, r := range b.p.Receptors {
		if r.ID == id && id != "" {
			if r.Outside {
				p.warn(Finding{Property: "receptor", Found: quoted(id) + ", which is outside the extent", Hint: "the limit is listed and not assessed"})
			}
			return r, true
		}
		ids = append(ids, r.ID)
	}
	if id != "" && !b.broken["receptors"] {
		p.fail(Finding{Property: "receptor", Found: quoted(id) + ", no receptor of the project", Allowed: listSome(ids), Hint: nearestHint(id, ids)})
	}
	return wells.Receptor{}, false
}

// limitKind says which kind of quantity a limit's value is.
func limitKind(q wells.Quantity, k wells.Kind) Kind {
	switch {
	case q == wells.ShareOfBase:
		return Share
	case k.Unit() == "m3/d":
		return Rate
	case k.Unit() == "1":
		return Gradient
	}
	return Length
}

// limitValue reads a limit's value in a unit that fits its receptor.
func (b *builder) limitValue(p placed, l *wells.Limit, receptor wells.Kind) {
	e := p.find("value", valueRole)
	if e == nil {
		return
	}
	if _, reported := e.value.(known); reported {
		return
	}
	kind := limitKind(l.Quantity, receptor)
	if text := p.text("unit"); text != "" {
		u, err := FindUnit(text, kind)
		if err != nil {
			var q *QuantityError
			errors.As(err, &q)
			p.fail(Finding{Property: p.find("unit", valueRole).key, Found: q.Found, Allowed: q.Allowed, Hint: "the receptor is of kind " + receptor.String()})
			return
		}
		if own := e.columnUnit(); own != nil && own.Name != u.Name {
			p.fail(Finding{Property: "unit", Found: quoted(text) + ", while the column of value says " + own.Name, Allowed: "one unit"})
			return
		}
		e.written.unit = &u
	}
	v, u, err := e.quantity(e.value, kind)
	if err != nil {
		var q *QuantityError
		errors.As(err, &q)
		if q.Allowed == e.field.keysOf() {
			q.Allowed, q.Hint = "a unit of "+kind.String()+": "+UnitNames(kind), "behind the number or in the column unit"
		} else {
			q.Hint = strings.TrimPrefix(q.Hint+", the receptor is of kind "+receptor.String(), ", ")
		}
		p.fail(Finding{Property: e.key, Found: q.Found, Allowed: q.Allowed, Hint: q.Hint})
		return
	}
	l.Value = v
	l.Entered = u.Format(v)
	switch number := e.value.(type) {
	case cellNumber:
		l.Entered = strings.TrimSpace(strings.TrimSuffix(number.text, number.unit))
		l.Entered += " " + u.Name
	case float64:
		l.Entered = strconv.FormatFloat(number, 'f', -1, 64) + " " + u.Name
	}
	if l.Quantity == wells.ShareOfBase && receptor.Unit() == "m" {
		p.fail(Finding{Property: "quantity", Found: "a share of a level", Allowed: "change or value", Hint: "a level has no natural zero to take a share of"})
	}
	if l.Quantity == wells.Change && l.Sense == wells.AtMost && v < 0 {
		p.warn(Finding{Property: e.key, Found: l.Entered + ", a negative change", Hint: "it asks for more than there was without pumping; a fall is positive"})
	}
	if l.Quantity == wells.ShareOfBase && !(v >= 0 && v <= 1) {
		p.fail(Finding{Property: e.key, Found: l.Entered, Allowed: "a share from 0 to 100 %"})
	}
}

// columnUnit returns the unit that the column or the key states.
func (e *entry) columnUnit() *Unit {
	if e.written.unit != nil {
		return e.written.unit
	}
	return e.resolved.unit
}

// limitSense warns of a direction that is surely not meant.
func (b *builder) limitSense(p placed, l wells.Limit) {
	if l.Quantity != wells.Value && l.Sense == wells.AtLeast {
		p.warn(Finding{Property: "sense", Found: "a change of at least a value", Allowed: "usually at_most for change and share_of_base", Hint: "it asks for more loss, not less"})
	}
}

// buildLicences reads the licences.
func (b *builder) buildLicences() {
	ids := map[string]string{}
	for _, p := range b.rowsOf(&licencesSection) {
		l := wells.Licence{ID: p.id("id"), Holder: p.text("holder"), Purpose: p.text("purpose"), Wells: p.ids("wells"), PerHour: p.optional("per_hour"), PerDay: p.optional("per_day"),
			PerYear: p.optional("per_year"), StartDay: p.startDay("start_day"), Source: p.text("source")}
		unique(p, ids, l.ID)
		if !p.has("per_hour") && !p.has("per_day") && !p.has("per_year") {
			p.fail(Finding{Property: "per_hour, per_day, per_year", Found: "missing, all of them", Allowed: "at least one"})
		}
		l.Months = p.months("months")
		b.checkWellIDs(p.record, "wells", l.Wells)
		b.p.Licences = append(b.p.Licences, l)
	}
}

// checkWellIDs reports ids that are no wells.
func (b *builder) checkWellIDs(rec *record, property string, ids []string) {
	var known []string
	for _, w := range b.p.Wells {
		known = append(known, w.ID)
	}
	for _, id := range ids {
		if !contains(known, id) && !b.broken["wells"] {
			rec.fail(Finding{Property: property, Found: quoted(id) + ", no well of the project", Allowed: listSome(known), Hint: nearestHint(id, known)})
		}
	}
}

// months reads months of use: a list of numbers and ranges, a range may run over the year's end.
func (rec *record) months(name string) []int {
	text := rec.text(name)
	if text == "" {
		return nil
	}
	var in [13]bool
	for _, part := range strings.FieldsFunc(text, func(r rune) bool { return r == ';' || r == ',' || r == ' ' || r == '|' }) {
		first, last, isRange := strings.Cut(part, "-")
		from, err1 := strconv.Atoi(first)
		to, err2 := from, error(nil)
		if isRange {
			to, err2 = strconv.Atoi(last)
		}
		if err1 != nil || err2 != nil || from < 1 || from > 12 || to < 1 || to > 12 {
			rec.fail(Finding{Property: name, Found: quoted(text), Allowed: "months 1 to 12 as a list or a range, such as 5-9 or 11-2"})
			return nil
		}
		for m := from; ; m = m%12 + 1 {
			in[m] = true
			if m == to {
				break
			}
		}
	}
	var out []int
	for m := 1; m <= 12; m++ {
		if in[m] {
			out = append(out, m)
		}
	}
	return out
}

// checkQuotas holds the quotas' wells against the project's.
func (b *builder) checkQuotas() {
	for i, q := range b.p.Brief.Quotas {
		rec := &record{rd: &b.reader, section: &quotaSection, at: Finding{File: b.p.File, Feature: "[[brief.quota]] " + q.Name, Line: b.settings.line("brief", "quota", fmt.Sprint(i), "wells")}}
		b.checkWellIDs(rec, "wells", q.Wells)
	}
	b.checkGroups()
	b.checkDays()
}
