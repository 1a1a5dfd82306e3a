package mesh

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

const (
	// largestCoordinate keeps products of four coordinates, as in the in-circle test, far from overflow [m].
	largestCoordinate = 1e9
	// smallestExtent: an outline's diagonal per largest coordinate below which vertices cannot be told apart safely; with
	// 2^-53 rounding it leaves seven digits across the outline.
	smallestExtent = 1e-9
)

// resolvedTolerance is the tolerance asked for, or the default share of the diagonal.
func resolvedTolerance(d Domain, tol float64) float64 {
	if tol > 0 {
		return tol
	}
	b := emptyBox()
	for _, p := range d.Outer {
		if finite(p) {
			b.join(box{p[0], p[1], p[0], p[1]})
		}
	}
	return defaultTolerance * math.Hypot(b.x1-b.x0, b.y1-b.y0)
}

// finite says whether a point can be used.
func finite(p orb.Point) bool {
	return math.Abs(p[0]) <= largestCoordinate && math.Abs(p[1]) <= largestCoordinate
}

// Validate checks a domain; the error is a *DomainError with every problem found. tol 0 = the default of Options.Tolerance.
// Crossings are found exactly (orientation tests after Shewchuk 1997).
func Validate(d Domain, tol float64) error {
	if problems := check(d, tol); len(problems) > 0 {
		return &DomainError{problems}
	}
	return nil
}

// checker collects problems.
type checker struct {
	d        Domain
	tol      float64
	problems []Problem
	rings    []orb.Ring // cleaned; empty when not to be looked at further
	whole    bool       // the outline has no problem of its own
}

// add files a problem.
func (c *checker) add(kind ProblemKind, at orb.Point, names []string, format string, args ...any) {
	c.problems = append(c.problems, Problem{kind, names, at, fmt.Sprintf(format, args...)})
}

// check lists what is wrong with a domain.
func check(d Domain, tol float64) []Problem {
	c := &checker{d: d, tol: resolvedTolerance(d, tol)}
	c.checkNumbers()
	c.cleanRings()
	set := newRingSet(c.rings)
	c.checkMeetings(set)
	c.checkHoles(set)
	c.checkPoints(set)
	return c.problems
}

// checkNumbers looks for coordinates and sizes that are no numbers, and for lines too short to be lines.
func (c *checker) checkNumbers() {
	look := func(name string, path []orb.Point) {
		bad, first := 0, -1
		for i, p := range path {
			if !finite(p) {
				bad++
				if first < 0 {
					first = i
				}
			}
		}
		if bad > 0 {
			c.add(NonFinite, path[first], []string{name}, "%s: vertex %d is %s: not a number within ±%g m (%d such)",
				name, first+1, place(path[first]), largestCoordinate, bad)
		}
	}
	for i, r := range allRings(c.d) {
		look(ownerName(c.d, i), r)
	}
	for i, l := range c.d.Lines {
		name := ownerName(c.d, 1+len(c.d.Holes)+i)
		look(name, l.Path)
		if !(l.Size >= 0) || math.IsInf(l.Size, 0) {
			c.add(BadSize, orb.Point{}, []string{name}, "%s: size %v m is no length; 0 means none", name, l.Size)
		}
		different := 0
		for j, p := range l.Path {
			if j == 0 || distance(p, l.Path[0]) > c.tol {
				different++
			}
		}
		if different < 2 && allFinite(l.Path) {
			c.add(TooFewVertices, firstOf(l.Path), []string{name}, "%s has %d vertices, all within %.3g m: a line needs two different ones",
				name, len(l.Path), c.tol)
		}
	}
	for _, p := range c.d.Points {
		look(pointName(p), []orb.Point{p.At})
		if !(p.Size >= 0) || math.IsInf(p.Size, 0) {
			c.add(BadSize, p.At, []string{pointName(p)}, "%s: size %v m is no length; 0 means none", pointName(p), p.Size)
		}
	}
}

// allFinite says whether all points can be used.
func allFinite(path []orb.Point) bool {
	for _, p := range path {
		if !finite(p) {
			return false
		}
	}
	return true
}

