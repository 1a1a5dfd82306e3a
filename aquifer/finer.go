package aquifer

import (
	"context"
	"fmt"
	"slices"
)

// Finer is the same site on the mesh with every triangle cut into four. It is assembled and never factored: its systems are solved by
// cycles that smooth there and correct on the coarse mesh, whose factor is at hand. The nodes of the coarse mesh keep their numbers.
type Finer struct {
	*Model            // the finer model; it has no factor, so that Heads, Settle and SolveFree must not be called
	Coarse *Model     // the model that it refines
	ends   [][2]int32 // per added node: the ends of the coarse edge in whose middle it lies

	start []int32 // compressed rows over the unknowns, without the diagonal
	index []int32
	value []float64
}

// Finer assembles the finer model. Conductances of springs that were found from a measured flow are taken over. Equivalent radii are found
// at springs and at the nodes listed only.
func (m *Model) Finer(ctx context.Context, radiiAt []int32, workers int) (*Finer, error) {
	bad := &problems{}
	fine, err := assembleOn(m.Site, m.plan, m.Mesh.Bisect(), bad)
	if err != nil {
		return nil, err
	}
	f := &Finer{Model: fine, Coarse: m, ends: m.Mesh.Middles()}
	if len(m.Mesh.X)+len(f.ends) != len(fine.Mesh.X) {
		panic(fmt.Sprintf("aquifer: the finer mesh has %d nodes, not %d and %d", len(fine.Mesh.X), len(m.Mesh.X), len(f.ends)))
	}
	fine.patchNodes = 4 * m.patchNodes
	fine.order = fine.alongTriangles()
	fine.number()
	if err := fine.findRadii(ctx, Options{Workers: workers}, func(node int32) bool { return slices.Contains(radiiAt, node) }); err != nil {
		return nil, err
	}
	fine.matrix.Pattern = fine.pattern
	fine.matrix.Values = make([]float64, len(fine.pattern.Index))
	fine.assembleBase()
	fine.SpringC = append([]float64(nil), m.SpringC...)
	for i := range fine.Site.Springs {
		fine.addSpring(i)
	}
	if err := fine.springProblems(); err != nil {
		return nil, err
	}
	f.rows()
	return f, nil
}

// alongTriangles lists the nodes in the order in which the triangles, which follow each other along the mesher's curve, touch them: added nodes
// then lie beside the coarse ones between them, and sweeps stay in the caches.
func (m *Model) alongTriangles() []int32 {
	seen := make([]bool, len(m.Mesh.X))
	order := make([]int32, 0, len(m.Mesh.X))
	for _, n := range m.Mesh.Triangles {
		if !seen[n] {
			seen[n] = true
			order = append(order, n)
		}
	}
	return order
}

// rows turns the lower triangle into whole rows.
func (f *Finer) rows() {
	p := f.pattern
	f.start = make([]int32, p.N+1)
	for j := range p.N {
		for _, i := range p.Index[p.Ptr[j]+1 : p.Ptr[j+1]] {
			f.start[i+1]++
			f.start[j+1]++
		}
	}
	for i := range p.N {
		f.start[i+1] += f.start[i]
	}
	f.index = make([]int32, f.start[p.N])
	f.value = make([]float64, f.start[p.N])
	next := append([]int32(nil), f.start[:p.N]...)
	put := func(i, j int32, v float64) {
		f.index[next[i]], f.value[next[i]] = j, v
		next[i]++
	}
	for j := range p.N { // ascending columns, so that every row comes out ascending below and above its diagonal
		for k := p.Ptr[j] + 1; k < p.Ptr[j+1]; k++ {
			put(p.Index[k], int32(j), f.matrix.Values[k])
			put(int32(j), p.Index[k], f.matrix.Values[k])
		}
	}
}

// ProlongHeads is Prolong with the heads prescribed on the finer mesh.
func (f *Finer) ProlongHeads(coarse []float64) []float64 {
	h := f.Prolong(coarse)
	for n, is := range f.isPrescribed {
		if is {
			h[n] = f.prescribed[n]
		}
	}
	return h
}

// Prolong interpolates a field over the coarse nodes linearly to the finer ones.
func (f *Finer) Prolong(coarse []float64) []float64 {
	out := make([]float64, len(f.Mesh.X))
	n := copy(out, coarse)
	for k, e := range f.ends {
		out[n+k] = (coarse[e[0]] + coarse[e[1]]) / 2
	}
	return out
}
