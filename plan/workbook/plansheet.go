package workbook

import (
	"fmt"
	"strings"
)

// planLayout says where things stand on Plan. Columns that do not exist are 0.
type planLayout struct {
	first, last                                                   int // rows of the wells
	id, name, owner, mode, whose                                  int
	planned, now, plannedUnit, nowUnit, difference                int
	hours, running, runningUnit, volume                           int
	least, most, within, price, priceWords, source                int
	static, drop, headNow, own, loss, level, levelPlan            int
	lowest, reason, margin, levelStatus, levelPrice, top, overTop int
	valid, record                                                 int
	idAgain, idLevels                                             int // the well again, at the left of a printed page
	rates                                                         int // last column of the first page
	end                                                           int
	changed                                                       term
	totalNow                                                      term
	totalRow                                                      int
}

const planHeadRow = 7

// layPlan gives every column of Plan its place and width.
func (b *book) layPlan() {
	p, s := &b.planRows, b.plan
	p.first = planHeadRow + 1
	p.last = planHeadRow + len(b.report.Wells)
	column := 0
	place := func(at *int, width float64) {
		column++
		*at = column
		s.setWidths(column, width)
	}
	converted := b.unit.factor != 1
	place(&p.id, 9)
	place(&p.name, 17)
	place(&p.owner, 17)
	place(&p.mode, 8.5)
	place(&p.whose, 12.5)
	place(&p.planned, 10)
	place(&p.now, 10.5)
	if converted {
		place(&p.plannedUnit, 9)
		place(&p.nowUnit, 9)
	}
	place(&p.difference, 9.5)
	place(&p.hours, 6.5)
	place(&p.running, 9.5)
	if converted {
		place(&p.runningUnit, 9)
	}
	place(&p.volume, 11)
	place(&p.least, 8.5)
	place(&p.most, 8.5)
	place(&p.within, 20)
	p.rates = column
	place(&p.idAgain, 9)
	place(&p.price, 10)
	place(&p.priceWords, 32)
	place(&p.source, 32)
	place(&p.record, 32)
	prices := column
	place(&p.idLevels, 9)
	place(&p.static, 9)
	place(&p.drop, 10)
	place(&p.headNow, 9.5)
	place(&p.own, 10)
	place(&p.loss, 8.5)
	place(&p.level, 9.5)
	place(&p.levelPlan, 9.5)
	place(&p.lowest, 9.5)
	place(&p.reason, 22)
	place(&p.margin, 9)
	place(&p.levelStatus, 15)
	place(&p.levelPrice, 10.5)
	place(&p.top, 9)
	place(&p.overTop, 9)
	place(&p.valid, 9.5)
	p.end = column
	s.page = pageSetup{landscape: true, groupEnds: []int{p.rates, prices, column}, titleRows: [2]int{planHeadRow - 1, planHeadRow},
		freezeRow: planHeadRow + 1, freezeColumn: p.name + 1}
}

