package plan

import (
	"fmt"
	"math"

	"springbound/plan/convex"
	"springbound/wells"
)

// SuperpositionTolerance is the largest difference between superposed and re-solved changes of linear rows, as a share of the
// largest change in the same unit, with which a plan counts as re-solved. Direct solves agree to about 1e-9 on meshes of 1e5 nodes;
// three digits more are left for ill-conditioned sites, and a row that is wrongly taken for linear misses by far more.
const SuperpositionTolerance = 1e-6

// negativeShare is the negative sensitivity, as a share of the row's largest, from which it is named; smaller ones are rounding.
const negativeShare = 1e-12

// The results of a check.
const (
	pass    = "pass"
	failed  = "fail"
	notDone = "not done"
)

// audit fills the numbers that the planner can judge.
func (p *planner) audit(r *Report, resolved *lines) {
	r.Audit.Iterations = p.iterations
	if c := p.certificate; c != nil && c.Status == convex.Optimal {
		r.Audit.PrimalViolation, r.Audit.DualViolation, r.Audit.DualGap = c.PrimalViolationScaled, c.DualViolationScaled, c.Gap
	}
	if resolved != nil {
		r.Audit.SuperpositionError = p.superpositionError(r, resolved)
	}
	r.Audit.NegativeSensitivities, _ = p.negativeSensitivities()
}

// superpositionError compares superposed with re-solved changes of the linear rows, and heads with the wells' rows, unit by unit.
func (p *planner) superpositionError(r *Report, resolved *lines) float64 {
	s := p.setup
	first := p.oracle.known[0]
	difference, largest := map[string]float64{}, map[string]float64{}
	take := func(unit string, superposed, solved float64) {
		difference[unit] = math.Max(difference[unit], math.Abs(superposed-solved))
		largest[unit] = math.Max(largest[unit], math.Max(math.Abs(superposed), math.Abs(solved)))
	}
	for i := range s.Receptors {
		if first.receptor[i] != nil && resolved.receptor[i] != nil && first.receptor[i].Linear {
			take(s.Receptors[i].Kind.Unit(), dot(first.receptor[i].Slope, resolved.at), resolved.receptor[i].Change)
		}
	}
	for i := range s.Wells {
		if first.well[i] == nil || !first.well[i].Linear {
			continue
		}
		if resolved.well[i] != nil {
			take("m", dot(first.well[i].Slope, resolved.at), resolved.well[i].Change)
		}
		if resolved.heads != nil {
			static := s.WellTerms[i].StaticLevel
			take("m", static-r.Wells[i].NodeLevel, static-resolved.heads[i])
		}
	}
	worst := 0.0
	for _, unit := range []string{"m", "m3/d", "1"} {
		if largest[unit] > 0 {
			worst = math.Max(worst, difference[unit]/largest[unit])
		}
	}
	return worst
}

// negativeSensitivities names every well that would make a receptor's change smaller by pumping, and counts those that a confined
// aquifer with the right signs excludes: all but a gradient's.
func (p *planner) negativeSensitivities() (out []string, wrong int) {
	s := p.setup
	name := func(row *Row, what, unit, note string) {
		largest := 0.0
		for _, v := range row.Slope {
			largest = math.Max(largest, math.Abs(v))
		}
		for i, v := range row.Slope {
			if v < -negativeShare*largest {
				if note == "" {
					wrong++
				}
				out = append(out, fmt.Sprintf("%s from well %s: %.3g %s per m³/d%s", what, s.Wells[i].ID, v, unit, note))
			}
		}
	}
	for i, row := range p.oracle.known[0].receptor {
		if row == nil {
			continue
		}
		note, unit := "", row.Unit
		if s.Receptors[i].Kind == wells.SalineFront {
			note, unit = " (a gradient may answer either way)", "of gradient"
		}
		name(row, s.receptorName(s.Receptors[i].ID), unit, note)
	}
	for i, row := range p.oracle.known[0].well {
		if row != nil {
			name(row, "level in well "+s.Wells[i].ID, "m", "")
		}
	}
	return out, wrong
}

// check writes the lines of the checks that the planner can judge, and the reasons why a plan is not valid.
func (p *planner) check(r *Report, rates []float64, resolved *lines) {
	s := p.setup
	planned := r.Status == StatusOptimal
	add := func(name, result, detail string) {
		r.Checks = append(r.Checks, Check{Name: name, Result: result, Detail: detail})
	}
	verdict := func(name string, faults []string, good string) {
		if len(faults) == 0 {
			add(name, pass, good)
			return
		}
		add(name, failed, joinSentences(faults))
		if planned {
			for _, f := range faults {
				s.invalid.addf("%s", f)
			}
		}
	}
	p.checkCertificate(add)
	p.checkSymmetry(add)
	var passed []string
	assessed := 0
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.ResultState == "yes" {
				assessed++
			}
			if l.Passed {
				passed = append(passed, fmt.Sprintf("limit %s at %s is passed by %s", l.ID, s.receptorName(rec.ID), limitAmount(&l, -l.Headroom)))
			}
		}
	}
	verdict("Limits of receptors are kept", passed, fmt.Sprintf("%d limits", assessed))
	verdict("Levels in wells are kept with the full well loss", p.checkLevels(r.Wells), "every running well with a lowest level")
	p.checkQuotas(r, verdict)
	p.checkRanges(r, rates, verdict)
	p.checkResolve(r, resolved, add, verdict)
	if _, wrong := p.negativeSensitivities(); wrong > 0 {
		add("Pumping lowers every receptor", failed, fmt.Sprintf("%d sensitivities are negative; the audit names them", wrong))
	} else {
		add("Pumping lowers every receptor", pass, "no sensitivity is negative, gradients aside")
	}
	for k, l := range s.Limits {
		if p.boundOfLimit[k] < 0 {
			add("Limit "+l.ID+" at "+s.receptorName(l.Receptor), notDone, p.assessed[k])
		}
	}
	p.checkFirm(r, add)
}

