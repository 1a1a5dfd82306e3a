package gisio

import (
	"springbound/plan"
	"springbound/wells"
)

// wellForAim reports what the aim needs to know of a well up for decision.
func (b *builder) wellForAim(p placed, w *wells.Well) {
	if w.Mode != wells.Decided || w.Outage {
		return
	}
	switch b.p.Brief.Aim {
	case plan.ClosestToRequests:
		if !p.has("requested") {
			p.missing("requested", "the aim closest-to-requests compares each decided well's rate with it")
		}
	case plan.LeastEnergy:
		if w.Min < 0 {
			p.fail(Finding{Property: "mode", Found: "decided for a well that recharges", Allowed: "fixed with the aim least-energy", Hint: "the energy of pumping has no single least in its rate"})
			return
		}
		if !p.has("pump_efficiency") {
			p.missing("pump_efficiency", "the aim least-energy needs it of each decided well")
		}
		if !p.has("delivery_level") {
			p.missing("delivery_level", "the aim least-energy lifts each decided well's water to it")
		}
	}
}
