package mesh

import (
	"context"
	"errors"
	"math"
	"math/rand"
	"testing"

	"github.com/paulmach/orb"
)

// entangled is a square with lines and points on a grid of whole numbers, many of them moved a little: overlaps, crossings at
// vertices, tiny angles and near misses in plenty.
func entangled(rng *rand.Rand) Domain {
	x, y := 0.0, 0.0
	if rng.Intn(2) == 0 {
		x, y = 500000, 4000000
	}
	at := func() orb.Point {
		p := orb.Point{x + float64(rng.Intn(9)), y + float64(rng.Intn(9))}
		if rng.Intn(2) == 0 {
			p[0] += (rng.Float64() - 0.5) * math.Pow(10, -12+11*rng.Float64())
			p[1] += (rng.Float64() - 0.5) * math.Pow(10, -12+11*rng.Float64())
		}
		return p
	}
	d := Domain{Outer: orb.Ring{{x, y}, {x + 8, y}, {x + 8, y + 8}, {x, y + 8}}}
	if rng.Intn(3) == 0 {
		h := orb.Ring{at(), at(), at(), at()}
		if trial := (Domain{Outer: d.Outer, Holes: []orb.Ring{h}}); Validate(trial, 0) == nil {
			d = trial
		}
	}
	for range 1 + rng.Intn(5) {
		var l orb.LineString
		for range 2 + rng.Intn(4) {
			l = append(l, at())
		}
		if rng.Intn(3) == 0 {
			l = append(l, l[0])
		}
		if trial := append(d.Lines[:len(d.Lines):len(d.Lines)], Line{Path: l}); Validate(Domain{Outer: d.Outer, Lines: trial}, 0) == nil {
			d.Lines = trial
		}
	}
	for range rng.Intn(5) {
		trial := d
		trial.Points = append(d.Points[:len(d.Points):len(d.Points)], Point{At: at()})
		if Validate(trial, 0) == nil {
			d = trial
		}
	}
	return d
}

// TestEntangledLines: whatever the tangle, the mesh is sound; nearly all keep the wanted quality away from sharp corners.
func TestEntangledLines(t *testing.T) {
	n, most := 40, 8000
	if long() {
		n, most = 600, 30000
	}
	good, hit := 0, 0
	for seed := range n {
		d := entangled(rand.New(rand.NewSource(int64(seed))))
		m, err := Build(context.Background(), d, Options{Nodes: 200, MaxNodes: most})
		if err != nil {
			var de *DomainError
			if !errors.As(err, &de) {
				t.Errorf("seed %d: %v", seed, err)
			}
			continue
		}
		for _, s := range faultsOf(m, d, false) {
			t.Errorf("seed %d: %s", seed, s)
		}
		q := m.Quality
		switch {
		case q.BudgetHit:
			hit++
		case q.PoorOther == 0 && q.EncroachedLeft == 0:
			good++
		default:
			t.Logf("seed %d: %+v", seed, q)
		}
	}
	t.Logf("%d tangles: %d good, %d hit the budget", n, good, hit)
	if good < (n-hit)*95/100 || hit > n/4 { // a gap a hundred tolerances wide along a whole side takes any budget
		t.Errorf("only %d of %d tangles have the wanted quality, %d hit the budget", good, n, hit)
	}
}
