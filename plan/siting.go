package plan

import "math"

// SitingLimit is one limit as a further well meets it: what is left of it, and what it is worth to the plan.
type SitingLimit struct {
	Receptor string  // id of the receptor; empty for the lowest level in a well
	Well     string  // id of the well whose lowest level it is; empty for a receptor's limit
	Limit    string  // id of the limit; empty for a lowest level
	Unit     string  // of the change: m, m3/d or 1
	Side     float64 // +1: a growing change uses the limit up; -1: a falling one does
	Room     float64 // further change that the kept rates leave, the reserve kept back; 0 where nothing is left or the limit is passed [unit]
	Size     float64 // the limit's own size; 0 for a hard limit [unit]
	Passed   bool    // the kept rates pass the limit already
	AllWells bool    // a limit on the change that every well causes
	Price    float64 // change of the aim per unit of further change allowed [aim per unit]
}

// SitingLimits lists what a further well would have to keep: every assessed limit and every lowest level of a well that may run. Rooms
// are those that the rates of kept leave; prices are those of the plan priced, nil for none. Both are reports on one brief. A
// further well is an own well, so that limits on own wells count it too; quotas and licences are about the wells that they name and do not.
//
// The prices of a report are per unit by which a limit as entered is loosened, of which its reserve takes a share; here they are per
// unit of the change itself, for the aim most-yield. At a plan where more limits meet than the rates can tell apart they are those of
// one of several optimal bases, and 1 - sum(price x use) is then at least what a further well is worth.
func SitingLimits(kept, priced *Report) []SitingLimit {
	var out []SitingLimit
	for i, r := range kept.Receptors {
		for k, l := range r.Limits {
			if l.ResultState != "yes" {
				continue
			}
			s := sitingLimit(r, l)
			if priced != nil {
				s.Price = changePrice(priced.Receptors[i], priced.Receptors[i].Limits[k])
			}
			out = append(out, s)
		}
	}
	for i, w := range kept.Wells {
		if w.LowestLevel == nil || w.LevelMargin == nil || w.Min == 0 && w.Max == 0 {
			continue
		}
		s := SitingLimit{Well: w.ID, Unit: "m", Side: 1, Size: math.Abs(w.StaticLevel - *w.LowestLevel)}
		s.leave(*w.LevelMargin)
		if priced != nil {
			s.Price = priced.Wells[i].LevelShadowPrice
		}
		out = append(out, s)
	}
	return out
}

// leave sets the room; one below what counts as kept exactly is none.
func (s *SitingLimit) leave(room float64) {
	if near := limitTolerance * s.Size; room > near {
		s.Room = room
	} else {
		s.Passed = s.Passed || room < -near
	}
}

func sitingLimit(r ReceptorResult, l LimitResult) SitingLimit {
	unit, side, edge := limitFrame(r, l)
	s := SitingLimit{Receptor: r.ID, Limit: l.ID, Unit: r.Unit, Side: side, Size: math.Abs(edge), Passed: l.Passed,
		AllWells: l.Counts == "cumulative" && l.Quantity != "value"}
	s.leave(l.Headroom*unit - l.Reserve*s.Size)
	return s
}

// limitFrame returns one unit of a limit in the unit of the change, the side on which the change must stay, and the change that the
// limit as entered allows before its baseline is added.
func limitFrame(r ReceptorResult, l LimitResult) (unit, side, edge float64) {
	unit, side = 1, 1
	value := l.Quantity == "value"
	if value == (l.Sense == "at_most") {
		side = -1
	}
	if l.Quantity == "share_of_base" {
		unit = math.Abs(r.NoPumping)
	}
	if edge = l.Limit * unit; value {
		edge = r.NoPumping - l.Limit
	}
	return unit, side, edge
}

// changePrice turns a price per unit by which a limit as entered is loosened into one per unit of the change: loosening it by one unit
// moves what is allowed by 1 - reserve, or by 1 + reserve where it makes the limit smaller.
func changePrice(r ReceptorResult, l LimitResult) float64 {
	unit, side, edge := limitFrame(r, l)
	return l.ShadowPrice / (unit * (1 - l.Reserve*sign(side*edge)))
}

// Negligible is the use of a limit per unit rate that counts as none for a well of the given rate [m³/d]: one by which a limit may be
// passed and still be kept.
func (s SitingLimit) Negligible(rate float64) float64 { return limitTolerance * s.Size / rate }
