package plan

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"springbound/wells"
)

func (s *site) curve(t *testing.T, of string, from, to *float64) *CurveReport {
	t.Helper()
	r, err := Curve(context.Background(), s.brief, s.table, of, from, to)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// at reads the curve at a value; false outside of it.
func (r *CurveReport) at(v float64) (float64, bool) {
	for k := 0; k+1 < len(r.Points); k++ {
		if a, b := r.Points[k], r.Points[k+1]; a.At <= v && v <= b.At {
			return *a.Value + *a.Slope*(v-a.At), true
		}
	}
	return 0, false
}

// againstPlans compares a curve with whole plans at values between its ends, and asks for no plan outside of its points.
func (s *site) againstPlans(t *testing.T, what string, r *CurveReport, move moved) {
	t.Helper()
	for k := 0; k <= 12; k++ {
		v := r.From + (r.To-r.From)*(0.003+0.994*float64(k)/12) // beside the corners, where rounding decides whether there is a plan
		want, _, feasible := s.aimAt(t, move, v)
		got, on := r.at(v)
		if on != feasible {
			t.Errorf("%s at %v: on the curve %v, a plan %v", what, v, on, feasible)
		} else if on {
			exact(t, what, got, want)
		}
	}
}

func TestCurveOfCanalStrip(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25)
	r := s.curve(t, "L1", nil, nil)
	if !r.Exact || r.From != 0 || r.To != 0.6 || r.Unit != "m" || r.Before != "" || r.Beyond != "" {
		t.Errorf("%+v", r)
	}
	s.againstPlans(t, "L1", r, limitAt(0))
	// corners where W1 leaves rest and W3 comes to rest, as in the ranges; the present limit between them
	var corners []float64
	for _, x := range r.Points {
		if x.Changes != "" {
			corners = append(corners, x.At)
		}
		if x.Present {
			near(t, "present", *x.Value, 1221.986123, printed)
			near(t, "slope", *x.Slope, 2969.775953, printed)
		}
	}
	if len(corners) != 2 {
		t.Fatalf("%+v", r.Points)
	}
	exact(t, "first corner", corners[0], 0.25*2.069615201665e-4/2.910185545674e-4)
	exact(t, "second corner", corners[1], 0.25*2.712079621525e-4/1.469348697956e-4)
	if !strings.Contains(r.Points[1].Changes, "W1 starts") {
		t.Errorf("%q", r.Points[1].Changes)
	}
	// the demand: flat until it cannot be given
	s.brief.Demand = number(1000)
	r = s.curve(t, "demand", nil, nil)
	last := r.Points[len(r.Points)-1]
	near(t, "largest demand", last.At, 1221.986123, printed)
	if !strings.HasPrefix(r.Beyond, "no rates keep every limit") {
		t.Errorf("%q", r.Beyond)
	}
	s.againstPlans(t, "demand", r, func(b *Brief, v float64) { b.Demand = &v })
}

func TestCurvesAgainstPlans(t *testing.T) {
	random := rand.New(rand.NewPCG(31, 32))
	for trial := 0; trial < 6; trial++ {
		s := randomSite(random, 5, 5)
		s.brief.Quotas = []Quota{{Name: "G", Wells: []string{s.brief.Wells[0].ID, s.brief.Wells[1].ID}, PerYear: number(4e5)}}
		s.againstPlans(t, "limit", s.curve(t, s.brief.Limits[0].ID, nil, nil), limitAt(0))
		s.againstPlans(t, "quota", s.curve(t, "G", nil, number(6e5)), func(b *Brief, v float64) {
			b.Quotas = append([]Quota(nil), b.Quotas...)
			b.Quotas[0].PerYear = &v
		})
	}
}

