package plan

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// findRanges computes what every limit is worth to both sides and how far, from the optimum itself and not from one basis, so that a
// degenerate plan gives the two prices that it has (convex.Ranges). Where it cannot, the report says so and the plan stands.
//
// A limit loosened by x of its own unit moves its rows by x unit (1 - (reserve + t) grow): with most-headroom the share t kept free
// is the optimum itself, so that the ends of a range follow exactly from t there.
func (p *planner) findRanges(ctx context.Context, g *programme, sol *convex.Solution) error {
	p.dropRanges()
	asked, err := p.rangeProgramme(ctx, g, sol)
	if err == nil {
		err = p.askRanges(ctx, g, asked)
	}
	switch {
	case err == nil:
		return nil
	case ctx.Err() != nil:
		return fmt.Errorf("plan: stopped while prices were ranged: %w", ctx.Err())
	}
	p.dropRanges()
	p.setup.notAssessed.addf("how far prices hold: %v", err)
	return nil
}

func (p *planner) dropRanges() {
	p.demandRange, p.wellRange = nil, nil
	p.setup.dropDemandRanges()
	for _, b := range p.bounds {
		b.priceRange = nil
	}
	for k := range p.setup.quotas {
		p.setup.quotas[k].priceRange = nil
	}
}

// rangeProgramme is the programme whose bounds are moved: that of the plan, with one more column, fixed at zero, for each bound
// with several tangents, which moves all of them at once.
type rangeProgramme struct {
	problem  *convex.Problem
	solution *convex.Solution
	first    []int // of each bound: its first row; -1: none
	moving   []int // of each bound: the column that moves its rows; -1: it has one row, which moves itself
}

func (p *planner) rangeProgramme(ctx context.Context, g *programme, sol *convex.Solution) (*rangeProgramme, error) {
	r := &rangeProgramme{problem: g.problem, solution: sol, first: make([]int, len(p.bounds)), moving: make([]int, len(p.bounds))}
	rows := make([]int, len(p.bounds))
	for k := range p.bounds {
		r.first[k], r.moving[k] = -1, -1
	}
	for i, o := range g.owners {
		if o.kind == ofBound {
			if rows[o.index]++; rows[o.index] == 1 {
				r.first[o.index] = i
			}
		}
	}
	var columns []convex.Column
	for j := 0; j < g.problem.Columns(); j++ {
		columns = append(columns, g.problem.Column(j))
	}
	for k, n := range rows {
		if n > 1 && !g.problem.Quadratic() { // whose bounds move as a group
			r.moving[k] = len(columns)
			columns = append(columns, convex.Column{Name: "tangents of " + p.setup.boundWords(p.bounds[k])})
		}
	}
	if len(columns) == g.problem.Columns() {
		return r, nil
	}
	var err error
	if r.problem, err = convex.NewProblem(g.problem.Sense(), columns); err != nil {
		return nil, err
	}
	for i, o := range g.owners {
		row := g.problem.Row(i)
		a := make([]float64, len(columns))
		copy(a, row.Coefficients)
		if o.kind == ofBound && r.moving[o.index] >= 0 {
			a[r.moving[o.index]] = -1
		}
		row.Coefficients = a
		if _, err = r.problem.AddRow(row); err != nil {
			return nil, err
		}
	}
	if r.solution, err = convex.Solve(ctx, r.problem, convex.Options{}); err != nil {
		return nil, err
	}
	if r.solution.Status != convex.Optimal {
		return nil, fmt.Errorf("the programme of moving tangents ended as %v", r.solution.Status)
	}
	return r, nil
}

// askRanges asks for all ranges at once and hands them to their owners.
func (p *planner) askRanges(ctx context.Context, g *programme, r *rangeProgramme) error {
	s := p.setup
	p.wellRange = make([]*PriceRange, len(s.Wells))
	var sides []convex.SideOf
	var take []func(convex.Range)
	ask := func(side convex.SideOf, f func(convex.Range)) {
		sides, take = append(sides, side), append(take, f)
	}
	asked, askedColumn := p.worthRanging(g, r)
	for i, o := range g.owners {
		switch {
		case !asked(o):
		case o.kind == ofQuota:
			q := &s.quotas[o.index]
			ask(convex.SideOf{Index: i, Side: convex.UpperSide}, func(x convex.Range) { q.priceRange = p.rising(g, x, q.limit) })
		case o.kind == ofDemand:
			side := convex.LowerSide
			if row := g.problem.Row(i); row.Lower == row.Upper {
				side = convex.BothSides
			}
			ask(convex.SideOf{Index: i, Side: side}, func(x convex.Range) { p.setDemandRange(o.index, p.falling(g, x, s.demands[o.index].amount)) })
		case o.kind == ofBound && r.first[o.index] == i && !p.idle(p.bounds[o.index]): // what a well that stands still need not keep has no bound
			b := p.bounds[o.index]
			side := convex.SideOf{Index: i, Side: convex.UpperSide}
			if j := r.moving[o.index]; j >= 0 {
				side = convex.SideOf{Column: true, Index: j, Side: convex.BothSides}
			}
			ask(side, func(x convex.Range) { b.priceRange = p.boundRange(g, b, x) })
		}
	}
	for k, i := range s.decided {
		w := s.Wells[i]
		side := convex.UpperSide
		atMin := r.solution.X[k] == w.Min && (w.Min < w.Max || p.minHolds[i])
		switch {
		case !askedColumn(k):
			continue
		case w.Min == w.Max:
			side = convex.BothSides
		case atMin:
			side = convex.LowerSide
		case r.solution.X[k] != w.Max:
			continue
		}
		ask(convex.SideOf{Column: true, Index: k, Side: side}, func(x convex.Range) {
			found, at := p.rising(g, x, w.Max), w.Max
			if atMin {
				found, at = p.falling(g, x, w.Min), w.Min
			}
			if at == 0 { // beyond rest is another kind of well
				found.Looser, found.LooserTo, found.LooserThen = nil, nil, ""
			}
			p.wellRange[i] = found
		})
	}
	if g.problem.Quadratic() {
		return p.askQuadratic(ctx, g, r, sides, take)
	}
	ranges, err := convex.Ranges(ctx, r.problem, r.solution, sides)
	if err != nil {
		return err
	}
	for k, x := range ranges {
		take[k](x)
	}
	return nil
}

