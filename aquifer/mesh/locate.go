package mesh

import (
	"math"
	"sync"

	"github.com/paulmach/orb"
)

// locatorGroup is how many triangles share a box of the locator's tree; they follow each other along the Hilbert curve.
const locatorGroup = 4

// locator finds triangles. It is made when first asked for.
type locator struct {
	once sync.Once
	tree *boxTree
}

// Locate finds a triangle that holds p, border included, by exact orientation tests in a tree of boxes; on a shared edge it is
// the one with the lower number. ok is false outside the domain. Safe for concurrent use. Orientation: Shewchuk (1997).
func (m *Mesh) Locate(p orb.Point) (triangle int32, ok bool) {
	m.locator.once.Do(m.growLocator)
	if !(math.Abs(p[0]) < math.Inf(1) && math.Abs(p[1]) < math.Inf(1)) {
		return -1, false
	}
	triangle = -1
	m.locator.tree.each(box{p[0], p[1], p[0], p[1]}, func(group int) bool {
		for t := group * locatorGroup; t < min((group+1)*locatorGroup, len(m.Region)); t++ {
			if m.holds(int32(t), p) {
				triangle = int32(t)
				return false
			}
		}
		return true
	})
	return triangle, triangle >= 0
}

// holds says whether p lies in triangle t or on its border.
func (m *Mesh) holds(t int32, p orb.Point) bool {
	a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
	return orient(m.X[a], m.Y[a], m.X[b], m.Y[b], p[0], p[1]) >= 0 &&
		orient(m.X[b], m.Y[b], m.X[c], m.Y[c], p[0], p[1]) >= 0 &&
		orient(m.X[c], m.Y[c], m.X[a], m.Y[a], p[0], p[1]) >= 0
}

// growLocator makes the tree.
func (m *Mesh) growLocator() {
	groups := make([]box, 0, len(m.Region)/locatorGroup+1)
	for t := 0; t < len(m.Region); t += locatorGroup {
		b := emptyBox()
		for _, v := range m.Triangles[3*t : min(3*(t+locatorGroup), len(m.Triangles))] {
			b.join(box{m.X[v], m.Y[v], m.X[v], m.Y[v]})
		}
		groups = append(groups, b)
	}
	m.locator.tree = newBoxTree(groups)
}
