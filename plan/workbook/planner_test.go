package workbook

import (
	"context"
	"strings"
	"testing"

	"springbound/plan"
	"springbound/wells"
)

// strip is the aquifer of the two-canal benchmark, as a table of responses.
type strip struct{ response plan.Response }

func (m *strip) Linearise(_ context.Context, rates []float64) (*plan.Response, error) {
	r := m.response
	r.At = append([]float64(nil), rates...)
	r.Rows = append([]plan.Row(nil), r.Rows...)
	for i := range r.Rows {
		row := &r.Rows[i]
		row.Change = 0
		for k, q := range rates {
			row.Change += row.Slope[k] * q
		}
	}
	return &r, nil
}

// plannerBrief is the benchmark with an existing user, a level in a bore, a spring, quotas and every baseline.
func plannerBrief(aim plan.Aim, demand *float64) (plan.Brief, *strip) {
	b := plan.Brief{Aim: aim, Demand: demand}
	m := &strip{}
	for i, id := range []string{"W1", "W2", "W3", "U1"} {
		w := wells.Well{ID: id, Name: "Well " + id, Mode: wells.Decided, Max: 2500, MaxSource: "step test", DutyHours: 18, Radius: 0.2, LinearLoss: 1e-4, QuadraticLoss: 2e-7, LowestLevel: ptr(5), Present: ptr(100)}
		if i == 3 {
			w.Mode, w.Others, w.FixedRate, w.Recent, w.Licensed, w.LowestLevel = wells.Fixed, true, 150, ptr(140), ptr(200), nil
		}
		b.Wells = append(b.Wells, w)
		b.WellTerms = append(b.WellTerms, plan.WellTerm{OwnDrawdown: 2e-4, StaticLevel: 12})
		m.response.Wells = append(m.response.Wells, id)
	}
	fourth := []float64{1.0e-4, 1.5e-4, 0.11, 1.2e-4}
	rows := [][]float64{stripPoint1, stripPoint2, {0.2, 0.25, 0.12}, stripWells[0]}
	for i, kind := range []wells.Kind{wells.PointLevel, wells.NeighbourWell, wells.SpringFlow, wells.PumpingLevel} {
		id := []string{"P1", "P2", "S1", "B1"}[i]
		slope := append(append([]float64{}, rows[i]...), fourth[i])
		rec := wells.Receptor{ID: id, Name: "Receptor " + id, Kind: kind}
		if kind == wells.PumpingLevel {
			rec.Feature = "W1"
		}
		b.Receptors = append(b.Receptors, rec)
		m.response.Rows = append(m.response.Rows, plan.Row{Receptor: id, Base: []float64{10, 10, 900, 12}[i], Slope: slope, Linear: true, Unit: kind.Unit()})
	}
	for i, id := range m.response.Wells {
		slope := make([]float64, 4)
		for k := range slope {
			slope[k] = 1e-4
		}
		slope[i] = 1.8e-3
		m.response.Rows = append(m.response.Rows, plan.Row{Well: id, Base: 12, Slope: slope, Linear: true, Unit: "m"})
	}
	limit := func(id, receptor string, q wells.Quantity, s wells.Sense, v float64, base wells.Baseline, c wells.Counts, reserve float64) {
		b.Limits = append(b.Limits, wells.Limit{ID: id, Receptor: receptor, Quantity: q, Sense: s, Value: v, Baseline: base, Counts: c, Reserve: reserve, Source: "licence"})
	}
	limit("a", "P1", wells.Change, wells.AtMost, 0.3, wells.NoPumping, wells.Cumulative, 0)
	limit("b", "P2", wells.Change, wells.AtMost, 0.25, wells.NoPumping, wells.Own, 0.1)
	limit("c", "P2", wells.Change, wells.AtMost, 0.4, wells.OthersAtLicence, wells.Cumulative, 0)
	limit("d", "P1", wells.Change, wells.AtMost, 0.4, wells.PresentPumping, wells.Own, 0)
	limit("e", "S1", wells.ShareOfBase, wells.AtMost, 0.5, wells.PresentPumping, wells.Cumulative, 0.05)
	limit("f", "S1", wells.Value, wells.AtLeast, 500, wells.NoPumping, wells.Cumulative, 0.2)
	limit("g", "B1", wells.Value, wells.AtLeast, 9, wells.NoPumping, wells.Cumulative, 0)
	limit("h", "B1", wells.Change, wells.AtMost, 3, wells.NoPumping, wells.Own, 0)
	b.Quotas = []plan.Quota{{Name: "field", Wells: []string{"W1", "W2", "W3"}, PerDay: ptr(1300), PerYear: ptr(450000), Source: "deed"}}
	b.Licences = []wells.Licence{{ID: "L1", Holder: "Aldermoor Water", Wells: []string{"W1"}, PerHour: ptr(60), PerDay: ptr(900)}}
	return b, m
}

