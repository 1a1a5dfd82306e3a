package wells

import "github.com/paulmach/orb"

// Mode says who sets a well's rate.
type Mode int

// The modes of a well.
const (
	Decided Mode = iota // the plan chooses the rate within [Min, Max]
	Fixed               // the rate is given: an existing user, or an own well that is not up for decision
	Off                 // present in the tables, pumps nothing
)

// String returns the word used in files: decided, fixed, off.
func (m Mode) String() string { return [...]string{"decided", "fixed", "off"}[m] }

// Well is a place where water is pumped out (rate > 0) or recharged (rate < 0).
type Well struct {
	ID      string // unique, [A-Za-z0-9_.-], 1 to 40 characters
	Name    string // free text
	Owner   string
	Aquifer string    // the aquifer that the screen is in, as the user names it
	At      orb.Point // place in the working plane [m]
	Radius  float64   // rw, radius of the bore at the screen [m]

	Mode      Mode
	Others    bool    // an existing user's well, not the applicant's: it does not count as own
	FixedRate float64 // the rate when Mode is Fixed [m³/d]

	Present   *float64 // present rate [m³/d]; nil is unknown
	Recent    *float64 // recent actual rate [m³/d]; nil is unknown
	Licensed  *float64 // licensed rate [m³/d]; nil is unknown
	Requested *float64 // requested rate [m³/d]; nil is unknown

	Min       float64 // least rate of a decided well [m³/d]
	Max       float64 // largest rate of a decided well [m³/d]
	MaxSource string  // where the largest rate comes from
	DutyHours float64 // hours a day that the pump runs, (0, 24] [h]
	Outage    bool    // out of service

	LinearLoss    float64 // B, loss beyond the aquifer's own, per running rate [d/m²]
	QuadraticLoss float64 // C, turbulent loss per running rate squared [d²/m⁵]

	Intake            *float64 // elevation of the pump intake [m]
	LowestLevel       *float64 // lowest allowed pumping level, elevation [m]
	LowestLevelReason string
	PumpEfficiency    *float64 // wire to water [-]
	DeliveryLevel     *float64 // level that the water is lifted to [m]
	Source            string   // where the record comes from
}

// RunningRate returns the rate while the pump runs for a daily mean rate [m³/d]: mean x 24 / duty hours.
func (w Well) RunningRate(mean float64) float64 { return mean * 24 / w.DutyHours }

// Loss returns the head lost in and around the bore beyond the aquifer's own at a daily mean rate [m³/d], in m:
// B Q_run + C Q_run |Q_run| (Jacob 1947); it keeps its sign for a recharging well.
func (w Well) Loss(mean float64) float64 {
	run := w.RunningRate(mean)
	abs := run
	if run < 0 {
		abs = -run
	}
	return w.LinearLoss*run + w.QuadraticLoss*run*abs
}

// LinearLossSlope returns the part of Loss that is linear in the daily mean rate: B x 24 / duty hours [d/m²].
func (w Well) LinearLossSlope() float64 { return w.LinearLoss * 24 / w.DutyHours }
