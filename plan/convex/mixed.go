package convex

import (
	"context"
	"fmt"
	"math"
)

// MixedProblem is a linear programme some of whose columns may not take every value between their bounds.
//
// A column of Integer must be a whole number. A column of SemiContinuous is zero or within its bounds: a well that is off, or pumps
// at least its least rate. Where the bounds take in zero that asks for nothing. A column may stand in both lists.
type MixedProblem struct {
	*Problem
	Integer        []int // indices of columns
	SemiContinuous []int // indices of columns
}

// BadIndex is the fault of a list that names a column twice or one that is not there.
const BadIndex Fault = 101

// Validate reports all faults of the two lists, and a Hessian, which mixed problems may not have, in a *DataError.
func (p *MixedProblem) Validate() error {
	var faults faultList
	if p.Quadratic() {
		faults.add(BadHessian, partProblem, 0, "", 0, "whole and zero-or-within columns do not go with a quadratic cost")
	}
	for _, list := range []struct {
		name    string
		columns []int
	}{{"Integer", p.Integer}, {"SemiContinuous", p.SemiContinuous}} {
		seen := map[int]bool{}
		for _, j := range list.columns {
			switch {
			case j < 0 || j >= p.Columns():
				faults.add(BadIndex, partColumn, j, "", float64(j), fmt.Sprintf("%s names a column that is not among the %d", list.name, p.Columns()))
			case seen[j]:
				faults.add(BadIndex, partColumn, j, p.columns[j].Name, float64(j), list.name+" names the column twice")
			}
			seen[j] = true
		}
	}
	return faults.err()
}

// MixedStatus says how SolveMixed ended.
type MixedStatus int

// The ways SolveMixed may end.
const (
	MixedOptimal    MixedStatus = iota + 1 // no plan is better by more than the gap asked for
	MixedFeasible                          // a plan, with a bound on what a better one could reach; Stopped says why it ended there
	MixedInfeasible                        // no plan meets all limits
	MixedUnbounded                         // a plan, and a direction that improves without end
	MixedUndecided                         // no plan was found before Stopped; Bound still holds
)

// String returns the name of the status.
func (s MixedStatus) String() string {
	switch s {
	case MixedOptimal:
		return "optimal"
	case MixedFeasible:
		return "feasible"
	case MixedInfeasible:
		return "infeasible"
	case MixedUnbounded:
		return "unbounded"
	case MixedUndecided:
		return "undecided"
	}
	return fmt.Sprintf("MixedStatus(%d)", int(s))
}

// DefaultMixedGap is the relative difference between plan and bound that counts as none: ten times what Certify allows between the
// two objectives of a linear programme would already be a difference in the data, so that this is the smallest honest one.
const DefaultMixedGap = 1e-9

// MixedOptions steer SolveMixed. The zero value is the documented default.
type MixedOptions struct {
	// Gap ends the search when no plan can be better by more than this share of the objective; 0 stands for DefaultMixedGap [-].
	Gap float64
	// NodeLimit ends the search after this many linear programmes in the tree; 0 stands for no limit.
	NodeLimit int
	// Start is a plan to begin with; its whole and zero-or-within columns are taken, rounded, and the rest solved for.
	Start []float64 // one for each column [-]
	// Proof keeps the tree with the prices of its leaves, so that CertifyMixed can recompute the bound from the data. Presolve,
	// cuts and the tightening of bounds are then left out, which makes the tree larger.
	Proof bool
	// Progress, when given, is called now and then from the calling goroutine.
	Progress func(MixedProgress)

	plain bool // no cuts, no neighbourhood search: the search within a search
}

// MixedProgress tells how far a search is.
type MixedProgress struct {
	Nodes     int     // linear programmes of the tree so far
	Open      int     // parts of the tree still to be looked at
	Found     bool    // a plan is known
	Objective float64 // of the best plan; meaningless without one [-]
	Bound     float64 // no plan is better [-]
}

