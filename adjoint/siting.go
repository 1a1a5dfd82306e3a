package adjoint

import (
	"context"
	"math"
	"sort"

	"springbound/aquifer"
)

// SitingLimit is a limit on one row as a further well meets it.
type SitingLimit struct {
	Row        int     // of the field
	Side       float64 // +1: a growing change uses the limit up; -1: a falling one does
	Room       float64 // what is left of it [row's unit]
	Price      float64 // change of the aim per unit of further change [aim per row's unit]
	ByPlace    bool    // of a worst place: elsewhere in its area the room is larger by as much as the drawdown is smaller there
	Negligible float64 // a use per rate not above this counts as none [row's unit per m³/d]
}

// Siting is what one unit rate pumped at each node would take from the limits, at the rates of a state. Everywhere nodes count, also those
// where no well may stand.
type Siting struct {
	Use   []float64 // largest share of what is left of any one limit, per rate; +Inf where nothing is left of it [d/m³]
	First []int     // the limit that gives Use; -1: none is touched
	Cost  []float64 // sum over the limits used of price x use: what the plan would lose elsewhere per rate [aim per m³/d]

	// Relief is the same sum over the limits that pumping at the node would ease, such as a gradient that it steepens: what the plan would gain
	// elsewhere. It grows without end beside a receptor's point and soon meets other limits.
	Relief []float64 // [aim per m³/d]
}

// LargestRate is the largest rate at a node that keeps every limit while the other rates stay; +Inf where no limit is touched [m³/d].
func (s *Siting) LargestRate(node int32) float64 { return 1 / s.Use[node] }

// mostPlaces bounds at how many nodes of an area with a worst place its limits are looked at, one solve a node: influence is smooth, so that
// every so many-th node of a finer mesh tells as much.
const mostPlaces = 400

// Siting makes the adjoint solves of all rows in a state and reduces the influence fields, one after the other, to what a further well
// anywhere would meet: by reciprocity the influence of a row at x is its change per unit rate pumped at x. Fields are not
// kept, and nothing is factored. A limit on the worst place of an area is kept at each of its nodes, mostPlaces of them at most; its cost is that at
// the worst place now. Where features switch, the result holds near the state's rates.
func (f *Field) Siting(ctx context.Context, state *State, limits []SitingLimit, progress func(done, total int)) (*Siting, error) {
	n := len(f.Model.Mesh.X)
	s := &Siting{Use: make([]float64, n), First: make([]int, n), Cost: make([]float64, n), Relief: make([]float64, n)}
	for i := range s.First {
		s.First[i] = -1
	}
	onField := func(row int, z []float64) error {
		for k := range limits {
			l := &limits[k]
			if l.Row != row {
				continue
			}
			s.charge(l, z)
			if !f.worstPlace(row) || l.Side < 0 {
				s.touch(k, l, z)
			}
		}
		return nil
	}
	lin, err := f.Sensitivities(ctx, state, Options{Field: onField, Progress: progress})
	if err != nil {
		return nil, err
	}
	for k := range limits {
		if row := limits[k].Row; f.worstPlace(row) && limits[k].Side > 0 {
			if err := f.sitePlaces(ctx, s, k, &limits[k], state, lin.Rows[row].Place); err != nil {
				return nil, err
			}
		}
	}
	return s, nil
}

func (f *Field) worstPlace(row int) bool { return f.watched[row].worst != nil }

// sitePlaces adds a limit on the worst place of an area at the area's nodes.
func (f *Field) sitePlaces(ctx context.Context, s *Siting, k int, l *SitingLimit, state *State, worst int32) error {
	all, drawdown := f.watched[l.Row].worst, state.drawdown()
	places := []int32{worst}
	for i := 0; i < len(all); i += 1 + len(all)/mostPlaces {
		places = append(places, all[i])
	}
	fs := make([]Functional, len(places))
	for i, n := range places {
		fs[i] = Functional{Name: "place of an area", Quantity: f.Model.HeadAt(n)}
	}
	_, err := Solve(ctx, f.Model, state.State, fs, nil, func(i int, z []float64) error {
		at := *l
		if l.ByPlace {
			at.Room += math.Max(0, drawdown[worst]-drawdown[places[i]])
		}
		s.touch(k, &at, z)
		return nil
	}, nil)
	return err
}

