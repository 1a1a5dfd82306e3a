package plan

import (
	"math"
	"strings"
	"testing"

	"springbound/wells"
)

// No more than today, with new wells that do not run today: the existing users take all of the limit, and rounding must not make
// the brief impossible. The answer is zero, not a failure.
func TestNothingMoreThanPresent(t *testing.T) {
	for _, factor := range []float64{1, 1.1, 0.7, 1.0 / 3} {
		a, b, c := decidedWell("A", 0, 1000), fixedWell("B", 0.1*factor), fixedWell("C", 0.7*factor)
		a.Present, b.Present, c.Present = number(0), number(0.1*factor), number(0.7*factor)
		// the programme sums B before C, the check of the baseline A before both
		s := newSite(MostYield, c, a, b)
		s.receptor("R", wells.PointLevel, 10, 0.3e-3, 0.1e-3, 0.9e-3)
		s.limit("L", "R", 0, func(l *wells.Limit) { l.Baseline = wells.PresentPumping })
		s.limit("V", "R", 10-(0.3e-3*0.7+0.9e-3*0.1)*factor, func(l *wells.Limit) { l.Quantity, l.Sense = wells.Value, wells.AtLeast })
		s.brief.Quotas = []Quota{{Name: "Q", Wells: []string{"B", "C"}, PerDay: number(0.8 * factor)}}
		r := s.plan(t)
		if r.Status != StatusOptimal || r.TotalRate != 0 || !r.ModelValid {
			t.Errorf("factor %v: %s, total %v, %q", factor, r.Status, r.TotalRate, r.Invalid)
		}
		if l := limitOf(t, r, "L"); !l.Binds || l.Passed {
			t.Errorf("factor %v: %+v", factor, l)
		}
	}
}

// A limit that no decided well bears on: kept, it changes nothing; passed, it is the whole conflict.
func TestLimitThatNoDecidedWellMoves(t *testing.T) {
	for limit, status := range map[float64]string{0.3: StatusOptimal, 0.1: StatusInfeasible} {
		s := newSite(MostYield, decidedWell("A", 0, 1000), fixedWell("B", 200))
		s.receptor("R", wells.PointLevel, 10, 0, 0.001)
		s.limit("L", "R", limit)
		r := s.plan(t)
		if r.Status != status {
			t.Errorf("limit %v: %s", limit, r.Status)
		}
		if status == StatusInfeasible && (len(r.Conflict.Members) != 1 || *r.Conflict.Members[0].Alone < 0.1-1e-9) {
			t.Errorf("%+v", r.Conflict)
		}
	}
	s := newSite(MostYield, decidedWell("A", 0, 1000), fixedWell("B", 200))
	s.brief.Licences = []wells.Licence{{ID: "old", Wells: []string{"B"}, PerDay: number(150)}}
	if c := s.plan(t).Conflict; c == nil || !c.ExistingAlone || !strings.Contains(c.Sentence, "pumped by old at most 150 m³ per day (by 50 m³/d)") {
		t.Errorf("%+v", c)
	}
}

// Without any limit the wells run at their largest rates; with equal ends of a range the rate is given.
func TestNoLimits(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 300, 300), decidedWell("C", 0, 0))
	r := s.plan(t)
	for i, want := range []float64{1000, 300, 0} {
		exact(t, r.Wells[i].ID, r.Wells[i].Rate, want)
	}
	if r.Wells[0].ShadowPrice != 1 || r.Wells[1].AtBound != "max" || r.NotUnique || r.WorstMargin != nil {
		t.Errorf("%+v %v", r.Wells, r.NotUnique)
	}
	s.brief.Aim, s.brief.Demand = MostHeadroom, number(500)
	if _, err := Make(t.Context(), s.brief, s.table, Options{}); err == nil {
		t.Error("headroom without limits has no answer")
	}
}

