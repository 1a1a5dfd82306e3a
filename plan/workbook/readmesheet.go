package workbook

import (
	"fmt"
	"strings"

	"springbound/plan"
)

const readEnd = 5

// fillReadMe writes page one: the result, what binds, where the water comes from, what was not assessed, and the sign-off.
func (b *book) fillReadMe() {
	s := b.readMe
	s.setWidths(1, 32, 15, 17, 30, 22)
	s.page = pageSetup{wide: 1, freezeRow: changedRow + 2}
	row := b.resultPart(firstRow)
	row = b.conflictPart(row)
	row = b.bindingPart(row + 1)
	row = b.statesPart(row)
	row = b.energyPart(row)
	row = b.requestPart(row)
	row = b.waterPart(row + 1)
	row = b.listPart(row+1, "Not assessed", b.report.NotAssessed, "The report names nothing.")
	row = b.listPart(row+1, "Cautions", b.report.Cautions, "The report names none.")
	if len(b.report.Findings) > 0 {
		row = b.listPart(row+1, "Found in the input", b.report.Findings, "")
	}
	s.page.rowBreaks = append(s.page.rowBreaks, row+1)
	row = b.guidePart(row + 1)
	row = b.unitPart(row + 1)
	row = b.recordPart(row + 1)
	b.signPart(row + 1)
}

const headlineWords = "Largest total rate that keeps the limits entered"

func (b *book) headline() string {
	if len(b.report.States) > 0 && !b.noPlan() {
		return "Total rate in the operating state " + b.report.State
	}
	switch {
	case b.report.Conflict != nil || b.report.Status == plan.StatusInfeasible:
		return "No plan keeps all the limits entered"
	case b.noPlan():
		return "There is no plan: the search for one did not end"
	case b.givenRates():
		return "Total of the rates given"
	case b.report.Aim == aimMostYield:
		return headlineWords
	case b.report.Aim == aimMostHeadroom:
		return "Total rate of the plan with the largest smallest headroom"
	case b.report.Aim == aimEnergy:
		return "Least pumping energy for the demand: total rate of the plan"
	case b.report.Aim == aimRequests:
		return "Closest to the requests: total rate of the plan"
	}
	return "Total rate of the plan"
}

// resultPart writes the headline and what goes with it.
func (b *book) resultPart(row int) int {
	s, r := b.readMe, b.report
	s.across(row, 1, readEnd, b.headline(), with(label, func(l *look) { l.size = 13 }))
	row++
	if !b.noPlan() {
		big := with(plain, func(l *look) {
			l.size, l.bold, l.format, l.across = 22, true, rateFormat(r.TotalRate)+` "m³/d"`, "left"
		})
		s.value(row, 1, r.TotalRate, big)
		if b.unit.factor != 1 {
			s.value(row, 3, r.TotalRate/b.unit.factor, with(big, func(l *look) {
				l.size, l.format, l.upright = 14, rateFormat(r.TotalRate/b.unit.factor)+` "`+b.unit.shown+`"`, "center"
			}))
			s.merge(row, 3, 4)
		}
		s.heights[row] = 32
		row++
	}
	if r.Headline != "" {
		row = s.paragraph(row, readEnd, r.Headline, wrapped)
	}
	if !r.ModelValid {
		row = s.paragraph(row, readEnd, warnSign+"THE MODEL IS NOT VALID AT THESE RATES: "+orWords(strings.Join(r.Invalid, "; "), "the report gives no reason"),
			with(label, func(l *look) { l.fill, l.box = fillWarn, true }))
	}
	if len(r.Observations) == 0 {
		row = s.paragraph(row, readEnd, "Not calibrated: the model was not compared with any observed level or flow.", label)
	}
	return b.comparePart(row + 1)
}

