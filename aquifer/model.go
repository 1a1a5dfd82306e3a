package aquifer

import (
	"context"
	"errors"
	"fmt"
	"math"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
	"springbound/aquifer/sparse"
)

// Model is the discrete flow model of a site: mesh, matrix, features and one factorisation that serves every solve.
type Model struct {
	Site     *Site
	Mesh     *mesh.Mesh
	Overlaps []Overlap

	HeadEdges   []HeadEdge
	Exchanges   []Exchange
	Inflows     []Inflow
	RiverPieces [][]RiverPiece // per river

	RequestNode []int32  // node of each Site.Nodes entry
	Radii       []Radius // equivalent radius of each Site.Nodes entry with a radius; zero elsewhere
	SpringNode  []int32
	SpringRadii []Radius
	SpringC     []float64 // conductance of each spring as stated or found from its measured flow [m²/d]
	FinestSize  float64   // edge length asked for at wells and receptors [m]

	Factorisations int // how many numeric factorisations were made
	FactorBytes    int64

	plan         *domainPlan
	regions      []region
	conductance  []float64 // three a triangle: of the edge opposite the vertex [m²/d]
	area         []float64 // three a triangle: part of the node's control volume [m²]
	onOutline    []bool
	outlineEdge  []int // per outline edge: 0 no-flow, else 1 + edge
	isPrescribed []bool
	order        []int32   // nodes in the order in which unknowns are numbered; nil is that of their numbers
	patchNodes   int       // in the local problem of an equivalent radius
	prescribed   []float64 // head at prescribed nodes [m]
	free         []int32   // node to unknown; -1 prescribed
	nodeOf       []int32   // unknown to node
	pattern      *sparse.Pattern
	slots        sparse.Slots
	symbolic     *sparse.Symbolic
	matrix       sparse.Matrix
	factor       *sparse.Factor
	solves       int
}

// Build meshes the site, assembles its matrix and factors it. Errors: *SiteError for what the user can mend, the mesher's
// *mesh.DomainError likewise, the context's error when interrupted, others for numerical failure.
func Build(ctx context.Context, site *Site, o Options) (*Model, error) {
	m, err := assemble(ctx, site, o)
	if err != nil {
		return nil, err
	}
	return m, m.finish(ctx, o)
}

// BuildBisected builds on the same mesh with every triangle cut into four, times over: for refinement studies.
func BuildBisected(ctx context.Context, site *Site, o Options, times int) (*Model, error) {
	bad := &problems{}
	d, msh, err := meshSite(ctx, site, o, bad)
	if err != nil {
		return nil, err
	}
	for range times {
		msh = msh.Bisect()
	}
	m, err := assembleOn(site, d, msh, bad)
	if err != nil {
		return nil, err
	}
	m.patchNodes <<= 2 * times // the same patches around wells
	return m, m.finish(ctx, o)
}

func meshSite(ctx context.Context, site *Site, o Options, bad *problems) (*domainPlan, *mesh.Mesh, error) {
	if err := o.Validate(); err != nil {
		return nil, nil, err
	}
	if len(site.Extent) == 0 {
		return nil, nil, &SiteError{Problems: []Problem{{Feature: "extent", Text: "there is no outline; give a polygon"}}}
	}
	if site.validate(bad); len(bad.list) > 0 {
		return nil, nil, bad.err()
	}
	d := site.plan(o, bad)
	if err := bad.err(); err != nil {
		return nil, nil, err
	}
	if err := o.fits(d.nodes, EstimateMemory(d.nodes)); err != nil {
		return nil, nil, err
	}
	o.report("mesh", 0, 1)
	msh, err := mesh.Build(ctx, d.domain, d.meshOptions(site, o))
	if err != nil {
		return nil, nil, err
	}
	o.report("mesh", 1, 1)
	return d, msh, o.fits(len(msh.X), EstimateMemory(len(msh.X)))
}

func (d *domainPlan) meshOptions(site *Site, o Options) mesh.Options {
	mo := mesh.Options{Nodes: d.nodes, Growth: d.growth, DetailGrowth: math.Min(1, detailGrowth*orDefault(o.Scale, 1)), MaxNodes: o.MaxNodes}
	mo.Sizes = d.allowedSizes(o.Sizes)
	if o.Coarsest > 0 {
		mo.Coarsest = o.Coarsest * orDefault(o.Scale, 1)
	}
	if site.anyAnisotropic() {
		mo.Metric = func(at orb.Point) mesh.Tensor {
			r, _ := site.properties(at)
			return r.tensor
		}
	}
	return mo
}

