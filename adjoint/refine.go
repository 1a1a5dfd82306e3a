package adjoint

import (
	"context"
	"fmt"
	"math"

	"springbound/aquifer"
	"springbound/aquifer/mesh"
	"springbound/wells"
)

// RefineOptions steer Refine.
type RefineOptions struct {
	Accuracy float64         // wanted of every receptor's change, relative; 0 = DefaultAccuracy [-]
	MaxNodes int             // budget of nodes; 0 = DefaultBudget
	Start    aquifer.Options // of the first mesh; Nodes and Growth 0 = few and steep, since the refinement does the rest

	Progress func(round, nodes int, worst float64) // optional: after each round, with the largest error over what is wanted
}

// Refined is a field on a mesh that was refined for its receptors.
type Refined struct {
	Field  *Field
	State  *State
	Errors *Errors
	Rounds []Round
	Met    bool // every change is estimated to be as good as wanted
	Budget bool // the budget of nodes stands in the way of more
}

// Round is one mesh on the way.
type Round struct {
	Nodes int
	Worst float64 // largest estimated error over what is wanted [-]
	Row   int     // where
}

const (
	// DefaultBudget of nodes is what a laptop solves in seconds.
	DefaultBudget = 500_000
	// startNodes and startGrowth make a first mesh that sees every feature and no more.
	startNodes  = 2000
	startGrowth = 0.25
	// mostRounds bounds the meshes made: errors fall by four or more a round.
	mostRounds = 8
	// aim is the share of the error wanted that a round aims at: indicators are worth so much.
	aim = 0.7
	// leastRound is the largest reduction of error that one round asks for: what it knows of the error's places is from the mesh before.
	leastRound = 1.0 / 16
	// leastFactor bounds how much finer a place becomes in one round.
	leastFactor = 1.0 / 5
	// sizeGrowth is the growth of edge length from the places that are refined: neighbours ask for themselves where they need to.
	sizeGrowth = 0.25
	// unchanged is the share of its edge length above which a place is left as it is.
	unchanged = 0.95
	// estimateTrust: an estimate up to this share of the accuracy wanted meets it; the signed estimate is good to about a quarter.
	estimateTrust = 0.8
)

// Refine builds models of a site until every receptor's change at the rates is estimated to be as accurate as wanted, or the budget of nodes is
// spent. Each round makes a new mesh whose edge lengths fall where the terms of the error are large: with an error of g h² per area, g
// from the terms of the round before, the least number of nodes for a given error has h in proportion to g^(-1/4). Rows of wells' own levels
// count as receptors do.
func Refine(ctx context.Context, site *aquifer.Site, ws []wells.Well, rs []wells.Receptor, rates []float64, o RefineOptions) (*Refined, error) {
	if !(o.Accuracy >= 0) || o.MaxNodes < 0 {
		return nil, fmt.Errorf("adjoint: accuracy %v and budget %d of a refinement must not be negative", o.Accuracy, o.MaxNodes)
	}
	if o.MaxNodes == 0 {
		o.MaxNodes = DefaultBudget
	}
	mo := o.Start
	if mo.Nodes == 0 {
		mo.Nodes = startNodes
	}
	if mo.Growth == 0 {
		mo.Growth = startGrowth
	}
	out := &Refined{}
	for round := 0; ; round++ {
		if err := out.build(ctx, site, ws, rs, rates, mo, o); err != nil {
			return nil, err
		}
		last := out.Rounds[round]
		if o.Progress != nil {
			o.Progress(round, last.Nodes, last.Worst)
		}
		out.Met = last.Worst <= estimateTrust
		if out.Met || round == mostRounds-1 || out.Budget {
			return out, nil
		}
		mo.Coarsest = out.coarsest(mo)
		sizes, limited := out.Field.sizes(out.Errors.Indicator, math.Max(leastRound, aim*estimateTrust/last.Worst), o.MaxNodes)
		mo.Sizes, out.Budget = append(mo.Sizes, sizes...), limited
	}
}

