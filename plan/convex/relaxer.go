package convex

import (
	"context"
	"fmt"
	"math"
)

// Relaxer keeps the elastic programme of a problem, so that a series of questions about the same rows that may give way, all of them
// or one alone, pays for the setup once and each solve starts where the last one ended.
type Relaxer struct {
	original  *Problem
	relaxable []Relaxable
	e         *elastic
	t         *session
	pivots    int // of sessions before the present one

	cost       []float64 // by helper, in the scale of the session
	costFactor float64
}

// NewRelaxer copies p. Errors are those of LeastRelaxation.
func NewRelaxer(p *Problem, relaxable []Relaxable) (*Relaxer, error) {
	if err := checkRelaxable(p, relaxable); err != nil {
		return nil, err
	}
	r := &Relaxer{original: p.Clone(), relaxable: append([]Relaxable(nil), relaxable...)}
	r.build()
	return r, nil
}

func (r *Relaxer) build() {
	r.e = newElastic(r.original, r.relaxable)
	r.t = newSession(r.e.p)
	r.t.e.startFromRows()
	r.cost, r.costFactor = make([]float64, len(r.e.helpers)), r.t.s.costFactor
	for k, h := range r.e.helpers {
		r.cost[k] = r.t.s.cost[h.column]
	}
}

// AddRow adds a row that always holds; the next solve starts from the basis of the last. Errors are those of Problem.AddRow.
func (r *Relaxer) AddRow(row Row) error {
	if _, err := r.original.AddRow(row); err != nil {
		return err
	}
	basis := r.t.e.basis()
	r.pivots += r.t.e.iterations
	r.build()
	r.t.e.start(basis)
	return nil
}

// Iterations is the number of pivots so far.
func (r *Relaxer) Iterations() int { return r.pivots + r.t.e.iterations }

// Least finds the least weighted sum of relaxations of those rows of the list for which takes is true. Alone and AloneAmount are NaN
// in the result, or +Inf where not even all of these rows together do.
func (r *Relaxer) Least(ctx context.Context, takes func(k int) bool) *Relaxation {
	out := &Relaxation{Status: r.solve(ctx, takes), Rows: make([]RowRelaxation, len(r.relaxable))}
	nothing := math.NaN()
	if out.Status == Infeasible {
		nothing = math.Inf(1)
	}
	for k := range out.Rows {
		out.Rows[k] = RowRelaxation{Row: r.relaxable[k].Row, Alone: nothing, AloneAmount: nothing}
	}
	if out.Status != Optimal {
		return out
	}
	x := report(r.t, Optimal).X
	out.X = append([]float64(nil), x[:r.original.Columns()]...)
	for _, h := range r.e.helpers {
		value := math.Max(0, x[h.column])
		by := value * h.size
		out.Total += h.weight * by
		if row := &out.Rows[h.owner]; h.upper {
			row.Upper = by
		} else {
			row.Lower = by
		}
		switch {
		case h.of < 0:
		case h.upperOf:
			out.X[h.of] += value
		default:
			out.X[h.of] -= value
		}
	}
	return out
}

// solve lets the rows give way for which takes is true.
func (r *Relaxer) solve(ctx context.Context, takes func(k int) bool) Status {
	dearest := 0.0
	for k, h := range r.e.helpers {
		upper := 0.0
		if takes(h.owner) {
			upper = h.most
			dearest = math.Max(dearest, math.Abs(r.cost[k]))
		}
		r.t.setColumn(h.column, 0, upper)
		r.t.s.cost[h.column] = r.cost[k]
	}
	r.t.s.costFactor = r.costFactor
	if dearest > 0 {
		r.t.multiplyCost(powerOfTwo(1 / dearest))
	}
	return r.optimise(ctx)
}

func (r *Relaxer) optimise(ctx context.Context) Status {
	limit := Options{}.iterationLimit(r.e.p.Rows(), r.e.p.allColumns())
	return r.t.zoom(ctx, limit, r.t.solve(ctx, limit))
}

// solveOne lets one row give way, at the same cost on both sides: the values that it can take lie on one side of its bounds.
func (r *Relaxer) solveOne(ctx context.Context, row int) Status {
	for _, h := range r.e.helpers {
		upper, cost := 0.0, 0.0
		if h.owner == row {
			upper, cost = h.most, 1
		}
		r.t.setColumn(h.column, 0, upper)
		r.t.s.cost[h.column] = cost
	}
	return r.optimise(ctx)
}