// comparePart sets the plan beside the rates that the workbook holds now.
func (b *book) comparePart(row int) int {
	s, r, p := b.readMe, b.report, &b.planRows
	s.heads(row, 1, "", ">At the plan", ">Rates now in this workbook", "", "")
	s.merge(row, 4, readEnd)
	s.at(row, 4).words = "Remark"
	s.at(row, 4).kind = wordCell
	compare := func(words string, atPlan func(row int), now term, format, remark string) {
		row++
		s.text(row, 1, words, line)
		s.blank(row, 2, line)
		if atPlan != nil {
			atPlan(row)
		}
		s.formula(row, 3, now, figures(format))
		s.across(row, 4, readEnd, remark, line)
	}
	total := rateFormat(r.TotalRate)
	compare("Total rate, m³/d", func(row int) { s.value(row, 2, r.TotalRate, figures(total)) }, b.plan.ref(s, p.totalRow, p.now), total, "wells that the plan decides, pumped rates only")
	differences := b.plan.down(s, p.difference, p.first, p.last)
	spread := call("MAX", largest(differences.values), "MAX("+differences.text+")", "-MIN("+differences.text+")")
	compare("Largest difference of a rate, m³/d", nil, spread, total, b.says("0 while all rates are those of the plan"))
	if d := r.Demand; d != nil {
		row++
		s.text(row, 1, "Demand, m³/d", line)
		s.value(row, 2, *d, figures(rateFormat(*d)))
		s.blank(row, 3, line)
		s.across(row, 4, readEnd, "entered", line)
	}
	statuses := b.limitStatuses(s)
	for _, c := range []struct{ words, status, remark string }{
		{"Limits passed", wordPassed, "receptors, pumping levels, licences and groups"},
		{"Limits in their reserve", wordReserve, "the limit itself holds; what was kept back does not"},
		{"Limits that bind", wordBinds, "reached exactly, with what is kept back"},
	} {
		if len(b.report.States) > 1 {
			c.remark += "; of the operating state " + b.report.State + ", the others stand below"
		}
		compare(c.words, nil, countWord(c.status, statuses...), countFormat, c.remark)
		if c.status == wordPassed {
			s.warnCount(row, 3)
		}
	}
	within := b.plan.wordsDown(s, p.within, p.first, p.last)
	outside := countWord(wordBelow, within).plus(countWord(wordAbove, within)).plus(countWord(wordOutOfService, within)).plus(countWord(wordChanged, within))
	compare("Rates outside their bounds or not as given", nil, outside, countFormat, "marked on Plan")
	s.warnCount(row, 3)
	b.marginLine(row + 1)
	return row + 2
}

// warnCount marks a count that is not zero.
func (s *sheet) warnCount(row, column int) {
	cell := cellName(row, column)
	s.marks = append(s.marks, mark{cell, cell + ">0", warnMark})
}

// limitStatuses are all cells that say how a limit stands now.
func (b *book) limitStatuses(from *sheet) []wordSpan {
	p := &b.planRows
	spans := []wordSpan{b.plan.wordsDown(from, p.levelStatus, p.first, p.last)}
	if n := len(b.quotas); n > 0 {
		spans = append(spans, b.plan.wordsDown(from, p.within, b.quotas[0].row, b.quotas[n-1].row))
	}
	if n := len(b.limits); n > 0 {
		spans = append(spans, b.receptors.wordsDown(from, recOthers, b.limits[0].row, b.limits[n-1].row))
	}
	return spans
}

func (b *book) marginLine(row int) {
	s, r := b.readMe, b.report
	s.text(row, 1, b.says("Worst margin at the plan"), line)
	if r.WorstMargin != nil {
		s.value(row, 2, *r.WorstMargin, figures(shareFormat))
	} else {
		s.text(row, 2, notKnown, figures(shareFormat))
	}
	s.across(row, 3, readEnd, joinFilled(": ", "smallest headroom as a share of its limit", r.WorstLimit), line)
}

