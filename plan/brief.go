package plan

import "springbound/wells"

// Aim is what the plan makes as large or as small as it can.
type Aim string

// The aims.
const (
	MostYield         Aim = "most-yield"
	MostHeadroom      Aim = "most-headroom"
	LeastEnergy       Aim = "least-energy"        // least pumping energy of the decided wells for the demand
	ClosestToRequests Aim = "closest-to-requests" // least sum of ((rate - requested)/largest rate)²
)

// Quota bounds the sum of pumped rates over a group of wells.
type Quota struct {
	Name     string
	Wells    []string
	PerHour  *float64 // [m³/h]
	PerDay   *float64 // [m³/d]
	PerYear  *float64 // [m³] in a year of 365.25 days
	StartDay string   // first day of the quota's year, as MM-DD
	Months   []int    // months in which it holds, 1 to 12; empty is the whole year
	Source   string
}

// Brief is what the plan is asked for.
type Brief struct {
	Aim       Aim
	Demand    *float64 // required total of the decided wells' pumped rates in the default state, unless that state has its own [m³/d]; nil: none
	Quotas    []Quota
	Wells     []wells.Well
	Receptors []wells.Receptor
	Limits    []wells.Limit
	Licences  []wells.Licence
	States    []wells.OperatingState // several are planned together, each with rates of its own
	WellTerms []WellTerm             // one a well, in the order of Wells

	AtMostRunning *int        // how many of the decided wells may pump at once; nil: any number
	Together      []WellGroup // wells that run together or not at all
	Exclude       []WellGroup // of each group at most one well runs

	StateTerms [][]WellTerm // of each of States, where there are several: WellTerms in it; nil: the same in every state

	expanded *expansion // set on a brief that stands for several operating states
}

// WellGroup is a group of wells that a rule about running is about.
type WellGroup struct {
	Wells  []string
	Source string
}

// WellTerm is what turns a head at a well's node into a level in the bore without losses.
type WellTerm struct {
	OwnDrawdown float64 // ln(r0/rw)/(2 pi T*): drawdown of the casing below the node per rate [d/m²]
	StaticLevel float64 // level without any pumping [m]
}
