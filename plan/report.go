package plan

// Report is the whole result: it is written as plan.json, and the workbook and the page are made from it alone.
// Every number carries its unit in its key; a nil pointer is 'not known' or 'not stated' and is written as null, never as zero.
type Report struct {
	Schema  string `json:"schema"`  // "springbound/plan"
	Version int    `json:"version"` // of the schema
	Program string `json:"program"` // program and its version

	Title       string   `json:"title"`
	Headline    string   `json:"headline"` // 'largest total rate that keeps the limits entered: ...'
	Aim         string   `json:"aim"`
	Status      string   `json:"status"`      // optimal, infeasible, not_converged, numerical_failure, given_rates
	ModelValid  bool     `json:"model_valid"` // false: a re-solve, a confined check or a well loss failed
	Invalid     []string `json:"invalid_because"`
	State       string   `json:"state"`
	Period      string   `json:"period"`      // "steady"
	Realisation int      `json:"realisation"` // 0: the best values
	PreparedFor string   `json:"prepared_for"`
	PreparedBy  string   `json:"prepared_by"`
	Reference   string   `json:"reference"`
	Plane       string   `json:"plane"` // working coordinates and how they were chosen
	Datum       string   `json:"vertical_datum"`
	RateUnit    string   `json:"rate_unit_shown"` // unit for rates in the workbook: m3/d, L/s, ...
	NotAssessed []string `json:"not_assessed"`    // what the model leaves out, what was not checked
	Cautions    []string `json:"cautions"`
	Findings    []string `json:"findings"` // warnings about the input
	TotalRate   float64  `json:"total_rate_m3_per_d"`
	Demand      *float64 `json:"demand_m3_per_d"`
	WorstMargin *float64 `json:"worst_headroom_share"` // smallest headroom as a share of its limit's room
	WorstLimit  string   `json:"worst_limit"`
	NotUnique   bool     `json:"other_plans_as_good"`
	DemandPrice *float64 `json:"demand_shadow_price"` // change of the aim per m³/d of demand; as it is, so mostly negative

	DemandRange *PriceRange `json:"demand_price_range"`

	PumpingEnergy *EnergyTotal  `json:"pumping_energy"` // null where a well up for decision lacks a figure
	Requests      *RequestTotal `json:"requests"`       // null but for closest-to-requests

	Wells                  []WellResult     `json:"wells"`
	Receptors              []ReceptorResult `json:"receptors"`
	Sensitivities          Table            `json:"sensitivities"`            // receptor unit per m³/d: rows receptors, columns wells
	SensitivityErrors      Table            `json:"sensitivity_errors"`       // estimated error of each sensitivity that the mesh alone makes, computed less exact; no rows when not estimated
	SensitivityErrorBounds Table            `json:"sensitivity_error_bounds"` // of the same, from terms that cannot cancel; no rows when not estimated
	Contributions          Table            `json:"contributions"`            // at the plan, in receptor unit
	Quotas                 []QuotaResult    `json:"quotas"`
	Capture                []Capture        `json:"capture"`
	CaptureWells           []string         `json:"capture_wells"` // column order of Capture[].ShareByWell
	Balances               []Balance        `json:"balances"`      // without pumping, and at the plan
	NoFlow                 []NoFlowStretch  `json:"no_flow_outline"`
	Switching              *Switching       `json:"switching"`          // which wells run; null when there was nothing to choose
	Firm                   *FirmCapacity    `json:"firm_capacity"`      // null when it was not asked for
	States                 []StateResult    `json:"states"`             // where several operating states are planned together; the sections above are then the default state's
	YearQuotas             []YearQuota      `json:"quotas_over_states"` // yearly quotas over several operating states: sums of days times rates
	Conflict               *Conflict        `json:"conflict"`           // why no plan exists; null when there is one
	Audit                  Audit            `json:"audit"`
	Checks                 []Check          `json:"checks"`
	HandFormula            *HandFormula     `json:"hand_formula"`
	Assumptions            []Assumption     `json:"assumptions"`
	Observations           []ObservationFit `json:"observations"`
	Mesh                   MeshInfo         `json:"mesh"`
	Inputs                 []InputFile      `json:"inputs"`
}

