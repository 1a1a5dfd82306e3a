package gisio

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"

	"github.com/paulmach/orb"
)

var errNoSize = errors.New("the geometry is empty, or of no size at 7 decimals of a degree")

// outputShape gives the type and the coordinates of a geometry as they are written: rounded, cut at ±180, turned.
func outputShape(g orb.Geometry) (kind string, coordinates orb.Geometry, err error) {
	switch g := g.(type) {
	case orb.Point:
		p, err := roundPoint(g)
		return "Point", inTurn(p), err
	case orb.MultiPoint:
		if len(g) == 0 {
			return "", nil, errNoSize
		}
		out := make(orb.MultiPoint, len(g))
		for i, p := range g {
			q, err := roundPoint(p)
			if err != nil {
				return "", nil, err
			}
			out[i] = inTurn(q)
		}
		return "MultiPoint", out, nil
	case orb.LineString:
		return outputLines(orb.MultiLineString{g}, false)
	case orb.MultiLineString:
		return outputLines(g, true)
	case orb.Polygon:
		return outputPolygons(orb.MultiPolygon{g}, false)
	case orb.MultiPolygon:
		return outputPolygons(g, true)
	}
	return "", nil, fmt.Errorf("a geometry of type %T cannot be written", g)
}

func inTurn(p orb.Point) orb.Point { return orb.Point{roundDegrees(normalLongitude(p[0])), p[1]} }

// turnsOf gives the whole turns by which a shape between two longitudes has to be moved, once for each piece of it:
// a piece lies between -180 and 180 after it was moved by -360 times the turn.
func turnsOf(west, east float64) (first, last int) {
	first = int(math.Floor((west + halfTurn) / longitudeWholeTurn))
	last = int(math.Ceil((east+halfTurn)/longitudeWholeTurn)) - 1
	return first, max(first, last)
}

func outputLines(m orb.MultiLineString, several bool) (string, orb.Geometry, error) {
	var out orb.MultiLineString
	for _, l := range m {
		points, err := roundPoints(l)
		if err != nil {
			return "", nil, err
		}
		if len(points) < 2 {
			return "", nil, errNoSize
		}
		out = append(out, cutLine(points)...)
	}
	switch {
	case len(out) == 0:
		return "", nil, errNoSize
	case len(out) == 1 && !several:
		return "LineString", out[0], nil
	}
	return "MultiLineString", out, nil
}

// cutLine cuts a line wherever it passes ±180 (and whole turns beyond) and brings the pieces into -180 to 180.
func cutLine(points []orb.Point) []orb.LineString {
	box := orb.LineString(points).Bound()
	if first, last := turnsOf(box.Min[0], box.Max[0]); first == last {
		return []orb.LineString{shifted(points, float64(-first*longitudeWholeTurn))}
	}
	var out []orb.LineString
	var piece orb.LineString
	turn := 0
	end := func() {
		piece = slices.Compact(piece)
		if len(piece) > 1 {
			for i := range piece {
				piece[i][0] = roundDegrees(piece[i][0])
			}
			out = append(out, piece)
		}
		piece = nil
	}
	for i := 1; i < len(points); i++ {
		for _, s := range cutEdge(points[i-1], points[i]) {
			t, _ := turnsOf(min(s.from[0], s.to[0]), max(s.from[0], s.to[0]))
			if t != turn {
				end()
				turn = t
			}
			by := float64(-t * longitudeWholeTurn)
			if len(piece) == 0 {
				piece = append(piece, orb.Point{s.from[0] + by, s.from[1]})
			}
			piece = append(piece, orb.Point{s.to[0] + by, s.to[1]})
		}
	}
	end()
	return out
}

// cutEdge cuts an edge at the odd multiples of 180 that lie strictly inside it.
func cutEdge(a, b orb.Point) []directed {
	west, east := min(a[0], b[0]), max(a[0], b[0])
	var seams []float64
	for _, seam := range [...]float64{-halfTurn, halfTurn} {
		if west < seam && seam < east {
			seams = append(seams, seam)
		}
	}
	if a[0] > b[0] {
		slices.Reverse(seams)
	}
	var out []directed
	from := a
	for _, seam := range seams {
		share := (seam - a[0]) / (b[0] - a[0])
		at := orb.Point{seam, roundDegrees(a[1] + share*(b[1]-a[1]))}
		out = append(out, directed{from, at})
		from = at
	}
	return append(out, directed{from, b})
}