// firstOf is the first point, or the origin.
func firstOf(path []orb.Point) orb.Point {
	if len(path) > 0 {
		return path[0]
	}
	return orb.Point{}
}

// cleanRings drops repeats and looks at each ring by itself.
func (c *checker) cleanRings() {
	for i, r := range allRings(c.d) {
		c.rings = append(c.rings, nil)
		name := ownerName(c.d, i)
		if !allFinite(r) {
			continue
		}
		clean := dropRepeats(r, c.tol)
		if i == 0 && c.tooSmall(clean) {
			continue
		}
		switch {
		case len(clean) < 3:
			c.add(TooFewVertices, firstOf(r), []string{name}, "%s has %d different vertices (farther apart than %.3g m): a ring needs three",
				name, len(clean), c.tol)
			continue
		case inLine(clean):
			c.add(ZeroArea, r[0], []string{name}, "%s has no area: its %d vertices lie on one straight line through %s", name, len(clean), place(r[0]))
			continue
		}
		clean, tips := cutSpikes(clean)
		for _, p := range tips {
			c.add(Spike, p, []string{name}, "%s runs out to %s and straight back: a spike without width", name, place(p))
		}
		if len(tips) > 0 && i == 0 || len(clean) < 3 {
			continue
		}
		c.rings[i] = clean
		c.whole = c.whole || i == 0
	}
}

// tooSmall files an outline whose size is lost in its coordinates' rounding.
func (c *checker) tooSmall(r orb.Ring) bool {
	b := emptyBox()
	for _, p := range r {
		b.join(box{p[0], p[1], p[0], p[1]})
	}
	diagonal := math.Hypot(b.x1-b.x0, b.y1-b.y0)
	largest := max(math.Abs(b.x0), math.Abs(b.x1), math.Abs(b.y0), math.Abs(b.y1))
	if len(r) < 2 || diagonal > smallestExtent*largest {
		return false
	}
	c.add(ZeroArea, r[0], []string{"outline"}, "the outline is %.3g m across at coordinates of %.3g m: too small to be resolved", diagonal, largest)
	return true
}

// found is the first of several meetings of a kind, and their number.
type found struct {
	at    orb.Point
	count int
}

// checkMeetings looks at all pairs of ring segments that come near each other, and files one problem for each pair of rings.
func (c *checker) checkMeetings(set *ringSet) {
	n := len(c.rings)
	seen := make(map[[2]int]*[4]found) // read in a fixed order below
	for i := range set.segments {
		s := &set.segments[i]
		set.tree.each(s.bounds(0), func(j int) bool {
			o := &set.segments[j]
			if j <= i {
				return true
			}
			kind, at := meet(s, o)
			if kind == apart || s.ring == o.ring && kind == touching && (o.index == s.index+1 || s.index == 0 && o.index == o.of-1) {
				return true
			}
			key := [2]int{s.ring, o.ring}
			if seen[key] == nil {
				seen[key] = new([4]found)
			}
			f := &seen[key][kind]
			if f.count == 0 {
				f.at = at
			}
			if f.count == 0 || f.at != at {
				f.count++
			}
			return true
		})
	}
	for a := range n {
		if f := seen[[2]int{a, a}]; f != nil {
			c.selfMeeting(a, f)
		}
	}
	for key := range pairsInOrder(seen, n) {
		c.ringsMeeting(key[0], key[1], seen[key])
	}
}

// pairsInOrder gives the pairs of different rings in ascending order.
func pairsInOrder(seen map[[2]int]*[4]found, n int) func(yield func([2]int) bool) {
	return func(yield func([2]int) bool) {
		for a := range n {
			for b := a + 1; b < n; b++ {
				if seen[[2]int{a, b}] != nil && !yield([2]int{a, b}) {
					return
				}
			}
		}
	}
}

