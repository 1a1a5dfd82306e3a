package adjoint

import (
	"context"
	"fmt"
	"math"

	"springbound/aquifer"
)

// Errors holds the estimated discretisation errors of a field's rows at a state: computed value less exact one, for the site as it is
// entered. They say nothing of how well the site's parameters are known.
type Errors struct {
	Rows      []RowError
	Indicator []float64 // per node: sum over rows of the absolute part of the error that its surroundings add, over the accuracy wanted, each row weighted by its own error over it [-]

	FineNodes int     // nodes of the finer mesh
	Cycles    int     // cycles of the slowest batch of solves
	Left      float64 // largest share of a first residual that the cycles have left [-]
}

// RowError is the discretisation error of one row.
type RowError struct {
	BaseError   float64   // of the value without pumping [the row's unit]
	ChangeError float64   // of the change at the state's rates [the row's unit]
	ChangeBound float64   // twice the sum of the absolute values of the terms that the difference between the meshes is made of [the row's unit]
	SlopeBound  []float64 // twice the sum of the absolute terms of each slope's; nil where not asked for [the row's unit per m³/d]
	SlopeError  []float64 // of d change/d rate, one a well [the row's unit per m³/d]
	Size        float64   // sum of the absolute contributions of the wells to the change, what accuracy is relative to; |change| where no slopes are asked for [the row's unit]
}

// ErrorOptions steer Errors.
type ErrorOptions struct {
	Accuracy float64 // wanted of each change, relative; 0 = DefaultAccuracy [-]
	Workers  int     // processors to use; 0 = all; results do not depend on it
	Progress func(done, total int)

	SlopeBounds bool // a bound for each slope as well: one more solve a well
	ChangesOnly bool // no slopes, bounds and indicator: two solves for all rows together
}

// DefaultAccuracy is what a change is wanted to be good to, relative [-].
const DefaultAccuracy = 0.005

// remaining is the error of the coarse mesh over the difference between the coarse and the finer mesh's results, 1/(1 - 2^-2), for an
// error that falls by four when every triangle is cut into four (Richardson 1911).
const remaining = 4.0 / 3

// slowest is the same for an error that falls by no more than two, as beside the worst corners: what the bound allows for.
const slowest = 2.0

// comparison is what Errors works on.
type comparison struct {
	f, fine *Field
	finer   *aquifer.Finer
	state   *State
	o       ErrorOptions
	system  *aquifer.FineSystem

	fineBase, fineState *aquifer.Settled
	coarseDrawdown      []float64
	fineDrawdown        []float64
	difference          []float64 // of drawdowns, over the finer nodes
	springs             [][]int32 // per spring: triangles of the patch where both fields are logarithms about it
	corners             []cornerError
	pairs               *pairNorms
	out                 *Errors
}

// Errors estimates the discretisation error of every row at a state by comparison with the mesh of which every triangle is cut into four, on
// which nothing is factored. See the package documentation for the method. A spring's conductance that was found from its measured flow is taken as
// given.
func (f *Field) Errors(ctx context.Context, state *State, o ErrorOptions) (*Errors, error) {
	if !(o.Accuracy >= 0) {
		return nil, fmt.Errorf("adjoint: the accuracy wanted is %v; it must be 0 (default) or above", o.Accuracy)
	}
	if o.Accuracy == 0 {
		o.Accuracy = DefaultAccuracy
	}
	finer, err := f.Model.Finer(ctx, f.readBores(state), o.Workers)
	if err != nil {
		return nil, err
	}
	fine, err := f.finerField(finer)
	if err != nil {
		return nil, err
	}
	c := &comparison{f: f, fine: fine, finer: finer, state: state, o: o, out: &Errors{FineNodes: len(finer.Mesh.X)}}
	if err := c.states(ctx); err != nil {
		return nil, err
	}
	if err := c.changes(); err != nil {
		return nil, err
	}
	if o.ChangesOnly {
		return c.out, nil
	}
	return c.out, c.influences(ctx)
}

// readBores lists the nodes of wells in whose own bore some row reads the level: their equivalent radii enter.
func (f *Field) readBores(state *State) (nodes []int32) {
	for i, x := range f.watched {
		direct := x.functional.Direct
		if x.worst != nil {
			direct = f.casing(state.Rows[i].Place)
		}
		for w, d := range direct {
			if d != 0 {
				nodes = append(nodes, f.node[w])
			}
		}
	}
	return nodes
}

