package workbook

import (
	"fmt"

	"springbound/plan"
)

// The columns of Operating states that its tables share; rates have two columns a state from stFirst on.
const (
	stID = iota + 1
	stName
	stFirst  // limits: what is limited, over two columns
	stSecond //
	stUnit
	stNone // no pumping
	stLimit
	stKept // what a limit keeps back
	stPlan
	stNow
	stHeadroom
	stStatus
	stPrice
	stWords
	stEnd = stWords
)

// statesName is the sheet's name; it stands behind Receptors where several operating states were planned together.
const statesName = "Operating states"

// statesLayout says where things stand on Operating states.
type statesLayout struct {
	first, last int           // rows of the wells
	days        int           // row
	slopeColumn []map[int]int // by state and receptor: the column of sensitivities that are the state's own
	slopeRow    []int         // by state: the first row of these
}

func plannedColumn(k int) int { return stFirst + 2*k }
func nowColumn(k int) int     { return stFirst + 2*k + 1 }

// fillStates writes the sheet on operating states; nothing where there is one state.
func (b *book) fillStates() {
	states := b.report.States
	if len(states) == 0 {
		return
	}
	s := &sheet{book: b, name: statesName, heights: map[int]float64{}}
	b.states = s
	s.setWidths(1, 11, 20, 11, 11, 11, 11, 11, 10.5, 10.5, 10.5, 10.5, 16, 13, 40)
	for c := stEnd + 1; c <= nowColumn(len(states)-1)+1; c++ {
		s.setWidths(c, 11)
	}
	s.page = pageSetup{landscape: true, wide: 1, freezeRow: changedRow + 2, freezeColumn: stName + 1}
	row := s.paragraph(firstRow, stEnd, b.says("Each operating state is a steady state of its own with its own rates; all were planned together. Plan and Receptors show the state ")+b.report.State+
		": its rates are changed on Plan, those of the others in the shaded cells here.", wrapped)
	row = b.stateRates(row + 1)
	row = b.yearTable(row + 1)
	row = b.stateQuotas(row + 1)
	row = b.stateSlopeTables(row)
	for k := range states {
		s.page.rowBreaks = append(s.page.rowBreaks, row+1)
		row = b.stateLimits(row+1, k)
	}
	b.stateLevels(row + 1)
}

func (b *book) stateLast() int { return max(stEnd, nowColumn(len(b.report.States)-1)+1) }

// stateRates writes the rates by well and state, and what concerns a whole state below.
func (b *book) stateRates(row int) int {
	s, states, l := b.states, b.report.States, &b.stateRows
	volume := nowColumn(len(states)-1) + 1
	row = s.sectionHead(row, b.stateLast(), "Rates by well and state")
	s.heads(row, stID, "", "")
	s.heads(row+1, stID, "Well", "Name")
	for k, st := range states {
		s.across(row, plannedColumn(k), nowColumn(k), st.Name, head)
		edit := ">Rate now (edit)\nm³/d"
		if st.Default {
			edit = ">Rate now, from Plan\nm³/d"
		}
		s.heads(row+1, plannedColumn(k), ">Planned rate\nm³/d", edit)
	}
	s.heads(row, volume, "")
	s.heads(row+1, volume, ">Volume now\nm³/yr")
	l.first, l.last = row+2, row+1+len(b.report.Wells)
	for i, w := range b.report.Wells {
		r := l.first + i
		s.text(r, stID, w.ID, strong)
		s.text(r, stName, w.Name, line)
		for k, st := range states {
			x := st.Wells[i]
			format := rateFormat(ratesOfState(st)...)
			s.value(r, plannedColumn(k), x.Rate, figures(format))
			if st.Default {
				s.formula(r, nowColumn(k), b.plan.ref(s, b.planRows.first+i, b.planRows.now), figures(format))
			} else {
				s.value(r, nowColumn(k), x.Rate, editable(format))
			}
		}
	}
	row = b.stateTotals(l.last+1, volume)
	for i := range b.report.Wells {
		b.stateVolume(l.first+i, volume, line)
	}
	for k, st := range states {
		if !st.Default {
			s.checks = append(s.checks, validation{cellName(l.first, nowColumn(k)) + ":" + cellName(l.last, nowColumn(k))})
			d := differenceSquared(s, k, l.first, l.last)
			b.planRows.changed = b.planRows.changed.plus(d(b.plan))
		}
	}
	return row
}

// differenceSquared is the sum of the squared differences of a state's rates now from those planned.
func differenceSquared(s *sheet, k, first, last int) func(from *sheet) term {
	return func(from *sheet) term {
		now, planned := s.down(from, nowColumn(k), first, last), s.down(from, plannedColumn(k), first, last)
		return call("SUMXMY2", 0, now.text, planned.text)
	}
}

func ratesOfState(st plan.StateResult) []float64 {
	var out []float64
	for _, w := range st.Wells {
		out = append(out, w.Rate)
	}
	return out
}

