package plan

import "math"

// worthRanging tells which rows and which columns of decided wells are asked for their ranges: all of them, but with several operating
// states, whose programme has as many times more of each and takes longer for each, only what the plan reaches, and where other plans are
// as good only what has a price. That is the usual case where a yearly quota holds the total: the aim is then the quota itself, the states
// may trade with each other, and a range would walk along all these plans. What is not asked has a price, no range.
func (p *planner) worthRanging(g *programme, r *rangeProgramme) (row func(owner) bool, column func(k int) bool) {
	if p.setup.expanded == nil {
		return func(owner) bool { return true }, func(int) bool { return true }
	}
	s, sol := p.setup, r.solution
	least := priceTolerance * p.aimScale()
	reached := map[owner]bool{}
	for i, o := range g.owners {
		row, value := g.problem.Row(i), sol.RowValue[i]
		near, effect := limitTolerance*math.Abs(value), 0.0
		for k, a := range row.Coefficients {
			near = math.Max(near, limitTolerance*math.Abs(a*sol.X[k]))
			if k < len(s.decided) {
				effect = math.Max(effect, math.Abs(a)*s.rateScale(s.decided[k]))
			}
		}
		if math.Abs(sol.RowPrice[i])*effect > least || !p.notUnique && (value >= row.Upper-near || value <= row.Lower+near) {
			reached[o] = true
		}
	}
	return func(o owner) bool { return reached[o] },
		func(k int) bool {
			return !p.notUnique || math.Abs(sol.ReducedCost[k])*s.rateScale(s.decided[k]) > least
		}
}