// finerField joins the finer model with the same wells and rows.
func (f *Field) finerField(finer *aquifer.Finer) (*Field, error) {
	fine, err := NewField(finer.Model, f.Wells, f.Receptors)
	if err != nil {
		return nil, err
	}
	var rows []watched
	for _, x := range fine.watched {
		if x.receptor >= 0 {
			rows = append(rows, x)
		}
	}
	for _, x := range f.watched {
		if x.receptor < 0 {
			rows = append(rows, watched{receptor: -1, well: x.well, functional: fine.boreLevel(x.well)})
		}
	}
	fine.watched, fine.Switching = rows, f.Switching
	return fine, nil
}

// states finds the state without pumping and the drawdown on the finer mesh.
func (c *comparison) states(ctx context.Context) error {
	base, state := c.state.BaseState, c.state.State
	start := c.finer.ProlongHeads(base.Heads)
	off := c.finer.OffAt(start)
	x := [][]float64{unknowns(c.finer.Model, start)}
	if err := c.solve(ctx, c.finer.System(base, off), x, [][]float64{c.finer.Unpumped(off)}, aquifer.SolvedFinely); err != nil {
		return err
	}
	c.fineBase = c.finer.State(c.finer.Whole(x[0]), off)
	off = c.finer.OffAt(c.finer.ProlongHeads(state.Heads))
	c.fineState = c.finer.State(nil, off)
	c.system = c.finer.System(state, off)
	c.coarseDrawdown = c.state.drawdown()
	x[0] = unknowns(c.finer.Model, c.finer.Prolong(c.coarseDrawdown))
	if err := c.solve(ctx, c.system, x, [][]float64{c.finer.Pumped(c.f.Sinks(c.state.Rates), c.fineBase, c.fineState)}, aquifer.SolvedFinely); err != nil {
		return err
	}
	c.fineDrawdown = c.finer.Spread(x[0])
	c.difference = c.finer.Difference(c.coarseDrawdown, c.fineDrawdown)
	c.fineState.Heads = make([]float64, len(c.fineDrawdown))
	for n, s := range c.fineDrawdown {
		c.fineState.Heads[n] = c.fineBase.Heads[n] - s
	}
	return nil
}

// solve improves fields and keeps the count.
func (c *comparison) solve(ctx context.Context, sys *aquifer.FineSystem, x, b [][]float64, share float64) error {
	left, cycles, err := sys.Improve(ctx, x, b, share, c.o.Workers)
	c.out.Left, c.out.Cycles = math.Max(c.out.Left, left), max(c.out.Cycles, cycles)
	return err
}

// changes compares the rows' values.
func (c *comparison) changes() error {
	zero := make([]float64, len(c.f.Wells))
	for i := range c.fine.watched {
		row, x := &c.state.Rows[i], &c.fine.watched[i]
		fn, _, err := x.at(c.fine, c.fineState, c.fineDrawdown)
		if err != nil {
			return err
		}
		atBase, _, err := x.at(c.fine, c.fineBase, c.fineDrawdown)
		if err != nil {
			return err
		}
		change := 0.0
		if x.river > 0 && len(c.fineState.Off) > 0 {
			change = atBase.Value(c.fineBase.Heads, zero) - fn.Value(c.fineState.Heads, c.state.Rates)
		} else { // the same weights in both states: of drawdowns, so that nothing of the heads' own remainder is left
			change = fn.Value(c.fineDrawdown, zero) - fn.Quantity.Constant
			for w, d := range fn.Direct {
				change -= d * c.state.Rates[w]
			}
		}
		c.out.Rows = append(c.out.Rows, RowError{
			BaseError:   remaining * (row.Base - atBase.Value(c.fineBase.Heads, zero)),
			ChangeError: remaining * (row.Change - change),
			Size:        math.Abs(row.Change),
		})
	}
	return nil
}

// unknowns takes a field at the nodes to the unknowns.
func unknowns(m *aquifer.Model, field []float64) []float64 {
	out := make([]float64, m.Unknowns())
	for n, v := range field {
		if u := m.Unknown(int32(n)); u >= 0 {
			out[u] = v
		}
	}
	return out
}
