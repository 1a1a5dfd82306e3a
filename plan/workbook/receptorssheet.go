package workbook

import (
	"math"
	"strconv"
	"strings"

	"springbound/plan"
)

// The columns of Receptors; receptors and limits share them.
const (
	recID = iota + 1
	recName
	recKind   // limits: what is limited
	recOwner  // limits: what counts
	recUnit   //
	recNone   // no pumping; limits: the limit
	recRecent // others at recent rates; limits: share kept back
	recLicence
	recPlan   // value at the plan; limits: quantity at the plan
	recNow    // value now; limits: quantity now
	recChange // change now; limits: headroom now
	recOwn    // own part; limits: headroom share
	recOthers // others' part; limits: status
	recValid  // limits: price
	recWords  // limits: sentence
	recHolds  // limits: over which values the price holds
	recFrom   // source
	recEnd    = recFrom
)

// A receptorLine is where a receptor stands on Receptors.
type receptorLine struct {
	index, row int
	live       bool
}

// A limitLine is where a limit stands on Receptors.
type limitLine struct {
	receptor, limit, row int
	live                 bool
}

// fillReceptors writes effects on levels and effects on flows, each as receptors and then their limits.
func (b *book) fillReceptors() {
	s := b.receptors
	s.setWidths(1, 10, 19, 17, 17, 6.5, 9.5, 9.5, 9.5, 9.5, 9.5, 9.5, 9.5, 16, 11, 32, 22, 20)
	s.page = pageSetup{landscape: true, wide: 1, freezeRow: changedRow + 2, freezeColumn: recName + 1}
	row := firstRow
	for _, part := range []struct {
		title string
		flow  bool
	}{{"Effects on levels", false}, {"Effects on flows", true}} {
		var members []int
		for i, r := range b.report.Receptors {
			if (r.Unit == unitFlow) == part.flow {
				members = append(members, i)
			}
		}
		if part.flow {
			row++
			s.page.rowBreaks = append(s.page.rowBreaks, row)
		}
		row = s.sectionHead(row, recEnd, part.title)
		if len(members) == 0 {
			s.nothing(row, recNone, "No receptor of this kind was entered.")
			row++
			continue
		}
		row = b.receptorTable(row, members)
		row = b.limitTable(row+1, members)
	}
}

func (b *book) receptorTable(row int, members []int) int {
	s := b.receptors
	s.heads(row, recID, "Receptor", "Name", "Kind", "Owner; use", "Unit", ">No pumping", ">Others at recent rates", ">Others at licensed rates",
		">At the plan", ">Now", ">Change now", ">Own wells' part", ">Existing users' part", "Table valid", "What the values are; place; note", "", "Source; date; field check")
	first := row + 1
	for _, i := range members {
		row++
		b.receptorRow(row, i)
	}
	s.warnWords(recValid, first, row)
	return row + 1
}

func smallLimits(limits []plan.LimitResult) []float64 {
	var out []float64
	for _, l := range limits {
		if l.Quantity == "change" {
			out = append(out, l.Limit)
		}
	}
	return out
}

