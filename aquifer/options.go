package aquifer

import (
	"fmt"

	"springbound/aquifer/mesh"
)

// Options steer the mesh. The zero value is the documented default.
type Options struct {
	Nodes    int     // nodes wanted at least; 0 = 20,000
	Finest   float64 // edge length wanted at wells, receptors and springs; 0 = by the size of the site and the node count [m]
	Coarsest float64 // largest edge length; 0 = by the node count [m]
	Growth   float64 // growth of edge length per distance; 0 = 0.10 [-]
	Scale    float64 // multiplies finest size, coarsest size and growth together, for refinement studies; 0 = 1 [-]
	MaxNodes int     // budget; 0 = the mesher's own
	// Sizes are places that want a finer mesh than wells, receptors and lines ask for, such as goal-oriented refinement finds them; a
	// well's or spring's own least size holds against them. The number of nodes wanted does not count theirs: give Coarsest as well.
	Sizes []mesh.Size

	Workers int   // processors to use; 0 = all; results do not depend on it
	Memory  int64 // what the job may hold at once; what needs more is refused before the work starts; 0 = not checked [bytes]

	Progress func(stage string, done, total int) // optional; called from one goroutine

	// Alter, where set, changes terms after assembly, to prove that the audit sees it; tests only.
	Alter func(Terms)
}

// Validate names the first option that is out of range.
func (o Options) Validate() error {
	for _, v := range []struct {
		name  string
		value float64
		max   float64
	}{{"finest", o.Finest, 1e6}, {"coarsest", o.Coarsest, 1e7}, {"growth", o.Growth, 1}, {"scale", o.Scale, 64}} {
		if !(v.value >= 0 && v.value <= v.max) {
			return fmt.Errorf("aquifer: option %s is %v; allowed: 0 (default) to %v", v.name, v.value, v.max)
		}
	}
	if o.Nodes < 0 || o.MaxNodes < 0 || o.Memory < 0 {
		return fmt.Errorf("aquifer: options nodes %d, max nodes %d and memory %d must not be negative", o.Nodes, o.MaxNodes, o.Memory)
	}
	return nil
}

func (o Options) report(stage string, done, total int) {
	if o.Progress != nil {
		o.Progress(stage, done, total)
	}
}

const (
	// defaultNodes is the least number of nodes: on the benchmark problems it keeps heads away from wells within 0.2 %.
	defaultNodes = 20000
	// defaultGrowth: at a fixed growth g the discrete logarithm is off by about g²/5 of its slope, two thousandths at 0.1; 0.15 is the most
	// that keeps pairs of near wells within 0.3 %.
	defaultGrowth = 0.10
	// detailGrowth is the growth from the outline's and the zones' own short segments: the head is smooth there but at corners, which are refined
	// by themselves.
	detailGrowth = 0.5
	// finestShare of the square root of the area is the default edge length at wells and receptors: 1 m a kilometre.
	finestShare = 1e-3
	// nodesPerPlace is what the default spends around each well or receptor before the finest size is raised: a circle that grows from the
	// finest size at 0.1 a distance to a thousand times that takes about 1,500.
	nodesPerPlace = 1500
	// defaultMost bounds what the default spends in all; a job with hundreds of places that needs more says so in [mesh].
	defaultMost = 150000
	// lengthsPerLayer is how many edge lengths resolve the leakage length sqrt(T c) beside the border of a lake or a leaky zone, where the
	// head bends within that length: its exponential is then off by less than a thousandth.
	lengthsPerLayer = 5
	// ringsBetween is how many edge lengths lie between a place and its nearest neighbour or line: the discrete logarithm differs from the
	// exact one by about (edge length/distance)²/8 of 1/(2 pi T), a thousandth of a well's drawdown at twelve.
	ringsBetween = 12
	// radiusPerEdge is r0 over the edge length of a regular triangulation, exp(-gamma)/sqrt(12): where the refinement stops.
	radiusPerEdge = 0.1620793920
)
