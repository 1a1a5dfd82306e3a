package workbook

import (
	"fmt"
	"math"

	"springbound/plan"
)

func ptr(x float64) *float64 { return &x }

// The response of three wells and two points in a strip between two canals (3000 m x 2000 m, transmissivity 800 m²/d), from the
// two-stream strip form with image wells; drawdown per rate [m per m³/d].
var (
	stripPoint1 = []float64{2.712079621525e-4, 3.842560390817e-4, 2.069615201665e-4}
	stripPoint2 = []float64{1.469348697956e-4, 4.305805866293e-4, 2.910185545674e-4}
	stripWells  = [][]float64{
		{1.828591694781e-3, 1.834747600834e-4, 1.227870889678e-4},
		{1.834747600834e-4, 1.975167108720e-3, 2.295258708132e-4},
		{1.227870889678e-4, 2.295258708132e-4, 1.839313309697e-3},
	}
	// stripBest is the optimum of: largest total with drawdown at most 0.30 m and 0.25 m at the two points.
	stripBest   = []float64{733.050625, 0, 488.935498}
	stripPrices = []float64{2969.775953, 1324.213347}
)

// testWell is a well with round numbers; its rate is the plan's.
func testWell(id string, rate float64) plan.WellResult {
	return plan.WellResult{ID: id, Name: "Well " + id, Owner: "Aldermoor Water", Mode: "decided", Rate: rate, DutyHours: 20, Max: 2500, RadiusM: 0.2,
		MaxSource: "step test of 2021", StaticLevel: 41.5, OwnPerRate: 4.1e-4, LinearLoss: 2e-4, QuadraticLoss: 3e-7,
		LowestLevel: ptr(33), LowestReason: "pump intake plus 2 m", AquiferTop: ptr(25), Source: "bore record", X: 345000.25, Y: 5012000.5}
}

