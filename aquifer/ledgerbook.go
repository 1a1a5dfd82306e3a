package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

// Book makes the balance of a state from the ledger's records: heads h at every node and the sinks that made them.
func (l *Ledger) Book(h []float64, sinks []Sink) *Booked {
	m := l.m
	net := make([]float64, len(m.Mesh.X))
	for t := range l.corners {
		for k, v := range l.fromTriangle(t, h) {
			net[m.Mesh.Triangles[3*t+k]] += v
		}
	}
	edges := l.edgeFlows(h)
	out := &Booked{LevelsApart: l.levels}
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		f := Flow{Feature: e.Name, Kind: EdgeFeature, Index: e.Index}
		for _, q := range edges[i] {
			f.add(q)
		}
		out.Features = append(out.Features, f)
	}
	for i := range l.exchanges {
		b := &l.exchanges[i]
		f := Flow{Feature: b.name, Kind: b.kind, Index: b.index}
		for k, n := range b.nodes {
			q := b.flow(k, h[n])
			net[n] += q
			f.add(q)
		}
		out.Features = append(out.Features, f)
	}
	for i := range l.inflows {
		b := &l.inflows[i]
		f := Flow{Feature: b.name, Kind: b.kind, Index: b.index}
		for k, n := range b.nodes {
			net[n] += b.weight[k]
			f.add(b.weight[k])
		}
		out.Features = append(out.Features, f)
	}
	out.Wells = Flow{Feature: "wells"}
	for _, s := range sinks {
		net[s.Node] -= s.Rate
		out.Wells.add(-s.Rate)
	}
	for n, fixed := range m.isPrescribed {
		if fixed {
			net[n] = 0
		}
		if !(math.Abs(net[n]) <= math.Abs(net[out.Worst])) {
			out.Worst = int32(n)
		}
	}
	out.Residual = net
	for _, f := range append(out.Features, out.Wells) {
		out.In += f.In
		out.Out += f.Out
	}
	return out
}

// fromTriangle is what a triangle brings to each of its three nodes [m³/d].
func (l *Ledger) fromTriangle(t int, h []float64) (q [3]float64) {
	c, n := &l.corners[t], l.m.Mesh.Triangles[3*t:3*t+3]
	d1, d2 := h[n[1]]-h[n[0]], h[n[2]]-h[n[0]]
	gx, gy := d1*c.gx[1]+d2*c.gx[2], d1*c.gy[1]+d2*c.gy[2]
	fx, fy := c.txx*gx+c.txy*gy, c.txy*gx+c.tyy*gy
	for k := range 3 {
		q[k] = -c.area * (c.gx[k]*fx + c.gy[k]*fy)
	}
	return q
}

// edgeFlows is the flow into the aquifer through each node of each prescribed-head edge: what the node would lack [m³/d].
func (l *Ledger) edgeFlows(h []float64) [][]float64 {
	m := l.m
	lumped := make([]float64, len(m.Mesh.X)) // what features other than recharge bring to a node
	for i := range l.exchanges {
		for k, n := range l.exchanges[i].nodes {
			lumped[n] += l.exchanges[i].flow(k, h[n])
		}
	}
	for i := range l.inflows {
		if l.inflows[i].kind == RechargeFeature {
			continue
		}
		for k, n := range l.inflows[i].nodes {
			lumped[n] += l.inflows[i].weight[k]
		}
	}
	out := make([][]float64, len(m.HeadEdges))
	for i := range m.HeadEdges {
		e := &m.HeadEdges[i]
		at := make(map[int32]int, len(e.Nodes))
		out[i] = make([]float64, len(e.Nodes))
		for k, n := range e.Nodes {
			at[n] = k
			out[i][k] = -e.own[k] * lumped[n]
		}
		for _, c := range e.corner {
			t, k := int(c.triangle), int(c.k)
			brought := l.fromTriangle(t, h)[k] + l.corners[t].part[k]*l.corners[t].recharge
			out[i][at[m.Mesh.Triangles[3*t+k]]] -= c.share * brought
		}
	}
	return out
}

// record is what the site says about a place.
type record struct {
	mean, ratio, angle   float64 // transmissivity: geometric mean [m²/d], ratio [-], direction [rad]
	recharge, resistance float64 // [m/d], [d]; 0: none
	source, top          float64 // [m]
	rainZone, leakZone   int     // -1 the background
	lakes                []int
}

// covers holds the site's polygons with their bounds.
type covers struct {
	site  *Site
	zones []orb.Bound
	lakes []orb.Bound
}

func newCovers(s *Site) *covers {
	c := &covers{site: s}
	for _, z := range s.Zones {
		c.zones = append(c.zones, z.Area.Bound())
	}
	for _, l := range s.Lakes {
		c.lakes = append(c.lakes, l.Area.Bound())
	}
	return c
}

// at overlays the background and the zones at a place, the later one over the earlier, property by property; a zone that states a
// transmissivity and no anisotropy is isotropic.
func (c *covers) at(p orb.Point) record {
	r := record{ratio: 1, rainZone: -1, leakZone: -1, top: math.NaN()}
	lay := func(i int, z *Zone) {
		if z.Transmissivity != nil {
			r.mean, r.ratio, r.angle = z.Transmissivity.Best, 1, 0
		}
		if z.Anisotropy != nil {
			r.ratio, r.angle = z.Anisotropy.Ratio, z.Anisotropy.AngleDeg*math.Pi/180
		}
		if z.Recharge != nil {
			r.recharge, r.rainZone = z.Recharge.Best, i
		}
		if z.LeakageResistance != nil {
			r.resistance, r.leakZone = z.LeakageResistance.Best, i
		}
		if z.SourceHead != nil {
			r.source = *z.SourceHead
		}
		if z.Top != nil {
			r.top = *z.Top
		}
	}
	lay(-1, &c.site.Background)
	for i := range c.site.Zones {
		if !c.zones[i].Contains(p) {
			continue
		}
		inside := false
		for _, poly := range c.site.Zones[i].Area {
			inside = inside || crossesOdd(p, poly)
		}
		if inside {
			lay(i, &c.site.Zones[i])
		}
	}
	for i := range c.site.Lakes {
		if c.lakes[i].Contains(p) && crossesOdd(p, c.site.Lakes[i].Area) {
			r.lakes = append(r.lakes, i)
		}
	}
	return r
}

// crossesOdd tells whether a ray to the right crosses a polygon's rings an odd number of times; holes count themselves out.
func crossesOdd(p orb.Point, poly orb.Polygon) bool {
	odd := false
	for _, ring := range poly {
		for i, j := 0, len(ring)-1; i < len(ring); j, i = i, i+1 {
			a, b := ring[i], ring[j]
			if (a[1] > p[1]) != (b[1] > p[1]) && p[0] < a[0]+(p[1]-a[1])/(b[1]-a[1])*(b[0]-a[0]) {
				odd = !odd
			}
		}
	}
	return odd
}
