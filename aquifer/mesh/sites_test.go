package mesh

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand"
	"strings"
	"testing"

	"github.com/paulmach/orb"
)

// blob is a ring about a centre with uneven radius.
func blob(rng *rand.Rand, n int, cx, cy, radius, rough float64) orb.Ring {
	var r orb.Ring
	for i := range n {
		a := 2 * math.Pi * (float64(i) + 0.6*rng.Float64()) / float64(n)
		s := radius * (1 - rough*rng.Float64())
		r = append(r, orb.Point{cx + s*math.Cos(a), cy + s*math.Sin(a)})
	}
	return r
}

// site makes a random domain of about 10 km with holes, rivers that cross and leave it, and wells, some 1 m apart, some on the
// outline or on a river. With a fault it plants one and says which kind of problem must be named.
func site(rng *rand.Rand) (d Domain, fault ProblemKind) {
	const x, y = 500000, 4000000
	d.Outer = blob(rng, 8+rng.Intn(60), x, y, 5000, 0.1+0.6*rng.Float64())
	set := newRingSet([]orb.Ring{d.Outer})
	for range rng.Intn(4) {
		h := blob(rng, 4+rng.Intn(8), x+4000*(rng.Float64()-0.5), y+4000*(rng.Float64()-0.5), 100+400*rng.Float64(), 0.4)
		if trial := (Domain{Outer: d.Outer, Holes: append(d.Holes[:len(d.Holes):len(d.Holes)], h)}); Validate(trial, 0) == nil {
			d = trial
		}
	}
	for i := range rng.Intn(4) {
		var p orb.LineString
		a := 2 * math.Pi * rng.Float64()
		for j := -3; j <= 3; j++ {
			u, v := 2000*float64(j), 800*(rng.Float64()-0.5)
			p = append(p, orb.Point{x + u*math.Cos(a) - v*math.Sin(a), y + u*math.Sin(a) + v*math.Cos(a)})
		}
		d.Lines = append(d.Lines, Line{Path: p, Size: 100 * float64(rng.Intn(2)), Name: fmt.Sprintf("river %d", i+1)})
	}
	put := func(p orb.Point) {
		trial := d
		trial.Points = append(d.Points[:len(d.Points):len(d.Points)], Point{At: p, Size: 1 + 20*rng.Float64(), Name: fmt.Sprintf("W%d", len(d.Points)+1)})
		if Validate(trial, 0) == nil {
			d = trial
		}
	}
	for range 1 + rng.Intn(12) {
		p := orb.Point{x + 8000*(rng.Float64()-0.5), y + 8000*(rng.Float64()-0.5)}
		put(p)
		if rng.Intn(3) == 0 { // a partner 1 m to 1 km away
			s := math.Pow(10, 3*rng.Float64())
			put(orb.Point{p[0] + s, p[1] + s/3})
		}
	}
	if rng.Intn(2) == 0 {
		s := set.segments[rng.Intn(len(set.segments))]
		put(orb.Point{(s.a[0] + s.b[0]) / 2, (s.a[1] + s.b[1]) / 2})
	}
	if len(d.Lines) > 0 {
		l := d.Lines[rng.Intn(len(d.Lines))].Path
		put(l[3])
		put(orb.Point{l[2][0] + 0.3*(l[3][0]-l[2][0]), l[2][1] + 0.3*(l[3][1]-l[2][1])})
		put(orb.Point{l[3][0] + 0.5*(l[4][0]-l[3][0]) + math.Pow(10, -6+7*rng.Float64()), l[3][1] + 0.5*(l[4][1]-l[3][1])})
	}
	if rng.Intn(4) == 0 {
		fault = plant(rng, &d, x, y)
	}
	return d, fault
}