// richReport is a plan with every kind of line: own wells, an existing user, a recharging well, a well that is off; receptors on
// levels and flows with all kinds of limits; quotas; capture; checks. Its numbers are worked out here, apart from the writer's code.
func richReport() *plan.Report {
	r := &plan.Report{Schema: "springbound/plan", Version: 1, Program: "springbound 1.0", Title: "Aldermoor wellfield, renewal of the licences",
		Headline: "largest total rate that keeps the limits entered: 1,222 m³/d", Aim: "most-yield", Status: "optimal", ModelValid: true, State: "average", Period: "steady",
		PreparedFor: "Aldermoor Water", PreparedBy: "H. Penrose", Reference: "AW-17/4", Plane: "UTM zone 30 N, chosen from the extent", Datum: "mean sea level 1985", RateUnit: "L/s",
		NotAssessed: []string{"parameter uncertainty", "time to steady state: storage was not given", "receptor Q9: it lies outside the model"},
		Cautions:    []string{"A recharging well carries part of limit P2-a.", "Prices hold near the plan, for this model only."},
		Findings:    []string{"well U1: the recent rate is above the licensed one"}, WorstLimit: "drawdown at Mill spring at most 0.30 m", WorstMargin: ptr(0)}
	for i, rate := range stripBest {
		w := testWell(fmt.Sprintf("W%d", i+1), rate)
		w.Present, w.Licensed, w.Requested = ptr(300), ptr(800), ptr(900)
		r.Wells = append(r.Wells, w)
	}
	r.Wells[1].AtBound, r.Wells[1].ShadowPrice = "min", 0
	user := testWell("U1", 250)
	user.Mode, user.Others, user.Owner, user.Name = "fixed", true, "Corbel Dairy", "Dairy bore"
	user.Min, user.Max, user.Present, user.Recent, user.Licensed = 250, 250, ptr(240), ptr(250), ptr(400)
	recharge := testWell("R1", -120)
	recharge.Mode, recharge.Min, recharge.Max, recharge.LowestLevel, recharge.LowestReason = "fixed", -120, -120, nil, ""
	recharge.Name = "Recharge well at the gravel pit"
	off := testWell("X1", 0)
	off.Mode, off.Max, off.MaxSource = "off", 0, ""
	off.LowestLevel, off.AquiferTop = nil, nil
	r.Wells = append(r.Wells, user, recharge, off)

	extra := [][]float64{{1.1e-4, 0.9e-4, 1.4e-4}, {0.8e-4, 1.2e-4, 0.7e-4}}
	rows := [][]float64{append(append([]float64{}, stripPoint1...), extra[0]...), append(append([]float64{}, stripPoint2...), extra[1]...),
		{0.11, 0.23, 0.08, 0.05, 0.07, 0.02}, {0.31, 0.12, 0.22, 0.33, 0.15, 0.1}, {2.2e-7, 1.1e-7, 3.3e-7, 1e-7, 2e-7, 4e-7},
		{1.6e-4, 4.4e-4, 2.4e-4, 0.6e-4, 1.7e-4, 0.4e-4}, {2.5e-3, 1.8e-4, 1.2e-4, 1e-4, 1.1e-4, 0.9e-4}}
	bases := []float64{40.2, 39.9, 1900, 5200, 1.9e-3, 40.05, 41.5}
	kinds := []string{"point", "neighbour_well", "spring", "river_reach", "saline_front", "wetland_worst", "pumping_level"}
	units := []string{"m", "m", "m3/d", "m3/d", "1", "m", "m"}
	names := []string{"Mill spring level", "Hallam's well", "Mill spring", "River Arrel, km 3 to 5", "Salt front at the dunes", "Sedge fen", "Level in W1"}
	values := []string{"level", "level", "spring flow", "flow to the river", "gradient", "lowest level", "level in the well"}
	changes := []string{"drawdown", "drawdown", "loss of spring flow", "loss of river flow", "fall of gradient", "largest drawdown", "drawdown in the well"}
	for k := range rows {
		rec := plan.ReceptorResult{ID: fmt.Sprintf("P%d", k+1), Name: names[k], Kind: kinds[k], Unit: units[k], ValueWord: values[k], ChangeWord: changes[k],
			Owner: "Parish of Corbel", Use: "public", Source: "survey of water features 2022", Date: "2022-05-04", FieldChecked: k%2 == 0, NoPumping: bases[k]}
		if kinds[k] == "pumping_level" {
			rec.Feature = "W1"
		}
		r.Receptors = append(r.Receptors, rec)
	}
	r.Receptors[5].Place = "at 345,120 / 5,012,440"
	fillTable(r, rows)
	r.Receptors = append(r.Receptors, plan.ReceptorResult{ID: "Q9", Name: "Far spring", Kind: "spring", Unit: "m3/d", Outside: true, ValueWord: "spring flow", ChangeWord: "loss of spring flow", Source: "map",
		Limits: []plan.LimitResult{{ID: "Q9-a", Quantity: "change", Sense: "at_most", Limit: 50, Unit: "m3/d", Baseline: "no_pumping", Counts: "cumulative", ResultState: "not assessed: the receptor lies outside the model", Sentence: "Not assessed: the receptor lies outside the model."}}})
	addLimits(r, rows)
	finishWells(r, rows)
	r.Quotas = []plan.QuotaResult{quotaOf(r, "L-1", "Aldermoor Water", "per day", 1500, 1500, 1, "W1", "W2", "W3"),
		quotaOf(r, "L-1", "Aldermoor Water", "per year", 400000/daysPerYear, 400000, 1, "W1", "W3", "R1"),
		quotaOf(r, "L-2", "Aldermoor Water", "per hour", 45*24, 45, 24.0/20, "W1"), quotaOf(r, "Nothing from X1", "", "per day", 0, 0, 1, "X1")}
	addCapture(r)
	addRecord(r)
	return r
}

// fillTable works out the receptors from sensitivities.
func fillTable(r *plan.Report, rows [][]float64) {
	for _, w := range r.Wells {
		r.Sensitivities.Wells = append(r.Sensitivities.Wells, w.ID)
	}
	for k := range rows {
		rec := &r.Receptors[k]
		r.Sensitivities.Receptors = append(r.Sensitivities.Receptors, rec.ID)
		r.Sensitivities.Units = append(r.Sensitivities.Units, rec.Unit)
		r.Sensitivities.Values = append(r.Sensitivities.Values, rows[k])
		recent, licensed, blank := rec.NoPumping, rec.NoPumping, false
		for i, w := range r.Wells {
			part := rows[k][i] * w.Rate
			rec.Change += part
			if !w.Others {
				rec.ChangeOwn += part
				continue
			}
			rec.ChangeOthers += part
			if w.Recent == nil || w.Licensed == nil {
				blank = true
				continue
			}
			recent -= rows[k][i] * *w.Recent
			licensed -= rows[k][i] * *w.Licensed
		}
		rec.Value, rec.ChangeResolved = rec.NoPumping-rec.Change, rec.Change
		if !blank {
			rec.OthersRecent, rec.OthersLicensed = &recent, &licensed
		}
	}
	r.Contributions = plan.Table{Receptors: r.Sensitivities.Receptors, Units: r.Sensitivities.Units, Wells: r.Sensitivities.Wells}
	for k := range rows {
		parts := make([]float64, len(r.Wells))
		for i, w := range r.Wells {
			parts[i] = rows[k][i] * w.Rate
		}
		r.Contributions.Values = append(r.Contributions.Values, parts)
	}
}

