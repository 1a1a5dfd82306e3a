package plan

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"springbound/wells"
)

// Two wells on one receptor with slopes 0.001 and 0.0005: A is decided within [0, 1000], B is an existing user at 200 that was at
// 150 and holds a licence for 400; A runs at 50 today. Every kind of limit then gives A's largest rate in closed form.
func twoWells(kind wells.Kind, base float64) *site {
	a, b := decidedWell("A", 0, 1000), fixedWell("B", 200)
	a.Present, b.Present, b.Recent, b.Licensed = number(50), number(150), number(180), number(400)
	s := newSite(MostYield, a, b)
	s.receptor("R", kind, base, 0.001, 0.0005)
	return s
}

func TestEveryKindOfLimit(t *testing.T) {
	own := func(l *wells.Limit) { l.Counts = wells.Own }
	present := func(l *wells.Limit) { l.Baseline = wells.PresentPumping }
	licence := func(l *wells.Limit) { l.Baseline = wells.OthersAtLicence }
	reserve := func(l *wells.Limit) { l.Reserve = 0.2 }
	value := func(l *wells.Limit) { l.Quantity = wells.Value; l.Sense = wells.AtLeast }
	share := func(l *wells.Limit) { l.Quantity = wells.ShareOfBase }
	for _, c := range []struct {
		name   string
		limit  float64
		change []func(*wells.Limit)
		rate   float64 // of A
		price  float64 // per unit of the limit
		value  float64 // of the limited quantity
		room   float64 // change_allowed
	}{
		{"change, cumulative", 0.5, nil, 400, 1000, 0.5, 0.5},
		{"change, own", 0.5, []func(*wells.Limit){own}, 500, 1000, 0.5, 0.5},
		{"against present: 0.05 + 0.075 were there", 0.5, []func(*wells.Limit){present}, 525, 1000, 0.5, 0.625},
		{"own against present: 0.05 were there", 0.5, []func(*wells.Limit){own, present}, 550, 1000, 0.5, 0.55},
		{"against licences: 0.2 were allowed", 0.5, []func(*wells.Limit){licence}, 600, 1000, 0.5, 0.7},
		{"own against licences: nothing of B counts", 0.5, []func(*wells.Limit){own, licence}, 500, 1000, 0.5, 0.5},
		{"reserve of a fifth: 0.4 is left", 0.5, []func(*wells.Limit){reserve}, 300, 800, 0.4, 0.4},
		{"level at least: room 0.6", 9.4, []func(*wells.Limit){value}, 500, 1000, 9.4, 0.6},
		{"level at least with a reserve: room 0.48", 9.4, []func(*wells.Limit){value, reserve}, 380, 800, 9.52, 0.48},
		{"a level counts every well, own or not", 9.4, []func(*wells.Limit){value, own}, 500, 1000, 9.4, 0.6},
		{"share of base: 0.03 of 10", 0.03, []func(*wells.Limit){share}, 200, 10000, 0.03, 0.3},
		{"share of base with a reserve", 0.03, []func(*wells.Limit){share, reserve}, 140, 8000, 0.024, 0.24},
	} {
		s := twoWells(wells.PointLevel, 10)
		s.limit("L", "R", c.limit, c.change...)
		r := s.plan(t)
		l := limitOf(t, r, "L")
		exact(t, c.name+": rate", r.Wells[0].Rate, c.rate)
		exact(t, c.name+": price", l.ShadowPrice, c.price)
		exact(t, c.name+": value", l.Value, c.value)
		exact(t, c.name+": change allowed", l.ChangeRoom, c.room)
		if !l.Binds || l.Passed || !r.ModelValid {
			t.Errorf("%s: binds %v, passed %v, valid %v %v", c.name, l.Binds, l.Passed, r.ModelValid, r.Invalid)
		}
		exact(t, c.name+": total is A's", r.TotalRate, r.Wells[0].Rate)
		rec := r.Receptors[0]
		exact(t, c.name+": own part", rec.ChangeOwn, 0.001*r.Wells[0].Rate)
		exact(t, c.name+": others' part", rec.ChangeOthers, 0.1)
		exact(t, c.name+": value and change", rec.Value+rec.Change, 10)
		exact(t, c.name+": others recent", *rec.OthersRecent, 10-0.09)
		exact(t, c.name+": others licensed", *rec.OthersLicensed, 10-0.2)
	}
}