// WellResult is a well's line in the plan.
type WellResult struct {
	ID               string       `json:"id"`
	Name             string       `json:"name"`
	Owner            string       `json:"owner"`
	Mode             string       `json:"mode"`   // decided, fixed, off
	Others           bool         `json:"others"` // an existing user
	X                float64      `json:"x_m"`
	Y                float64      `json:"y_m"`
	Longitude        float64      `json:"longitude_deg"`
	Latitude         float64      `json:"latitude_deg"`
	RadiusM          float64      `json:"radius_m"`
	Rate             float64      `json:"rate_m3_per_d"`
	Running          float64      `json:"running_rate_m3_per_d"`
	DutyHours        float64      `json:"duty_hours_h_per_d"`
	Yearly           float64      `json:"volume_m3_per_yr"`
	Min              float64      `json:"min_m3_per_d"`
	Max              float64      `json:"max_m3_per_d"`
	MaxSource        string       `json:"max_source"`
	AtBound          string       `json:"at_bound"`     // "", min, max
	ShadowPrice      float64      `json:"shadow_price"` // change of the aim per m³/d by which the bound that holds the rate is loosened
	Present          *float64     `json:"present_m3_per_d"`
	Recent           *float64     `json:"recent_m3_per_d"`
	Licensed         *float64     `json:"licensed_m3_per_d"`
	Requested        *float64     `json:"requested_m3_per_d"`
	StaticLevel      float64      `json:"static_level_m"` // steady state without any pumping
	NodeLevel        float64      `json:"modelled_head_m"`
	OwnLogarithm     float64      `json:"own_drawdown_below_node_m"` // Q ln(r0/rw)/(2 pi T)
	OwnPerRate       float64      `json:"own_drawdown_per_rate_d_per_m2"`
	LinearLoss       float64      `json:"linear_loss_d_per_m2"`
	QuadraticLoss    float64      `json:"quadratic_loss_d2_per_m5"`
	WellLoss         float64      `json:"well_loss_m"`
	PumpingLevel     float64      `json:"pumping_level_m"`
	LowestLevel      *float64     `json:"lowest_allowed_level_m"`
	LowestReason     string       `json:"lowest_allowed_level_reason"`
	LevelMargin      *float64     `json:"level_margin_m"`
	LevelShadowPrice float64      `json:"level_shadow_price"`
	AquiferTop       *float64     `json:"aquifer_top_m"`
	DrawdownByWell   []float64    `json:"drawdown_per_rate_by_well_d_per_m2"` // at this well's node: one a well, the node's own included
	PumpingEnergy    *WellEnergy  `json:"pumping_energy"`                     // null where efficiency, delivery level or pumping level is not known
	Request          *WellRequest `json:"request"`                            // null but for closest-to-requests and a well up for decision
	Source           string       `json:"source"`

	RateRange  *PriceRange `json:"rate_price_range"` // of the bound that holds the rate; null where none does
	LevelRange *PriceRange `json:"level_price_range"`

	Discretisation *Discretisation `json:"discretisation"` // of the drawdown in the bore; null when not estimated
}

// Discretisation is how far the mesh alone makes a change wrong, for the site as entered: it says nothing of how well the site is known.
type Discretisation struct {
	Error    float64  `json:"estimated_error"` // computed less exact, in the unit of the change
	Bound    *float64 `json:"error_bound"`     // no cancelling: from the sum of the absolute values of the terms, in the unit of the change; null when not estimated
	Share    *float64 `json:"error_share"`     // of the sum of the absolute contributions, of the change where the bound is not estimated; null when nothing contributes
	Accuracy float64  `json:"accuracy_share"`  // asked for
	Met      bool     `json:"accuracy_met"`
}

