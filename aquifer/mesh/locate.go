package mesh

import (
	"math"
	"sync"

	"github.com/paulmach/orb"
)

// locatorFan is how many triangles or boxes a box of the tree holds.
const locatorFan = 4

// box bounds some triangles.
type box struct{ x0, y0, x1, y1 float64 }

// locator is a tree of boxes over the triangles in their order. It is made when first asked for.
type locator struct {
	once   sync.Once
	levels [][]box // levels[0] has a box for every locatorFan triangles, the last level one box
}

// Locate finds a triangle that holds p, border included, by exact orientation tests; on a shared edge it is the one with the
// lower number. ok is false outside the domain. Safe for concurrent use.
func (m *Mesh) Locate(p orb.Point) (triangle int32, ok bool) {
	m.tree.once.Do(m.growTree)
	top := len(m.tree.levels) - 1
	if top < 0 || !(math.Abs(p[0]) < math.Inf(1) && math.Abs(p[1]) < math.Inf(1)) {
		return -1, false
	}
	var stack [128]int64 // level and box; a level adds at most locatorFan entries, and 20 levels hold 10^12 triangles
	n := 0
	stack[n] = int64(top) << 32
	n++
	for n > 0 {
		n--
		level, i := int(stack[n]>>32), int(stack[n]&0xffffffff)
		b := &m.tree.levels[level][i]
		if p[0] < b.x0 || p[0] > b.x1 || p[1] < b.y0 || p[1] > b.y1 {
			continue
		}
		if level > 0 {
			for j := min((i+1)*locatorFan, len(m.tree.levels[level-1])) - 1; j >= i*locatorFan; j-- {
				stack[n] = int64(level-1)<<32 | int64(j)
				n++
			}
			continue
		}
		for t := i * locatorFan; t < min((i+1)*locatorFan, len(m.Region)); t++ {
			if m.holds(int32(t), p) {
				return int32(t), true
			}
		}
	}
	return -1, false
}

// holds says whether p lies in triangle t or on its border.
func (m *Mesh) holds(t int32, p orb.Point) bool {
	a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
	return orient(m.X[a], m.Y[a], m.X[b], m.Y[b], p[0], p[1]) >= 0 &&
		orient(m.X[b], m.Y[b], m.X[c], m.Y[c], p[0], p[1]) >= 0 &&
		orient(m.X[c], m.Y[c], m.X[a], m.Y[a], p[0], p[1]) >= 0
}

// growTree makes the tree of boxes.
func (m *Mesh) growTree() {
	var low []box
	for t := 0; t < len(m.Region); t += locatorFan {
		b := box{math.Inf(1), math.Inf(1), math.Inf(-1), math.Inf(-1)}
		for _, v := range m.Triangles[3*t : min(3*(t+locatorFan), len(m.Triangles))] {
			b.join(box{m.X[v], m.Y[v], m.X[v], m.Y[v]})
		}
		low = append(low, b)
	}
	for len(low) > 0 {
		m.tree.levels = append(m.tree.levels, low)
		if len(low) == 1 {
			return
		}
		var high []box
		for i := 0; i < len(low); i += locatorFan {
			b := low[i]
			for _, c := range low[i:min(i+locatorFan, len(low))] {
				b.join(c)
			}
			high = append(high, b)
		}
		low = high
	}
}

// join widens a box to hold another.
func (b *box) join(c box) {
	b.x0, b.y0 = min(b.x0, c.x0), min(b.y0, c.y0)
	b.x1, b.y1 = max(b.x1, c.x1), max(b.y1, c.y1)
}
