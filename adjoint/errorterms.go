package adjoint

import (
	"context"
	"math"
	"slices"

	"springbound/aquifer"
)

// influences makes the adjoint solves of all rows on both meshes, one batch after the other, and turns each into the slopes' errors, the
// bound and the row's part of the indicator.
func (c *comparison) influences(ctx context.Context) error {
	coarse, fine, err := c.functionals()
	if err != nil {
		return err
	}
	for _, n := range c.f.Model.SpringNode {
		c.springs = append(c.springs, c.f.patchTriangles(n))
	}
	if c.o.SlopeBounds {
		if err := c.wellNorms(ctx); err != nil {
			return err
		}
	}
	distinct, same := c.distinct(coarse)
	c.findCorners()
	c.out.Indicator = make([]float64, len(c.f.Model.Mesh.X))
	n, nf := c.f.Model.Unknowns(), c.finer.Unknowns()
	for start := 0; start < len(distinct); start += errorBatch {
		k := min(errorBatch, len(distinct)-start)
		block := make([]float64, n*k)
		x, b := make([][]float64, k), make([][]float64, k)
		for i := range k {
			scatter(block[i*n:(i+1)*n], c.f.Model, coarse[distinct[start+i]].Quantity)
			b[i] = make([]float64, nf)
			scatter(b[i], c.finer.Model, fine[distinct[start+i]].Quantity)
		}
		if err := c.state.State.SolveFree(ctx, block, k); err != nil {
			return err
		}
		z := make([][]float64, k)
		for i := range k {
			z[i] = c.f.Model.Spread(block[i*n : (i+1)*n])
			x[i] = unknowns(c.finer.Model, c.finer.Prolong(z[i]))
		}
		share := aquifer.SolvedShare
		for i := range k {
			if coarse[distinct[start+i]].Direct != nil {
				share = aquifer.SolvedFinely
			}
		}
		if err := c.solve(ctx, c.system, x, b, share); err != nil {
			return err
		}
		var rows []int
		for row := range coarse {
			if i := same[row] - start; i >= 0 && i < k {
				rows = append(rows, row)
			}
		}
		c.findProbes(z)
		parts := make([][]float64, len(rows))
		inParallel(len(rows), c.o.Workers, func(j int) {
			row := rows[j]
			i := same[row] - start
			parts[j] = c.row(row, z[i], c.finer.Spread(x[i]), coarse[row], fine[row])
		})
		for _, part := range parts { // in the rows' order
			for node, v := range part {
				c.out.Indicator[node] += v
			}
		}
		if c.o.Progress != nil {
			c.o.Progress(start+k, len(distinct))
		}
	}
	return c.cornerSlopes(ctx)
}

// errorBatch is how many influences are compared at once: each takes six fields over the finer nodes.
const errorBatch = 16

// distinct lists rows with different influences, and for each row which of them is its own.
func (c *comparison) distinct(fs []Functional) (distinct, same []int) {
	first := map[string]int{}
	for i := range fs {
		k := signature(c.f.Model, fs[i].Quantity)
		d, ok := first[k]
		if !ok {
			d = len(distinct)
			first[k], distinct = d, append(distinct, i)
		}
		same = append(same, d)
	}
	return distinct, same
}

// functionals are those of the rows in the state on both meshes, a worst place at the place on the coarse one.
func (c *comparison) functionals() (coarse, fine []Functional, err error) {
	for i := range c.f.watched {
		fn, place, err := c.f.watched[i].at(c.f, c.state.State, c.coarseDrawdown)
		if err != nil {
			return nil, nil, err
		}
		coarse = append(coarse, fn)
		if c.fine.watched[i].worst != nil {
			fn.Quantity, fn.Direct = c.finer.HeadAt(place), c.fine.casing(place)
		} else if fn, _, err = c.fine.watched[i].at(c.fine, c.fineState, c.fineDrawdown); err != nil {
			return nil, nil, err
		}
		fine = append(fine, fn)
	}
	return coarse, fine, nil
}

func scatter(b []float64, m *aquifer.Model, q aquifer.Quantity) {
	for k, n := range q.Nodes {
		if u := m.Unknown(n); u >= 0 {
			b[u] += q.Weights[k]
		}
	}
}