// Validate returns an error that names the field at fault.
func (o MixedOptions) Validate(p *MixedProblem) error {
	if !(o.Gap >= 0 && o.Gap <= math.MaxFloat64) {
		return fmt.Errorf("convex: MixedOptions.Gap %v is not a finite number of at least zero", o.Gap)
	}
	if o.NodeLimit < 0 {
		return fmt.Errorf("convex: MixedOptions.NodeLimit %d is negative", o.NodeLimit)
	}
	if o.Start != nil && len(o.Start) != p.Columns() {
		return fmt.Errorf("convex: MixedOptions.Start has %d values for %d columns", len(o.Start), p.Columns())
	}
	for j, v := range o.Start {
		if !finite(v) {
			return fmt.Errorf("convex: MixedOptions.Start: value %v of column %d is not a finite number", v, j)
		}
	}
	return nil
}

// MixedSolution is the outcome of SolveMixed.
type MixedSolution struct {
	Status    MixedStatus
	Stopped   Status    // IterationLimit (the node limit), Interrupted or NumericalTrouble when that ended or marred the search, otherwise 0
	X         []float64 // value of each column, nil when no plan was found [-]
	Objective float64   // cost'X, NaN when no plan was found [-]
	Bound     float64   // no plan has a better objective; infinite when nothing is known [-]
	Gap       float64   // |Objective - Bound| / |Objective|, or per millionth of the objective's terms when that is more; infinite without a plan [-]
	Nodes     int       // linear programmes of the tree
	Pivots    int       // of all linear programmes together
	Cuts      int       // rows that were added at the root
	Presolve  Tightenings

	// Switching is the problem with every whole column fixed at its value and every zero-or-within column either fixed at zero or
	// within its bounds; Linear is its solution. Its prices hold at this switching only.
	Switching *Problem
	Linear    *Solution
	// Direction is, for MixedUnbounded, a direction in which the plan may be changed for ever.
	Direction *Ray

	proof *proofTree
}

// Tightenings counts what presolve did before the search. All of it is undone in the solution, which is that of the problem given.
type Tightenings struct {
	Bounds       int // bounds of columns made narrower
	Coefficients int // coefficients of rows made smaller
	Rows         int // rows found to ask for nothing
	Columns      int // columns found to have one value only
}

// SolveMixed finds the best plan of a problem with whole and zero-or-within columns.
//
// The plan is that of a linear programme, Solve at the final switching, so that it meets the limits as sharply as any; Bound comes
// from the tree, whose linear programmes are solved to the tolerances of the package. The error is not nil only for bad options or
// lists. On a cancelled context the best plan so far is returned with its bound. The result does not depend on time: the same
// input gives the same bytes unless the context ends the search.
//
// Method: presolve by bounds and coefficients (Savelsbergh 1994); mixed-integer rounding (Marchand & Wolsey 2001), Gomory's mixed-integer
// cuts (Gomory 1960) and lifted covers (Balas 1975, Zemel 1989) at the root; reliability branching (Achterberg, Koch & Martin 2005);
// dives and relaxation-induced neighbourhoods (Danna, Rothberg & Le Pape 2005); the dual simplex method throughout, each solve from
// the basis before.
func SolveMixed(ctx context.Context, p *MixedProblem, o MixedOptions) (*MixedSolution, error) {
	if err := p.Validate(); err != nil {
		return nil, err
	}
	if err := o.Validate(p); err != nil {
		return nil, err
	}
	if o.Gap == 0 {
		o.Gap = DefaultMixedGap
	}
	best := newIncumbent(p)
	if o.Start != nil {
		best.offerSwitching(ctx, o.Start)
	}
	whole := newCore(p)
	c, did, possible := whole, Tightenings{}, whole.boundsInOrder()
	if possible && !o.Proof {
		c, did, possible = whole.reduce()
	}
	s := newSearch(ctx, c, o, best)
	s.lift, s.from = func(x []float64) []float64 { return x }, c.origin
	if c != whole {
		s.lift = c.expand
	}
	if possible {
		s.run()
	} else {
		s.proof.start(p.Rows())
	}
	return conclude(ctx, p, s, did), nil
}
