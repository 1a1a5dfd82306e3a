package adjoint

import (
	"context"
	"math"
)

const (
	// clusterTriangles is how many triangles, neighbours along the mesh's own curve, share a norm: by Cauchy and Schwarz the sum of products of
	// norms only grows with it, and a norm of every well's field is kept for each cluster.
	clusterTriangles = 8
	// pairSweeps is how many double sweeps find the part of a well's field that the coarse mesh does not show: its norm is then good to a few
	// per cent.
	pairSweeps = 2
)

// pairNorms holds the wells' fields as the bounds of slopes need them.
type pairNorms struct {
	cluster [][]float64 // per well: square roots of the terms of the field with itself
	spring  [][]float64 // per well: the field at the springs, coarse mesh [d/m²]
}

// wellNorms makes one solve a well.
func (c *comparison) wellNorms(ctx context.Context) error {
	n, nf := c.f.Model.Unknowns(), c.finer.Unknowns()
	c.pairs = &pairNorms{}
	for start := 0; start < len(c.f.node); start += errorBatch {
		k := min(errorBatch, len(c.f.node)-start)
		block := make([]float64, n*k)
		x, b, u := make([][]float64, k), make([][]float64, k), make([][]float64, k)
		for i := range k {
			b[i] = make([]float64, nf)
			q := c.f.Model.HeadAt(c.f.node[start+i])
			scatter(block[i*n:(i+1)*n], c.f.Model, q)
			scatter(b[i], c.finer.Model, q)
		}
		if err := c.state.State.SolveFree(ctx, block, k); err != nil {
			return err
		}
		for i := range k {
			u[i] = c.f.Model.Spread(block[i*n : (i+1)*n])
			x[i] = unknowns(c.finer.Model, c.finer.Prolong(u[i]))
		}
		if err := c.system.Smooth(ctx, x, b, pairSweeps, c.o.Workers); err != nil {
			return err
		}
		cluster, spring := make([][]float64, k), make([][]float64, k)
		inParallel(k, c.o.Workers, func(i int) {
			cluster[i] = c.norms(u[i], c.finer.Difference(u[i], c.finer.Spread(x[i])), nil)
			for _, node := range c.f.Model.SpringNode {
				spring[i] = append(spring[i], u[i][node])
			}
		})
		c.pairs.cluster, c.pairs.spring = append(c.pairs.cluster, cluster...), append(c.pairs.spring, spring...)
	}
	return nil
}

// norms are the square roots of the terms of a field with itself, cluster by cluster, without the springs' patches and those left out.
func (c *comparison) norms(coarse, difference []float64, without []int32) []float64 {
	terms := c.finer.Terms(c.system, coarse, coarse, difference, difference)
	for _, list := range append([][]int32{without}, c.springs...) {
		for _, t := range list {
			terms.Triangle[t] = 0
		}
	}
	for _, n := range c.f.Model.SpringNode {
		terms.Node[n] = 0
	}
	out := make([]float64, (len(terms.Triangle)+clusterTriangles-1)/clusterTriangles)
	for t, v := range terms.Triangle {
		out[t/clusterTriangles] += v
	}
	for n, v := range terms.Node {
		if v != 0 {
			out[c.f.Model.Mesh.NodeTriangles(int32(n))[0]/clusterTriangles] += v
		}
	}
	for i, v := range out {
		out[i] = math.Sqrt(math.Max(0, v))
	}
	return out
}

// slopeBounds fills a row's bounds: for each well the sum over clusters of the products of the two fields' norms, what the springs' patches add in
// proportion to the well's field there, and of the row's rest a part in proportion to the slope.
func (c *comparison) slopeBounds(e *RowError, zc, dz []float64, slope, patch []float64, rest float64, coarse Functional) {
	own := c.norms(zc, dz, nil)
	e.SlopeBound = make([]float64, len(c.f.node))
	for w := range c.f.node {
		sum := 0.0
		if coarse.Direct != nil && coarse.Direct[w] != 0 {
			sum = c.ownBound(e.SlopeError[w]/remaining, zc, dz, c.f.patchTriangles(c.f.node[w]))
		} else {
			for i, v := range c.pairs.cluster[w] {
				sum += v * own[i]
			}
		}
		for s, node := range c.f.Model.SpringNode {
			if c.coarseDrawdown[node] != 0 {
				sum += math.Abs(patch[s] * c.pairs.spring[w][s] / c.coarseDrawdown[node])
			}
		}
		if e.Size > 0 {
			sum += math.Abs(rest * slope[w] / e.Size)
		}
		e.SlopeBound[w] = slowest * math.Max(sum, math.Abs(e.SlopeError[w])/remaining)
	}
}

// ownBound is for a well's level in its own bore: the two fields are one, all terms outside the bore's patch have one sign, and the patch counts as one
// term together with what the equivalent radius takes back.
func (c *comparison) ownBound(difference float64, zc, dz []float64, patch []int32) float64 {
	outside := 0.0
	for _, v := range c.norms(zc, dz, patch) {
		outside += v * v
	}
	return outside + math.Abs(-difference-outside)
}
