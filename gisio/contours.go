package gisio

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

// Contour holds the lines of one level.
type Contour struct {
	Level float64 // in the unit of the values, of heads and drawdowns [m]
	Lines []ContourLine
}

// ContourLine is one line of equal value, with the higher values on its left. A closed one repeats its first point at
// the end and begins at its first point in order of x, then y; an open one begins and ends on the outline of the mesh.
type ContourLine struct {
	Points orb.LineString // in the plane of the mesh [m]
	Closed bool
}

// Contours gives the lines along which values, linear on each triangle, equal the levels.
//
// x, y [m] and values have one entry for each node; triangles has three node numbers for each triangle, counterclockwise,
// and no edge may belong to more than two triangles. Levels come out ascending, each once, also those that nothing
// reaches; the lines of a level are in the order of their points. A value equal to a level counts as just above it, which
// leaves no gaps; where a line then shrinks to a point, or runs out along a crest and straight back, that is left out.
//
// Values, levels or coordinates that are not finite are an error. Panics when lengths or node numbers do not fit, or
// when an edge has more than two triangles.
//
// Method: crossing points by linear interpolation on edges, joined through the edges that triangles share.
func Contours(x, y []float64, triangles []int32, values, levels []float64) ([]Contour, error) {
	m, err := NewContourMesh(x, y, triangles)
	if err != nil {
		return nil, err
	}
	return m.Contours(values, levels)
}

// ContourMesh is a mesh that many fields are contoured on: its edges are found once. It is not for use by several goroutines at
// once; each takes its own by Share.
type ContourMesh struct{ tracer contourTracer }

// NewContourMesh prepares a mesh as Contours takes it, with the same errors and panics.
func NewContourMesh(x, y []float64, triangles []int32) (*ContourMesh, error) {
	if len(y) != len(x) || len(triangles)%3 != 0 {
		panic(fmt.Sprintf("gisio: Contours: %d x, %d y, %d corners", len(x), len(y), len(triangles)))
	}
	for i := range x {
		if !finite(x[i]) || !finite(y[i]) {
			return nil, fmt.Errorf("contours: node %d is at (%v, %v): both must be finite", i, x[i], y[i])
		}
	}
	m := &ContourMesh{contourTracer{x: x, y: y, triangles: triangles}}
	m.tracer.findEdges()
	return m, nil
}

// Share returns a mesh over the same edges that another goroutine may use at the same time.
func (m *ContourMesh) Share() *ContourMesh {
	t := &m.tracer
	shared := &ContourMesh{contourTracer{x: t.x, y: t.y, edges: t.edges, ofTriangle: t.ofTriangle, triangles: t.triangles}}
	shared.tracer.clearMeeting()
	return shared
}

// Contours is the function of the same name for one field over the mesh.
func (m *ContourMesh) Contours(values, levels []float64) ([]Contour, error) {
	t := &m.tracer
	if len(values) != len(t.x) {
		panic(fmt.Sprintf("gisio: Contours: %d nodes, %d values", len(t.x), len(values)))
	}
	for i, v := range values {
		if !finite(v) {
			return nil, fmt.Errorf("contours: node %d at (%v, %v) has the value %v: it must be finite", i, t.x[i], t.y[i], v)
		}
	}
	levels = slices.Clone(levels)
	for _, level := range levels {
		if !finite(level) {
			return nil, fmt.Errorf("contours: level %v must be finite", level)
		}
	}
	slices.Sort(levels)
	levels = slices.Compact(levels)
	t.take(values, levels)
	out := make([]Contour, len(levels))
	for i, level := range levels {
		out[i] = Contour{Level: level + 0, Lines: t.lines(i, level)}
	}
	return out, nil
}

// contourTracer holds the mesh by its edges.
type contourTracer struct {
	x, y, values []float64
	edges        [][2]int32 // nodes of each edge, the smaller number first
	ofTriangle   [][3]int32 // edges of each triangle: opposite to corner 0, 1, 2
	triangles    []int32
	crossed      [][]int32 // by level: the triangles that it crosses, ascending

	// Of the level at hand; segments at each edge, -1 = none.
	meeting  [][2]int32
	segments []contourSegment
}