// rising is the range of a bound that is loosened by raising it. at is its value; the programme's may be less what standing wells take.
func (p *planner) rising(g *programme, x convex.Range, at float64) *PriceRange {
	return &PriceRange{
		Looser: known(x.Right), LooserTo: known(at + (x.To - x.At)), LooserThen: p.endWords(g, x, x.Above),
		Tighter: known(x.Left), TighterTo: known(at + (x.From - x.At)), TighterThen: p.endWords(g, x, x.Below), HoldsFor: p.holdsFor(),
	}
}

// falling is the range of a bound that is loosened by lowering it.
func (p *planner) falling(g *programme, x convex.Range, at float64) *PriceRange {
	return &PriceRange{
		Looser: known(-x.Left), LooserTo: known(at + (x.From - x.At)), LooserThen: p.endWords(g, x, x.Below),
		Tighter: known(-x.Right), TighterTo: known(at + (x.To - x.At)), TighterThen: p.endWords(g, x, x.Above), HoldsFor: p.holdsFor(),
	}
}

// known is nil for an infinity.
func known(v float64) *float64 {
	if !finite(v) {
		return nil
	}
	v = tidy(v)
	return &v
}

// What ranges are conditional on: that the programme has tangents in place of the curved rows, and that the same wells run.
const (
	tangentsOnly = "the tangents of this plan"
	sameRunning  = "the wells that run in this plan"
)

func (p *planner) holdsFor() string {
	parts := p.curvedHolds()
	if len(p.cuts) > 0 {
		parts = append(parts, tangentsOnly)
	}
	if p.runs != nil {
		parts = append(parts, sameRunning)
	}
	return list(parts)
}

// boundRange turns the range of a row, which moves in the unit of the change, into that of the limit.
func (p *planner) boundRange(g *programme, b *bound, x convex.Range) *PriceRange {
	at, way := p.boundValue(b), b.way()
	r := &PriceRange{LooserThen: p.endWords(g, x, x.Above), TighterThen: p.endWords(g, x, x.Below), HoldsFor: p.holdsFor()}
	r.Looser, r.Tighter = known(x.Right*b.rate(p.share, 1)), known(x.Left*b.rate(p.share, -1))
	side := func(slope, by, direction float64, then string) (*float64, string) {
		share := 0.0
		if g.share >= 0 && by != 0 {
			share = p.share + slope*by
		}
		// a rate of zero is a share of one kept free, which no finite limit reaches
		moved := math.Inf(int(direction))
		if rate := b.rate(share, direction); finite(by) && (by == 0 || rate > 0) {
			moved = 0
			if by != 0 {
				moved = by / rate
			}
		}
		if (b.reserve > 0 || g.share >= 0) && b.size > 0 && direction*b.grow < 0 && !(math.Abs(moved) <= b.size/b.unit) {
			moved, then = direction*b.size/b.unit, "the limit is zero and keeps no share back"
		}
		return known(at + way*moved), then
	}
	r.LooserTo, r.LooserThen = side(x.Right, x.To-x.At, 1, r.LooserThen)
	r.TighterTo, r.TighterThen = side(x.Left, x.From-x.At, -1, r.TighterThen)
	return r
}

// rate is by how much the bound's rows move, in the unit of the change, per unit by which the limit is loosened (direction 1) or
// tightened (-1), with a share t kept free. A limit of size zero grows in both directions.
func (b *bound) rate(t, direction float64) float64 {
	grow := b.grow
	if b.size == 0 {
		grow = direction
	}
	return b.unit * (1 - (b.reserve+t)*grow)
}

// way is +1 where a larger value of the limit is looser, -1 where a smaller one is.
func (b *bound) way() float64 {
	if b.value {
		return -b.side
	}
	return b.side
}

// boundValue is the limit's value in its own unit.
func (p *planner) boundValue(b *bound) float64 {
	if b.limit >= 0 {
		return p.setup.Limits[b.limit].Value
	}
	lowest, _ := lowestLevel(p.setup.Wells[b.target.well])
	return *lowest
}