// ReceptorResult is a receptor's line.
type ReceptorResult struct {
	ID             string          `json:"id"`
	Name           string          `json:"name"`
	Kind           string          `json:"kind"`
	Feature        string          `json:"feature"`     // spring, river or edge that it is about; for a pumping level the id of the well
	Unit           string          `json:"unit"`        // m, m3/d or 1
	ValueWord      string          `json:"value_word"`  // what the value is: 'level', 'spring flow', ...
	ChangeWord     string          `json:"change_word"` // what the change is: 'drawdown', 'loss of spring flow', ...
	Owner          string          `json:"owner"`
	Use            string          `json:"use"`
	Source         string          `json:"source"`
	Date           string          `json:"date"`
	FieldChecked   bool            `json:"field_checked"`
	Outside        bool            `json:"outside_model"`
	X              float64         `json:"x_m"`
	Y              float64         `json:"y_m"`
	Place          string          `json:"place"` // worst place, where it applies
	NoPumping      float64         `json:"value_no_pumping"`
	OthersRecent   *float64        `json:"value_others_recent"`   // own wells off, existing users at recent rates
	OthersLicensed *float64        `json:"value_others_licensed"` // own wells off, existing users at licensed rates
	Value          float64         `json:"value"`                 // at the plan
	Change         float64         `json:"change"`                // no pumping minus plan
	ChangeOwn      float64         `json:"change_own"`            // part of own wells
	ChangeOthers   float64         `json:"change_others"`         // part of existing users
	ChangeResolved float64         `json:"change_resolved"`       // from a full solve at the plan
	Discretisation *Discretisation `json:"discretisation"`        // of the change; null when not estimated
	Limits         []LimitResult   `json:"limits"`
}

// LimitResult is a limit's line.
type LimitResult struct {
	ID          string   `json:"id"`
	Quantity    string   `json:"quantity"` // change, value, share_of_base
	Sense       string   `json:"sense"`    // at_most, at_least
	Limit       float64  `json:"limit"`
	Entered     string   `json:"entered"`
	Unit        string   `json:"unit"` // m, m3/d, 1; 1 for a share of base
	Baseline    string   `json:"baseline"`
	Counts      string   `json:"counts"`
	Reserve     float64  `json:"reserve_share"`
	State       string   `json:"state"`
	Value       float64  `json:"value"`          // of the limited quantity at the plan: change less the baseline's, share, or value; a pumping level with its turbulent loss
	Headroom    float64  `json:"headroom"`       // in the unit, to the limit as entered, without its reserve; negative: passed
	RoomShare   *float64 `json:"headroom_share"` // of the limit's own size: |limit|, for a value |value without pumping - limit|; null for a zero limit
	Binds       bool     `json:"binds"`          // the limit with its reserve is reached; with most-headroom also: it sets the smallest headroom
	Passed      bool     `json:"passed"`         // the limit as entered
	ShadowPrice float64  `json:"shadow_price"`   // change of the aim per unit by which the limit is loosened
	ChangeRoom  float64  `json:"change_allowed"` // largest change against no pumping (cumulative or own, as counted) that keeps the limit and its reserve; smallest where a fall is asked for
	Source      string   `json:"source"`
	Date        string   `json:"date"`
	Sentence    string   `json:"sentence"` // 'Binds. W4 contributes 38 %. One more centimetre is worth 27 m³/d.'
	ResultState string   `json:"assessed"` // 'yes', or why not

	Range *PriceRange `json:"price_range"` // null when nothing was optimised
}

// Table is a matrix with named rows and columns. Rows are the receptors that have a response, in the order of the receptors.
type Table struct {
	Receptors []string    `json:"receptors"`
	Units     []string    `json:"units"` // of each row
	Wells     []string    `json:"wells"`
	Values    [][]float64 `json:"values"`
}

// QuotaResult is a licence's or a group's sum.
type QuotaResult struct {
	Name        string   `json:"name"`
	Holder      string   `json:"holder"`
	Wells       []string `json:"wells"`
	Basis       string   `json:"basis"`          // per day, per year, per hour
	Limit       float64  `json:"limit_m3_per_d"` // as a mean rate; per hour: as a running rate, as is the sum
	Entered     float64  `json:"entered_m3"`     // per the basis
	Sum         float64  `json:"sum_m3_per_d"`
	Headroom    float64  `json:"headroom_m3_per_d"`
	Binds       bool     `json:"binds"`
	ShadowPrice float64  `json:"shadow_price"`
	Source      string   `json:"source"`

	Range *PriceRange `json:"price_range"` // values of the limit as a mean rate; per hour: as a running rate
}

