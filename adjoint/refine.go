package adjoint

import (
	"context"
	"fmt"
	"math"

	"springbound/aquifer"
	"springbound/wells"
)

// RefineOptions steer Refine.
type RefineOptions struct {
	Accuracy float64         // wanted of every row's change, relative to the sum of the wells' absolute contributions to it; 0 = DefaultAccuracy [-]
	MaxNodes int             // budget of nodes; 0 = DefaultBudget
	Start    aquifer.Options // of the first mesh; Nodes and Growth 0 = few and steep, since the refinement does the rest

	Progress func(round, nodes int, worst float64) // optional: after each round, with the largest error over what is wanted
}

// Refined is a field on a mesh that was refined for its rows.
type Refined struct {
	Field  *Field
	State  *State  // at the rates
	Errors *Errors // on the last mesh
	Rounds []Round
	Met    bool // every change is estimated to be as accurate as wanted

	// Budget tells that the budget of nodes kept the last mesh from being as fine as the estimate asked for.
	Budget bool
}

// Round is one mesh on the way.
type Round struct {
	Nodes int
	Worst float64 // largest estimated error over what is wanted [-]
	Row   int     // where; -1: nothing changes
}

const (
	// DefaultBudget of nodes is what a laptop solves in seconds.
	DefaultBudget = 300_000
	// startNodes and startGrowth make a first mesh that sees every feature and no more.
	startNodes  = 1000
	startGrowth = 0.4
	// mostRounds bounds the meshes made: errors fall by eight a round where they have to.
	mostRounds = 8
	// estimateTrust: an estimate up to this share of the accuracy wanted meets it, since it is good to about a quarter.
	estimateTrust = 0.8
	// aimShare of that is what a round aims at: the indicator is worth so much.
	aimShare = 0.7
)

// Refine builds models of a site until every row's change at the rates is estimated to be as accurate as wanted, or the budget of nodes is
// spent, which is told in the result and is no error. Each round makes a new mesh, finer where the terms of the round before are large (sizing
// below). Results do not depend on the number of processors. Errors: those of aquifer.Build, NewField, Changes and Errors.
func Refine(ctx context.Context, site *aquifer.Site, ws []wells.Well, rs []wells.Receptor, rates []float64, o RefineOptions) (*Refined, error) {
	if !(o.Accuracy >= 0) || o.MaxNodes < 0 {
		return nil, fmt.Errorf("adjoint: accuracy %v and budget %d of a refinement must not be negative", o.Accuracy, o.MaxNodes)
	}
	if o.Accuracy == 0 {
		o.Accuracy = DefaultAccuracy
	}
	if o.MaxNodes == 0 {
		o.MaxNodes = DefaultBudget
	}
	mesh := o.Start
	if mesh.Nodes == 0 {
		mesh.Nodes = startNodes
	}
	if mesh.Growth == 0 {
		mesh.Growth = startGrowth
	}
	copied := *site
	copied.Nodes, copied.Outlines = Requests(ws, rs)
	out := &Refined{}
	for round := 0; ; round++ {
		if err := out.measure(ctx, &copied, ws, rs, rates, mesh, o.Accuracy); err != nil {
			return nil, fmt.Errorf("adjoint: refinement, mesh %d: %w", round+1, err)
		}
		last := out.Rounds[round]
		if o.Progress != nil {
			o.Progress(round, last.Nodes, last.Worst)
		}
		out.Met = last.Worst <= estimateTrust
		if out.Met || round == mostRounds-1 || out.Budget {
			return out, nil
		}
		if mesh.Coarsest == 0 {
			mesh.Coarsest = out.Field.Model.Mesh.Quality.Coarsest
		}
		s := newSizing(out.Field.Model.Mesh, out.Errors.Indicator)
		c := s.forShare(math.Max(leastRound, aimShare*estimateTrust/last.Worst))
		c, out.Budget = s.within(c, float64(o.MaxNodes))
		mesh.Sizes = append(mesh.Sizes, s.sizes(c)...)
	}
}

// measure makes the model of a round and estimates its errors.
func (r *Refined) measure(ctx context.Context, site *aquifer.Site, ws []wells.Well, rs []wells.Receptor, rates []float64, mesh aquifer.Options, accuracy float64) error {
	m, err := aquifer.Build(ctx, site, mesh)
	if err != nil {
		return err
	}
	if r.Field, err = NewField(m, ws, rs); err != nil {
		return err
	}
	if r.State, err = r.Field.Changes(ctx, rates); err != nil {
		return err
	}
	r.Field.Switching = len(r.State.State.Off) > 0 || len(r.State.BaseState.Off) > 0
	if r.Errors, err = r.Field.Errors(ctx, r.State, ErrorOptions{Accuracy: accuracy, Workers: mesh.Workers}); err != nil {
		return err
	}
	now := Round{Nodes: len(m.Mesh.X), Row: -1}
	for i, e := range r.Errors.Rows {
		if wanted := accuracy * e.Size; wanted > 0 {
			if v := math.Abs(e.ChangeError) / wanted; v > now.Worst {
				now.Worst, now.Row = v, i
			}
		}
	}
	r.Rounds = append(r.Rounds, now)
	return nil
}
