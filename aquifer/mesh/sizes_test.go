package mesh

import (
	"context"
	"errors"
	"math"
	"testing"

	"github.com/paulmach/orb"
)

// A place that asks for a size gets it, and nothing changes far from it.
func TestPlacesGetTheirSizes(t *testing.T) {
	d := Domain{Outer: orb.Ring{{0, 0}, {1000, 0}, {1000, 1000}, {0, 1000}}}
	at := orb.Point{300, 400}
	shortest := func(o Options) (near, far float64) {
		m, err := Build(context.Background(), d, o)
		if err != nil {
			t.Fatal(err)
		}
		near, far = math.Inf(1), math.Inf(1)
		for tr := range m.Region {
			for k := range 3 {
				a, b := m.Triangles[3*tr+k], m.Triangles[3*tr+(k+1)%3]
				l := math.Hypot(m.X[a]-m.X[b], m.Y[a]-m.Y[b])
				switch dist := math.Hypot(m.X[a]-at[0], m.Y[a]-at[1]); {
				case dist < 20:
					near = min(near, l)
				case dist > 400:
					far = min(far, l)
				}
			}
		}
		return near, far
	}
	_, before := shortest(Options{Coarsest: 50})
	near, far := shortest(Options{Coarsest: 50, Sizes: []Size{{At: at, Edge: 2, Growth: 0.3}}})
	if !(near > 0.5 && near < 4) { // edges come out within a factor of two of what is wanted
		t.Errorf("the shortest edge there is %v m, 2 m were asked for", near)
	}
	if !(far > before/2) {
		t.Errorf("far from it the shortest edge is %v m, %v m without it", far, before)
	}
	for _, bad := range []Size{{At: at}, {At: at, Edge: math.NaN()}, {At: at, Edge: math.Inf(1)}, {At: orb.Point{math.NaN(), 0}, Edge: 1}, {At: at, Edge: 1, Growth: -1}} {
		var e *DomainError
		if _, err := Build(context.Background(), d, Options{Sizes: []Size{bad}}); !errors.As(err, &e) {
			t.Errorf("size %+v: error %v, want one that names it", bad, err)
		}
	}
}
