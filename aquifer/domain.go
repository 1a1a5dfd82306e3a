package aquifer

import (
	"math"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

// domainPlan is the mesher's domain and what its entries stand for.
type domainPlan struct {
	domain     mesh.Domain
	outline    *outlineRings
	stretches  []stretch
	riverLine  []int     // per river: its entry in domain.Lines
	springAt   []int     // per spring: its entry in domain.Points
	requestAt  []int     // per node request: its entry in domain.Points
	floor      []float64 // per place: no finer edge length is allowed there [m]
	finest     float64
	growth     float64
	nodes      int
	areaOfSite float64
	layer      []layerSize
}

// plan turns a site into the mesher's domain.
func (s *Site) plan(o Options, bad *problems) *domainPlan {
	d := &domainPlan{outline: newOutlineRings(s.Extent)}
	d.stretches = d.outline.match(s.Edges, bad)
	d.domain.Outer = d.outline.rings[0]
	d.areaOfSite = math.Abs(ringArea(d.outline.rings[0]))
	for _, h := range d.outline.rings[1:] {
		d.domain.Holes = append(d.domain.Holes, h)
		d.areaOfSite -= math.Abs(ringArea(h))
	}
	d.addLines(s)
	d.addPoints(s)
	d.setSizes(s, o)
	return d
}

func (d *domainPlan) addLines(s *Site) {
	add := func(name string, path orb.LineString) int {
		d.domain.Lines = append(d.domain.Lines, mesh.Line{Path: path, Name: name})
		return len(d.domain.Lines) - 1
	}
	rings := func(name string, p orb.Polygon) {
		for _, r := range p {
			o := openRing(r)
			path := append(orb.LineString(nil), o...)
			add(name, append(path, o[0]))
		}
	}
	for i := range s.Zones {
		z := &s.Zones[i]
		first := len(d.domain.Lines)
		for _, p := range z.Area {
			rings("zone "+z.Name, p)
		}
		if z.LeakageResistance != nil && len(d.domain.Lines) > first {
			d.resolveLayer(s, first, z.LeakageResistance.Best)
		}
	}
	for _, r := range s.Rivers {
		d.riverLine = append(d.riverLine, add("river "+r.Name, r.Path))
		d.layer = append(d.layer, layerSize{len(d.domain.Lines) - 1, riverShare * math.Sqrt(d.areaOfSite)})
	}
	for _, l := range s.Lakes {
		first := len(d.domain.Lines)
		rings("lake "+l.Name, l.Area)
		d.resolveLayer(s, first, l.BedResistance.Best)
	}
	for _, a := range s.Outlines {
		rings(a.Name, a.Area)
	}
}

// riverShare of the square root of the area is the largest edge length along a river: a hundred of them cross the site.
const riverShare = 1.0 / 100

// resolveLayer sets the edge length along the border of a lake or leaky zone, the lines from first on, by the leakage length there.
func (d *domainPlan) resolveLayer(s *Site, first int, resistance float64) {
	for i := first; i < len(d.domain.Lines); i++ {
		line := &d.domain.Lines[i]
		shortest := math.Inf(1)
		for _, p := range line.Path {
			if r, _ := s.properties(p); r.mean > 0 {
				shortest = math.Min(shortest, math.Sqrt(r.mean*resistance))
			}
		}
		if shortest > 0 && !math.IsInf(shortest, 0) {
			d.layer = append(d.layer, layerSize{i, shortest / lengthsPerLayer})
		}
	}
}

// layerSize is the edge length wanted along a line [m].
type layerSize struct {
	line int
	size float64
}

// addPoints asks for one node a place; requests at exactly one place share it (a receptor on a well), but two wells or two
// springs never do: the mesher then reports them.
func (d *domainPlan) addPoints(s *Site) {
	type holder struct {
		index int
		solid bool
	}
	seen := map[orb.Point]holder{}
	place := func(name string, at orb.Point, solid bool) int {
		if h, ok := seen[at]; ok && !(h.solid && solid) {
			if solid {
				seen[at] = holder{h.index, true}
				d.domain.Points[h.index].Name = name
			}
			return h.index
		}
		d.domain.Points = append(d.domain.Points, mesh.Point{At: at, Name: name})
		seen[at] = holder{len(d.domain.Points) - 1, solid}
		return len(d.domain.Points) - 1
	}
	d.requestAt = make([]int, len(s.Nodes))
	for i, n := range s.Nodes {
		if n.Well {
			d.requestAt[i] = place(n.Name, n.At, true)
		}
	}
	for _, sp := range s.Springs {
		d.springAt = append(d.springAt, place("spring "+sp.Name, sp.At, true))
	}
	for i, n := range s.Nodes {
		if !n.Well {
			d.requestAt[i] = place(n.Name, n.At, false)
		}
	}
}

// setSizes gives every place its edge length: the finest size, less where a neighbour or a line is near, never so small that
// the equivalent radius falls below the bore's radius (wells) or twice the effective radius (springs).
func (d *domainPlan) setSizes(s *Site, o Options) {
	scale := orDefault(o.Scale, 1)
	d.growth = orDefault(o.Growth, defaultGrowth) * scale
	d.nodes = o.Nodes
	if d.nodes == 0 {
		d.nodes = defaultNodes
	}
	floor := make([]float64, len(d.domain.Points))
	for i, n := range s.Nodes {
		if n.Radius > 0 {
			k := d.requestAt[i]
			floor[k] = math.Max(floor[k], n.Radius/radiusPerEdge)
		}
	}
	for i, sp := range s.Springs {
		k := d.springAt[i]
		floor[k] = math.Max(floor[k], 2*sp.EffectiveRadius/radiusPerEdge)
	}
	d.floor = floor
	near := d.clearances()
	finest := orDefault(o.Finest, finestShare*math.Sqrt(d.areaOfSite))
	corners := d.corners(s)
	set := func(f float64) {
		d.finest = f
		for k := range near {
			size := math.Min(f, near[k]/ringsBetween) * scale
			d.domain.Points[k].Size = math.Max(size, floor[k])
		}
		for _, l := range d.layer {
			d.domain.Lines[l.line].Size = math.Max(l.size, f) * scale
		}
		d.domain.Points = d.domain.Points[:len(near)]
		for _, c := range corners {
			d.domain.Points = append(d.domain.Points, mesh.Point{At: c.at, Size: math.Max(f*c.share, c.least) * scale, Name: cornerName})
		}
	}
	set(finest)
	if o.Finest > 0 {
		return
	}
	allowed := float64(max(d.nodes, min(defaultMost, nodesPerPlace*(len(near)+len(corners)))))
	if o.Nodes > 0 {
		allowed = float64(d.nodes)
	}
	if o.Scale > 0 {
		return
	}
	d.fit(allowed, finest, set)
}

// fitTolerance is how near to the target, as a logarithm, the estimate of nodes is brought: it is itself good to a few per cent only.
const fitTolerance = 0.04

// fitSteps bounds the search: three or four do.
const fitSteps = 20

// floorReach is how many of its least edge lengths a place keeps sizes that are asked for from falling below it.
const floorReach = 4

// allowedSizes raises sizes beside wells and springs to the least that their radii allow.
func (d *domainPlan) allowedSizes(sizes []mesh.Size) []mesh.Size {
	out := append([]mesh.Size(nil), sizes...)
	for k, f := range d.floor {
		if f == 0 {
			continue
		}
		for i := range out {
			if out[i].Edge < f && distance(out[i].At, d.domain.Points[k].At) < floorReach*f {
				out[i].Edge = f
			}
		}
	}
	return out
}

// fit raises the finest size until about the allowed number of nodes is enough, or, where the outline's own vertices ask for more than
// that, until the places add no more than a third to them.
func (d *domainPlan) fit(allowed, finest float64, set func(float64)) {
	unbounded := mesh.Options{Growth: d.growth, Coarsest: math.Sqrt(d.areaOfSite) / 10}
	estimate := func(f float64) float64 {
		set(f)
		return mesh.EstimateNodes(d.domain, unbounded)
	}
	allowed *= 0.9 // the estimate is good to a few per cent, and the coarsest size still has to be reached
	atLow := estimate(finest)
	if atLow <= allowed {
		return
	}
	low, high := finest, math.Sqrt(d.areaOfSite)/10
	if high <= low {
		return
	}
	atHigh := estimate(high)
	target := math.Max(allowed, 4*atHigh/3)
	if !(atLow > target) {
		set(finest)
		return
	}
	// False position in logarithms; an end that is kept twice counts for half (Dowell & Jarratt 1971, BIT 11, the Illinois rule).
	over, under := math.Log(atLow/target), math.Log(atHigh/target)
	kept := 0
	for step := 0; step < fitSteps && under < -fitTolerance && math.Log(high/low) > fitTolerance; step++ {
		middle := math.Exp((math.Log(high)*over - math.Log(low)*under) / (over - under))
		switch miss := math.Log(estimate(middle) / target); {
		case miss <= 0:
			high, under = middle, miss
			if kept > 0 {
				over /= 2
			}
			kept = 1
		default:
			low, over = middle, miss
			if kept < 0 {
				under /= 2
			}
			kept = -1
		}
	}
	set(high)
}

func orDefault(v, def float64) float64 {
	if v > 0 {
		return v
	}
	return def
}

// clearances returns for every place the distance to the nearest other place or line that it is not on [m].
func (d *domainPlan) clearances() []float64 {
	on := 1e-9 * d.outline.diag // a place this near a line is on it: rounding of projected coordinates
	near := make([]float64, len(d.domain.Points))
	for i, p := range d.domain.Points {
		best := math.Inf(1)
		for j, q := range d.domain.Points {
			if i != j {
				if dist := distance(p.At, q.At); dist > 0 {
					best = math.Min(best, dist)
				}
			}
		}
		lines := func(path []orb.Point, closed bool) {
			n := len(path)
			last := n - 1
			if closed {
				last = n
			}
			for k := 0; k < last; k++ {
				if _, dist := onSegment(p.At, path[k], path[(k+1)%n]); dist > on {
					best = math.Min(best, dist)
				}
			}
		}
		for _, r := range d.outline.rings {
			lines(r, true)
		}
		for _, l := range d.domain.Lines {
			lines(l.Path, false)
		}
		near[i] = best
	}
	return near
}

// Corners are refined where the gradient of head is singular: it goes as r^(a-1) with r the distance from the corner.
const (
	// sharpCorner is the interior angle above which a corner of the outline counts [°]: a = 180/angle, and at 190 the lost order is 0.1.
	sharpCorner = 190
	// endShare of the finest size is the edge length at the end of a condition: there a may be one half, and the error that the corner
	// spreads goes as the edge length to the power 2a.
	endShare = 1.0 / 8
	// cornerShare of the shorter adjoining segment is the edge length at a re-entrant corner or a bend of a zone's border: with a above 0.8
	// the corner then spreads an error below a thousandth; its singularity does not reach beyond the segments that make it.
	cornerShare = 1.0 / 64
	// manyCorners is from how many corners on the share is raised, since a line with more of them shows each at a smaller scale.
	manyCorners = 120
)

// cornerName marks the points that are ours, not the user's.
const cornerName = "corner"

// corner is a place where the gradient of head may be singular.
type corner struct {
	at    orb.Point
	share float64 // of the finest size
	least float64 // no finer edge length is useful here [m]
}

// corners lists the ends of conditions, the re-entrant corners of the outline and the bends of zone borders.
func (d *domainPlan) corners(s *Site) []corner {
	ends := map[orb.Point]bool{}
	for _, st := range d.stretches {
		cum := d.outline.cum[st.ring]
		perimeter := cum[len(cum)-1]
		if st.span >= perimeter {
			continue
		}
		for _, arc := range []float64{st.start, math.Mod(st.start+st.span, perimeter)} {
			for i, v := range d.outline.rings[st.ring] {
				if math.Abs(cum[i]-arc) <= sameVertex*d.outline.diag {
					ends[v] = true
				}
			}
		}
	}
	taken := map[orb.Point]bool{}
	for _, p := range d.domain.Points {
		taken[p.At] = true
	}
	var out []corner
	bends := 0
	visit := func(r orb.Ring, isSharp func(i int) bool) {
		for i, v := range r {
			if taken[v] || !(ends[v] || isSharp(i)) {
				continue
			}
			taken[v] = true
			if ends[v] {
				out = append(out, corner{at: v, share: endShare})
				continue
			}
			bends++
			out = append(out, corner{at: v, share: 1, least: cornerShare * math.Min(distance(r[(i+len(r)-1)%len(r)], v), distance(v, r[(i+1)%len(r)]))})
		}
	}
	for k, r := range d.outline.rings {
		inside := 1.0 // the domain is on the left of a counter-clockwise outer ring, on the right of a hole's
		if (ringArea(r) > 0) != (k == 0) {
			inside = -1
		}
		visit(r, func(i int) bool { return 180-inside*turnAt(r, i) > sharpCorner })
	}
	for _, z := range s.Zones {
		if z.Transmissivity == nil && z.Anisotropy == nil {
			continue
		}
		for _, poly := range z.Area {
			for _, ring := range poly {
				r := openRing(ring)
				visit(r, func(i int) bool { return inPolygon(r[i], s.Extent) && math.Abs(turnAt(r, i)) > sharpCorner-180 })
			}
		}
	}
	single := func(v orb.Point) {
		if !taken[v] && inPolygon(v, s.Extent) {
			taken[v] = true
			out = append(out, corner{at: v, share: 1})
		}
	}
	for _, r := range s.Rivers { // a line that takes water in ends like a crack: a is one half
		single(r.Path[0])
		single(r.Path[len(r.Path)-1])
	}
	for _, v := range d.crossings(s) {
		if !taken[v] {
			taken[v] = true
			out = append(out, corner{at: v, share: 1})
		}
	}
	if bends > manyCorners {
		for i := range out {
			out[i].least *= math.Min(float64(bends)/manyCorners, 1/(4*cornerShare))
		}
	}
	return out
}

// mostCrossings is from how many crossings of zone borders with the outline on none is refined: a border that follows the outline crosses it
// at every vertex, and those are no corners of the flow.
const mostCrossings = 60

// crossings lists where a border between transmissivities meets the outline.
func (d *domainPlan) crossings(s *Site) []orb.Point {
	var out []orb.Point
	for _, z := range s.Zones {
		if z.Transmissivity == nil && z.Anisotropy == nil {
			continue
		}
		for _, poly := range z.Area {
			for _, ring := range poly {
				r := openRing(ring)
				for i := range r {
					for _, o := range d.outline.rings {
						for k := range o {
							if p, ok := crossing(r[i], r[(i+1)%len(r)], o[k], o[(k+1)%len(o)]); ok {
								out = append(out, p)
							}
						}
					}
				}
			}
		}
	}
	if len(out) > mostCrossings {
		return nil
	}
	return out
}

// crossing is where two segments cross within both; segments that are nearly parallel do not count.
func crossing(a, b, c, d orb.Point) (orb.Point, bool) {
	ux, uy, vx, vy := b[0]-a[0], b[1]-a[1], d[0]-c[0], d[1]-c[1]
	det := ux*vy - uy*vx
	if !(math.Abs(det) > 1e-3*math.Hypot(ux, uy)*math.Hypot(vx, vy)) { // below a twentieth of a degree they run together
		return orb.Point{}, false
	}
	f := ((c[0]-a[0])*vy - (c[1]-a[1])*vx) / det
	g := ((c[0]-a[0])*uy - (c[1]-a[1])*ux) / det
	if !(f >= 0 && f <= 1 && g >= 0 && g <= 1) {
		return orb.Point{}, false
	}
	return orb.Point{a[0] + f*ux, a[1] + f*uy}, true
}

// turnAt is by how much a ring turns left at a vertex [°].
func turnAt(r orb.Ring, i int) float64 {
	a, v, b := r[(i+len(r)-1)%len(r)], r[i], r[(i+1)%len(r)]
	return math.Atan2(cross(a, v, b), dot(a, v, b)) * 180 / math.Pi
}

// cross and dot are of the vectors a->v and v->b.
func cross(a, v, b orb.Point) float64 {
	return (v[0]-a[0])*(b[1]-v[1]) - (v[1]-a[1])*(b[0]-v[0])
}

func dot(a, v, b orb.Point) float64 {
	return (v[0]-a[0])*(b[0]-v[0]) + (v[1]-a[1])*(b[1]-v[1])
}
