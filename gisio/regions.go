package gisio

import (
	"fmt"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

// regionShift is how far a corner of a region keeps from the mesh's nodes, or a tenth of the edge where that is less: corners that fell
// onto one node would join rings there, and positions are written to about a centimetre [m].
const regionShift = 0.05

// smallestRing is the area under which a ring of a region is left out: less than what is seen on any map [m²].
const smallestRing = 1.0

// Region gives the area where values, linear on each triangle, are at most level, as polygons in the plane of the mesh: outer rings
// counterclockwise, holes clockwise, rings that meet in a point kept apart there. Arguments as for Contours; the triangles must be
// counterclockwise. A value may be +Inf: the region then ends just beside its node's neighbours. Values that are not a number are an
// error, with the node.
//
// Method: every triangle is cut at the level; sides that two pieces share cancel, and what is left is chained into rings, at a corner
// where several meet always along the same piece.
func Region(x, y []float64, triangles []int32, values []float64, level float64) (orb.MultiPolygon, error) {
	if len(y) != len(x) || len(values) != len(x) || len(triangles)%3 != 0 {
		panic(fmt.Sprintf("gisio: Region: %d x, %d y, %d values, %d corners", len(x), len(y), len(values), len(triangles)))
	}
	for i, v := range values {
		if math.IsNaN(v) {
			return nil, fmt.Errorf("region: node %d at (%v, %v) has no value", i, x[i], y[i])
		}
	}
	c := &regionCutter{x: x, y: y, values: values, level: level, number: map[[2]int32]int32{}, sides: map[[2]int32]int{}}
	for k := 0; k < len(triangles); k += 3 {
		c.cut(triangles[k : k+3])
	}
	return assemblePolygons(c.rings()), nil
}

// RegionArea is the area of polygons in a plane, holes taken off [m²].
func RegionArea(region orb.MultiPolygon) float64 {
	sum := 0.0
	for _, p := range region {
		for _, r := range p {
			sum += ringArea(r)
		}
	}
	return sum
}

// WriteRegion gives a region as a GeoJSON FeatureCollection in longitude and latitude with one feature, or none where the region is
// empty. plane is the system of the points. Errors and panics as for WriteContours.
func WriteRegion(region orb.MultiPolygon, plane System, properties []Property) ([]byte, error) {
	if len(region) == 0 {
		return WriteFeatures(nil)
	}
	g, err := Transform(plane, WGS84, region)
	if err != nil {
		return nil, fmt.Errorf("region: %w", err)
	}
	return WriteFeatures([]OutputFeature{{Geometry: g, Properties: properties}})
}

// regionCutter gathers the sides of the pieces. Corners are numbered as they come: a node is the pair of itself, a place on an edge the
// pair of its ends.
type regionCutter struct {
	x, y, values []float64
	level        float64
	number       map[[2]int32]int32
	at           []orb.Point
	sides        map[[2]int32]int // directed side to its place in order
	order        [][2]int32
	dead         []bool
}

func (c *regionCutter) inside(n int32) bool { return c.values[n] <= c.level }

func (c *regionCutter) corner(a, b int32) int32 {
	if a > b {
		a, b = b, a
	}
	key := [2]int32{a, b}
	n, known := c.number[key]
	if !known {
		n = int32(len(c.at))
		c.number[key] = n
		c.at = append(c.at, c.place(a, b))
	}
	return n
}

func (c *regionCutter) place(a, b int32) orb.Point {
	p, q := orb.Point{c.x[a], c.y[a]}, orb.Point{c.x[b], c.y[b]}
	if a == b {
		return p
	}
	va, vb := c.values[a], c.values[b]
	share := (c.level - va) / (vb - va)
	switch { // one end is +Inf
	case math.IsInf(va, 1):
		share = 1
	case math.IsInf(vb, 1):
		share = 0
	}
	keep := math.Min(0.1, regionShift/math.Hypot(q[0]-p[0], q[1]-p[1]))
	share = math.Min(math.Max(share, keep), 1-keep)
	return orb.Point{p[0] + share*(q[0]-p[0]), p[1] + share*(q[1]-p[1])}
}

// cut adds the sides of a triangle's piece, the piece on their left.
func (c *regionCutter) cut(nodes []int32) {
	var piece []int32
	for i, a := range nodes {
		b := nodes[(i+1)%3]
		if c.inside(a) {
			piece = append(piece, c.corner(a, a))
		}
		if c.inside(a) != c.inside(b) {
			piece = append(piece, c.corner(a, b))
		}
	}
	for i, a := range piece {
		b := piece[(i+1)%len(piece)]
		if k, shared := c.sides[[2]int32{b, a}]; shared {
			c.dead[k] = true
			delete(c.sides, [2]int32{b, a})
			continue
		}
		c.sides[[2]int32{a, b}] = len(c.order)
		c.order, c.dead = append(c.order, [2]int32{a, b}), append(c.dead, false)
	}
}

// rings chains the sides that are left, in the order in which they came.
func (c *regionCutter) rings() []orb.Ring {
	leaving := map[int32][]int32{}
	for k, s := range c.order {
		if !c.dead[k] {
			leaving[s[0]] = append(leaving[s[0]], int32(k))
		}
	}
	var out []orb.Ring
	for k := range c.order {
		if c.dead[k] {
			continue
		}
		var chain []int32 // corners
		for next := int32(k); next >= 0 && !c.dead[next]; {
			c.dead[next] = true
			from, to := c.order[next][0], c.order[next][1]
			chain = append(chain, from)
			next = c.turn(from, to, leaving[to])
		}
		out = append(out, c.split(chain)...)
	}
	return out
}

// turn picks the side to go on by: of those that leave a corner, the first one clockwise from the way back, which bounds the same piece.
func (c *regionCutter) turn(from, to int32, leaving []int32) int32 {
	best, least := int32(-1), math.Inf(1)
	back := direction(c.at[to], c.at[from])
	for _, k := range leaving {
		if c.dead[k] {
			continue
		}
		angle := back - direction(c.at[to], c.at[c.order[k][1]])
		if angle <= 0 {
			angle += 2 * math.Pi
		}
		if angle < least {
			best, least = k, angle
		}
	}
	return best
}

func direction(a, b orb.Point) float64 { return math.Atan2(b[1]-a[1], b[0]-a[0]) }

// split cuts a closed chain at corners that it comes to again into rings without any.
func (c *regionCutter) split(chain []int32) []orb.Ring {
	var out []orb.Ring
	at := map[int32]int{}
	var open []int32
	for _, n := range append(slices.Clone(chain), chain[0]) {
		if from, again := at[n]; again {
			if r := c.ring(open[from:]); r != nil {
				out = append(out, r)
			}
			for _, m := range open[from:] {
				delete(at, m)
			}
			open = open[:from]
		}
		at[n] = len(open)
		open = append(open, n)
	}
	return out
}

// ring makes a closed ring, without corners in line between two others; nil where it is too small.
func (c *regionCutter) ring(corners []int32) orb.Ring {
	var r orb.Ring
	for i, n := range corners {
		before, after := c.at[corners[(i+len(corners)-1)%len(corners)]], c.at[corners[(i+1)%len(corners)]]
		if orientation(before, c.at[n], after) != 0 {
			r = append(r, c.at[n])
		}
	}
	if len(r) < 3 {
		return nil
	}
	if r = append(r, r[0]); math.Abs(ringArea(r)) < smallestRing {
		return nil
	}
	return r
}

// assemblePolygons gives every hole to the smallest outer ring around it.
func assemblePolygons(rings []orb.Ring) orb.MultiPolygon {
	var out orb.MultiPolygon
	var holes []orb.Ring
	for _, r := range rings {
		if ringArea(r) > 0 {
			out = append(out, orb.Polygon{r})
		} else {
			holes = append(holes, r)
		}
	}
	for _, h := range holes {
		middle := orb.Point{(h[0][0] + h[1][0]) / 2, (h[0][1] + h[1][1]) / 2} // rings meet in corners only
		best := -1
		for i, p := range out {
			if around(p[0], middle) && (best < 0 || ringArea(p[0]) < ringArea(out[best][0])) {
				best = i
			}
		}
		if best >= 0 {
			out[best] = append(out[best], h)
		}
	}
	return out
}

// around tells whether a point off the ring lies inside it: crossings of a ray to the east.
func around(r orb.Ring, p orb.Point) bool {
	inside := false
	for i := 0; i+1 < len(r); i++ {
		a, b := r[i], r[i+1]
		if (a[1] > p[1]) != (b[1] > p[1]) && p[0] < a[0]+(p[1]-a[1])/(b[1]-a[1])*(b[0]-a[0]) {
			inside = !inside
		}
	}
	return inside
}