// limitOf works out a limit's line as the plan means it.
func limitOf(r *plan.Report, k int, row []float64, l plan.LimitResult) plan.LimitResult {
	rec := r.Receptors[k]
	own := l.Counts == "own" && l.Quantity != "value"
	var change, base, largestPart float64
	for i, w := range r.Wells {
		if own && w.Others {
			continue
		}
		change += row[i] * w.Rate
		switch {
		case l.Baseline == "present" && w.Present != nil:
			base += row[i] * *w.Present
		case l.Baseline == "others_at_licence" && w.Others && w.Licensed != nil:
			base += row[i] * *w.Licensed
		}
		largestPart = math.Max(largestPart, math.Abs(row[i])*math.Max(math.Abs(w.Min), math.Abs(w.Max)))
		if rec.Feature == w.ID {
			run := w.Rate * 24 / w.DutyHours
			change += w.QuadraticLoss * run * math.Abs(run)
		}
	}
	l.Unit, l.ResultState, l.State = rec.Unit, "yes", "average"
	unit, size := 1.0, math.Abs(l.Limit)
	switch l.Quantity {
	case "value":
		l.Value = rec.NoPumping - change
		size = math.Abs(rec.NoPumping - l.Limit)
	case "share_of_base":
		unit, l.Unit = math.Abs(rec.NoPumping), "1"
		l.Value = (change - base) / unit
	default:
		l.Value = change - base
	}
	l.Headroom = l.Limit - l.Value
	if l.Sense == "at_least" {
		l.Headroom = -l.Headroom
	}
	near := limitNearShare * size
	if size > 0 {
		share := l.Headroom / size
		l.RoomShare = &share
	} else {
		near = limitNearShare * largestPart / unit
	}
	l.Passed = l.Headroom < -near
	spare := l.Headroom - l.Reserve*size
	l.Binds = !l.Passed && math.Abs(spare) <= near
	switch {
	case l.Passed:
		l.Sentence = "Passed by " + figureText(-l.Headroom) + "."
	case l.Binds:
		l.Sentence = "Binds. W1 contributes 66 %, W3 34 %. One more centimetre is worth 30 m³/d, up to 16 cm more; then W3 stands still."
		low, high, price := l.Limit-0.12, l.Limit+0.16, l.ShadowPrice
		l.Range = &plan.PriceRange{Tighter: &price, TighterTo: &low, TighterThen: "W1 stands still", Looser: &price, LooserTo: &high, LooserThen: "W3 stands still"}
	default:
		l.Sentence = "Holds with " + figureText(l.Headroom) + " to spare."
	}
	return l
}

