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

// measure fills in the Quality's counts. Angles are those in the metric of each region. atSharp is asked for poor triangles and
// for those that face a segment with an obtuse angle; the answers are kept.
func (m *Mesh) measure(atSharp func(t int32) bool) {
	q := &m.Quality
	q.Nodes, q.Triangles = len(m.X), len(m.Region)
	q.PoorAtSharpInput, q.PoorOther, q.EncroachedLeft, q.EncroachedAtSharp = 0, 0, 0, 0
	m.sharp = make([]bool, len(m.Region))
	shares := make([]tally, len(m.Region)/parallelShare+1)
	inParallel(len(m.Region), func(from, to int) { shares[from/parallelShare] = m.tally(from, to) })
	all, free, obtuse := 1.0, 1.0, 0
	for _, s := range shares {
		all, free, obtuse = min(all, s.sine2), min(free, s.sine2), obtuse+s.obtuse
		for _, u := range s.suspects {
			sharp := atSharp(u.t)
			m.sharp[u.t] = sharp
			all = min(all, u.sine2)
			if !sharp {
				free = min(free, u.sine2)
			}
			count(u.poor, sharp, &q.PoorAtSharpInput, &q.PoorOther)
			if u.encroached {
				q.EncroachedLeft++
				count(sharp, true, &q.EncroachedAtSharp, nil)
			}
		}
	}
	q.MinAngleDeg = math.Asin(math.Sqrt(all)) * 180 / math.Pi
	q.MinAngleFreeDeg = math.Asin(math.Sqrt(free)) * 180 / math.Pi
	q.ObtuseShare = float64(obtuse) / float64(q.Triangles)
}

// suspect is a triangle that is poor or faces a segment with an obtuse angle.
type suspect struct {
	t                int32
	poor, encroached bool
	sine2            float64 // squared sine of the smallest angle
}

// tally is what a share of the triangles has.
type tally struct {
	suspects []suspect
	sine2    float64 // squared sine of the smallest angle of the others; 1 when there are none
	obtuse   int
}

// tally looks at a share of the triangles.
func (m *Mesh) tally(from, to int) tally {
	sin := math.Sin(m.Quality.WantedAngleDeg * math.Pi / 180)
	out := tally{sine2: 1}
	for t := from; t < to; t++ {
		s := m.shapeOf(t)
		sine2 := s.l2[s.shortest()] / (4 * s.radius) // of the smallest angle: edge = 2 R sin
		poor := !(sine2 >= sin*sin)
		widest := 0
		for k := range 3 {
			if s.l2[k] > s.l2[widest] {
				widest = k
			}
		}
		wide := s.l2[0]+s.l2[1]+s.l2[2]-2*s.l2[widest] < -rightAngleSlack*s.l2[widest]
		if wide {
			out.obtuse++
		}
		if encroached := wide && m.Constraint[t]>>widest&1 == 1; poor || encroached {
			out.suspects = append(out.suspects, suspect{int32(t), poor, encroached, sine2})
		} else {
			out.sine2 = min(out.sine2, sine2)
		}
	}
	return out
}

// count adds one to yes or no when something holds.
func count(holds, which bool, yes, no *int) {
	switch {
	case !holds:
	case which:
		*yes++
	default:
		*no++
	}
}

// shapeOf measures triangle t in the metric of its region.
func (m *Mesh) shapeOf(t int) shape {
	a, b, c := m.Triangles[3*t], m.Triangles[3*t+1], m.Triangles[3*t+2]
	bx, by, cx, cy := m.X[b]-m.X[a], m.Y[b]-m.Y[a], m.X[c]-m.X[a], m.Y[c]-m.Y[a]
	if m.metrics != nil {
		bx, by = m.metrics[m.Region[t]].to(bx, by)
		cx, cy = m.metrics[m.Region[t]].to(cx, cy)
	}
	return newShape(bx, by, cx, cy)
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
		if r.commonCorner(v[next3[k]], v[prev3[k]]) >= 0 {
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