// conflictPart says in plain words why no plan exists.
func (b *book) conflictPart(row int) int {
	s, c := b.readMe, b.report.Conflict
	if c == nil {
		return row
	}
	row = s.sectionHead(row+1, readEnd, "Why there is no plan")
	row = s.paragraph(row, readEnd, c.Sentence, label)
	if c.ExistingAlone {
		row = s.paragraph(row, readEnd, "The existing users alone pass a limit, with all own wells off.", wrapped)
	}
	for _, part := range []struct {
		title, amount string
		alone         bool
	}{{"These limits cannot hold together; without any one of them the others can", ">By", true}, {"The least that the limits would have to give, all together", ">Give by", false}} {
		members := c.Members
		if !part.alone {
			members = c.Relaxation
		}
		if len(members) == 0 {
			continue
		}
		row = s.paragraph(row, readEnd, part.title, label)
		s.heads(row, 1, "Limit", part.amount, ">Giving way alone, it would need", "Receptor", "Source")
		for _, m := range members {
			row++
			s.text(row, 1, m.Limit, line)
			s.text(row, 2, conflictWords(m), rightWords)
			alone := "none would do"
			if m.Alone != nil {
				alone = joinFilled(" ", figureText(*m.Alone), strings.Trim(unitWords(m.Unit), "–"))
			}
			s.text(row, 3, alone, rightWords)
			s.text(row, 4, m.Receptor, line)
			s.text(row, 5, m.Source, line)
		}
		row++
	}
	return row
}

// conflictWords writes one member of a conflict in a sentence.
func conflictWords(m plan.ConflictMember) string {
	by := fmt.Sprintf("%s %s", figureText(m.By), unitWords(m.Unit))
	if m.Unit == "1" {
		by = figureText(m.By)
	}
	return by
}

// demandWords says what the price of the demand is.
func demandWords(aim string) string {
	switch aim {
	case aimEnergy:
		return "kWh that one more m³ of demand takes"
	case aimRequests:
		return "Added to the sum of squared shortfalls by each m³/d of demand"
	}
	return "Change of the aim for each m³/d of demand"
}

// bindingPart lists everything that holds the plan back, with its price and source.
func (b *book) bindingPart(row int) int {
	s, r := b.readMe, b.report
	row = s.sectionHead(row, readEnd, "What holds the plan: binding limits, with what each is worth")
	s.heads(row, 1, "Limit", "As entered", ">Price", "In words", "Source")
	first := row
	put := func(what, entered string, x *plan.PriceRange, price float64, unit, said, source string) {
		row++
		s.text(row, 1, what, line)
		s.text(row, 2, entered, line)
		s.text(row, 3, b.priceBothText(x, price, unit), rightWords)
		s.text(row, 4, said, line)
		s.text(row, 5, orWords(source, notStated), line)
	}
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.Binds || l.Passed {
				put(joinFilled(": ", joinFilled(" ", rec.ID, rec.Name), limitWords(rec, l)), limitText(l),
					l.Range, l.ShadowPrice, priceUnit(l.Unit, l.Quantity), l.Sentence, l.Source)
			}
		}
	}
	for _, w := range r.Wells {
		if w.LevelShadowPrice != 0 {
			put("Lowest level in well "+w.ID, fmt.Sprintf("%s m", figureText(value(w.LowestLevel))), w.LevelRange, w.LevelShadowPrice, "m",
				joinFilled(". ", w.LowestReason, holdsWords(w.LevelRange, value(w.LowestLevel), 1, "m")), w.Source)
		}
		if w.AtBound == "max" && w.ShadowPrice != 0 {
			put("Largest rate of well "+w.ID, figureText(w.Max)+" m³/d", w.RateRange, w.ShadowPrice, "m³/d", holdsWords(w.RateRange, w.Max, 1, "m³/d"), w.MaxSource)
		}
		if w.AtBound == "min" && w.ShadowPrice != 0 && w.Min != 0 {
			put("Least rate of well "+w.ID, figureText(w.Min)+" m³/d", w.RateRange, w.ShadowPrice, "m³/d", holdsWords(w.RateRange, w.Min, 1, "m³/d"), w.Source)
		}
	}
	for _, q := range r.Quotas {
		if q.Binds {
			put(joinFilled(" · ", q.Name, q.Holder), fmt.Sprintf("%s m³ %s", figureText(q.Entered), q.Basis), q.Range, q.ShadowPrice, "m³/d",
				joinFilled(". ", wellList(q.Wells), holdsWords(q.Range, q.Limit, entered(q), "m³ "+q.Basis)), q.Source)
		}
	}
	for _, y := range r.YearQuotas {
		if q := y.Quota; q.Binds {
			put(joinFilled(" · ", q.Name, q.Holder), fmt.Sprintf("%s m³ %s", figureText(q.Entered), q.Basis), q.Range, q.ShadowPrice, "m³/d of the year's mean",
				joinFilled(". ", wellList(q.Wells), "Over "+strings.Join(y.States, ", ")), q.Source)
		}
	}
	for _, st := range r.States {
		if st.Default {
			continue // stands above
		}
		for _, rec := range st.Receptors {
			for _, l := range rec.Limits {
				if l.Binds || l.Passed {
					put(st.Name+": "+joinFilled(": ", joinFilled(" ", rec.ID, rec.Name), limitWords(rec, l)), limitText(l),
						l.Range, l.ShadowPrice, priceUnit(l.Unit, l.Quantity), l.Sentence, l.Source)
				}
			}
		}
		for _, q := range st.Quotas {
			if q.Binds {
				put(st.Name+": "+joinFilled(" · ", q.Name, q.Holder), fmt.Sprintf("%s m³ %s", figureText(q.Entered), q.Basis), q.Range, q.ShadowPrice, "m³/d",
					joinFilled(". ", wellList(q.Wells), holdsWords(q.Range, q.Limit, entered(q), "m³ "+q.Basis)), q.Source)
			}
		}
		if d := st.DemandPrice; d != nil && *d != 0 {
			put(st.Name+": demand", figureText(value(st.Demand))+" m³/d", nil, *d, "m³/d",
				joinFilled(". ", demandWords(r.Aim), holdsWords(st.DemandRange, value(st.Demand), 1, "m³/d")), "entered")
		}
	}
	if d := r.DemandPrice; d != nil && *d != 0 {
		put("Demand", figureText(value(r.Demand))+" m³/d", nil, *d, "m³/d",
			joinFilled(". ", demandWords(r.Aim), holdsWords(r.DemandRange, value(r.Demand), 1, "m³/d")), "entered")
	}
	if row == first {
		row++
		s.nothing(row, readEnd, "None.")
	}
	row++
	remark := "A price is what one more unit of a limit would bring. It holds near the plan, for this model only."
	if r.NotUnique {
		remark += " Other plans are as good as this one; the cautions name the wells that could trade places."
	}
	return s.paragraph(row, readEnd, remark, muted)
}