func addLimits(r *plan.Report, rows [][]float64) {
	add := func(k int, l plan.LimitResult) {
		l.ID = fmt.Sprintf("%s-%c", r.Receptors[k].ID, 'a'+len(r.Receptors[k].Limits))
		l.Source, l.Date = "licence condition 4", "2019-11-30"
		r.Receptors[k].Limits = append(r.Receptors[k].Limits, limitOf(r, k, rows[k], l))
	}
	change, value, share := "change", "value", "share_of_base"
	most, least := "at_most", "at_least"
	none, present, licence := "no_pumping", "present", "others_at_licence"
	all, own := "cumulative", "own"
	add(0, plan.LimitResult{Quantity: change, Sense: most, Limit: r.Receptors[0].Change, Baseline: none, Counts: all, Entered: "31 cm", ShadowPrice: stripPrices[0]})
	add(0, plan.LimitResult{Quantity: change, Sense: most, Limit: 0.3, Baseline: present, Counts: all, Reserve: 0.1})
	add(0, plan.LimitResult{Quantity: change, Sense: most, Limit: 0.35, Baseline: licence, Counts: all})
	add(1, plan.LimitResult{Quantity: change, Sense: most, Limit: 0.25, Baseline: none, Counts: own, Entered: "0.25 m", ShadowPrice: stripPrices[1]})
	add(1, plan.LimitResult{Quantity: change, Sense: most, Limit: 0.2, Baseline: present, Counts: own})
	add(1, plan.LimitResult{Quantity: change, Sense: most, Limit: 0.2, Baseline: licence, Counts: own})
	add(1, plan.LimitResult{Quantity: value, Sense: least, Limit: 39.5, Baseline: none, Counts: all, Reserve: 0.2})
	add(2, plan.LimitResult{Quantity: share, Sense: most, Limit: 0.1, Baseline: none, Counts: all, Entered: "10 %"})
	add(2, plan.LimitResult{Quantity: share, Sense: most, Limit: 0.05, Baseline: present, Counts: own})
	add(2, plan.LimitResult{Quantity: value, Sense: least, Limit: 1700, Baseline: none, Counts: all, Entered: "19.7 L/s"})
	add(3, plan.LimitResult{Quantity: change, Sense: most, Limit: 0, Baseline: licence, Counts: all})
	add(3, plan.LimitResult{Quantity: value, Sense: most, Limit: 6000, Baseline: none, Counts: all})
	add(4, plan.LimitResult{Quantity: value, Sense: least, Limit: 1.5e-3, Baseline: none, Counts: all})
	add(5, plan.LimitResult{Quantity: change, Sense: least, Limit: 0.1, Baseline: none, Counts: own})
	add(6, plan.LimitResult{Quantity: value, Sense: least, Limit: 35, Baseline: none, Counts: all})
	add(6, plan.LimitResult{Quantity: change, Sense: most, Limit: 6, Baseline: none, Counts: own})
}

// finishWells works out rates, levels and totals.
func finishWells(r *plan.Report, rows [][]float64) {
	n := len(r.Wells)
	for i := range r.Wells {
		w := &r.Wells[i]
		w.Running, w.Yearly = w.Rate*24/w.DutyHours, w.Rate*daysPerYear
		w.OwnLogarithm = w.OwnPerRate * w.Rate
		w.WellLoss = w.LinearLoss*w.Running + w.QuadraticLoss*w.Running*math.Abs(w.Running)
		w.NodeLevel = w.StaticLevel
		for j := 0; j < n; j++ {
			drop := 1e-4 / float64(1+i+j)
			if i < 3 && j < 3 {
				drop = stripWells[i][j] * 0.7
			}
			w.DrawdownByWell = append(w.DrawdownByWell, drop)
			w.NodeLevel -= drop * r.Wells[j].Rate
		}
		w.PumpingLevel = w.NodeLevel - w.OwnLogarithm - w.WellLoss
		if w.LowestLevel != nil {
			w.LevelMargin = ptr(w.PumpingLevel - *w.LowestLevel)
		}
		if w.Mode == "decided" && w.Rate > 0 {
			r.TotalRate += w.Rate
		}
	}
}

func quotaOf(r *plan.Report, name, holder, basis string, limit, entered, weight float64, ids ...string) plan.QuotaResult {
	q := plan.QuotaResult{Name: name, Holder: holder, Wells: ids, Basis: basis, Limit: limit, Entered: entered, Source: "licence deed"}
	for _, id := range ids {
		for _, w := range r.Wells {
			if w.ID == id && w.Rate > 0 {
				q.Sum += weight * w.Rate
			}
		}
	}
	q.Headroom = q.Limit - q.Sum
	q.Binds = q.Headroom <= limitNearShare*q.Limit
	return q
}

func addCapture(r *plan.Report) {
	var pumped float64
	for _, w := range r.Wells {
		r.CaptureWells = append(r.CaptureWells, w.ID)
		pumped += w.Rate
	}
	west := []float64{0.76666667, 0.5, 0.26666667, 0.4, 0.5, 0.3}
	for k, feature := range []string{"Canal at x = 0", "Canal at x = 3000", "Mill spring"} {
		c := plan.Capture{Feature: feature, Kind: []string{"edge", "edge", "spring"}[k]}
		for i, w := range r.Wells {
			share := []float64{west[i], 0.9 - west[i], 0.1}[k]
			c.ShareByWell = append(c.ShareByWell, share)
			c.Flow += share * w.Rate
		}
		c.Share = ptr(c.Flow / pumped)
		if k == 2 {
			c.Available = ptr(1900)
		}
		r.Capture = append(r.Capture, c)
	}
}