func outputPolygons(m orb.MultiPolygon, several bool) (string, orb.Geometry, error) {
	var out orb.MultiPolygon
	for _, p := range m {
		var rounded orb.Polygon
		for j, ring := range p {
			points, err := roundPoints(ring)
			if err != nil {
				return "", nil, err
			}
			if len(points) < 4 || points[0] != points[len(points)-1] || onOneLine(points) {
				return "", nil, errNoSize
			}
			rounded = append(rounded, turned(points, j == 0))
		}
		if len(rounded) == 0 {
			return "", nil, errNoSize
		}
		pieces, err := cutPolygon(rounded)
		if err != nil {
			return "", nil, err
		}
		out = append(out, pieces...)
	}
	switch {
	case len(out) == 0:
		return "", nil, errNoSize
	case len(out) == 1 && !several:
		return "Polygon", out[0], nil
	}
	return "MultiPolygon", out, nil
}

// cutPolygon cuts a polygon along ±180 and brings the pieces into -180 to 180.
func cutPolygon(p orb.Polygon) (orb.MultiPolygon, error) {
	box := p[0].Bound()
	first, last := turnsOf(box.Min[0], box.Max[0])
	if first == last {
		out := make(orb.Polygon, len(p))
		for i, ring := range p {
			out[i] = shifted(ring, float64(-first*longitudeWholeTurn))
		}
		return orb.MultiPolygon{out}, nil
	}
	var out orb.MultiPolygon
	for turn := first; turn <= last; turn++ {
		seam := float64(turn*longitudeWholeTurn - halfTurn)
		edges := stripEdges(p, seam, seam+longitudeWholeTurn)
		pieces, ok := assemble(chain(edges))
		if !ok {
			return nil, errors.New("the polygon cannot be cut at the antimeridian")
		}
		for _, piece := range pieces {
			for i, ring := range piece {
				piece[i] = shifted(ring, float64(-turn*longitudeWholeTurn))
				for k := range piece[i] {
					piece[i][k][0] = roundDegrees(piece[i][k][0])
				}
			}
			out = append(out, piece)
		}
	}
	return out, nil
}

// stripEdges gives the edges of the piece of a polygon between two longitudes, closed along both of them.
func stripEdges(p orb.Polygon, west, east float64) []directed {
	var edges []directed
	for _, ring := range p {
		for i := 1; i < len(ring); i++ {
			for _, e := range cutEdge(ring[i-1], ring[i]) {
				middle := e.from[0]/2 + e.to[0]/2
				if middle > west && middle < east {
					edges = append(edges, e)
				}
			}
		}
	}
	inner := len(edges)
	edges = append(edges, seamEdges(edges[:inner], east, true)...)
	return append(edges, seamEdges(edges[:inner], west, false)...)
}

// seamEdges closes a piece along one longitude: where an edge arrives there, the outline goes on to the next place
// where one leaves, northwards along the eastern side, southwards along the western.
func seamEdges(edges []directed, longitude float64, north bool) []directed {
	type event struct {
		along  float64 // latitude in the direction of the seam
		leaves bool
	}
	direction := 1.0
	if !north {
		direction = -1
	}
	var events []event
	for _, e := range edges {
		if e.to[0] == longitude {
			events = append(events, event{direction * e.to[1], false})
		}
		if e.from[0] == longitude {
			events = append(events, event{direction * e.from[1], true})
		}
	}
	slices.SortStableFunc(events, func(a, b event) int { return cmp.Compare(a.along, b.along) })
	var out []directed
	open, from := 0, 0.0
	step := func(e event) {
		if e.leaves {
			if open--; open == 0 && e.along != from {
				out = append(out, directed{orb.Point{longitude, direction * from}, orb.Point{longitude, direction * e.along}})
			}
			return
		}
		if open++; open == 1 {
			from = e.along
		}
	}
	for i := 0; i < len(events); {
		j := i
		for j < len(events) && events[j].along == events[i].along {
			j++
		}
		// At one latitude, what closes an open stretch comes first, what opens one comes last.
		for _, leaving := range [2]bool{open > 0, open <= 0} {
			for _, e := range events[i:j] {
				if e.leaves == leaving {
					step(e)
				}
			}
		}
		i = j
	}
	return out
}
