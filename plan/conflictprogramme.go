package plan

import (
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
	"springbound/wells"
)

// conflictProgramme writes what must be kept as one row a member, so that each can be left out or relaxed by itself: ends of
// ranges become rows, so do the signs of the rates, which always hold; and the cuts of a row that is not linear bound a column of their own that stands for the row's change, which
// one row then limits.
func (p *planner) conflictProgramme() (*convex.MixedProblem, []member, error) {
	s := p.setup
	g, err := p.build(false)
	if err != nil {
		return nil, nil, err
	}
	var columns []convex.Column
	for k := range s.decided {
		columns = append(columns, convex.Column{Name: g.problem.Column(k).Name, Lower: math.Inf(-1), Upper: math.Inf(1)})
	}
	stands := map[owner]int{} // the column of a bound on a row that is not linear
	for _, o := range g.owners {
		if _, known := stands[o]; !known && o.kind == ofBound && !p.bounds[o.index].linear {
			stands[o] = len(columns)
			columns = append(columns, convex.Column{Name: "excess", Lower: math.Inf(-1), Upper: math.Inf(1)})
		}
	}
	columns, running := p.addRunning(columns)
	problem, err := convex.NewProblem(convex.Minimise, columns)
	if err != nil {
		return nil, nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	var members []member
	add := func(m *member, name string, lower, upper float64, set func(a []float64)) {
		a := make([]float64, len(columns))
		set(a)
		row, problemErr := problem.AddRow(convex.Row{Name: name, Coefficients: a, Lower: lower, Upper: upper})
		err = errors.Join(err, problemErr)
		if m != nil {
			m.row = row
			members = append(members, *m)
		}
	}
	memberAt := map[owner]int{}
	for r, o := range g.owners {
		row := g.problem.Row(r)
		m := p.memberOf(o)
		if o.kind == ofBound {
			if i := p.idleBore(p.bounds[o.index]); i >= 0 && running.indicator[i] >= 0 {
				extended := make([]float64, len(columns))
				copy(extended, row.Coefficients)
				big := farRate * p.largestPass(g, row)
				extended[running.indicator[i]] = big
				row.Coefficients, row.Upper = extended, row.Upper+big
				m.runs, m.free = running.indicator[i], big
			}
		}
		column, cut := stands[o]
		if !cut {
			add(&m, m.words, row.Lower, row.Upper, func(a []float64) { copy(a, row.Coefficients) })
			continue
		}
		if _, known := memberAt[o]; !known {
			memberAt[o] = len(members)
			add(&m, m.words, math.Inf(-1), 0, func(a []float64) { a[column] = 1 })
		}
		add(nil, "cut of "+m.words, math.Inf(-1), row.Upper, func(a []float64) {
			copy(a, row.Coefficients)
			a[column] = -1
		})
		members[memberAt[o]].excess = column
	}
	p.addEnds(running, add)
	p.addRunningRows(running, add)
	if err != nil {
		return nil, nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	return &convex.MixedProblem{Problem: problem, Integer: running.whole}, members, nil
}

// addEnds adds, for each decided well, the sign of its rate as a row that always holds and the ends of its range as members.
func (p *planner) addEnds(running *runningColumns, add func(m *member, name string, lower, upper float64, set func(a []float64))) {
	s := p.setup
	for k, i := range s.decided {
		lower, upper := 0.0, math.Inf(1)
		if s.Wells[i].Min < 0 {
			lower = math.Inf(-1)
		}
		if s.Wells[i].Max <= 0 {
			upper = 0
		}
		add(nil, "sign of "+s.Wells[i].ID, lower, upper, func(a []float64) { a[k] = 1 })
		y := running.indicator[i]
		if y >= 0 && s.Wells[i].Max > 0 {
			add(nil, s.Wells[i].ID+" off or not", math.Inf(-1), 0, func(a []float64) { a[k], a[y] = 1, -running.far })
		}
		if y >= 0 && s.Wells[i].Min < 0 {
			add(nil, s.Wells[i].ID+" off or not", 0, math.Inf(1), func(a []float64) { a[k], a[y] = 1, running.far })
		}
		for _, m := range rangeEnds(s.Wells[i]) {
			if y >= 0 {
				end, lower, upper := s.Wells[i].Min, 0.0, math.Inf(1)
				if m.upper {
					end, lower, upper = s.Wells[i].Max, math.Inf(-1), 0
				}
				if m.upper == (end < 0) {
					m.words += " when it runs"
				}
				add(&m.member, m.words, lower, upper, func(a []float64) { a[k], a[y] = 1, -end })
				continue
			}
			lower, upper := s.Wells[i].Min, math.Inf(1)
			if m.upper {
				lower, upper = math.Inf(-1), s.Wells[i].Max
			}
			add(&m.member, m.words, lower, upper, func(a []float64) { a[k] = 1 })
		}
	}
}

// rangeEnd is an end of a well's range that is not zero.
type rangeEnd struct {
	member
	upper bool
}

func rangeEnds(w wells.Well) []rangeEnd {
	var out []rangeEnd
	for _, e := range []struct {
		value             float64
		upper             bool
		pumping, recharge string
		source            string
	}{{w.Min, false, " at least ", " recharges at most ", w.Source}, {w.Max, true, " at most ", " recharges at least ", w.MaxSource}} {
		if e.value == 0 {
			continue
		}
		size := math.Abs(e.value)
		words := w.ID + e.pumping + flowText(size)
		if e.value < 0 {
			words = w.ID + e.recharge + flowText(size)
		}
		out = append(out, rangeEnd{member{words: words, unit: "m3/d", size: size, effect: size, end: true, source: e.source}, e.upper})
	}
	return out
}

func (p *planner) memberOf(o owner) member {
	s := p.setup
	switch o.kind {
	case ofQuota:
		q := &s.quotas[o.index]
		size := q.scale(s)
		return member{words: s.quotaWords(q), unit: "m3/d", source: q.source, size: size, effect: size, hard: q.limit == 0}
	case ofDemand:
		d := s.demands[o.index]
		return member{words: d.words + " " + flowText(d.amount), unit: "m3/d", source: "brief", size: d.amount, effect: d.amount, hard: d.amount == 0}
	}
	b := p.bounds[o.index]
	row := p.oracle.known[0].row(b.target)
	size := b.scale(s, row.Slope)
	if !(size > 0) {
		size = 1
	}
	m := member{words: s.boundWords(b), unit: row.Unit, size: size / b.unit, effect: size * (1 - b.reserve*b.grow), hard: b.size == 0, bound: b}
	if b.limit < 0 {
		m.unit, m.source = "m", s.Wells[b.target.well].Source
		return m
	}
	l := s.Limits[b.limit]
	m.receptor, m.source = l.Receptor, l.Source
	if l.Quantity == wells.ShareOfBase {
		m.unit, m.share = "1", true
	}
	return m
}
