package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

// Terms are the parts of an assembled system before it is factored, as Options.Alter may change them: the seam by which a test plants a
// fault, to prove that the independent checks see it. Nothing else uses it.
type Terms struct{ model *Model }

// Drop takes the flow of a feature out of the system, as if its term had been forgotten: an exchange out of matrix, right-hand side and
// balance, a given inflow out of the last two. It tells whether there was such a feature.
func (t Terms) Drop(kind FeatureKind, name string) bool {
	m, found := t.model, false
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		if e.Kind != kind || e.Name != name {
			continue
		}
		found = true
		for k, n := range e.Nodes {
			if u := m.free[n]; u >= 0 {
				m.matrix.Values[m.slots.Diagonal[u]] -= e.Conductance[k]
			}
			e.Conductance[k] = 0
		}
	}
	for i := range m.Inflows {
		f := &m.Inflows[i]
		if f.Kind == kind && f.Name == name {
			found = true
			clear(f.Flow)
		}
	}
	return found
}

// ScaleCoupling multiplies, in the matrix alone, the conductance between the two nodes of the mesh edge whose middle is nearest to a place
// and whose heads are both to be found.
func (t Terms) ScaleCoupling(at orb.Point, factor float64) {
	m := t.model
	nearest, slot, change := math.Inf(1), -1, 0.0
	var ends [2]int32
	pair := 0
	m.eachEdge(func(a, b int32, c float64) {
		i, j := m.free[a], m.free[b]
		if i < 0 || j < 0 {
			return
		}
		if d := math.Hypot((m.Mesh.X[a]+m.Mesh.X[b])/2-at[0], (m.Mesh.Y[a]+m.Mesh.Y[b])/2-at[1]); d < nearest {
			nearest, slot, change, ends = d, pair, c*(factor-1), [2]int32{i, j}
		}
		pair++
	})
	if slot < 0 {
		return
	}
	m.matrix.Values[m.slots.Pair[slot]] -= change
	for _, u := range ends {
		m.matrix.Values[m.slots.Diagonal[u]] += change
	}
}