// Headroom is counted to the limit as entered, in its own unit, and its share against the limit's own size.
func TestHeadroomIgnoresReserve(t *testing.T) {
	s := twoWells(wells.SpringFlow, 1000)
	s.table.response.Rows[0].Slope = []float64{0.5, 0.25}
	s.limit("L", "R", 0.2, func(l *wells.Limit) { l.Quantity = wells.ShareOfBase; l.Reserve = 0.25 })
	l := limitOf(t, s.plan(t), "L")
	exact(t, "value", l.Value, 0.15)
	exact(t, "headroom", l.Headroom, 0.05)
	exact(t, "share", *l.RoomShare, 0.25)
	if l.Unit != "1" {
		t.Errorf("unit %q", l.Unit)
	}
	want := "Binds with its reserve of 25 % kept back. A contributes 67 %, B 33 %. One more per cent of the undisturbed value is worth 15 m³/d, up to 53 per cent more; then A runs at its largest rate."
	if l.Sentence != want {
		t.Errorf("sentence %q, want %q", l.Sentence, want)
	}
}

// A limit of zero is hard: B alone may not pass it, a reserve changes nothing and no share is computed.
func TestZeroLimitIsHard(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("C", 0, 1000))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0)
	s.receptor("U", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("Z", "R", 0, func(l *wells.Limit) { l.Reserve = 0.5 })
	s.limit("L", "U", 0.4)
	r := s.plan(t)
	exact(t, "A", r.Wells[0].Rate, 0)
	exact(t, "C", r.Wells[1].Rate, 400)
	z := limitOf(t, r, "Z")
	if z.RoomShare != nil || !z.Binds || z.Passed {
		t.Errorf("zero limit: %+v", z)
	}
	s.brief.Aim, s.brief.Demand = MostHeadroom, number(100)
	r = s.plan(t)
	exact(t, "A", r.Wells[0].Rate, 0)
	exact(t, "worst", *r.WorstMargin, 0.75)
}

// Limits from below: a level may not rise above 10.2 under recharge by at most 800 m³/d, and a rise of at most 0.2 is the same.
func TestLimitsOnRise(t *testing.T) {
	for name, limit := range map[string]func(*wells.Limit){
		"level at most 10.2": func(l *wells.Limit) { l.Quantity, l.Value = wells.Value, 10.2 },
		"change at least":    func(l *wells.Limit) { l.Sense, l.Value = wells.AtLeast, -0.2 },
	} {
		s := newSite(MostYield, decidedWell("P", 0, 5000), decidedWell("I", -800, 0))
		s.receptor("R", wells.PointLevel, 10, 0, 0.001)    // near the recharge
		s.receptor("U", wells.PointLevel, 10, 0.001, 0.01) // where pumping is limited; recharge relieves it
		s.limit("L", "U", 0.5)
		s.limit("H", "R", 0, limit)
		r := s.plan(t)
		exact(t, name+": recharge", r.Wells[1].Rate, -200)
		exact(t, name+": pumping", r.Wells[0].Rate, 2500)
		exact(t, name+": recharge is not subtracted", r.TotalRate, 2500)
		h := limitOf(t, r, "H")
		if !h.Binds || h.Passed {
			t.Errorf("%s: %+v", name, h)
		}
		// 0.01 m of further rise is 10 m³/d of recharge, which relieves U by 0.1 m, worth 100 m³/d
		exact(t, name+": price", h.ShadowPrice, 10000)
		if l := limitOf(t, r, "L"); !strings.HasSuffix(l.Sentence, "Holds only because I recharges.") || len(r.Cautions) != 1 {
			t.Errorf("%s: %q, cautions %q", name, l.Sentence, r.Cautions)
		}
	}
}