// plant spoils a domain in one way.
func plant(rng *rand.Rand, d *Domain, x, y float64) ProblemKind {
	switch rng.Intn(8) {
	case 0:
		p := d.Outer[0]
		inner := orb.Point{(p[0] + 4*x) / 5, (p[1] + 4*y) / 5}
		if len(d.Points) > 0 {
			inner = d.Points[0].At
		}
		if Validate(Domain{Outer: d.Outer, Holes: d.Holes, Points: []Point{{At: inner}}}, 0) != nil {
			return ""
		}
		d.Points = append(d.Points[:0:0], Point{At: inner, Name: "A"}, Point{At: inner, Name: "B"})
		return PointsCoincide
	case 1:
		d.Points = append(d.Points, Point{At: orb.Point{x + 9000, y}, Name: "far well"})
		return PointOutside
	case 2:
		d.Holes, d.Points = nil, nil
		n := len(d.Outer)
		i := rng.Intn(n)
		d.Outer[i], d.Outer[(i+n/2)%n] = d.Outer[(i+n/2)%n], d.Outer[i]
		return RingCrossesItself
	case 3:
		d.Holes = append(d.Holes, blob(rng, 5, x+20000, y, 300, 0.2))
		return HoleOutside
	case 4:
		p := d.Outer[1]
		d.Holes, d.Points = []orb.Ring{{{x, y}, {p[0] + (p[0] - x), p[1] + (p[1] - y)}, {x + 3, y - 5}}}, nil
		return HoleCrossesOutline
	case 5:
		d.Outer[2] = orb.Point{math.NaN(), 0}
		return NonFinite
	case 6:
		h := blob(rng, 6, x, y, 200, 0.2)
		d.Holes, d.Points = []orb.Ring{h, blob(rng, 6, x+150, y, 200, 0.2)}, nil
		return HolesOverlap
	}
	i := rng.Intn(len(d.Outer))
	p := d.Outer[i]
	tip := orb.Point{p[0] + (p[0]-x)*0.5, p[1] + (p[1]-y)*0.5}
	d.Outer = append(d.Outer[:i+1:i+1], append(orb.Ring{tip, p}, d.Outer[i+1:]...)...)
	return Spike
}

// TestRandomSites meshes random sites: every sound one must mesh with the wanted angle but at sharp input corners, and every
// refusal must name what was planted.
func TestRandomSites(t *testing.T) {
	sites := 50
	if long() {
		sites = 500
	}
	meshed, good, refused := 0, 0, 0
	for seed := range sites {
		rng := rand.New(rand.NewSource(int64(seed)))
		d, fault := site(rng)
		m, err := Build(context.Background(), d, Options{Nodes: 2000})
		if fault != "" {
			var de *DomainError
			if !errors.As(err, &de) {
				t.Errorf("seed %d: planted %q, error %v", seed, fault, err)
				continue
			}
			named := false
			for _, p := range de.Problems {
				named = named || p.Kind == fault
			}
			if !named {
				t.Errorf("seed %d: planted %q, have %v", seed, fault, err)
			}
			refused++
			continue
		}
		if err != nil {
			t.Errorf("seed %d: %v", seed, err)
			continue
		}
		meshed++
		faults := faultsOf(m, d, false)
		if len(faults) > 0 {
			t.Errorf("seed %d: %s", seed, strings.Join(faults, "; "))
		}
		if q := m.Quality; q.PoorOther == 0 && q.EncroachedLeft == 0 && !q.BudgetHit && q.MinAngleFreeDeg >= 25 {
			good++
		} else {
			t.Logf("seed %d: %+v", seed, q)
		}
	}
	t.Logf("%d meshed, %d of them good, %d refused", meshed, good, refused)
	if good < meshed*95/100 {
		t.Errorf("only %d of %d sites have the wanted quality", good, meshed)
	}
}

// TestRandomAnisotropicSites gives every region of random sites its own tensor; no segment may be left encroached, but
// for one at a corner where sharp wedges of different metrics fill the whole turn.
func TestRandomAnisotropicSites(t *testing.T) {
	sites := 12
	if long() {
		sites = 200
	}
	for seed := range sites {
		rng := rand.New(rand.NewSource(int64(1000 + seed)))
		d, fault := site(rng)
		if fault != "" {
			continue
		}
		m, err := Build(context.Background(), d, Options{Nodes: 1500, Metric: func(orb.Point) Tensor {
			return tensor(math.Pow(10, 1.5*rng.Float64()), 180*rng.Float64())
		}})
		if err != nil {
			t.Errorf("seed %d: %v", seed, err)
			continue
		}
		if faults := faultsOf(m, d, true); len(faults) > 0 {
			t.Errorf("seed %d: %s", seed, strings.Join(faults, "; "))
		}
		if q := m.Quality; q.EncroachedLeft > q.EncroachedAtSharp || q.EncroachedLeft > 2 || q.PoorOther > 0 || q.BudgetHit {
			t.Errorf("seed %d: %+v", seed, q)
		}
	}
}
