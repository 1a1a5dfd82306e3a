package workbook

import "springbound/plan"

// stateLimits writes the limits that hold in state k, each with a quantity that follows the state's rates now: the same formulas as on
// Receptors, with the state's own values without pumping.
func (b *book) stateLimits(row, k int) int {
	s, st := b.states, b.report.States[k]
	row = s.sectionHead(row, b.stateLast(), "Limits in the state "+st.Name)
	s.heads(row, stID, "Limit", "Receptor", "What is limited", "", "Unit", ">No pumping", ">Limit", ">Kept back", ">At the plan", ">Now", ">Headroom now", "Now the limit", ">Price at the plan", "In words, at the plan")
	first := row + 1
	for i, r := range st.Receptors {
		for _, l := range r.Limits {
			row++
			b.stateLimitRow(row, k, i, l)
		}
	}
	if row < first {
		row++
		s.nothing(row, stEnd, "No limit was entered.")
		return row + 1
	}
	s.warnWords(stStatus, first, row)
	return row + 1
}

func (b *book) stateLimitRow(row, k, i int, l plan.LimitResult) {
	s, r := b.states, b.report.States[k].Receptors[i]
	s.text(row, stID, l.ID, strong)
	s.text(row, stName, joinFilled(" · ", r.ID, r.Name), line)
	s.across(row, stFirst, stSecond, limitWords(r, l)+"; "+countWords(l), line)
	unit := l.Unit
	if l.Quantity == quantityShare {
		unit = "1"
	}
	s.text(row, stUnit, unitWords(unit), line)
	s.text(row, stWords, l.Sentence, line)
	format := unitFormat(unit, []float64{l.Limit}, l.Limit, l.Value)
	if unit == "m" {
		format = lengthLimitFormat(l)
	}
	if l.Quantity == quantityShare {
		format = shareFormat
		s.text(row, stUnit, "share", line)
	}
	cells := figures(format)
	s.value(row, stLimit, l.Limit, cells)
	s.blank(row, stPrice, line)
	s.blank(row, stKept, line)
	if stateSlope(b.report.States[k], r.ID) == nil || r.Outside || l.ResultState != assessedYes {
		s.blank(row, stNone, line)
		s.across(row, stPlan, stHeadroom, l.ResultState, with(line, func(l *look) { l.ink = inkMuted }))
		s.text(row, stStatus, wordNotAssessed, line)
		return
	}
	s.value(row, stNone, r.NoPumping, figures(unitFormat(r.Unit, smallLimits(r.Limits), r.NoPumping, r.Value)))
	s.value(row, stPlan, l.Value, cells)
	if l.ShadowPrice != 0 {
		s.text(row, stPrice, b.priceBothText(l.Range, l.ShadowPrice, priceUnit(unit, l.Quantity)), rightWords)
	}
	b.stateLimitFormulas(row, k, i, l, unit, cells)
}

// stateLimitFormulas writes quantity, headroom and status. A part that does not follow the rates is added as a number, as on Receptors.
func (b *book) stateLimitFormulas(row, k, i int, l plan.LimitResult, unit string, format look) {
	s, st := b.states, b.report.States[k]
	r := st.Receptors[i]
	quantity := b.stateQuantity(row, k, i, l)
	scale := largest([]float64{l.Value, l.Limit, r.NoPumping * fraction(l)})
	if fixed := l.Value - quantity.value; !(abs(fixed) <= agreeShare*scale) {
		quantity = quantity.plus(number(fixed))
		b.fixedParts = append(b.fixedParts, l.ID+" in "+st.Name)
	}
	s.formula(row, stNow, quantity, format)
	digits := roundDigits
	if unit == "1" {
		digits = roundDigitsGradient
	}
	limit, now := s.ref(s, row, stLimit), s.ref(s, row, stNow)
	size := absolute(limit)
	if l.Quantity == quantityValue {
		size = absolute(s.ref(s, row, stNone).minus(limit))
	}
	s.formula(row, stKept, number(l.Reserve).times(size), format)
	headroom := limit.minus(now)
	if l.Sense == senseAtLeast {
		headroom = now.minus(limit)
	}
	s.formula(row, stHeadroom, rounded(headroom, digits), format)
	left := s.ref(s, row, stHeadroom)
	near := number(limitNearShare * size.value)
	if size.value == 0 {
		near = number(limitNearShare * b.limitScale(i, l))
	}
	spare := left.minus(s.ref(s, row, stKept))
	s.phrase(row, stStatus, chooseWords(less(left.plus(near), number(0)), words(wordPassed),
		chooseWords(less(spare.plus(near), number(0)), words(wordReserve),
			chooseWords(atMost(spare, near), words(wordBinds), words(wordHolds)))), strong)
	b.agree("limited quantity of "+l.ID+" in "+st.Name, quantity.value, l.Value, scale)
	b.agree("headroom of "+l.ID+" in "+st.Name, left.value, l.Headroom, scale)
}

// stateSlope returns a receptor's sensitivities in a state; nil where there are none.
func stateSlope(st plan.StateResult, id string) []float64 {
	for n, receptor := range st.Sensitivities.Receptors {
		if receptor == id {
			return st.Sensitivities.Values[n]
		}
	}
	return nil
}