// The level in a well: 40 m static, not below the higher of 30 m and the intake at 32 m; own slope 0.01 per m³/d.
func TestLowestLevel(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 5000))
	s.level(0, 40, 30, 0.01)
	s.brief.Wells[0].Intake = number(32)
	s.brief.WellTerms[0].OwnDrawdown = 0.004
	s.brief.Wells[0].LinearLoss = 0.001
	s.brief.Wells[0].DutyHours = 12 // the loss counts at twice the mean rate: 0.002 of the slope
	r := s.plan(t)
	w := r.Wells[0]
	exact(t, "rate", w.Rate, 800)
	exact(t, "price per metre", w.LevelShadowPrice, 100)
	exact(t, "level", w.PumpingLevel, 32)
	exact(t, "node", w.NodeLevel, 40-0.004*800)
	exact(t, "own", w.OwnLogarithm, 3.2)
	exact(t, "loss", w.WellLoss, 1.6)
	exact(t, "node's own slope", w.DrawdownByWell[0], 0.004)
	if *w.LowestLevel != 32 || w.LowestReason != "pump intake" || *r.WorstMargin != *w.LevelMargin/8 || !r.ModelValid {
		t.Errorf("%+v %v", w, r.Invalid)
	}
	// turbulent loss 1e-6 (2 Q)²: 4e-6 Q² + 0.01 Q = 8, and one more metre is worth 1/(8e-6 Q + 0.01)
	s.brief.Wells[0].QuadraticLoss = 1e-6
	r = s.plan(t)
	rate := (-0.01 + math.Sqrt(1e-4+4*4e-6*8)) / 8e-6
	near(t, "rate", r.Wells[0].Rate, rate, 1e-4) // cutTolerance of 8 m, worth some 70 m³/d per m
	near(t, "margin", *r.Wells[0].LevelMargin, 0, 8*cutTolerance)
	near(t, "price per metre", r.Wells[0].LevelShadowPrice, 1/(8e-6*rate+0.01), 1e-2)
	if !r.ModelValid {
		t.Errorf("%q", r.Invalid)
	}
	// at the rate that keeps the level without it, the loss of 2.56 m passes it
	response, _ := s.table.Linearise(context.Background(), []float64{800})
	given, err := Evaluate(s.brief, response, []float64{800})
	if err != nil {
		t.Fatal(err)
	}
	exact(t, "margin", *given.Wells[0].LevelMargin, -2.56)
	for _, c := range given.Checks {
		if c.Name == "Levels in wells are kept with the full well loss" && (c.Result != failed || !strings.Contains(c.Detail, "well A") || !strings.Contains(c.Detail, "2.56 m")) {
			t.Errorf("%+v", c)
		}
	}
	// a fixed well's loss is a constant of its own level
	s.brief.Wells[0].Mode, s.brief.Wells[0].FixedRate = wells.Fixed, 100
	s.brief.Wells = append(s.brief.Wells, decidedWell("B", 0, 9000))
	s.brief.WellTerms = append(s.brief.WellTerms, WellTerm{})
	s.table.response.Wells = []string{"A", "B"}
	s.table.response.Rows[0].Slope = []float64{0.01, 0.001}
	r = s.plan(t)
	exact(t, "B", r.Wells[1].Rate, (8-1-0.04)/0.001)
	exact(t, "A's margin", *r.Wells[0].LevelMargin, 0)
}