// row turns the influences of a row on both meshes into its errors and returns its part of the indicator.
func (c *comparison) row(row int, zc, zf []float64, coarse, fine Functional) []float64 {
	e := &c.out.Rows[row]
	e.SlopeError = make([]float64, len(c.f.node))
	e.Size = 0
	slopes := make([]float64, len(c.f.node))
	for w, n := range c.f.node {
		slope, d := zc[n], zc[n]-zf[n]
		if coarse.Direct != nil {
			slope -= coarse.Direct[w]
			d -= coarse.Direct[w] - fine.Direct[w]
		}
		slopes[w] = slope
		e.Size += math.Abs(slope * c.state.Rates[w])
		e.SlopeError[w] = remaining * d
	}
	zc, zf = c.withEdge(row, zc, zf)
	dz := c.finer.Difference(zc, zf)
	terms := c.finer.Terms(c.system, c.coarseDrawdown, zc, c.difference, dz)
	difference := -e.ChangeError / remaining
	e.ChangeError -= c.cornerChange(terms)
	c.cornerRow(row, zc, dz)
	total, patch, rest := c.absolute(terms, difference, coarse, fine)
	e.ChangeBound = slowest * total
	if c.pairs != nil {
		c.slopeBounds(e, zc, dz, slopes, patch, rest, coarse)
	}
	if wanted := c.o.Accuracy * e.Size; wanted > 0 {
		return c.indicate(terms, remaining/wanted*math.Max(math.Abs(e.ChangeError)/wanted, leastWeight))
	}
	return nil
}

// indicate sums a row's terms about each node.
func (c *comparison) indicate(terms aquifer.ErrorTerms, weight float64) []float64 {
	m := c.f.Model.Mesh
	sum := append([]float64(nil), terms.Node...)
	for t, v := range terms.Triangle {
		for _, n := range m.Triangles[3*t : 3*t+3] {
			sum[n] += v / 3
		}
	}
	for n, v := range sum {
		sum[n] = weight * math.Abs(v)
	}
	return sum
}

// leastWeight is what a row counts in the indicator that is far better than wanted, so that refinement for others does not spoil it.
const leastWeight = 0.01

// withEdge adds to the influence of a prescribed-head edge's flow what it is on the edge itself: its nodes' shares.
func (c *comparison) withEdge(row int, zc, zf []float64) ([]float64, []float64) {
	k := c.f.watched[row].headEdge - 1
	if k < 0 {
		return zc, zf
	}
	add := func(m *aquifer.Model, z []float64) []float64 {
		z = append([]float64(nil), z...)
		e := &m.HeadEdges[k]
		for i, share := range e.Shares() {
			z[e.Nodes[i]] += share
		}
		return z
	}
	return add(c.f.Model, zc), add(c.finer.Model, zf)
}

// patchTriangles lists the triangles that touch the inside of a node's local problem, ascending.
func (f *Field) patchTriangles(node int32) []int32 {
	var out []int32
	for _, n := range f.Model.PatchNodes(node) {
		out = append(out, f.Model.Mesh.NodeTriangles(n)...)
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// absolute sums the absolute terms. Where both fields are logarithms about one node, at springs and at the bore that a row reads, the
// discrete logarithms of the two meshes differ by as much as the equivalent radii there: the terms of such a patch count as one,
// together with what the radius takes back, and in the list they become equal shares of it. What all terms leave of the difference, which comes from
// the quantity's own weights, counts by itself. patch is the springs' parts.
func (c *comparison) absolute(terms aquifer.ErrorTerms, difference float64, coarse, fine Functional) (total float64, patch []float64, rest float64) {
	for _, n := range c.f.Model.SpringNode {
		terms.Node[n] += (weightAt(fine.Quantity, n) - weightAt(coarse.Quantity, n)) * c.coarseDrawdown[n]
	}
	patches := append([][]int32(nil), c.springs...)
	nodes := append([]int32(nil), c.f.Model.SpringNode...)
	for w, d := range coarse.Direct {
		if d != 0 {
			patches = append(patches, c.f.patchTriangles(c.f.node[w]))
			nodes = append(nodes, -1)
		}
	}
	rest = difference
	for _, v := range terms.Triangle {
		rest -= v
	}
	for _, v := range terms.Node {
		rest -= v
	}
	for i, list := range patches {
		sum := 0.0
		for _, t := range list {
			sum += terms.Triangle[t]
		}
		if n := nodes[i]; n >= 0 {
			sum += terms.Node[n]
			terms.Node[n] = 0
			patch = append(patch, sum)
		} else {
			sum += rest
			rest = 0
		}
		for _, t := range list {
			terms.Triangle[t] = sum / float64(len(list))
		}
	}
	total = math.Abs(rest)
	for _, v := range terms.Triangle {
		total += math.Abs(v)
	}
	for _, v := range terms.Node {
		total += math.Abs(v)
	}
	return total, patch, rest
}

func weightAt(q aquifer.Quantity, node int32) float64 {
	if i, ok := slices.BinarySearch(q.Nodes, node); ok {
		return q.Weights[i]
	}
	return 0
}