// The default state's own demand is used, the brief's where it has none; two that differ are said.
func TestDemandOfState(t *testing.T) {
	s := canalStrip(MostHeadroom, 600)
	s.limit("L1", "P1", 0.30)
	s.brief.States = []wells.OperatingState{{Name: "average", Default: true, Demand: number(700)}}
	r := s.plan(t)
	exact(t, "total", r.TotalRate, 700)
	s.brief.Demand = number(800)
	r = s.plan(t)
	exact(t, "total", r.TotalRate, 700)
	if len(r.Findings) != 1 || r.State != "average" {
		t.Errorf("%q %q", r.Findings, r.State)
	}
}

// The reserve's share stays out of the price: one unit of the limit gives 1 - reserve units of room.
func TestSentences(t *testing.T) {
	for _, c := range []struct {
		kind   wells.Kind
		slope  float64
		limit  wells.Limit
		most   float64
		phrase string
	}{
		{wells.PointLevel, 0.001, wells.Limit{Value: 0.3}, 180, "Holds with 0.12 m to spare (40 % of the limit)."},
		{wells.PointLevel, 0.001, wells.Limit{Value: 0.3}, 900, "Binds. A contributes 100 %. One more centimetre is worth 10 m³/d, up to 60 cm more; then A runs at its largest rate."},
		{wells.PointLevel, 0.0001, wells.Limit{Value: 0.03}, 900, "Binds. A contributes 100 %. One more millimetre is worth 10 m³/d, up to 60 mm more; then A runs at its largest rate."},
		{wells.PointLevel, 0.001, wells.Limit{Value: 9.7, Quantity: wells.Value, Sense: wells.AtLeast}, 900, "Binds. A contributes 100 %. One centimetre less is worth 10 m³/d, up to 60 cm less; then A runs at its largest rate."},
		{wells.PointLevel, 0.001, wells.Limit{Value: 9.7, Quantity: wells.Value, Sense: wells.AtLeast}, 180, "Holds with 0.12 m to spare (40 % of the room)."},
		{wells.SpringFlow, 0.5, wells.Limit{Value: 300}, 900, "Binds. A contributes 100 %. One more m³/d is worth 2.0 m³/d, up to 150 m³/d more; then A runs at its largest rate."},
		{wells.SpringFlow, 0.5, wells.Limit{Value: 345.6, Entered: "4 L/s"}, 900, "Binds. A contributes 100 %. One more L/s is worth 173 m³/d, up to 1.2 L/s more; then A runs at its largest rate."},
		{wells.SalineFront, 1e-6, wells.Limit{Value: 0.0004}, 900, "Binds. A contributes 100 %. One more step of 0.0001 is worth 100 m³/d, up to 5.0 steps more; then A runs at its largest rate."},
		{wells.SpringFlow, 0.5, wells.Limit{Value: 0.1, Quantity: wells.ShareOfBase}, 50, "Holds with 7.5 % of the undisturbed value to spare (75 % of the limit)."},
	} {
		base := map[wells.Kind]float64{wells.PointLevel: 10, wells.SpringFlow: 1000, wells.SalineFront: 0.001}[c.kind]
		s := newSite(MostYield, decidedWell("A", 0, c.most))
		s.receptor("R", c.kind, base, c.slope)
		c.limit.ID, c.limit.Receptor = "L", "R"
		s.brief.Limits = []wells.Limit{c.limit}
		if got := limitOf(t, s.plan(t), "L").Sentence; got != c.phrase {
			t.Errorf("%q, want %q", got, c.phrase)
		}
	}
	for text, got := range map[string]string{
		"9 000 m³/d": flowText(9000), "1 234 568 m³/d": flowText(1234567.8), "0.034 m³/d": flowText(0.0337), "-27 m³/d": flowText(-27.2),
		"0.12 m": lengthText(0.123), "0.0034 m": lengthText(0.0034), "12.35 m": lengthText(12.346), "0.00 m": lengthText(0),
		"38 %": percentText(0.381), "100 %": percentText(1), "0.40 %": percentText(0.004),
	} {
		if got != text {
			t.Errorf("%q, want %q", got, text)
		}
	}
	if got := plainNumber(-1e-9, 2, 0, 2); got != "0.00" {
		t.Errorf("%q", got)
	}
}