func TestQuotasAndLicences(t *testing.T) {
	for _, c := range []struct {
		name  string
		brief func(*Brief)
		total float64
		price float64
	}{
		{"per day", func(b *Brief) { b.Quotas = []Quota{{Name: "G", Wells: []string{"A", "F"}, PerDay: number(700)}} }, 500, 1},
		{"per year", func(b *Brief) {
			b.Quotas = []Quota{{Name: "G", Wells: []string{"A", "F"}, PerYear: number(700 * 365.25)}}
		}, 500, 1},
		{"licence per hour at half-day duty", func(b *Brief) {
			b.Wells[0].DutyHours = 12
			b.Licences = []wells.Licence{{ID: "G", Wells: []string{"A"}, PerHour: number(30)}} // 30 m³/h for 12 h is 360 m³/d
		}, 360, 0.5},
	} {
		f := fixedWell("F", 200)
		s := newSite(MostYield, decidedWell("A", 0, 1000), f)
		s.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
		c.brief(&s.brief)
		r := s.plan(t)
		exact(t, c.name+": total", r.TotalRate, c.total)
		q := r.Quotas[0]
		exact(t, c.name+": price", q.ShadowPrice, c.price)
		if !q.Binds {
			t.Errorf("%s: %+v", c.name, q)
		}
	}
}

// Recharge counts neither in a quota nor against it.
func TestRechargeIsNoYield(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 1000), decidedWell("I", -300, -100))
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001)
	s.limit("L", "R", 0.2)
	s.brief.Quotas = []Quota{{Name: "G", Wells: []string{"A", "I"}, PerDay: number(450)}}
	r := s.plan(t)
	exact(t, "A", r.Wells[0].Rate, 450)
	exact(t, "sum", r.Quotas[0].Sum, 450)
	if !(r.Wells[1].Rate <= -250+1e-6 && r.Wells[1].Rate >= -300) {
		t.Errorf("recharge %v", r.Wells[1].Rate)
	}
	if !r.NotUnique {
		t.Error("recharge between 250 and 300 m³/d is as good: not said")
	}
}

// What is not assessed is listed and has no figures.
func TestNotAssessed(t *testing.T) {
	s := twoWells(wells.PointLevel, 10)
	s.limit("L", "R", 0.5)
	s.limit("average", "R", 0.6, func(l *wells.Limit) { l.State = "average" })
	s.brief.States = []wells.OperatingState{{Name: "average", Default: true}}
	s.brief.Receptors = append(s.brief.Receptors, wells.Receptor{ID: "far", Name: "Far spring", Kind: wells.SpringFlow, Outside: true})
	s.limit("away", "far", 5)
	r := s.plan(t)
	exact(t, "rate", r.Wells[0].Rate, 400)
	if got := limitOf(t, r, "average").ResultState; got != "yes" {
		t.Errorf("average: %q", got)
	}
	if got := limitOf(t, r, "away").ResultState; got != "not assessed: the receptor lies outside the model" {
		t.Errorf("away: %q", got)
	}
	all := strings.Join(r.NotAssessed, "\n")
	for _, want := range []string{"limit away", "Far spring"} {
		if !strings.Contains(all, want) {
			t.Errorf("%q is missing from %q", want, r.NotAssessed)
		}
	}
	if len(r.Receptors) != 2 || len(r.Sensitivities.Receptors) != 1 {
		t.Errorf("%d receptors, %d rows", len(r.Receptors), len(r.Sensitivities.Receptors))
	}
}

// An off well and one out of service stand still and keep their line; blanks in a baseline are found.
func TestWellsAtRest(t *testing.T) {
	off, out := decidedWell("O", 0, 900), decidedWell("S", 100, 900)
	off.Mode, out.Outage = wells.Off, true
	s := newSite(MostYield, decidedWell("A", 0, 1000), off, out)
	s.receptor("R", wells.PointLevel, 10, 0.001, 0.001, 0.001)
	s.limit("L", "R", 0.3, func(l *wells.Limit) { l.Baseline = wells.PresentPumping })
	r := s.plan(t)
	for i, want := range []float64{300, 0, 0} {
		exact(t, r.Wells[i].ID, r.Wells[i].Rate, want)
	}
	if len(r.Findings) != 3 || !strings.Contains(r.Findings[0], "well A is blank") {
		t.Errorf("findings %q", r.Findings)
	}
}

