package mesh

import (
	"context"
	"fmt"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

const (
	defaultNodes     = 20000
	defaultGrowth    = 0.15
	defaultDetail    = 0.5 // a long coast then takes some five nodes a vertex, and angles are kept
	defaultAngleDeg  = 25
	largestAngleDeg  = 33   // refinement beyond this is not known to end
	extraAngleDeg    = 3    // refined to so much more than asked, which costs a few per cent of nodes
	defaultTolerance = 1e-8 // of the diagonal: 0.1 mm in 10 km, and far above the rounding of such coordinates
	budgetFactor     = 4    // default budget over the nodes estimated
	budgetExtra      = 50000
	budgetWanted     = 20         // default budget at most so many times the nodes wanted, or
	budgetLeast      = 500_000    // this many: what a laptop's solver still takes
	gapShare         = 8          // of the budget, this part at most is spent on narrow gaps before sizes are known: each vertex there
	gapGrowth        = 4          // needs ten times as many around it; but always so many times the vertices of the input
	mostNodes        = 50_000_000 // what handles of 32 bits carry with room to spare
	largestGrowth    = 1.0        // steeper grading cannot keep the angle
	largestCoarser   = 4          // a mesh is made so many times coarser at most before it is halved
	steepestCoarse   = 0.35
	leastCoarse      = 3000 // nodes: smaller coarse meshes have too few triangles between their sources for even grading
	levelNodes       = 3.7  // nodes of a mesh over those of one twice as coarse, at least; for reserving room
)

// resolved fills in the defaults.
func (o Options) resolved(d Domain) Options {
	if o.Nodes == 0 {
		o.Nodes = defaultNodes
	}
	if o.Growth == 0 {
		o.Growth = defaultGrowth
	}
	if o.DetailGrowth == 0 {
		o.DetailGrowth = max(defaultDetail, o.Growth)
	}
	if o.MinAngleDeg == 0 {
		o.MinAngleDeg = defaultAngleDeg
	}
	o.Tolerance = resolvedTolerance(d, o.Tolerance)
	return o
}

// Build meshes a domain. It fails with a *DomainError when the domain or the options are at fault, and with the context's error
// when stopped. A budget that was hit and angles that the input forced are told in Mesh.Quality, not as errors. Method and
// sources: package documentation (Ruppert 1995; Shewchuk 2002; Ungor 2004).
func Build(ctx context.Context, d Domain, o Options) (*Mesh, error) {
	if problems := checkAll(d, o); len(problems) > 0 {
		return nil, &DomainError{problems}
	}
	o = o.resolved(d)
	m, err := o.build(ctx, d)
	if err != nil || m.Quality.PoorOther == 0 || o.DetailGrowth <= o.Growth {
		return m, err
	}
	// Lines that cross within a few tolerances can defeat steep grading: grade as gently from them as from the points.
	o.DetailGrowth = o.Growth
	return o.build(ctx, d)
}

// build meshes a domain that is sound with options that are resolved.
func (o Options) build(ctx context.Context, d Domain) (*Mesh, error) {
	r, g, err := prepare(ctx, d, o)
	if err != nil {
		return nil, err
	}
	fields, expected := r.makeFields(d, o)
	r.maxNodes = o.MaxNodes
	if r.maxNodes == 0 {
		r.maxNodes = int(min(budgetFactor*expected+budgetExtra, max(budgetWanted*float64(o.Nodes), budgetLeast)))
	}
	if err := r.fill(ctx, fields, expected, o.Growth); err != nil {
		return nil, err
	}
	m := r.finish(d, o, g)
	if m.Quality.BudgetHit {
		m.Notes = append(m.Notes, r.budgetNote())
	}
	return m, nil
}

// fill makes the mesh of the coarsest field and halves it until it has the sizes of the first field, which grow by growth.
func (r *refiner) fill(ctx context.Context, fields []*sizeField, expected, growth float64) error {
	level := len(fields) - 1
	r.start(fields[level], expected/math.Pow(levelNodes, float64(level)), level)
	if err := r.run(ctx); err != nil {
		return err
	}
	r.reorder()
	passes := smoothPasses
	if level > 0 && r.coarser*growth < steepForOnce {
		passes = 1
	}
	for ; level > 0; level-- {
		if err := r.smooth(ctx, coarsePasses); err != nil {
			return err
		}
		r.coarser /= 2
		if !r.halve(fields[level-1]) {
			if err := r.refineTo(ctx, fields[0]); err != nil {
				return err
			}
			r.reorder()
			passes = smoothPasses
			break
		}
	}
	if err := r.smooth(ctx, passes); err != nil {
		return err
	}
	r.queueSegments()
	r.queueTriangles()
	return r.run(ctx)
}

// EstimateNodes is about the number of nodes that Build will make: the integral of the size field after the segments have been
// cut for nearness, without refining triangles. It is 0 for a domain that Build refuses.
func EstimateNodes(d Domain, o Options) float64 {
	if len(checkAll(d, o)) > 0 {
		return 0
	}
	o = o.resolved(d)
	r, _, err := prepare(context.Background(), d, o)
	if err != nil {
		return 0
	}
	_, expected := r.makeFields(d, o)
	return expected
}

// prepare makes the planar graph, carves the domain and cuts the segments so that none is encroached.
func prepare(ctx context.Context, d Domain, o Options) (*refiner, *planar, error) {
	g, err := newPlanar(ctx, d, o.Tolerance)
	if err != nil {
		return nil, nil, err
	}
	c := g.carve()
	for i, v := range c.point {
		if v < 0 {
			p := d.Points[i]
			return nil, nil, &DomainError{[]Problem{{PointOutside, []string{pointName(p)}, p.At,
				fmt.Sprintf("%s lies where the outline is narrower than the tolerance of %.3g m", pointName(p), o.Tolerance)}}}
		}
	}
	if len(c.t) == 0 {
		return nil, nil, &DomainError{[]Problem{{ZeroArea, []string{"outline"}, d.Outer[0],
			fmt.Sprintf("the outline is nowhere wider than the tolerance of %.3g m", o.Tolerance)}}}
	}
	if err := c.setMetrics(o); err != nil {
		return nil, nil, err
	}
	c.sizeBases(d)
	c.markSharp()
	limit := o.MaxNodes
	if limit == 0 {
		limit = budgetFactor*max(o.Nodes, len(c.p)) + budgetExtra
	}
	r := newRefiner(c, min(o.MinAngleDeg+extraAngleDeg, largestAngleDeg), o.Tolerance, limit)
	r.queueSegments()
	return r, g, r.relax(ctx, max(limit/gapShare, gapGrowth*len(c.p)))
}

// setMetrics asks for the tensor of every region and makes the regions Delaunay in their own metrics.
func (c *carved) setMetrics(o Options) error {
	n := c.numberRegions()
	if o.Metric == nil {
		return nil
	}
	metrics := make([]metric, n)
	places := c.regionPlaces(n)
	var problems []Problem
	plain := true
	for i := range metrics {
		m, ok := metricOf(o.Metric(places[i]))
		if !ok {
			problems = append(problems, Problem{BadOption, []string{"Metric"}, places[i],
				fmt.Sprintf("the transmissivity tensor at (%.10g, %.10g) is not finite and positive", places[i][0], places[i][1])})
		}
		metrics[i] = m
		plain = plain && m.plain
	}
	if len(problems) > 0 {
		return &DomainError{problems}
	}
	if plain {
		return nil
	}
	c.metrics = metrics
	for t := range c.t {
		c.flips = append(c.flips, 4*int32(t), 4*int32(t)+1, 4*int32(t)+2)
	}
	c.legalise(nil)
	return nil
}

// sizeBases gives each segment the smallest size that its lines ask for.
func (c *carved) sizeBases(d Domain) {
	for i := range c.bases {
		for _, o := range c.sets[c.bases[i].set] {
			if l := int(o.owner) - c.rings; l >= 0 && d.Lines[l].Size > 0 {
				c.bases[i].size = min(c.bases[i].size, d.Lines[l].Size)
			}
		}
	}
}

// makeFields makes the size fields, each but the first twice as coarse as the one before, and finds the coarsest size and the
// number of nodes to expect.
func (r *refiner) makeFields(d Domain, o Options) ([]*sizeField, float64) {
	x0, y0, x1, y1 := bounds(r.p)
	requests := r.requests(d.Points, o.Growth, o.DetailGrowth)
	for _, z := range o.Sizes {
		g := z.Growth
		if g == 0 {
			g = o.Growth
		}
		requests = append(requests, request{z.At[0], z.At[1], z.Edge, math.Inf(1), g})
	}
	limit := math.Inf(1)
	if o.Coarsest > 0 {
		limit = o.Coarsest
	}
	f := newSizeField(sources(requests, o.Tolerance, 1, 0), limit, x0, y0, x1, y1)
	in := r.integrate(f)
	if !(o.Coarsest > 0) {
		f.coarsest = in.coarsestFor(float64(o.Nodes))
	}
	fields, expected := []*sizeField{f}, in.nodes(f.coarsest)
	for coarser := 2.0; coarser <= largestCoarser && r.worthHalving(expected, coarser, o.Growth); coarser *= 2 {
		coarse := sources(requests, o.Tolerance, coarser, steepestCoarse)
		fields = append(fields, newSizeField(coarse, coarser*f.coarsest, x0, y0, x1, y1))
	}
	return fields, expected
}

// worthHalving says whether a mesh so many times coarser is to be made first and halved: not where it would hardly have more nodes
// than the input has vertices.
func (r *refiner) worthHalving(expected, coarser, growth float64) bool {
	return expected > coarser*coarser*max(leastCoarse, float64(len(r.p))) && coarser*growth <= steepestCoarse
}

// start enters the second stage: sizes at all vertices, segments cut to size, rings around points, all triangles queued.
func (r *refiner) start(f *sizeField, expected float64, level int) {
	r.coarser = math.Pow(2, float64(level))
	r.reserve(expected)
	r.budgetHit = false // the first stage's own limit; what it left undone is taken up now
	r.setSizes(f)
	r.ringPoints()
	r.queueSegments()
	r.queueTriangles()
}

// setSizes goes over to a size field.
func (r *refiner) setSizes(f *sizeField) {
	r.field = f
	for i := range r.p {
		r.p[i].h = f.at(r.p[i].x, r.p[i].y)
	}
}

// refineTo refines to the final size field without halving.
func (r *refiner) refineTo(ctx context.Context, f *sizeField) error {
	r.coarser = 1
	r.setSizes(f)
	r.queueSegments()
	r.queueTriangles()
	return r.run(ctx)
}

// reserveShare is how much more than the nodes expected is reserved; meshes come out within a few per cent.
const reserveShare = 1.15

// reserve makes room for the nodes expected and their triangles, so that nothing is copied while the mesh grows.
func (r *refiner) reserve(expected float64) {
	n := int(min(reserveShare*expected, float64(r.maxNodes))) + 100
	r.p = slices.Grow(r.p, max(0, n-len(r.p)))
	r.t = slices.Grow(r.t, max(0, 2*n-len(r.t)))
	r.mark = slices.Grow(r.mark, max(0, 2*n-len(r.mark)))
}

// budgetNote tells where the mesh wants to be finest.
func (r *refiner) budgetNote() Note {
	finest := 0
	for i := range r.p {
		if r.p[i].h < r.p[finest].h {
			finest = i
		}
	}
	p := orb.Point{r.p[finest].x, r.p[finest].y}
	return Note{fmt.Sprintf("the budget of %d nodes was hit: the mesh is not finished; the smallest size wanted is %.3g m, at %s"+
		" (lines close to each other are drawn together by a larger tolerance)", r.maxNodes, r.p[finest].h, place(p)), p}
}
