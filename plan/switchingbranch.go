package plan

import (
	"context"
	"fmt"
	"math"
	"sort"

	"springbound/plan/convex"
)

// share is the part of a well's largest rate that it pumps or recharges in a part's optimum.
func (p *planner) shareOf(n *runNode, i int) float64 {
	size := p.setup.rateScale(i)
	if size == 0 {
		return 0
	}
	return math.Abs(n.x[p.setup.column[i]]) / size
}

// undecided lists the open wells that a part may be split by, the most undecided first: those between rest and their least rate, else
// those whose running a rule or a level needs to know.
func (p *planner) undecided(n *runNode) []int {
	s := p.setup
	ruled := p.ruled()
	var list []int
	weight := make([]float64, len(s.Wells))
	for k, i := range s.decided {
		if n.states[i] != openChoice || !(ruled[i] || s.switched(i)) {
			continue
		}
		least := math.Min(math.Abs(s.Wells[i].Min), math.Abs(s.Wells[i].Max))
		x := math.Abs(n.x[k])
		if s.switched(i) && !p.atRestIn(i, n.x[k]) && !p.withinRange(i, n.x[k]) {
			weight[i] = 2 + math.Min(x, least-x)/s.rateScale(i)
		} else if share := p.shareOf(n, i); ruled[i] {
			weight[i] = math.Min(share, 1-share) + rateTolerance
		}
		if weight[i] > 0 {
			list = append(list, i)
		}
	}
	if len(list) == 0 { // any open well
		for _, i := range s.decided {
			if n.states[i] == openChoice && (ruled[i] || s.switched(i)) {
				list = append(list, i)
			}
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return weight[list[a]] > weight[list[b]] })
	return list
}

// split parts n by one well: of the first few candidates the one whose two parts have the highest bounds.
func (p *planner) split(ctx context.Context, t *runTree, n *runNode) ([]*runNode, error) {
	list := p.undecided(n)
	if len(list) == 0 {
		return nil, fmt.Errorf("%w: rounding left a part that cannot be split", errUndecided)
	}
	tries := strongTries
	if len(n.path) >= strongDepth {
		tries = 2
	}
	var best []*runNode
	most := math.Inf(-1)
	gain := func(c *runNode) float64 {
		if !c.possible() {
			return t.size()
		}
		return math.Max(c.bound-n.bound, aimFloor*t.size())
	}
	for _, i := range list[:min(tries, len(list))] {
		on, err := p.branch(ctx, t, n, decision{i, runsChoice})
		if err != nil {
			return nil, err
		}
		off, err := p.branch(ctx, t, n, decision{i, offChoice})
		if err != nil {
			return nil, err
		}
		if score := gain(on) * gain(off); score > most {
			best, most = []*runNode{on, off}, score
		}
	}
	return best, nil
}

// round tries the plan in which the open wells that pump the largest shares run, as far as the rules let them.
func (p *planner) round(ctx context.Context, t *runTree, n *runNode) error {
	s := p.setup
	states := append([]choice(nil), n.states...)
	var list []int
	for _, i := range s.decided {
		if states[i] == openChoice {
			list = append(list, i)
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return p.shareOf(n, list[a]) > p.shareOf(n, list[b]) })
	for _, i := range list {
		if states[i] != openChoice {
			continue
		}
		least := math.Min(math.Abs(s.Wells[i].Min), math.Abs(s.Wells[i].Max))
		to := offChoice
		if x := math.Abs(n.x[s.column[i]]); !p.atRestIn(i, x) && x >= least/2 {
			to = runsChoice
		}
		for _, c := range []choice{to, offChoice, runsChoice} {
			next := append([]choice(nil), states...)
			next[i] = c
			if p.propagate(next) {
				states = next
				break
			}
		}
	}
	return p.offer(ctx, t, n, states)
}

// propagate draws what follows from the rules; false where they cannot all hold.
func (p *planner) propagate(states []choice) bool {
	for i := range states {
		if p.isOut(i) {
			if states[i] == runsChoice {
				return false
			}
			states[i] = offChoice
		}
	}
	for again := true; again; {
		again = false
		for _, r := range p.setup.rules {
			running, resting := 0.0, 0
			for _, i := range r.wells {
				switch states[i] {
				case runsChoice:
					running++
				case offChoice:
					resting++
				}
			}
			to := openChoice
			switch {
			case r.kind == runTogether && (running > 0 || math.IsInf(r.most, 1)):
				if resting > 0 || r.most == 0 {
					return false
				}
				to = runsChoice
			case r.kind == runTogether && (resting > 0 || r.most == 0):
				to = offChoice
			case r.kind != runTogether && running > r.most:
				return false
			case r.kind != runTogether && running == r.most:
				to = offChoice
			}
			for _, i := range r.wells {
				if to != openChoice && states[i] == openChoice {
					states[i], again = to, true
				}
			}
		}
	}
	return true
}