// contourSegment crosses one triangle from edge to edge with the higher values on its left.
type contourSegment struct {
	from, to int32
	used     bool
}

// findEdges numbers the edges in order of their nodes: half edges are put into buckets by the smaller node, each bucket then sorted.
func (t *contourTracer) findEdges() {
	n := len(t.triangles) / 3
	t.ofTriangle = make([][3]int32, n)
	type half struct {
		b, slot int32 // the larger node; 3 triangle + corner opposite
	}
	start := make([]int32, len(t.x)+1)
	ends := func(slot int) (a, b int32) {
		k, i := slot/3, slot%3
		p, q := t.triangles[3*k+(i+1)%3], t.triangles[3*k+(i+2)%3]
		return min(p, q), max(p, q)
	}
	for i, c := range t.triangles {
		if c < 0 || int(c) >= len(t.x) {
			panic(fmt.Sprintf("gisio: Contours: triangle %d has the node %d of %d", i/3, c, len(t.x)))
		}
	}
	for slot := range t.triangles {
		a, _ := ends(slot)
		start[a+1]++
	}
	for a := range t.x {
		start[a+1] += start[a]
	}
	next := slices.Clone(start)
	halves := make([]half, len(t.triangles))
	for slot := range t.triangles {
		a, b := ends(slot)
		halves[next[a]] = half{b, int32(slot)}
		next[a]++
	}
	for a := range t.x {
		bucket := halves[start[a]:start[a+1]]
		slices.SortFunc(bucket, func(p, q half) int {
			if p.b != q.b {
				return int(p.b) - int(q.b)
			}
			return int(p.slot) - int(q.slot)
		})
		shared := 0
		for i, h := range bucket {
			if i == 0 || h.b != bucket[i-1].b {
				t.edges = append(t.edges, [2]int32{int32(a), h.b})
				shared = 0
			}
			if shared++; shared > 2 {
				panic(fmt.Sprintf("gisio: Contours: the edge between nodes %d and %d has more than two triangles", a, h.b))
			}
			t.ofTriangle[h.slot/3][h.slot%3] = int32(len(t.edges) - 1)
		}
	}
	t.clearMeeting()
}

func (t *contourTracer) clearMeeting() {
	t.meeting = make([][2]int32, len(t.edges))
	for i := range t.meeting {
		t.meeting[i] = [2]int32{-1, -1}
	}
}

// take makes the tracer ready for a field: one pass over the triangles finds which levels cross each.
func (t *contourTracer) take(values, levels []float64) {
	t.values = values
	t.crossed = make([][]int32, len(levels))
	for k := range t.ofTriangle {
		v0, v1, v2 := values[t.triangles[3*k]], values[t.triangles[3*k+1]], values[t.triangles[3*k+2]]
		highest := max(v0, v1, v2)
		i, found := slices.BinarySearch(levels, min(v0, v1, v2))
		if found {
			i++ // a level at the lowest corner counts as just below it
		}
		for ; i < len(levels) && levels[i] <= highest; i++ {
			t.crossed[i] = append(t.crossed[i], int32(k))
		}
	}
}

// lines gives the lines of level i in their order.
func (t *contourTracer) lines(i int, level float64) []ContourLine {
	t.collect(t.crossed[i], level)
	var out []ContourLine
	keep := func(points orb.LineString) {
		closed := points[0] == points[len(points)-1] // a loop, or ends that fall on one node of the outline
		if points = withoutSpikes(points, closed); len(points) < 2 {
			return
		}
		if closed {
			points = fromLowest(points)
		}
		out = append(out, ContourLine{points, closed})
	}
	for i := range t.segments { // lines with ends
		switch s := t.segments[i]; {
		case s.used:
		case t.meeting[s.from][1] < 0:
			keep(t.trace(int32(i), s.from, level))
		case t.meeting[s.to][1] < 0:
			points := t.trace(int32(i), s.to, level)
			slices.Reverse(points)
			keep(points)
		}
	}
	for i := range t.segments { // what is left are loops
		if s := t.segments[i]; !s.used {
			keep(t.trace(int32(i), s.from, level))
		}
	}
	for _, s := range t.segments {
		t.meeting[s.from], t.meeting[s.to] = [2]int32{-1, -1}, [2]int32{-1, -1}
	}
	slices.SortStableFunc(out, func(p, q ContourLine) int {
		return slices.CompareFunc(p.Points, q.Points, func(a, b orb.Point) int {
			return cmp.Or(cmp.Compare(a[0], b[0]), cmp.Compare(a[1], b[1]))
		})
	})
	return out
}