// fillRates writes the wells' descriptions, the planned rates and the rates to edit.
func (b *book) fillRates() {
	p, s := &b.planRows, b.plan
	b.planHeads()
	rates := make([]float64, len(b.report.Wells))
	for i, w := range b.report.Wells {
		rates[i] = w.Rate
	}
	format, changeFormat := rateFormat(rates...), rateFormat(rates...)
	unitFormat := rateFormat(largest(rates) / b.unit.factor)
	for i, w := range b.report.Wells {
		row := p.first + i
		for _, c := range []int{p.id, p.idAgain, p.idLevels} {
			s.text(row, c, w.ID, strong)
		}
		s.text(row, p.name, w.Name, line)
		s.text(row, p.owner, w.Owner, line)
		s.text(row, p.mode, w.Mode, line)
		s.text(row, p.whose, whoseWords(w.Others), line)
		s.value(row, p.planned, w.Rate, figures(format))
		s.value(row, p.now, w.Rate, editable(format))
		planned, now := s.ref(s, row, p.planned), s.ref(s, row, p.now)
		if p.plannedUnit > 0 {
			s.formula(row, p.plannedUnit, planned.over(number(b.unit.factor)), figures(unitFormat))
			s.formula(row, p.nowUnit, now.over(number(b.unit.factor)), figures(unitFormat))
		}
		s.formula(row, p.difference, now.minus(planned), figures(changeFormat))
		s.value(row, p.hours, w.DutyHours, figures(exactFormat))
		hours := s.ref(s, row, p.hours)
		s.formula(row, p.running, now.times(number(hoursPerDay)).over(hours), figures(format))
		running := s.ref(s, row, p.running)
		if p.runningUnit > 0 {
			s.formula(row, p.runningUnit, running.over(number(b.unit.factor)), figures(unitFormat))
		}
		s.formula(row, p.volume, now.times(number(daysPerYear)), figures(countFormat))
		b.fillBounds(i, row)
		b.names.add("rate", w.ID, s, row, p.now)
		b.agree("running rate of well "+w.ID, s.at(row, p.running).number, w.Running, 0)
		b.agree("yearly volume of well "+w.ID, s.at(row, p.volume).number, w.Yearly, 0)
	}
	b.names.addBlock("rates_now", s, p.now, p.first, p.last)
	b.names.addBlock("rates_planned", s, p.planned, p.first, p.last)
	differences := s.down(s, p.difference, p.first, p.last)
	p.changed = sumProduct(differences, differences)
	s.checks = append(s.checks, validation{cellName(p.first, p.now) + ":" + cellName(p.last, p.now)})
	s.warnWords(p.within, p.first, p.last)
}

// warnWords marks the words of a column that begin with the warning sign, and those that begin with the sign for a limit reached.
func (s *sheet) warnWords(column, first, last int) {
	if last < first {
		return
	}
	block := cellName(first, column) + ":" + cellName(last, column)
	s.marks = append(s.marks, mark{block, fmt.Sprintf(`LEFT(%s,1)="▲"`, cellName(first, column)), warnMark},
		mark{block, fmt.Sprintf(`LEFT(%s,1)="●"`, cellName(first, column)), reachMark})
}

func whoseWords(others bool) string {
	if others {
		return existingWords
	}
	return ownWords
}

func (b *book) planHeads() {
	p, s := &b.planRows, b.plan
	for c := 1; c <= p.end; c++ {
		s.text(planHeadRow-1, c, "", under)
	}
	s.text(planHeadRow-1, 1, "Rates: change only the shaded cells", label)
	s.oneLine(planHeadRow-1, 1)
	s.text(planHeadRow-1, p.idAgain, "Prices of bounds, and sources", label)
	s.oneLine(planHeadRow-1, p.idAgain)
	s.text(planHeadRow-1, p.idLevels, "Levels in the wells, steady state, in metres above the datum", label)
	s.oneLine(planHeadRow-1, p.idLevels)
	set := func(column int, text string) {
		if column > 0 {
			s.heads(planHeadRow, column, text)
		}
	}
	u := b.unit.shown
	set(p.id, "Well")
	set(p.idAgain, "Well")
	set(p.idLevels, "Well")
	set(p.name, "Name")
	set(p.owner, "Owner")
	set(p.mode, "Rate is")
	set(p.whose, "Whose")
	set(p.planned, ">Planned rate\nm³/d")
	set(p.now, ">Rate now (edit)\nm³/d")
	set(p.plannedUnit, ">Planned rate\n"+u)
	set(p.nowUnit, ">Rate now\n"+u)
	set(p.difference, ">Now less planned\nm³/d")
	set(p.hours, ">Hours\nh/d")
	set(p.running, ">Running rate now\nm³/d")
	set(p.runningUnit, ">Running rate now\n"+u)
	set(p.volume, ">Volume now\nm³/yr")
	set(p.least, ">Least rate\nm³/d")
	set(p.most, ">Largest rate\nm³/d")
	set(p.within, "Rate now against its bounds")
	set(p.price, ">Price of the bound at the plan\nper m³/d")
	set(p.priceWords, "What the price says")
	set(p.source, "Where the largest rate comes from")
	set(p.static, ">Level without pumping\nm")
	set(p.drop, ">Drawdown in the aquifer now\nm")
	set(p.headNow, ">Modelled head now\nm")
	set(p.own, ">Own drawdown below it now\nm")
	set(p.loss, ">Well loss now\nm")
	set(p.level, ">Pumping level now\nm")
	set(p.levelPlan, ">Pumping level at the plan\nm")
	set(p.lowest, ">Lowest allowed level\nm")
	set(p.reason, "Reason for it")
	set(p.margin, ">Margin now\nm")
	set(p.levelStatus, "Level now")
	set(p.levelPrice, ">Price of it at the plan\nper m")
	set(p.top, ">Aquifer top\nm")
	set(p.overTop, ">Head now above it\nm")
	set(p.valid, "Table valid")
	set(p.record, "Source of the well's record")
}

