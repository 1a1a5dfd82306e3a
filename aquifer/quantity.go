package aquifer

import (
	"fmt"
	"math"
	"sort"

	"github.com/paulmach/orb"
)

// Quantity is a linear functional of the heads: Constant + sum of Weights x head over Nodes.
type Quantity struct {
	Nodes    []int32 // ascending, each once
	Weights  []float64
	Constant float64
}

// Value evaluates the quantity, in a fixed order.
func (q Quantity) Value(h []float64) float64 {
	v := q.Constant
	for i, n := range q.Nodes {
		v += q.Weights[i] * h[n]
	}
	return v
}

// gather adds weights by node.
type gather map[int32]float64

func (g gather) quantity(constant float64) Quantity {
	q := Quantity{Constant: constant}
	for n := range g {
		q.Nodes = append(q.Nodes, n)
	}
	sort.Slice(q.Nodes, func(i, j int) bool { return q.Nodes[i] < q.Nodes[j] })
	for _, n := range q.Nodes {
		q.Weights = append(q.Weights, g[n])
	}
	return q
}

// HeadAt is the head at a node [m].
func (m *Model) HeadAt(node int32) Quantity {
	return Quantity{Nodes: []int32{node}, Weights: []float64{1}}
}

// MeanHead is the mean head beneath a polygon that Site.Outlines asked for [m]; it fails where no part of it is inside the extent.
func (m *Model) MeanHead(area int) (Quantity, error) {
	g := gather{}
	total := 0.0
	m.eachCornerIn(area, func(node int32, part float64) {
		g[node] += part
		total += part
	})
	if !(total > 0) {
		return Quantity{}, fmt.Errorf("%s: no part of it lies inside the extent", m.Site.Outlines[area].Name)
	}
	q := g.quantity(0)
	for i := range q.Weights {
		q.Weights[i] /= total
	}
	return q, nil
}

// NodesIn lists the nodes of a polygon that Site.Outlines asked for, its border included, ascending.
func (m *Model) NodesIn(area int) []int32 {
	g := gather{}
	m.eachCornerIn(area, func(node int32, part float64) { g[node] += part })
	return g.quantity(0).Nodes
}

func (m *Model) eachCornerIn(area int, visit func(node int32, part float64)) {
	inside := make([]bool, len(m.regions))
	for i, r := range m.regions {
		for _, a := range r.areas {
			inside[i] = inside[i] || a == area
		}
	}
	for t, r := range m.Mesh.Region {
		if inside[r] {
			for k := 0; k < 3; k++ {
				visit(m.Mesh.Triangles[3*t+k], m.area[3*t+k])
			}
		}
	}
}

// Outflow is the flow out of the aquifer through an exchange feature [m³/d].
func (e *Exchange) Outflow() Quantity {
	g := gather{}
	constant := 0.0
	for k, n := range e.Nodes {
		g[n] += e.Conductance[k]
		constant -= e.Conductance[k] * e.Level[k]
	}
	return g.quantity(constant)
}

// EdgeOutflow is the flow out of the aquifer through a prescribed-head edge [m³/d]: minus the residual of its nodes' rows.
func (m *Model) EdgeOutflow(e *HeadEdge) Quantity {
	g := gather{}
	constant := 0.0
	for _, c := range e.corner {
		t, k := int(c.triangle), int(c.k)
		n := m.Mesh.Triangles[3*t+k]
		for _, side := range [2]int{(k + 1) % 3, (k + 2) % 3} {
			o := m.Mesh.Triangles[3*t+side]
			w := c.share * m.conductance[3*t+3-k-side]
			g[n] -= w
			g[o] += w
		}
		constant += c.share * m.area[3*t+k] * m.regions[m.Mesh.Region[t]].recharge
	}
	at := make(map[int32]int, len(e.Nodes))
	for i, n := range e.Nodes {
		at[n] = i
	}
	for j := range m.Exchanges {
		x := &m.Exchanges[j]
		for k, n := range x.Nodes {
			if i, ok := at[n]; ok {
				constant += e.own[i] * x.flow(k, m.prescribed[n])
			}
		}
	}
	for _, f := range m.Inflows {
		if f.Kind == RechargeFeature {
			continue
		}
		for k, n := range f.Nodes {
			if i, ok := at[n]; ok {
				constant += e.own[i] * f.Flow[k]
			}
		}
	}
	return g.quantity(constant)
}

// alongRiver is how far a reach may lie from its river, as a share of the extent's diagonal: the tolerance of alongOutline.
const alongRiver = alongOutline

// ReachOutflow is the flow from the aquifer to a river along the stretch between the ends of reach; nil is the whole river [m³/d]. A mesh
// edge that is only partly in the reach counts by the linear weights of its part.
func (m *Model) ReachOutflow(river int, reach orb.LineString) (Quantity, error) {
	r := &m.Site.Rivers[river]
	cum := arcs(r.Path)
	from, to := 0.0, cum[len(cum)-1]
	if len(reach) > 0 {
		b := m.Site.Extent.Bound()
		allowed := alongRiver * distance(b.Min, b.Max)
		var at [2]float64
		for i, p := range [2]orb.Point{reach[0], reach[len(reach)-1]} {
			best := math.Inf(1)
			for k := 0; k+1 < len(r.Path); k++ {
				if f, d := onSegment(p, r.Path[k], r.Path[k+1]); d < best {
					best, at[i] = d, cum[k]+f*(cum[k+1]-cum[k])
				}
			}
			if !(best <= allowed) {
				return Quantity{}, fmt.Errorf("the reach ends %.3g m off river %s; at most %.3g m is allowed: draw it along the river", best, r.Name, allowed)
			}
		}
		from, to = math.Min(at[0], at[1]), math.Max(at[0], at[1])
	}
	g := gather{}
	constant := 0.0
	for _, p := range m.RiverPieces[river] {
		length := p.ArcB - p.ArcA
		u0, u1 := 0.0, 1.0
		if length != 0 {
			u0 = math.Max(0, math.Min(1, (from-p.ArcA)/length))
			u1 = math.Max(0, math.Min(1, (to-p.ArcA)/length))
		}
		if u0 > u1 {
			u0, u1 = u1, u0
		}
		wb := p.Conductance * (u1*u1 - u0*u0) / 2
		wa := p.Conductance*(u1-u0) - wb
		if wa > 0 {
			g[p.A] += wa
			constant -= wa * p.LevelA
		}
		if wb > 0 {
			g[p.B] += wb
			constant -= wb * p.LevelB
		}
	}
	if len(g) == 0 {
		return Quantity{}, fmt.Errorf("the reach covers no part of river %s inside the extent", r.Name)
	}
	return g.quantity(constant), nil
}

// Outlet is one way that water leaves or enters by: its outflow as a quantity.
type Outlet struct {
	Name    string
	Kind    FeatureKind
	Index   int
	Outflow Quantity
}

// Outlets lists every feature whose flow answers to heads: prescribed-head edges, then exchanges. For each well the changes of
// their flows sum to its rate.
func (m *Model) Outlets() []Outlet {
	var out []Outlet
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		out = append(out, Outlet{e.Name, EdgeFeature, e.Index, m.EdgeOutflow(e)})
	}
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		out = append(out, Outlet{e.Name, e.Kind, e.Index, e.Outflow()})
	}
	return out
}
