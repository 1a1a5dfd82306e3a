package gisio

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/paulmach/orb"
)

// Points that are nearly on one line: the filtered sign is that of rational arithmetic.
func TestOrientationIsExact(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 1))
	nudge := func(x float64) float64 {
		for range random.IntN(4) {
			x = math.Nextafter(x, math.Inf(1-2*random.IntN(2)))
		}
		return x
	}
	zero := 0
	for i := range 4000 {
		scale := math.Pow(2, float64(random.IntN(40)-20))
		if i%10 == 0 {
			scale = math.Pow(2, float64(random.IntN(2000)-1000)) // products under- and overflow
		}
		a := orb.Point{scale * random.Float64(), scale * random.Float64()}
		b := orb.Point{scale * random.Float64(), scale * random.Float64()}
		s := float64(random.IntN(9)) / 4
		c := orb.Point{nudge(a[0] + s*(b[0]-a[0])), nudge(a[1] + s*(b[1]-a[1]))}
		want := orientationRational(a, b, c)
		if want == 0 {
			zero++
		}
		for _, p := range [][3]orb.Point{{a, b, c}, {b, c, a}, {c, a, b}} {
			if got := orientation(p[0], p[1], p[2]); got != want {
				t.Fatalf("%v: %d, want %d", p, got, want)
			}
		}
		if got := orientation(b, a, c); got != -want {
			t.Fatalf("swapped: %d, want %d", got, -want)
		}
	}
	if zero < 100 {
		t.Errorf("only %d of the cases were straight: the test is too easy", zero)
	}
}

func TestSegmentContact(t *testing.T) {
	for _, c := range []struct {
		a, b, c, d orb.Point
		want       contact
		at         orb.Point
	}{
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{0, 4}, orb.Point{4, 0}, contactCross, orb.Point{}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{2, 2}, orb.Point{4, 0}, contactTouch, orb.Point{2, 2}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{4, 4}, orb.Point{4, 0}, contactTouch, orb.Point{4, 4}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{4, 4}, orb.Point{8, 8}, contactTouch, orb.Point{4, 4}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{3, 3}, orb.Point{8, 8}, contactOverlap, orb.Point{3, 3}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{5, 5}, orb.Point{8, 8}, contactNone, orb.Point{}},
		{orb.Point{0, 0}, orb.Point{4, 4}, orb.Point{1, 1}, orb.Point{2, 2}, contactOverlap, orb.Point{1, 1}},
		{orb.Point{0, 0}, orb.Point{0, 4}, orb.Point{0, 5}, orb.Point{0, 8}, contactNone, orb.Point{}},
		{orb.Point{0, 0}, orb.Point{4, 0}, orb.Point{0, 1}, orb.Point{4, 1}, contactNone, orb.Point{}},
		{orb.Point{0, 0}, orb.Point{4, 0}, orb.Point{2, math.SmallestNonzeroFloat64}, orb.Point{2, 1}, contactNone, orb.Point{}},
	} {
		for i := range 8 { // either segment first, either end first
			p, q, r, s := c.a, c.b, c.c, c.d
			if i&1 != 0 {
				p, q = q, p
			}
			if i&2 != 0 {
				r, s = s, r
			}
			if i&4 != 0 {
				p, q, r, s = r, s, p, q
			}
			kind, at := segmentContact(p, q, r, s)
			if kind != c.want || at != c.at {
				t.Errorf("%v-%v and %v-%v: %v at %v, want %v at %v", p, q, r, s, kind, at, c.want, c.at)
			}
		}
	}
}

func TestSideOfRing(t *testing.T) {
	ring := []orb.Point{{0, 0}, {4, 0}, {4, 4}, {2, 2}, {0, 4}, {0, 0}}
	for p, want := range map[orb.Point]side{
		{1, 1}: inside, {2, 3}: outside, {2, 2}: onRing, {0, 2}: onRing, {4, 4}: onRing, {2, 0}: onRing, {3, 3}: onRing,
		{-1, 0}: outside, {-1, 4}: outside, {5, 2}: outside, {2, math.Nextafter(2, 0)}: inside, {2, math.Nextafter(2, 3)}: outside,
	} {
		if got := sideOfRing(p, ring); got != want {
			t.Errorf("%v: %v, want %v", p, got, want)
		}
	}
}

