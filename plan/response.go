package plan

import "context"

// Response is what the planner knows of the aquifer: the receptors' changes and how they answer to the wells, linearised at At.
type Response struct {
	Wells []string  // ids, the columns
	At    []float64 // rates at which values and slopes hold, one a well [m³/d]
	Rows  []Row
	// WellHeads is the head at each well's node at At, from a full solve [m]; nil when not known.
	WellHeads []float64
}

// Row is one receptor quantity in one operating state. Change = base value - value; for a linear row the change at rates Q is
// exactly Slope·Q, otherwise Change + Slope·(Q - At) is a tangent that never exceeds the true change.
type Row struct {
	Receptor    string // id of the receptor; empty for a well's own row
	Well        string // id of the well whose bore this row is about: change = drawdown in the bore with the linear loss, without the quadratic
	State       string
	Realisation int
	Base        float64   // value without any pumping, in Unit
	Change      float64   // at At, in Unit
	Slope       []float64 // d change/d rate, one a well, in Unit per m³/d
	Linear      bool
	Local       bool   // the change is not convex in the rates: a tangent holds near its rates only, and a plan that it bounds is locally best
	Unit        string // m, m3/d or 1
	Place       string // for a worst place: where it is
}

// Model gives a linearisation of the aquifer at any rates. The planner owns the loop that asks for new ones: rates hold one rate for
// each of Brief.Wells, in their order [m³/d], and the response must be At these rates. Where every row is linear it is asked twice.
type Model interface {
	Linearise(ctx context.Context, rates []float64) (*Response, error)
}