// A pumping level as a receptor: its limit is judged with the turbulent loss of its well.
func TestPumpingLevelAsReceptor(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000))
	s.brief.Wells[0].QuadraticLoss = 1e-6
	s.receptor("R", wells.PumpingLevel, 40, 0.01)
	s.brief.Receptors[0].Feature = "A"
	s.limit("L", "R", 35, func(l *wells.Limit) { l.Quantity, l.Sense = wells.Value, wells.AtLeast })
	r := s.plan(t)
	l := limitOf(t, r, "L")
	// 0.01 Q + 1e-6 Q² = 5
	near(t, "rate", r.Wells[0].Rate, (-0.01+math.Sqrt(1e-4+4e-6*5))/2e-6, 1e-4)
	near(t, "value", l.Value, 35, 5*cutTolerance)
	near(t, "headroom", l.Headroom, 0, 5*cutTolerance)
	if !r.ModelValid || l.Passed || !l.Binds || r.Receptors[0].Feature != "A" {
		t.Errorf("valid %v, %+v", r.ModelValid, l)
	}
}

// Negative sensitivities are named, those of gradients without a failed check.
func TestNegativeSensitivities(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 0, 1000))
	s.receptor("G", wells.SalineFront, 0.001, 1e-6, -1e-7)
	verdict := func(r *Report) string {
		for _, c := range r.Checks {
			if c.Name == "Pumping lowers every receptor" {
				return c.Result
			}
		}
		return ""
	}
	r := s.plan(t)
	if len(r.Audit.NegativeSensitivities) != 1 || verdict(r) != pass {
		t.Errorf("%q %s", r.Audit.NegativeSensitivities, verdict(r))
	}
	s.receptor("R", wells.PointLevel, 10, 1e-3, -1e-16)
	s.receptor("U", wells.PointLevel, 10, 1e-3, -1e-14)
	r = s.plan(t)
	if len(r.Audit.NegativeSensitivities) != 2 || verdict(r) != failed || !strings.HasPrefix(r.Audit.NegativeSensitivities[1], "U from well B: -1e-14 m") {
		t.Errorf("%q %s", r.Audit.NegativeSensitivities, verdict(r))
	}
}

// Huge and tiny data end in a plan or a named failure, never in a number that is not finite.
func TestExtremeData(t *testing.T) {
	for _, slope := range []float64{1e-12, 1e-3, 1e6} {
		for _, most := range []float64{1e-3, 1e3, 1e9} {
			s := newSite(MostYield, decidedWell("A", 0, most), decidedWell("B", 0, most))
			s.receptor("R", wells.PointLevel, 1e3, slope, 2*slope)
			s.limit("L", "R", 0.1)
			r := s.plan(t)
			if _, err := Marshal(r); err != nil {
				t.Error(err)
			}
			near(t, "total", r.TotalRate, math.Min(0.1/slope, math.Min(2*most, most+(0.1/slope-most)/2)), rounding*r.TotalRate+rateTolerance*most)
		}
	}
}

// Influence that has died out (1e-36 beside 1e-3) neither stops the programme nor shows in the plan.
func TestInfluenceThatDiesOut(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("B", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 1e-3, 1e-36)
	s.receptor("U", wells.PointLevel, 10, 1e-30, 1e-3)
	s.limit("LR", "R", 0.2)
	s.limit("LU", "U", 0.3)
	r := s.plan(t)
	exact(t, "A", r.Wells[0].Rate, 200)
	exact(t, "B", r.Wells[1].Rate, 300)
	if r.Sensitivities.Values[0][1] != 1e-36 {
		t.Errorf("the table holds %v", r.Sensitivities.Values[0][1])
	}
}
