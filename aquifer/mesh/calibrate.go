package mesh

import "math"

const (
	sampleVariation = 0.5  // an integration sample is cut while the size may vary across it by more than this share
	sampleLeast     = 0.05 // nor is one cut that is worth less than this many squares of the size: slivers at sharp corners
	sampleDepth     = 30   // halvings at most
	nodesPerIdeal   = 0.98 // nodes made for each node of a mesh of equilateral triangles of the wanted size: at least, measured
)

// sample is a part of the domain or of its outline over which the size is about the same.
type sample struct {
	h      float64 // size without the cap [m]
	amount float64 // area [m²] or length [m]
}

// integral holds samples of the size field, so that the number of nodes is known for any coarsest size.
type integral struct {
	areas, lengths []sample
}

// integrate samples a size field over the domain.
func (c *carved) integrate(f *sizeField) *integral {
	in := &integral{}
	for t := range c.t {
		tr := &c.t[t]
		if tr.v[0] < 0 {
			continue
		}
		a, b, d := &c.p[tr.v[0]], &c.p[tr.v[1]], &c.p[tr.v[2]]
		in.area(f, a.x, a.y, b.x, b.y, d.x, d.y, sampleDepth)
		for k := int32(0); k < 3; k++ {
			if tr.n[k] < 0 {
				p, q := &c.p[tr.v[next3[k]]], &c.p[tr.v[prev3[k]]]
				in.length(f, p.x, p.y, q.x, q.y, sampleDepth)
			}
		}
	}
	return in
}

// area samples a triangle, cutting its longest side until the size is even enough.
func (in *integral) area(f *sizeField, ax, ay, bx, by, cx, cy float64, depth int) {
	la := (bx-cx)*(bx-cx) + (by-cy)*(by-cy)
	lb := (cx-ax)*(cx-ax) + (cy-ay)*(cy-ay)
	lc := (ax-bx)*(ax-bx) + (ay-by)*(ay-by)
	h := f.free((ax+bx+cx)/3, (ay+by+cy)/3)
	longest := max(la, lb, lc) // squared
	amount := ((bx-ax)*(cy-ay) - (by-ay)*(cx-ax)) / 2
	if vary := sampleVariation * h; depth == 0 || f.growth*f.growth*longest < vary*vary || amount < sampleLeast*h*h {
		in.areas = append(in.areas, sample{h, amount})
		return
	}
	switch longest {
	case la:
		ax, ay, bx, by, cx, cy = bx, by, cx, cy, ax, ay
	case lb:
		ax, ay, bx, by, cx, cy = cx, cy, ax, ay, bx, by
	}
	mx, my := (ax+bx)/2, (ay+by)/2
	in.area(f, ax, ay, mx, my, cx, cy, depth-1)
	in.area(f, mx, my, bx, by, cx, cy, depth-1)
}

// length samples a stretch of the outline.
func (in *integral) length(f *sizeField, ax, ay, bx, by float64, depth int) {
	l := math.Hypot(bx-ax, by-ay)
	mx, my := (ax+bx)/2, (ay+by)/2
	h := f.free(mx, my)
	if depth == 0 || f.growth*l < sampleVariation*h {
		in.lengths = append(in.lengths, sample{h, l})
		return
	}
	in.length(f, ax, ay, mx, my, depth-1)
	in.length(f, mx, my, bx, by, depth-1)
}

// nodes is the number of nodes expected for a coarsest size: half the triangles, and half the outline's nodes besides.
func (in *integral) nodes(coarsest float64) float64 {
	triangles, edges := 0.0, 0.0
	for _, s := range in.areas {
		h := min(s.h, coarsest)
		triangles += s.amount * 4 / (math.Sqrt(3) * h * h)
	}
	for _, s := range in.lengths {
		edges += s.amount / min(s.h, coarsest)
	}
	return nodesPerIdeal*triangles/2 + edges/2 + 1
}

// coarsestFor finds the coarsest size that gives so many nodes. Where the growth alone asks for more, it is the largest size
// of the field: nothing is coarsened.
func (in *integral) coarsestFor(nodes float64) float64 {
	hi := 0.0
	for _, s := range in.areas {
		hi = max(hi, s.h)
	}
	for _, s := range in.lengths {
		hi = max(hi, s.h)
	}
	if in.nodes(hi) >= nodes {
		return hi
	}
	lo := hi
	for in.nodes(lo) < nodes {
		lo /= 2
	}
	for range 50 { // halves the bracket to rounding
		mid := (lo + hi) / 2
		if in.nodes(mid) < nodes {
			hi = mid
		} else {
			lo = mid
		}
	}
	return lo
}