// A bad brief is refused with all its faults at once, and never with a panic.
func TestBadBrief(t *testing.T) {
	s := newSite("most-fun", decidedWell("A", 5, 1), decidedWell("A", math.NaN(), 1), decidedWell("M", -1, 1))
	s.brief.Wells[0].DutyHours = 0
	s.limit("L", "nowhere", math.Inf(1), func(l *wells.Limit) { l.Reserve = 1 })
	s.brief.Quotas = []Quota{{Name: "Q", Wells: []string{"A", "A", "Z"}, PerDay: number(-1)}}
	s.brief.Demand = number(-3)
	_, err := Make(context.Background(), s.brief, s.table, Options{})
	var data *DataError
	if !errors.As(err, &data) {
		t.Fatalf("error %v", err)
	}
	if len(data.Problems) != 12 {
		t.Errorf("%d problems: %q", len(data.Problems), data.Problems)
	}
	s = newSite("most-fun", fixedWell("B", 1))
	if _, err = Make(context.Background(), s.brief, s.table, Options{}); !errors.As(err, &data) || len(data.Problems) != 2 {
		t.Errorf("error %v", err)
	}
}

// A bad response is refused too.
func TestBadResponse(t *testing.T) {
	for name, spoil := range map[string]func(*Response){
		"lacks a well":       func(r *Response) { r.Wells = r.Wells[:1] },
		"foreign well":       func(r *Response) { r.Wells = []string{"A", "X"} },
		"slope not a number": func(r *Response) { r.Rows[0].Slope = []float64{math.NaN(), 0} },
		"wrong unit":         func(r *Response) { r.Rows[0].Unit = "m3/d" },
		"row twice":          func(r *Response) { r.Rows = append(r.Rows, r.Rows[0]) },
		"foreign receptor":   func(r *Response) { r.Rows[0].Receptor = "X" },
		"slope missing":      func(r *Response) { r.Rows[0].Slope = []float64{1} },
	} {
		s := twoWells(wells.PointLevel, 10)
		s.limit("L", "R", 0.5)
		response := s.table.response
		response.At = []float64{0, 0}
		response.Rows = append([]Row(nil), response.Rows...)
		spoil(&response)
		_, err := Evaluate(s.brief, &response, []float64{1, 2})
		var data *DataError
		if !errors.As(err, &data) {
			t.Errorf("%s: error %v", name, err)
		}
	}
}

// The columns of a response may stand in any order.
func TestResponseInAnotherOrder(t *testing.T) {
	s := twoWells(wells.PointLevel, 10)
	s.limit("L", "R", 0.5)
	r := &Response{Wells: []string{"B", "A"}, At: []float64{200, 400}, WellHeads: []float64{1, 2},
		Rows: []Row{{Receptor: "R", Base: 10, Change: 0.5, Slope: []float64{0.0005, 0.001}, Linear: true, Unit: "m"}}}
	got, err := Evaluate(s.brief, r, []float64{400, 200})
	if err != nil {
		t.Fatal(err)
	}
	exact(t, "change", got.Receptors[0].Change, 0.5)
	exact(t, "A's head", got.Wells[0].NodeLevel, 2)
	if got.Status != StatusGivenRates || got.Audit.SuperpositionError != 0 {
		t.Errorf("%s, superposition error %v", got.Status, got.Audit.SuperpositionError)
	}
}

// A plan whose re-solve differs from superposition is not valid.
func TestResolveThatDiffers(t *testing.T) {
	s := twoWells(wells.PointLevel, 10)
	s.limit("L", "R", 0.5)
	s.table.wrong = 0.01
	r := s.plan(t)
	near(t, "superposition error", r.Audit.SuperpositionError, 0.01/0.51, 1e-9)
	if r.ModelValid || len(r.Invalid) == 0 {
		t.Errorf("valid %v: %q", r.ModelValid, r.Invalid)
	}
}
