package mesh

import (
	"fmt"
	"math"

	"github.com/paulmach/orb"
)

// distance between two points [m].
func distance(a, b orb.Point) float64 { return math.Hypot(a[0]-b[0], a[1]-b[1]) }

// dropText says how much of a line lies outside.
func dropText(name string, out, total float64) string {
	return fmt.Sprintf("%s: %.4g m of its %.4g m lie outside the domain and were dropped", name, out, total)
}

// measure fills in the Quality. Angles are those in the metric of each region.
func (m *Mesh) measure(r *refiner, o Options) {
	q := &m.Quality
	*q = Quality{Nodes: len(m.X), Triangles: len(m.Region), WantedAngleDeg: o.MinAngleDeg, BudgetHit: r.budgetHit,
		Coarsest: r.field.coarsest, Tolerance: o.Tolerance, MinAngleDeg: 180, MinAngleFreeDeg: 180}
	obtuse := 0
	sinWanted := math.Sin(o.MinAngleDeg * math.Pi / 180)
	sin2All, sin2Free := 1.0, 1.0
	for t := range r.t {
		tr := &r.t[t]
		if tr.v[0] < 0 {
			continue
		}
		s := r.shapeOf(int32(t))
		k := s.shortest()
		sin2 := s.l2[k] / (4 * s.radius) // of the smallest angle: edge = 2 R sin
		sin2All = min(sin2All, sin2)
		if sin2 < sinWanted*sinWanted || sin2 < sin2Free {
			sharp := r.atSharp(int32(t))
			if !sharp {
				sin2Free = min(sin2Free, sin2)
			}
			switch {
			case !(sin2 < sinWanted*sinWanted):
			case sharp:
				q.PoorAtSharpInput++
			default:
				q.PoorOther++
			}
		}
		longest := max(s.l2[0], s.l2[1], s.l2[2])
		if s.l2[0]+s.l2[1]+s.l2[2]-2*longest < -rightAngleSlack*longest {
			obtuse++
		}
		for k := int32(0); k < 3; k++ {
			if tr.s[k] >= 0 && r.encroached(int32(t), k) {
				q.EncroachedLeft++
				if r.atSharp(int32(t)) {
					q.EncroachedAtSharp++
				}
			}
		}
	}
	q.MinAngleDeg = math.Asin(math.Sqrt(sin2All)) * 180 / math.Pi
	q.MinAngleFreeDeg = math.Asin(math.Sqrt(sin2Free)) * 180 / math.Pi
	q.ObtuseShare = float64(obtuse) / float64(q.Triangles)
}

// atSharp says whether a triangle lies at a sharp corner of the input: a corner of it is that vertex, or two of its corners lie
// on the two segments. A very short edge on a segment that ends where regions of different metrics meet counts too.
func (r *refiner) atSharp(t int32) bool {
	v := r.t[t].v
	s := r.shapeOf(t)
	h := (r.p[v[0]].h + r.p[v[1]].h + r.p[v[2]].h) / 3
	hopeless := s.l2[s.shortest()] < hopelessShare*hopelessShare*h*h
	for k := range 3 {
		if hopeless {
			for _, b := range r.segmentsAt(v[k]) {
				if r.bases[b].mixed {
					return true
				}
			}
		}
		if r.acrossCorner(v[next3[k]], v[prev3[k]]) {
			return true
		}
		for _, s := range r.meeting[v[k]] {
			if b := &r.bases[s]; b.p == v[k] && b.sharpP || b.q == v[k] && b.sharpQ {
				return true
			}
		}
	}
	return false
}
