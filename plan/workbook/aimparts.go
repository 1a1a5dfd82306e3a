package workbook

import (
	"slices"
	"strings"
)

// energyPart lists what pumping takes, for the aim that makes it least.
func (b *book) energyPart(row int) int {
	s, r := b.readMe, b.report
	if r.Aim != aimEnergy || r.PumpingEnergy == nil {
		return row
	}
	row = s.sectionHead(row+1, readEnd, "What pumping takes: 0.00272407 kWh for a cubic metre lifted by a metre, over the efficiency")
	s.heads(row, 1, "Well", ">Lift, m", ">Efficiency", "Energy", "kWh/m³ and kW while running")
	put := func(name, lift, efficiency string, energy, power float64, specific *float64) {
		row++
		s.text(row, 1, name, line)
		s.text(row, 2, lift, rightWords)
		s.text(row, 3, efficiency, rightWords)
		s.text(row, 4, figureText(energy)+" kWh/d", line)
		each := "–"
		if specific != nil {
			each = figureText(*specific)
		}
		s.text(row, 5, each+" kWh/m³ · "+figureText(power)+" kW", line)
	}
	for _, w := range r.Wells {
		fixed := w.Mode != modeDecided && slices.Contains(r.PumpingEnergy.Counted, w.ID)
		if e := w.PumpingEnergy; e != nil && (w.Mode == modeDecided || fixed) {
			name := joinFilled(" ", w.ID, w.Name)
			if fixed {
				name += " (rate fixed)"
			}
			put(name, figureText(e.Lift), figureText(100*e.Efficiency)+" %", e.Energy, e.Power, &e.Specific)
		}
	}
	if len(r.PumpingEnergy.Unknown) > 0 {
		row++
		s.text(row, 1, "Not counted, as efficiency, delivery level or level is not known: "+strings.Join(r.PumpingEnergy.Unknown, ", "), line)
	}
	put("In all", "", "", r.PumpingEnergy.Energy, r.PumpingEnergy.Power, r.PumpingEnergy.Specific)
	return row + 1
}

// requestPart lists how each well stands to its request, for the aim that comes closest to them.
func (b *book) requestPart(row int) int {
	s, r := b.readMe, b.report
	if r.Requests == nil {
		return row
	}
	row = s.sectionHead(row+1, readEnd, "How the rates stand to the requests")
	s.heads(row, 1, "Well", "Requested", ">Planned", "In words", "Limits that keep it from its request")
	for _, w := range r.Wells {
		if w.Request == nil {
			continue
		}
		row++
		var reasons []string
		for _, reason := range w.Request.Reasons {
			reasons = append(reasons, reason.Limit)
		}
		s.text(row, 1, joinFilled(" ", w.ID, w.Name), line)
		s.text(row, 2, figureText(value(w.Requested))+" m³/d", line)
		s.text(row, 3, figureText(w.Rate), rightWords)
		s.text(row, 4, w.Request.Sentence, line)
		s.text(row, 5, strings.Join(reasons, "; "), line)
	}
	return row + 1
}