func (s *Site) anyAnisotropic() bool {
	if a := s.Background.Anisotropy; a != nil && a.Ratio != 1 {
		return true
	}
	for _, z := range s.Zones {
		if z.Anisotropy != nil && z.Anisotropy.Ratio != 1 {
			return true
		}
	}
	return false
}

func assemble(ctx context.Context, site *Site, o Options) (*Model, error) {
	bad := &problems{}
	d, msh, err := meshSite(ctx, site, o, bad)
	if err != nil {
		return nil, err
	}
	return assembleOn(site, d, msh, bad)
}

func assembleOn(site *Site, d *domainPlan, msh *mesh.Mesh, bad *problems) (*Model, error) {
	m := &Model{Site: site, Mesh: msh, FinestSize: d.finest, plan: d, patchNodes: patchNodes}
	m.buildRegions(bad)
	if err := bad.err(); err != nil {
		return nil, err
	}
	m.buildVolumes()
	m.onOutline = make([]bool, len(msh.X))
	for _, e := range msh.OutlineEdges {
		m.onOutline[e.A], m.onOutline[e.B] = true, true
	}
	m.buildOutline(d, bad)
	m.buildRivers(d, bad)
	m.buildAreas(bad)
	m.shareCorners()
	for _, k := range d.requestAt {
		m.RequestNode = append(m.RequestNode, msh.PointNode[k])
	}
	for _, k := range d.springAt {
		m.SpringNode = append(m.SpringNode, msh.PointNode[k])
	}
	m.checkPlaces(bad)
	m.checkFixed(bad)
	return m, bad.err()
}

// At returns the place of a node.
func (m *Model) At(node int32) orb.Point { return orb.Point{m.Mesh.X[node], m.Mesh.Y[node]} }

// Unknowns returns how many nodes have a head to be found.
func (m *Model) Unknowns() int { return len(m.nodeOf) }

// Solves returns how many right-hand sides have been solved with the factor.
func (m *Model) Solves() int { return m.solves }

// checkPlaces refuses wells and springs where a head is prescribed or an exchange is lumped along a line.
func (m *Model) checkPlaces(bad *problems) {
	on := map[int32]string{}
	for _, e := range m.Exchanges {
		if e.Kind == RiverFeature || e.Kind == EdgeFeature {
			for _, n := range e.Nodes {
				on[n] = string(e.Kind) + " " + e.Name
			}
		}
	}
	for _, e := range m.HeadEdges {
		for _, n := range e.Nodes {
			on[n] = "edge " + e.Name
		}
	}
	for i, r := range m.Site.Nodes {
		if name, ok := on[m.RequestNode[i]]; ok && r.Well {
			bad.add(r.Name, r.At, "it stands on %s, where its water would come from the line at once; move it off the line", name)
		}
	}
	for i, s := range m.Site.Springs {
		if m.isPrescribed[m.SpringNode[i]] {
			bad.add("spring "+s.Name, s.At, "it stands on %s, where the head is prescribed; move it off the line", on[m.SpringNode[i]])
		}
	}
}

// checkFixed refuses parts of the domain where nothing fixes the head.
func (m *Model) checkFixed(bad *problems) {
	fixed := make([]bool, m.Mesh.Parts)
	partOf := func(node int32) int {
		return m.Mesh.Regions[m.Mesh.Region[m.Mesh.NodeTriangles(node)[0]]].Part
	}
	for _, e := range m.HeadEdges {
		for _, n := range e.Nodes {
			fixed[partOf(n)] = true
		}
	}
	for _, e := range m.Exchanges {
		for _, n := range e.Nodes {
			fixed[partOf(n)] = true
		}
	}
	for _, n := range m.SpringNode {
		fixed[partOf(n)] = true
	}
	for p, ok := range fixed {
		if ok {
			continue
		}
		area, at := 0.0, orb.Point{}
		for _, r := range m.Mesh.Regions {
			if r.Part == p {
				if area == 0 {
					at = r.At
				}
				area += r.Area
			}
		}
		bad.add("aquifer", at, "nothing fixes the head in the part around (%.1f, %.1f), %.4g km²: give it a prescribed-head or head-dependent edge, a river, a lake, a spring or leakage", at[0], at[1], area/1e6)
	}
}

