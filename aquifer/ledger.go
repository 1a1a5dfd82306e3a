package aquifer

import (
	"math"

	"github.com/paulmach/orb"
)

// Ledger books the water of every control volume anew, from the site's records and the geometry of the mesh. It takes no number from the
// assembled system: what flows between nodes comes from the gradient of head in each triangle and the transmissivity tensor of the zone
// that covers it,
//
//	inflow of node i from triangle t = -area_t grad(phi_i)·T grad(h)
//
// control volumes come from circumcentres, recharge, leakage, lakes, rivers, edges and springs from their records. Taken over are the
// mesh, how edges lie along the outline, how the flow at a node of two prescribed-head edges is shared, and the springs' equivalent radii and
// conductances.
type Ledger struct {
	m         *Model
	corners   []corners3 // per triangle
	exchanges []booked
	inflows   []booked
	levels    float64 // largest difference of a prescribed head from its record [m]
}

// corners3 is a triangle as the ledger sees it.
type corners3 struct {
	gx, gy        [3]float64 // gradients of the three linear shapes [1/m]
	txx, txy, tyy float64    // [m²/d]
	area          float64    // [m²]
	part          [3]float64 // of the control volumes [m²]
	recharge      float64    // [m/d]
}

// booked is a feature's terms by node, in order of first touch.
type booked struct {
	kind   FeatureKind
	index  int
	name   string
	nodes  []int32
	weight []float64 // exchange: conductance [m²/d]; inflow: flow [m³/d]
	sum    []float64 // conductance x level [m³/d]
	lowest []float64 // [m]
	slot   map[int32]int
}

func (b *booked) add(node int32, weight, level, lowest float64) {
	if b.slot == nil {
		b.slot = map[int32]int{}
	}
	i, ok := b.slot[node]
	if !ok {
		i = len(b.nodes)
		b.slot[node] = i
		b.nodes = append(b.nodes, node)
		b.weight, b.sum, b.lowest = append(b.weight, 0), append(b.sum, 0), append(b.lowest, math.Inf(-1))
	}
	b.weight[i] += weight
	b.sum[i] += weight * level
	if lowest > b.lowest[i] {
		b.lowest[i] = lowest
	}
}

// flow is what entry i gives to the aquifer under head h; below its lowest level it gives what it gives there [m³/d].
func (b *booked) flow(i int, h float64) float64 {
	return b.sum[i] - b.weight[i]*math.Max(h, b.lowest[i])
}

// Booked is the water balance of a state as the ledger finds it.
type Booked struct {
	Residual    []float64 // what flows in less what flows out at every node whose head is found; 0 elsewhere [m³/d]
	Worst       int32     // node of the largest residual
	Features    []Flow    // edges with prescribed head, exchanges, inflows
	Wells       Flow
	In, Out     float64 // [m³/d]
	LevelsApart float64 // largest difference of a prescribed head from its record [m]
}

// Ledger reads the site's records once; Book then serves any state. Recharge multiplies that of the records: 1, but for a model made by
// WithRecharge.
func (m *Model) Ledger(recharge float64) *Ledger {
	l := &Ledger{m: m}
	places := make([]record, len(m.Mesh.Region))
	l.corners = make([]corners3, len(m.Mesh.Region))
	covers := newCovers(m.Site)
	for t := range l.corners {
		l.readTriangle(t, covers, &places[t], recharge)
	}
	l.bookOutline()
	l.bookRivers()
	l.bookAreas(places)
	for i, s := range m.Site.Springs {
		b := booked{kind: SpringFeature, index: i, name: s.Name}
		c := m.SpringC[i] / (1 + m.SpringC[i]*m.SpringRadii[i].Below(s.EffectiveRadius))
		b.add(m.SpringNode[i], c, s.OutletLevel, s.OutletLevel)
		l.exchanges = append(l.exchanges, b)
	}
	return l
}

func (l *Ledger) readTriangle(t int, covers *covers, r *record, recharge float64) {
	m, c := l.m, &l.corners[t]
	var x, y [3]float64
	for k := range 3 {
		n := m.Mesh.Triangles[3*t+k]
		x[k], y[k] = m.Mesh.X[n], m.Mesh.Y[n]
	}
	ax, ay, bx, by := x[1]-x[0], y[1]-y[0], x[2]-x[0], y[2]-y[0]
	twice := ax*by - ay*bx
	c.area = twice / 2
	c.gx[1], c.gy[1] = by/twice, -bx/twice
	c.gx[2], c.gy[2] = -ay/twice, ax/twice
	c.gx[0], c.gy[0] = -c.gx[1]-c.gx[2], -c.gy[1]-c.gy[2]
	*r = covers.at(orb.Point{(x[0] + x[1] + x[2]) / 3, (y[0] + y[1] + y[2]) / 3})
	r.recharge *= recharge
	c.recharge = r.recharge
	sin, cos := math.Sincos(r.angle)
	major, minor := r.mean*math.Sqrt(r.ratio), r.mean/math.Sqrt(r.ratio)
	c.txx, c.tyy, c.txy = major*cos*cos+minor*sin*sin, major*sin*sin+minor*cos*cos, (major-minor)*sin*cos
	l.readParts(t, c, x, y, r)
}

