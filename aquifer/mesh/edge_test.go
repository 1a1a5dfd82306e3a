package mesh

import (
	"context"
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// square of side 4 at the origin.
func square() orb.Ring { return orb.Ring{{0, 0}, {4, 0}, {4, 4}, {0, 4}, {0, 0}} }

// kinds lists the kinds of problem in an error, or says that there is none.
func kinds(err error) string {
	var de *DomainError
	if err == nil {
		return "none"
	}
	if !errors.As(err, &de) {
		return err.Error()
	}
	var s []string
	for _, p := range de.Problems {
		s = append(s, string(p.Kind))
	}
	return strings.Join(s, ", ")
}

func TestRefusals(t *testing.T) {
	nan := math.NaN()
	well := func(name string, x, y float64) Point { return Point{At: orb.Point{x, y}, Name: name} }
	for _, c := range []struct {
		name string
		d    Domain
		want string
	}{
		{"spike", Domain{Outer: orb.Ring{{0, 0}, {4, 0}, {4, 4}, {2, 4}, {2, 8}, {2, 4}, {0, 4}, {0, 0}}}, "ring has a spike"},
		{"zero area", Domain{Outer: orb.Ring{{0, 0}, {2, 0}, {4, 0}, {0, 0}}}, "ring has no area"},
		{"empty", Domain{}, "fewer than three different vertices"},
		{"two vertices", Domain{Outer: orb.Ring{{0, 0}, {4, 0}, {0, 0}}}, "fewer than three different vertices"},
		{"bow tie", Domain{Outer: orb.Ring{{0, 0}, {4, 4}, {4, 0}, {0, 4}}}, "ring crosses itself"},
		{"runs along itself", Domain{Outer: orb.Ring{{0, 0}, {4, 0}, {4, 4}, {3, 4}, {3, 0}, {1, 0}, {1, 4}, {0, 4}}}, "ring crosses itself"},
		{"touches itself", Domain{Outer: orb.Ring{{0, 0}, {4, 0}, {4, 4}, {2, 0}, {0, 4}}}, "ring touches itself"},
		{"hole outside", Domain{Outer: square(), Holes: []orb.Ring{{{10, 10}, {10, 12}, {12, 12}, {12, 10}}}}, "hole outside the outline"},
		{"hole crosses", Domain{Outer: square(), Holes: []orb.Ring{{{3, 1}, {3, 3}, {6, 3}, {6, 1}}}}, "hole crosses the outline"},
		{"hole crosses at vertices", Domain{Outer: orb.Ring{{0, 0}, {4, 0}, {4, 1}, {4, 3}, {4, 4}, {0, 4}}, Holes: []orb.Ring{{{3, 2}, {4, 1}, {5, 2}, {4, 3}}}}, "hole crosses the outline"},
		{"hole shares edge", Domain{Outer: square(), Holes: []orb.Ring{{{0, 1}, {0, 3}, {2, 3}, {2, 1}}}}, "hole shares an edge"},
		{"holes overlap", Domain{Outer: square(), Holes: []orb.Ring{{{0.5, 0.5}, {0.5, 2.5}, {2.5, 2.5}, {2.5, 0.5}}, {{1.5, 1.5}, {1.5, 3.5}, {3.5, 3.5}, {3.5, 1.5}}}}, "holes overlap"},
		{"hole in hole", Domain{Outer: square(), Holes: []orb.Ring{{{1, 1}, {3, 1}, {3, 3}, {1, 3}}, {{1.5, 1.5}, {2.5, 1.5}, {2.5, 2.5}}}}, "hole inside a hole"},
		{"not a number", Domain{Outer: orb.Ring{{0, 0}, {4, nan}, {4, 4}, {0, 4}}}, "coordinate is not a finite number"},
		{"infinite", Domain{Outer: orb.Ring{{0, 0}, {4, math.Inf(1)}, {4, 4}, {0, 4}}}, "coordinate is not a finite number"},
		{"far too large", Domain{Outer: orb.Ring{{0, 0}, {4e200, 0}, {4, 4}, {0, 4}}}, "coordinate is not a finite number"},
		{"lost in rounding", Domain{Outer: orb.Ring{{12.000000000001, 50}, {12.000000000002, 50}, {12.000000000002, 50.000000000001}}}, "ring has no area"},
		{"well outside", Domain{Outer: square(), Points: []Point{well("W1", 5, 1)}}, "point outside the domain"},
		{"well in hole", Domain{Outer: square(), Holes: []orb.Ring{{{1, 1}, {3, 1}, {3, 3}, {1, 3}}}, Points: []Point{well("W1", 2, 2)}}, "point outside the domain"},
		{"wells coincide", Domain{Outer: square(), Points: []Point{well("W1", 2, 2), well("W2", 2, 2)}}, "two points at the same place"},
		{"size", Domain{Outer: square(), Points: []Point{{At: orb.Point{1, 1}, Size: nan}}}, "size is negative or not a number"},
		{"short line", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{1, 1}, {1, 1}}}}}, "fewer than three different vertices"},
		{"several", Domain{Outer: square(), Holes: []orb.Ring{{{10, 10}, {10, 12}, {12, 12}}}, Points: []Point{well("W1", 9, 9), well("W2", 1, 1), well("W3", 1, 1)}},
			"hole outside the outline, point outside the domain, two points at the same place"},
	} {
		_, err := Build(context.Background(), c.d, Options{Nodes: 100})
		if have := kinds(err); have != c.want {
			t.Errorf("%s: have %q, want %q (%v)", c.name, have, c.want, err)
		}
	}
}

