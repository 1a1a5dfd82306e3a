package plan

import (
	"context"
	"math"
	"testing"

	"springbound/wells"
)

// table is an aquifer given as a response matrix: the change of each row is slope·Q.
type table struct {
	response Response
	calls    int
	wrong    float64 // added to every change away from the first call, as an error of the re-solve
}

func (m *table) Linearise(ctx context.Context, rates []float64) (*Response, error) {
	m.calls++
	r := m.response
	r.At = append([]float64(nil), rates...)
	r.Rows = append([]Row(nil), r.Rows...)
	for i := range r.Rows {
		r.Rows[i].Change = dot(r.Rows[i].Slope, rates)
		if m.calls > 1 {
			r.Rows[i].Change += m.wrong
		}
	}
	return &r, nil
}

func number(v float64) *float64 { return &v }

// decidedWell is a well up for decision that runs all day.
func decidedWell(id string, min, max float64) wells.Well {
	return wells.Well{ID: id, Name: id, Mode: wells.Decided, Min: min, Max: max, DutyHours: 24, Radius: 0.2, MaxSource: "pump"}
}

// fixedWell is an existing user's well.
func fixedWell(id string, rate float64) wells.Well {
	return wells.Well{ID: id, Name: id, Mode: wells.Fixed, FixedRate: rate, Others: true, DutyHours: 24, Radius: 0.2}
}

// site builds a brief and its table from wells, receptors with slopes, and limits.
type site struct {
	brief Brief
	table *table
}

func newSite(aim Aim, w ...wells.Well) *site {
	s := &site{brief: Brief{Aim: aim, Wells: w, WellTerms: make([]WellTerm, len(w))}, table: &table{}}
	for _, one := range w {
		s.table.response.Wells = append(s.table.response.Wells, one.ID)
	}
	return s
}

// receptor adds a receptor with its value without pumping and its slopes.
func (s *site) receptor(id string, kind wells.Kind, base float64, slope ...float64) {
	s.brief.Receptors = append(s.brief.Receptors, wells.Receptor{ID: id, Name: id, Kind: kind})
	s.table.response.Rows = append(s.table.response.Rows, Row{Receptor: id, Base: base, Slope: slope, Linear: true, Unit: kind.Unit()})
}

// level gives well i a static level, a lowest level and its row.
func (s *site) level(i int, static, lowest float64, slope ...float64) {
	s.brief.WellTerms[i].StaticLevel = static
	s.brief.Wells[i].LowestLevel = &lowest
	s.table.response.Rows = append(s.table.response.Rows, Row{Well: s.brief.Wells[i].ID, Base: static, Slope: slope, Linear: true, Unit: "m"})
}

// limit adds a cumulative limit on the change against no pumping; change edits it.
func (s *site) limit(id, receptor string, value float64, change ...func(*wells.Limit)) {
	l := wells.Limit{ID: id, Receptor: receptor, Value: value}
	for _, f := range change {
		f(&l)
	}
	s.brief.Limits = append(s.brief.Limits, l)
}

// plan makes the plan and fails the test on an error.
func (s *site) plan(t *testing.T) *Report {
	t.Helper()
	r, err := Make(context.Background(), s.brief, s.table, Options{})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// near fails the test when got is further than by from want.
func near(t *testing.T, what string, got, want, by float64) {
	t.Helper()
	if !(math.Abs(got-want) <= by) {
		t.Errorf("%s = %.12g, want %.12g within %.2g", what, got, want, by)
	}
}

// rounding is the relative error allowed where the expected value is exact: the programme is solved to 1e-9 of its rows.
const rounding = 1e-8

func exact(t *testing.T, what string, got, want float64) {
	t.Helper()
	near(t, what, got, want, rounding*math.Max(1, math.Abs(want)))
}

func limitOf(t *testing.T, r *Report, id string) LimitResult {
	t.Helper()
	for _, rec := range r.Receptors {
		for _, l := range rec.Limits {
			if l.ID == id {
				return l
			}
		}
	}
	t.Fatalf("no limit %s", id)
	return LimitResult{}
}
