package plan

import (
	"strings"

	"springbound/plan/convex"
	"springbound/wells"
)

// endWords says what ends a range: 'the limit L2 at Fen binds', 'W2 stands still', 'no rates keep every limit'; empty where it has
// no end.
func (p *planner) endWords(g *programme, x convex.Range, end convex.End) string {
	switch end.Kind {
	case convex.Endless:
		return ""
	case convex.InfeasibleBeyond:
		return "no rates keep every limit"
	}
	if end.Binds.Column == x.Of.Column && end.Binds.Index == x.Of.Index && !x.Of.Column {
		if end.Leaves {
			return "it no longer binds"
		}
		return "it binds"
	}
	if !end.Binds.Column && !x.Of.Column && p.curved != nil && g.owners[end.Binds.Index] == g.owners[x.Of.Index] {
		return "another tangent of the same limit binds"
	}
	return p.sideWords(g, end.Binds, !end.Leaves)
}

// sideWords says of a row's or column's bound that it is reached, or that it is left.
func (p *planner) sideWords(g *programme, side convex.SideOf, reached bool) string {
	s := p.setup
	if !side.Column {
		what := p.ownerWords(g.owners[side.Index])
		if reached {
			return what + " binds"
		}
		return what + " no longer binds"
	}
	if side.Index >= len(s.decided) {
		switch {
		case side.Index == g.share && reached:
			return "no headroom is left"
		case side.Index == g.share:
			return "headroom is left"
		case side.Index >= g.problem.Columns():
			return "another tangent of the same limit binds"
		}
		return g.problem.Column(side.Index).Name + " changes"
	}
	w := s.Wells[s.decided[side.Index]]
	at, name := w.Max, "largest rate"
	if side.Side == convex.LowerSide {
		at, name = w.Min, "least rate"
	}
	switch {
	case at == 0 && reached:
		return w.ID + " stands still"
	case at == 0:
		return w.ID + " starts"
	case reached:
		return w.ID + " runs at its " + name
	}
	return w.ID + " leaves its " + name
}

// ownerWords names what a row stands for in few words.
func (p *planner) ownerWords(o owner) string {
	s := p.setup
	switch o.kind {
	case ofQuota:
		q := s.quotas[o.index]
		return "the quota " + q.name + " " + q.basis
	case ofDemand:
		return "the demand" + s.demands[o.index].mark
	}
	b := p.bounds[o.index]
	if b.limit >= 0 {
		l := s.Limits[b.limit]
		return "the limit " + l.ID + " at " + s.receptorName(l.Receptor)
	}
	return "the lowest level in well " + s.Wells[b.target.well].ID
}

// step is the amount of a limit that its sentence speaks of.
type step struct {
	size float64 // in the limit's unit
	name string  // singular
	many string  // behind a number
}

// stepOf chooses a step that suits the limit's size and the unit in which it was entered.
func stepOf(r *LimitResult, l wells.Limit, size float64) step {
	switch {
	case l.Quantity == wells.ShareOfBase:
		return step{0.01, "per cent of the undisturbed value", "per cent"}
	case r.Unit == "m" && size > 0 && size < 0.05:
		return step{0.001, "millimetre", "mm"}
	case r.Unit == "m":
		return step{0.01, "centimetre", "cm"}
	case r.Unit == "m3/d" && strings.Contains(l.Entered, "L/s"):
		return step{86.4, "L/s", "L/s"}
	case r.Unit == "1":
		return step{0.0001, "step of 0.0001", "steps"}
	}
	return step{1, "m³/d", "m³/d"}
}

// aimText writes a gain or loss of the aim.
func (p *planner) aimText(v float64) string {
	if p.setup.Aim == MostHeadroom {
		return percentText(v) + " of headroom"
	}
	switch p.setup.Aim {
	case LeastEnergy:
		return energyText(v)
	case ClosestToRequests:
		return plainNumber(v, 2, 0, 9) + " of the sum of squares"
	}
	return flowText(v) + p.setup.meanWords()
}

// gainText says what loosening brings: an aim that is to be small is saved.
func (p *planner) gainText(v float64) string {
	if p.setup.Aim.makesSmall() {
		return "saves " + p.aimText(v)
	}
	return "is worth " + p.aimText(v)
}

// worth is the part of a sentence about the shadow prices; empty when nothing was optimised.
//
//	One more centimetre is worth 27 m³/d, up to 4.0 cm more; then the limit L2 at Fen binds.
//	Tightening by one centimetre costs 40 m³/d, loosening is worth 12 m³/d, up to ...
func (p *planner) worth(b *bound, r *LimitResult, l wells.Limit) string {
	if !p.priced {
		return ""
	}
	st := stepOf(r, l, b.size)
	looser, tighter, cannot := b.price, b.price, false
	if x := b.priceRange; x != nil {
		looser, tighter = valueOr(x.Looser, looser), valueOr(x.Tighter, 0)
		cannot = x.Tighter == nil
	}
	gain, cost := looser*st.size, tighter*st.size
	more := "One more " + st.name
	if l.Sense == wells.AtLeast {
		more = "One " + st.name + " less"
	}
	none := p.aimText(0)
	worthless := !(gain > 0) || p.aimText(gain) == none
	far := p.farWords(b, r, l, st)
	switch {
	case cannot && worthless:
		return "A looser limit alone would bring nothing; a tighter one cannot be kept."
	case cannot:
		return more + " " + p.gainText(gain) + far + "; a tighter limit cannot be kept."
	case !(cost > 0) && worthless:
		return "A looser limit alone would bring nothing."
	case worthless:
		return "Tightening by one " + st.name + " costs " + p.aimText(cost) + ", loosening alone brings nothing."
	case p.aimText(gain) == p.aimText(cost):
		return more + " " + p.gainText(gain) + far + "."
	}
	return "Tightening by one " + st.name + " costs " + p.aimText(cost) + ", loosening " + p.gainText(gain) + far + "."
}

// farWords says how far the price of loosening a limit holds and what comes then.
func (p *planner) farWords(b *bound, r *LimitResult, l wells.Limit, st step) string {
	x := b.priceRange
	if x == nil {
		return ""
	}
	switch {
	case !b.linear:
		return " for " + tangentsOnly
	case x.LooserTo == nil:
		return ""
	}
	far := (*x.LooserTo - r.Limit) * b.way() / st.size
	more := " more"
	if l.Sense == wells.AtLeast {
		more = " less"
	}
	text := p.upTo() + plainNumber(far, 2, 0, 4) + " " + st.many + more
	if x.LooserThen != "" {
		text += "; then " + x.LooserThen
	}
	return text
}

func valueOr(v *float64, otherwise float64) float64 {
	if v == nil {
		return otherwise
	}
	return *v
}
