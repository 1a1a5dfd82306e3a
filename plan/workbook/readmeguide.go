package workbook

import "fmt"

// guidePart says how to read and change the workbook.
func (b *book) guidePart(row int) int {
	s := b.readMe
	row = s.sectionHead(row, readEnd, "How to read and change this workbook")
	s.text(row, 1, "A shaded cell may be changed", with(editable("General"), func(l *look) { l.unlocked, l.across = false, "left" }))
	row++
	for _, item := range []string{
		"Change only the shaded rates on sheet Plan. 'Now' in a column's head means that it follows them; 'at the plan' means that it does not.",
		"As soon as a rate differs from the plan, the third line of every sheet says: " + changedText + ". To go back, copy the planned rates into the shaded cells.",
		"Signs: " + wordHolds + ", " + wordBinds + " (reached), " + wordReserve + " (the limit holds, what was kept back does not), " + wordPassed + ". A limit counts as reached within a ten-millionth of its own size.",
		"Drawdown is positive downward, pumping is positive, recharge negative. A change is the fall of a value against no pumping, so that pumping makes it larger.",
		"All states are steady states of the model: the end of a long time at constant rates. They are not measured levels.",
		"Sheets are protected against slips only; there is no password. Cells of the sign-off below are open.",
		"Some programs ask to save on closing although nothing was changed: the workbook asks them to recalculate when it is opened.",
		"Numbers are stored in full and shown rounded.",
	} {
		row = s.paragraph(row, readEnd, "– "+b.says(item), wrapped)
	}
	row++
	s.heads(row, 1, "Sheet", "What it holds", "", "", "")
	s.merge(row, 2, readEnd)
	for _, l := range [][2]string{
		{"Plan", "each well: planned rate, rate to edit, bounds and prices; on the right the levels in the wells; below the totals and licences"},
		{"Receptors", "each receptor with no pumping, with others, at the plan and now; each limit with headroom, state, price and source"},
		{statesName, "rates, demands, quotas and limits of each operating state; the other sheets show the default one"},
		{"Contributions", "each well's part of each receptor's change"},
		{"Sensitivities", "the numbers that every live figure comes from"},
		{"Capture", "where the pumped water comes from"},
		{"Inputs and assumptions", "what was put in, measured or assumed, with sources and file hashes"},
		{"Checks", "what was checked, what failed and what was not done; one calculation by hand"},
	} {
		if l[0] == statesName && b.states == nil {
			continue
		}
		row++
		s.text(row, 1, l[0], strong)
		s.across(row, 2, readEnd, b.says(l[1]), line)
	}
	return row + 1
}

// unitPart prints the conversion factors used.
func (b *book) unitPart(row int) int {
	s := b.readMe
	row = s.sectionHead(row, readEnd, "Units and factors")
	s.heads(row, 1, "Unit", ">Factor", "", "How", "")
	s.merge(row, 4, readEnd)
	put := func(unit string, factor float64, format, of, how string) {
		row++
		s.text(row, 1, unit, line)
		s.value(row, 2, factor, figures(format))
		s.text(row, 3, of, line)
		s.across(row, 4, readEnd, how, line)
	}
	put("1 year", daysPerYear, exactFormat, "d", "all yearly volumes")
	put("1 day of running time", hoursPerDay, exactFormat, "h", "running rate = daily mean x 24 / hours a day")
	if b.unit.factor != 1 {
		put("1 "+b.unit.shown, b.unit.factor, exactFormat, "m³/d", b.unit.how)
	} else {
		put("1 L/s", secondsPerDay/litresPerCube, exactFormat, "m³/d", "for orientation; no column here is in L/s")
	}
	return row + 1
}

// recordPart says who it was made for and with what.
func (b *book) recordPart(row int) int {
	s, r := b.readMe, b.report
	row = s.sectionHead(row, readEnd, "Record")
	realisation := "best values of all parameters"
	if r.Realisation != 0 {
		realisation = fmt.Sprintf("number %d", r.Realisation)
	}
	for _, l := range [][2]string{{"Prepared for", r.PreparedFor}, {"Prepared by", r.PreparedBy}, {"Reference", r.Reference}, {"Aim", r.Aim},
		{"Operating state", r.State}, {"Period", r.Period}, {"Parameter set", realisation}, {"Working plane", r.Plane}, {"Vertical datum", r.Datum},
		{"Checks", b.checkCount()}, {"Made with", r.Program}} {
		s.text(row, 1, l[0], line)
		s.across(row, 2, readEnd, orWords(l[1], notStated), line)
		row++
	}
	return row
}

// signPart leaves room for the reviewer. No program fills these cells.
func (b *book) signPart(row int) int {
	s := b.readMe
	row = s.sectionHead(row, readEnd, "Review and signature")
	row = s.paragraph(row, readEnd, "This is a planning aid. It must be reviewed and signed by a qualified person under local rules. Leave empty what does not apply.", wrapped)
	field := with(wrapped, func(l *look) { l.bottom, l.unlocked, l.upright = borderThin, true, "bottom" })
	for _, name := range []string{"Name", "Licence number", "Reviewed / not reviewed", "Remarks", "Date", "Signature"} {
		s.text(row, 1, name, with(plain, func(l *look) { l.upright = "bottom" }))
		s.blank(row, 2, field)
		s.merge(row, 2, readEnd)
		s.heights[row] = 26
		row++
	}
	return row
}
