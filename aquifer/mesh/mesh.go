package mesh

import "github.com/paulmach/orb"

// Domain is what is to be meshed: an outline with holes, interior lines and points.
type Domain struct {
	Outer  orb.Ring   // outline; closed or open, any orientation [m]
	Holes  []orb.Ring // impermeable; closed or open, any orientation [m]
	Lines  []Line     // interior lines; may cross, touch, overlap the outline or reach beyond it (the part outside is dropped)
	Points []Point    // must become nodes
}

// Line is a polyline that must be made of mesh edges; closed when its first point equals its last.
type Line struct {
	Path orb.LineString // [m]
	Size float64        // wanted edge length on it; 0 = none [m]
	Name string         // for messages
}

// Point is a place that must become a node.
type Point struct {
	At   orb.Point // [m]
	Size float64   // wanted edge length there; 0 = none [m]
	Name string    // for messages
}

// Tensor is a symmetric positive tensor, the transmissivity of a region.
type Tensor struct {
	Txx float64 // [m²/d]
	Txy float64 // [m²/d]
	Tyy float64 // [m²/d]
}

// Options steer Build. The zero value is 20,000 nodes with the defaults stated at each field.
type Options struct {
	Nodes    int     // nodes wanted at least, about; 0 = 20,000
	Coarsest float64 // largest edge length wanted; overrides Nodes when > 0 [m]
	Growth   float64 // growth of edge length per distance from points and lines that ask for a size; 0 = 0.15 [-]

	// DetailGrowth is the growth from the short segments of rings and of lines that ask for no size: detail of a coast is no reason
	// for fine triangles far from it; 0 = the larger of 0.5 and Growth [-].
	DetailGrowth float64

	MinAngleDeg float64 // smallest angle wanted; 0 = 25, at most 33 [°]
	MaxNodes    int     // budget; 0 = 4 times the nodes estimated plus 50,000, but at most 20 times Nodes or 500,000
	Tolerance   float64 // nearer vertices are brought together; 0 = 1e-8 of the outline's diagonal [m]

	// Sizes are places that want finer triangles than the domain's own points and lines ask for.
	Sizes []Size

	// Metric gives the transmissivity tensor of the region that holds the point; called once a region. nil = isotropic.
	Metric func(at orb.Point) Tensor
}

// Size is a place with the edge length wanted there.
type Size struct {
	At     orb.Point // [m]
	Edge   float64   // wanted edge length [m]
	Growth float64   // of the edge length per distance from it; 0 = Options.Growth [-]
}

// Mesh is a conforming Delaunay triangulation in flat arrays.
type Mesh struct {
	X, Y       []float64 // nodes; given vertices and points keep exactly their coordinates [m]
	Triangles  []int32   // three nodes a triangle, counter-clockwise
	Neighbours []int32   // three triangles a triangle, number k opposite vertex k; -1 outside
	Constraint []uint8   // per triangle: bit k set when the edge opposite vertex k lies on the outline or on a line
	Region     []int32   // region per triangle
	Regions    []Region
	Parts      int // number of parts of the domain not joined to each other by triangles

	PointNode    []int32       // node of each of Domain.Points
	LineEdges    [][]LineEdge  // per entry of Domain.Lines: its mesh edges in order along the line, those inside the domain only
	OutlineEdges []OutlineEdge // outline edges ring by ring, in order along the given ring

	Quality Quality
	Notes   []Note

	nodeStart []int32 // NodeTriangles: start per node in nodeTris, length nodes+1
	nodeTris  []int32
	locator   locator
	metrics   []metric // per region; nil = Euclidean everywhere
	sharp     []bool   // per triangle: at a sharp corner of the input; told for poor and encroaching ones only
}

// Region is a connected set of triangles bounded by lines and outline.
type Region struct {
	At        orb.Point // a point inside [m]
	Area      float64   // [m²]
	Triangles int
	Part      int // the connected part of the domain that it belongs to
}

// LineEdge is a mesh edge on a line, in the line's direction. Position along the line: segment index and fraction of it.
type LineEdge struct {
	A, B                 int32   // nodes, in the direction of the path
	SegmentA, SegmentB   int32   // index of the path's segment that A, B are on: from Path[Segment] to Path[Segment+1]
	FractionA, FractionB float64 // place on that segment, 0 at its start [-]
}

// OutlineEdge is a mesh edge on the outline with the domain on the left of A->B.
type OutlineEdge struct {
	A, B                 int32
	Ring                 int32   // 0 the outer ring, i the hole i-1
	Segment              int32   // index of the segment in the ring as given: from its vertex Segment to the next (cyclic)
	FractionA, FractionB float64 // place of A and B on that segment, 0 at its start as given [-]
}

// Quality says how good the mesh is.
type Quality struct {
	Nodes, Triangles  int
	MinAngleDeg       float64 // smallest angle of all [°]
	MinAngleFreeDeg   float64 // smallest angle of the triangles away from sharp input corners [°]
	WantedAngleDeg    float64 // what was asked [°]
	PoorAtSharpInput  int     // triangles below the wanted angle that a sharp input angle or snapping width explains
	PoorOther         int     // others below the wanted angle
	ObtuseShare       float64 // triangles with an angle above 90 degrees [-]
	EncroachedLeft    int     // constrained edges that face an angle above 90 degrees (in the region's metric)
	EncroachedAtSharp int     // of these, at sharp input corners
	BudgetHit         bool    // MaxNodes stopped the refinement
	Coarsest          float64 // largest edge length used in the size field [m]
	Tolerance         float64 // tolerance used [m]
}

// Note tells of something that was changed or dropped.
type Note struct {
	Text string
	At   orb.Point // [m]
}