// stateSlopes is a receptor's column of sensitivities in a state: that on Sensitivities where it is the same, the state's own otherwise.
func (b *book) stateSlopes(k, i int) span {
	if column, own := b.stateRows.slopeColumn[k][i]; own {
		first := b.stateRows.slopeRow[k]
		return b.states.down(b.states, column, first, first+len(b.report.Wells)-1)
	}
	return b.slopes(b.states, i)
}

// stateSlopeTables writes, for each state where features switch, the sensitivities that differ from those of the default state.
func (b *book) stateSlopeTables(row int) int {
	s, l := b.states, &b.stateRows
	l.slopeColumn, l.slopeRow = make([]map[int]int, len(b.report.States)), make([]int, len(b.report.States))
	for k, st := range b.report.States {
		l.slopeColumn[k] = map[int]int{}
		var differ []int
		for i, r := range st.Receptors {
			if slope := stateSlope(st, r.ID); slope != nil && !sameNumbers(slope, b.facts.slope[i]) {
				differ = append(differ, i)
			}
		}
		if len(differ) == 0 {
			continue
		}
		row = s.sectionHead(row+1, b.stateLast(), "Sensitivities in the state "+st.Name+", where they are not those of sheet Sensitivities: change per rate")
		s.heads(row, stID, "Well", "Name")
		l.slopeRow[k] = row + 1
		for n, i := range differ {
			column := stFirst + n
			l.slopeColumn[k][i] = column
			s.text(row, column, st.Receptors[i].ID+"\n"+changeUnitPerRate(st.Receptors[i].Unit), headRight)
			for w, v := range stateSlope(st, st.Receptors[i].ID) {
				s.value(row+1+w, column, v, figures(scienceFormat))
			}
		}
		for w, x := range b.report.Wells {
			s.text(row+1+w, stID, x.ID, strong)
			s.text(row+1+w, stName, x.Name, line)
		}
		row += 1 + len(b.report.Wells)
	}
	return row
}

func sameNumbers(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

// stateQuantity is the limited quantity at a state's rates now.
func (b *book) stateQuantity(row, k, i int, l plan.LimitResult) term {
	s := b.states
	rates := s.down(s, nowColumn(k), b.stateRows.first, b.stateRows.last)
	slopes := b.stateSlopes(k, i)
	sum := func(with ...span) term { return sumProduct(append([]span{slopes}, with...)...) }
	own, existing := b.wellColumn(s, b.sens.own), b.wellColumn(s, b.sens.existing)
	loss, hasLoss := b.stateBoreLoss(k, i, l)
	if l.Quantity == quantityValue {
		value := s.ref(s, row, stNone).minus(sum(rates))
		if hasLoss {
			value = value.minus(loss)
		}
		return value
	}
	change := sum(rates)
	if l.Counts == countsOwn {
		change = sum(own, rates)
	}
	if hasLoss {
		change = change.plus(loss)
	}
	switch {
	case l.Baseline == baselinePresent && l.Counts == countsOwn:
		change = change.minus(sum(own, b.wellColumn(s, b.sens.present)))
	case l.Baseline == baselinePresent:
		change = change.minus(sum(b.wellColumn(s, b.sens.present)))
	case l.Baseline == baselineLicence && l.Counts != countsOwn:
		change = change.minus(sum(existing, b.wellColumn(s, b.sens.licensed)))
	}
	if l.Quantity == quantityShare {
		change = change.over(absolute(s.ref(s, row, stNone)))
	}
	return change
}

// stateBoreLoss is boreLoss at a state's rates.
func (b *book) stateBoreLoss(k, i int, l plan.LimitResult) (term, bool) {
	w := b.facts.ofFeature[i]
	if w < 0 || b.report.Wells[w].QuadraticLoss == 0 || l.Quantity != quantityValue && l.Counts == countsOwn && b.report.Wells[w].Others {
		return term{}, false
	}
	s := b.states
	hours := b.plan.ref(s, b.planRows.first+w, b.planRows.hours)
	running := s.ref(s, b.stateRows.first+w, nowColumn(k)).times(number(hoursPerDay)).over(hours)
	return b.inputs.ref(s, b.inputWells+w, inputTurbulent).times(running).times(absolute(running)), true
}

// stateLevels writes the pumping levels of all states at the plan.
func (b *book) stateLevels(row int) int {
	s, states := b.states, b.report.States
	row = s.sectionHead(row, b.stateLast(), b.says("Levels in the wells at the plan, in metres above the datum"))
	s.heads(row, stID, "", "")
	s.heads(row+1, stID, "Well", "Lowest allowed level")
	for k, st := range states {
		s.across(row, plannedColumn(k), nowColumn(k), st.Name, head)
		s.heads(row+1, plannedColumn(k), ">Pumping level\nm", ">Margin\nm")
	}
	row++
	for i, w := range b.report.Wells {
		row++
		s.text(row, stID, w.ID, strong)
		if w.LowestLevel != nil {
			s.value(row, stName, *w.LowestLevel, figures(levelFormat))
		} else {
			s.blank(row, stName, line)
		}
		for k, st := range states {
			s.value(row, plannedColumn(k), st.Wells[i].PumpingLevel, figures(levelFormat))
			s.known(row, nowColumn(k), st.Wells[i].LevelMargin, figures(levelFormat))
		}
	}
	return row + 1
}