// rightAngle is the cosine below which an angle is right but for rounding: the two ways to share a right-angled triangle differ, so the
// stored conductance then says which one was taken.
const rightAngle = 1e-9

// readParts shares a triangle's area between its corners by the perpendicular bisectors, in the plane that the inverse tensor makes isotropic:
// the root of the metric M = T* T^-1, of determinant 1, is (M + I)/sqrt(trace M + 2), and keeps areas.
func (l *Ledger) readParts(t int, c *corners3, x, y [3]float64, r *record) {
	mxx, myy, mxy := c.tyy/r.mean, c.txx/r.mean, -c.txy/r.mean
	f := 1 / math.Sqrt(mxx+myy+2)
	var u, v [3]float64
	for k := range 3 {
		dx, dy := x[k]-x[0], y[k]-y[0]
		u[k], v[k] = f*((mxx+1)*dx+mxy*dy), f*(mxy*dx+(myy+1)*dy)
	}
	for k := range 3 {
		i, j := (k+1)%3, (k+2)%3
		dot := (u[i]-u[k])*(u[j]-u[k]) + (v[i]-v[k])*(v[j]-v[k])
		obtuse := dot < 0
		if math.Abs(dot) <= rightAngle*math.Hypot(u[i]-u[k], v[i]-v[k])*math.Hypot(u[j]-u[k], v[j]-v[k]) {
			obtuse = l.m.conductance[3*t+k] < 0
		}
		if obtuse && l.m.Mesh.Constraint[t]>>k&1 == 1 {
			c.part = [3]float64{c.area / 3, c.area / 3, c.area / 3}
			return
		}
	}
	d := 2 * (u[1]*v[2] - v[1]*u[2])
	p, q := u[1]*u[1]+v[1]*v[1], u[2]*u[2]+v[2]*v[2]
	cu, cv := (v[2]*p-v[1]*q)/d, (u[1]*q-u[2]*p)/d // circumcentre, from corner 0
	// half is the triangle of corner i, the middle of ij and the circumcentre
	half := func(i, j int) float64 {
		mu, mv := (u[i]+u[j])/2-u[i], (v[i]+v[j])/2-v[i]
		return (mu*(cv-v[i]) - mv*(cu-u[i])) / 2
	}
	for i := range 3 {
		c.part[i] = half(i, (i+1)%3) - half(i, (i+2)%3)
	}
}

// bookOutline books prescribed fluxes and head-dependent edges along the outline, and compares prescribed heads with their records.
func (l *Ledger) bookOutline() {
	m := l.m
	rings := newOutlineRings(m.Site.Extent)
	held := make([]bool, len(m.Mesh.X))
	for _, s := range rings.match(m.Site.Edges, &problems{}) {
		e := &m.Site.Edges[s.edge]
		b := booked{index: s.edge, kind: EdgeFeature, name: e.Name}
		c := rings.cum[s.ring]
		for _, oe := range m.Mesh.OutlineEdges {
			if int(oe.Ring) != s.ring {
				continue
			}
			from := c[oe.Segment] + oe.FractionA*(c[oe.Segment+1]-c[oe.Segment])
			to := c[oe.Segment] + oe.FractionB*(c[oe.Segment+1]-c[oe.Segment])
			first, last := oe.A, oe.B
			if to < from {
				from, to, first, last = to, from, last, first
			}
			start, end, covered := s.covers((from+to)/2, (to-from)/2, c[len(c)-1])
			if !covered {
				continue
			}
			length := distance(m.At(oe.A), m.At(oe.B))
			switch e.Kind {
			case PrescribedHead:
				l.compareLevel(first, s.level(start), held)
				l.compareLevel(last, s.level(end), held)
			case PrescribedFlux:
				b.add(first, e.Flux*length/2, 0, math.NaN())
				b.add(last, e.Flux*length/2, 0, math.NaN())
			case HeadDependent:
				b.add(first, e.Conductance.Best*length/2, s.level(start), math.NaN())
				b.add(last, e.Conductance.Best*length/2, s.level(end), math.NaN())
			}
		}
		switch e.Kind {
		case PrescribedFlux:
			l.inflows = append(l.inflows, b)
		case HeadDependent:
			l.exchanges = append(l.exchanges, b)
		}
	}
}

func (l *Ledger) compareLevel(node int32, level float64, held []bool) {
	if held[node] { // two touching edges: the first one holds, and they do not differ
		return
	}
	held[node] = true
	d := math.Abs(l.m.prescribed[node] - level)
	if !l.m.isPrescribed[node] {
		d = math.Inf(1)
	}
	l.levels = math.Max(l.levels, d)
}

