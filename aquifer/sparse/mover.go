package sparse

// Limits of separator improvement by single moves.
const (
	moverPasses   = 4  // passes at most; most parts stop after two
	moverPatience = 40 // moves without a better separator that end a pass
	gainLowest    = -6 // moves that add more nodes than this are not tried
	gainHighest   = 1
	gainCount     = gainHighest - gainLowest + 1
)

// mover improves a vertex separator by moving its nodes to one side, which draws their neighbours on the other side
// into it (Fiduccia & Mattheyses 1982, in the form for vertex separators of Ashcraft & Liu 1998). A pass keeps its
// best state. Nodes that a pass has moved stay where they are unless drawn back by a neighbour.
type mover struct {
	bucket [2][gainCount][]int32 // by side moved to and gain; entries may be stale and are checked when taken
	top    [2]int
	moves  []move
	drawn  []int32
	locked map[int32]struct{}
}

type move struct {
	node  int32
	to    uint8
	drawn int // length of mover.drawn before this move
}

// improve returns the new sizes of both sides; sides are changed in place. between holds the separator on entry.
func (m *mover) improve(g *graph, side []uint8, between []int32, left, right int) (int, int) {
	for range moverPasses {
		l, r, better := m.pass(g, side, between, left, right)
		left, right = l, r
		if !better {
			break
		}
		between = m.collect(side, between)
	}
	return left, right
}

// collect lists the separator after a pass: what is left of the old one and what was drawn in.
func (m *mover) collect(side []uint8, between []int32) []int32 {
	out := between[:0]
	for _, v := range between {
		if side[v] == sideBetween {
			out = append(out, v)
			side[v] = sideBetween + 1
		}
	}
	for _, v := range m.drawn {
		if side[v] == sideBetween {
			out = append(out, v)
			side[v] = sideBetween + 1
		}
	}
	for _, v := range out {
		side[v] = sideBetween
	}
	return out
}

// gain returns by how much the separator shrinks when v moves to a side.
func gain(g *graph, side []uint8, v int32, to uint8) int {
	lost := 1
	other := 1 - to
	for _, u := range g.inside(v) {
		if side[u] == other {
			lost--
		}
	}
	return lost
}

func (m *mover) push(g *graph, side []uint8, v int32) {
	for to := range uint8(2) {
		if k := gain(g, side, v, to) - gainLowest; k >= 0 {
			m.bucket[to][k] = append(m.bucket[to][k], v)
			m.top[to] = max(m.top[to], k)
		}
	}
}

// take returns the best move to a side, its gain and whether there is one; the node stays in its bucket.
func (m *mover) peek(g *graph, side []uint8, to uint8) (int32, int, bool) {
	for m.top[to] >= 0 {
		list := m.bucket[to][m.top[to]]
		if len(list) == 0 {
			m.top[to]--
			continue
		}
		v := list[len(list)-1]
		if side[v] == sideBetween {
			if _, held := m.locked[v]; !held {
				if k := gain(g, side, v, to); k == m.top[to]+gainLowest {
					return v, k, true
				}
			}
		}
		m.bucket[to][m.top[to]] = list[:len(list)-1]
	}
	return 0, 0, false
}

// pass moves nodes one by one, best first, and goes back to the best state seen.
func (m *mover) pass(g *graph, side []uint8, between []int32, left, right int) (int, int, bool) {
	m.moves, m.drawn = m.moves[:0], m.drawn[:0]
	if m.locked == nil {
		m.locked = map[int32]struct{}{}
	}
	clear(m.locked)
	for to := range m.bucket {
		for k := range m.bucket[to] {
			m.bucket[to][k] = m.bucket[to][k][:0]
		}
		m.top[to] = -1
	}
	for _, v := range between {
		m.push(g, side, v)
	}
	count := [2]int{left, right}
	size, n := len(between), left+right+len(between)
	limit := max(int(largestShare*float64(n)), left, right)
	best, bestGap, kept, bestCount := size, abs(left-right), 0, count
	for len(m.moves)-kept < moverPatience {
		to, ok := m.choose(g, side, count, limit)
		if !ok {
			break
		}
		v := m.bucket[to][m.top[to]][len(m.bucket[to][m.top[to]])-1]
		m.moves = append(m.moves, move{v, to, len(m.drawn)})
		m.apply(g, side, v, to)
		drawn := len(m.drawn) - m.moves[len(m.moves)-1].drawn
		count[to]++
		count[1-to] -= drawn
		size += drawn - 1
		if gap := abs(count[0] - count[1]); size < best || (size == best && gap < bestGap) {
			best, bestGap, kept, bestCount = size, gap, len(m.moves), count
		}
	}
	m.undo(side, kept)
	return bestCount[0], bestCount[1], best < len(between)
}

// choose returns the side of the better move; a tie goes to the smaller side.
func (m *mover) choose(g *graph, side []uint8, count [2]int, limit int) (uint8, bool) {
	var gains [2]int
	var can [2]bool
	for to := range uint8(2) {
		if count[to] < limit {
			_, gains[to], can[to] = m.peek(g, side, to)
		}
	}
	switch {
	case can[0] && can[1]:
		if gains[0] != gains[1] {
			if gains[1] > gains[0] {
				return 1, true
			}
			return 0, true
		}
		if count[1] < count[0] {
			return 1, true
		}
		return 0, true
	case can[0]:
		return 0, true
	}
	return 1, can[1]
}

func (m *mover) apply(g *graph, side []uint8, v int32, to uint8) {
	side[v] = to
	m.locked[v] = struct{}{}
	first := len(m.drawn)
	for _, u := range g.inside(v) {
		switch side[u] {
		case 1 - to:
			side[u] = sideBetween
			m.drawn = append(m.drawn, u)
		case sideBetween:
			m.push(g, side, u)
		}
	}
	for _, u := range m.drawn[first:] {
		m.push(g, side, u)
		for _, x := range g.inside(u) {
			if side[x] == sideBetween && x != u {
				m.push(g, side, x)
			}
		}
	}
}

// undo takes back the moves after the first kept ones, in reverse.
func (m *mover) undo(side []uint8, kept int) {
	for k := len(m.moves) - 1; k >= kept; k-- {
		mv := m.moves[k]
		for _, u := range m.drawn[mv.drawn:] {
			side[u] = 1 - mv.to
		}
		m.drawn = m.drawn[:mv.drawn]
		side[mv.node] = sideBetween
	}
}

func abs(v int) int {
	if v < 0 {
		return -v
	}
	return v
}
