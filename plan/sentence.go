package plan

import (
	"sort"
	"strings"

	"springbound/wells"
)

// leastContribution is the smallest part of a change that a sentence still names; below a hundredth a well does not drive it.
const leastContribution = 0.01

// mostContributors keeps a sentence readable: the tables hold all of them.
const mostContributors = 3

// sentence says in words how a limit stands.
//
//	Binds. W4 contributes 38 %. One more centimetre is worth 27 m³/d, up to 4.0 cm more; then the limit L2 at Fen binds.
//	Holds with 0.12 m to spare (40 % of the limit).
//	Passed by 0.03 m. W4 contributes 38 %.
func (p *planner) sentence(b *bound, r *LimitResult, contributions []float64, byRecharge []string) string {
	s := p.setup
	l := s.Limits[b.limit]
	amount := func(v float64) string { return limitAmount(r, v) }
	of := " of the limit)"
	if l.Quantity == wells.Value {
		of = " of the room)"
	}
	var parts []string
	in := s.inWords(b)
	switch {
	case r.Passed:
		parts = append(parts, "Passed"+in+" by "+amount(-r.Headroom)+".", contributors(s, contributions))
	case r.Binds && p.share > 0 && b.size > 0:
		parts = append(parts, "Sets the smallest headroom"+in+": "+amount(r.Headroom)+" ("+percentText(*r.RoomShare)+of+" is left.",
			contributors(s, contributions), p.worth(b, r, l))
	case r.Binds && b.reserve > 0 && b.size > 0:
		parts = append(parts, "Binds"+in+" with its reserve of "+percentText(b.reserve)+" kept back.", contributors(s, contributions), p.worth(b, r, l))
	case r.Binds:
		parts = append(parts, "Binds"+in+".", contributors(s, contributions), p.worth(b, r, l))
	default:
		text := "Holds" + in + " with " + amount(r.Headroom) + " to spare"
		if r.RoomShare != nil {
			text += " (" + percentText(*r.RoomShare) + of
		}
		if b.reserve > 0 && r.RoomShare != nil && *r.RoomShare < b.reserve {
			text += ", inside its reserve of " + percentText(b.reserve)
		}
		parts = append(parts, text+".")
	}
	if len(byRecharge) > 0 {
		parts = append(parts, "Holds only because "+list(byRecharge)+plural(len(byRecharge), " recharges.", " recharge."))
	}
	return strings.Join(nonEmpty(parts), " ")
}

// limitAmount writes a headroom in the limit's unit.
func limitAmount(r *LimitResult, v float64) string {
	if r.Quantity == wells.ShareOfBase.String() {
		return percentText(v) + " of the undisturbed value"
	}
	return amountText(v, r.Unit)
}

// contributors names the wells that drive a change, the largest first, with their parts of what the pumping wells cause.
func contributors(s *setup, contributions []float64) string {
	sum := 0.0
	var order []int
	for i, v := range contributions {
		if v > 0 {
			sum += v
			order = append(order, i)
		}
	}
	sort.SliceStable(order, func(a, b int) bool { return contributions[order[a]] > contributions[order[b]] })
	text := ""
	for k, i := range order {
		share := contributions[i] / sum
		if k == mostContributors || share < leastContribution {
			break
		}
		if k == 0 {
			text = s.Wells[i].ID + " contributes " + percentText(share)
		} else {
			text += ", " + s.Wells[i].ID + " " + percentText(share)
		}
	}
	if text == "" {
		return ""
	}
	return text + "."
}

func plural(n int, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}

func nonEmpty(parts []string) []string {
	var out []string
	for _, p := range parts {
		if p != "" {
			out = append(out, p)
		}
	}
	return out
}