func (b *book) receptorRow(row, i int) {
	s, r := b.receptors, b.report.Receptors[i]
	s.text(row, recID, r.ID, strong)
	s.text(row, recName, r.Name, line)
	s.text(row, recKind, kindWords(r.Kind), line)
	s.text(row, recOwner, joinFilled("; ", r.Owner, r.Use), line)
	s.text(row, recUnit, unitWords(r.Unit), line)
	s.across(row, recWords, recHolds, receptorNote(r), line)
	checked := "register only"
	if r.FieldChecked {
		checked = "checked in the field"
	}
	s.text(row, recFrom, joinFilled("; ", r.Source, r.Date, checked), line)
	live := b.facts.slope[i] != nil && !r.Outside
	b.watched = append(b.watched, receptorLine{i, row, live})
	number := figures(unitFormat(r.Unit, smallLimits(r.Limits), r.NoPumping, r.Value))
	change := figures(unitFormat(r.Unit, smallLimits(r.Limits), r.Change, r.ChangeOwn, r.ChangeOthers))
	if !live {
		for c := recNone; c <= recOthers; c++ {
			s.blank(row, c, line)
		}
		s.across(row, recNone, recOthers, "not assessed: "+whyNot(r), with(line, func(l *look) { l.ink = inkMuted }))
		s.text(row, recValid, wordNotAssessed, line)
		return
	}
	s.value(row, recNone, r.NoPumping, number)
	unknown := with(number, func(l *look) { l.ink, l.wrap = inkMuted, true })
	for column, x := range map[int]*float64{recRecent: r.OthersRecent, recLicence: r.OthersLicensed} {
		if x == nil {
			s.text(row, column, notKnown, unknown)
		} else {
			s.value(row, column, *x, number)
		}
	}
	s.value(row, recPlan, r.Value, number)
	slopes, rates := b.slopes(s, i), b.wellColumn(s, b.sens.rate)
	s.formula(row, recOwn, sumProduct(slopes, b.wellColumn(s, b.sens.own), rates), change)
	s.formula(row, recOthers, sumProduct(slopes, b.wellColumn(s, b.sens.existing), rates), change)
	s.formula(row, recChange, sumProduct(slopes, rates), change)
	s.formula(row, recNow, s.ref(s, row, recNone).minus(s.ref(s, row, recChange)), number)
	b.agree("change of "+r.ID, s.at(row, recChange).number, r.Change, b.gross(i))
	b.agree("own wells' part of "+r.ID, s.at(row, recOwn).number, r.ChangeOwn, b.gross(i))
	b.agree("existing users' part of "+r.ID, s.at(row, recOthers).number, r.ChangeOthers, b.gross(i))
	b.agree("value of "+r.ID, s.at(row, recNow).number, r.Value, r.NoPumping)
	b.names.add("value", r.ID, s, row, recNow)
	if r.Kind == kindSpring {
		s.phrase(row, recValid, chooseWords(less(s.ref(s, row, recNow), term{"0", 0, bondAtom}), words(wordBroken), words(wordValid)), line)
	} else {
		s.blank(row, recValid, line)
	}
}

func whyNot(r plan.ReceptorResult) string {
	if r.Outside {
		return "it lies outside the model"
	}
	return "the model gives no response for it"
}

// receptorNote says what a receptor's numbers are and what holds only at the plan.
func receptorNote(r plan.ReceptorResult) string {
	note := strings.TrimSpace(r.ValueWord)
	if r.ChangeWord != "" {
		note = joinFilled("; ", note, "change: "+r.ChangeWord)
	}
	if r.Place != "" {
		note = joinFilled("; ", note, "place: "+r.Place)
	}
	switch r.Kind {
	case kindWetlandWorst:
		note = joinFilled("; ", note, "at other rates another place may be worse: the change is then at least the one shown")
	case kindPumpingLevel:
		note = joinFilled("; ", note, "without the turbulent loss, which its limits include")
	}
	return joinFilled("; ", note, meshErrorWords(r))
}

// meshErrorWords says by how much the mesh alone makes a receptor's change wrong.
func meshErrorWords(r plan.ReceptorResult) string {
	d := r.Discretisation
	if d == nil {
		return ""
	}
	unit, factor := "", 1.0
	switch r.Unit {
	case "m":
		unit, factor = " mm", 1000
	case unitFlow:
		unit = " m³/d"
	}
	words := "the mesh makes the change wrong by about " + twoFigures(factor*d.Error) + unit
	if d.Share != nil {
		words += " (" + twoFigures(100*math.Abs(*d.Share)) + " %)"
	}
	if d.Bound != nil {
		words += ", at most " + twoFigures(factor**d.Bound) + unit
	}
	return words
}

// brokenSprings counts the springs that would stop.
func (b *book) brokenSprings() term {
	first, last := 0, 0
	for _, w := range b.watched {
		if first == 0 {
			first = w.row
		}
		last = w.row
	}
	if first == 0 {
		return number(0)
	}
	return countWord(wordBroken, b.receptors.wordsDown(b.plan, recValid, first, last))
}

func (b *book) limitTable(row int, members []int) int {
	s := b.receptors
	s.heads(row, recID, "Limit", "Receptor", "What is limited", "What counts", "Unit", ">Limit", ">Kept back\nshare", ">Limit less what is kept back",
		">At the plan", ">Now", ">Headroom now", ">Headroom share", "Now the limit", ">Price at the plan", "In words, at the plan", "The price holds", "Source; date")
	first := row + 1
	for _, i := range members {
		for k := range b.report.Receptors[i].Limits {
			row++
			b.limitRow(row, i, k)
		}
	}
	if row < first {
		row++
		s.nothing(row, recNone, "No limit was entered.")
		return row + 1
	}
	s.warnWords(recOthers, first, row)
	return row + 1
}

