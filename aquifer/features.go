package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

// FeatureKind says what kind of thing water goes through.
type FeatureKind string

// The kinds of feature in a balance.
const (
	EdgeFeature     FeatureKind = "edge"
	RiverFeature    FeatureKind = "river"
	LakeFeature     FeatureKind = "lake"
	SpringFeature   FeatureKind = "spring"
	LeakageFeature  FeatureKind = "leakage"
	RechargeFeature FeatureKind = "recharge"
)

// Exchange is a feature whose flow into the aquifer is sum of Conductance x (Level - head) over its nodes.
type Exchange struct {
	Name        string
	Kind        FeatureKind
	Index       int // in the site's list of its kind; zone for leakage, -1 the background
	Nodes       []int32
	Conductance []float64 // [m²/d]
	Level       []float64 // [m]
	Lowest      []float64 // heads below which the exchange would switch; NaN: not stated [m]
}

// Inflow is a feature whose flow into the aquifer is given.
type Inflow struct {
	Name  string
	Kind  FeatureKind
	Index int
	Nodes []int32
	Flow  []float64 // [m³/d]
}

// HeadEdge is a prescribed-head edge; the flow through it is the residual of its nodes' rows, split between edges that share
// a node by the angle of the triangles there.
type HeadEdge struct {
	Name   string
	Index  int     // in Site.Edges
	Nodes  []int32 // in order along the outline
	Levels []float64
	corner []cornerShareOf // triangle corners at its nodes with the share that is this edge's
	own    []float64       // share of what is lumped at the node (exchange, flux), one a node
}

type cornerShareOf struct {
	triangle int32
	k        int8    // local number of the edge's node
	share    float64 // [-]
}

// RiverPiece is a mesh edge of a river.
type RiverPiece struct {
	A, B           int32
	ArcA, ArcB     float64 // along the river's path [m]
	Conductance    float64 // of the whole piece [m²/d]
	LevelA, LevelB float64 // [m]
}

// nodeSum gathers conductances and levels by node in order of first touch.
type nodeSum struct {
	slot map[int32]int
	ex   *Exchange
}

func newNodeSum(ex *Exchange) *nodeSum { return &nodeSum{map[int32]int{}, ex} }

func (n *nodeSum) add(node int32, conductance, level, lowest float64) {
	if conductance == 0 {
		return
	}
	i, ok := n.slot[node]
	if !ok {
		i = len(n.ex.Nodes)
		n.slot[node] = i
		n.ex.Nodes = append(n.ex.Nodes, node)
		n.ex.Conductance = append(n.ex.Conductance, 0)
		n.ex.Level = append(n.ex.Level, level)
		n.ex.Lowest = append(n.ex.Lowest, lowest)
	}
	total := n.ex.Conductance[i] + conductance
	n.ex.Level[i] += (level - n.ex.Level[i]) * (conductance / total)
	n.ex.Conductance[i] = total
	if lowest > n.ex.Lowest[i] || math.IsNaN(n.ex.Lowest[i]) {
		n.ex.Lowest[i] = lowest
	}
}

