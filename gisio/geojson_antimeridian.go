package gisio

import (
	"cmp"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

// An edge that spans more than half a turn of longitude was meant to go the other way round.
const halfTurn = 180 // [degree]

// unwrap lets the longitudes of a path run on where an edge jumps from one side of the antimeridian to the other, and
// warns of it. A ring that does not come back to its first longitude goes round a pole and is an error.
func (r *layerReader) unwrap(p path, ring bool, name string) (path, bool) {
	if r.projected {
		return p, true
	}
	shift, jumpAt := 0.0, int32(-1)
	for i := 1; i < len(p.points); i++ {
		x := p.points[i][0] + shift
		if d := x - p.points[i-1][0]; math.Abs(d) > halfTurn {
			turn := math.Copysign(longitudeWholeTurn, d)
			shift -= turn
			x -= turn
			if jumpAt < 0 {
				jumpAt = p.at[i]
			}
		}
		p.points[i][0] = x
	}
	if jumpAt < 0 {
		return p, true
	}
	if ring && shift != 0 {
		r.add(Error, int(jumpAt), name, "going right round the Earth", "an outline that comes back to its start", "cut it at the antimeridian")
		return p, false
	}
	r.add(Warning, int(jumpAt), name, "drawn with an edge longer than 180 degrees", "shapes cut at the antimeridian (RFC 7946, section 3.1.9)",
		"read as crossing the antimeridian, with longitudes that run on past ±180")
	return p, true
}

// besideRing moves a hole by whole turns to where its outer ring lies.
func besideRing(hole, outer orb.Ring) orb.Ring {
	h, o := hole.Bound(), outer.Bound()
	turns := math.Round(((o.Min[0]+o.Max[0])/2 - (h.Min[0]+h.Max[0])/2) / longitudeWholeTurn)
	if turns == 0 {
		return hole
	}
	return shifted(hole, turns*longitudeWholeTurn)
}

func shifted(points []orb.Point, by float64) []orb.Point {
	out := make([]orb.Point, len(points))
	for i, p := range points {
		out[i] = orb.Point{p[0] + by, p[1]}
	}
	return out
}

// touchesBothSides tells whether some boxes end at 180 and others begin at -180.
func touchesBothSides(boxes []orb.Bound) bool {
	east, west := false, false
	for _, b := range boxes {
		east = east || b.Max[0] == halfTurn && b.Min[0] > -halfTurn
		west = west || b.Min[0] == -halfTurn && b.Max[0] < halfTurn
	}
	return east && west
}

// joinParts joins the parts of a polygon that was cut at the antimeridian: parts of the western hemisphere are moved
// on by a whole turn, and edges that two parts share along 180 are taken out. Rings must run the right way round. It tells whether anything changed.
func joinParts(m orb.MultiPolygon) (orb.MultiPolygon, bool) {
	boxes := make([]orb.Bound, len(m))
	for i, p := range m {
		boxes[i] = p[0].Bound()
	}
	if !touchesBothSides(boxes) {
		return m, false
	}
	moved := make(orb.MultiPolygon, len(m))
	for i, p := range m {
		moved[i] = p
		if boxes[i].Max[0] <= 0 {
			moved[i] = make(orb.Polygon, len(p))
			for j, ring := range p {
				moved[i][j] = shifted(ring, longitudeWholeTurn)
			}
		}
	}
	edges, cancelled := cancelSeam(moved)
	if !cancelled {
		return moved, true
	}
	if joined, ok := assemble(chain(edges)); ok {
		return joined, true
	}
	return moved, true
}

// joinLines does the same for lines: a line that ends at 180 goes on with the next one, if that begins there.
func joinLines(m orb.MultiLineString) orb.MultiLineString {
	boxes := make([]orb.Bound, len(m))
	for i, l := range m {
		boxes[i] = l.Bound()
	}
	if !touchesBothSides(boxes) {
		return m
	}
	var out orb.MultiLineString
	for i, l := range m {
		if boxes[i].Max[0] <= 0 {
			l = shifted(l, longitudeWholeTurn)
		}
		if n := len(out); n > 0 {
			last := out[n-1]
			if end := last[len(last)-1]; end == l[0] && end[0] == halfTurn {
				out[n-1] = append(slices.Clone(last), l[1:]...)
				continue
			}
		}
		out = append(out, l)
	}
	return out
}

type directed struct{ from, to orb.Point }

func (d directed) reversed() directed { return directed{d.to, d.from} }

// cancelSeam gives all edges of m, those along longitude 180 split at each other's ends and taken out in pairs of
// opposite direction where the two belong to different parts.
func cancelSeam(m orb.MultiPolygon) (edges []directed, cancelled bool) {
	type seamEdge struct {
		directed
		part int
	}
	var seam []seamEdge
	var latitudes []float64
	for part, p := range m {
		for _, ring := range p {
			for i := 1; i < len(ring); i++ {
				e := directed{ring[i-1], ring[i]}
				if e.from[0] == halfTurn && e.to[0] == halfTurn {
					seam = append(seam, seamEdge{e, part})
					latitudes = append(latitudes, e.from[1], e.to[1])
				} else {
					edges = append(edges, e)
				}
			}
		}
	}
	slices.Sort(latitudes)
	latitudes = slices.Compact(latitudes)
	waiting := make(map[directed][]int) // pieces without a partner yet, as indices in pieces
	var pieces []seamEdge
	var gone []bool
	for _, e := range seam {
		low, high := min(e.from[1], e.to[1]), max(e.from[1], e.to[1])
		i, _ := slices.BinarySearch(latitudes, low)
		for ; latitudes[i] < high; i++ {
			piece := directed{orb.Point{halfTurn, latitudes[i]}, orb.Point{halfTurn, latitudes[i+1]}}
			if e.from[1] > e.to[1] {
				piece = piece.reversed()
			}
			k := len(pieces)
			pieces, gone = append(pieces, seamEdge{piece, e.part}), append(gone, false)
			partners := waiting[piece.reversed()]
			at := slices.IndexFunc(partners, func(j int) bool { return pieces[j].part != e.part })
			if at < 0 {
				waiting[piece] = append(waiting[piece], k)
				continue
			}
			gone[k], gone[partners[at]], cancelled = true, true, true
			waiting[piece.reversed()] = slices.Delete(partners, at, at+1)
		}
	}
	for k, piece := range pieces {
		if !gone[k] {
			edges = append(edges, piece.directed)
		}
	}
	return edges, cancelled
}

// chain puts directed edges together to rings. Where several go on from a point, the one furthest to the left is
// taken, which keeps to the boundary of one area; a walk that meets itself is split there into rings of its own.
func chain(edges []directed) []orb.Ring {
	leaving := make(map[orb.Point][]int)
	for i, e := range edges {
		leaving[e.from] = append(leaving[e.from], i)
	}
	used := make([]bool, len(edges))
	var rings []orb.Ring
	for first := range edges {
		if used[first] {
			continue
		}
		walk := []orb.Point{edges[first].from}
		at := map[orb.Point]int{edges[first].from: 0}
		for i := first; i >= 0; i = nextEdge(edges, leaving, used, i) {
			used[i] = true
			p := edges[i].to
			start, met := at[p]
			if !met {
				at[p] = len(walk)
				walk = append(walk, p)
				continue
			}
			ring := append(slices.Clone(walk[start:]), p)
			for _, q := range walk[start+1:] {
				delete(at, q)
			}
			walk = walk[:start+1]
			rings = append(rings, ring)
		}
	}
	return rings
}

// nextEdge gives the unused edge that goes on from the end of edge i, or -1.
func nextEdge(edges []directed, leaving map[orb.Point][]int, used []bool, i int) int {
	e := edges[i]
	back := math.Atan2(e.from[1]-e.to[1], e.from[0]-e.to[0])
	best, least := -1, math.Inf(1)
	for _, j := range leaving[e.to] {
		if used[j] {
			continue
		}
		clockwise := back - math.Atan2(edges[j].to[1]-e.to[1], edges[j].to[0]-e.to[0])
		if clockwise <= 0 {
			clockwise += 2 * math.Pi
		}
		if clockwise < least {
			best, least = j, clockwise
		}
	}
	return best
}

// assemble puts holes into the outer rings that they lie in; each polygon keeps the order in which rings come. It gives
// false where a ring has no area or a hole lies in no outer ring, so that the faulty parts are better judged unjoined.
func assemble(rings []orb.Ring) (orb.MultiPolygon, bool) {
	var m orb.MultiPolygon
	var holes []orb.Ring
	for _, ring := range rings {
		switch {
		case onOneLine(ring):
			return nil, false
		case leftTurning(ring):
			m = append(m, orb.Polygon{ring})
		default:
			holes = append(holes, ring)
		}
	}
	slices.SortStableFunc(m, func(a, b orb.Polygon) int {
		return cmp.Compare(a[0].Bound().Min[0], b[0].Bound().Min[0])
	})
	for _, hole := range holes {
		i := slices.IndexFunc(m, func(p orb.Polygon) bool { return ringWithin(hole, p[0]) })
		if i < 0 {
			return nil, false
		}
		m[i] = append(m[i], hole)
	}
	return m, true
}

// ringWithin tells whether the first point of ring off outer lies inside it.
func ringWithin(ring, outer orb.Ring) bool {
	for _, p := range ring {
		if at := sideOfRing(p, outer); at != onRing {
			return at == inside
		}
	}
	return false
}