// stateVolume sums days times rates over the states; empty where days are not stated.
func (b *book) stateVolume(row, column int, l look) {
	s := b.states
	total := number(0)
	for k, st := range b.report.States {
		if st.Days == nil {
			s.blank(row, column, l)
			return
		}
		part := s.ref(s, b.stateRows.days, nowColumn(k)).times(s.ref(s, row, nowColumn(k)))
		if k == 0 {
			total = part
		} else {
			total = total.plus(part)
		}
	}
	s.formula(row, column, total, figures(countFormat))
}

// stateTotals writes days, recharge, totals and demands of the states below their rates.
func (b *book) stateTotals(row, volume int) int {
	s, states, l := b.states, b.report.States, &b.stateRows
	decided := b.decidedInStates()
	lineOf := func(words string, look look, each func(k int)) {
		s.across(row, stID, stName, words, look)
		for c := stFirst; c <= volume; c++ {
			s.blank(row, c, look)
		}
		for k := range states {
			each(k)
		}
		row++
	}
	total := row
	lineOf("Total: wells that the plan decides, pumped", lineTotal, func(k int) {
		for _, c := range []int{plannedColumn(k), nowColumn(k)} {
			s.formula(row, c, positiveSum(s, s, decided, l.first, c), totals(rateFormat(states[k].Total)))
		}
		b.agree("total of "+states[k].Name, s.at(row, nowColumn(k)).number, states[k].Total, 0)
	})
	l.days = row
	lineOf("Days a year", line, func(k int) {
		if d := states[k].Days; d != nil {
			s.value(row, nowColumn(k), *d, figures(exactFormat))
		} else {
			s.text(row, nowColumn(k), "not stated", rightWords)
		}
	})
	b.stateVolume(total, volume, lineTotal)
	lineOf("Weight in the mean over the year", line, func(k int) { s.value(row, nowColumn(k), states[k].Weight, figures(shareFormat)) })
	weights := row - 1
	lineOf("Factor of every recharge", line, func(k int) { s.value(row, nowColumn(k), states[k].RechargeFactor, figures(exactFormat)) })
	lineOf("Demand, m³/d", line, func(k int) {
		if d := states[k].Demand; d != nil {
			s.value(row, nowColumn(k), *d, figures(rateFormat(*d)))
		} else {
			s.text(row, nowColumn(k), "none", rightWords)
		}
	})
	lineOf("Demand now", line, func(k int) {
		if d := states[k].Demand; d != nil {
			near := number(limitNearShare * abs(*d))
			s.phrase(row, nowColumn(k), chooseWords(less(s.ref(s, total, nowColumn(k)), s.ref(s, row-1, nowColumn(k)).minus(near)), words("▲ NOT MET"), words("○ met")), rightWords)
			s.warnWords(nowColumn(k), row, row)
		}
	})
	mean := number(0)
	for k := range states {
		part := s.ref(s, weights, nowColumn(k)).times(s.ref(s, total, nowColumn(k)))
		if k == 0 {
			mean = part
		} else {
			mean = mean.plus(part)
		}
	}
	s.across(row, stID, stName, "Mean of the totals now, m³/d", lineTotal)
	for c := stFirst; c <= volume; c++ {
		s.blank(row, c, lineTotal)
	}
	s.formula(row, nowColumn(0), mean, totals(rateFormat(mean.value)))
	b.names.add("total", "mean_over_states", s, row, nowColumn(0))
	return row + 1
}

// decidedInStates are the wells whose rate is decided in some state; a well that stands still in a state for want of a licence is one.
func (b *book) decidedInStates() []int {
	var out []int
	for i := range b.report.Wells {
		for _, st := range b.report.States {
			if st.Wells[i].Mode == modeDecided {
				out = append(out, i)
				break
			}
		}
	}
	return out
}

// positiveSum adds the positive amounts of some wells in a column, neighbouring rows in one sum.
func positiveSum(s, from *sheet, members []int, first, column int) term {
	in := map[int]bool{}
	last := -1
	for _, i := range members {
		in[i] = true
		last = max(last, i)
	}
	var sum *term
	for i := 0; i <= last; i++ {
		if !in[i] {
			continue
		}
		j := i
		for in[j+1] {
			j++
		}
		block := s.down(from, column, first+i, first+j)
		value := 0.0
		for _, v := range block.values {
			if v > 0 {
				value += v
			}
		}
		part := call("SUMIF", value, block.text, words(">0").text)
		if sum != nil {
			part = sum.plus(part)
		}
		sum = &part
		i = j
	}
	if sum == nil {
		return number(0)
	}
	return *sum
}

func (b *book) indicesOf(ids []string) []int {
	var out []int
	for _, id := range ids {
		out = append(out, b.facts.well[id])
	}
	return out
}

// quotaHeads are the heads of both tables of quotas.
func (s *sheet) quotaHeads(row int, limit, now string) {
	s.heads(row, stID, "State", "Licence or group", "Wells", "", "Basis", "", ">"+limit, "", ">At the plan", ">"+now, ">Headroom now", "Now the limit", ">Price at the plan per m³/d", "Holder; source")
}

