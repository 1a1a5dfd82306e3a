package plan

import (
	"fmt"
	"strings"
)

// headline is the first sentence: the aim over the year, and each state's total.
func (e *expansion) headline(in, out *Report) string {
	var totals []string
	mean, energy := 0.0, 0.0
	for k, s := range out.States {
		totals = append(totals, s.Name+" "+flowText(s.Total))
		mean += e.parts[k].share * s.Total
		if s.PumpingEnergy != nil {
			energy += e.parts[k].share * s.PumpingEnergy.Energy
		}
	}
	over := "yearly mean"
	if !e.hasDays {
		over = "mean over the operating states"
	}
	each := " (" + strings.Join(totals, ", ") + ")."
	switch in.Status {
	case StatusOptimal:
	case StatusGivenRates:
		return strings.Replace(e.words(in.Headline, -1), "a total of ", "a "+over+" of ", 1) + " The totals are: " + strings.Join(totals, ", ") + "."
	default:
		return e.words(in.Headline, -1)
	}
	lead := ""
	switch e.outer.Aim {
	case MostHeadroom:
		lead = "Rates that keep the largest share of every limit free, for the demand of every operating state: at least " + percentText(e.headroom) + " beyond each reserve"
		if e.headroom >= mostHeadroom {
			lead = "Rates for the demand of every operating state: no limit that has a size concerns the wells that run"
		}
	case LeastEnergy:
		lead = "Least pumping energy for the demand of every operating state: a " + over + " of " + energyText(energy)
	case ClosestToRequests:
		lead = "Closest to the requests in all operating states: a " + over + " of " + flowText(mean)
	default:
		lead = "Largest " + over + " of the total rate that keeps the limits entered in every operating state: " + flowText(mean)
	}
	text := lead + each
	if assessed, all := e.countAssessed(out); assessed < all {
		text += fmt.Sprintf(" Of %d limits entered, %d are assessed.", all, assessed)
	}
	if len(in.Invalid) > 0 {
		text = "The plan is not valid: " + e.words(in.Invalid[0], -1) + ". " + text
	}
	return text
}

// countAssessed counts the limits entered, and those that were assessed in every state in which they hold.
func (e *expansion) countAssessed(out *Report) (assessed, all int) {
	all = len(e.outer.Limits)
	missed := map[string]bool{}
	for _, s := range out.States {
		for _, r := range s.Receptors {
			for _, l := range r.Limits {
				if l.ResultState != "yes" {
					missed[r.ID+" "+l.ID] = true
				}
			}
		}
	}
	return all - len(missed), all
}
