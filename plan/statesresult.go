package plan

// StateResult is one operating state's part of a plan for several of them. The report's wells, receptors, tables and quotas are those of
// the default state.
type StateResult struct {
	Name           string      `json:"name"`
	Default        bool        `json:"default"`
	Days           *float64    `json:"days_d_per_yr"` // null: not stated
	Months         []int       `json:"months"`        // empty: not stated
	Weight         float64     `json:"aim_weight_share"`
	RechargeFactor float64     `json:"recharge_factor"`
	Demand         *float64    `json:"demand_m3_per_d"`
	DemandPrice    *float64    `json:"demand_shadow_price"`
	DemandRange    *PriceRange `json:"demand_price_range"`
	Total          float64     `json:"total_rate_m3_per_d"`
	Binds          []string    `json:"binds"` // in words: limits, lowest levels and quotas that hold this state's rates
	WorstMargin    *float64    `json:"worst_headroom_share"`
	WorstLimit     string      `json:"worst_limit"`

	PumpingEnergy *EnergyTotal     `json:"pumping_energy"` // null where a well that runs lacks a figure
	Wells         []StateWell      `json:"wells"`
	Receptors     []ReceptorResult `json:"receptors"`
	Sensitivities Table            `json:"sensitivities"`
	Quotas        []QuotaResult    `json:"quotas"` // per hour and per day; yearly ones stand once for all states
}

// YearQuota is a yearly quota over several operating states: sums are of days times rates, as a mean rate over the year.
type YearQuota struct {
	States []string    `json:"states"` // that it counts
	Quota  QuotaResult `json:"quota"`
}

// StateWell is a well's line in one operating state.
type StateWell struct {
	ID               string   `json:"id"`
	Mode             string   `json:"mode"` // decided, fixed, off; off too where no licence is for the state's months
	Rate             float64  `json:"rate_m3_per_d"`
	Running          float64  `json:"running_rate_m3_per_d"`
	Volume           *float64 `json:"volume_m3_per_yr"` // in the state's days; null where they are not stated
	AtBound          string   `json:"at_bound"`         // "", min, max
	ShadowPrice      float64  `json:"shadow_price"`
	StaticLevel      float64  `json:"static_level_m"`
	PumpingLevel     float64  `json:"pumping_level_m"`
	LowestLevel      *float64 `json:"lowest_allowed_level_m"`
	LevelMargin      *float64 `json:"level_margin_m"`
	LevelShadowPrice float64  `json:"level_shadow_price"`

	RateRange  *PriceRange `json:"rate_price_range"`
	LevelRange *PriceRange `json:"level_price_range"`
}