// limitWords names what a limit bounds.
func limitWords(r plan.ReceptorResult, l plan.LimitResult) string {
	what := r.ChangeWord
	switch l.Quantity {
	case quantityValue:
		what = r.ValueWord
	case quantityShare:
		what = joinFilled(" ", r.ChangeWord, "as a share of the undisturbed value")
	}
	if l.Sense == senseAtLeast {
		return what + " at least"
	}
	return what + " at most"
}

func countWords(l plan.LimitResult) string {
	if l.Quantity == quantityValue {
		return "all wells"
	}
	who := "all wells"
	if l.Counts == countsOwn {
		who = "own wells only"
	}
	switch l.Baseline {
	case baselinePresent:
		return who + "; against present pumping"
	case baselineLicence:
		return who + "; against existing users at licensed rates"
	}
	return who + "; against no pumping"
}

// lengthLimitFormat shows a length limit to 0.01 m, and to 0.001 m where the limit, or what is left of it after its reserve, may have
// a third decimal.
func lengthLimitFormat(l plan.LimitResult) string {
	hundredths := l.Limit * 100
	if l.Reserve == 0 && abs(hundredths-math.Round(hundredths)) < 1e-6 { // far below what a typed limit can mean
		return levelFormat
	}
	return "#,##0.000"
}

func (b *book) limitRow(row, i, k int) {
	s, r := b.receptors, b.report.Receptors[i]
	l := r.Limits[k]
	s.text(row, recID, l.ID, strong)
	s.text(row, recName, joinFilled(" · ", r.ID, r.Name), line)
	s.text(row, recKind, limitWords(r, l), line)
	s.text(row, recOwner, countWords(l), line)
	unit := l.Unit
	if l.Quantity == quantityShare {
		unit = "1"
	}
	s.text(row, recUnit, unitWords(unit), line)
	s.text(row, recWords, l.Sentence, line)
	holds := ""
	if l.Binds {
		holds = limitRange(l)
	}
	s.text(row, recHolds, holds, line)
	s.text(row, recFrom, joinFilled("; ", l.Source, l.Date, enteredWords(l)), line)
	format := unitFormat(unit, []float64{l.Limit}, l.Limit, l.Value)
	if unit == "m" {
		format = lengthLimitFormat(l)
	}
	if l.Quantity == quantityShare {
		format = shareFormat
		s.text(row, recUnit, "share", line)
	}
	number := figures(format)
	s.value(row, recNone, l.Limit, number)
	s.value(row, recRecent, l.Reserve, figures("0%"))
	live := b.facts.slope[i] != nil && !r.Outside && l.ResultState == assessedYes
	b.limits = append(b.limits, limitLine{i, k, row, live})
	if !live {
		for c := recLicence; c <= recOwn; c++ {
			s.blank(row, c, line)
		}
		s.across(row, recLicence, recOwn, l.ResultState, with(line, func(l *look) { l.ink = inkMuted }))
		s.text(row, recOthers, wordNotAssessed, line)
		s.blank(row, recValid, line)
		return
	}
	s.value(row, recPlan, l.Value, number)
	b.limitFormulas(row, i, k, unit, number)
	if l.ShadowPrice != 0 {
		s.text(row, recValid, b.priceBothText(l.Range, l.ShadowPrice, priceUnit(unit, l.Quantity)), rightWords)
	} else {
		s.blank(row, recValid, line)
	}
	b.names.add("headroom", l.ID, s, row, recChange)
	b.names.add("lim", l.ID, s, row, recNone)
}

func priceUnit(unit, quantity string) string {
	if quantity == quantityShare {
		return "unit of share"
	}
	if unit == "1" {
		return "unit of gradient"
	}
	return unitWords(unit)
}

func enteredWords(l plan.LimitResult) string {
	if l.Entered == "" {
		return ""
	}
	return "entered as " + l.Entered
}

// twoFigures writes a number with two figures and no power of ten.
func twoFigures(v float64) string {
	if v == 0 {
		return "0"
	}
	decimals := max(0, 1-int(math.Floor(math.Log10(math.Abs(v)))))
	return strconv.FormatFloat(v, 'f', decimals, 64)
}