// A level with a reserve: from the level without pumping down to twice the room, yield growing to the left.
func TestCurveOfALevel(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 700))
	s.receptor("R", wells.PointLevel, 10, 0.001)
	s.limit("L", "R", 9.5, func(l *wells.Limit) { l.Quantity, l.Sense, l.Reserve = wells.Value, wells.AtLeast, 0.2 })
	r := s.curve(t, "L", nil, nil)
	exact(t, "from", r.From, 9)
	exact(t, "to", r.To, 10)
	exact(t, "corner", r.Points[1].At, 10-0.7/0.8)
	exact(t, "slope", *r.Points[1].Slope, -800)
	s.againstPlans(t, "level", r, limitAt(0))
	s.againstPlans(t, "level and above", s.curve(t, "L", number(9.2), number(9.9)), limitAt(0))
	if r = s.curve(t, "L", number(9.5), number(10.5)); r.Exact || r.Beyond == "" {
		t.Errorf("past the level without pumping the size of the limit turns: %+v", r)
	}
}

// Headroom against a limit moves with the limit's size: a sweep, t = 1 - s/X. Against the demand it is exact.
func TestCurveOfHeadroom(t *testing.T) {
	s := canalStrip(MostHeadroom, 600)
	s.brief.Demand = number(1000)
	s.limit("L1", "P1", 0.30)
	r := s.curve(t, "L1", nil, nil)
	if r.Exact || len(r.Points) != sweepValues || r.Before == "" || r.Points[0].Value != nil {
		t.Fatalf("%v %d %q", r.Exact, len(r.Points), r.Before)
	}
	for _, x := range r.Points {
		if (x.At < 0.23266010) != (x.Value == nil) {
			t.Errorf("at %v: %v", x.At, x.Value)
		}
		if x.Value != nil {
			near(t, "share", *x.Value, 1-0.23266010/x.At, 5e-9/0.23)
			near(t, "slope", *x.Slope, 0.23266010/(x.At*x.At), 5e-9/0.05)
		}
	}
	r = s.curve(t, "demand", nil, nil)
	if !r.Exact || r.AimUnit != "1" {
		t.Errorf("%+v", r)
	}
	s.againstPlans(t, "demand", r, func(b *Brief, v float64) { b.Demand = &v })
}

// Rows that are not linear: a sweep against the closed form. max(x + 1.2 y, 2 x + 1.2 y - 5) <= L over 0 <= x, y <= 10.
func TestCurveOfCurvedRows(t *testing.T) {
	s := newSite(MostYield, decidedWell("X", 0, 10), decidedWell("Y", 0, 10))
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("L", "R", 10)
	m := &pieces{ids: []string{"X", "Y"}, slopes: [][]float64{{1, 1.2}, {2, 1.2}}, offset: []float64{0, -5}}
	r, err := Curve(context.Background(), s.brief, m, "L", number(5), number(17))
	if err != nil {
		t.Fatal(err)
	}
	if r.Exact || len(r.Points) != sweepValues+1 || !strings.Contains(r.Method, "sweep") {
		t.Fatalf("%v %d %q", r.Exact, len(r.Points), r.Method)
	}
	for _, x := range r.Points {
		near(t, "total", *x.Value, 5+(x.At-5)/1.2, 20*cutTolerance*17)
	}
}

func TestCurveRefuses(t *testing.T) {
	s := canalStrip(MostYield, 2500)
	s.limit("L1", "P1", 0.30)
	s.brief.Quotas = []Quota{{Name: "Q", Wells: []string{"W1"}, PerDay: number(100), PerYear: number(3e4)}}
	for _, c := range []struct {
		of       string
		from, to *float64
		says     string
	}{
		{"L9", nil, nil, "there is L1"},
		{"demand", nil, nil, "no limit"},
		{"Q", nil, nil, "several bounds"},
		{"L1", number(0.5), number(0.2), "below the second"},
		{"L1", number(math.NaN()), nil, "below the second"},
		{"Q per day", number(-5), nil, "below zero"},
	} {
		_, err := Curve(context.Background(), s.brief, s.table, c.of, c.from, c.to)
		var data *DataError
		if !errors.As(err, &data) || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v", c.of, err)
		}
	}
	if r := s.curve(t, "Q per day", nil, nil); r.Unit != "m3" || r.Per != "per day" {
		t.Errorf("%+v", r)
	}
}