// What the planner reports and what the workbook's formulas give must be the same, number by number, for every way a plan may end.
func TestPlannersReportAgrees(t *testing.T) {
	given := func(b plan.Brief, m *strip) (*plan.Report, error) {
		rates := []float64{700, 300, 900, 150}
		r, err := m.Linearise(context.Background(), rates)
		if err != nil {
			return nil, err
		}
		return plan.Evaluate(b, r, rates)
	}
	planned := func(b plan.Brief, m *strip) (*plan.Report, error) {
		return plan.Make(context.Background(), b, m, plan.Options{})
	}
	for _, c := range []struct {
		name   string
		aim    plan.Aim
		demand *float64
		make   func(plan.Brief, *strip) (*plan.Report, error)
		first  string // words of page one
	}{
		{"most yield", plan.MostYield, nil, planned, headlineWords},
		{"most headroom", plan.MostHeadroom, ptr(600), planned, "Total rate of the plan with the largest smallest headroom"},
		{"conflict", plan.MostYield, ptr(3000), planned, "No plan keeps all the limits entered"},
		{"given", plan.MostYield, nil, given, "Total of the rates given"},
	} {
		brief, model := plannerBrief(c.aim, c.demand)
		r, err := c.make(brief, model)
		if err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		r.Title = c.name
		b := layout(t, r)
		if len(b.agrees) < 60 || len(b.fixedParts) > 0 {
			t.Errorf("%s: %d comparisons; parts that do not follow the rates: %v", c.name, len(b.agrees), b.fixedParts)
		}
		for _, a := range b.agrees {
			if !a.withinAllowed {
				t.Errorf("%s, %s: workbook %v, report %v", c.name, a.what, a.here, a.report)
			}
		}
		if got := b.readMe.at(firstRow, 1).words; got != c.first {
			t.Errorf("%s: page one begins with %q", c.name, got)
		}
		for _, line := range b.limits {
			l := r.Receptors[line.receptor].Limits[line.limit]
			state := b.receptors.at(line.row, recOthers).words
			wrong := l.Passed != (state == wordPassed)
			if c.aim == plan.MostYield && !l.Passed {
				wrong = wrong || l.Binds != (state == wordBinds)
			}
			if wrong {
				t.Errorf("%s, limit %s reads %q; the report says passed %v, binds %v, headroom %v", c.name, l.ID, state, l.Passed, l.Binds, l.Headroom)
			}
		}
		if c.name != "most yield" && c.name != "most headroom" {
			for _, s := range b.sheets() {
				for row := range s.rows {
					for k := range s.rows[row] {
						if cell := &s.rows[row][k]; cell.look != nil && cell.look.fill == fillHead && strings.Contains(cell.words, "t the plan") {
							t.Errorf("%s: a head of %s reads %q", c.name, s.name, cell.words)
						}
					}
				}
			}
		}
		mustWrite(t, r)
	}
}
