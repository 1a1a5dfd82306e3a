package adjoint

import (
	"context"
	"math"

	"springbound/aquifer"
)

// Row is one receptor, or one well's own level, at the rates that were asked for.
type Row struct {
	Receptor int       // index into Field.Receptors; -1 for a well's own level
	Well     int       // index into Field.Wells for a well's own level; -1 for a receptor
	Base     float64   // value without pumping, in the receptor's unit
	Change   float64   // base - value at the rates, from the heads of a full solve
	Slope    []float64 // d change/d rate, one a well [unit per m³/d]
	Linear   bool
	Local    bool  // not convex where features switch: a tangent is no bound
	Place    int32 // node of the worst place; -1 where it does not apply
}

// State is the field under given rates.
type State struct {
	Rates []float64 // one a well [m³/d]
	Base  []float64 // head at every node without pumping [m]
	Heads []float64 // head at every node at the rates [m]
	Rows  []Row

	BaseState, State *aquifer.Settled // which features act without pumping and at the rates
}

// Sinks turns rates into sinks of the model; zero rates are left out.
func (f *Field) Sinks(rates []float64) []aquifer.Sink {
	var s []aquifer.Sink
	for w, q := range rates {
		if q != 0 {
			s = append(s, aquifer.Sink{Node: f.node[w], Rate: q})
		}
	}
	return s
}

// Node returns the mesh node of a well.
func (f *Field) Node(well int) int32 { return f.node[well] }

// Below returns the drawdown of a well's casing below its node per unit rate, ln(r0/rw)/(2 pi T*) [d/m²].
func (f *Field) Below(well int) float64 { return f.below[well] }

// Base returns the heads without pumping, settled once.
func (f *Field) Base(ctx context.Context) ([]float64, error) {
	st, err := f.BaseState(ctx)
	if err != nil {
		return nil, err
	}
	return st.Heads, nil
}

// BaseState returns the steady state without pumping, found once.
func (f *Field) BaseState(ctx context.Context) (*aquifer.Settled, error) {
	if f.base == nil {
		st, err := f.Model.Settle(ctx, nil)
		if err != nil {
			return nil, err
		}
		f.base = st
	}
	return f.base, nil
}

// at is the functional of a row in a state: a worst place is that of the largest drawdown, and a river that has lost contact gives a constant
// there. A spring keeps its form below its outlet, so that its loss stays a convex function of the rates; whoever shows its flow cuts it off
// at zero.
func (x *watched) at(f *Field, st *aquifer.Settled, drawdown []float64) (Functional, int32, error) {
	fn := x.functional
	if x.worst != nil {
		place := worstOf(x.worst, drawdown)
		fn.Quantity, fn.Direct = f.Model.HeadAt(place), f.casing(place)
		return fn, place, nil
	}
	if x.river > 0 && len(st.Off) > 0 {
		q, err := st.ReachOutflow(x.river-1, x.reach)
		fn.Quantity = q
		return fn, -1, err
	}
	return fn, -1, nil
}

// Linear holds what one pass of adjoint solves gives: sensitivities of every receptor and well level, and the capture table.
type Linear struct {
	Rows        []Row     // Change is 0: at zero rates
	Capture     []Capture // one a feature whose flow answers to heads
	Distinct    int
	Reciprocity float64 // largest |z_i[j] - z_j[i]| over the larger of the two, over all pairs of watched nodes; NaN: no pair
}

// Capture is one feature's part in supplying the wells.
type Capture struct {
	Feature aquifer.Outlet
	Share   []float64 // change of its flow into the aquifer per unit rate, one a well [-]
}

// Options of Sensitivities.
type Options struct {
	Field    func(row int, influence []float64) error // gets each row's influence over the nodes [unit per m³/d]
	Capture  bool
	Progress func(done, total int)
}

// Sensitivities makes the adjoint solves for all rows in a state, and for capture by every feature where asked; nil is the state without
// pumping.
func (f *Field) Sensitivities(ctx context.Context, state *State, o Options) (*Linear, error) {
	base, err := f.BaseState(ctx)
	if err != nil {
		return nil, err
	}
	st, drawdown := base, []float64(nil)
	if state != nil {
		st, drawdown = state.State, state.drawdown()
	}
	fs := make([]Functional, 0, len(f.watched)+len(f.outlets))
	place := make([]int32, len(f.watched))
	for i := range f.watched {
		fn, at, err := f.watched[i].at(f, st, drawdown)
		if err != nil {
			return nil, err
		}
		place[i] = at
		fs = append(fs, fn)
	}
	if o.Capture {
		for _, out := range f.outletsIn(st) {
			fs = append(fs, Functional{Name: out.Name, Quantity: out.Outflow})
		}
	}
	wanted := append([]int32(nil), f.node...)
	var pointRow []int // functionals that are the head at one node
	for i := range f.watched {
		if q := fs[i].Quantity; len(q.Nodes) == 1 && q.Weights[0] == 1 {
			pointRow = append(pointRow, i)
			wanted = append(wanted, q.Nodes[0])
		}
	}
	var each func(int, []float64) error
	if o.Field != nil {
		each = func(i int, z []float64) error {
			if i < len(f.watched) {
				return o.Field(i, z)
			}
			return nil
		}
	}
	solved, err := Solve(ctx, f.Model, st, fs, wanted, each, o.Progress)
	if err != nil {
		return nil, err
	}
	zero := make([]float64, len(f.Wells))
	lin := &Linear{Distinct: solved.Distinct, Reciprocity: reciprocity(solved, pointRow, len(f.node))}
	for i, x := range f.watched {
		atBase, _, err := x.at(f, base, drawdown)
		if err != nil {
			return nil, err
		}
		if x.worst != nil {
			atBase = fs[i]
		}
		r := Row{Receptor: x.receptor, Well: x.well, Linear: f.isLinear(&x), Local: f.Switching && x.local, Place: place[i], Base: atBase.Value(base.Heads, zero)}
		r.Slope = make([]float64, len(f.node))
		for w := range f.node {
			r.Slope[w] = solved.At[i][w]
			if fs[i].Direct != nil {
				r.Slope[w] -= fs[i].Direct[w]
			}
		}
		if f.Alter != nil {
			f.Alter(i, r.Slope)
		}
		lin.Rows = append(lin.Rows, r)
	}
	if o.Capture {
		for k, out := range f.outletsIn(st) {
			z := solved.At[len(f.watched)+k][:len(f.node)]
			lin.Capture = append(lin.Capture, Capture{Feature: out, Share: append([]float64(nil), z...)})
		}
	}
	return lin, nil
}