// fillBounds writes a well's bounds, how the rate stands to them, and what the bound is worth.
func (b *book) fillBounds(i, row int) {
	p, s, w := &b.planRows, b.plan, b.report.Wells[i]
	now, planned := s.ref(s, row, p.now), s.ref(s, row, p.planned)
	bounds := figures(rateFormat(w.Min, w.Max))
	if w.Mode != modeDecided {
		s.blank(row, p.least, bounds)
		s.blank(row, p.most, bounds)
		asGiven, different := wordGiven, wordChanged
		if w.Mode == modeOff {
			asGiven, different = wordOffAsPlanned, wordOutOfService
		}
		s.phrase(row, p.within, chooseWords(equal(now, planned), words(asGiven), words(different)), line)
	} else {
		s.value(row, p.least, w.Min, bounds)
		s.value(row, p.most, w.Max, bounds)
		least, most := s.ref(s, row, p.least), s.ref(s, row, p.most)
		near := number(reachShare * largest([]float64{w.Min, w.Max}))
		inner := chooseWords(less(now, least.minus(near)), words(wordBelow),
			chooseWords(more(now, most.plus(near)), words(wordAbove),
				chooseWords(atMost(absolute(now.minus(most)), near), words(wordAtLargest),
					chooseWords(atMost(absolute(now.minus(least)), near), words(wordAtLeast), words(wordInside)))))
		s.phrase(row, p.within, chooseWords(equal(now, number(0)), words(wordZero), inner), line)
	}
	said := ""
	if w.ShadowPrice != 0 {
		s.value(row, p.price, w.ShadowPrice, figures(priceFormat(w.ShadowPrice)))
		said = fmt.Sprintf("1 m³/d more allowed here %s.", worthWords(b.report.Aim, figureText(w.ShadowPrice)))
		if w.AtBound == "min" {
			said = fmt.Sprintf("Each m³/d more from this well would cost %s %s.", figureText(w.ShadowPrice), aimUnit(b.report.Aim))
		}
	} else {
		s.blank(row, p.price, line)
	}
	s.text(row, p.priceWords, said, line)
	s.text(row, p.source, w.MaxSource, line)
	s.text(row, p.record, w.Source, line)
}

