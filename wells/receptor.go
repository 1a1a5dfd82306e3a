package wells

import "github.com/paulmach/orb"

// Kind says what is protected and so which quantity is watched.
type Kind int

// The kinds of receptor, each with its value and its change. The change is always base minus value, the fall of the value
// against no pumping, so that pumping makes it larger.
const (
	PointLevel    Kind = iota // level of the aquifer's head at a point [m]; change: drawdown
	NeighbourWell             // the same, at a neighbour's well
	Wetland                   // mean level beneath a polygon [m]; change: mean drawdown in the aquifer beneath it
	WetlandWorst              // level at the worst place beneath a polygon; change: largest drawdown [m]
	SpringFlow                // outflow of a spring [m³/d]; change: flow lost
	RiverReach                // flow from the aquifer to a river along a reach [m³/d]; change: flow lost by the river
	EdgeFlow                  // flow out of the aquifer through an edge [m³/d]; change: flow lost
	SalineFront               // gradient between two points, (level at first - level at second)/distance [-]; change: its fall
	PumpingLevel              // level in a pumped well [m]; change: drawdown in the well
)

var kindWords = [...]string{"point", "neighbour_well", "wetland", "wetland_worst", "spring", "river_reach", "edge_flow", "saline_front", "pumping_level"}

// String returns the word used in files.
func (k Kind) String() string { return kindWords[k] }

// KindWords returns the words of all kinds in the order of the constants.
func KindWords() []string { return append([]string(nil), kindWords[:]...) }

// ParseKind returns the kind with the given word.
func ParseKind(word string) (Kind, bool) {
	for i, w := range kindWords {
		if w == word {
			return Kind(i), true
		}
	}
	return 0, false
}

// Unit returns the unit of the kind's value and change: m, m3/d or 1 (a gradient).
func (k Kind) Unit() string {
	switch k {
	case SpringFlow, RiverReach, EdgeFlow:
		return "m3/d"
	case SalineFront:
		return "1"
	}
	return "m"
}

// Receptor is what must be protected.
type Receptor struct {
	ID           string
	Name         string
	Kind         Kind
	At           orb.Point      // PointLevel, NeighbourWell: the place; SalineFront: the inland point [m]
	To           orb.Point      // SalineFront: the point toward the salt water [m]
	Area         orb.Polygon    // Wetland, WetlandWorst [m]
	Reach        orb.LineString // RiverReach: stretch of the river, nil is the whole river [m]
	Feature      string         // name of the spring, river or edge, or id of the well (PumpingLevel)
	Owner        string
	Use          string
	Source       string
	Date         string
	FieldChecked bool
	Outside      bool // outside the model: listed as such, never dropped, nothing computed
}

// Quantity says which figure of a receptor a limit bounds.
type Quantity int

// The quantities.
const (
	Change      Quantity = iota // fall of the value against the baseline, in the receptor's unit
	Value                       // the value itself
	ShareOfBase                 // change as a share of the undisturbed value [-]
)

// String returns the word used in files: change, value, share_of_base.
func (q Quantity) String() string { return [...]string{"change", "value", "share_of_base"}[q] }

// Sense is the direction of a limit.
type Sense int

// The senses.
const (
	AtMost Sense = iota
	AtLeast
)

// String returns the word used in files: at_most, at_least.
func (s Sense) String() string { return [...]string{"at_most", "at_least"}[s] }

// Baseline is the state that a change is counted from.
type Baseline int

// The baselines.
const (
	NoPumping       Baseline = iota // no well pumps
	PresentPumping                  // every well at its present rate (a blank counts as 0 and is warned about)
	OthersAtLicence                 // existing users at their licensed rates, own wells off
)

// String returns the word used in files: no_pumping, present, others_at_licence.
func (b Baseline) String() string {
	return [...]string{"no_pumping", "present", "others_at_licence"}[b]
}

// Counts says whose pumping a limit counts.
type Counts int

// Whose pumping counts.
const (
	Cumulative Counts = iota // own wells and existing users
	Own                      // own wells only
)

// String returns the word used in files: cumulative, own.
func (c Counts) String() string { return [...]string{"cumulative", "own"}[c] }

// Limit is a bound on a receptor's quantity; a receptor carries any number of them.
type Limit struct {
	ID       string
	Receptor string // id of the receptor
	Quantity Quantity
	Sense    Sense
	Value    float64 // in the receptor's unit; a share of 0.1 is ten per cent [-]
	Entered  string  // the value as the user wrote it, with its unit
	Baseline Baseline
	Counts   Counts
	State    string  // operating state; empty is the default state
	Reserve  float64 // share of the room that is kept back on purpose, [0, 1) [-]
	Source   string
	Date     string
}

// Licence binds wells to a holder and its quantities (many to many).
type Licence struct {
	ID       string
	Holder   string
	Purpose  string
	Wells    []string // ids
	PerHour  *float64 // [m³/h]
	PerDay   *float64 // [m³/d]
	PerYear  *float64 // [m³] in a year of 365.25 days or as the licence's months allow
	StartDay string   // first day of the licence's year, as MM-DD
	Months   []int    // months of use, 1 to 12; empty is the whole year
	Source   string
}

// OperatingState is a way the field is run: average, peak month, drought. One state is the default. Several are planned together, each
// with rates of its own; their days share the year out.
type OperatingState struct {
	Name           string
	Default        bool
	Demand         *float64 // required total [m³/d]
	RechargeFactor float64  // multiplies every recharge [-]
	Days           float64  // days a year; 0: not stated [d]
	Months         []int    // calendar months that it covers, 1 to 12; empty: not stated
}

// Observation is a measured level or flow, compared with the state under present pumping.
type Observation struct {
	ID      string
	Kind    Kind // PointLevel, SpringFlow or RiverReach
	At      orb.Point
	Feature string
	Value   float64 // level elevation [m] or flow [m³/d]
	Date    string
	Source  string
}
