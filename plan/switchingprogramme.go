package plan

import (
	"fmt"
	"math"

	"springbound/plan/convex"
)

// mixedProgramme is a programme with the choice of running wells in it.
type mixedProgramme struct {
	*convex.MixedProblem
	indicator []int // column of y of each well; -1: none
}

// mixed adds the choice of running wells to a programme that was built with that choice open.
func (p *planner) mixed(g *programme) (*mixedProgramme, error) {
	s := p.setup
	m := &mixedProgramme{indicator: make([]int, len(s.Wells))}
	var columns []convex.Column
	var semi, whole []int
	for j := 0; j < g.problem.Columns(); j++ {
		columns = append(columns, g.problem.Column(j))
	}
	ruled := p.ruled()
	for i := range s.Wells {
		m.indicator[i] = -1
		if s.column[i] < 0 || p.isOut(i) {
			continue
		}
		if s.switched(i) {
			columns[s.column[i]].Lower, columns[s.column[i]].Upper = s.Wells[i].Min, s.Wells[i].Max
			semi = append(semi, s.column[i])
		}
		if ruled[i] {
			m.indicator[i] = len(columns)
			whole = append(whole, len(columns))
			columns = append(columns, convex.Column{Name: s.Wells[i].ID + " runs", Upper: 1})
		}
	}
	together := make([]int, len(s.rules))
	for k, r := range s.rules {
		if r.kind == runTogether {
			together[k] = len(columns)
			whole = append(whole, len(columns))
			z := convex.Column{Name: r.words, Upper: 1}
			switch {
			case r.most == 0 || p.anyOut(r.wells):
				z.Upper = 0
			case math.IsInf(r.most, 1):
				z.Lower = 1
			}
			columns = append(columns, z)
		}
	}
	problem, err := convex.NewProblem(g.problem.Sense(), columns)
	if err != nil {
		return nil, fmt.Errorf("plan: the programme of running wells: %w", err)
	}
	m.MixedProblem = &convex.MixedProblem{Problem: problem, Integer: whole, SemiContinuous: semi}
	for r := 0; r < g.problem.Rows(); r++ {
		row := g.problem.Row(r)
		a := make([]float64, len(columns))
		copy(a, row.Coefficients)
		if o := g.owners[r]; o.kind == ofBound {
			if i := p.idleBore(p.bounds[o.index]); i >= 0 && m.indicator[i] >= 0 {
				big := p.largestPass(g, row)
				a[m.indicator[i]] = big
				row.Upper += big
			}
		}
		row.Coefficients = a
		if _, err := problem.AddRow(row); err != nil {
			return nil, fmt.Errorf("plan: the programme of running wells: %w", err)
		}
	}
	return m, p.addRules(m, together)
}

// addRules adds the rows that link rates with running and the rules themselves.
func (p *planner) addRules(m *mixedProgramme, together []int) error {
	s := p.setup
	add := func(name string, lower, upper float64, set func(a []float64)) error {
		a := make([]float64, m.Columns())
		set(a)
		if _, err := m.AddRow(convex.Row{Name: name, Coefficients: a, Lower: lower, Upper: upper}); err != nil {
			return fmt.Errorf("plan: the programme of running wells: %w", err)
		}
		return nil
	}
	for i, y := range m.indicator {
		if y < 0 {
			continue
		}
		w, x := s.Wells[i], s.column[i]
		if err := add(w.ID+" at most its largest rate when it runs", math.Inf(-1), 0, func(a []float64) { a[x], a[y] = 1, -w.Max }); err != nil {
			return err
		}
		if err := add(w.ID+" at least its least rate when it runs", 0, math.Inf(1), func(a []float64) { a[x], a[y] = 1, -w.Min }); err != nil {
			return err
		}
	}
	for k, r := range s.rules {
		lower, upper := math.Inf(-1), r.most
		if r.kind == runTogether {
			lower, upper = 0, 0
		}
		err := add(r.words, lower, upper, func(a []float64) {
			n := 0
			for _, i := range r.wells {
				if m.indicator[i] >= 0 {
					a[m.indicator[i]] = 1
					n++
				}
			}
			if r.kind == runTogether {
				a[together[k]] = -float64(n)
			}
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// idleBore is the well whose own lowest level a bound is, when that well may stand still: the level need not be kept then; -1: none.
func (p *planner) idleBore(b *bound) int {
	if b.limit < 0 && p.setup.switched(b.target.well) {
		return b.target.well
	}
	return -1
}

// mostHeadroom is more than any share of a limit that a plan keeps free: recharge can make it larger than 1, hardly than this.
const mostHeadroom = 100

// largestPass is by how much the rates, and a share kept free, can pass a row at most.
func (p *planner) largestPass(g *programme, row convex.Row) float64 {
	sum := 0.0
	if g.share >= 0 {
		sum = mostHeadroom * row.Coefficients[g.share]
	}
	for k, i := range p.setup.decided {
		w := p.setup.Wells[i]
		sum += math.Max(0, math.Max(row.Coefficients[k]*math.Max(0, w.Max), row.Coefficients[k]*math.Min(0, w.Min)))
	}
	return math.Max(0, sum-row.Upper)
}
