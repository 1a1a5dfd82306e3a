package plan

import (
	"context"
	"errors"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// conflictNodes bounds one search for whether some members can be kept; what it leaves open keeps its member and is said.
const conflictNodes = 300

// conflictMembers is up to how many members an irreducible set is looked for by mixed solves, one a member.
const conflictMembers = 400

// farRate stands for 'any rate' where a well's largest rate is left out: a thousand times what all wells pump or are asked for.
const farRate = 1000

// runningColumns are the columns of a conflict's programme that say which wells run.
type runningColumns struct {
	indicator []int // of each well; -1: none
	together  []int // of each rule
	whole     []int
	far       float64 // a rate beyond any [m³/d]
}

// addRunning appends the columns that say which wells run; none where there is nothing to choose.
func (p *planner) addRunning(columns []convex.Column) ([]convex.Column, *runningColumns) {
	s := p.setup
	r := &runningColumns{indicator: make([]int, len(s.Wells)), together: make([]int, len(s.rules))}
	ruled := p.ruled()
	for i := range s.Wells {
		r.indicator[i] = -1
		if s.column[i] >= 0 && (ruled[i] || s.switched(i)) {
			r.indicator[i] = len(columns)
			r.whole = append(r.whole, len(columns))
			columns = append(columns, convex.Column{Name: s.Wells[i].ID + " runs", Upper: 1})
		}
		r.far += s.rateScale(i)
	}
	for _, d := range s.demands {
		r.far = math.Max(r.far, d.amount)
	}
	r.far *= farRate
	for k, rule := range s.rules {
		if rule.kind != runTogether {
			continue
		}
		z := convex.Column{Name: rule.words, Upper: math.Min(rule.most, 1)}
		if math.IsInf(rule.most, 1) {
			z.Lower = 1
		}
		r.together[k] = len(columns)
		r.whole = append(r.whole, len(columns))
		columns = append(columns, z)
	}
	return columns, r
}

// addRunningRows adds the rules as members.
func (p *planner) addRunningRows(r *runningColumns, add func(m *member, name string, lower, upper float64, set func(a []float64))) {
	for k, rule := range p.setup.rules {
		m := member{words: rule.words, unit: "1", source: rule.source, size: 1, effect: 1, wells: len(rule.wells)}
		lower, upper := math.Inf(-1), rule.most
		if rule.kind == runTogether {
			lower, upper = 0, 0
		}
		add(&m, m.words, lower, upper, func(a []float64) {
			for _, i := range rule.wells {
				a[r.indicator[i]] = 1
			}
			if rule.kind == runTogether {
				a[r.together[k]] = -float64(len(rule.wells))
			}
		})
	}
}

// irreducibleRunning tells which members form a set that cannot be kept whichever wells run, while it can once any one of them is
// left out. The relaxation, in which wells may run in part, names a first set where it cannot be kept either; members are then left
// out one by one for as long as no choice of running wells keeps the rest (deletion filter: Chinneck & Dravnieks 1991, ORSA Journal
// on Computing 3). Each step is a search; one that is not settled within conflictNodes keeps its member.
func (p *planner) irreducibleRunning(ctx context.Context, problem *convex.MixedProblem, members []member) ([]bool, error) {
	in := make([]bool, len(members))
	memberOfRow := map[int]int{}
	var among, order []int
	for _, ends := range []bool{true, false} {
		for k, m := range members {
			if m.end == ends {
				memberOfRow[m.row] = k
				among = append(among, m.row)
				order = append(order, k)
			}
		}
	}
	relaxed, err := convex.Conflict(ctx, problem.Problem, among)
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
	}
	for k := range in {
		in[k] = relaxed.Status != convex.Infeasible
	}
	if relaxed.Status == convex.Infeasible {
		for _, b := range relaxed.Rows {
			in[memberOfRow[b.Index]] = true
		}
	}
	q := &convex.MixedProblem{Problem: problem.Problem.Clone(), Integer: problem.Integer, SemiContinuous: problem.SemiContinuous}
	var errs []error
	left := 0
	for k, m := range members {
		if in[k] {
			left++
		} else {
			errs = append(errs, q.SetRowBounds(m.row, math.Inf(-1), math.Inf(1)))
		}
	}
	p.conflictVerified = left <= conflictMembers
	if !p.conflictVerified {
		p.setup.cautions.addf("the limits in conflict are named by the relaxation in which wells may run in part: perhaps not each of them is needed")
		return in, errors.Join(errs...)
	}
	for _, k := range order {
		if !in[k] {
			continue
		}
		row := problem.Row(members[k].row)
		errs = append(errs, q.SetRowBounds(members[k].row, math.Inf(-1), math.Inf(1)))
		sol, err := convex.SolveMixed(ctx, q, convex.MixedOptions{NodeLimit: conflictNodes})
		if err = errors.Join(append(errs, err)...); err != nil {
			return nil, fmt.Errorf("plan: the programme of the conflict: %w", err)
		}
		if ctx.Err() != nil {
			return nil, fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
		}
		if sol.Status == convex.MixedInfeasible {
			in[k] = false
			continue
		}
		p.conflictVerified = p.conflictVerified && sol.X != nil
		errs = append(errs, q.SetRowBounds(members[k].row, row.Lower, row.Upper))
	}
	return in, errors.Join(errs...)
}

// proveNone looks for the proof that no choice of running wells keeps every limit, where the relaxation would: a tree that is kept
// and recomputed from the data.
func (p *planner) proveNone(ctx context.Context, g *programme) error {
	m, err := p.mixed(g)
	if err != nil {
		return err
	}
	sol, err := convex.SolveMixed(ctx, m.MixedProblem, convex.MixedOptions{Proof: true, NodeLimit: proofNodes})
	if err != nil {
		return fmt.Errorf("plan: the programme of running wells: %w", err)
	}
	if ctx.Err() != nil {
		return fmt.Errorf("plan: stopped while explaining a conflict: %w", ctx.Err())
	}
	p.search.none = true
	if sol.Status == convex.MixedInfeasible {
		c := convex.CertifyMixed(m.MixedProblem, sol)
		p.search.certified, p.search.leaves = c.Accepted, c.Leaves
	}
	return nil
}

// checkNone writes the checks of a brief that no choice of running wells keeps.
func (p *planner) checkNone(add func(name, result, detail string)) {
	const name = "No choice of running wells keeps every limit: proof recomputed"
	if p.search.certified {
		add(name, pass, fmt.Sprintf("a tree of %d parts, each with prices that prove it empty", p.search.leaves))
	} else {
		add(name, notDone, "the search found none; its proof was too large to recompute")
	}
	p.checkMembers(add)
}

func (p *planner) checkMembers(add func(name, result, detail string)) {
	const name = "Any one member of the conflict left out, the others can be kept"
	if p.conflictVerified {
		add(name, pass, "seen for each member")
	} else {
		add(name, notDone, "rounding or the size of the search left it open")
	}
}
