package gisio

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/paulmach/orb"
)

// box makes a rectangle.
func box(x0, y0, x1, y1 float64) orb.Polygon {
	return orb.Polygon{{{x0, y0}, {x1, y0}, {x1, y1}, {x0, y1}, {x0, y0}}}
}

func TestOverlap(t *testing.T) {
	ring := orb.Polygon{box(0, 0, 10, 10)[0], {{2, 2}, {2, 8}, {8, 8}, {8, 2}, {2, 2}}}
	for _, c := range []struct {
		reason string
		a, b   orb.Polygon
		want   bool
	}{
		{"apart", box(0, 0, 1, 1), box(3, 0, 4, 1), false},
		{"neighbours along a border", box(0, 0, 1, 1), box(1, 0, 2, 1), false},
		{"neighbours, digitised twice", box(0, 0, 1, 1), box(0.95, 0, 2, 1), false},
		{"touching in a corner", box(0, 0, 1, 1), box(1, 1, 2, 2), false},
		{"overlap by a corner", box(0, 0, 2, 2), box(1, 1, 3, 3), true},
		{"one inside the other", box(0, 0, 4, 4), box(1, 1, 2, 2), true},
		{"the same", box(0, 0, 2, 2), box(0, 0, 2, 2), true},
		{"a cross, no vertex inside", box(0, 1, 9, 2), box(4, 0, 5, 3), true},
		{"a lake in its hole", ring, box(2, 2, 8, 8), false},
		{"a lake over the ring", ring, box(3, 3, 9, 7), true},
		{"nothing", nil, box(0, 0, 1, 1), false},
	} {
		if got := overlap(c.a, c.b, 0.1); got != c.want {
			t.Errorf("%s: %v, want %v", c.reason, got, c.want)
		}
		if got := overlap(c.b, c.a, 0.1); got != c.want {
			t.Errorf("%s, exchanged: %v, want %v", c.reason, got, c.want)
		}
	}
}

func TestOverlapOfRandomBoxesIsThatOfTheirSides(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 11))
	const by = 0.05
	for range 2000 {
		a, b := [4]float64{r.Float64(), r.Float64(), 1 + r.Float64(), 1 + r.Float64()}, [4]float64{}
		b[0], b[1] = 2*r.Float64(), 2*r.Float64()
		b[2], b[3] = b[0]+0.5+r.Float64(), b[1]+0.5+r.Float64()
		w := math.Min(a[2], b[2]) - math.Max(a[0], b[0])
		h := math.Min(a[3], b[3]) - math.Max(a[1], b[1])
		got := overlap(box(a[0], a[1], a[2], a[3]), box(b[0], b[1], b[2], b[3]), by)
		if w <= by || h <= by { // thinner than the distance that counts
			if got {
				t.Fatalf("%v and %v: overlap of %v by %v", a, b, w, h)
			}
		} else if w > 2*by && h > 2*by && !got { // a corner of the common part is deep in one of the two, or the sides cross
			t.Fatalf("%v and %v: no overlap of %v by %v", a, b, w, h)
		}
	}
}

func TestPolygonContains(t *testing.T) {
	ring := orb.Polygon{box(0, 0, 10, 10)[0], {{2, 2}, {2, 8}, {8, 8}, {8, 2}, {2, 2}}}
	for _, c := range []struct {
		at   orb.Point
		want bool
	}{{orb.Point{1, 1}, true}, {orb.Point{5, 5}, false}, {orb.Point{0, 5}, true}, {orb.Point{2, 5}, true}, {orb.Point{11, 5}, false}} {
		if got := polygonContains(ring, c.at); got != c.want {
			t.Errorf("%v: %v, want %v", c.at, got, c.want)
		}
	}
}

func TestDistances(t *testing.T) {
	line := orb.LineString{{0, 0}, {10, 0}, {10, 10}}
	for at, want := range map[orb.Point]float64{{5, 3}: 3, {13, 14}: 5, {-3, -4}: 5, {10, 5}: 0} {
		if got := distanceToLine(line, at); math.Abs(got-want) > 1e-12 { // whole numbers: a few roundings
			t.Errorf("%v: %v, want %v", at, got, want)
		}
	}
	if got := distanceToLine(orb.LineString{{3, 4}}, orb.Point{0, 0}); got != 5 {
		t.Errorf("a line of one point: %v, want 5", got)
	}
	if got := shareAlong(orb.LineString{{0, 1}, {10, 1}}, line, 1); got != 1 {
		t.Errorf("share along: %v, want 1", got)
	}
}