// buildOutline sorts the outline's mesh edges under the conditions.
func (m *Model) buildOutline(d *domainPlan, bad *problems) {
	site := m.Site
	m.prescribed = make([]float64, len(m.Mesh.X))
	m.isPrescribed = make([]bool, len(m.Mesh.X))
	holder := make([]int, len(m.Mesh.X)) // stretch that prescribed the node first
	perimeter := func(s stretch) float64 { c := d.outline.cum[s.ring]; return c[len(c)-1] }
	m.outlineEdge = make([]int, len(m.Mesh.OutlineEdges))
	for si, s := range d.stretches {
		e := site.Edges[s.edge]
		sum := newNodeSum(&Exchange{Name: e.Name, Kind: EdgeFeature, Index: s.edge})
		inflow := Inflow{Name: e.Name, Kind: EdgeFeature, Index: s.edge}
		head := HeadEdge{Name: e.Name, Index: s.edge}
		covered := 0
		for i, oe := range m.Mesh.OutlineEdges {
			if int(oe.Ring) != s.ring {
				continue
			}
			c := d.outline.cum[s.ring]
			at := func(f float64) float64 { return c[oe.Segment] + f*(c[oe.Segment+1]-c[oe.Segment]) }
			a, b := at(oe.FractionA), at(oe.FractionB)
			half := math.Abs(b-a) / 2
			from, to, ok := s.covers((a+b)/2, half, perimeter(s))
			if !ok {
				continue
			}
			covered++
			m.outlineEdge[i] = s.edge + 1
			nodeFrom, nodeTo := oe.A, oe.B
			if b < a {
				nodeFrom, nodeTo = oe.B, oe.A
			}
			length := distance(m.At(oe.A), m.At(oe.B))
			switch e.Kind {
			case PrescribedHead:
				m.prescribe(&head, nodeFrom, s.level(from), holder, si, d, bad)
				m.prescribe(&head, nodeTo, s.level(to), holder, si, d, bad)
			case PrescribedFlux:
				inflow.Nodes = append(inflow.Nodes, nodeFrom, nodeTo)
				inflow.Flow = append(inflow.Flow, e.Flux*length/2, e.Flux*length/2)
			case HeadDependent:
				sum.add(nodeFrom, e.Conductance.Best*length/2, s.level(from), math.NaN())
				sum.add(nodeTo, e.Conductance.Best*length/2, s.level(to), math.NaN())
			}
		}
		if covered == 0 {
			bad.add("edge "+e.Name, e.Path[0], "it covers no part of the outline; draw it along the extent's outline")
			continue
		}
		switch e.Kind {
		case PrescribedHead:
			m.HeadEdges = append(m.HeadEdges, head)
		case PrescribedFlux:
			m.Inflows = append(m.Inflows, inflow)
		case HeadDependent:
			m.Exchanges = append(m.Exchanges, *sum.ex)
		}
	}
}

// sameLevel is how far two touching edges' levels may differ, relative to 1 m or to the level if larger: rounding of an
// interpolated level, far below any survey.
const sameLevel = 1e-9

func (m *Model) prescribe(head *HeadEdge, node int32, level float64, holder []int, stretch int, d *domainPlan, bad *problems) {
	if m.isPrescribed[node] && holder[node] != stretch {
		was := m.prescribed[node]
		if !sameLevels(was, level) {
			other := m.Site.Edges[d.stretches[holder[node]].edge].Name
			bad.add("edge "+head.Name, m.At(node), differingLevels, level, other, was)
		}
	}
	if n := len(head.Nodes); n == 0 || head.Nodes[n-1] != node {
		if n == 0 || head.Nodes[0] != node || !containsNode(head.Nodes, node) {
			head.Nodes = append(head.Nodes, node)
			head.Levels = append(head.Levels, level)
		}
	}
	if !m.isPrescribed[node] {
		m.isPrescribed[node], holder[node] = true, stretch
		m.prescribed[node] = level
	}
}

func containsNode(nodes []int32, n int32) bool {
	for _, v := range nodes {
		if v == n {
			return true
		}
	}
	return false
}

