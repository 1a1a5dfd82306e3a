package mesh

import "math"

// lengthSlack: a segment may be so much longer than the size wanted on it before it is cut.
const lengthSlack = 1.25

// tooLong says whether a segment must be cut for the size wanted along it.
func (r *refiner) tooLong(h int32) bool {
	a, b := r.ends(h)
	l := r.distance(a, b)
	s := r.t[h>>2].s[h&3]
	if l > r.coarser*r.bases[s].size*(1+shellTolerance) {
		return true
	}
	if r.field == nil {
		return false
	}
	ha, hb := r.p[a].h, r.p[b].h
	if l < lengthSlack*min(ha, hb) {
		return false
	}
	if l > 4*lengthSlack*max(ha, hb) {
		return true
	}
	return r.steps(a, b, nil) > lengthSlack
}

// steps is the length of a-b measured in wanted sizes, by marching half a size at a time; with marks it appends to it the
// fraction and the count reached at every step.
func (r *refiner) steps(a, b int32, marks *[][2]float64) float64 {
	p, q := &r.p[a], &r.p[b]
	l := r.distance(a, b)
	at := func(f float64) float64 { return r.field.at(p.x+f*(q.x-p.x), p.y+f*(q.y-p.y)) }
	count, f := 0.0, 0.0
	for f < 1 {
		step := min(0.5*at(f)/l, 1-f)
		if 1-f < 1.5*step {
			step = 1 - f
		}
		count += step * l / at(f+step/2)
		f += step
		if marks != nil {
			*marks = append(*marks, [2]float64{f, count})
		}
		if step <= 0 {
			break
		}
	}
	return count
}

// divide cuts a segment into pieces of the wanted size; at a sharp corner it makes one cut on a shell and leaves the rest to
// the queue.
func (r *refiner) divide(h int32) {
	a, b := r.ends(h)
	s := r.t[h>>2].s[h&3]
	if r.bases[s].sharpP || r.bases[s].sharpQ {
		r.cutSegment(h)
		return
	}
	var cuts []float64
	l := r.distance(a, b)
	n := 1
	if size := r.coarser * r.bases[s].size; l > size*(1+shellTolerance) {
		n = int(min(math.Ceil(l/size-shellTolerance), float64(r.maxNodes)))
	}
	var marks [][2]float64
	count := 0.0
	if r.field != nil {
		count = r.steps(a, b, &marks)
	}
	if m := int(math.Ceil(count - (lengthSlack - 1))); m > n {
		j := 0
		before := [2]float64{}
		for i := 1; i < m; i++ {
			want := count * float64(i) / float64(m)
			for marks[j][1] < want {
				before = marks[j]
				j++
			}
			cuts = append(cuts, before[0]+(marks[j][0]-before[0])*(want-before[1])/(marks[j][1]-before[1]))
		}
	} else {
		for i := 1; i < n; i++ {
			cuts = append(cuts, float64(i)/float64(n))
		}
	}
	pa, pb := r.p[a], r.p[b]
	for _, f := range cuts {
		if len(r.p) >= r.maxNodes {
			r.budgetHit = true
			return
		}
		if h = r.cutAt(h, pa.x+f*(pb.x-pa.x), pa.y+f*(pb.y-pa.y), b); h < 0 {
			return
		}
	}
}

// cutSegment cuts a segment in the middle, or on a shell about its sharp corner.
func (r *refiner) cutSegment(h int32) {
	a, b := r.ends(h)
	if !r.divisible(r.distance(a, b)) {
		r.refused++
		return
	}
	f := r.cutShare(h)
	pa, pb := &r.p[a], &r.p[b]
	r.cutAt(h, pa.x+f*(pb.x-pa.x), pa.y+f*(pb.y-pa.y), b)
}

// divisible says whether a piece of a segment is long enough to be cut.
func (r *refiner) divisible(l float64) bool { return l > r.tol*finestPiece }

// cutShare is where to cut a segment, as a share of its length.
func (r *refiner) cutShare(h int32) float64 {
	a, b := r.ends(h)
	s := &r.bases[r.t[h>>2].s[h&3]]
	corner := int32(-1)
	switch {
	case s.sharpP && s.sharpQ:
		if !(a == s.p && b == s.q || a == s.q && b == s.p) {
			corner = s.p
			if r.distance(s.q, a)+r.distance(s.q, b) < r.distance(s.p, a)+r.distance(s.p, b) {
				corner = s.q
			}
		}
	case s.sharpP:
		corner = s.p
	case s.sharpQ:
		corner = s.q
	}
	if corner < 0 {
		return 0.5
	}
	scale := *r.shellScale(r.t[h>>2].s[h&3], corner)
	return shellFraction(scale*r.distance(corner, a), scale*r.distance(corner, b))
}

// shellFraction gives where between the distances da and db of the ends from a corner to cut: at the distance in the middle
// third that is the most even multiple of a power of two, so that all segments of the corner are cut on the same shells.
func shellFraction(da, db float64) float64 {
	lo, hi := min(da, db), max(da, db)
	third := (hi - lo) / 3
	lo, hi = lo+third, hi-third
	_, e := math.Frexp(hi)
	for {
		step := math.Ldexp(1, e)
		if d := math.Floor(hi/step) * step; d >= lo && d > 0 {
			return (d - da) / (db - da)
		}
		e--
	}
}

// cutAt puts a vertex into a segment and gives the handle of the piece that ends at b, or -1 when rounding forbids the cut.
func (r *refiner) cutAt(h int32, x, y float64, b int32) int32 {
	s := r.t[h>>2].s[h&3]
	byCircles := true
	r.digCavity(-1, h, x, y)
	if !r.starShaped(x, y) {
		byCircles = false
		r.digSmallest(-1, h)
		if !r.starShaped(x, y) {
			r.refused++
			return -1
		}
	}
	v := int32(len(r.p))
	r.p = append(r.p, vertex{x: x, y: y, seg: s, kind: segmentVertex, h: r.sizeAt(x, y)})
	r.fillCavity(v)
	if !byCircles {
		r.restore()
	}
	r.afterInsertion()
	for _, t := range r.made {
		tr := &r.t[t]
		for k := int32(0); k < 3; k++ {
			if p, q := r.ends(4*t + k); tr.s[k] == s && (p == v && q == b || p == b && q == v) {
				if p == b { // give the side that runs from a to b if there is one; either side cuts alike
					if tr.n[k] >= 0 {
						return tr.n[k]
					}
				}
				return 4*t + k
			}
		}
	}
	return -1
}

// restore flips around the triangles just made until they are Delaunay, and lists in r.made all that changed.
func (r *refiner) restore() {
	for _, t := range r.made {
		r.flips = append(r.flips, 4*t, 4*t+1, 4*t+2)
	}
	r.legalise(func(t int32) {
		for _, u := range r.made {
			if u == t {
				return
			}
		}
		r.made = append(r.made, t)
	})
}

// sizeAt is the wanted size at a place; unknown in the first stage.
func (r *refiner) sizeAt(x, y float64) float64 {
	if r.field == nil {
		return 0
	}
	return r.field.at(x, y)
}