func TestOptionsRefused(t *testing.T) {
	nan := math.NaN()
	for i, o := range []Options{{Nodes: -1}, {MaxNodes: -1}, {Coarsest: nan}, {Coarsest: -1}, {Growth: nan}, {Growth: -1},
		{MinAngleDeg: 40}, {MinAngleDeg: nan}, {Tolerance: nan}, {Tolerance: math.Inf(1)}} {
		if _, err := Build(context.Background(), Domain{Outer: square()}, o); kinds(err) != string(BadOption) {
			t.Errorf("case %d: %v", i, err)
		}
	}
}

// TestShapes meshes awkward but valid domains: all end, keep the box method's condition, and keep the angle but at corners that
// are sharper themselves.
func TestShapes(t *testing.T) {
	utm := func(r orb.Ring) orb.Ring {
		var out orb.Ring
		for _, p := range r {
			out = append(out, orb.Point{500000 + 1000*p[0], 4000000 + 1000*p[1]})
		}
		return out
	}
	needles := Domain{Outer: square()}
	for i := range 9 {
		a := 0.3 + math.Pow(10, -float64(i))
		needles.Lines = append(needles.Lines, Line{Path: orb.LineString{{2, 2}, {2 + math.Cos(a), 2 + math.Sin(a)}}})
	}
	for _, c := range []struct {
		name string
		d    Domain
	}{
		{"square", Domain{Outer: square()}},
		{"clockwise", Domain{Outer: orb.Ring{{0, 0}, {0, 4}, {4, 4}, {4, 0}}}},
		{"hole", Domain{Outer: square(), Holes: []orb.Ring{{{1, 1}, {3, 1}, {3, 3}, {1, 3}}}}},
		{"hole touches at vertex", Domain{Outer: square(), Holes: []orb.Ring{{{0, 0}, {1, 2}, {2, 1}, {0, 0}}}}},
		{"narrow gap", Domain{Outer: square(), Holes: []orb.Ring{{{1e-9, 1}, {1e-9, 3}, {2, 3}, {2, 1}}}}},
		{"gap of a thousandth", Domain{Outer: square(), Holes: []orb.Ring{{{4e-3, 1}, {4e-3, 3}, {2, 3}, {2, 1}}}}},
		{"tiny angle", Domain{Outer: orb.Ring{{0, 0}, {10, 0}, {10, 1e-4}, {0, 0}}}},
		{"utm", Domain{Outer: utm(square()), Holes: []orb.Ring{utm(orb.Ring{{1, 1}, {3, 1}, {3, 3}, {1, 3}})}}},
		{"edge of 1e-7 of the diagonal", Domain{Outer: orb.Ring{{0, 0}, {2, 0}, {2 + 1e-6, 1e-7}, {4, 0}, {4, 4}, {0, 4}}}},
		{"edge of 1e-8 of the diagonal", Domain{Outer: orb.Ring{{0, 0}, {2, 0}, {2 + 6e-8, 1e-8}, {4, 0}, {4, 4}, {0, 4}}}},
		{"in line", Domain{Outer: orb.Ring{{0, 0}, {1, 0}, {2, 0}, {4, 0}, {4, 4}, {0, 4}}}},
		{"line ends inside", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{-1, 2}, {2, 2.5}}}}}},
		{"line along the outline", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{-1, 0}, {2, 0}, {2, 4}, {5, 4}}}}}},
		{"lines overlap", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{1, 1}, {3, 3}}}, {Path: orb.LineString{{0.5, 0.5}, {2, 2}}}, {Path: orb.LineString{{3, 3}, {1, 1}}}}}},
		{"lines cross", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{0, 1}, {4, 3}}}, {Path: orb.LineString{{0, 3}, {4, 1}}}, {Path: orb.LineString{{2, 0}, {2, 4}}}}}},
		{"lines cross at a tiny angle", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{0.5, 2}, {3.5, 2}}}, {Path: orb.LineString{{0.5, 1.999}, {3.5, 2.001}}}}}},
		{"lines cross at 1e-7", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{0.5, 2}, {3.5, 2}}}, {Path: orb.LineString{{0.5, 2 - 1e-7}, {3.5, 2 + 1e-7}}}}}},
		{"line through vertices", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{-1, -1}, {5, 5}}}, {Path: orb.LineString{{0, 4}, {4, 0}}}}}},
		{"line vertex just off another", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{1, 2}, {3, 2}}}, {Path: orb.LineString{{2, 2 + 1e-9}, {2, 3}}}}}},
		{"closed line", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{1, 1}, {3, 1}, {3, 3}, {1, 3}, {1, 1}}}}}},
		{"line outside", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{5, 5}, {6, 6}}}}}},
		{"line in hole", Domain{Outer: square(), Holes: []orb.Ring{{{1, 1}, {3, 1}, {3, 3}, {1, 3}}}, Lines: []Line{{Path: orb.LineString{{0.5, 2}, {3.5, 2}}}}}},
		{"well on the outline and on a line", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{0, 1}, {4, 3}}}},
			Points: []Point{{At: orb.Point{2, 0}, Size: 0.01}, {At: orb.Point{2, 2}, Size: 0.01}, {At: orb.Point{0, 0}, Size: 0.01}}}},
		{"wells near a line", Domain{Outer: square(), Lines: []Line{{Path: orb.LineString{{0, 1.5}, {4, 1.5}}}},
			Points: []Point{{At: orb.Point{1, 1.5001}}, {At: orb.Point{2, 1.5 + 1e-6}}, {At: orb.Point{3, 1.5 + 1e-10}}}}},
		{"needles", needles},
	} {
		for _, nodes := range []int{300, 3000} {
			m, err := Build(context.Background(), c.d, Options{Nodes: nodes})
			if err != nil {
				t.Errorf("%s: %v", c.name, err)
				continue
			}
			for _, f := range faultsOf(m, c.d, false) {
				t.Errorf("%s: %s", c.name, f)
			}
			q := m.Quality
			if q.BudgetHit || q.PoorOther > 0 || q.EncroachedLeft > 0 {
				t.Errorf("%s: %+v", c.name, q)
			}
			t.Log(c.name, fmt.Sprintf("%d nodes, angle %.3g, free %.3g, obtuse %.3f, at sharp %d, parts %d", q.Nodes, q.MinAngleDeg, q.MinAngleFreeDeg, q.ObtuseShare, q.PoorAtSharpInput, m.Parts), m.Notes)
		}
	}
}