// collect finds the segments of a level in the triangles that it crosses and enters them at their edges.
func (t *contourTracer) collect(crossed []int32, level float64) {
	t.segments = t.segments[:0]
	for _, triangle := range crossed {
		k := int(triangle)
		edges := t.ofTriangle[k]
		above := [3]bool{}
		for i := range 3 {
			above[i] = t.values[t.triangles[3*k+i]] >= level
		}
		for i := range 3 {
			j, l := (i+1)%3, (i+2)%3
			if above[j] != above[l] || above[i] == above[j] {
				continue
			}
			// Corner i is alone; the edges that leave it are opposite to j and l. Around a high corner the line runs from
			// the side to the next corner, counterclockwise, to the side to the previous one.
			s := contourSegment{from: edges[l], to: edges[j]}
			if above[i] != t.counterclockwise(k) {
				s.from, s.to = s.to, s.from
			}
			n := int32(len(t.segments))
			t.segments = append(t.segments, s)
			for _, e := range [2]int32{s.from, s.to} {
				if t.meeting[e][0] < 0 {
					t.meeting[e][0] = n
				} else {
					t.meeting[e][1] = n
				}
			}
		}
	}
}

// counterclockwise tells which way round the corners of triangle k are given.
func (t *contourTracer) counterclockwise(k int) bool {
	a, b, c := t.triangles[3*k], t.triangles[3*k+1], t.triangles[3*k+2]
	return orientation(t.node(a), t.node(b), t.node(c)) >= 0
}

func (t *contourTracer) node(i int32) orb.Point { return orb.Point{t.x[i], t.y[i]} }

// trace follows a line from edge start of segment i to its end, or round a loop back to the start.
func (t *contourTracer) trace(i, start int32, level float64) orb.LineString {
	points := orb.LineString{t.crossing(start, level)}
	edge := start
	for i >= 0 && !t.segments[i].used {
		s := &t.segments[i]
		s.used = true
		if s.from == edge {
			edge = s.to
		} else {
			edge = s.from
		}
		points = append(points, t.crossing(edge, level))
		if t.meeting[edge][0] == i {
			i = t.meeting[edge][1]
		} else {
			i = t.meeting[edge][0]
		}
	}
	return points
}

// crossing gives the point of an edge at which the value is level; both its triangles get the same bits.
func (t *contourTracer) crossing(edge int32, level float64) orb.Point {
	a, b := t.edges[edge][0], t.edges[edge][1]
	va, vb := t.values[a], t.values[b]
	share := (level/2 - va/2) / (vb/2 - va/2) // halves, since the difference of finite numbers may not be finite
	share = math.Min(math.Max(share, 0), 1)
	if share == 1 {
		return t.node(b)
	}
	p, q := t.node(a), t.node(b)
	return orb.Point{p[0] + share*(q[0]-p[0]), p[1] + share*(q[1]-p[1])}
}

// fromLowest turns a closed line so that it begins at its first point in order of x, then y.
func fromLowest(points orb.LineString) orb.LineString {
	open := points[:len(points)-1]
	low := 0
	for i, p := range open {
		if before(p, open[low]) {
			low = i
		}
	}
	out := append(slices.Clone(open[low:]), open[:low]...)
	return append(out, out[0])
}

// withoutSpikes takes out repeated points and stretches that run out and back over the same points; little or nothing
// may be left.
func withoutSpikes(points orb.LineString, closed bool) orb.LineString {
	out := make(orb.LineString, 0, len(points))
	for _, p := range points {
		n := len(out)
		switch {
		case n > 0 && out[n-1] == p:
		case n > 1 && out[n-2] == p:
			out = out[:n-1]
		default:
			out = append(out, p)
		}
	}
	for closed && len(out) > 2 && out[1] == out[len(out)-2] {
		out = out[1 : len(out)-1]
	}
	return out
}
