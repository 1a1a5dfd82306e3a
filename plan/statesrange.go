package plan

import "math"

// worthRanging tells which rows are asked for their ranges: all of them, but with several operating states, whose rows are as many times
// more and each take longer, only those that the plan reaches. What does not bind has no price and keeps none.
func (p *planner) worthRanging(g *programme, r *rangeProgramme) func(owner) bool {
	if p.setup.expanded == nil {
		return func(owner) bool { return true }
	}
	reached := map[owner]bool{}
	for i, o := range g.owners {
		row, value := g.problem.Row(i), r.solution.RowValue[i]
		near := limitTolerance * math.Abs(value)
		for k, a := range row.Coefficients {
			near = math.Max(near, limitTolerance*math.Abs(a*r.solution.X[k]))
		}
		if r.solution.RowPrice[i] != 0 || value >= row.Upper-near || value <= row.Lower+near {
			reached[o] = true
		}
	}
	return func(o owner) bool { return reached[o] }
}