// The tree finds what looking at every pair finds.
func TestFindContactsAgainstEveryPair(t *testing.T) {
	for seed := range uint64(60) {
		random := rand.New(rand.NewPCG(seed, 2))
		var rings [][]orb.Point
		for range 1 + random.IntN(4) {
			var ring []orb.Point
			for range 3 + random.IntN(30) {
				p := orb.Point{random.Float64(), random.Float64()}
				if seed%2 == 0 {
					p = orb.Point{float64(random.IntN(12)), float64(random.IntN(12))}
				}
				if n := len(ring); n == 0 || ring[n-1] != p {
					ring = append(ring, p)
				}
			}
			if ring = append(ring, ring[0]); ring[len(ring)-2] == ring[0] {
				ring = ring[:len(ring)-1]
			}
			if len(ring) > 3 {
				rings = append(rings, ring)
			}
		}
		want := 0
		all := newContactSearch(rings, math.MaxInt)
		for i, e := range all.edges {
			for _, f := range all.edges[:i] {
				n := all.ringLen[e.ring]
				if e.ring == f.ring && (e.index == f.index+1 || f.index == 0 && e.index == n-1) {
					continue
				}
				if kind, _ := segmentContact(e.a, e.b, f.a, f.b); kind != contactNone {
					want++
				}
			}
		}
		got := findContacts(rings, math.MaxInt)
		if len(got) != want {
			t.Fatalf("seed %d: %d contacts, want %d", seed, len(got), want)
		}
		for i, c := range got {
			if i > 0 && c.e == got[i-1].e && c.f == got[i-1].f {
				t.Fatalf("seed %d: %v twice", seed, c)
			}
		}
	}
}

// Ten thousand vertices do not take a hundred million pairs: stars, combs straight and slanting, and a spiral.
func TestFindContactsIsNotQuadratic(t *testing.T) {
	const n = 10000
	turnedBy := func(ring []orb.Point, angle float64) []orb.Point {
		sin, cos := math.Sincos(angle)
		out := make([]orb.Point, len(ring))
		for i, p := range ring {
			out[i] = orb.Point{cos*p[0] - sin*p[1], sin*p[0] + cos*p[1]}
		}
		return out
	}
	var star, comb, spiral, back []orb.Point
	for i := range n {
		r := 1 + 0.5*float64(i%2)
		sin, cos := math.Sincos(2 * math.Pi * float64(i) / n)
		star = append(star, orb.Point{r * cos, r * sin})
	}
	for i := range n / 2 {
		x := float64(i) / (n / 2)
		comb = append(comb, orb.Point{x, float64((i + 1) / 2 % 2)})
	}
	comb = append(comb, orb.Point{1, -1}, orb.Point{0, -1})
	for i := range n / 2 {
		a := 40 * math.Pi * float64(i) / (n / 2)
		sin, cos := math.Sincos(a)
		spiral = append(spiral, orb.Point{(1 + a) * cos, (1 + a) * sin})
		back = append(back, orb.Point{(3 + a) * cos, (3 + a) * sin})
	}
	for i := range back {
		spiral = append(spiral, back[len(back)-1-i])
	}
	for name, c := range map[string]struct {
		ring []orb.Point
		most int // pairs for each vertex
	}{
		// Neighbouring rays of the star are all but parallel, and most slant against the octagon.
		"star": {star, 200}, "comb": {comb, 20}, "comb at 45 degrees": {turnedBy(comb, math.Pi/4), 20}, "spiral": {spiral, 40},
		// Teeth at the worst angle between two sides of the octagon overlap half the others' octagons.
		"comb at 22.5 degrees": {turnedBy(comb, math.Pi/8), n / 4},
	} {
		s := newContactSearch([][]orb.Point{append(c.ring, c.ring[0])}, 10)
		s.run()
		if len(s.found) != 0 {
			t.Errorf("%s: %+v", name, s.found)
		}
		if s.pairs > c.most*len(c.ring) {
			t.Errorf("%s: %d pairs, %d for each vertex", name, s.pairs, s.pairs/len(c.ring))
		}
	}
}
