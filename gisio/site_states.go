package gisio

import (
	"errors"
	"time"

	"springbound/plan"
)

// checkDemands reports a demand that the aim needs and that neither the brief nor the table of states has.
func (b *builder) checkDemands() {
	aim := b.p.Brief.Aim
	if b.broken["states"] || b.brief == nil || (aim != plan.MostHeadroom && aim != plan.LeastEnergy) {
		return
	}
	why := "the aim most-headroom shares out a demand"
	if aim == plan.LeastEnergy {
		why = "the aim least-energy finds the least energy for a demand"
	}
	var without []string
	for _, s := range b.p.States {
		if s.Demand != nil || (s.Default && b.brief.has("demand")) {
			continue
		}
		if s.Default {
			b.brief.missing("demand", why)
			continue
		}
		without = append(without, quoted(s.Name))
	}
	if len(without) > 0 {
		b.fail(Finding{File: b.statesFile(), Layer: "states", Property: "demand", Found: "missing in state " + orList(without), Allowed: "a demand in every operating state, 0 where nothing is asked for", Hint: why})
	}
}

func (b *builder) statesFile() string {
	if t := b.tables["states"]; t != nil {
		return t.file
	}
	return b.p.File
}

// checkDays holds the days of the operating states against the year, where there are several.
func (b *builder) checkDays() {
	if b.broken["states"] || b.broken["licences"] || len(b.p.States) < 2 {
		return
	}
	fault := plan.CheckDays(plan.Brief{States: b.p.States, Licences: b.p.Licences, Quotas: b.p.Brief.Quotas})
	var days *plan.DaysError
	if errors.As(fault, &days) {
		f := Finding{File: b.statesFile(), Layer: "states", Property: "days", Found: days.Found, Allowed: days.Wanted}
		if days.Needed {
			b.fail(f)
		} else {
			b.warn(f)
		}
	}
}

// startDay reads the first day of a year, as MM-DD.
func (rec *record) startDay(name string) string {
	text := rec.text(name)
	if text == "" {
		return ""
	}
	if _, err := time.Parse("2006-01-02", "2024-"+text); err != nil {
		rec.fail(Finding{Property: name, Found: quoted(text), Allowed: "month and day as MM-DD, such as 06-01"})
	}
	return text
}
