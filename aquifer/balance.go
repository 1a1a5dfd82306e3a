package aquifer

import "math"

// Flow is what goes through a feature: into the aquifer (In >= 0), out of it (Out >= 0).
type Flow struct {
	Feature string
	Kind    FeatureKind
	Index   int
	In      float64 // [m³/d]
	Out     float64 // [m³/d]
}

// Net is the flow into the aquifer, less the flow out [m³/d].
func (f Flow) Net() float64 { return f.In - f.Out }

func (f *Flow) add(q float64) {
	if q >= 0 {
		f.In += q
	} else {
		f.Out -= q
	}
}

// Balance is the water balance of a state by every feature and well.
type Balance struct {
	Features []Flow
	Wells    Flow
	In, Out  float64 // [m³/d]
}

// Error is the difference of in and out as a share of the throughflow [-]; 0 where nothing flows.
func (b Balance) Error() float64 {
	through := math.Max(b.In, b.Out)
	if through == 0 {
		return 0
	}
	return (b.In - b.Out) / through
}

// Balance sums up what goes in and out under heads h and the sinks that made them.
func (m *Model) Balance(h []float64, sinks []Sink) Balance {
	var b Balance
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		f := Flow{Feature: e.Name, Kind: EdgeFeature, Index: e.Index}
		for _, q := range m.edgeFlows(e, h) {
			f.add(q)
		}
		b.Features = append(b.Features, f)
	}
	for i := range m.Exchanges {
		e := &m.Exchanges[i]
		f := Flow{Feature: e.Name, Kind: e.Kind, Index: e.Index}
		for k, n := range e.Nodes {
			f.add(e.flow(k, h[n]))
		}
		b.Features = append(b.Features, f)
	}
	for _, e := range m.Inflows {
		f := Flow{Feature: e.Name, Kind: e.Kind, Index: e.Index}
		for _, q := range e.Flow {
			f.add(q)
		}
		b.Features = append(b.Features, f)
	}
	b.Wells = Flow{Feature: "wells"}
	for _, s := range sinks {
		b.Wells.add(-s.Rate)
	}
	for _, f := range append(b.Features, b.Wells) {
		b.In += f.In
		b.Out += f.Out
	}
	return b
}

// shareCorners lists, for each prescribed-head edge, the triangle corners whose flow is its own. Where two edges meet at a node, the
// fan of triangles is split at half the interior angle; what is lumped at the node is split evenly.
func (m *Model) shareCorners() {
	edgesAt := map[int32]int{}
	for i := range m.HeadEdges {
		for _, n := range m.HeadEdges[i].Nodes {
			edgesAt[n]++
		}
	}
	leaving := map[int32]int{} // edge + 1 on the outline edge that leaves the node, domain on its left
	along := map[int32]int32{}
	for i, oe := range m.Mesh.OutlineEdges {
		if edgesAt[oe.A] > 1 {
			leaving[oe.A] = m.outlineEdge[i]
			along[oe.A] = oe.B
		}
	}
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		for _, n := range e.Nodes {
			if edgesAt[n] == 1 {
				e.own = append(e.own, 1)
			} else {
				e.own = append(e.own, 1/float64(edgesAt[n]))
			}
			for _, t := range m.Mesh.NodeTriangles(n) {
				share := 1.0
				if edgesAt[n] > 1 {
					share = m.firstHalf(t, n, along[n])
					if leaving[n] != e.Index+1 {
						share = 1 - share
					}
				}
				if share > 0 {
					e.corner = append(e.corner, cornerShareOf{t, int8(m.corner(t, n)), share})
				}
			}
		}
	}
}

// firstHalf returns which share of triangle t's angle at node n lies in the half of the interior angle next to the outline edge n->along.
func (m *Model) firstHalf(t, n, along int32) float64 {
	start := math.Atan2(m.Mesh.Y[along]-m.Mesh.Y[n], m.Mesh.X[along]-m.Mesh.X[n])
	from := func(o int32) float64 {
		a := math.Atan2(m.Mesh.Y[o]-m.Mesh.Y[n], m.Mesh.X[o]-m.Mesh.X[n]) - start
		return math.Mod(a+4*math.Pi, 2*math.Pi)
	}
	total := 0.0
	for _, u := range m.Mesh.NodeTriangles(n) {
		total += m.planeAngle(u, n)
	}
	width := m.planeAngle(t, n)
	k := m.corner(t, n)
	first := m.Mesh.Triangles[3*t+int32(k+1)%3]
	begin := 0.0
	if first != along {
		begin = from(first)
	}
	return math.Max(0, math.Min(1, (total/2-begin)/width))
}

