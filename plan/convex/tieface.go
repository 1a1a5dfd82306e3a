package convex

import (
	"context"
	"math"
)

// face is the set of all optima: the feasible points that keep every bound with a price.
type face struct {
	t    *undertaking
	kept []bool // by variable: held at its value by a price, or because it is fixed
}

// newFace reads the face from a solved undertaking.
func newFace(t *undertaking) *face {
	e := t.e
	f := &face{t: t, kept: make([]bool, len(e.place))}
	for v, p := range e.place {
		f.kept[v] = p != Basic && (e.fixed(v) || math.Abs(e.d[v]) > tiePrice)
	}
	return f
}

// single tells that the face is one point. Every other point of it moves a variable that is not basic and has no price away from
// its bound, and these movements have one sign each, so that the largest sum of them tells; free variables are asked one by one.
func (f *face) single(ctx context.Context) (bool, error) {
	b, s := f.t.e, f.t.s
	away := make([]float64, len(b.place))
	var free []int
	candidates := false
	for v, p := range b.place {
		if p == Basic || f.kept[v] {
			continue
		}
		candidates = true
		switch p {
		case AtLower:
			away[v] = -1
		case AtUpper:
			away[v] = 1
		default:
			free = append(free, v)
		}
	}
	if !candidates {
		return true, nil
	}
	e := newEngine(s.matrix, make([]float64, b.n), append([]float64(nil), s.lower...), append([]float64(nil), s.upper...))
	for v, kept := range f.kept {
		if kept {
			e.trueLow[v], e.trueUp[v] = b.x[v], b.x[v]
		}
	}
	e.unwiden()
	e.start(b.basis())
	moves, err := f.moves(ctx, e, away)
	for k := 0; k < 2*len(free) && !moves && err == nil; k++ {
		clear(away)
		away[free[k/2]] = float64(1 - 2*(k%2))
		moves, err = f.moves(ctx, e, away)
	}
	return !moves && err == nil, err
}

// moves minimises away'(x, r) over the face and tells whether any of these variables moves.
func (f *face) moves(ctx context.Context, e *engine, away []float64) (bool, error) {
	b := f.t.e
	clear(e.trueCost)
	copy(e.trueCost, away[:e.n])
	row := make([]float64, e.n)
	any, top := false, 0.0
	for i, by := range away[e.n:] {
		if by == 0 {
			continue
		}
		e.m.combineRows(row, []int{i}, []float64{by}, e.byRow)
		addScaled(e.trueCost, 1, row)
	}
	for v := range away {
		any = any || away[v] != 0
	}
	if !any {
		return false, nil
	}
	for _, c := range e.trueCost {
		top = math.Max(top, math.Abs(c))
	}
	if top > 0 {
		top = powerOfTwo(top)
		for j := range e.trueCost {
			e.trueCost[j] /= top
		}
	}
	copy(e.cost, e.trueCost)
	clear(e.cost[e.n:])
	e.limit = e.iterations + Options{}.iterationLimit(e.rows, e.n)
	switch status, _ := e.optimise(ctx); status {
	case Optimal:
	case Unbounded:
		return true, nil
	case Infeasible:
		return false, &StatusError{"asking for other optima", NumericalTrouble}
	default:
		return false, &StatusError{"asking for other optima", status}
	}
	for v, a := range away {
		if a != 0 && math.Abs(e.x[v]-b.x[v]) > tieMovement*math.Max(1, math.Abs(b.x[v])) {
			return true, nil
		}
	}
	return false, nil
}

// movable returns the columns that may move, the plan with these at their target, and the largest scaled distance that the vertex x
// has from it.
func (f *face) movable(x, target, scale []float64) (columns []int, begin []float64, reach float64) {
	begin = append([]float64(nil), x...)
	for j := range x {
		if f.kept[j] {
			continue
		}
		begin[j] = target[j]
		columns = append(columns, j)
		reach = math.Max(reach, math.Abs(x[j]-target[j])/scale[j])
	}
	return columns, begin, reach
}

// project moves the plan of tie to the point of the face nearest to the target. In u = (x - target) / (scale reach), with rows of
// norm one, that is the point nearest to zero, and reach, the distance of the vertex, makes it near one.
func (f *face) project(ctx context.Context, p *Problem, tie *Tie, target, scale []float64) error {
	x := tie.Solution.X
	columns, begin, reach := f.movable(x, target, scale)
	if !(reach > 0) {
		return nil
	}
	q := newNearPoint(len(columns))
	for k, j := range columns {
		c := p.columns[j]
		q.low[k], q.high[k] = (c.Lower-target[j])/scale[j]/reach, (c.Upper-target[j])/scale[j]/reach
	}
	rows, norms := f.addRows(p, q, columns, begin, scale, reach)
	if err := q.solve(ctx); err != nil {
		return err
	}
	tie.Steps = q.steps
	for k, j := range columns {
		switch q.at[k] {
		case AtLower:
			x[j] = p.columns[j].Lower
		case AtUpper:
			x[j] = p.columns[j].Upper
		default:
			x[j] = target[j] + q.u[k]*reach*scale[j]
		}
	}
	for k, a := range q.active {
		if math.Abs(q.pull[k]) <= tieNoise {
			continue
		}
		tie.RowPull[rows[a]] = plain(reach * q.pull[k] * q.sign[k] / norms[a])
	}
	tie.refresh(p)
	return nil
}

// addRows gives q the rows that hold a movable column, those with a price as equations, and returns which they are and the norms
// that they were divided by.
func (f *face) addRows(p *Problem, q *nearPoint, columns []int, begin, scale []float64, reach float64) (rows []int, norms []float64) {
	for i := range p.rowName {
		g, norm := make([]float64, len(columns)), 0.0
		for k, j := range columns {
			g[k] = p.row(i)[j] * scale[j]
			norm = math.Hypot(norm, g[k])
		}
		if !(norm > 0) {
			continue
		}
		for k := range g {
			g[k] /= norm
		}
		value, terms := p.activity(i, begin)
		unit := norm * reach
		lower, upper := p.rowLower[i], p.rowUpper[i]
		if v := f.t.e.n + i; f.kept[v] {
			if f.t.e.place[v] == AtUpper {
				lower = upper
			} else {
				upper = lower
			}
		}
		q.addRow(g, (lower-value)/unit, (upper-value)/unit, tieViolation+tieRounding*terms/unit)
		rows, norms = append(rows, i), append(norms, norm)
	}
	return rows, norms
}

// refresh recomputes what follows from X.
func (tie *Tie) refresh(p *Problem) {
	s := tie.Solution
	var sum twofold
	for j, x := range s.X {
		s.X[j] = plain(x)
		sum.addProduct(p.columns[j].Cost, x)
	}
	s.Objective = plain(sum.value())
	for i := range s.RowValue {
		v, _ := p.activity(i, s.X)
		s.RowValue[i] = plain(v)
	}
}
