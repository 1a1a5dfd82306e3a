package plan

import "springbound/plan/convex"

// planner holds what Make and Evaluate share: the brief looked up, the answers of the aquifer, the bounds, and the outcome of the
// optimisation where there was one.
type planner struct {
	setup  *setup
	oracle *oracle

	bounds       []*bound
	assessed     []string // of each limit: 'yes' or why not
	boundOfLimit []int    // index into bounds; -1: not assessed
	boundOfWell  []int    // index into bounds; -1: no lowest level

	curved       curved          // the aim where it is not linear; nil for a linear one
	aimValue     float64         // the largest value that the last programme reached; of a curved aim the negative of its least
	requestParts [][]requestPart // by well: what keeps its rate from its request

	cuts []cut // tangents of rows that are not linear, in the order in which they were added

	priced           bool
	share            float64   // t of most-headroom; 0 otherwise [-]
	wellPrice        []float64 // nil when nothing was optimised
	minHolds         []bool    // the lower bound holds the rate rather than the upper
	demandPrice      *float64
	notUnique        bool
	tieChosen        bool     // of plans as good the one nearest to the present rates was taken
	trading          []string // ids of wells whose rates differ in another plan as good
	demandRange      *PriceRange
	wellRange        []*PriceRange // nil when not known
	iterations       int
	certificate      *convex.Certificate // of the solution whose rates or whose conflict are shown; nil when nothing was optimised
	conflictVerified bool                // the irreducible set was proven afresh, member by member

	inService    inService // of the outages
	outOfService []bool    // of each well: out of service beyond the brief; nil: none
	runs         []bool    // of each well: it runs; nil: there is nothing to choose, or it is not chosen yet
	lastRates    []float64 // of the last round, where a search may begin
	search       search
	near         []float64     // by column: rates near which a curved aim is expected to be least; nil: not known
	firm         *FirmCapacity // nil when it was not asked for
	problem      *ProblemFile  // the last programme; nil when it was not asked for
	keepProblem  bool

	local bool // a limit on a row that is not linear bounds it from below: the plan is locally best
}

// cut is one tangent of one bound's row.
type cut struct {
	bound   *bound
	tangent tangent
}

// ownerKind says what a row of the programme stands for.
type ownerKind int

const (
	ofQuota ownerKind = iota
	ofDemand
	ofBound
)

// owner says what a row of the programme stands for.
type owner struct {
	kind  ownerKind
	index int // into quotas, demands or bounds
}

// programme is the linear programme of one round, with the meaning of its rows. Its columns are the decided wells in the order of
// the brief and, for most-headroom, the share t as the last one.
type programme struct {
	problem *convex.Problem
	owners  []owner
	share   int // column of t; -1: none

	size []float64 // by row, as far as asked for: see rowSize
	name []string
}
