package plan

import (
	"context"
	"fmt"
	"strings"

	"springbound/plan/convex"
)

// relaxedShare is the relaxation, as a share of a limit's size, that counts as none.
const relaxedShare = 1e-9

// relaxedTolerance is by how much a relaxed limit on a row that is not linear may be passed, as a share of its size, before another
// cut is added: a relaxation is read, not run.
const relaxedTolerance = 1e-6

// conflictRounds bounds how often the set is looked for again after relaxations added cuts; the second round usually adds none.
const conflictRounds = 20

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
	row      int     // in the conflict's programme
	bound    *bound  // nil: none
	excess   int     // for a row that is not linear: the column that stands for what passes the limit
	end      bool    // an end of a well's range
	share    bool    // a share of the undisturbed value
	runs     int     // for the lowest level in a well that may stand still: the column that says that it runs; 0: none
	free     float64 // by how much the row may be passed while the well stands still
	wells    int     // above zero: a rule about so many running wells, which gives way by whole wells
}

// explain writes the report of a brief that no rates can meet: the table at present pumping, and why.
func (p *planner) explain(ctx context.Context) (*Report, error) {
	p.unprice()
	g, err := p.build(false)
	if err != nil {
		return nil, err
	}
	var m *mixedProgramme
	if p.keepProblem && p.setup.switches() {
		if m, err = p.mixed(g); err != nil {
			return nil, err
		}
	}
	if err := p.keep(g, m, nil); err != nil {
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
	if sol.Status == convex.Optimal && p.setup.switches() {
		if err := p.proveNone(ctx, g); err != nil {
			return nil, err
		}
	} else if p.certificate = &c; sol.Status != convex.Infeasible || !c.Accepted {
		return p.fail(ctx, "the proof that no rates keep every limit did not pass its check: "+sol.Status.String()+" "+c.Reason)
	}
	conflict, err := p.conflict(ctx)
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

// conflict finds an irreducible set (convex.Conflict), the least relaxation of everything but hard limits, and for each member of
// the set the relaxation of it alone; relaxing what is not in the set leaves the set as it is. Where hard limits leave no other way
// they are relaxed too. Relaxations add cuts where rows are not linear; the set is looked for again until they add none.
func (p *planner) conflict(ctx context.Context) (*Conflict, error) {
	for round := 1; ; round++ {
		before := len(p.cuts)
		problem, members, err := p.conflictProgramme()
		if err != nil {
			return nil, err
		}
		inSet, err := p.irreducible(ctx, problem, members)
		if err != nil {
			return nil, err
		}
		e, err := newElastic(problem, members)
		if err != nil {
			return nil, err
		}
		least, possible, err := e.relax(ctx, p, func(k int) bool { return !members[k].hard })
		if err == nil && !possible {
			least, _, err = e.relax(ctx, p, func(int) bool { return true })
		}
		if err != nil {
			return nil, err
		}
		c := &Conflict{Members: []ConflictMember{}, Relaxation: []ConflictMember{}}
		var set, relaxed []string
		var listed []int
		for k := range members {
			if inSet[k] {
				listed = append(listed, k)
			}
		}
		alone, err := e.each(ctx, p, listed)
		if err != nil {
			return nil, err
		}
		for k, m := range members {
			entry := ConflictMember{Limit: m.words, Receptor: m.receptor, Unit: m.unit, By: least[k] * m.size, Source: m.source}
			if inSet[k] {
				if share := alone[len(c.Members)]; finite(share) {
					amount := share * m.size
					entry.Alone = &amount
				}
				c.Members = append(c.Members, entry)
				set = append(set, m.words)
			}
			if entry.By > 0 {
				c.Relaxation = append(c.Relaxation, entry)
				relaxed = append(relaxed, m.words+" by "+m.amount(entry.By))
			}
		}
		if len(p.cuts) > before && round < conflictRounds {
			continue
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
		c.Sentence = p.conflictSentence(set, relaxed, existing, fixed)
		return c, nil
	}
}

// irreducible tells which members form a set that cannot be kept, while it can once any one of them is left out. Ends of ranges
// are tried first, so that limits are named rather than pumps where there is a choice.
func (p *planner) irreducible(ctx context.Context, mixed *convex.MixedProblem, members []member) ([]bool, error) {
	if len(mixed.Integer) > 0 {
		return p.irreducibleRunning(ctx, mixed, members)
	}
	problem := mixed.Problem
	memberOfRow := map[int]int{}
	var among []int
	for _, ends := range []bool{true, false} {
		for k, m := range members {
			if m.end == ends {
				memberOfRow[m.row] = k
				among = append(among, m.row)
			}
		}
	}
	set, err := convex.Conflict(ctx, problem, among)
	switch {
	case err != nil:
		return nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	case set.Status == convex.Interrupted:
		return nil, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
	case set.Status != convex.Infeasible:
		return p.proofSet(ctx, problem, members)
	}
	p.conflictVerified = set.Verified
	in := make([]bool, len(members))
	for _, b := range set.Rows {
		in[memberOfRow[b.Index]] = true
	}
	return in, nil
}

// proofSet is what is left where rounding ended the search: the members that a proof of infeasibility uses. They cannot all be kept;
// whether each of them is needed is open.
func (p *planner) proofSet(ctx context.Context, problem *convex.Problem, members []member) ([]bool, error) {
	in := make([]bool, len(members))
	sol, err := convex.Solve(ctx, problem, convex.Options{})
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	p.conflictVerified = false
	if sol.Status != convex.Infeasible {
		return in, nil
	}
	for k, m := range members {
		in[k] = sol.Ray.Rows[m.row] != 0
	}
	return in, nil
}

// amount writes a relaxation in the member's unit.
func (m *member) amount(by float64) string {
	if m.wells > 0 {
		return fmt.Sprintf("%.0f %s", by, plural(int(by+0.5), "well", "wells"))
	}
	if m.share {
		return percentText(by) + " of it"
	}
	return amountText(by, m.unit)
}

// capacity is what the wells up for decision that a demand is about can pump together at most [m³/d].
func (s *setup) capacity(d demand) float64 {
	total := 0.0
	for i, w := range s.Wells {
		if s.column[i] >= 0 && s.meets(d, i) {
			total += w.Max
		}
	}
	return total
}

// conflictSentence says in words what cannot be kept.
func (p *planner) conflictSentence(set, relaxed, existing, fixed []string) string {
	var parts []string
	for _, d := range p.setup.demands {
		if most := p.setup.capacity(d); d.amount > most {
			parts = append(parts, "The "+d.words+" of "+flowText(d.amount)+" is more than all wells up for decision can pump together, "+flowText(most)+".")
		}
	}
	switch {
	case len(existing) > 0:
		parts = append(parts, "Existing users alone, with all own wells at rest, pass: "+strings.Join(existing, "; ")+".")
	case len(fixed) > 0:
		parts = append(parts, "The wells with fixed rates alone pass: "+strings.Join(fixed, "; ")+".")
	}
	switch len(set) {
	case 0:
		parts = append(parts, "Which limits are in conflict was not settled.")
	case 1:
		parts = append(parts, "This cannot be kept: "+set[0]+".")
	default:
		also := ", while any one left out the others can"
		if !p.conflictVerified {
			also = ", though perhaps not each of them is needed for that"
		}
		parts = append(parts, "These cannot all be kept"+also+": "+strings.Join(set, "; ")+".")
	}
	if len(relaxed) > 0 {
		parts = append(parts, "The least relaxation that makes a plan possible: "+strings.Join(relaxed, "; ")+".")
	}
	return strings.Join(parts, " ")
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
