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
	Place    int32 // node of the worst place; -1 where it does not apply
}

// State is the field under given rates.
type State struct {
	Rates []float64 // one a well [m³/d]
	Base  []float64 // head at every node without pumping [m]
	Heads []float64 // head at every node at the rates [m]
	Rows  []Row
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

// Base returns the heads without pumping, solved once.
func (f *Field) Base(ctx context.Context) ([]float64, error) {
	if f.base == nil {
		h, err := f.Model.Heads(ctx, nil)
		if err != nil {
			return nil, err
		}
		f.base = h
	}
	return f.base, nil
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

// Sensitivities makes the adjoint solves for all rows at the worst places of heads h (base heads where nothing pumps), and for capture
// by every feature where asked.
func (f *Field) Sensitivities(ctx context.Context, drawdown []float64, o Options) (*Linear, error) {
	base, err := f.Base(ctx)
	if err != nil {
		return nil, err
	}
	fs := make([]Functional, 0, len(f.watched)+len(f.outlets))
	place := make([]int32, len(f.watched))
	for i, x := range f.watched {
		place[i] = -1
		if x.worst != nil {
			place[i] = worstOf(x.worst, drawdown)
			x.functional.Quantity = f.Model.HeadAt(place[i])
			x.functional.Direct = f.casing(place[i])
		}
		fs = append(fs, x.functional)
	}
	if o.Capture {
		for _, out := range f.outlets {
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
	solved, err := Solve(ctx, f.Model, fs, wanted, each, o.Progress)
	if err != nil {
		return nil, err
	}
	zero := make([]float64, len(f.Wells))
	lin := &Linear{Distinct: solved.Distinct, Reciprocity: reciprocity(solved, pointRow, len(f.node))}
	for i, x := range f.watched {
		r := Row{Receptor: x.receptor, Well: x.well, Linear: x.worst == nil, Place: place[i], Base: fs[i].Value(base, zero)}
		r.Slope = make([]float64, len(f.node))
		for w := range f.node {
			r.Slope[w] = solved.At[i][w]
			if fs[i].Direct != nil {
				r.Slope[w] -= fs[i].Direct[w]
			}
		}
		lin.Rows = append(lin.Rows, r)
	}
	if o.Capture {
		for k, out := range f.outlets {
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

// Changes solves the full model at the rates and returns the state with each row's change; slopes are not filled.
func (f *Field) Changes(ctx context.Context, rates []float64) (*State, error) {
	base, err := f.Base(ctx)
	if err != nil {
		return nil, err
	}
	heads := base
	if sinks := f.Sinks(rates); len(sinks) > 0 {
		if heads, err = f.Model.Heads(ctx, sinks); err != nil {
			return nil, err
		}
	}
	s := &State{Rates: append([]float64(nil), rates...), Base: base, Heads: heads}
	drawdown := make([]float64, len(heads))
	for n := range heads {
		drawdown[n] = base[n] - heads[n]
	}
	zero := make([]float64, len(rates))
	for _, x := range f.watched {
		r := Row{Receptor: x.receptor, Well: x.well, Linear: x.worst == nil, Place: -1}
		fn := x.functional
		if x.worst != nil {
			r.Place = worstOf(x.worst, drawdown)
			fn.Quantity, fn.Direct = f.Model.HeadAt(r.Place), f.casing(r.Place)
		}
		r.Base = fn.Value(base, zero)
		r.Change = r.Base - fn.Value(heads, rates)
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
	solved, err := Solve(ctx, f.Model, fs, f.node, nil, nil)
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