// finish numbers the unknowns, assembles, finds the springs' conductances, factors.
func (m *Model) finish(ctx context.Context, o Options) error {
	m.number()
	o.report("analyse", 0, 1)
	x, y := make([]float64, len(m.nodeOf)), make([]float64, len(m.nodeOf))
	for i, n := range m.nodeOf {
		x[i], y[i] = m.Mesh.X[n], m.Mesh.Y[n]
	}
	symbolic, err := sparse.Analyse(ctx, m.pattern, x, y, sparse.Options{Workers: o.Workers})
	if err != nil {
		return err
	}
	m.symbolic = symbolic
	m.FactorBytes = symbolic.FactorBytes()
	known := Memory{Factor: symbolic.PeakBytes(), Rest: EstimateMemory(len(m.Mesh.X)).Rest}
	if err := o.fits(len(m.Mesh.X), known); err != nil {
		return err
	}
	if err := m.findRadii(ctx, o, func(int32) bool { return true }); err != nil {
		return err
	}
	m.matrix = sparse.Matrix{Pattern: m.pattern, Values: make([]float64, len(m.pattern.Index))}
	m.assembleBase()
	o.report("factor", 0, 1)
	if err := m.addSprings(ctx); err != nil {
		return err
	}
	if o.Alter != nil {
		o.Alter(Terms{m})
	}
	err = m.refactor(ctx)
	o.report("factor", 1, 1)
	return err
}

func (m *Model) refactor(ctx context.Context) error {
	m.Factorisations++
	factor, err := m.symbolic.Factor(ctx, m.matrix.Values)
	if err != nil {
		var indefinite *sparse.NotPositiveDefinite
		if errors.As(err, &indefinite) {
			at := m.At(m.nodeOf[indefinite.Row])
			return fmt.Errorf("aquifer: the flow matrix is not positive definite at (%.2f, %.2f): %w", at[0], at[1], err)
		}
		return err
	}
	m.factor = factor
	return nil
}

// number gives every node without a prescribed head its unknown and builds the matrix's pattern.
func (m *Model) number() {
	m.free = make([]int32, len(m.Mesh.X))
	for n := range m.free {
		m.free[n] = -1
	}
	for k := range m.free {
		n := int32(k)
		if m.order != nil {
			n = m.order[k]
		}
		if !m.isPrescribed[n] {
			m.free[n] = int32(len(m.nodeOf))
			m.nodeOf = append(m.nodeOf, n)
		}
	}
	pi := make([]int32, 0, 3*len(m.nodeOf))
	pj := make([]int32, 0, 3*len(m.nodeOf))
	m.eachEdge(func(a, b int32, _ float64) {
		if i, j := m.free[a], m.free[b]; i >= 0 && j >= 0 {
			pi, pj = append(pi, i), append(pj, j)
		}
	})
	m.pattern, m.slots = sparse.NewPattern(len(m.nodeOf), pi, pj)
}

// eachEdge visits every mesh edge once with its whole conductance, in a fixed order.
func (m *Model) eachEdge(visit func(a, b int32, c float64)) {
	for t := 0; t < len(m.Mesh.Triangles)/3; t++ {
		for k := 0; k < 3; k++ {
			o := m.Mesh.Neighbours[3*t+k]
			c := m.conductance[3*t+k]
			if o >= 0 {
				if int(o) < t {
					continue
				}
				for l := int32(0); l < 3; l++ {
					if m.Mesh.Neighbours[3*o+l] == int32(t) {
						c += m.conductance[3*o+l]
					}
				}
			}
			visit(m.Mesh.Triangles[3*t+(k+1)%3], m.Mesh.Triangles[3*t+(k+2)%3], c)
		}
	}
}

// assembleBase adds conductances and every exchange but the springs'.
func (m *Model) assembleBase() {
	values := m.matrix.Values
	pair := 0
	m.eachEdge(func(a, b int32, c float64) {
		i, j := m.free[a], m.free[b]
		if i >= 0 {
			values[m.slots.Diagonal[i]] += c
		}
		if j >= 0 {
			values[m.slots.Diagonal[j]] += c
		}
		if i >= 0 && j >= 0 {
			values[m.slots.Pair[pair]] -= c
			pair++
		}
	})
	for _, e := range m.Exchanges {
		for k, n := range e.Nodes {
			if i := m.free[n]; i >= 0 {
				values[m.slots.Diagonal[i]] += e.Conductance[k]
			}
		}
	}
}