// bookRivers looks for the mesh edges that lie on each river's path.
func (l *Ledger) bookRivers() {
	m := l.m
	near := onPath * m.Mesh.Quality.Tolerance
	type piece struct{ a, b int32 }
	var lines []piece
	if len(m.Site.Rivers) > 0 {
		for t := range m.Mesh.Region {
			for k := range 3 {
				if m.Mesh.Constraint[t]>>k&1 == 1 && (m.Mesh.Neighbours[3*t+k] < 0 || int(m.Mesh.Neighbours[3*t+k]) > t) {
					lines = append(lines, piece{m.Mesh.Triangles[3*t+(k+1)%3], m.Mesh.Triangles[3*t+(k+2)%3]})
				}
			}
		}
	}
	for i := range m.Site.Rivers {
		r := &m.Site.Rivers[i]
		b := booked{kind: RiverFeature, index: i, name: r.Name}
		bound := r.Path.Bound().Pad(near)
		put := func(n int32, c float64, segment int, fraction float64) {
			b.add(n, c, alongList(r.WaterLevels, segment, fraction), alongList(r.BedLevels, segment, fraction))
		}
		for _, e := range lines {
			pa, pb := m.At(e.a), m.At(e.b)
			if !bound.Contains(pa) || !bound.Contains(pb) {
				continue
			}
			c := r.Width / r.BedResistance.Best * distance(pa, pb) / 2
			found := false
			for k := 0; k+1 < len(r.Path); k++ { // a river may come back along itself: it then counts once more
				fa, da := onSegment(pa, r.Path[k], r.Path[k+1])
				fb, db := onSegment(pb, r.Path[k], r.Path[k+1])
				if da <= near && db <= near && fa != fb {
					found = true
					put(e.a, c, k, fa)
					put(e.b, c, k, fb)
				}
			}
			if found {
				continue
			}
			// vertices of the path that are nearer to each other than the mesher's tolerance are one node: the piece lies on two segments
			ka, fa, da := alongPath(r.Path, pa)
			kb, fb, db := alongPath(r.Path, pb)
			_, _, middle := alongPath(r.Path, orb.Point{(pa[0] + pb[0]) / 2, (pa[1] + pb[1]) / 2})
			if da <= near && db <= near && middle <= near {
				put(e.a, c, ka, fa)
				put(e.b, c, kb, fb)
			}
		}
		l.exchanges = append(l.exchanges, b)
	}
}

// onPath is how many of the mesher's tolerances a node may lie off the line that it is on: both ends of the piece may have been moved by one,
// and projection adds rounding.
const onPath = 10

// alongPath finds the segment of a path nearest to a place, the fraction along it and the distance.
func alongPath(path orb.LineString, p orb.Point) (segment int, fraction, apart float64) {
	apart = math.Inf(1)
	for i := 0; i+1 < len(path); i++ {
		if f, d := onSegment(p, path[i], path[i+1]); d < apart {
			segment, fraction, apart = i, f, d
		}
	}
	return segment, fraction, apart
}

// alongList reads a list with one value for all, or one a vertex; NaN where there is none.
func alongList(list []float64, segment int, fraction float64) float64 {
	switch {
	case len(list) == 0:
		return math.NaN()
	case len(list) <= segment+1:
		return list[len(list)-1]
	}
	return list[segment]*(1-fraction) + list[segment+1]*fraction
}

// bookAreas books lakes, leakage and recharge by the parts of the control volumes.
func (l *Ledger) bookAreas(places []record) {
	m := l.m
	lakes := make([]booked, len(m.Site.Lakes))
	for i, s := range m.Site.Lakes {
		lakes[i] = booked{kind: LakeFeature, index: i, name: s.Name}
	}
	leaks := make([]booked, len(m.Site.Zones)+1)
	rain := make([]booked, len(m.Site.Zones)+1)
	for i := range leaks {
		leaks[i] = booked{kind: LeakageFeature, index: i - 1, name: m.Site.zoneName(i - 1)}
		rain[i] = booked{kind: RechargeFeature, index: i - 1, name: m.Site.zoneName(i - 1)}
	}
	for t := range places {
		r, part := &places[t], &l.corners[t].part
		for k := range 3 {
			n := m.Mesh.Triangles[3*t+k]
			if r.resistance > 0 {
				leaks[r.leakZone+1].add(n, part[k]/r.resistance, r.source, r.top)
			}
			for _, i := range r.lakes {
				bed := math.NaN()
				if v := m.Site.Lakes[i].BedLevel; v != nil {
					bed = *v
				}
				lakes[i].add(n, part[k]/m.Site.Lakes[i].BedResistance.Best, m.Site.Lakes[i].WaterLevel, bed)
			}
			if r.recharge != 0 {
				rain[r.rainZone+1].add(n, part[k]*r.recharge, 0, math.NaN())
			}
		}
	}
	l.exchanges = append(l.exchanges, lakes...)
	for i := range leaks {
		if len(leaks[i].nodes) > 0 {
			l.exchanges = append(l.exchanges, leaks[i])
		}
		if len(rain[i].nodes) > 0 {
			l.inflows = append(l.inflows, rain[i])
		}
	}
}
