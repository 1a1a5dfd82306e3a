package aquifer

import "github.com/paulmach/orb"

// Basis says how a value came about.
type Basis string

// The bases of a value.
const (
	Measured  Basis = "measured"
	Estimated Basis = "estimated"
	Assumed   Basis = "assumed"
	Unstated  Basis = ""
)

// Parameter is a value with its stated range and where it comes from.
type Parameter struct {
	Best   float64  // in the unit that the field's comment states
	Low    *float64 // nil: no range stated
	High   *float64 // nil: no range stated
	Basis  Basis
	Source string
}

// Site is everything that is modelled, in a plane of true metres.
type Site struct {
	Extent     orb.Polygon // ring 0 the outline, further rings impermeable holes [m]
	Background Zone        // properties where no zone says otherwise; its Area is unused
	Edges      []Edge
	Zones      []Zone
	Rivers     []River
	Lakes      []Lake
	Springs    []Spring
	Nodes      []NodeRequest // places that must be mesh nodes: wells, receptor points
	Outlines   []AreaRequest // polygons whose border must be mesh lines: wetlands
}

// NodeRequest asks for a mesh node at a place.
type NodeRequest struct {
	Name   string    // for messages and for finding the node: "well W4", "receptor P1"
	At     orb.Point // [m]
	Radius float64   // radius of the bore; 0 when there is none [m]
	Well   bool      // a well: no head may be prescribed and no exchange may be lumped here
	// PresentRate is the present rate of a well, used only to turn a spring's measured flow into its conductance [m³/d].
	PresentRate float64
}

// AreaRequest asks that a polygon's border be made of mesh lines.
type AreaRequest struct {
	Name string
	Area orb.Polygon // [m]
}

// EdgeKind is the condition on a stretch of the outline.
type EdgeKind int

// The kinds of edge. Where no edge is given there is no flow.
const (
	PrescribedHead EdgeKind = iota
	PrescribedFlux
	HeadDependent
)

// String returns the word used in files: prescribed_head, prescribed_flux, head_dependent.
func (k EdgeKind) String() string {
	return [...]string{"prescribed_head", "prescribed_flux", "head_dependent"}[k]
}

// Edge is a stretch of the outline with a condition.
type Edge struct {
	Name          string
	Kind          EdgeKind
	Path          orb.LineString // runs along the outline or a hole's ring; closed (first == last) for a whole ring [m]
	Levels        []float64      // PrescribedHead, HeadDependent: one level for all, or one a vertex of Path, linear between [m]
	Flux          float64        // PrescribedFlux: into the aquifer per length [m²/d]
	Conductance   Parameter      // HeadDependent: per length of edge [m/d]
	Saline        bool           // PrescribedHead: salt water stands here; the level is equivalent freshwater head
	AvailableFlow *float64       // what can be induced from this edge at most [m³/d]
	Source        string
}

// Anisotropy turns a zone's transmissivity into a tensor.
type Anisotropy struct {
	Ratio    float64 // transmissivity along the major axis over that along the minor axis, >= 1 [-]
	AngleDeg float64 // direction of the major axis, counter-clockwise from the plane's x axis [°]
}

// Zone is a polygon with its own properties. A nil field is not stated here. Where zones overlap the later one wins,
// property by property.
type Zone struct {
	Name              string
	Area              orb.MultiPolygon // [m]
	Transmissivity    *Parameter       // geometric mean sqrt(T_major T_minor) where anisotropic [m²/d]
	Anisotropy        *Anisotropy
	Recharge          *Parameter // [m/d]
	LeakageResistance *Parameter // c [d]
	SourceHead        *float64   // level that leakage comes from [m]
	Top               *float64   // elevation of the aquifer's top [m]
	Storage           *Parameter // [-]
}

// River exchanges water along a line: width/bed_resistance x (water level - head) per length.
type River struct {
	Name          string
	Path          orb.LineString // [m]
	WaterLevels   []float64      // one for all, or one a vertex of Path, linear between [m]
	BedLevels     []float64      // likewise; empty: not stated [m]
	Width         float64        // [m]
	BedResistance Parameter      // bed thickness / vertical conductivity [d]
	AvailableFlow *float64       // [m³/d]
	Source        string
}

// Lake exchanges water over an area: (water level - head)/bed_resistance per area.
type Lake struct {
	Name          string
	Area          orb.Polygon // [m]
	WaterLevel    float64     // [m]
	BedLevel      *float64    // [m]
	BedResistance Parameter   // [d]
	AvailableFlow *float64    // [m³/d]
	Source        string
}

// Spring lets water out at a point: conductance x (head on a circle of the effective radius - outlet level).
type Spring struct {
	Name            string
	At              orb.Point  // [m]
	OutletLevel     float64    // [m]
	Conductance     *Parameter // [m²/d]; nil: found from MeasuredFlow
	MeasuredFlow    *float64   // flow measured under present pumping [m³/d]
	EffectiveRadius float64    // [m]
	Source          string
}
