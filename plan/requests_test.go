package plan

import (
	"context"
	"math"
	"strings"
	"testing"

	"springbound/wells"
)

// requested gives the wells their requests.
func (s *site) requested(rates ...float64) *site {
	for i, q := range rates {
		s.brief.Wells[i].Requested = number(q)
	}
	return s
}

// Two wells on one limit: the nearest point of the line a·Q = e to the requests in the measure of the largest rates is
// Q = r - (a·r - e) S a / (a' S a), S = diag(scale²).
func TestTwoRequestsOnOneLimit(t *testing.T) {
	s := newSite(ClosestToRequests, decidedWell("A", 0, 1000), decidedWell("B", 0, 500)).requested(800, 400)
	s.receptor("R", wells.PointLevel, 10, 1e-3, 5e-4)
	s.limit("L", "R", 0.8)
	r := s.plan(t)
	a, size, asked := []float64{1e-3, 5e-4}, []float64{1000, 500}, []float64{800, 400}
	over := dot(a, asked) - 0.8
	measure := 0.0
	for i := range a {
		measure += a[i] * a[i] * size[i] * size[i]
	}
	price, squares := 2*over/measure, 0.0
	for i := range a {
		short := over * size[i] * size[i] * a[i] / measure
		exact(t, "rate", r.Wells[i].Rate, asked[i]-short)
		exact(t, "shortfall", r.Wells[i].Request.Short, short)
		if n := len(r.Wells[i].Request.Reasons); n != 1 {
			t.Fatalf("%d reasons", n)
		}
		exact(t, "reason", r.Wells[i].Request.Reasons[0].Part, short)
		squares += short / size[i] * short / size[i]
	}
	exact(t, "price", limitOf(t, r, "L").ShadowPrice, price)
	exact(t, "sum of squares", r.Requests.Squares, squares)
	exact(t, "shortfall in all", r.Requests.Short, r.Wells[0].Request.Short+r.Wells[1].Request.Short)
	want := "Short by 188 m³/d of 800 m³/d: drawdown at R at most 0.80 m takes 188 m³/d."
	if r.Wells[0].Request.Sentence != want {
		t.Errorf("sentence %q, want %q", r.Wells[0].Request.Sentence, want)
	}
	if !strings.HasPrefix(r.Headline, "Closest to the requests: a total of ") || !strings.Contains(r.Headline, "0 of 2 wells") {
		t.Errorf("headline %q", r.Headline)
	}
	if !(r.Audit.DualGap <= 1e-9) || !r.ModelValid {
		t.Errorf("gap %v, valid %v", r.Audit.DualGap, r.ModelValid)
	}
}

// Requests that the limits allow are met, at no price.
func TestRequestsThatCanBeMet(t *testing.T) {
	s := canalStrip(ClosestToRequests, 900).requested(200, 100, 150)
	s.limit("L1", "P1", 0.30)
	r := s.plan(t)
	for i, want := range []float64{200, 100, 150} {
		exact(t, "rate", r.Wells[i].Rate, want)
		if r.Wells[i].Request.Sentence != "Met." || len(r.Wells[i].Request.Reasons) != 0 {
			t.Errorf("%+v", r.Wells[i].Request)
		}
	}
	if l := limitOf(t, r, "L1"); l.ShadowPrice != 0 || r.Requests.Met != 3 {
		t.Errorf("price %v, met %d", l.ShadowPrice, r.Requests.Met)
	}
}