// selfMeeting files what a ring does to itself.
func (c *checker) selfMeeting(ring int, f *[4]found) {
	name := ownerName(c.d, ring)
	switch {
	case f[crossing].count > 0:
		c.add(RingCrossesItself, f[crossing].at, []string{name}, "%s crosses itself at %s (%d place(s))", name, place(f[crossing].at), f[crossing].count)
	case f[overlapping].count > 0:
		c.add(RingCrossesItself, f[overlapping].at, []string{name}, "%s runs along itself at %s (%d place(s))", name, place(f[overlapping].at), f[overlapping].count)
	case f[touching].count > 0:
		c.add(RingTouchesItself, f[touching].at, []string{name}, "%s touches itself at %s (%d place(s)): split it or move the vertex",
			name, place(f[touching].at), f[touching].count)
	}
	if ring == 0 {
		c.whole = false
	}
	c.rings[ring] = nil
}

// ringsMeeting files what two rings do to each other. A single touch is allowed.
func (c *checker) ringsMeeting(a, b int, f *[4]found) {
	if c.rings[a] == nil || c.rings[b] == nil {
		return
	}
	names := []string{ownerName(c.d, a), ownerName(c.d, b)}
	switch {
	case f[crossing].count > 0 && a == 0:
		c.add(HoleCrossesOutline, f[crossing].at, names, "%s crosses the outline at %s", names[1], place(f[crossing].at))
	case f[crossing].count > 0:
		c.add(HolesOverlap, f[crossing].at, names, "%s and %s overlap: they cross at %s", names[0], names[1], place(f[crossing].at))
	case f[overlapping].count > 0:
		c.add(HoleSharesEdge, f[overlapping].at, names, "%s shares an edge with %s at %s", names[1], names[0], place(f[overlapping].at))
	default:
		return
	}
	c.rings[b] = nil
}

// checkHoles looks for holes outside the outline or inside each other.
func (c *checker) checkHoles(set *ringSet) {
	for i := 1; i < len(c.rings); i++ {
		if c.rings[i] == nil || c.rings[0] == nil {
			continue
		}
		name := ownerName(c.d, i)
		in, out := c.sides(set, i, 0)
		if out > 0 && in > 0 {
			c.add(HoleCrossesOutline, c.rings[i][0], []string{"outline", name}, "%s crosses the outline at a vertex", name)
			c.rings[i] = nil
		} else if out > 0 {
			c.add(HoleOutside, c.rings[i][0], []string{name}, "%s lies outside the outline, for instance its vertex %s", name, place(c.rings[i][0]))
			c.rings[i] = nil
		}
	}
	boxes := make([]box, len(c.rings))
	for i, r := range c.rings {
		boxes[i] = emptyBox()
		for _, p := range r {
			boxes[i].join(box{p[0], p[1], p[0], p[1]})
		}
	}
	for i := 1; i < len(c.rings); i++ {
		for j := 1; j < len(c.rings); j++ {
			if i == j || c.rings[i] == nil || c.rings[j] == nil || !boxes[i].meets(&boxes[j]) {
				continue
			}
			if in, out := c.sides(set, j, i); in > 0 {
				names := []string{ownerName(c.d, i), ownerName(c.d, j)}
				kind, text := HoleInHole, "lies inside"
				if out > 0 {
					kind, text = HolesOverlap, "overlaps"
				}
				c.add(kind, c.rings[j][0], names, "%s %s %s", names[1], text, names[0])
				c.rings[j] = nil
			}
		}
	}
}

// sides counts vertices and edge middles of ring i strictly inside and outside ring j. Rings that do not touch need one vertex.
func (c *checker) sides(set *ringSet, i, j int) (in, out int) {
	count := func(p orb.Point) side {
		s := set.sideOf(p, j)
		switch s {
		case insideRing:
			in++
		case outsideRing:
			out++
		}
		return s
	}
	r := c.rings[i]
	touches := false
	for k := range r {
		touches = count(r[k]) == onRing || touches
	}
	if in == 0 && out == 0 {
		for k, p := range r {
			q := r[(k+1)%len(r)]
			count(orb.Point{(p[0] + q[0]) / 2, (p[1] + q[1]) / 2})
		}
	}
	return in, out
}