// build makes the model of a round and estimates its errors.
func (r *Refined) build(ctx context.Context, site *aquifer.Site, ws []wells.Well, rs []wells.Receptor, rates []float64, mo aquifer.Options, o RefineOptions) error {
	copied := *site
	copied.Nodes, copied.Outlines = Requests(ws, rs)
	m, err := aquifer.Build(ctx, &copied, mo)
	if err != nil {
		return err
	}
	if r.Field, err = NewField(m, ws, rs); err != nil {
		return err
	}
	if r.State, err = r.Field.Changes(ctx, rates); err != nil {
		return err
	}
	if r.Errors, err = r.Field.Errors(ctx, r.State, ErrorOptions{Accuracy: o.Accuracy, Workers: mo.Workers}); err != nil {
		return err
	}
	now := Round{Nodes: len(m.Mesh.X), Row: -1}
	for i, e := range r.Errors.Rows {
		if wanted := orDefaultAccuracy(o.Accuracy) * e.Size; wanted > 0 {
			if v := math.Abs(e.ChangeError) / wanted; v > now.Worst {
				now.Worst, now.Row = v, i
			}
		}
	}
	r.Rounds = append(r.Rounds, now)
	return nil
}

// coarsest keeps the coarsest size of the first mesh.
func (r *Refined) coarsest(mo aquifer.Options) float64 {
	if mo.Coarsest > 0 {
		return mo.Coarsest
	}
	return r.Field.Model.Mesh.Quality.Coarsest
}

// sizes asks for finer edge lengths so that the sum of the indicator falls to a share of what it is, within a budget of nodes; limited says
// that the budget allows no more.
func (f *Field) sizes(indicator []float64, share float64, budget int) (out []mesh.Size, limited bool) {
	m := f.Model.Mesh
	n := len(m.X)
	area, sum := make([]float64, n), make([]float64, n) // per node: a third of its triangles' areas and indicators
	for t, v := range indicator {
		a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
		size := ((m.X[b]-m.X[a])*(m.Y[c]-m.Y[a]) - (m.Y[b]-m.Y[a])*(m.X[c]-m.X[a])) / 6
		for _, k := range [3]int32{a, b, c} {
			area[k] += size
			sum[k] += v / 3
		}
	}
	length := make([]float64, n) // edge length at the node: that of equilateral triangles of its volume
	weight := make([]float64, n) // (g h^4)^(-1/4)/h, so that a factor on h is its product with one number
	for k := range length {
		length[k] = math.Sqrt(2 * area[k] / math.Sqrt(3))
		if sum[k] > 0 {
			weight[k] = math.Pow(sum[k], -0.25)
		} else {
			weight[k] = math.Inf(1)
		}
	}
	factor := func(k int, c float64) float64 { return math.Max(leastFactor, math.Min(1, c*weight[k])) }
	total := 0.0
	for _, v := range sum {
		total += v
	}
	left := func(c float64) float64 {
		v := 0.0
		for k := range sum {
			g := factor(k, c)
			v += sum[k] * g * g
		}
		return v
	}
	nodes := func(c float64) float64 {
		v := 0.0
		for k := range sum {
			g := factor(k, c)
			v += 1 / (g * g)
		}
		return v
	}
	low, high := 0.0, 1.0
	for left(high) < share*total {
		high *= 2
	}
	for range 60 { // to rounding
		c := (low + high) / 2
		if left(c) <= share*total {
			low = c
		} else {
			high = c
		}
	}
	c := high
	if nodes(c) > float64(budget) {
		limited = true
		high = c
		for nodes(high) > float64(budget) {
			high *= 2
			if high > 1e300 {
				break
			}
		}
		low = c
		for range 60 {
			mid := (low + high) / 2
			if nodes(mid) > float64(budget) {
				low = mid
			} else {
				high = mid
			}
		}
		c = high
	}
	for k := range sum {
		if g := factor(k, c); g < unchanged {
			out = append(out, mesh.Size{At: f.Model.At(int32(k)), Edge: g * length[k], Growth: sizeGrowth})
		}
	}
	return out, limited
}

func orDefaultAccuracy(a float64) float64 {
	if a == 0 {
		return DefaultAccuracy
	}
	return a
}
