package adjoint

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"

	"springbound/aquifer"
	"springbound/wells"
)

// Requests lists the places and polygons that the mesh must follow for these wells and receptors: first one node a well, then the
// receptors' points. NewField expects a model that was built with exactly these.
func Requests(ws []wells.Well, rs []wells.Receptor) ([]aquifer.NodeRequest, []aquifer.AreaRequest) {
	var nodes []aquifer.NodeRequest
	var areas []aquifer.AreaRequest
	for _, w := range ws {
		r := aquifer.NodeRequest{Name: "well " + w.ID, At: w.At, Radius: w.Radius, Well: true}
		if w.Present != nil {
			r.PresentRate = *w.Present
		}
		nodes = append(nodes, r)
	}
	for _, r := range rs {
		if r.Outside {
			continue
		}
		switch r.Kind {
		case wells.PointLevel, wells.NeighbourWell:
			nodes = append(nodes, aquifer.NodeRequest{Name: "receptor " + r.ID, At: r.At})
		case wells.SalineFront:
			nodes = append(nodes, aquifer.NodeRequest{Name: "receptor " + r.ID, At: r.At}, aquifer.NodeRequest{Name: "receptor " + r.ID + " (second point)", At: r.To})
		case wells.Wetland, wells.WetlandWorst:
			areas = append(areas, aquifer.AreaRequest{Name: "receptor " + r.ID, Area: r.Area})
		}
	}
	return nodes, areas
}

// watched is a receptor with what is needed to evaluate it.
type watched struct {
	receptor   int
	well       int // a well's own level; -1 a receptor
	functional Functional
	worst      []int32 // nodes to search for the worst place; nil: the functional is fixed
	river      int     // 1 + river whose flow takes another form where it loses contact; 0 none
	reach      orb.LineString
	headEdge   int  // 1 + prescribed-head edge whose flow it is; 0 none
	local      bool // the change is not convex in the rates where features switch
}

// Field joins a model with the wells and receptors that it is watched for.
type Field struct {
	Model     *aquifer.Model
	Wells     []wells.Well
	Receptors []wells.Receptor

	node    []int32   // per well
	below   []float64 // per well: drawdown of the casing below the node per rate [d/m²]
	watched []watched
	outlets []aquifer.Outlet
	base    *aquifer.Settled

	// Switching says that some feature switches at the rates of interest: no row is linear then. It is set by whoever sees a state with
	// something off, before rows are asked for.
	Switching bool

	// Alter, where set, changes a row's slopes after its adjoint solve, to prove that the audit sees it; tests only.
	Alter func(row int, slope []float64)

	placeSlope map[int32][]float64 // slopes of worst places solved before
}

// NewField places wells and receptors in a model built with their Requests. Errors name each receptor that cannot be watched.
func NewField(m *aquifer.Model, ws []wells.Well, rs []wells.Receptor) (*Field, error) {
	f := &Field{Model: m, Wells: ws, Receptors: rs, outlets: m.Outlets()}
	for i, w := range ws {
		f.node = append(f.node, m.RequestNode[i])
		f.below = append(f.below, m.Radii[i].Below(w.Radius))
	}
	bad := &aquifer.SiteError{}
	next, area := len(ws), 0
	for i, r := range rs {
		if r.Outside {
			continue
		}
		x := watched{receptor: i, well: -1, functional: Functional{Name: r.ID}}
		var err error
		switch r.Kind {
		case wells.PointLevel, wells.NeighbourWell:
			x.functional.Quantity = m.HeadAt(m.RequestNode[next])
			x.functional.Direct = f.casing(m.RequestNode[next])
			next++
		case wells.SalineFront:
			x.functional.Quantity, err = f.gradient(r, m.RequestNode[next], m.RequestNode[next+1])
			x.local = true
			next += 2
		case wells.Wetland:
			x.functional.Quantity, err = m.MeanHead(area)
			area++
		case wells.WetlandWorst:
			x.worst = m.NodesIn(area)
			if len(x.worst) == 0 {
				err = fmt.Errorf("no part of it lies inside the extent")
			}
			area++
		case wells.PumpingLevel:
			err = f.pumpingLevel(&x, r)
		default:
			err = f.flow(&x, r)
		}
		if err != nil {
			bad.Problems = append(bad.Problems, aquifer.Problem{Feature: "receptor " + r.ID, Text: err.Error(), At: r.At})
			continue
		}
		f.watched = append(f.watched, x)
	}
	if len(bad.Problems) > 0 {
		return nil, bad
	}
	for i, w := range ws {
		if w.LowestLevel != nil || w.Intake != nil {
			f.watched = append(f.watched, watched{receptor: -1, well: i, functional: f.boreLevel(i)})
		}
	}
	return f, nil
}