// Alone finds for each listed row of the list the least weighted relaxation of it that makes the problem feasible when no other gives
// way, and its amount: zero where the problem is feasible, +Inf when none does, NaN from where the search was stopped. The status is
// Optimal or what stopped it.
//
// A proof that nothing is feasible stays one when a row gives way that it does not use, so that every proof settles the rows outside it
// at once. Of the others, an optimum with one row giving way settles those that meet all bounds when they take its place along an edge
// of the optimum: what is left of the one falls along a line of which the prices say that nothing is below it. Only the rest is solved for.
func (r *Relaxer) Alone(ctx context.Context, which []int) (weighted, amount []float64, status Status) {
	a := &aloneSearch{r: r, which: which, hopeless: make([]bool, len(r.relaxable)), done: make([]bool, len(which))}
	a.weighted, a.amount = make([]float64, len(which)), make([]float64, len(which))
	for k, i := range which {
		if i < 0 || i >= len(r.relaxable) {
			panic(fmt.Sprintf("convex: Relaxer.Alone: no row %d in a list of %d", i, len(r.relaxable)))
		}
		a.weighted[k], a.amount[k] = math.NaN(), math.NaN()
	}
	status = a.run(ctx)
	return a.weighted, a.amount, status
}

// aloneSearch is the state of Alone.
type aloneSearch struct {
	r                *Relaxer
	which            []int
	weighted, amount []float64
	done             []bool // by place in which
	hopeless         []bool // by row of the list
}

func (a *aloneSearch) run(ctx context.Context) Status {
	switch status := a.r.solveOne(ctx, nobody); status {
	case Infeasible:
		a.useProof()
	case Optimal: // feasible, or by so little that it does not count alone
	default:
		return status
	}
	for k, row := range a.which {
		if a.hopeless[row] && !a.done[k] {
			a.settle(k, math.Inf(1), math.Inf(1))
		}
		if a.done[k] {
			continue
		}
		switch status := a.r.solveOne(ctx, row); status {
		case Infeasible:
			a.settle(k, math.Inf(1), math.Inf(1))
			a.useProof()
		case Optimal:
			weighted, amount := 0.0, 0.0
			for _, h := range a.r.e.helpers {
				if h.owner == row {
					by := math.Max(0, a.r.t.value(h.column)) * h.size
					weighted, amount = weighted+by*h.weight, amount+by
				}
			}
			a.settle(k, weighted, amount)
			a.exchange(row)
		default:
			return status
		}
	}
	return Optimal
}

func (a *aloneSearch) settle(k int, weighted, amount float64) {
	a.weighted[k], a.amount[k], a.done[k] = weighted, amount, true
}

// useProof marks the rows that the last proof does not use.
func (a *aloneSearch) useProof() {
	e := a.r.t.e
	e.m.combineRows(e.byCol, e.everyRow(e.proof), e.dr, e.byRow)
	used := make([]bool, len(a.hopeless))
	for _, h := range a.r.e.helpers {
		if e.byCol[h.column] < 0 { // raising the helper takes from the proof
			used[h.owner] = true
		}
	}
	for row := range a.hopeless {
		a.hopeless[row] = a.hopeless[row] || !used[row]
	}
}

// exchange lets each open row take the place of the one that gives way in the present optimum.
func (a *aloneSearch) exchange(row int) {
	e, p := a.r.t.e, -1
	for _, h := range a.r.e.helpers {
		if h.owner == row && e.place[h.column] == Basic && e.x[h.column] > exchangeLeast {
			p = h.column
		}
	}
	if p < 0 {
		return
	}
	e.pivotRow(p)
	rate := append([]float64(nil), e.alpha[:e.n]...)
	helper := make([]int, len(a.hopeless)) // by row: the helper that takes from the one in place
	for i := range helper {
		helper[i] = -1
	}
	for k, h := range a.r.e.helpers {
		if e.place[h.column] != Basic && h.owner != row && -rate[h.column] > steadyPivot {
			helper[h.owner] = k
		}
	}
	for k, other := range a.which {
		if a.done[k] || a.hopeless[other] || helper[other] < 0 {
			continue
		}
		h := a.r.e.helpers[helper[other]]
		if by, ok := a.reaches(p, h.column, rate[h.column], h.most); ok {
			a.settle(k, by*h.size*h.weight, by*h.size)
		}
	}
}

// reaches raises helper column q until p, which changes by rate for each unit of it, is zero. It returns the amount that this takes, and
// whether all else stays within its bounds.
func (a *aloneSearch) reaches(p, q int, rate, most float64) (amount float64, ok bool) {
	e := a.r.t.e
	e.pivotColumn(q)
	if !(math.Abs(e.stepOf(p)-rate) <= sharpTolerance*math.Abs(rate)) {
		return 0, false
	}
	t := e.x[p] / -rate
	amount = t * a.r.t.s.col[q]
	ok = amount <= most
	e.eachBasic(func(v int, step float64) {
		if v == p {
			return
		}
		x := e.x[v] + t*step
		by, bound := outside(x, e.lower[v], e.upper[v])
		ok = ok && by <= sharpTolerance*math.Max(1, math.Abs(bound))
	})
	return amount, ok
}

// nobody stands for no row.
const nobody = -1

// exchangeLeast is the scaled relaxation below which its rounding would count.
const exchangeLeast = 1e-3