// Optimality from the report alone: the reasons add up to the shortfall of every well, prices have the right sign and belong to limits
// that bind; demand, quota and a well's own range take their parts.
func TestRequestsAgainstOptimality(t *testing.T) {
	for _, demand := range []float64{0, 1100} {
		s := canalStrip(ClosestToRequests, 600).requested(700, 500, 50)
		s.brief.Demand = number(demand)
		s.limit("L1", "P1", 0.30)
		s.limit("L2", "P2", 0.25)
		s.brief.Quotas = []Quota{{Name: "north", Wells: []string{"W1", "W2"}, PerDay: number(820)}}
		r := s.plan(t)
		if r.Status != StatusOptimal || !r.ModelValid {
			t.Fatalf("status %s %v", r.Status, r.Invalid)
		}
		prices := []float64{limitOf(t, r, "L1").ShadowPrice, limitOf(t, r, "L2").ShadowPrice}
		for k, price := range prices {
			l := limitOf(t, r, []string{"L1", "L2"}[k])
			if price < 0 || (price > 0 && !l.Binds) {
				t.Errorf("price %v of %s, binds %v", price, l.ID, l.Binds)
			}
		}
		for i, w := range r.Wells {
			gradient := 2 * w.Request.Short / (600 * 600) // of what is to be made large
			rows := s.table.response.Rows
			expected := prices[0]*rows[0].Slope[i] + prices[1]*rows[1].Slope[i] - *r.DemandPrice
			if i < 2 {
				expected += r.Quotas[0].ShadowPrice
			}
			own := gradient - expected
			switch w.AtBound {
			case "max":
				near(t, "own price", w.ShadowPrice, own, 1e-12)
			case "min":
				near(t, "own price", w.ShadowPrice, -own, 1e-12)
			default:
				near(t, "stationarity", own, 0, 1e-12) // against gradients of about 1e-3
			}
			sum := 0.0
			for _, reason := range w.Request.Reasons {
				sum += reason.Part
			}
			near(t, "reasons", sum, w.Request.Short, 1e-6) // parts below 1e-7 of the range are left out
		}
		if demand > 0 {
			exact(t, "total", r.TotalRate, demand)
			if !(r.Wells[2].Request.Short < 0) || !strings.HasPrefix(r.Wells[2].Request.Sentence, "Above the request of 50 m³/d by ") || !strings.Contains(r.Wells[2].Request.Sentence, "required total 1 100 m³/d adds") {
				t.Errorf("W3: %+v", r.Wells[2].Request)
			}
		}
	}
}

func TestRequestBeyondTheRange(t *testing.T) {
	s := newSite(ClosestToRequests, decidedWell("A", 100, 300), decidedWell("B", 100, 300)).requested(500, 20)
	r := s.plan(t)
	exact(t, "A", r.Wells[0].Rate, 300)
	if want := "Short by 200 m³/d of 500 m³/d: its largest rate 300 m³/d takes 200 m³/d."; r.Wells[0].Request.Sentence != want {
		t.Errorf("%q, want %q", r.Wells[0].Request.Sentence, want)
	}
	if r.Wells[1].Rate == 100 { // a well that must run at 100 or more
		if want := "Above the request of 20 m³/d by 80 m³/d: its least rate 100 m³/d adds 80 m³/d."; r.Wells[1].Request.Sentence != want {
			t.Errorf("%q, want %q", r.Wells[1].Request.Sentence, want)
		}
	}
}

func TestRequestsNeedTheirData(t *testing.T) {
	s := canalStrip(ClosestToRequests, 900).requested(1, 2)
	_, err := Make(context.Background(), s.brief, s.table, Options{})
	if err == nil || !strings.Contains(err.Error(), "well W3: the aim closest-to-requests needs its requested rate") {
		t.Errorf("%v", err)
	}
}

// A level in a well with turbulent loss bounds the rates by cuts beneath a quadratic aim: 10 - 0.001 Q - 1e-5 Q² >= 5 has one root.
func TestRequestHeldByALevel(t *testing.T) {
	w := decidedWell("A", 0, 2000)
	w.QuadraticLoss = 1e-5
	s := newSite(ClosestToRequests, w).requested(1500)
	s.level(0, 10, 5, 1e-3)
	r := s.plan(t)
	want := (-1e-3 + math.Sqrt(1e-6+4*1e-5*5)) / 2e-5
	near(t, "rate", r.Wells[0].Rate, want, 1e-4) // cuts end at 1e-8 of the room of 5 m, at a slope of 0.015 m per m³/d
	if !strings.Contains(r.Wells[0].Request.Sentence, "level in well A at least 5.00 m") {
		t.Errorf("%q", r.Wells[0].Request.Sentence)
	}
	// what one more metre is worth, against the closed form: d(sum)/dQ × dQ/dlevel
	slope := 2 * (1500 - want) / (2000 * 2000) / (1e-3 + 2e-5*want)
	near(t, "price", r.Wells[0].LevelShadowPrice, slope, 1e-6*slope)
}