// fillLevels writes the levels in the wells; they follow the rates where the drawdown per rate is known.
func (b *book) fillLevels() {
	p, s := &b.planRows, b.plan
	for i, w := range b.report.Wells {
		row := p.first + i
		metres := figures(levelFormat)
		now, running := s.ref(s, row, p.now), s.ref(s, row, p.running)
		s.value(row, p.static, w.StaticLevel, metres)
		column, live := b.sens.wellColumn[i]
		if live {
			drop := b.sensitivities.down(s, column, b.sens.wellFirst, b.sens.wellLast)
			s.formula(row, p.drop, sumProduct(drop, s.down(s, p.now, p.first, p.last)), metres)
			s.formula(row, p.headNow, s.ref(s, row, p.static).minus(s.ref(s, row, p.drop)), metres)
			b.agree("modelled head in well "+w.ID, s.at(row, p.headNow).number, w.NodeLevel, w.NodeLevel-w.StaticLevel)
		}
		s.formula(row, p.own, now.times(b.inputs.ref(s, b.inputWells+i, inputOwn)), metres)
		loss := b.inputs.ref(s, b.inputWells+i, inputLinear).times(running).plus(b.inputs.ref(s, b.inputWells+i, inputTurbulent).times(running).times(absolute(running)))
		s.formula(row, p.loss, loss, metres)
		b.agree("well loss of well "+w.ID, s.at(row, p.loss).number, w.WellLoss, 0)
		known := live || w.LevelMargin != nil || w.NodeLevel != w.StaticLevel
		if live {
			level := s.ref(s, row, p.headNow).minus(s.ref(s, row, p.own)).minus(s.ref(s, row, p.loss))
			s.formula(row, p.level, level, metres)
			b.agree("pumping level in well "+w.ID, s.at(row, p.level).number, w.PumpingLevel, w.PumpingLevel-w.StaticLevel)
		} else {
			for _, c := range []int{p.drop, p.headNow, p.level} {
				s.text(row, c, notKnown, with(metres, func(l *look) { l.ink = inkMuted }))
			}
		}
		if known {
			s.value(row, p.levelPlan, w.PumpingLevel, metres)
		} else {
			s.text(row, p.levelPlan, notKnown, with(metres, func(l *look) { l.ink = inkMuted }))
		}
		b.fillLevelLimit(i, row, live)
	}
	s.warnWords(p.levelStatus, p.first, p.last)
	s.warnWords(p.valid, p.first, p.last)
}

func (b *book) fillLevelLimit(i, row int, live bool) {
	p, s, w := &b.planRows, b.plan, b.report.Wells[i]
	metres := figures(levelFormat)
	s.known(row, p.lowest, w.LowestLevel, metres)
	s.text(row, p.reason, w.LowestReason, line)
	s.blank(row, p.margin, metres)
	s.blank(row, p.levelPrice, metres)
	switch {
	case w.LowestLevel == nil:
		s.text(row, p.levelStatus, "– no limit", line)
	case !live:
		s.text(row, p.levelStatus, wordNotAssessed, line)
	default:
		s.formula(row, p.margin, rounded(s.ref(s, row, p.level).minus(s.ref(s, row, p.lowest)), roundDigits), metres)
		margin := s.ref(s, row, p.margin)
		near := number(limitNearShare * abs(w.StaticLevel-*w.LowestLevel))
		status := chooseWords(less(margin.plus(near), number(0)), words(wordPassed),
			chooseWords(atMost(margin, near), words(wordBinds), words(wordHolds)))
		if w.Rate == 0 {
			status = chooseWords(equal(s.ref(s, row, p.now), number(0)), words("– not running"), status)
		}
		s.phrase(row, p.levelStatus, status, line)
	}
	if w.LevelShadowPrice != 0 {
		s.value(row, p.levelPrice, w.LevelShadowPrice, figures(priceFormat(w.LevelShadowPrice)))
	}
	s.known(row, p.top, w.AquiferTop, metres)
	s.blank(row, p.overTop, metres)
	s.blank(row, p.valid, line)
	if w.AquiferTop != nil && live {
		s.formula(row, p.overTop, rounded(s.ref(s, row, p.headNow).minus(s.ref(s, row, p.top)), roundDigits), metres)
		s.phrase(row, p.valid, chooseWords(less(s.ref(s, row, p.overTop), number(0)), words(wordBroken), words(wordValid)), line)
	}
}

// brokenLevels counts the wells whose head is below the aquifer's top.
func (b *book) brokenLevels() term {
	p := &b.planRows
	return countWord(wordBroken, b.plan.wordsDown(b.plan, p.valid, p.first, p.last))
}

// wellList joins ids for a table's cell.
func wellList(ids []string) string { return strings.Join(ids, ", ") }