// yearTable writes the yearly quotas with their sums of days times rates.
func (b *book) yearTable(row int) int {
	s, l := b.states, &b.stateRows
	row = s.sectionHead(row, b.stateLast(), "Yearly quantities over all operating states, m³ in a year")
	if len(b.report.YearQuotas) == 0 {
		s.nothing(row, stEnd, "None were entered.")
		return row + 1
	}
	s.quotaHeads(row, "Limit", "Sum now")
	first := row + 1
	for _, y := range b.report.YearQuotas {
		row++
		q, sum := y.Quota, number(0)
		members := b.indicesOf(q.Wells)
		for k := range b.report.States {
			pumped := positiveSum(s, s, b.usedIn(y, k, members), l.first, nowColumn(k))
			part := s.ref(s, l.days, nowColumn(k)).times(pumped)
			if k == 0 {
				sum = part
			} else {
				sum = sum.plus(part)
			}
		}
		b.stateQuotaLine(row, "all", q, q.Entered, q.Sum*daysPerYear, sum, limitNearShare*b.quotaScale(q.Wells, q.Limit)*daysPerYear, countFormat)
		b.agree("sum over the year of "+q.Name, s.at(row, stNow).number, q.Sum*daysPerYear, 0)
	}
	s.warnWords(stStatus, first, row)
	return row + 1
}

// usedIn keeps the wells of a yearly quota in the states that it counts; one for other months leaves a state out.
func (b *book) usedIn(y plan.YearQuota, k int, members []int) []int {
	for _, name := range y.States {
		if name == b.report.States[k].Name {
			return members
		}
	}
	return nil
}

// stateQuotas writes the hourly and daily quotas of each state.
func (b *book) stateQuotas(row int) int {
	s, l := b.states, &b.stateRows
	row = s.sectionHead(row, b.stateLast(), "Hourly and daily quantities in each operating state, m³/d; per hour: while the pumps run")
	first := row + 1
	for k, st := range b.report.States {
		for _, q := range st.Quotas {
			if row++; row == first {
				s.quotaHeads(row-1, "Limit", "Sum now")
			}
			var sum term
			if q.Basis == basisPerHour {
				sum = b.runningSum(k, q.Wells)
			} else {
				sum = positiveSum(s, s, b.indicesOf(q.Wells), l.first, nowColumn(k))
			}
			b.stateQuotaLine(row, st.Name, q, q.Limit, q.Sum, sum, limitNearShare*b.quotaScale(q.Wells, q.Limit), rateFormat(q.Limit, q.Sum))
			b.agree(fmt.Sprintf("sum of %s %s in %s", q.Name, q.Basis, st.Name), s.at(row, stNow).number, q.Sum, 0)
		}
	}
	if row < first {
		s.nothing(row, stEnd, "None were entered.")
		return row + 1
	}
	s.warnWords(stStatus, first, row)
	return row + 1
}

// runningSum adds the running rates of some wells in a state: the daily mean times 24 over the hours.
func (b *book) runningSum(k int, ids []string) term {
	s := b.states
	sum := number(0)
	for n, i := range b.indicesOf(ids) {
		hours := b.plan.ref(s, b.planRows.first+i, b.planRows.hours)
		rate := s.ref(s, b.stateRows.first+i, nowColumn(k))
		pumped := choose(more(rate, number(0)), rate, number(0))
		part := pumped.times(number(hoursPerDay)).over(hours)
		if n == 0 {
			sum = part
		} else {
			sum = sum.plus(part)
		}
	}
	return sum
}

func (b *book) stateQuotaLine(row int, state string, q plan.QuotaResult, limit, planned float64, sum term, near float64, format string) {
	s := b.states
	l := figures(format)
	s.text(row, stID, state, strong)
	s.text(row, stName, q.Name, line)
	s.across(row, stFirst, stSecond, wellList(q.Wells), line)
	s.text(row, stUnit, q.Basis, line)
	s.blank(row, stNone, line)
	s.value(row, stLimit, limit, l)
	s.blank(row, stKept, line)
	s.value(row, stPlan, planned, l)
	s.formula(row, stNow, sum, l)
	s.formula(row, stHeadroom, rounded(s.ref(s, row, stLimit).minus(s.ref(s, row, stNow)), roundDigits), l)
	left := s.ref(s, row, stHeadroom)
	s.phrase(row, stStatus, chooseWords(less(left.plus(number(near)), number(0)), words(wordPassed),
		chooseWords(atMost(left, number(near)), words(wordBinds), words(wordHolds))), strong)
	s.blank(row, stPrice, line)
	if q.ShadowPrice != 0 {
		s.value(row, stPrice, q.ShadowPrice, figures(priceFormat(q.ShadowPrice)))
	}
	s.text(row, stWords, joinFilled("; ", q.Holder, q.Source), line)
}
