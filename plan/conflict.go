package plan

import (
	"context"
	"fmt"
	"math"
	"strings"

	"springbound/plan/convex"
)

// relaxedShare is the relaxation, as a share of a limit's size, that counts as none.
const relaxedShare = 1e-9

// member is something that the user set and that can be part of a conflict: a limit, a level, a quota, the demand, an end of a
// well's range. That rates do not change their sign is not a member: nobody could relax it.
type member struct {
	words    string
	receptor string
	unit     string
	source   string
	size     float64 // one share of relaxation, in the member's unit; for a hard limit the largest change that one well causes
	hard     bool    // a limit of size zero
	effect   float64 // what one share adds to the row's bound
	rows     []int   // rows of the programme
	column   int     // of the range's end; -1: none
	upper    bool    // the upper end
}

// explain writes the report of a brief that no rates can meet: the table at present pumping, and why.
func (p *planner) explain(ctx context.Context) (*Report, error) {
	p.unprice()
	g, err := p.build(false)
	if err != nil {
		return nil, err
	}
	sol, err := convex.Solve(ctx, g.problem, convex.Options{})
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	if sol.Status == convex.Interrupted {
		return nil, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
	}
	c := convex.Certify(g.problem, sol)
	p.certificate = &c
	if sol.Status != convex.Infeasible || !c.Accepted {
		return p.fail(ctx, "the proof that no rates keep every limit did not pass its check: "+sol.Status.String()+" "+c.Reason)
	}
	conflict, err := p.conflict(ctx, g, sol.Ray)
	if err != nil {
		return nil, err
	}
	start, _ := p.setup.startRates()
	report, err := p.assemble(ctx, start, StatusInfeasible)
	if err != nil {
		return nil, err
	}
	report.Conflict = conflict
	return report, nil
}

// conflict finds an irreducible set by leaving out one member after the other of those that the proof uses (deletion filter:
// Chinneck & Dravnieks 1991, ORSA J. Computing 3), the least relaxation of everything, and that of each member alone.
func (p *planner) conflict(ctx context.Context, g *programme, ray *convex.Ray) (*Conflict, error) {
	members := p.members(g)
	active := make([]bool, len(members))
	for k := range members {
		active[k] = members[k].inProof(ray)
	}
	for k := range members {
		if !active[k] {
			continue
		}
		active[k] = false
		ok, err := p.feasible(ctx, g, members, active)
		if err != nil {
			return nil, err
		}
		active[k] = ok
	}
	relaxable := make([]bool, len(members))
	for k, m := range members {
		relaxable[k] = !m.hard
	}
	least, possible, err := p.relax(ctx, g, members, relaxable)
	if err == nil && !possible {
		for k := range relaxable {
			relaxable[k] = true
		}
		least, _, err = p.relax(ctx, g, members, relaxable)
	}
	if err != nil {
		return nil, err
	}
	c := &Conflict{Members: []ConflictMember{}, Relaxation: []ConflictMember{}}
	for k, m := range members {
		by := 0.0
		if least != nil && least[k] > relaxedShare {
			by = least[k] * m.size
		}
		if !active[k] && by == 0 {
			continue
		}
		entry := ConflictMember{Limit: m.words, Receptor: m.receptor, Unit: m.unit, By: by, Source: m.source}
		only := make([]bool, len(members))
		only[k] = true
		alone, possible, err := p.relax(ctx, g, members, only)
		if err != nil {
			return nil, err
		}
		if possible {
			amount := tidy(alone[k] * m.size)
			entry.Alone = &amount
		}
		if active[k] {
			c.Members = append(c.Members, entry)
		}
		if by > 0 {
			c.Relaxation = append(c.Relaxation, entry)
		}
	}
	existing, err := p.passedAlone(ctx, true)
	if err != nil {
		return nil, err
	}
	fixed, err := p.passedAlone(ctx, false)
	if err != nil {
		return nil, err
	}
	c.ExistingAlone = len(existing) > 0
	c.Sentence = conflictSentence(c, existing, fixed)
	return c, nil
}

