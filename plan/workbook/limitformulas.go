package workbook

import "springbound/plan"

// limitFormulas writes a limit's quantity, headroom and status as they follow from the rates now:
//
//	change          counted change - change at the baseline
//	share_of_base   the same over the size of the value without pumping
//	value           value without pumping - change of all wells
//	headroom        limit - quantity (at most), quantity - limit (at least)
//
// A part that does not follow the rates is added as a number where the report's quantity at the plan asks for it: the baseline of a
// receptor whose worst place moves, for example.
func (b *book) limitFormulas(row, i, k int, unit string, format look) {
	s, r := b.receptors, b.report.Receptors[i]
	l := r.Limits[k]
	line := b.lineOf(i)
	digits := roundDigits
	if unit == "1" {
		digits = roundDigitsGradient
	}
	quantity := b.quantity(s, i, line, l)
	fixed := l.Value - quantity.value
	scale := largest([]float64{l.Value, l.Limit, r.NoPumping * fraction(l)})
	if followsPlan := abs(fixed) <= agreeShare*scale; !followsPlan {
		quantity = quantity.plus(number(fixed))
		b.fixedParts = append(b.fixedParts, l.ID)
	}
	s.formula(row, recNow, quantity, format)
	limit, now := s.ref(s, row, recNone), s.ref(s, row, recNow)
	size := absolute(limit)
	if l.Quantity == quantityValue {
		size = absolute(s.ref(s, line, recNone).minus(limit))
	}
	kept := s.ref(s, row, recRecent).times(size)
	headroom, reached := limit.minus(now), limit.minus(kept)
	if l.Sense == senseAtLeast {
		headroom, reached = now.minus(limit), limit.plus(kept)
	}
	s.formula(row, recLicence, reached, format)
	s.formula(row, recChange, rounded(headroom, digits), format)
	left := s.ref(s, row, recChange)
	if size.value == 0 {
		s.text(row, recOwn, "hard limit", with(format, func(l *look) { l.ink, l.wrap = inkMuted, true }))
	} else {
		s.formula(row, recOwn, left.over(size), figures(shareFormat))
	}
	near := number(limitNearShare * size.value)
	if size.value == 0 {
		near = number(limitNearShare * b.limitScale(i, l))
	}
	bar := s.ref(s, row, recLicence)
	spare := bar.minus(now)
	if l.Sense == senseAtLeast {
		spare = now.minus(bar)
	}
	status := chooseWords(less(left.plus(near), number(0)), words(wordPassed),
		chooseWords(less(spare.plus(near), number(0)), words(wordReserve),
			chooseWords(atMost(spare, near), words(wordBinds), words(wordHolds))))
	s.phrase(row, recOthers, status, strong)
	b.agree("limited quantity of "+l.ID, quantity.value, l.Value, scale)
	b.agree("headroom of "+l.ID, left.value, l.Headroom, scale)
}

// fraction is 0 where a value without pumping says nothing about a limit's size.
func fraction(l plan.LimitResult) float64 {
	if l.Quantity == quantityValue {
		return 1
	}
	return 0
}

// lineOf is the row of a receptor on Receptors.
func (b *book) lineOf(receptor int) int {
	for _, w := range b.watched {
		if w.index == receptor {
			return w.row
		}
	}
	panic("workbook: a limit before its receptor")
}

// quantity is the limited quantity now.
func (b *book) quantity(s *sheet, i, line int, l plan.LimitResult) term {
	slopes := b.slopes(s, i)
	loss, hasLoss := b.boreLoss(s, i, l)
	if l.Quantity == quantityValue {
		value := s.ref(s, line, recNow)
		if hasLoss {
			value = value.minus(loss)
		}
		return value
	}
	change := s.ref(s, line, recChange)
	if l.Counts == countsOwn {
		change = s.ref(s, line, recOwn)
	}
	if hasLoss {
		change = change.plus(loss)
	}
	own, existing := b.wellColumn(s, b.sens.own), b.wellColumn(s, b.sens.existing)
	switch {
	case l.Baseline == baselinePresent && l.Counts == countsOwn:
		change = change.minus(sumProduct(slopes, own, b.wellColumn(s, b.sens.present)))
	case l.Baseline == baselinePresent:
		change = change.minus(sumProduct(slopes, b.wellColumn(s, b.sens.present)))
	case l.Baseline == baselineLicence && l.Counts != countsOwn:
		change = change.minus(sumProduct(slopes, existing, b.wellColumn(s, b.sens.licensed)))
	}
	if l.Quantity == quantityShare {
		change = change.over(absolute(s.ref(s, line, recNone)))
	}
	return change
}

// boreLoss is the turbulent loss of the well that a pumping level is about, where the limit counts that well.
func (b *book) boreLoss(s *sheet, i int, l plan.LimitResult) (term, bool) {
	k := b.facts.ofFeature[i]
	if k < 0 || b.report.Wells[k].QuadraticLoss == 0 || l.Quantity != quantityValue && l.Counts == countsOwn && b.report.Wells[k].Others {
		return term{}, false
	}
	running := b.plan.ref(s, b.planRows.first+k, b.planRows.running)
	return b.inputs.ref(s, b.inputWells+k, inputTurbulent).times(running).times(absolute(running)), true
}

// limitScale is what the tolerance on a limit of zero is relative to: the largest change that one of the counted wells can cause.
func (b *book) limitScale(i int, l plan.LimitResult) float64 {
	var scale float64
	for k, w := range b.report.Wells {
		if l.Counts == countsOwn && l.Quantity != quantityValue && w.Others {
			continue
		}
		scale = largest([]float64{scale, b.facts.slope[i][k] * w.Min, b.facts.slope[i][k] * w.Max})
	}
	if base := abs(b.report.Receptors[i].NoPumping); l.Quantity == quantityShare && base > 0 {
		scale /= base
	}
	return scale
}
