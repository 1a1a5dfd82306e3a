package mesh

import (
	"context"
	"fmt"
	"math"
)

const (
	smoothPasses = 2 // most of the gain comes with the first two
	// goodSine2 is the squared sine of 35 degrees: a move may lower the smallest angle of a star down to this, not below.
	goodSine2 = 0.329
	// largestStar: vertices with more triangles are left; the mean is six.
	largestStar = 16
)

// smoother moves free vertices towards the weighted mean of the circumcentres around them, the optimum of linear interpolation
// (Chen & Holst 2011, optimal Delaunay triangulation), with weights that keep the grading.
type smoother struct {
	*refiner
	at   []int32 // a triangle of each vertex
	x, y [largestStar + 1]float64
	h    [largestStar + 1]float64
	seg  [largestStar + 1]bool
	n    int
}

// smooth makes the passes and restores the Delaunay property after each.
func (r *refiner) smooth(ctx context.Context, passes int) error {
	s := &smoother{refiner: r, at: make([]int32, len(r.p))}
	for pass := range passes {
		if ctx.Err() != nil {
			return fmt.Errorf("mesh: stopped at smoothing pass %d of %d nodes: %w", pass+1, len(r.p), ctx.Err())
		}
		for t := range r.t {
			if r.t[t].v[0] >= 0 {
				for _, v := range r.t[t].v {
					s.at[v] = int32(t)
				}
			}
		}
		for v := range r.p {
			if r.p[v].kind == freeVertex {
				s.move(int32(v))
			}
		}
		r.delaunayAll()
	}
	return nil
}

// delaunayAll flips until every edge is locally Delaunay.
func (m *triangulation) delaunayAll() {
	for t := range m.t {
		tr := &m.t[t]
		if tr.v[0] < 0 {
			continue
		}
		for k := int32(0); k < 3; k++ {
			h := 4*int32(t) + k
			if g := tr.n[k]; g > h && tr.s[k] < 0 {
				if d := &m.p[m.t[g>>2].v[g&3]]; m.inside(int32(t), d.x, d.y) {
					m.flips = append(m.flips, h)
					m.legalise(nil)
				}
			}
		}
	}
}

// move tries a better place for vertex v.
func (s *smoother) move(v int32) {
	t := s.at[v]
	if !s.gather(t, v) {
		return
	}
	old, _ := s.worst(0, 0)
	dx, dy, ok := s.target()
	if !ok {
		return
	}
	region := s.t[t].region
	for range 2 {
		px, py := dx, dy
		if s.metrics != nil {
			px, py = s.metrics[region].from(dx, dy)
		}
		p := &s.p[v]
		if now, valid := s.worst(dx, dy); valid && now >= min(old, goodSine2) && s.clear(v, p.x+px, p.y+py) {
			p.x, p.y = p.x+px, p.y+py
			return
		}
		dx, dy = dx/2, dy/2
	}
}

// gather lists the rim of the star of v, relative to v in the metric of its region.
func (s *smoother) gather(t, v int32) bool {
	s.n = 0
	start := t
	for {
		tr := &s.t[t]
		k := s.corner(t, v)
		if s.n == largestStar {
			return false
		}
		w := tr.v[next3[k]]
		s.x[s.n], s.y[s.n] = s.vector(tr.region, v, w)
		s.h[s.n] = s.p[w].h
		s.seg[s.n] = tr.s[k] >= 0
		s.n++
		g := tr.n[next3[k]]
		if g < 0 {
			return false
		}
		if t = g >> 2; t == start {
			break
		}
	}
	s.x[s.n], s.y[s.n], s.h[s.n] = s.x[0], s.y[0], s.h[0]
	return true
}

// target is the displacement to the weighted mean of circumcentres: weights are areas over wanted size to the fourth power.
func (s *smoother) target() (dx, dy float64, ok bool) {
	sum := 0.0
	for i := range s.n {
		ax, ay, bx, by := s.x[i], s.y[i], s.x[i+1], s.y[i+1]
		cross := ax*by - ay*bx
		a2, b2 := ax*ax+ay*ay, bx*bx+by*by
		h := s.h[i] + s.h[i+1]
		w := 1 / (h * h * h * h)
		// area x circumcentre = half of these, cross cancels
		dx += w * (by*a2 - ay*b2)
		dy += w * (ax*b2 - bx*a2)
		sum += w * cross
	}
	dx, dy = dx/(2*sum), dy/(2*sum)
	return dx, dy, !math.IsNaN(dx) && !math.IsInf(dx, 0)
}

// worst is the squared sine of the smallest angle in the star with its centre moved; valid is false when a triangle turns over
// or a segment of the rim is encroached upon.
func (s *smoother) worst(dx, dy float64) (sine2 float64, valid bool) {
	sine2 = 1
	ax, ay := s.x[0]-dx, s.y[0]-dy
	a2 := ax*ax + ay*ay
	for i := range s.n {
		bx, by := s.x[i+1]-dx, s.y[i+1]-dy
		cross := ax*by - ay*bx
		if !(cross > 0) || s.seg[i] && ax*bx+ay*by < 0 {
			return 0, false
		}
		ex, ey := bx-ax, by-ay
		b2, e2 := bx*bx+by*by, ex*ex+ey*ey
		// sine of the angle opposite the shortest side = cross / product of the two longer ones
		longer := a2 * b2 * e2 / min(a2, b2, e2)
		sine2 = min(sine2, cross*cross/longer)
		ax, ay, a2 = bx, by, b2
	}
	return sine2, true
}

// clear says whether every triangle of the star stays counter-clockwise, exactly, with v at (x, y).
func (s *smoother) clear(v int32, x, y float64) bool {
	t := s.at[v]
	start := t
	for {
		tr := &s.t[t]
		k := s.corner(t, v)
		a, b := &s.p[tr.v[next3[k]]], &s.p[tr.v[prev3[k]]]
		if !(orient(a.x, a.y, b.x, b.y, x, y) > 0) {
			return false
		}
		if t = tr.n[next3[k]] >> 2; t == start {
			return true
		}
	}
}