func conflictSentence(c *Conflict, existing, fixed []string) string {
	var parts []string
	switch {
	case len(existing) > 0:
		parts = append(parts, "Existing users alone, with all own wells at rest, pass: "+strings.Join(existing, "; ")+".")
	case len(fixed) > 0:
		parts = append(parts, "The wells with fixed rates alone pass: "+strings.Join(fixed, "; ")+".")
	}
	words := func(members []ConflictMember, amounts bool) string {
		var out []string
		for _, m := range members {
			text := m.Limit
			if amounts {
				text += " by " + amountText(m.By, m.Unit)
			}
			out = append(out, text)
		}
		return strings.Join(out, "; ")
	}
	switch len(c.Members) {
	case 0:
	case 1:
		parts = append(parts, "This cannot be kept: "+words(c.Members, false)+".")
	default:
		parts = append(parts, "These cannot all be kept, while any one left out the others can: "+words(c.Members, false)+".")
	}
	if len(c.Relaxation) > 0 {
		parts = append(parts, "The least relaxation that makes a plan possible: "+words(c.Relaxation, true)+".")
	}
	return strings.Join(parts, " ")
}

// members lists what can be in conflict, in the order of the programme's rows and then of the wells.
func (p *planner) members(g *programme) []member {
	s := p.setup
	var out []member
	place := map[owner]int{}
	for r, o := range g.owners {
		if k, known := place[o]; known {
			out[k].rows = append(out[k].rows, r)
			continue
		}
		place[o] = len(out)
		m := p.memberOf(o)
		m.rows, m.column = []int{r}, -1
		out = append(out, m)
	}
	for k, i := range s.decided {
		w := s.Wells[i]
		for _, end := range []struct {
			value    float64
			upper    bool
			pumping  string
			recharge string
		}{{w.Min, false, " at least ", " recharges at most "}, {w.Max, true, " at most ", " recharges at least "}} {
			if end.value == 0 {
				continue
			}
			m := member{words: w.ID + end.pumping + flowText(end.value), unit: "m3/d", size: math.Abs(end.value), effect: math.Abs(end.value),
				column: k, upper: end.upper, source: w.Source}
			if end.value < 0 {
				m.words = w.ID + end.recharge + flowText(-end.value)
			}
			if end.upper {
				m.source = w.MaxSource
			}
			out = append(out, m)
		}
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
		d := *s.demand
		return member{words: "required total " + flowText(d), unit: "m3/d", source: "brief", size: d, effect: d, hard: d == 0}
	}
	b := p.bounds[o.index]
	row := p.oracle.known[0].row(b.target)
	size := b.scale(s, row.Slope)
	if !(size > 0) {
		size = 1
	}
	m := member{words: s.boundWords(b), unit: row.Unit, size: size / b.unit, effect: size * (1 - b.reserve*b.grow), hard: b.size == 0}
	if b.limit < 0 {
		m.unit, m.source = "m", s.Wells[b.target.well].Source
		return m
	}
	l := s.Limits[b.limit]
	m.receptor, m.source = l.Receptor, l.Source
	if l.Quantity.String() == "share_of_base" {
		m.unit = "1"
	}
	return m
}

// inProof tells whether a proof of infeasibility uses the member.
func (m *member) inProof(ray *convex.Ray) bool {
	for _, r := range m.rows {
		if ray.Rows[r] != 0 {
			return true
		}
	}
	return m.column >= 0 && (m.upper == (ray.Columns[m.column] > 0)) && ray.Columns[m.column] != 0
}

// opened returns the range of column k when some of its ends do not hold: rates keep their sign.
func (p *planner) opened(k int, ends []member, holds func(int) bool) (lower, upper float64) {
	w := p.setup.Wells[p.setup.decided[k]]
	lower, upper = w.Min, w.Max
	for m, end := range ends {
		switch {
		case end.column != k || holds(m):
		case end.upper && w.Max > 0:
			upper = math.Inf(1)
		case end.upper:
			upper = 0
		case w.Min < 0:
			lower = math.Inf(-1)
		default:
			lower = 0
		}
	}
	return lower, upper
}

// feasible tells whether rates exist that keep the active members.
func (p *planner) feasible(ctx context.Context, g *programme, members []member, active []bool) (bool, error) {
	_, possible, err := p.elastic(ctx, g, members, active, make([]bool, len(members)))
	return possible, err
}

// relax returns the least total relaxation, in shares, when the given members may be relaxed and all others hold.
func (p *planner) relax(ctx context.Context, g *programme, members []member, relaxable []bool) (shares []float64, possible bool, err error) {
	all := make([]bool, len(members))
	for k := range all {
		all[k] = true
	}
	return p.elastic(ctx, g, members, all, relaxable)
}

