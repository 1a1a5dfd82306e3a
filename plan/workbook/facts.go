package workbook

import (
	"fmt"
	"strings"

	"springbound/plan"
)

// facts is the report with everything looked up and checked for fitting together.
type facts struct {
	well      map[string]int // index into Report.Wells
	assessed  []int          // receptors that have sensitivities, indices into Report.Receptors
	slope     [][]float64    // per receptor (of Report.Receptors), one a well; nil where there are none
	wellDrop  []int          // wells whose node has drawdown per rate by well, indices into Report.Wells
	ofFeature []int          // per receptor: the well that a pumping level is about, -1 otherwise
}

// readFacts checks the report's parts against each other. All faults are reported at once.
func readFacts(r *plan.Report) (facts, error) {
	f := facts{well: map[string]int{}, slope: make([][]float64, len(r.Receptors)), ofFeature: make([]int, len(r.Receptors))}
	var faults []string
	add := func(format string, args ...any) { faults = append(faults, fmt.Sprintf(format, args...)) }
	f.readWells(r, add)
	receptor := map[string]int{}
	for i, rec := range r.Receptors {
		if _, twice := receptor[rec.ID]; twice {
			add("receptor %q stands twice", rec.ID)
		}
		receptor[rec.ID] = i
		f.ofFeature[i] = -1
		if k, known := f.well[rec.Feature]; known && rec.Kind == kindPumpingLevel {
			f.ofFeature[i] = k
		}
	}
	f.readSensitivities(r, receptor, add)
	f.checkNamedWells(r, add)
	if len(faults) > maxErrors {
		faults = append(faults[:maxErrors], "and more")
	}
	if len(faults) > 0 {
		return f, fmt.Errorf("the report does not fit together: %s", strings.Join(faults, "; "))
	}
	return f, nil
}

func (f *facts) readWells(r *plan.Report, add func(string, ...any)) {
	for i, w := range r.Wells {
		if _, twice := f.well[w.ID]; twice {
			add("well %q stands twice", w.ID)
		}
		f.well[w.ID] = i
		if !(w.DutyHours > 0 && w.DutyHours <= hoursPerDay) {
			add("well %q runs %v hours a day; that must be above 0 and at most 24", w.ID, w.DutyHours)
		}
		switch len(w.DrawdownByWell) {
		case 0:
		case len(r.Wells):
			f.wellDrop = append(f.wellDrop, i)
		default:
			add("well %q has drawdown per rate for %d of %d wells", w.ID, len(w.DrawdownByWell), len(r.Wells))
		}
	}
	if len(r.Wells) == 0 {
		add("there are no wells")
	}
}

// checkNamedWells checks the wells that quotas and capture name.
func (f *facts) checkNamedWells(r *plan.Report, add func(string, ...any)) {
	for _, q := range r.Quotas {
		for _, id := range q.Wells {
			if _, known := f.well[id]; !known {
				add("quota %q names the well %q, which does not exist", q.Name, id)
			}
		}
	}
	captured := map[string]bool{}
	for _, id := range r.CaptureWells {
		if _, known := f.well[id]; !known || captured[id] {
			add("the capture table's well %q does not exist or stands twice", id)
		}
		captured[id] = true
	}
	for _, c := range r.Capture {
		if len(c.ShareByWell) != len(r.CaptureWells) {
			add("the capture of %q has shares for %d of %d wells", c.Feature, len(c.ShareByWell), len(r.CaptureWells))
		}
	}
}

func (f *facts) readSensitivities(r *plan.Report, receptor map[string]int, add func(string, ...any)) {
	t := r.Sensitivities
	columns := make([]int, len(t.Wells))
	seen := map[int]bool{}
	for k, id := range t.Wells {
		i, known := f.well[id]
		if !known || seen[i] {
			add("the sensitivities' well %q does not exist or stands twice", id)
		}
		seen[i] = true
		columns[k] = i
	}
	if len(t.Receptors) > 0 && len(seen) != len(r.Wells) {
		add("the sensitivities have %d of %d wells", len(seen), len(r.Wells))
	}
	if len(t.Values) != len(t.Receptors) {
		add("the sensitivities have %d lines for %d receptors", len(t.Values), len(t.Receptors))
		return
	}
	for k, id := range t.Receptors {
		i, known := receptor[id]
		switch {
		case !known:
			add("the sensitivities' receptor %q does not exist", id)
			continue
		case f.slope[i] != nil:
			add("the sensitivities' receptor %q stands twice", id)
			continue
		case len(t.Values[k]) != len(columns):
			add("the sensitivities of %q have %d of %d wells", id, len(t.Values[k]), len(columns))
			continue
		}
		if len(r.Wells) == 0 {
			continue
		}
		f.slope[i] = make([]float64, len(r.Wells))
		for c, v := range t.Values[k] {
			f.slope[i][columns[c]] = v
		}
	}
	for i := range r.Receptors {
		if f.slope[i] != nil {
			f.assessed = append(f.assessed, i)
		}
	}
}

// Words of kinds and quantities as the report writes them.
const (
	kindSpring       = "spring"
	kindPumpingLevel = "pumping_level"
	kindWetlandWorst = "wetland_worst"
	quantityValue    = "value"
	quantityShare    = "share_of_base"
	senseAtLeast     = "at_least"
	baselinePresent  = "present"
	baselineLicence  = "others_at_licence"
	countsOwn        = "own"
	aimMostYield     = "most-yield"
	aimMostHeadroom  = "most-headroom"
	aimEnergy        = "least-energy"
	aimRequests      = "closest-to-requests"
	assessedYes      = "yes"
	modeDecided      = "decided"
	modeOff          = "off"
	basisPerHour     = "per hour"
	resultPass       = "pass"
	resultFail       = "fail"
	unitFlow         = "m3/d"
	ownWords         = "own"
	existingWords    = "existing user"
	notKnown         = "not known"
	notStated        = "not stated"
	limitNearShare   = 1e-7 // as the plan judges: a share of the limit's own size
	reachShare       = 1e-9 // as the plan judges rates at their bounds: a share of the largest rate
	wordHolds        = "○ holds"
	wordBinds        = "● binds"
	wordReserve      = "◐ in its reserve"
	wordPassed       = "▲ PASSED"
	wordValid        = "○ yes"
	wordBroken       = "▲ NO"
	wordInside       = "○ inside"
	wordAtLeast      = "● at least rate"
	wordAtLargest    = "● at largest"
	wordZero         = "● at zero"
	wordGiven        = "○ as given"
	wordChanged      = "▲ not as given"
	wordBelow        = "▲ BELOW LEAST"
	wordAbove        = "▲ ABOVE LARGEST"
	wordOutOfService = "▲ IS OFF"
	wordOffAsPlanned = "○ off"
	wordNotAssessed  = "– not assessed"
)

// kindWords prints a kind of receptor.
func kindWords(kind string) string { return strings.ReplaceAll(kind, "_", " ") }

// worthWords says what loosening a limit brings: an aim that is to be small is saved.
func worthWords(aim, amount string) string {
	if aim == aimEnergy || aim == aimRequests {
		return "saves " + amount + " " + aimUnit(aim)
	}
	return "is worth " + amount + " " + aimUnit(aim)
}

// aimUnit is what a change of the aim is measured in.
func aimUnit(aim string) string {
	switch aim {
	case aimMostYield:
		return "m³/d"
	case aimMostHeadroom:
		return "of headroom"
	case aimEnergy:
		return "kWh/d"
	case aimRequests:
		return "of the sum of squared shortfalls"
	}
	return "of the aim"
}
