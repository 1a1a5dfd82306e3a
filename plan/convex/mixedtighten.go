package convex

import "math"

type tightened int

const (
	tightenedNothing tightened = iota
	tightenedMoved             // the linear programme should be solved again
	tightenedEmpty             // the node holds nothing
)

// priceSlack widens what prices exclude, relative to the cost, so that no plan is lost to the rounding of prices.
const priceSlack = 1e-9

// tightenByPrices narrows discrete columns of the node by their prices: a column that would raise the cost above the best plan's
// before it gets there cannot get there (Dantzig, Fulkerson & Johnson 1954).
func (s *search) tightenByPrices(cost float64) tightened {
	if math.IsInf(s.best.value, 1) {
		return tightenedNothing
	}
	room := s.room(cost)
	var moved []int
	for _, j := range s.c.discrete {
		if s.local.lo[j] == s.local.hi[j] || s.lp.e.place[j] == Basic {
			continue
		}
		ok, did := s.narrowByPrice(&s.local, j, s.lp.value(j), s.lp.reduced(j), room)
		if !ok {
			return tightenedEmpty
		}
		if did {
			moved = append(moved, j)
		}
	}
	if len(moved) == 0 {
		return tightenedNothing
	}
	if !s.prop.from(&s.local, moved...) {
		return tightenedEmpty
	}
	for _, j := range s.c.discrete { // does the present optimum still stand?
		v := s.lp.value(j)
		if v < s.local.lo[j]-wholeness || v > s.local.hi[j]+wholeness {
			return tightenedMoved
		}
	}
	s.sync()
	return tightenedNothing
}

// room is how much dearer than the given cost a plan may be and still be better than the best.
func (s *search) room(cost float64) float64 {
	v := s.best.value - s.c.offset
	if step := s.c.step; step > 0 {
		return v - step*(1-wholeness) - cost
	}
	return v - cost + priceSlack*s.best.scale
}

// narrowByPrice narrows one column of a box whose value is at a bound with the given price.
func (s *search) narrowByPrice(b *box, j int, at, price, room float64) (ok, did bool) {
	lo, hi := math.Inf(-1), math.Inf(1)
	switch {
	case price > optimalityTolerance:
		hi = at + room/price
	case price < -optimalityTolerance:
		lo = at + room/price
	default:
		return true, false
	}
	if lo <= b.lo[j] && hi >= b.hi[j] {
		return true, false
	}
	did, ok = s.c.narrow(b, j, lo, hi)
	return ok, did
}

// tightenRoot narrows the global bounds by the prices of the root after a better plan was found.
func (s *search) tightenRoot() {
	if s.proof != nil || s.rootReduced == nil {
		return
	}
	room := s.room(s.rootCost)
	var moved []int
	b := box{lo: append([]float64(nil), s.global.lo...), hi: append([]float64(nil), s.global.hi...)}
	for _, j := range s.c.discrete {
		if b.lo[j] == b.hi[j] || s.rootReduced[j] == 0 {
			continue
		}
		ok, did := s.narrowByPrice(&b, j, s.rootX[j], s.rootReduced[j], room)
		if !ok {
			return // nothing better is left; the nodes will find out
		}
		if did {
			moved = append(moved, j)
		}
	}
	if len(moved) > 0 && s.prop.from(&b, moved...) {
		s.global = b
	}
}