// worstOf returns the node with the largest drawdown, the first of equals; nil drawdown gives the first node.
func worstOf(nodes []int32, drawdown []float64) int32 {
	best := nodes[0]
	if drawdown == nil {
		return best
	}
	for _, n := range nodes {
		if drawdown[n] > drawdown[best] {
			best = n
		}
	}
	return best
}

func reciprocity(s *Solved, rows []int, wells int) float64 {
	worst := math.NaN()
	for a := range rows {
		for b := a + 1; b < len(rows); b++ {
			ab, ba := s.At[rows[a]][wells+b], s.At[rows[b]][wells+a]
			if size := math.Max(math.Abs(ab), math.Abs(ba)); size > 0 {
				if d := math.Abs(ab-ba) / size; !(d <= worst) {
					worst = d
				}
			}
		}
	}
	return worst
}

// drawdown is the fall of head at every node [m].
func (s *State) drawdown() []float64 {
	d := make([]float64, len(s.Heads))
	for n := range d {
		d[n] = s.Base[n] - s.Heads[n]
	}
	return d
}

// isLinear tells whether a row's change is linear in the rates.
func (f *Field) isLinear(x *watched) bool { return x.worst == nil && !f.Switching }

// outletsIn lists the outlets as they act in a state.
func (f *Field) outletsIn(st *aquifer.Settled) []aquifer.Outlet {
	if len(st.Off) == 0 {
		return f.outlets
	}
	return st.Outlets()
}

// Changes settles the full model at the rates and returns the state with each row's change; slopes are not filled.
func (f *Field) Changes(ctx context.Context, rates []float64) (*State, error) {
	base, err := f.BaseState(ctx)
	if err != nil {
		return nil, err
	}
	st := base
	if sinks := f.Sinks(rates); len(sinks) > 0 {
		if st, err = f.Model.Settle(ctx, sinks); err != nil {
			return nil, err
		}
	}
	s := &State{Rates: append([]float64(nil), rates...), Base: base.Heads, Heads: st.Heads, BaseState: base, State: st}
	drawdown := s.drawdown()
	zero := make([]float64, len(rates))
	for i := range f.watched {
		x := &f.watched[i]
		fn, place, err := x.at(f, st, drawdown)
		if err != nil {
			return nil, err
		}
		atBase, _, err := x.at(f, base, drawdown)
		if err != nil {
			return nil, err
		}
		r := Row{Receptor: x.receptor, Well: x.well, Linear: f.isLinear(x), Local: f.Switching && x.local, Place: place}
		r.Base = atBase.Value(base.Heads, zero)
		r.Change = r.Base - fn.Value(st.Heads, rates)
		s.Rows = append(s.Rows, r)
	}
	return s, nil
}

// Tangents fills the slopes of the rows that are not linear, each at its own worst place; places solved before are remembered.
func (f *Field) Tangents(ctx context.Context, rows []Row) error {
	var fs []Functional
	var missing []int32
	if f.placeSlope == nil {
		f.placeSlope = map[int32][]float64{}
	}
	for _, r := range rows {
		if r.Linear {
			continue
		}
		if _, ok := f.placeSlope[r.Place]; !ok {
			f.placeSlope[r.Place] = nil
			missing = append(missing, r.Place)
			fs = append(fs, Functional{Name: "worst place", Quantity: f.Model.HeadAt(r.Place), Direct: f.casing(r.Place)})
		}
	}
	solved, err := Solve(ctx, f.Model, f.Model, fs, f.node, nil, nil)
	if err != nil {
		return err
	}
	for i, n := range missing {
		slope := append([]float64(nil), solved.At[i]...)
		for w := range fs[i].Direct {
			slope[w] -= fs[i].Direct[w]
		}
		f.placeSlope[n] = slope
	}
	for i := range rows {
		if !rows[i].Linear {
			rows[i].Slope = f.placeSlope[rows[i].Place]
		}
	}
	return nil
}
