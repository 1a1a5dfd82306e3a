package mesh

import (
	"context"
	"errors"

	"github.com/paulmach/orb"
)

type locateGrid struct{}

// Build meshes a domain.
func Build(ctx context.Context, d Domain, o Options) (*Mesh, error) {
	return nil, errors.New("mesh: Build is being written")
}

// EstimateNodes integrates the size field: about how many nodes Build will make.
func EstimateNodes(d Domain, o Options) float64 { return 0 }

// Validate checks a domain; the error is a *DomainError with every problem found. tol 0 = the default of Options.Tolerance.
func Validate(d Domain, tol float64) error { return nil }

// Locate finds the triangle that holds p; ok is false outside the domain. Safe for concurrent use.
func (m *Mesh) Locate(p orb.Point) (triangle int32, ok bool) { return -1, false }

// NodeTriangles lists the triangles around a node. The slice is shared; do not change it.
func (m *Mesh) NodeTriangles(node int32) []int32 { return m.nodeTris[m.nodeStart[node]:m.nodeStart[node+1]] }

// Bisect cuts every triangle into four at its edge midpoints and carries all provenance over.
func (m *Mesh) Bisect() *Mesh { return nil }