func (m *Model) planeAngle(t, n int32) float64 {
	k := m.corner(t, n)
	a, b := m.Mesh.Triangles[3*t+int32(k+1)%3], m.Mesh.Triangles[3*t+int32(k+2)%3]
	ax, ay := m.Mesh.X[a]-m.Mesh.X[n], m.Mesh.Y[a]-m.Mesh.Y[n]
	bx, by := m.Mesh.X[b]-m.Mesh.X[n], m.Mesh.Y[b]-m.Mesh.Y[n]
	return math.Atan2(ax*by-ay*bx, ax*bx+ay*by)
}

// edgeFlows returns the flow into the aquifer through each node of a prescribed-head edge [m³/d]: what leaves the node toward its
// neighbours less what recharge and lumped features bring to it.
func (m *Model) edgeFlows(e *HeadEdge, h []float64) []float64 {
	at := make(map[int32]int, len(e.Nodes))
	for i, n := range e.Nodes {
		at[n] = i
	}
	q := make([]float64, len(e.Nodes))
	for _, c := range e.corner {
		t, k := int(c.triangle), int(c.k)
		n := m.Mesh.Triangles[3*t+k]
		i := at[n]
		for _, side := range [2]int{(k + 1) % 3, (k + 2) % 3} {
			o := m.Mesh.Triangles[3*t+side]
			q[i] += c.share * m.conductance[3*t+3-k-side] * (h[n] - h[o])
		}
		q[i] -= c.share * m.area[3*t+k] * m.regions[m.Mesh.Region[t]].recharge
	}
	for j := range m.Exchanges {
		x := &m.Exchanges[j]
		for k, n := range x.Nodes {
			if i, ok := at[n]; ok {
				q[i] -= e.own[i] * x.flow(k, h[n])
			}
		}
	}
	for _, f := range m.Inflows {
		if f.Kind == RechargeFeature {
			continue
		}
		for k, n := range f.Nodes {
			if i, ok := at[n]; ok {
				q[i] -= e.own[i] * f.Flow[k]
			}
		}
	}
	return q
}

// Turned is a stretch of a prescribed-head edge where water flows into the aquifer.
type Turned struct {
	Edge   string
	Index  int
	Saline bool
	Inflow float64 // [m³/d]
	Length float64 // of the outline where it turns inward [m]
	At     [2]float64
}

// InwardFlow locates, for each prescribed-head edge, where flow runs into the aquifer under heads h.
func (m *Model) InwardFlow(h []float64) []Turned {
	var out []Turned
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		t := Turned{Edge: e.Name, Index: e.Index, Saline: m.Site.Edges[e.Index].Saline}
		q := m.edgeFlows(e, h)
		worst := 0.0
		for k, v := range q {
			if v <= 0 {
				continue
			}
			t.Inflow += v
			if k > 0 {
				t.Length += distance(m.At(e.Nodes[k-1]), m.At(e.Nodes[k])) / 2
			}
			if k+1 < len(q) {
				t.Length += distance(m.At(e.Nodes[k]), m.At(e.Nodes[k+1])) / 2
			}
			if v > worst {
				worst = v
				t.At = m.At(e.Nodes[k])
			}
		}
		if t.Inflow > 0 {
			out = append(out, t)
		}
	}
	return out
}

// Switch is a place where a feature would behave otherwise than the linear model says.
type Switch struct {
	Kind   FeatureKind
	Name   string
	At     [2]float64
	Head   float64 // worst head found [m]
	Lowest float64 // head that it must not fall below [m]
}

// Switches lists the features that heads h take past the level where their exchange changes: a spring below its outlet, a river or lake
// below its bed, leakage below the confining layer's base. One entry a feature, its worst place.
func (m *Model) Switches(h []float64) []Switch {
	var out []Switch
	for _, e := range m.Exchanges {
		worst := Switch{Kind: e.Kind, Name: e.Name}
		depth := 0.0
		for k, n := range e.Nodes {
			if d := e.Lowest[k] - h[n]; d > depth {
				depth = d
				worst.At, worst.Head, worst.Lowest = m.At(n), h[n], e.Lowest[k]
			}
		}
		if depth > 0 {
			out = append(out, worst)
		}
	}
	return out
}

// NoFlow is a stretch of the outline where nothing was said.
type NoFlow struct {
	From   [2]float64
	Length float64 // [m]
	Worst  float64 // largest drawdown along it [m]
}

// NoFlowOutline lists the stretches of outline without a condition and the largest drawdown along each.
func (m *Model) NoFlowOutline(drawdown []float64) []NoFlow {
	var out []NoFlow
	ring, open := int32(-1), false
	for i, e := range m.Mesh.OutlineEdges {
		if e.Ring != ring {
			ring, open = e.Ring, false
		}
		if m.outlineEdge[i] != 0 {
			open = false
			continue
		}
		if !open {
			out = append(out, NoFlow{From: m.At(e.A)})
			open = true
		}
		s := &out[len(out)-1]
		s.Length += distance(m.At(e.A), m.At(e.B))
		s.Worst = math.Max(s.Worst, math.Max(drawdown[e.A], drawdown[e.B]))
	}
	return out
}
