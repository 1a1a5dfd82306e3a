package plan

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"springbound/wells"
)

// pieces is a receptor whose change is the largest of several linear functions, as the worst place beneath a wetland is.
type pieces struct {
	ids    []string
	slopes [][]float64
	offset []float64
	calls  int
}

func (m *pieces) Linearise(ctx context.Context, rates []float64) (*Response, error) {
	m.calls++
	best, change := 0, math.Inf(-1)
	for k, s := range m.slopes {
		if v := dot(s, rates) + m.offset[k]; v > change {
			best, change = k, v
		}
	}
	return &Response{Wells: m.ids, At: rates, Rows: []Row{{Receptor: "R", Base: 100, Change: change,
		Slope: append([]float64(nil), m.slopes[best]...), Unit: "m", Place: string(rune('a' + best))}}}, nil
}

// The change is max(x + 1.2 y, 2 x + 1.2 y - 5). The largest x + y with change <= 10 over 0 <= x, y <= 10: both pieces bind where
// x = 5, y = 5/1.2. Tangents that replace each other run to and fro between (10, 0) and (7.5, 0); kept ones end.
func TestCutsAreKept(t *testing.T) {
	s := newSite(MostYield, decidedWell("X", 0, 10), decidedWell("Y", 0, 10))
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("L", "R", 10)
	m := &pieces{ids: []string{"X", "Y"}, slopes: [][]float64{{1, 1.2}, {2, 1.2}}, offset: []float64{0, -5}}
	rounds := 0
	r, err := Make(context.Background(), s.brief, m, Options{Progress: func(Progress) { rounds++ }})
	if err != nil {
		t.Fatal(err)
	}
	exact(t, "x", r.Wells[0].Rate, 5)
	exact(t, "y", r.Wells[1].Rate, 5/1.2)
	l := limitOf(t, r, "L")
	exact(t, "value", l.Value, 10)
	// one more metre on both pieces moves y by 1/1.2
	exact(t, "price", l.ShadowPrice, 1/1.2)
	if !l.Binds || l.Passed || r.Status != StatusOptimal || rounds > 4 {
		t.Errorf("%+v after %d rounds", l, rounds)
	}
	if _, err = Make(context.Background(), s.brief, m, Options{MaxRounds: 1}); err == nil {
		t.Error("one round is not enough")
	}
	var failure *NumericalError
	if !errors.As(err, &failure) || failure.Status != StatusNotConverged {
		t.Errorf("error %v", err)
	}
}

