package mesh

import (
	"context"
	"errors"
	"testing"

	"github.com/paulmach/orb"
)

// domainOf reads a small domain from bytes: a ring on a grid of 16 by 16 with a nudge, then a hole, a line and points.
func domainOf(data []byte) Domain {
	take := func() (byte, bool) {
		if len(data) == 0 {
			return 0, false
		}
		b := data[0]
		data = data[1:]
		return b, true
	}
	nudges := [4]float64{0, 1e-12, 1e-8, 1e-3}
	path := func() (p []orb.Point) {
		n, _ := take()
		for range n % 12 {
			a, _ := take()
			b, ok := take()
			if !ok {
				break
			}
			p = append(p, orb.Point{float64(a>>4) + nudges[b>>2&3], float64(a&15) - nudges[b&3]})
		}
		return p
	}
	d := Domain{Outer: path()}
	if h := path(); len(h) > 0 {
		d.Holes = append(d.Holes, h)
	}
	for range 2 {
		if l := path(); len(l) > 1 {
			d.Lines = append(d.Lines, Line{Path: l})
		}
	}
	for _, p := range path() {
		d.Points = append(d.Points, Point{At: p})
	}
	return d
}

// FuzzBuild: whatever the domain, Build ends with a sound mesh or with a *DomainError.
func FuzzBuild(f *testing.F) {
	f.Add([]byte{4, 0x00, 0, 0xf0, 0, 0xff, 0, 0x0f, 0, 3, 0x33, 0, 0x83, 0, 0x38, 0, 2, 0x11, 0, 0xee, 0, 2, 0x1e, 0, 0xe1, 0, 2, 0xaa, 0, 0xbb, 5})
	f.Add([]byte{5, 0x00, 1, 0xf0, 0, 0xff, 0, 0x8f, 2, 0x0f, 0, 0, 3, 0x00, 0, 0x88, 5, 0xf0, 0, 2, 0x00, 0, 0x8f, 2})
	f.Add([]byte{3, 0x00, 0, 0xf0, 1, 0xff, 2, 0, 4, 0x00, 0, 0xf1, 0, 0xff, 0, 0x21, 0})
	f.Fuzz(func(t *testing.T, data []byte) {
		d := domainOf(data)
		m, err := Build(context.Background(), d, Options{Nodes: 100, MaxNodes: 4000})
		var de *DomainError
		if err != nil {
			if !errors.As(err, &de) {
				t.Fatalf("%+v: %v", d, err)
			}
			return
		}
		for _, s := range faultsOf(m, d, false) {
			t.Errorf("%+v: %s", d, s)
		}
		if q := m.Quality; !q.BudgetHit && q.EncroachedLeft > q.EncroachedAtSharp {
			t.Errorf("%+v: %+v", d, q)
		}
	})
}