// findRadii solves the local problems of springs, and of wells and receptors with a bore where they are wanted.
func (m *Model) findRadii(ctx context.Context, o Options, wanted func(node int32) bool) error {
	m.Radii = make([]Radius, len(m.Site.Nodes))
	m.SpringRadii = make([]Radius, len(m.Site.Springs))
	type job struct {
		node int32
		to   *Radius
	}
	var jobs []job
	for i, r := range m.Site.Nodes {
		if r.Radius > 0 && wanted(m.RequestNode[i]) {
			jobs = append(jobs, job{m.RequestNode[i], &m.Radii[i]})
		}
	}
	for i := range m.Site.Springs {
		jobs = append(jobs, job{m.SpringNode[i], &m.SpringRadii[i]})
	}
	return inParallel(ctx, len(jobs), o.Workers, func(ctx context.Context, i int) error {
		r, err := m.equivalentRadius(ctx, jobs[i].node)
		*jobs[i].to = r
		return err
	})
}

// Heads returns the head at every node under the given sinks [m].
func (m *Model) Heads(ctx context.Context, sinks []Sink) ([]float64, error) {
	rhs := m.rightHandSide(sinks)
	if err := m.SolveFree(ctx, rhs, 1); err != nil {
		return nil, err
	}
	return m.spread(rhs), nil
}

// Sink is a rate taken out at a node.
type Sink struct {
	Node int32
	Rate float64 // [m³/d]
}

func (m *Model) rightHandSide(sinks []Sink) []float64 {
	b := make([]float64, len(m.nodeOf))
	m.eachEdge(func(p, q int32, c float64) {
		if i := m.free[p]; i >= 0 && m.free[q] < 0 {
			b[i] += c * m.prescribed[q]
		}
		if i := m.free[q]; i >= 0 && m.free[p] < 0 {
			b[i] += c * m.prescribed[p]
		}
	})
	for _, e := range m.Exchanges {
		for k, n := range e.Nodes {
			if i := m.free[n]; i >= 0 {
				b[i] += e.Conductance[k] * e.Level[k]
			}
		}
	}
	for _, f := range m.Inflows {
		for k, n := range f.Nodes {
			if i := m.free[n]; i >= 0 {
				b[i] += f.Flow[k]
			}
		}
	}
	for _, s := range sinks {
		if i := m.free[s.Node]; i >= 0 {
			b[i] -= s.Rate
		}
	}
	return b
}

// spread puts the unknowns and the prescribed heads together, one value a node.
func (m *Model) spread(unknowns []float64) []float64 {
	h := make([]float64, len(m.Mesh.X))
	for n := range h {
		if i := m.free[n]; i >= 0 {
			h[n] = unknowns[i]
		} else {
			h[n] = m.prescribed[n]
		}
	}
	return h
}

// Spread puts a field over the unknowns onto the nodes; prescribed nodes get 0 (an influence, a drawdown).
func (m *Model) Spread(unknowns []float64) []float64 {
	h := make([]float64, len(m.Mesh.X))
	for n := range h {
		if i := m.free[n]; i >= 0 {
			h[n] = unknowns[i]
		}
	}
	return h
}

// SolveFree solves A x = b in place for k right-hand sides over the unknowns, one after the other.
func (m *Model) SolveFree(ctx context.Context, block []float64, k int) error {
	m.solves += k
	return m.factor.Solve(ctx, block, k)
}

// Unknown returns the number of a node's unknown, -1 where its head is prescribed.
func (m *Model) Unknown(node int32) int32 { return m.free[node] }

// Transmissivity returns T* at a node [m²/d], by angle where the node lies on a border.
func (m *Model) Transmissivity(node int32) float64 { return m.around(node).Mean }

// Tops returns the elevation of the aquifer's top at every node, the higher one on a border; NaN where none is stated [m].
func (m *Model) Tops() []float64 {
	top := make([]float64, len(m.Mesh.X))
	for n := range top {
		top[n] = math.NaN()
	}
	for t := 0; t < len(m.Mesh.Triangles)/3; t++ {
		v := m.regions[m.Mesh.Region[t]].top
		for k := 0; k < 3; k++ {
			if n := m.Mesh.Triangles[3*t+k]; v > top[n] || math.IsNaN(top[n]) {
				top[n] = v
			}
		}
	}
	return top
}