// limitText is a limit as the user wrote it, or in its unit.
func limitText(l plan.LimitResult) string {
	switch {
	case l.Entered != "":
		return l.Entered
	case l.Quantity == quantityShare:
		return figureText(l.Limit*shareOfPercent) + " %"
	}
	return joinFilled(" ", figureText(l.Limit), strings.Trim(unitWords(l.Unit), "–"))
}

func (b *book) priceText(price float64, unit string) string {
	if price == 0 {
		return "–"
	}
	return fmt.Sprintf("%s %s per %s", figureText(price), aimUnit(b.report.Aim), unit)
}

// waterPart lists the sources of the pumped water at the plan.
func (b *book) waterPart(row int) int {
	s, r := b.readMe, b.report
	row = s.sectionHead(row, readEnd, "Where the pumped water comes from, at the plan")
	if len(r.Capture) == 0 {
		s.nothing(row, readEnd, "Not done.")
		return row + 1
	}
	s.heads(row, 1, "Feature", "Kind", ">m³/d", ">Share", "")
	flows := make([]float64, len(r.Capture))
	for k, c := range r.Capture {
		flows[k] = c.Flow
	}
	for _, c := range r.Capture {
		row++
		s.text(row, 1, c.Feature, line)
		s.text(row, 2, kindWords(c.Kind), line)
		s.value(row, 3, c.Flow, figures(rateFormat(flows...)))
		if c.Share != nil {
			s.value(row, 4, *c.Share, figures(shareFormat))
		} else {
			s.text(row, 4, "–", figures(shareFormat))
		}
		s.blank(row, 5, line)
	}
	return row + 1
}

func (b *book) listPart(row int, titleText string, items []string, none string) int {
	s := b.readMe
	row = s.sectionHead(row, readEnd, titleText)
	if len(items) == 0 {
		s.nothing(row, readEnd, none)
		return row + 1
	}
	for _, item := range items {
		row = s.paragraph(row, readEnd, "– "+item, wrapped)
	}
	return row
}