// PriceRange is what a limit is worth to both sides, and how far. Prices are changes of the aim per unit by which the limit is
// loosened: Tighter what the last unit is worth, Looser what one more is worth. The two differ where more limits meet at the plan
// than fix it. With most-headroom and with aims that are not linear a price moves along with the limit; the range is then that over which
// the same limits hold the plan.
type PriceRange struct {
	Tighter     *float64 `json:"tighter_price"` // null: no plan keeps a tighter limit
	TighterTo   *float64 `json:"tighter_to"`    // value of the limit to which Tighter holds; null: for ever
	TighterThen string   `json:"tighter_then"`  // what comes there: 'the limit L2 at Fen binds'
	Looser      *float64 `json:"looser_price"`  // null: nothing can be loosened
	LooserTo    *float64 `json:"looser_to"`     // null: for ever
	LooserThen  string   `json:"looser_then"`
	HoldsFor    string   `json:"holds_for"` // 'the tangents of this plan' where a row is not linear, 'the wells that run in this plan' where there was a choice; empty: exact
}

// Capture is one source's share of the pumped water.
type Capture struct {
	Feature     string    `json:"feature"`
	Kind        string    `json:"kind"`                  // edge, river, lake, spring, leakage
	Flow        float64   `json:"from_feature_m3_per_d"` // change of its flow into the aquifer at the plan
	Share       *float64  `json:"share"`                 // of the net pumped water; null when nothing is pumped
	Available   *float64  `json:"available_flow_m3_per_d"`
	ShareByWell []float64 `json:"share_by_well"`
}

// Balance is a state's water balance.
type Balance struct {
	State string        `json:"state"`
	Lines []BalanceLine `json:"lines"`
	In    float64       `json:"in_m3_per_d"`
	Out   float64       `json:"out_m3_per_d"`
	Error float64       `json:"error_share"` // (in - out) over the throughflow
}

// BalanceLine is one feature's flow into (positive) or out of (negative) the aquifer, inflow and outflow parts apart.
type BalanceLine struct {
	Feature string  `json:"feature"`
	Kind    string  `json:"kind"`
	In      float64 `json:"in_m3_per_d"`
	Out     float64 `json:"out_m3_per_d"`
}

// NoFlowStretch is a part of the outline where nothing was said.
type NoFlowStretch struct {
	From     string  `json:"from"`
	Length   float64 `json:"length_m"`
	Drawdown float64 `json:"largest_drawdown_m"`
}

// FirmCapacity is what the field gives with one well out of service, whatever the demand.
type FirmCapacity struct {
	AllInService float64    `json:"all_in_service_m3_per_d"` // largest total with every well in service
	Well         string     `json:"well"`                    // whose loss leaves the least
	Total        *float64   `json:"total_m3_per_d"`          // without that well; null: no rates keep every limit then
	Note         string     `json:"note"`                    // which wells were taken out
	Lines        []FirmLine `json:"outages"`
}

// FirmLine is the plan with one well out of service.
type FirmLine struct {
	Well      string   `json:"well"`
	Recharges bool     `json:"recharges"`
	Feasible  bool     `json:"feasible"`
	Settled   bool     `json:"settled"` // false: limits on rows that are not linear were still passed a little, or the plan is locally best
	Total     *float64 `json:"total_m3_per_d"`
	Change    *float64 `json:"change_m3_per_d"` // against every well in service
	Binds     []string `json:"binds"`
}

// Switching says which wells stand still and how sure that choice is.
type Switching struct {
	Sentence   string   `json:"sentence"`
	StandStill []string `json:"stand_still"` // wells that could run and do not
	Rules      []string `json:"rules"`       // about which wells run, in words
	Proven     bool     `json:"proven"`      // no other choice is better by more than a ten-millionth of the aim
	Recomputed bool     `json:"recomputed"`  // that was recomputed from the search tree and the data
	Gap        float64  `json:"gap_share"`   // by which another choice may be better, as a share of the aim
	Nodes      int      `json:"programmes"`  // linear programmes of the search
}