// elastic minimises the sum of the relaxable members' shares over rates that keep the active members.
func (p *planner) elastic(ctx context.Context, g *programme, members []member, active, relaxable []bool) (shares []float64, possible bool, err error) {
	n := g.problem.Columns()
	columns := make([]convex.Column, n, n+len(members))
	for k := range columns {
		columns[k] = g.problem.Column(k)
		columns[k].Cost = 0
		columns[k].Lower, columns[k].Upper = p.opened(k, members, func(m int) bool { return active[m] && !relaxable[m] })
	}
	stretch := make([]int, len(members))
	for k := range members {
		stretch[k] = -1
		if active[k] && relaxable[k] {
			stretch[k] = len(columns)
			columns = append(columns, convex.Column{Name: members[k].words, Cost: 1, Lower: 0, Upper: math.Inf(1)})
		}
	}
	problem, err := convex.NewProblem(convex.Minimise, columns)
	if err != nil {
		return nil, false, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	for k := range members {
		if active[k] {
			if err := addElastic(problem, g, &members[k], stretch[k]); err != nil {
				return nil, false, fmt.Errorf("plan: the programme of the conflict: %w", err)
			}
		}
	}
	sol, err := convex.Solve(ctx, problem, convex.Options{})
	switch {
	case err != nil:
		return nil, false, fmt.Errorf("plan: the programme of the conflict: %w", err)
	case sol.Status == convex.Interrupted:
		return nil, false, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
	case sol.Status == convex.Infeasible:
		return nil, false, nil
	case sol.Status != convex.Optimal:
		return nil, false, &NumericalError{Status: StatusNumericalFailure, Reason: "the programme of the conflict ended as " + sol.Status.String()}
	}
	p.iterations += sol.Iterations
	shares = make([]float64, len(members))
	for k, c := range stretch {
		if c >= 0 {
			shares[k] = sol.X[c]
		}
	}
	return shares, true, nil
}

// addElastic adds the rows of one active member; stretch is its column of relaxation, or -1.
func addElastic(problem *convex.Problem, g *programme, m *member, stretch int) error {
	n := g.problem.Columns()
	add := func(r convex.Row, way float64) error {
		a := make([]float64, problem.Columns())
		copy(a, r.Coefficients)
		if stretch >= 0 {
			a[stretch] = way * m.effect
		}
		r.Coefficients = a
		_, err := problem.AddRow(r)
		return err
	}
	if m.column >= 0 {
		if stretch < 0 {
			return nil
		}
		c := g.problem.Column(m.column)
		a := make([]float64, n)
		a[m.column] = 1
		if m.upper {
			return add(convex.Row{Name: m.words, Coefficients: a, Lower: math.Inf(-1), Upper: c.Upper}, -1)
		}
		return add(convex.Row{Name: m.words, Coefficients: a, Lower: c.Lower, Upper: math.Inf(1)}, 1)
	}
	for _, i := range m.rows {
		r := g.problem.Row(i)
		if !math.IsInf(r.Upper, 1) {
			if err := add(convex.Row{Name: r.Name, Coefficients: r.Coefficients, Lower: math.Inf(-1), Upper: r.Upper}, -1); err != nil {
				return err
			}
		}
		if !math.IsInf(r.Lower, -1) {
			if err := add(convex.Row{Name: r.Name, Coefficients: r.Coefficients, Lower: r.Lower, Upper: math.Inf(1)}, 1); err != nil {
				return err
			}
		}
	}
	return nil
}

// passedAlone names the bounds that are passed when the wells up for decision are at rest, and own wells with fixed rates too when
// only existing users count.
func (p *planner) passedAlone(ctx context.Context, existing bool) ([]string, error) {
	s := p.setup
	rates := append([]float64(nil), s.standing...)
	for i, w := range s.Wells {
		if existing && !w.Others {
			rates[i] = 0
		}
	}
	var out []string
	for _, b := range p.bounds {
		tan, counted, err := p.oracle.tangentOf(ctx, b, rates)
		if err != nil {
			return nil, err
		}
		slack := b.slack(tan.at(counted), 0)
		if slack < -limitTolerance*b.scale(s, tan.slope) {
			unit := p.oracle.known[0].row(b.target).Unit
			out = append(out, s.boundWords(b)+" (by "+amountText(-slack, unit)+")")
		}
	}
	for k := range s.quotas {
		q := &s.quotas[k]
		if over := q.sum(rates) - q.limit; over > limitTolerance*q.scale(s) {
			out = append(out, s.quotaWords(q)+" (by "+flowText(over)+")")
		}
	}
	return out, nil
}