// charge adds what a limit costs or gains.
func (s *Siting) charge(l *SitingLimit, z []float64) {
	for i, v := range z {
		switch use := l.Side * v; {
		case use > 0:
			s.Cost[i] += l.Price * use
		case use < 0:
			s.Relief[i] -= l.Price * use
		}
	}
}

// touch adds the share of what is left of a limit that a unit rate takes.
func (s *Siting) touch(k int, l *SitingLimit, z []float64) {
	for i, v := range z {
		use := l.Side * v
		if !(use > l.Negligible) {
			continue
		}
		if share := use / l.Room; s.First[i] < 0 || share > s.Use[i] { // +Inf where no room is left
			s.Use[i], s.First[i] = share, k
		}
	}
}

// RowOf returns the row about a receptor, or about a well's own level where the receptor is -1; -1: none.
func (f *Field) RowOf(receptor, well int) int {
	for i, x := range f.watched {
		if x.receptor == receptor && (receptor >= 0 || x.well == well) {
			return i
		}
	}
	return -1
}

// OpenNodes tells at which nodes a further well may stand: not where the head is prescribed, on the outline, on a river or a lake, at a
// spring, a well or a receptor's point.
func (f *Field) OpenNodes() []bool {
	m := f.Model
	open := make([]bool, len(m.Mesh.X))
	for i := range open {
		open[i] = m.Unknown(int32(i)) >= 0
	}
	for _, e := range m.Mesh.OutlineEdges {
		open[e.A], open[e.B] = false, false
	}
	for _, e := range m.Exchanges {
		if e.Kind == aquifer.LeakageFeature {
			continue
		}
		for _, n := range e.Nodes {
			open[n] = false
		}
	}
	for _, list := range [][]int32{m.SpringNode, m.RequestNode} {
		for _, n := range list {
			open[n] = false
		}
	}
	return open
}

// Pick lists up to count open nodes with the largest scores, each at least spacing [m] from those before it. Equal scores go to the
// lower node number; scores that are not numbers are left out.
func (f *Field) Pick(open []bool, score []float64, spacing float64, count int) []int32 {
	var order, out []int32
	for i, ok := range open {
		if ok && !math.IsNaN(score[i]) {
			order = append(order, int32(i))
		}
	}
	sort.SliceStable(order, func(a, b int) bool { return score[order[a]] > score[order[b]] })
	for _, n := range order {
		if len(out) >= count {
			break
		}
		free := true
		for _, o := range out {
			if distance(f.Model.At(n), f.Model.At(o)) < spacing {
				free = false
				break
			}
		}
		if free {
			out = append(out, n)
		}
	}
	return out
}

// OwnDrawdowns returns the drawdown that a well of the given radius would cause in its own bore per unit rate at each of the nodes, in a
// state, one solve a node: node drawdown + ln(r0/rw)/(angle T*), with r0 of the mesh as it is. The mesh was not refined for
// a well there, so the figure is approximate [d/m²].
func (f *Field) OwnDrawdowns(ctx context.Context, state *State, nodes []int32, bore float64) ([]float64, error) {
	fs := make([]Functional, len(nodes))
	for i, n := range nodes {
		fs[i] = Functional{Name: "a further well's own level", Quantity: f.Model.HeadAt(n)}
	}
	if len(fs) == 0 {
		return nil, nil
	}
	solved, err := Solve(ctx, f.Model, state.State, fs, nodes, nil, nil)
	if err != nil {
		return nil, err
	}
	out := make([]float64, len(nodes))
	for i, n := range nodes {
		r, err := f.Model.EquivalentRadius(ctx, n)
		if err != nil {
			return nil, err
		}
		out[i] = solved.At[i][i] + r.Below(bore)
	}
	return out, nil
}
