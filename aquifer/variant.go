package aquifer

import (
	"context"
	"fmt"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

// Bisected is the model of the same site on its mesh with every triangle cut into four, times over: what a refinement study asks for. The
// options are those that the model was built with.
func (m *Model) Bisected(ctx context.Context, o Options, times int) (*Model, error) {
	msh := m.Mesh
	for range times {
		msh = msh.Bisect()
	}
	return m.again(ctx, m.Site, msh, o)
}

// OnlySource says that nothing but one feature fixes the head in a part of the aquifer: it cannot be taken away.
type OnlySource struct {
	Feature string
	At      [2]float64 // a place in that part [m]
}

func (e *OnlySource) Error() string {
	return fmt.Sprintf("%s is the only thing that fixes the head in the part around (%.1f, %.1f)", e.Feature, e.At[0], e.At[1])
}

// Without is the model on the same mesh with one feature taken away: an edge lets nothing through, a river or a lake gives and takes nothing.
// Springs keep the conductances that they have. Errors: *OnlySource. It panics for other kinds of feature.
func (m *Model) Without(ctx context.Context, o Options, kind FeatureKind, index int) (*Model, error) {
	site := *m.Site
	name := ""
	switch kind {
	case EdgeFeature:
		site.Edges = append([]Edge(nil), site.Edges...)
		e := &site.Edges[index]
		name = "edge " + e.Name
		e.Kind, e.Flux, e.AvailableFlow = PrescribedFlux, 0, nil
	case RiverFeature:
		site.Rivers = append([]River(nil), site.Rivers...)
		r := &site.Rivers[index]
		name = "river " + r.Name
		r.BedResistance.Best, r.AvailableFlow = sealed, nil
	case LakeFeature:
		site.Lakes = append([]Lake(nil), site.Lakes...)
		l := &site.Lakes[index]
		name = "lake " + l.Name
		l.BedResistance.Best, l.AvailableFlow = sealed, nil
	default:
		panic("aquifer: Without: only edges, rivers and lakes can be taken away")
	}
	if at, only := m.onlySource(kind, index); only {
		return nil, &OnlySource{Feature: name, At: at}
	}
	site.Springs = append([]Spring(nil), site.Springs...)
	for i := range site.Springs {
		site.Springs[i].Conductance, site.Springs[i].MeasuredFlow = &Parameter{Best: m.SpringC[i]}, nil
	}
	return m.again(ctx, &site, m.Mesh, o)
}

// sealed is a bed resistance beside which any exchange vanishes in rounding [d].
const sealed = 1e40

// again assembles and factors a site of the same lines and points on a mesh of it.
func (m *Model) again(ctx context.Context, site *Site, msh *mesh.Mesh, o Options) (*Model, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	o.Finest = m.FinestSize // sizes are settled: none is looked for again
	bad := &problems{}
	d := site.plan(o, bad)
	if err := bad.err(); err != nil {
		return nil, err
	}
	out, err := assembleOn(site, d, msh, bad)
	if err != nil {
		return nil, err
	}
	return out, out.finish(ctx, o)
}

// onlySource tells whether some part of the domain has no prescribed head and no exchange but those of one feature, and where.
func (m *Model) onlySource(kind FeatureKind, index int) (at orb.Point, only bool) {
	fixed := make([]bool, m.Mesh.Parts)
	part := func(n int32) int { return m.Mesh.Regions[m.Mesh.Region[m.Mesh.NodeTriangles(n)[0]]].Part }
	for _, e := range m.HeadEdges {
		if kind == EdgeFeature && e.Index == index {
			continue
		}
		for _, n := range e.Nodes {
			fixed[part(n)] = true
		}
	}
	for _, e := range m.Exchanges {
		if e.Kind == kind && e.Index == index {
			continue
		}
		for _, n := range e.Nodes {
			fixed[part(n)] = true
		}
	}
	for _, r := range m.Mesh.Regions {
		if !fixed[r.Part] {
			return r.At, true
		}
	}
	return orb.Point{}, false
}