// nodeProblem is the programme of a part. Every part has the same rows in the same order, so that one starts from the other's basis:
// those of the round, the lowest levels as an open well must keep them, and the rules.
func (p *planner) nodeProblem(g *programme, states []choice) (*convex.Problem, error) {
	s := p.setup
	var columns []convex.Column
	for k, i := range s.decided {
		c := g.problem.Column(k)
		switch {
		case states[i] == offChoice || p.isOut(i):
			c.Lower, c.Upper = 0, 0
		case states[i] == runsChoice:
			c.Lower, c.Upper = s.Wells[i].Min, s.Wells[i].Max
		}
		columns = append(columns, c)
	}
	problem, err := convex.NewProblem(g.problem.Sense(), columns)
	if err != nil {
		return nil, fmt.Errorf("plan: the search over which wells run: %w", err)
	}
	add := func(r convex.Row) {
		if err == nil {
			_, err = problem.AddRow(r)
		}
	}
	for r, o := range g.owners {
		row := g.problem.Row(r)
		if o.kind == ofBound {
			if i := p.idleBore(p.bounds[o.index]); i >= 0 {
				relaxed := g.problem.Row(r)
				if big := p.largestPass(g, row); states[i] == openChoice {
					relaxed.Coefficients[s.column[i]] += big / s.largest(i)
					relaxed.Upper += big
				} else {
					relaxed.Upper = math.Inf(1)
				}
				add(relaxed)
				if states[i] != runsChoice {
					row.Upper = math.Inf(1)
				}
			}
		}
		add(row)
	}
	p.addNodeRules(states, add)
	if err != nil {
		return nil, fmt.Errorf("plan: the search over which wells run: %w", err)
	}
	return problem, nil
}

// addNodeRules adds what the rules ask of the open wells' rates.
func (p *planner) addNodeRules(states []choice, add func(convex.Row)) {
	s := p.setup
	for _, r := range s.rules {
		if r.kind != runTogether {
			a, most := make([]float64, len(s.decided)), r.most
			for _, i := range r.wells {
				switch {
				case states[i] == runsChoice:
					most--
				case states[i] == openChoice && s.rateScale(i) > 0:
					a[s.column[i]] = 1 / s.largest(i)
				}
			}
			add(convex.Row{Name: r.words, Coefficients: a, Lower: math.Inf(-1), Upper: most})
			continue
		}
		for k, i := range r.wells { // x_i/Max_i is at most that the group runs, which is at most x_j/Min_j
			j := r.wells[(k+1)%len(r.wells)]
			a, upper := make([]float64, len(s.decided)), math.Inf(1)
			if i != j && states[i] == openChoice && states[j] == openChoice {
				a[s.column[i]], a[s.column[j]], upper = 1/s.largest(i), -1/s.least(j), 0
			}
			add(convex.Row{Name: r.words, Coefficients: a, Lower: math.Inf(-1), Upper: upper})
		}
	}
}

// largest is the end of a decided well's range that is farther from zero, least the one that is nearer.
func (s *setup) largest(i int) float64 {
	if w := s.Wells[i]; w.Max > 0 {
		return w.Max
	}
	return s.Wells[i].Min
}

func (s *setup) least(i int) float64 {
	if w := s.Wells[i]; w.Max > 0 {
		return w.Min
	}
	return s.Wells[i].Max
}

// priceBound is what no plan within the rows and bounds of a problem costs less than, by the tangent plane of the convex aim at x and any
// prices y of the rows:
//
//	f(v) >= f(x) + f'(x)(v - x) >= f(x) - f'(x) x + sum_rows y b + sum_columns min (f'(x) - A'y) v
func (p *planner) priceBound(problem *convex.Problem, x, y []float64) float64 {
	slope := p.curved.gradient(x)
	total := p.curved.value(x) - dot(slope, x)
	for r, v := range y {
		row := problem.Row(r)
		b := row.Upper
		if v > 0 {
			b = row.Lower
		}
		if v == 0 || !finite(b) {
			continue // a price that nothing holds is rounding; any prices bound
		}
		total += v * b
		for k, a := range row.Coefficients {
			slope[k] -= v * a
		}
	}
	for k, v := range slope {
		c := problem.Column(k)
		total += math.Min(v*c.Lower, v*c.Upper)
	}
	return total
}

// proveCurved recomputes from the data that no choice of running wells is better: the closed parts cover every choice, and each is
// impossible or has a bound that the plan is within the gap of.
func (p *planner) proveCurved() {
	t := p.search.tree
	if t == nil || !p.search.proven || len(t.open) > 0 || len(t.closed) > proofNodes {
		return
	}
	var paths [][]decision
	for _, n := range t.closed {
		paths = append(paths, n.path)
		states := make([]choice, len(p.setup.Wells))
		for _, d := range n.path {
			states[d.well] = d.to
		}
		if !p.propagate(states) {
			continue
		}
		problem, err := p.nodeProblem(t.base, states)
		if err != nil {
			return
		}
		switch {
		case n.dead != nil && convex.Certify(problem, n.dead).Accepted:
		case n.possible() && p.priceBound(problem, n.x, n.price) >= t.value-2*switchingGap*t.size():
		default:
			return
		}
	}
	p.search.certified = covers(paths, 0)
}

// covers tells whether paths through a tree, alike in their first steps, lead to all of its ends: each well that some are split by is there
// both ways.
func covers(paths [][]decision, depth int) bool {
	if len(paths) == 1 && len(paths[0]) == depth {
		return true
	}
	var on, off [][]decision
	for _, path := range paths {
		if len(path) <= depth || path[depth].well != paths[0][depth].well {
			return false
		}
		if path[depth].to == runsChoice {
			on = append(on, path)
		} else {
			off = append(off, path)
		}
	}
	return len(on) > 0 && len(off) > 0 && covers(on, depth+1) && covers(off, depth+1)
}
