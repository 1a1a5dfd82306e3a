package workbook

// A quotaLine is where a quota stands on Plan.
type quotaLine struct {
	row    int
	status phrase
}

// fillPlanFoot writes the totals and the quotas below the wells.
func (b *book) fillPlanFoot() {
	p, s := &b.planRows, b.plan
	row := p.last + 2
	for c := 1; c <= p.rates; c++ {
		s.blank(row, c, section)
	}
	s.text(row, 1, "Totals", section)
	s.heights[row] = 24
	row++
	p.totalRow = row
	decided := s.wordsDown(s, p.mode, p.first, p.last)
	whose := s.wordsDown(s, p.whose, p.first, p.last)
	row = b.totalLine(row, "Total: wells that the plan decides, pumped", func(c int) term {
		return sumWhere(s.down(s, c, p.first, p.last), decided, modeDecided, ">0")
	})
	p.totalNow = s.ref(s, p.totalRow, p.now)
	b.names.add("total", "now", s, p.totalRow, p.now)
	b.agree("total rate", s.at(p.totalRow, p.now).number, b.report.TotalRate, 0)
	for _, group := range []struct{ words, name string }{{"All own wells, pumped", ownWords}, {"Existing users, pumped", existingWords}} {
		row = b.totalLine(row, group.words, func(c int) term { return sumWhere(s.down(s, c, p.first, p.last), whose, group.name, ">0") })
	}
	if b.anyRecharge() {
		row = b.totalLine(row, "All wells, recharged (negative)", func(c int) term {
			amounts := s.down(s, c, p.first, p.last)
			return sumWhere(amounts, whose, ownWords, "<0").plus(sumWhere(amounts, whose, existingWords, "<0"))
		})
	}
	row = b.totalLine(row, "All wells, net", func(c int) term { return sumOf(s.down(s, c, p.first, p.last)) })
	if d := b.report.Demand; d != nil {
		row = b.demandLine(row, *d)
	}
	row = b.runningLines(row)
	b.fillQuotas(row + 1)
}

// runningLines say which wells stand still and how sure that is, and what the field gives with one well out of service.
func (b *book) runningLines(row int) int {
	p, s := &b.planRows, b.plan
	firm := b.report.Firm.Sentence()
	if firm != "" {
		firm += " Every outage stands on Checks."
	}
	still := ""
	if b.report.Switching != nil {
		still = b.report.Switching.Sentence
	}
	for _, text := range []string{still, firm} {
		if text != "" {
			s.across(row, 1, p.volume, text, line)
			row++
		}
	}
	return row
}

func (b *book) anyRecharge() bool {
	for _, w := range b.report.Wells {
		if w.Rate < 0 || w.Min < 0 {
			return true
		}
	}
	return false
}

// totalLine writes a sum of planned rates, rates now and volumes.
func (b *book) totalLine(row int, words string, sum func(column int) term) int {
	p, s := &b.planRows, b.plan
	for c := 1; c <= p.volume; c++ {
		s.blank(row, c, lineTotal)
	}
	s.across(row, 1, p.whose, words, lineTotal)
	planned := sum(p.planned)
	l := totals(rateFormat(planned.value))
	s.formula(row, p.planned, planned, l)
	s.formula(row, p.now, sum(p.now), l)
	if p.plannedUnit > 0 {
		u := totals(rateFormat(planned.value / b.unit.factor))
		s.formula(row, p.plannedUnit, s.ref(s, row, p.planned).over(number(b.unit.factor)), u)
		s.formula(row, p.nowUnit, s.ref(s, row, p.now).over(number(b.unit.factor)), u)
	}
	s.formula(row, p.difference, s.ref(s, row, p.now).minus(s.ref(s, row, p.planned)), l)
	s.formula(row, p.volume, s.ref(s, row, p.now).times(number(daysPerYear)), totals(countFormat))
	return row + 1
}

// demandLine compares the total with the demand.
func (b *book) demandLine(row int, demand float64) int {
	p, s := &b.planRows, b.plan
	for c := 1; c <= p.rates; c++ {
		s.blank(row, c, line)
	}
	s.across(row, 1, p.whose, "Demand for the wells that the plan decides", line)
	s.value(row, p.planned, demand, figures(rateFormat(demand)))
	total, want := p.totalNow, s.ref(s, row, p.planned)
	near := number(limitNearShare * abs(demand))
	s.phrase(row, p.within, chooseWords(less(total, want.minus(near)), words("▲ NOT MET"), words("○ met")), line)
	s.warnWords(p.within, row, row)
	return row + 1
}