func (p *planner) checkCertificate(add func(name, result, detail string)) {
	const name = "Plan is the best one: limits, prices and gap recomputed"
	c := p.certificate
	switch {
	case c == nil && p.search.none:
		p.checkNone(add)
	case c == nil:
		add(name, notDone, "nothing was optimised")
	case c.Status == convex.Infeasible && c.Accepted:
		add("No rates keep every limit: proof recomputed", pass, fmt.Sprintf("margin %.2g of its terms", c.ProofMargin))
		p.checkMembers(add)
	case c.Accepted:
		add(name, pass, fmt.Sprintf("violation %.2g, wrong prices %.2g, gap %.2g, each as a share of its terms", c.PrimalViolationScaled, c.DualViolationScaled, c.Gap))
	default:
		add(name, failed, c.Reason)
	}
	if p.local {
		p.setup.cautions.addf("a limit holds a quantity that is not linear from below: the plan is locally best, a better one elsewhere is not excluded")
	}
}

func (p *planner) checkQuotas(r *Report, verdict func(string, []string, string)) {
	s := p.setup
	var passed []string
	for k, q := range r.Quotas {
		if !(q.Headroom >= -limitTolerance*s.quotas[k].scale(s)) {
			passed = append(passed, fmt.Sprintf("%s %s is passed by %s", q.Name, q.Basis, passedText(q)))
		}
	}
	verdict("Licences and quotas are kept", passed, fmt.Sprintf("%d sums", len(r.Quotas)))
	if len(s.demands) == 0 {
		return
	}
	var short, met []string
	for _, d := range s.demands {
		total := s.totalFor(d, r)
		if !(total-d.amount >= -limitTolerance*d.amount) {
			short = append(short, "the total of "+flowText(total)+" falls short of the demand of "+flowText(d.amount)+d.mark)
		}
		met = append(met, flowText(total)+" for "+flowText(d.amount)+d.mark)
	}
	verdict("Total meets the demand", short, joinSentences(met))
}

func (p *planner) checkRanges(r *Report, rates []float64, verdict func(string, []string, string)) {
	s := p.setup
	var outside, running []string
	for i, w := range s.Wells {
		near := rateTolerance * s.rateScale(i)
		switch {
		case s.switched(i) && rates[i] == 0:
		case s.column[i] >= 0 && !(rates[i] >= w.Min-near && rates[i] <= w.Max+near):
			outside = append(outside, fmt.Sprintf("well %s at %s is outside its range from %s to %s", w.ID, flowText(rates[i]), flowText(w.Min), flowText(w.Max)))
		case (w.Outage || w.Mode == wells.Off) && rates[i] != 0:
			running = append(running, "well "+w.ID+" is out of service and runs at "+flowText(rates[i]))
		}
	}
	verdict("Rates are within the wells' ranges", outside, fmt.Sprintf("%d wells up for decision", len(s.decided)))
	p.checkRunning(rates, verdict)
	verdict("Wells out of service stand still", running, "none runs")
}

func (p *planner) checkResolve(r *Report, resolved *lines, add func(string, string, string), verdict func(string, []string, string)) {
	const name = "Full solve at these rates agrees with superposition"
	if resolved == nil {
		add(name, notDone, "the response holds at other rates")
		return
	}
	e := r.Audit.SuperpositionError
	if !(e <= SuperpositionTolerance) {
		verdict(name, []string{fmt.Sprintf("superposed and re-solved changes differ by %.2g of the largest change, more than %.0e", e, SuperpositionTolerance)}, "")
		return
	}
	if len(p.oracle.known) == 1 && p.oracle.model != nil {
		verdict(name, nil, "the plan is the state at which the response was made")
		return
	}
	verdict(name, nil, fmt.Sprintf("largest difference %.2g of the largest change", e))
}

func joinSentences(faults []string) string {
	text := ""
	for k, f := range faults {
		if k > 0 {
			text += "; "
		}
		text += f
	}
	return text
}

// passedText is by how much a quota is passed, in the volume and time that it was entered in.
func passedText(q QuotaResult) string {
	if !(q.Limit > 0) {
		return flowText(-q.Headroom)
	}
	return fmt.Sprintf("%.0f m³ %s", -q.Headroom/q.Limit*q.Entered, q.Basis)
}
