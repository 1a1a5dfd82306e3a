package sparse

import "math"

// Limits of separator improvement by single moves.
const (
	moverPasses   = 6  // passes at most; most parts stop after three
	moverPatience = 30 // moves without a better separator that end a pass, beside moverSweep times its size
	moverSweep    = 1
	gainLowest    = -3 // moves that add more nodes than this are not tried
	gainHighest   = 1
	gainCount     = gainHighest - gainLowest + 1
)

// mover improves a vertex separator by moving its nodes to one side, which draws their neighbours on the other side
// into it (Fiduccia & Mattheyses 1982, in the one-sided form for vertex separators of Ashcraft & Liu 1998). A pass moves
// to one side only, so that it sweeps across the part, and keeps its best state.
type mover struct {
	g      *graph
	side   []uint8
	gain   []int32            // of a separator's node: by how much the separator shrinks when it moves
	bucket [gainCount][]int32 // by gain; entries may be stale and are checked when taken
	top    int
	moves  []move
	drawn  []int32
}

type move struct {
	node  int32
	drawn int32 // length of mover.drawn before this move
}

// improve returns the new sizes of both sides; sides are changed in place. between holds the separator on entry, gain is
// scratch by node.
func (m *mover) improve(g *graph, side []uint8, gain, between []int32, left, right int) (int, int) {
	m.g, m.side, m.gain = g, side, gain
	to := sideLeft
	if left > right {
		to = sideRight
	}
	failed := 0
	count := [2]int{left, right}
	for range moverPasses {
		if !m.pass(between, to, &count) {
			if failed++; failed == 2 {
				break
			}
		} else {
			failed = 0
			between = m.collect(between)
		}
		to = 1 - to
	}
	return count[0], count[1]
}

// collect lists the separator after a pass: what is left of the old one and what was drawn in.
func (m *mover) collect(between []int32) []int32 {
	out := between[:0]
	for _, v := range between {
		if m.side[v] == sideBetween {
			out = append(out, v)
		}
	}
	for _, v := range m.drawn {
		if m.side[v] == sideBetween {
			out = append(out, v)
		}
	}
	return out
}

// measure sets the gain of moving v away from the side other.
func (m *mover) measure(v int32, other uint8) {
	gain := int32(1)
	for _, u := range m.g.inside(v) {
		if m.side[u] == other {
			gain--
		}
	}
	m.gain[v] = gain
	m.push(v)
}

func (m *mover) push(v int32) {
	if k := int(m.gain[v]) - gainLowest; k >= 0 {
		m.bucket[k] = append(m.bucket[k], v)
		m.top = max(m.top, k)
	}
}

// take removes the best move from its bucket.
func (m *mover) take() (int32, bool) {
	for m.top >= 0 {
		list := m.bucket[m.top]
		if len(list) == 0 {
			m.top--
			continue
		}
		v := list[len(list)-1]
		m.bucket[m.top] = list[:len(list)-1]
		if m.side[v] == sideBetween && int(m.gain[v]) == m.top+gainLowest {
			return v, true
		}
	}
	return 0, false
}

// pass moves nodes to one side one by one, best first, and goes back to the best state seen: the smallest separator,
// the better balance where equal. It tells whether that is better than the first.
func (m *mover) pass(between []int32, to uint8, count *[2]int) bool {
	m.moves, m.drawn, m.top = m.moves[:0], m.drawn[:0], -1
	for k := range m.bucket {
		m.bucket[k] = m.bucket[k][:0]
	}
	other := 1 - to
	for _, v := range between {
		m.measure(v, other)
	}
	size := len(between)
	limit := max(int(largestShare*float64(count[0]+count[1]+size)), count[to])
	patience := moverPatience + moverSweep*size
	best, bestGap, kept := size, abs(count[0]-count[1]), 0
	now, bestCount := *count, *count
	for len(m.moves)-kept < patience && now[to] < limit {
		v, ok := m.take()
		if !ok {
			break
		}
		m.moves = append(m.moves, move{v, int32(len(m.drawn))})
		drawn := m.apply(v, to)
		now[to]++
		now[other] -= drawn
		size += drawn - 1
		if gap := abs(now[0] - now[1]); size < best || (size == best && gap < bestGap) {
			best, bestGap, kept, bestCount = size, gap, len(m.moves), now
		}
	}
	m.undo(kept, other)
	*count = bestCount
	return kept > 0
}

// apply moves v and returns how many nodes it draws into the separator.
func (m *mover) apply(v int32, to uint8) int {
	m.side[v] = to
	other := 1 - to
	first := len(m.drawn)
	for _, u := range m.g.inside(v) {
		if m.side[u] == other {
			m.side[u] = sideBetween
			m.gain[u] = math.MinInt32 / 2 // until it is measured below
			m.drawn = append(m.drawn, u)
		}
	}
	drawn := m.drawn[first:]
	for _, u := range drawn {
		for _, x := range m.g.inside(u) {
			if m.side[x] == sideBetween {
				m.gain[x]++
				m.push(x)
			}
		}
	}
	for _, u := range drawn {
		m.measure(u, other)
	}
	return len(drawn)
}

// undo takes back the moves after the first kept ones, in reverse.
func (m *mover) undo(kept int, other uint8) {
	for k := len(m.moves) - 1; k >= kept; k-- {
		mv := m.moves[k]
		for _, u := range m.drawn[mv.drawn:] {
			m.side[u] = other
		}
		m.drawn = m.drawn[:mv.drawn]
		m.side[mv.node] = sideBetween
	}
	m.moves = m.moves[:kept]
}

func abs(v int) int {
	if v < 0 {
		return -v
	}
	return v
}
