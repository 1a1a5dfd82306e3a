package plan

import (
	"context"
	"fmt"
	"math"
	"sort"
	"strings"

	"springbound/plan/convex"
)

// metTolerance is the difference between a rate and its request, as a share of the well's largest rate, that counts as met: the
// programme is solved to about 1e-9.
const metTolerance = 1e-7

// requestAim is the sum over the decided wells of ((rate - requested)/scale)², scale the well's largest rate in absolute value [-]. A
// well whose rate can only be 0 takes no part.
type requestAim struct {
	requested, weight []float64 // weight = 1/scale²
}

func newRequestAim(s *setup) *requestAim {
	a := &requestAim{}
	for _, i := range s.decided {
		weight := 0.0
		if size := s.rateScale(i); size > 0 {
			weight = s.weight(i) / (size * size)
		}
		a.requested, a.weight = append(a.requested, *s.Wells[i].Requested), append(a.weight, weight)
	}
	return a
}

func (a *requestAim) at(context.Context, *planner, []float64) error { return nil }

func (a *requestAim) value(x []float64) float64 {
	sum := 0.0
	for k, q := range x {
		sum += a.weight[k] * (q - a.requested[k]) * (q - a.requested[k])
	}
	return sum
}

func (a *requestAim) gradient(x []float64) []float64 {
	out := make([]float64, len(x))
	for k, q := range x {
		out[k] = 2 * a.weight[k] * (q - a.requested[k])
	}
	return out
}

func (a *requestAim) hessian(x []float64) convex.Hessian {
	h := convex.Hessian{Diagonal: make([]float64, len(x))}
	for k := range x {
		h.Diagonal[k] = 2 * a.weight[k]
	}
	return h
}

func (a *requestAim) quadratic() bool { return true }
func (a *requestAim) changes() bool   { return false }

// checkRequests reports the wells up for decision without a requested rate.
func (s *setup) checkRequests(faults *problemList) {
	for _, i := range s.decided {
		if s.Wells[i].Requested == nil {
			faults.addf("well %s: the aim %s needs its requested rate", s.Wells[i].ID, s.Aim)
		}
	}
}

// requestPart is what one row takes from, or with a negative amount forces on, one well's request.
type requestPart struct {
	words  string
	amount float64 // [m³/d]
}

// readRequests finds why requests are not met. At the optimum the slope of the aim equals the rows' prices times their coefficients:
//
//	(2/scale²) (requested - rate) = sum_rows price × coefficient + reduced cost
//
// so that scale²/2 times each term is that row's part of what the well falls short by, and the parts add up to it.
func (p *planner) readRequests(g *programme, sol *convex.Solution) {
	if p.setup.Aim != ClosestToRequests {
		return
	}
	s := p.setup
	p.requestParts = make([][]requestPart, len(s.Wells))
	for k, i := range s.decided {
		size := s.rateScale(i)
		half := size * size / 2 / s.weight(i)
		at := map[string]int{}
		take := func(words string, amount float64) {
			if amount == 0 {
				return
			}
			n, known := at[words]
			if !known {
				n = len(p.requestParts[i])
				at[words] = n
				p.requestParts[i] = append(p.requestParts[i], requestPart{words: words})
			}
			p.requestParts[i][n].amount += amount
		}
		for r, o := range g.owners {
			if sol.RowPrice[r] == 0 {
				continue
			}
			words := ""
			switch o.kind {
			case ofQuota:
				words = s.quotaWords(&s.quotas[o.index])
			case ofDemand:
				words = s.demands[o.index].words + " " + flowText(s.demands[o.index].amount)
			default:
				words = s.boundWords(p.bounds[o.index])
			}
			take(words, half*sol.RowPrice[r]*g.problem.Row(r).Coefficients[k])
		}
		end := "its largest rate " + flowText(s.Wells[i].Max)
		switch {
		case p.runs != nil && !p.runs[i]:
			end = "standing still"
		case sol.ReducedCost[k] < 0:
			end = "its least rate " + flowText(s.Wells[i].Min)
		}
		take(end, half*sol.ReducedCost[k])
	}
}