// buildRivers lumps the rivers' exchange at the nodes along them.
func (m *Model) buildRivers(d *domainPlan, bad *problems) {
	m.RiverPieces = make([][]RiverPiece, len(m.Site.Rivers))
	for i, r := range m.Site.Rivers {
		edges := m.Mesh.LineEdges[d.riverLine[i]]
		if len(edges) == 0 {
			bad.add("river "+r.Name, r.Path[0], "no part of it lies inside the extent; move it or leave it out")
			continue
		}
		cum := arcs(r.Path)
		value := func(list []float64, segment int32, f float64) float64 {
			switch {
			case len(list) == 0:
				return math.NaN()
			case len(list) == 1:
				return list[0]
			case int(segment)+1 >= len(list):
				return list[len(list)-1]
			}
			return list[segment] + f*(list[segment+1]-list[segment])
		}
		arc := func(segment int32, f float64) float64 {
			if int(segment)+1 >= len(cum) {
				return cum[len(cum)-1]
			}
			return cum[segment] + f*(cum[segment+1]-cum[segment])
		}
		sum := newNodeSum(&Exchange{Name: r.Name, Kind: RiverFeature, Index: i})
		for _, e := range edges {
			length := distance(m.At(e.A), m.At(e.B))
			p := RiverPiece{A: e.A, B: e.B, ArcA: arc(e.SegmentA, e.FractionA), ArcB: arc(e.SegmentB, e.FractionB),
				Conductance: r.Width / r.BedResistance.Best * length,
				LevelA:      value(r.WaterLevels, e.SegmentA, e.FractionA), LevelB: value(r.WaterLevels, e.SegmentB, e.FractionB)}
			m.RiverPieces[i] = append(m.RiverPieces[i], p)
			sum.add(p.A, p.Conductance/2, p.LevelA, value(r.BedLevels, e.SegmentA, e.FractionA))
			sum.add(p.B, p.Conductance/2, p.LevelB, value(r.BedLevels, e.SegmentB, e.FractionB))
		}
		m.Exchanges = append(m.Exchanges, *sum.ex)
	}
}

// buildAreas lumps lakes, leakage and recharge by the control volumes' areas.
func (m *Model) buildAreas(bad *problems) {
	lakes := make([]*nodeSum, len(m.Site.Lakes))
	for i, l := range m.Site.Lakes {
		lakes[i] = newNodeSum(&Exchange{Name: l.Name, Kind: LakeFeature, Index: i})
	}
	leaks := make([]*nodeSum, len(m.Site.Zones)+1)
	recharge := make([]*Inflow, len(m.Site.Zones)+1)
	for i := range leaks {
		leaks[i] = newNodeSum(&Exchange{Name: m.Site.zoneName(i - 1), Kind: LeakageFeature, Index: i - 1})
		recharge[i] = &Inflow{Name: m.Site.zoneName(i - 1), Kind: RechargeFeature, Index: i - 1}
	}
	slot := make([]map[int32]int, len(recharge))
	for t := 0; t < len(m.Mesh.Triangles)/3; t++ {
		r := &m.regions[m.Mesh.Region[t]]
		for k := 0; k < 3; k++ {
			node, area := m.Mesh.Triangles[3*t+k], m.area[3*t+k]
			if r.leak > 0 {
				leaks[r.zoneLeak+1].add(node, area*r.leak, r.sourceHead, r.top)
			}
			for _, l := range r.lakes {
				lake := &m.Site.Lakes[l]
				bed := math.NaN()
				if lake.BedLevel != nil {
					bed = *lake.BedLevel
				}
				lakes[l].add(node, area/lake.BedResistance.Best, lake.WaterLevel, bed)
			}
			if r.recharge != 0 {
				z := r.zoneRecharge + 1
				if slot[z] == nil {
					slot[z] = map[int32]int{}
				}
				i, ok := slot[z][node]
				if !ok {
					i = len(recharge[z].Nodes)
					slot[z][node] = i
					recharge[z].Nodes = append(recharge[z].Nodes, node)
					recharge[z].Flow = append(recharge[z].Flow, 0)
				}
				recharge[z].Flow[i] += area * r.recharge
			}
		}
	}
	for i, l := range lakes {
		if len(l.ex.Nodes) == 0 {
			bad.add("lake "+m.Site.Lakes[i].Name, orb.Point(m.Site.Lakes[i].Area[0][0]), "no part of it lies inside the extent; move it or leave it out")
			continue
		}
		m.Exchanges = append(m.Exchanges, *l.ex)
	}
	for i := range leaks {
		if len(leaks[i].ex.Nodes) > 0 {
			m.Exchanges = append(m.Exchanges, *leaks[i].ex)
		}
		if len(recharge[i].Nodes) > 0 {
			m.Inflows = append(m.Inflows, *recharge[i])
		}
	}
}
