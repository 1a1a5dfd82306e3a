package mesh

import (
	"context"
	"fmt"
	"math"
)

const (
	smoothPasses = 2 // most of the gain comes with the first two
	coarsePasses = 1 // of a coarse mesh before it is halved
	// steepForOnce: where a coarse mesh was graded less steeply, one pass is enough after it has been halved, for nearly all vertices have
	// six triangles of about one size.
	steepForOnce = 0.25
	// goodSine2 is the squared sine of 35 degrees: a move may lower the smallest angle of a star down to this, not below.
	goodSine2 = 0.329
	// largestStar: vertices with more triangles are left; the mean is six.
	largestStar = 16
)

// smoother moves free vertices towards the weighted mean of the circumcentres around them, the optimum of linear interpolation
// (Chen & Holst 2011, optimal Delaunay triangulation), with weights that keep the grading.
type smoother struct {
	*refiner
	at []int32 // a triangle of each vertex
}

// star is the rim of a vertex's star, relative to it in the metric of its region.
type star struct {
	x, y [largestStar + 1]float64
	h    [largestStar + 1]float64
	n    int
	seg  [largestStar + 1]bool
}

// smooth makes the passes and restores the Delaunay property after each. Shares of the vertices are smoothed at the same time: first
// those whose whole star lies in the share, then, one after the other, those on the seams.
func (r *refiner) smooth(ctx context.Context, passes int) error {
	s := &smoother{refiner: r, at: make([]int32, len(r.p))}
	seams := make([][]int32, len(r.p)/parallelShare+1)
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
		inParallel(len(r.p), func(from, to int) {
			var around star
			seam := seams[from/parallelShare][:0]
			for v := from; v < to; v++ {
				if r.p[v].kind == freeVertex && !s.move(int32(v), int32(from), int32(to), &around) {
					seam = append(seam, int32(v))
				}
			}
			seams[from/parallelShare] = seam
		})
		var around star
		for _, seam := range seams {
			for _, v := range seam {
				s.move(v, 0, int32(len(r.p)), &around)
			}
		}
		r.delaunayAll()
	}
	return nil
}

// delaunayAll flips until every edge is locally Delaunay. Edges are looked at in shares at the same time, and flipped one after the
// other.
func (m *triangulation) delaunayAll() {
	wrong := make([][]int32, len(m.t)/parallelShare+1)
	inParallel(len(m.t), func(from, to int) {
		var list []int32
		for t := from; t < to; t++ {
			tr := &m.t[t]
			if tr.v[0] < 0 {
				continue
			}
			for k := int32(0); k < 3; k++ {
				h := 4*int32(t) + k
				if g := tr.n[k]; g > h && tr.s[k] < 0 {
					if d := &m.p[m.t[g>>2].v[g&3]]; m.inside(int32(t), d.x, d.y) {
						list = append(list, h)
					}
				}
			}
		}
		wrong[from/parallelShare] = list
	})
	for _, list := range wrong {
		for _, h := range list {
			m.flips = append(m.flips, h)
			m.legalise(nil)
		}
	}
}

// move tries a better place for vertex v. It gives false, and does nothing, when the star reaches beyond the vertices from..to.
func (s *smoother) move(v, from, to int32, r *star) bool {
	t := s.at[v]
	closed, within := s.gather(t, v, from, to, r)
	if !within || !closed {
		return within
	}
	dx, dy, ok := r.target()
	if !ok {
		return true
	}
	region := s.t[t].region
	old := -1.0 // what there is now; found when it matters
	for range 2 {
		px, py := dx, dy
		if s.metrics != nil {
			px, py = s.metrics[region].from(dx, dy)
		}
		p := &s.p[v]
		valid := r.reaches(dx, dy, goodSine2)
		if !valid {
			if old < 0 {
				old, _ = r.worst(0, 0)
			}
			now, sound := r.worst(dx, dy)
			valid = sound && now >= old
		}
		if valid && s.clear(v, p.x+px, p.y+py) {
			p.x, p.y = p.x+px, p.y+py
			return true
		}
		dx, dy = dx/2, dy/2
	}
	return true
}