// fillQuotas writes licences and groups with sums that follow the rates.
func (b *book) fillQuotas(row int) {
	p, s := &b.planRows, b.plan
	for c := 1; c <= p.rates; c++ {
		s.blank(row, c, section)
	}
	s.text(row, 1, "Licences and groups of wells", section)
	s.heights[row] = 24
	row++
	if len(b.report.Quotas) == 0 {
		s.nothing(row, p.whose, "None were entered.")
		return
	}
	for c := 1; c <= p.rates; c++ {
		s.blank(row, c, head)
	}
	s.heads(row, p.id, "Licence or group", "Holder; source", "Wells", "Limit as entered", "", ">Sum at the plan\nm³/d", ">Sum now\nm³/d")
	s.merge(row, p.mode, p.whose)
	s.heads(row, p.difference, ">Headroom now\nm³/d")
	s.heads(row, p.volume, ">Price at the plan\nper m³/d", "", ">Limit\nm³/d", "Sum now")
	first := row + 1
	for k := range b.report.Quotas {
		row++
		b.quotaLine(k, row)
	}
	s.warnWords(p.within, first, row)
}

func (b *book) quotaLine(k, row int) {
	p, s, q := &b.planRows, b.plan, b.report.Quotas[k]
	for c := 1; c <= p.rates; c++ {
		s.blank(row, c, line)
	}
	s.text(row, p.id, q.Name, line)
	s.text(row, p.name, joinFilled("; ", q.Holder, q.Source), line)
	s.text(row, p.owner, wellList(q.Wells), line)
	s.across(row, p.mode, p.whose, figureText(q.Entered)+" m³ "+q.Basis, line)
	l := figures(rateFormat(q.Limit, q.Sum))
	s.value(row, p.planned, q.Sum, l)
	column := p.now
	if q.Basis == basisPerHour {
		column = p.running // an hourly limit binds while the pump runs
	}
	s.formula(row, p.now, b.pumpedSum(q.Wells, column), l)
	b.agree("sum of "+q.Name+" "+q.Basis, s.at(row, p.now).number, q.Sum, 0)
	s.value(row, p.most, q.Limit, l)
	s.formula(row, p.difference, rounded(s.ref(s, row, p.most).minus(s.ref(s, row, p.now)), roundDigits), l)
	b.agree("headroom of "+q.Name+" "+q.Basis, s.at(row, p.difference).number, q.Headroom, q.Limit)
	headroom := s.ref(s, row, p.difference)
	near := number(limitNearShare * b.quotaScale(q.Wells, q.Limit))
	status := chooseWords(less(headroom.plus(near), number(0)), words(wordPassed),
		chooseWords(atMost(headroom, near), words(wordBinds), words(wordHolds)))
	s.phrase(row, p.within, status, line)
	s.blank(row, p.volume, line)
	if q.ShadowPrice != 0 {
		s.value(row, p.volume, q.ShadowPrice, figures(priceFormat(q.ShadowPrice)))
	}
	b.names.add("quota", q.Name, s, row, p.now)
	b.quotas = append(b.quotas, quotaLine{row, s.wordRef(s, row, p.within)})
}

// quotaScale is what the tolerance on a quota is relative to: the limit, or for a limit of zero the largest rate of its wells.
func (b *book) quotaScale(ids []string, limit float64) float64 {
	scale := abs(limit)
	for _, id := range ids {
		w := b.report.Wells[b.facts.well[id]]
		if limit == 0 {
			scale = largest([]float64{scale, w.Min, w.Max})
		}
	}
	return scale
}

// pumpedSum adds the positive amounts of the named wells, neighbouring lines in one sum.
func (b *book) pumpedSum(ids []string, column int) term {
	p, s := &b.planRows, b.plan
	in := map[int]bool{}
	for _, id := range ids {
		in[b.facts.well[id]] = true
	}
	var sum *term
	for i := 0; i < len(b.report.Wells); i++ {
		if !in[i] {
			continue
		}
		j := i
		for in[j+1] {
			j++
		}
		block := s.down(s, column, p.first+i, p.first+j)
		var value float64
		for _, v := range block.values {
			if v > 0 {
				value += v
			}
		}
		part := call("SUMIF", value, block.text, words(">0").text)
		if sum == nil {
			sum = &part
		} else {
			next := sum.plus(part)
			sum = &next
		}
		i = j
	}
	if sum == nil {
		return number(0)
	}
	return *sum
}
