package aquifer

import (
	"fmt"
	"math"
)

// What the parts of a job hold at their peak, measured on meshes of 100,000 to 4 million nodes with two workers and influence fields of 100
// receptors, rounded up.
const (
	bytesPerNode       = 1150  // mesh, matrix, analysis, a block of 32 right-hand sides, heads, and what the collector leaves lying [bytes]
	factorAtHundred    = 37.0  // entries of the factor a node at 100,000 nodes
	factorPerDoubling  = 5.0   // what a doubling of the nodes adds to that
	leastFactorEntries = 20.0  // entries a node of small factors
	updatesShare       = 0.5   // update matrices, as a share of the factor
	leastCheckedNodes  = 50000 // below, everything fits
)

// Memory is what a job needs at its peak [bytes].
type Memory struct {
	Factor int64 // the factor and the update matrices while it is made
	Rest   int64 // mesh, matrix, analysis, right-hand sides and fields
}

// Total is the sum of the parts.
func (m Memory) Total() int64 { return m.Factor + m.Rest }

// EstimateMemory tells from the number of nodes alone what a job with whole influence fields needs. The factor of a planar mesh ordered by nested
// dissection has entries like n log n (George 1973).
func EstimateMemory(nodes int) Memory {
	n := float64(nodes)
	entries := math.Max(leastFactorEntries, factorAtHundred+factorPerDoubling*math.Log2(math.Max(n, 1)/100e3))
	return Memory{Factor: int64(8 * n * entries * (1 + updatesShare)), Rest: int64(n * bytesPerNode)}
}

// fits returns an error where a job needs more memory than Options.Memory allows.
func (o Options) fits(nodes int, need Memory) error {
	if o.Memory <= 0 || nodes < leastCheckedNodes || need.Total() <= o.Memory {
		return nil
	}
	gigabytes := func(bytes int64) float64 { return float64(bytes) / 1e9 }
	return &SiteError{Problems: []Problem{{Feature: "mesh", Text: fmt.Sprintf(
		"a mesh of about %d nodes needs about %.1f GB of memory (the factor %.1f GB, mesh, matrix and fields %.1f GB), but %.1f GB are free; ask for fewer nodes or a larger finest size in [mesh], close other programs, or take a computer with more memory",
		nodes, gigabytes(need.Total()), gigabytes(need.Factor), gigabytes(need.Rest), gigabytes(o.Memory))}}}
}