// WellRequest says how a well's rate stands to its request, and why.
type WellRequest struct {
	Short    float64         `json:"shortfall_m3_per_d"` // requested less planned; below zero the plan is above the request
	Reasons  []RequestReason `json:"reasons"`            // they add up to the shortfall
	Sentence string          `json:"sentence"`
}

// RequestReason is one limit's part of what a well falls short by.
type RequestReason struct {
	Limit string  `json:"limit"`         // in words
	Part  float64 `json:"part_m3_per_d"` // below zero: it asks for more than the request
}

// RequestTotal sums the wells up for decision.
type RequestTotal struct {
	Met     int     `json:"met"`
	Wells   int     `json:"wells"`
	Asked   float64 `json:"requested_m3_per_d"`
	Short   float64 `json:"shortfall_m3_per_d"` // of the wells that fall short
	Squares float64 `json:"sum_of_squares"`     // of (rate - requested)/largest rate
}

// wellRequest compares a well's rate with its request.
func (p *planner) wellRequest(i int, rate float64) *WellRequest {
	s := p.setup
	if s.Aim != ClosestToRequests || s.column[i] < 0 || s.Wells[i].Requested == nil {
		return nil
	}
	asked, near := *s.Wells[i].Requested, metTolerance*s.rateScale(i)
	r := &WellRequest{Short: tidy(asked - rate), Reasons: []RequestReason{}, Sentence: "Met."}
	if math.Abs(r.Short) <= near {
		return r
	}
	var takes, gives []string
	if p.priced {
		parts := append([]requestPart(nil), p.requestParts[i]...)
		sort.SliceStable(parts, func(a, b int) bool { return math.Abs(parts[a].amount) > math.Abs(parts[b].amount) })
		for _, part := range parts {
			if !(math.Abs(part.amount) > near) {
				continue
			}
			r.Reasons = append(r.Reasons, RequestReason{Limit: part.words, Part: part.amount})
			if part.amount > 0 {
				takes = append(takes, part.words+" takes "+flowText(part.amount))
			} else {
				gives = append(gives, part.words+" adds "+flowText(-part.amount))
			}
		}
	}
	r.Sentence = "Short by " + flowText(r.Short) + " of " + flowText(asked)
	because := append(takes, gives...)
	if r.Short < 0 {
		r.Sentence = "Above the request of " + flowText(asked) + " by " + flowText(-r.Short)
		because = append(gives, takes...)
	}
	if len(because) > 0 {
		r.Sentence += ": " + strings.Join(because, "; ")
	}
	r.Sentence += "."
	return r
}

// totalRequests sums the wells' requests; nil for another aim.
func (p *planner) totalRequests(r *Report) *RequestTotal {
	if p.setup.Aim != ClosestToRequests {
		return nil
	}
	t := &RequestTotal{Wells: len(p.setup.decided)}
	for _, i := range p.setup.decided {
		w := r.Wells[i]
		if w.Request == nil {
			continue
		}
		if w.Request.Sentence == "Met." {
			t.Met++
		}
		t.Asked += *w.Requested
		t.Short += math.Max(0, w.Request.Short)
		if size := p.setup.rateScale(i); size > 0 {
			t.Squares += (w.Request.Short / size) * (w.Request.Short / size)
		}
	}
	return t
}

// requestHeadline is the headline of closest-to-requests.
func requestHeadline(r *Report) string {
	t := r.Requests
	text := fmt.Sprintf("Closest to the requests: a total of %s; %d of %d wells get what is requested", flowText(r.TotalRate), t.Met, t.Wells)
	if t.Short > 0 && t.Met < t.Wells {
		text += ", " + flowText(t.Short) + " in all is not met"
	}
	return text + "."
}
