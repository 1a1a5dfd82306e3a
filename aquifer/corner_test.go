package aquifer

import (
	"math"
	"testing"
)

// Exponents that are known: pi/angle between like conditions, pi/(2 angle) between unlike ones; a wedge of T1 of half angle w in T2 about a
// point inside has tan(a w) tan(a (pi - w)) = T1/T2 or T2/T1, here both tried.
func TestCornerExponents(t *testing.T) {
	for _, c := range []struct {
		name        string
		sectors     []sector
		open        bool
		first, last bool
		want        float64
	}{
		{"re-entrant right angle", []sector{{math.Pi, 3}, {math.Pi / 2, 3}}, true, false, false, 2.0 / 3},
		{"the same, held", []sector{{math.Pi, 3}, {math.Pi / 2, 3}}, true, true, true, 2.0 / 3},
		{"end of a held edge on a straight line", []sector{{1, 5}, {math.Pi - 1, 5}}, true, true, false, 0.5},
		{"crack", []sector{{2 * math.Pi, 1}}, true, false, false, 0.5},
		{"inside, one ground", []sector{{2, 1}, {2*math.Pi - 2, 1}}, false, false, false, 1},
		{"straight border between grounds", []sector{{math.Pi, 1}, {math.Pi, 50}}, false, false, false, 1},
		{"right angle, one ground", []sector{{math.Pi / 2, 1}}, true, false, false, 1},
	} {
		if got := leastExponent(c.sectors, c.open, c.first, c.last); !(math.Abs(got-c.want) <= 1e-9) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
	const w, ratio = math.Pi / 4, 10.0
	a := leastExponent([]sector{{w, ratio}, {2*math.Pi - 2*w, 1}, {w, ratio}}, false, false, false)
	p := math.Tan(a*w) * math.Tan(a*(math.Pi-w))
	q := math.Tan(a*w) / math.Tan(a*(math.Pi-w))
	near := func(x, y float64) bool { return math.Abs(x/y-1) < 1e-6 }
	if !(a < 1) || !(near(-q, ratio) || near(-q, 1/ratio) || near(p, ratio) || near(p, 1/ratio)) {
		t.Errorf("wedge: a %v, products %v %v", a, p, q)
	}
}