// checkPoints looks for points outside the domain and at the same place.
func (c *checker) checkPoints(set *ringSet) {
	var grid vertexGrid
	grid.init(max(c.tol, math.SmallestNonzeroFloat64))
	var taken []vertex
	var owner []int
	for i, p := range c.d.Points {
		if !finite(p.At) || !(c.tol > 0) {
			continue
		}
		if c.whole && !set.near(p.At, c.tol) {
			c.checkInside(set, p)
		}
		if v, distance := grid.near(taken, p.At[0], p.At[1]); v >= 0 {
			first := c.d.Points[owner[v]]
			c.add(PointsCoincide, p.At, []string{pointName(first), pointName(p)}, "%s and %s lie at the same place, %s: %.3g m apart, tolerance %.3g m",
				pointName(first), pointName(p), place(p.At), distance, c.tol)
			continue
		}
		grid.put(int32(len(taken)), p.At[0], p.At[1])
		taken = append(taken, vertex{x: p.At[0], y: p.At[1]})
		owner = append(owner, i)
	}
}

// checkInside files a point that is outside the outline or in a hole.
func (c *checker) checkInside(set *ringSet, p Point) {
	name := pointName(p)
	if set.sideOf(p.At, 0) != insideRing {
		c.add(PointOutside, p.At, []string{name}, "%s at %s lies outside the outline", name, place(p.At))
		return
	}
	for i := 1; i < len(c.rings); i++ {
		if c.rings[i] != nil && set.sideOf(p.At, i) == insideRing {
			c.add(PointOutside, p.At, []string{name, ownerName(c.d, i)}, "%s at %s lies in %s", name, place(p.At), ownerName(c.d, i))
			return
		}
	}
}

// checkAll lists what is wrong with options and domain.
func checkAll(d Domain, o Options) []Problem {
	problems := checkOptions(o)
	if !(o.Tolerance >= 0) || math.IsInf(o.Tolerance, 0) {
		o.Tolerance = 0
	}
	return append(problems, check(d, o.Tolerance)...)
}

// checkOptions lists what is wrong with options.
func checkOptions(o Options) []Problem {
	var out []Problem
	bad := func(name string, value any, want string) {
		out = append(out, Problem{BadOption, []string{name}, orb.Point{}, fmt.Sprintf("option %s is %v: %s", name, value, want)})
	}
	if o.Nodes < 0 || o.Nodes > mostNodes {
		bad("Nodes", o.Nodes, fmt.Sprintf("want 0 to %d", mostNodes))
	}
	if o.MaxNodes < 0 || o.MaxNodes > mostNodes {
		bad("MaxNodes", o.MaxNodes, fmt.Sprintf("want 0 to %d", mostNodes))
	}
	if !(o.Coarsest >= 0) || math.IsInf(o.Coarsest, 0) {
		bad("Coarsest", o.Coarsest, "want a length, or 0 for none")
	}
	for _, z := range o.Sizes {
		if !(z.Edge > 0 && z.Growth >= 0 && z.Growth <= largestGrowth && math.Abs(z.At[0]) < math.Inf(1) && math.Abs(z.At[1]) < math.Inf(1)) || math.IsInf(z.Edge, 0) {
			bad("Sizes", z, fmt.Sprintf("want a finite place, a length above 0 and a growth of 0 to %g", largestGrowth))
			break
		}
	}
	if !(o.DetailGrowth >= 0 && o.DetailGrowth <= largestGrowth) {
		bad("DetailGrowth", o.DetailGrowth, fmt.Sprintf("want 0 (default) to %g", largestGrowth))
	}
	if !(o.Growth >= 0 && o.Growth <= largestGrowth) {
		bad("Growth", o.Growth, fmt.Sprintf("want 0 (default) to %g", largestGrowth))
	}
	if !(o.MinAngleDeg >= 0 && o.MinAngleDeg <= largestAngleDeg) {
		bad("MinAngleDeg", o.MinAngleDeg, fmt.Sprintf("want 0 (default) to %d", largestAngleDeg))
	}
	if !(o.Tolerance >= 0) || math.IsInf(o.Tolerance, 0) {
		bad("Tolerance", o.Tolerance, "want a length, or 0 for the default")
	}
	return out
}