func addRecord(r *plan.Report) {
	r.Balances = []plan.Balance{{State: "without pumping", Lines: []plan.BalanceLine{{Feature: "Canal at x = 0", Kind: "edge", In: 1200, Out: 310.5}, {Feature: "Recharge", Kind: "recharge", In: 2400, Out: 0}, {Feature: "Mill spring", Kind: "spring", In: 0, Out: 3289.5}}, In: 3600, Out: 3600, Error: 1e-13},
		{State: "at the plan", Lines: []plan.BalanceLine{{Feature: "Canal at x = 0", Kind: "edge", In: 1900, Out: 120.25}, {Feature: "Recharge", Kind: "recharge", In: 2400, Out: 0}, {Feature: "Wells", Kind: "well", In: 120, Out: 1471.98}, {Feature: "Mill spring", Kind: "spring", In: 0, Out: 2827.77}}, In: 4420, Out: 4420, Error: 0}}
	r.NoFlow = []plan.NoFlowStretch{{From: "from 344,100 / 5,010,000 to 347,100 / 5,010,000", Length: 3000, Drawdown: 0.142}}
	r.Audit = plan.Audit{BalanceError: 1e-13, SuperpositionError: 3e-12, LinearResidual: 4e-15, Reciprocity: 2e-14, CaptureSumError: 1e-13, DualGap: 2e-16, Factorisations: 1, Solves: 14, Functionals: 13, Iterations: 4}
	r.Checks = []plan.Check{{Name: "water balance", Result: "pass", Detail: "error 1e-13 of the throughflow"}, {Name: "superposition against a full solve", Result: "pass", Detail: "largest difference 3e-12"},
		{Name: "aquifer stays confined", Result: "pass", Detail: "lowest head 14.1 m above the top"}, {Name: "largest well out of service", Result: "not done", Detail: "no demand was given"}, {Name: "boundary as given and as no flow", Result: "fail", Detail: "the southern edge changes drawdown at Sedge fen by 12 %"}}
	r.HandFormula = &plan.HandFormula{Well: "W1", Transmissivity: 800, Rate: stripBest[0], Near: 5, Far: 25, ModelDrop: 0.2344, Note: "mean over a circle of mesh sides"}
	r.Assumptions = []plan.Assumption{{What: "Transmissivity", Value: "800 m²/d", Low: "500 m²/d", High: "1,200 m²/d", Basis: "measured", Source: "pumping test of 2018, report 4"}, {What: "Recharge", Value: "0.25 mm/d", Low: "", High: "", Basis: "estimated", Source: "soil water balance"}, {What: "Leakage", Value: "none", Low: "", High: "", Basis: "assumed", Source: ""}}
	r.Observations = []plan.ObservationFit{{ID: "O-1", Kind: "point", Unit: "m", Observed: 39.85, Modelled: 39.91, Date: "2022-09-12", Source: "reading by the owner"}, {ID: "O-2", Kind: "spring", Unit: "m3/d", Observed: 1750, Modelled: 1688, Date: "2022-09-12", Source: "weir"}}
	r.Mesh = plan.MeshInfo{Nodes: 10412, Triangles: 20516, MinAngle: 28.4, FinestM: 0.8, CoarsestM: 120, Growth: 1.35, Notes: []string{"Two corners of the outline are sharper than 20 degrees."}}
	r.Inputs = []plan.InputFile{{File: "aldermoor.toml", SHA256: "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08"}, {File: "layers/wells.geojson", SHA256: "60303ae22b998861bce3b28f33eec1be758a213c86c93c076dbe9f558c11c752"}}
}