// gather lists the rim of the star of v. It is not closed at the outline, nor taken when it has too many triangles.
func (s *smoother) gather(t, v, from, to int32, r *star) (closed, within bool) {
	n := 0
	start := t
	o := &s.p[v]
	for {
		tr := &s.t[t]
		k := s.corner(t, v)
		w := tr.v[next3[k]]
		if w < from || w >= to {
			return false, false
		}
		if n == largestStar {
			return false, true
		}
		p := &s.p[w]
		x, y := p.x-o.x, p.y-o.y
		if s.metrics != nil {
			x, y = s.metrics[tr.region].to(x, y)
		}
		r.x[n], r.y[n], r.h[n] = x, y, p.h
		r.seg[n] = tr.s[k] >= 0
		n++
		g := tr.n[next3[k]]
		if g < 0 {
			return false, true
		}
		if t = g >> 2; t == start {
			break
		}
	}
	r.x[n], r.y[n], r.h[n] = r.x[0], r.y[0], r.h[0]
	r.n = n
	return true, true
}

// target is the displacement to the weighted mean of circumcentres: weights are areas over wanted size to the fourth power.
func (r *star) target() (dx, dy float64, ok bool) {
	sum := 0.0
	for i := range r.n {
		ax, ay, bx, by := r.x[i], r.y[i], r.x[i+1], r.y[i+1]
		cross := ax*by - ay*bx
		a2, b2 := ax*ax+ay*ay, bx*bx+by*by
		h := r.h[i] + r.h[i+1]
		h *= h
		w := 1 / (h * h)
		// area x circumcentre = half of these, cross cancels
		dx += w * (by*a2 - ay*b2)
		dy += w * (ax*b2 - bx*a2)
		sum += w * cross
	}
	dx, dy = dx/(2*sum), dy/(2*sum)
	return dx, dy, !math.IsNaN(dx) && !math.IsInf(dx, 0)
}

// reaches says whether, with the centre moved, no triangle turns over, no segment of the rim is encroached upon, and every squared sine
// is at least as given.
func (r *star) reaches(dx, dy, sine2 float64) bool {
	ax, ay := r.x[0]-dx, r.y[0]-dy
	a2 := ax*ax + ay*ay
	for i := range r.n {
		bx, by := r.x[i+1]-dx, r.y[i+1]-dy
		cross := ax*by - ay*bx
		ex, ey := bx-ax, by-ay
		b2, e2 := bx*bx+by*by, ex*ex+ey*ey
		// sine of the angle opposite the shortest side = cross / product of the two longer ones
		c2 := cross * cross
		if !(cross > 0 && c2 >= sine2*(a2*b2) && c2 >= sine2*(a2*e2) && c2 >= sine2*(b2*e2)) || r.seg[i] && ax*bx+ay*by < 0 {
			return false
		}
		ax, ay, a2 = bx, by, b2
	}
	return true
}

// worst is the squared sine of the smallest angle in the star with its centre moved; valid is false when a triangle turns over
// or a segment of the rim is encroached upon.
func (r *star) worst(dx, dy float64) (sine2 float64, valid bool) {
	sine2 = 1
	ax, ay := r.x[0]-dx, r.y[0]-dy
	a2 := ax*ax + ay*ay
	for i := range r.n {
		bx, by := r.x[i+1]-dx, r.y[i+1]-dy
		cross := ax*by - ay*bx
		if !(cross > 0) || r.seg[i] && ax*bx+ay*by < 0 {
			return 0, false
		}
		ex, ey := bx-ax, by-ay
		b2, e2 := bx*bx+by*by, ex*ex+ey*ey
		// sine of the angle opposite the shortest side = cross / product of the two longer ones
		longer := max(max(a2, b2)*e2, a2*b2)
		if cross*cross < sine2*longer {
			sine2 = cross * cross / longer
		}
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