// A total of 12 asks for a change of at least 13.4, where both pieces meet at y = 7: the limit of 10 alone must give way by 3.4,
// which no single tangent tells. The largest total under the limit is 5 + 5/1.2.
func TestConflictWithCuts(t *testing.T) {
	s := newSite(MostYield, decidedWell("X", 0, 10), decidedWell("Y", 0, 10))
	s.brief.Demand = number(12)
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("L", "R", 10)
	m := &pieces{ids: []string{"X", "Y"}, slopes: [][]float64{{1, 1.2}, {2, 1.2}}, offset: []float64{0, -5}}
	r, err := Make(context.Background(), s.brief, m, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Status != StatusInfeasible || len(r.Conflict.Members) != 2 {
		t.Fatalf("%s %+v", r.Status, r.Conflict)
	}
	near(t, "limit alone", *r.Conflict.Members[1].Alone, 3.4, 10*relaxedTolerance)
	near(t, "demand alone", *r.Conflict.Members[0].Alone, 12-(5+5/1.2), 10*relaxedTolerance)
}

// A worst place among several, against one linear limit for each place: the same plan, total and sum of prices; for conflicts the
// same relaxation of the limit alone.
func TestCutsAgainstAllPieces(t *testing.T) {
	random := rand.New(rand.NewPCG(14, 15))
	for trial := 0; trial < 40; trial++ {
		all := randomSite(random, 5, 6)
		worst := &site{brief: all.brief}
		worst.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
		worst.brief.Limits = nil
		worst.limit("L", "R", 0.3)
		m := &pieces{ids: all.table.response.Wells, offset: make([]float64, 6)}
		for k := range all.brief.Limits {
			all.brief.Limits[k].Value, all.brief.Limits[k].Reserve = 0.3, 0
			m.slopes = append(m.slopes, all.table.response.Rows[k].Slope)
		}
		want := all.plan(t)
		got, err := Make(context.Background(), worst.brief, m, Options{})
		if err != nil {
			t.Fatal(err)
		}
		price := 0.0
		for _, rec := range want.Receptors {
			price += rec.Limits[0].ShadowPrice
		}
		exact(t, "total", got.TotalRate, want.TotalRate)
		exact(t, "price", limitOf(t, got, "L").ShadowPrice, price)

		worst.brief.Demand = number(1.3 * want.TotalRate)
		if got, err = Make(context.Background(), worst.brief, m, Options{}); err != nil {
			t.Fatal(err)
		}
		for _, member := range got.Conflict.Members {
			if member.Receptor != "R" || member.Alone == nil {
				continue
			}
			for k := range all.brief.Limits {
				all.brief.Limits[k].Value = 0.3 + *member.Alone
			}
			near(t, "total with the limit relaxed alone", all.plan(t).TotalRate, 1.3*want.TotalRate, 10*relaxedTolerance*want.TotalRate)
		}
	}
}

// bowl is a receptor with the smooth convex change (x² + 2 y²)/100 + 0.1 x + 0.1 y.
type bowl struct{ ids []string }

func (m bowl) change(x, y float64) float64 { return (x*x+2*y*y)/100 + 0.1*x + 0.1*y }

func (m bowl) Linearise(ctx context.Context, q []float64) (*Response, error) {
	return &Response{Wells: m.ids, At: q, Rows: []Row{{Receptor: "R", Base: 100, Change: m.change(q[0], q[1]),
		Slope: []float64{q[0]/50 + 0.1, q[1]/25 + 0.1}, Unit: "m"}}}, nil
}

// The largest x + y with change <= 10: by Lagrange x = 2 y, so 0.06 y² + 0.3 y = 10.
func TestSmoothConvexRow(t *testing.T) {
	y := (-0.3 + math.Sqrt(0.09+4*0.06*10)) / 0.12
	for _, c := range []struct {
		counts wells.Counts
		others bool
		total  float64
	}{
		{wells.Cumulative, false, 3 * y},
		// Y is an existing user at 4 m³/d, so that X alone counts: x² + 10 x = 1000
		{wells.Own, true, -5 + math.Sqrt(1025)},
		// the same counted together: x² + 10 x + 32 + 40 = 1000
		{wells.Cumulative, true, -5 + math.Sqrt(25+928)},
	} {
		second := decidedWell("Y", 0, 100)
		if c.others {
			second = fixedWell("Y", 4)
		}
		s := newSite(MostYield, decidedWell("X", 0, 100), second)
		s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
		s.limit("L", "R", 10, func(l *wells.Limit) { l.Counts = c.counts })
		r, err := Make(context.Background(), s.brief, bowl{[]string{"X", "Y"}}, Options{})
		if err != nil {
			t.Fatal(err)
		}
		// a limit passed by cutTolerance of its size moves the total by that times the price, some 3 m³/d per m
		near(t, "total", r.TotalRate, c.total, cutTolerance*10*10)
		l := limitOf(t, r, "L")
		near(t, "value", l.Value, 10, cutTolerance*10)
		if l.Passed || !l.Binds || !r.ModelValid {
			t.Errorf("%+v %v", l, r.Invalid)
		}
		exact(t, "re-solved change", r.Receptors[0].ChangeResolved, r.Receptors[0].Change)
	}
}

// A limit from below on a convex row: the change may not be smaller than 10 while pumping is dear elsewhere. The plan is feasible
// and called local.
func TestConvexRowFromBelow(t *testing.T) {
	s := newSite(MostHeadroom, decidedWell("X", 0, 100), decidedWell("Y", 0, 100))
	s.brief.Demand = number(30)
	s.brief.Wells[0].Present, s.brief.Wells[1].Present = number(15), number(15)
	s.brief.Receptors = []wells.Receptor{{ID: "R", Name: "R", Kind: wells.WetlandWorst}}
	s.limit("H", "R", 9, func(l *wells.Limit) { l.Sense = wells.AtLeast })
	r, err := Make(context.Background(), s.brief, bowl{[]string{"X", "Y"}}, Options{})
	if err != nil {
		t.Fatal(err)
	}
	// for x + y = 30 the change is largest at an end: y = 30 gives 18 + 3 = 21 m, 12 m above the limit
	exact(t, "y", r.Wells[1].Rate, 30)
	exact(t, "headroom", limitOf(t, r, "H").Headroom, 12)
	if len(r.Cautions) != 1 {
		t.Errorf("cautions %q", r.Cautions)
	}
}