// stripReport is the benchmark alone: three wells, two points, largest total.
func stripReport() *plan.Report {
	r := &plan.Report{Title: "Strip between two canals", Aim: "most-yield", Status: "optimal", ModelValid: true}
	for i, rate := range stripBest {
		w := testWell(fmt.Sprintf("W%d", i+1), rate)
		w.LowestLevel, w.LowestReason = nil, ""
		r.Wells = append(r.Wells, w)
	}
	rows := [][]float64{stripPoint1, stripPoint2}
	for k, limit := range []float64{0.30, 0.25} {
		r.Receptors = append(r.Receptors, plan.ReceptorResult{ID: fmt.Sprintf("P%d", k+1), Kind: "point", Unit: "m", ValueWord: "level", ChangeWord: "drawdown", NoPumping: 10})
		_ = limit
	}
	fillTable(r, rows)
	for k, limit := range []float64{0.30, 0.25} {
		l := limitOf(r, k, rows[k], plan.LimitResult{ID: fmt.Sprintf("L%d", k+1), Quantity: "change", Sense: "at_most", Limit: limit, Baseline: "no_pumping", Counts: "cumulative", ShadowPrice: stripPrices[k]})
		r.Receptors[k].Limits = []plan.LimitResult{l}
	}
	finishWells(r, rows)
	return r
}

// conflictReport has no plan.
func conflictReport() *plan.Report {
	r := richReport()
	r.Status, r.Headline, r.ModelValid, r.WorstMargin = "infeasible", "", true, nil
	r.Conflict = &plan.Conflict{Sentence: "The demand of 1,500 m³/d and the drawdown of at most 0.25 m at Hallam's well cannot hold together.", ExistingAlone: false,
		Members:    []plan.ConflictMember{{Limit: "demand of 1,500 m³/d", Unit: "m3/d", By: 278.01, Alone: ptr(278.01), Source: "brief"}, {Limit: "drawdown at most 0.25 m", Receptor: "Hallam's well", Unit: "m", By: 0.06, Source: "licence condition 4"}},
		Relaxation: []plan.ConflictMember{{Limit: "drawdown at most 0.25 m", Receptor: "Hallam's well", Unit: "m", By: 0.0521, Alone: ptr(0.0521), Source: "licence condition 4"}}}
	r.Demand = ptr(1500)
	return r
}

// largeReport has many wells and receptors.
func largeReport(wells, receptors int) *plan.Report {
	r := &plan.Report{Title: "Large field", Aim: "most-yield", Status: "optimal", ModelValid: true, RateUnit: "m3/d", State: "average"}
	for i := 0; i < wells; i++ {
		w := testWell(fmt.Sprintf("W%d", i+1), 100+math.Mod(float64(i)*37.7, 400))
		w.Present = ptr(90)
		if i%5 == 4 {
			w.Mode, w.Others, w.Licensed, w.Recent = "fixed", true, ptr(150), ptr(120)
		}
		r.Wells = append(r.Wells, w)
	}
	var rows [][]float64
	for k := 0; k < receptors; k++ {
		row := make([]float64, wells)
		for i := range row {
			row[i] = 1e-6 * (1 + math.Mod(float64(i*31+k*17)*0.618034, 1)*40)
		}
		rows = append(rows, row)
		rec := plan.ReceptorResult{ID: fmt.Sprintf("P%d", k+1), Name: fmt.Sprintf("Place %d", k+1), Kind: "point", Unit: "m", NoPumping: 50, ValueWord: "level", ChangeWord: "drawdown"}
		if k%3 == 0 {
			rec.Kind, rec.Unit, rec.NoPumping = "river_reach", "m3/d", 9000
		}
		r.Receptors = append(r.Receptors, rec)
	}
	fillTable(r, rows)
	for k := range rows {
		l := limitOf(r, k, rows[k], plan.LimitResult{ID: fmt.Sprintf("L%d", k+1), Quantity: "change", Sense: "at_most", Limit: r.Receptors[k].Change * 1.25, Baseline: "no_pumping", Counts: "cumulative"})
		l.Source = "licence"
		r.Receptors[k].Limits = []plan.LimitResult{l}
	}
	finishWells(r, rows)
	pumped := 0.0
	for _, w := range r.Wells {
		r.CaptureWells = append(r.CaptureWells, w.ID)
		pumped += w.Rate
	}
	for k := 0; k < 6; k++ {
		c := plan.Capture{Feature: fmt.Sprintf("Reach %d", k+1), Kind: "river"}
		for _, w := range r.Wells {
			c.ShareByWell = append(c.ShareByWell, 1.0/6)
			c.Flow += w.Rate / 6
		}
		c.Share = ptr(c.Flow / pumped)
		r.Capture = append(r.Capture, c)
	}
	return r
}