// Conflict explains why no plan exists.
type Conflict struct {
	Sentence      string           `json:"sentence"`
	ExistingAlone bool             `json:"existing_users_alone"` // a limit is passed with all own wells off
	Members       []ConflictMember `json:"members"`              // an irreducible set: all together cannot hold, any one left out they can
	Relaxation    []ConflictMember `json:"least_relaxation"`     // the least total, as shares of each limit
}

// ConflictMember is one limit in conflict.
type ConflictMember struct {
	Limit    string   `json:"limit"` // in words
	Receptor string   `json:"receptor"`
	Unit     string   `json:"unit"`
	By       float64  `json:"by"`    // in the unit
	Alone    *float64 `json:"alone"` // relaxation of it alone that would do; null: none would
	Source   string   `json:"source"`
}

// Audit holds the numbers of the checks.
type Audit struct {
	BalanceError          float64  `json:"balance_error"`       // share of the throughflow, worst state
	SuperpositionError    float64  `json:"superposition_error"` // largest |superposed - re-solved| change over the largest change
	LinearResidual        float64  `json:"linear_residual"`     // scaled
	Reciprocity           float64  `json:"reciprocity_error"`
	CaptureSumError       float64  `json:"capture_sum_error"`
	PrimalViolation       float64  `json:"primal_violation"` // scaled
	DualViolation         float64  `json:"dual_violation"`   // scaled
	DualGap               float64  `json:"dual_gap"`         // relative
	Factorisations        int      `json:"factorisations"`
	Solves                int      `json:"solves"`
	Functionals           int      `json:"functionals"`
	Iterations            int      `json:"simplex_iterations"`
	WrongSigns            int      `json:"wrong_sign_couplings"` // off-diagonal entries that are not <= 0
	NegativeSensitivities []string `json:"negative_sensitivities"`
}

// Check is one line of the checks sheet.
type Check struct {
	Name   string `json:"name"`
	Result string `json:"result"` // pass, fail, not done
	Detail string `json:"detail"`
}

// HandFormula is one check by a formula that a reviewer can do by hand: Thiem's between two radii around one well.
type HandFormula struct {
	Well           string  `json:"well"`
	Transmissivity float64 `json:"transmissivity_m2_per_d"`
	Rate           float64 `json:"rate_m3_per_d"`
	Near           float64 `json:"near_radius_m"`
	Far            float64 `json:"far_radius_m"`
	ModelDrop      float64 `json:"model_difference_m"`
	Note           string  `json:"note"`
}

// Assumption is one input with its source.
type Assumption struct {
	What   string `json:"what"`
	Value  string `json:"value"` // as it is used, with unit
	Low    string `json:"low"`
	High   string `json:"high"`
	Basis  string `json:"basis"` // measured, estimated, assumed, not stated
	Source string `json:"source"`
}

// ObservationFit compares an observation with the state under present pumping.
type ObservationFit struct {
	ID       string  `json:"id"`
	Kind     string  `json:"kind"`
	Unit     string  `json:"unit"`
	Observed float64 `json:"observed"`
	Modelled float64 `json:"modelled"`
	Date     string  `json:"date"`
	Source   string  `json:"source"`
}

// MeshInfo describes the mesh.
type MeshInfo struct {
	Nodes       int         `json:"nodes"`
	Triangles   int         `json:"triangles"`
	MinAngle    float64     `json:"min_angle_deg"`
	SharpInput  int         `json:"triangles_at_sharp_input"`
	FinestM     float64     `json:"finest_m"`
	CoarsestM   float64     `json:"coarsest_m"`
	Growth      float64     `json:"growth"`
	BudgetHit   bool        `json:"node_budget_hit"`
	Accuracy    float64     `json:"accuracy_share"` // asked of every receptor's change; 0: not estimated
	AccuracyMet bool        `json:"accuracy_met"`
	Rounds      []MeshRound `json:"refinement_rounds"`
	Notes       []string    `json:"notes"`
}

// MeshRound is one mesh on the way to the accuracy asked for.
type MeshRound struct {
	Nodes int     `json:"nodes"`
	Worst float64 `json:"worst_error_share"` // largest estimated error of a receptor's change
	Where string  `json:"where"`
}

// InputFile is a file that the plan was made from.
type InputFile struct {
	File   string `json:"file"`
	SHA256 string `json:"sha256"`
}