// casing gives the direct terms of a level read in the bore of a well: where a receptor stands on a pumped well's node it is
// evaluated at the casing.
func (f *Field) casing(node int32) []float64 {
	for w, n := range f.node {
		if n == node {
			d := make([]float64, len(f.node))
			d[w] = -f.below[w]
			return d
		}
	}
	return nil
}

// boreLevel is the level in a well's bore with its linear loss, without the quadratic one.
func (f *Field) boreLevel(w int) Functional {
	d := make([]float64, len(f.node))
	d[w] = -f.below[w] - f.Wells[w].LinearLossSlope()
	return Functional{Name: f.Wells[w].ID, Quantity: f.Model.HeadAt(f.node[w]), Direct: d}
}

func (f *Field) pumpingLevel(x *watched, r wells.Receptor) error {
	for w := range f.Wells {
		if f.Wells[w].ID == r.Feature {
			x.functional = f.boreLevel(w)
			x.functional.Name = r.ID
			return nil
		}
	}
	return fmt.Errorf("feature %q is not the id of a well", r.Feature)
}

func (f *Field) gradient(r wells.Receptor, a, b int32) (aquifer.Quantity, error) {
	pa, pb := f.Model.At(a), f.Model.At(b)
	d := distance(pa, pb)
	if !(d > 0) {
		return aquifer.Quantity{}, fmt.Errorf("its two points are at the same place")
	}
	q := aquifer.Quantity{Nodes: []int32{a, b}, Weights: []float64{1 / d, -1 / d}}
	if a > b {
		q = aquifer.Quantity{Nodes: []int32{b, a}, Weights: []float64{-1 / d, 1 / d}}
	}
	return q, nil
}

func (f *Field) flow(x *watched, r wells.Receptor) error {
	kind := map[wells.Kind]aquifer.FeatureKind{wells.SpringFlow: aquifer.SpringFeature, wells.RiverReach: aquifer.RiverFeature, wells.EdgeFlow: aquifer.EdgeFeature}[r.Kind]
	for i, o := range f.outlets {
		if o.Kind != kind || o.Name != r.Feature {
			continue
		}
		if i < len(f.Model.HeadEdges) {
			x.headEdge = i + 1
		}
		if r.Kind == wells.RiverReach {
			x.river, x.reach, x.local = o.Index+1, r.Reach, true
		}
		if r.Kind == wells.RiverReach && len(r.Reach) > 0 {
			q, err := f.Model.ReachOutflow(o.Index, r.Reach)
			x.functional.Quantity = q
			return err
		}
		x.functional.Quantity = o.Outflow
		return nil
	}
	return fmt.Errorf("feature %q is not the name of a %s whose flow answers to heads", r.Feature, kind)
}

func distance(a, b orb.Point) float64 { return math.Hypot(a[0]-b[0], a[1]-b[1]) }

// Receptor returns the receptor that a row is about; false for a well's own level.
func (f *Field) Receptor(row int) (wells.Receptor, bool) {
	if i := f.watched[row].receptor; i >= 0 {
		return f.Receptors[i], true
	}
	return wells.Receptor{}, false
}

// FixedFunctionals returns the functionals of the rows that are fixed, in order: what Solve takes.
func (f *Field) FixedFunctionals() []Functional {
	var out []Functional
	for _, x := range f.watched {
		if x.worst == nil {
			out = append(out, x.functional)
		}
	}
	return out
}
