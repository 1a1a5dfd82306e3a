package mesh

import (
	"context"
	"fmt"
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
	field, expected := r.makeField(d, o)
	r.maxNodes = o.MaxNodes
	if r.maxNodes == 0 {
		r.maxNodes = int(min(budgetFactor*expected+budgetExtra, max(budgetWanted*float64(o.Nodes), budgetLeast)))
	}
	r.start(field, expected)
	if err := r.run(ctx); err != nil {
		return nil, err
	}
	r.reorder()
	if err := r.smooth(ctx, smoothPasses); err != nil {
		return nil, err
	}
	r.queueSegments()
	r.queueTriangles()
	if err := r.run(ctx); err != nil {
		return nil, err
	}
	m := r.finish(d, o, g)
	if m.Quality.BudgetHit {
		m.Notes = append(m.Notes, r.budgetNote())
	}
	return m, nil
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
	_, expected := r.makeField(d, o)
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

// makeField makes the size field, finds its coarsest size and the number of nodes to expect.
func (r *refiner) makeField(d Domain, o Options) (*sizeField, float64) {
	x0, y0, x1, y1 := bounds(r.p)
	f := newSizeField(r.sources(d.Points, o.Tolerance, o.Growth, o.DetailGrowth), x0, y0, x1, y1)
	f.coarsest = o.Coarsest
	in := r.integrate(f)
	if !(o.Coarsest > 0) {
		f.coarsest = in.coarsestFor(float64(o.Nodes))
	}
	return f, in.nodes(f.coarsest)
}

// start enters the second stage: sizes at all vertices, segments cut to size, rings around points, all triangles queued.
func (r *refiner) start(f *sizeField, expected float64) {
	r.field = f
	r.budgetHit = false // the first stage's own limit; what it left undone is taken up now
	for i := range r.p {
		r.p[i].h = f.at(r.p[i].x, r.p[i].y)
	}
	r.reserve(expected)
	r.ringPoints()
	r.queueSegments()
	r.queueTriangles()
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
