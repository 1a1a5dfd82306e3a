package plan

import (
	"context"
	"math/rand/v2"
	"testing"

	"springbound/wells"
)

// Each outage gives what a plan of its own gives with that well's mode off and no demand, with least rates and without.
func TestFirmAgainstSeparatePlans(t *testing.T) {
	random := rand.New(rand.NewPCG(8, 31))
	for trial := 0; trial < 12; trial++ {
		s := randomSite(random, 5, 4)
		if trial%2 == 1 {
			for i := range s.brief.Wells {
				s.brief.Wells[i].Min = 0.3 * s.brief.Wells[i].Max
			}
		}
		if trial%3 == 0 {
			s.brief.Wells[0].QuadraticLoss = 1e-6
			s.level(0, 20, 18, 0.001, 0.0002, 0.0002, 0.0001, 0.0001)
		}
		if trial%3 == 2 { // a linear level that the others lower too, so that letting it go counts
			s.level(1, 20, 19.95, 0.0004, 0.001, 0.0004, 0.0003, 0.0002)
		}
		calls := s.table.calls
		f, err := Firm(context.Background(), s.brief, s.table, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if s.table.calls > calls+2 && trial%3 != 0 {
			t.Errorf("trial %d: %d solves of the aquifer for linear rows", trial, s.table.calls-calls)
		}
		for _, line := range f.Lines {
			off := *s
			off.brief.Wells = append([]wells.Well(nil), s.brief.Wells...)
			for i := range off.brief.Wells {
				if off.brief.Wells[i].ID == line.Well {
					off.brief.Wells[i].Mode = wells.Off
				}
			}
			r := off.plan(t)
			if r.Status != StatusOptimal || line.Total == nil || !line.Feasible || len(line.Binds) == 0 {
				t.Fatalf("trial %d: %s, %+v", trial, r.Status, line)
			}
			// the searches may each overlook their gap; cuts leave cutTolerance of a limit
			near(t, "total without "+line.Well, *line.Total, r.TotalRate, 4*switchingGap*r.TotalRate)
			near(t, "change", *line.Change, *line.Total-f.AllInService, rounding*f.AllInService)
			if *line.Total < *f.Total {
				t.Errorf("trial %d: %s leaves less than %s", trial, line.Well, f.Well)
			}
		}
	}
}

// The check passes and fails on either side of the firm total, and is not done without a demand.
func TestFirmDemand(t *testing.T) {
	for _, c := range []struct {
		demand *float64
		result string
	}{{number(100), pass}, {number(101), failed}, {nil, notDone}} {
		s := newSite(MostYield, decidedWell("A", 0, 150), decidedWell("B", 0, 100))
		s.receptor("R", wells.PointLevel, 10, 0.001, 0.001)
		s.limit("L", "R", 5)
		s.brief.Demand = c.demand
		r, err := Make(context.Background(), s.brief, s.table, Options{Firm: true})
		if err != nil {
			t.Fatal(err)
		}
		if r.Firm == nil || r.Firm.Well != "A" || len(r.Firm.Lines) != 2 || !r.ModelValid {
			t.Fatalf("%+v", r.Firm)
		}
		exact(t, "firm total", *r.Firm.Total, 100)
		for _, check := range r.Checks {
			if check.Name == "Demand with the largest well out of service" && check.Result != c.result {
				t.Errorf("demand %v: %+v", c.demand, check)
			}
		}
	}
}

// The lowest level of the well that is out is let go: without B, which alone has one, A gives all it can.
func TestFirmLetsLevelGo(t *testing.T) {
	s := newSite(MostYield, decidedWell("A", 0, 80), decidedWell("B", 0, 90))
	s.level(1, 20, 19.95, 0.001, 0.0005)
	f, err := Firm(context.Background(), s.brief, s.table, Options{})
	if err != nil {
		t.Fatal(err)
	}
	exact(t, "all in service", f.AllInService, 90+0.005/0.001) // 0.045 m for B, the rest for A
	if len(f.Lines) != 2 || f.Lines[0].Well != "B" || f.Lines[1].Well != "A" {
		t.Fatalf("%+v", f.Lines)
	}
	exact(t, "without B", *f.Lines[0].Total, 80)
	exact(t, "without A", *f.Lines[1].Total, 90)
}
