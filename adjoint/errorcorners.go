package adjoint

import (
	"context"
	"math"
	"slices"
	"sort"

	"springbound/aquifer"
)

// cornerError holds, for one corner, what is needed to correct estimates for its slower convergence: terms beside a corner about which heads
// go as r^a fall by 4^a when every triangle is cut into four, not by 4.
type cornerError struct {
	aquifer.Corner
	extra float64   // what is added to the terms' sum beyond 4/3 of it [-]
	probe int32     // a node beside it, itself where every field is level: the field there less that at the corner tells the strength of r^a f(angle)
	rows  []float64 // per row: extra x sum of the terms of its influence with itself, over the influence's strength
}

// mostCorners bounds for how many corners slopes are corrected, one solve each; those that matter most are taken.
const mostCorners = 128

// findCorners lists the corners; a triangle belongs to the sharpest one about.
func (c *comparison) findCorners() {
	list := c.f.Model.Corners()
	sort.SliceStable(list, func(a, b int) bool { return list[a].Exponent < list[b].Exponent })
	taken := make([]bool, len(c.f.Model.Mesh.Region))
	for _, k := range list {
		k.Triangles = slices.DeleteFunc(k.Triangles, func(t int32) bool { return taken[t] })
		for _, t := range k.Triangles {
			taken[t] = true
		}
		c.corners = append(c.corners, cornerError{Corner: k, probe: k.Node, extra: 1/(1-math.Pow(4, -k.Exponent)) - remaining, rows: make([]float64, len(c.f.watched))})
	}
}

// cornerChange is what the corners add to the estimate of the difference between exact and computed change of a row.
func (c *comparison) cornerChange(terms aquifer.ErrorTerms) float64 {
	sum := 0.0
	for _, k := range c.corners {
		for _, t := range k.Triangles {
			sum += k.extra * terms.Triangle[t]
		}
	}
	return sum
}

// cornerRow keeps what the corners do to a row's slopes: beside a corner both the row's influence z and that of any well are multiples of
// one function, so that their terms are those of z with itself, times the ratio of their strengths.
func (c *comparison) cornerRow(row int, z, dz []float64) {
	for i := range c.corners {
		k := &c.corners[i]
		if strength := z[k.probe] - z[k.Node]; strength != 0 {
			k.rows[row] = k.extra * c.finer.Energy(k.Triangles, dz) / strength
		}
	}
}

// findProbes chooses a node beside each corner, by the first influence that is not level there.
func (c *comparison) findProbes(fields [][]float64) {
	for i := range c.corners {
		k := &c.corners[i]
		for _, z := range fields {
			if k.probe == k.Node {
				k.probe = c.strongest(k.Corner, z)
			}
		}
	}
}

// strongest is the node beside a corner at which a field differs most from that at the corner.
func (c *comparison) strongest(k aquifer.Corner, z []float64) int32 {
	best := k.Node
	for _, t := range c.f.Model.Mesh.NodeTriangles(k.Node) {
		for _, n := range c.f.Model.Mesh.Triangles[3*t : 3*t+3] {
			if math.Abs(z[n]-z[k.Node]) > math.Abs(z[best]-z[k.Node]) {
				best = n
			}
		}
	}
	return best
}

// cornerSlopes corrects the slopes' errors: one solve a corner tells the strength of every well's field beside it.
func (c *comparison) cornerSlopes(ctx context.Context) error {
	weight := func(k cornerError) float64 {
		w := 0.0
		for _, v := range k.rows {
			w = math.Max(w, math.Abs(v))
		}
		return w
	}
	list := append([]cornerError(nil), c.corners...)
	sort.SliceStable(list, func(a, b int) bool { return weight(list[a]) > weight(list[b]) })
	list = list[:min(len(list), mostCorners)]
	n := c.f.Model.Unknowns()
	for start := 0; start < len(list); start += blockWidth {
		k := min(blockWidth, len(list)-start)
		block := make([]float64, n*k)
		for i := range k {
			at := list[start+i]
			if u := c.f.Model.Unknown(at.probe); u >= 0 && at.probe != at.Node {
				block[i*n+int(u)]++
			}
			if u := c.f.Model.Unknown(at.Node); u >= 0 && at.probe != at.Node {
				block[i*n+int(u)]--
			}
		}
		if err := c.state.State.SolveFree(ctx, block, k); err != nil {
			return err
		}
		for i := range k {
			for w, node := range c.f.node {
				u := c.f.Model.Unknown(node)
				if u < 0 {
					continue
				}
				strength := block[i*n+int(u)]
				for row := range c.out.Rows {
					c.out.Rows[row].SlopeError[w] -= list[start+i].rows[row] * strength
				}
			}
		}
	}
	return nil
}
