package adjoint

import (
	"math"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

// sizing finds edge lengths for a new mesh from an indicator on an old one. Where the error per area is g h², g known from the indicator and the
// edge length h there, the least number of nodes for a given error has h in proportion to g^(-1/4): every node then adds the same. Nothing
// becomes coarser.
type sizing struct {
	mesh      *mesh.Mesh
	indicator []float64 // per node
	length    []float64 // per node: edge length of equilateral triangles as large as those about it [m]
}

const (
	// leastRound is the smallest share of the error that one round aims at: what it knows of the error's places is from the mesh before.
	leastRound = 1.0 / 8
	// leastFactor bounds how much finer a place becomes in one round.
	leastFactor = 1.0 / 5
	// sizeGrowth is the growth of edge length from the places that are refined: neighbours ask for themselves where they need to.
	sizeGrowth = 0.25
	// unchanged is the share of its edge length above which a place is left as it is.
	unchanged = 0.95
	// halvings find a factor to rounding.
	halvings = 60
)

// newSizing measures the mesh.
func newSizing(m *mesh.Mesh, indicator []float64) *sizing {
	s := &sizing{m, indicator, make([]float64, len(m.X))}
	for t := range m.Region {
		a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
		third := ((m.X[b]-m.X[a])*(m.Y[c]-m.Y[a]) - (m.Y[b]-m.Y[a])*(m.X[c]-m.X[a])) / 6
		for _, k := range [3]int32{a, b, c} {
			s.length[k] += third
		}
	}
	for k, area := range s.length {
		s.length[k] = math.Sqrt(2 * area / math.Sqrt(3))
	}
	return s
}

// factor is by how much the edge length at node k is multiplied, for a level c of the indicator that is wanted of every node: a factor f leaves
// f^2 of the error and spreads it over f^-2 nodes.
func (s *sizing) factor(k int, c float64) float64 {
	return math.Max(leastFactor, math.Min(1, math.Pow(c/s.indicator[k], 0.25))) // +Inf for an indicator of 0
}

// left is the sum of the indicator to be expected.
func (s *sizing) left(c float64) (sum float64) {
	for k, v := range s.indicator {
		f := s.factor(k, c)
		sum += v * f * f
	}
	return sum
}

// nodes is the number of nodes to be expected.
func (s *sizing) nodes(c float64) (sum float64) {
	for k := range s.indicator {
		f := s.factor(k, c)
		sum += 1 / (f * f)
	}
	return sum
}

// largest bounds the level: from it on nothing changes.
func (s *sizing) largest() (most float64) {
	for _, v := range s.indicator {
		most = math.Max(most, v)
	}
	return most
}

// forShare finds the level at which a share of the indicator's sum is left, or the least level.
func (s *sizing) forShare(share float64) float64 {
	low, high := 0.0, s.largest()
	wanted := share * s.left(high)
	for range halvings {
		if c := (low + high) / 2; s.left(c) <= wanted {
			low = c
		} else {
			high = c
		}
	}
	return high
}

// within raises the level until the nodes expected stay within the budget, and tells whether it had to.
func (s *sizing) within(c, budget float64) (level float64, raised bool) {
	if s.nodes(c) <= budget {
		return c, false
	}
	low, high := c, s.largest()
	for range halvings {
		if mid := (low + high) / 2; s.nodes(mid) > budget {
			low = mid
		} else {
			high = mid
		}
	}
	return high, true
}

// sizes lists the places that become finer.
func (s *sizing) sizes(c float64) (out []mesh.Size) {
	for k := range s.indicator {
		if f := s.factor(k, c); f < unchanged {
			out = append(out, mesh.Size{At: orb.Point{s.mesh.X[k], s.mesh.Y[k]}, Edge: f * s.length[k], Growth: sizeGrowth})
		}
	}
	return out
}
