package mesh

import "math"

const (
	sampleVariation = 1.0  // an integration sample is cut while the size may vary across it by more than this share
	sampleLeast     = 0.05 // nor is one cut that is worth less than this many squares of the size: slivers at sharp corners
	sampleDepth     = 30   // halvings at most
	nodesPerIdeal   = 0.98 // nodes made for each node of a mesh of equilateral triangles of the wanted size: at least, measured
)

// bin sums the samples of nearly one size.
type bin struct {
	amount   float64 // area [m²] or length [m]
	uncut    float64 // the same over size² or size: what it is worth when the size is not capped [-]
	smallest float64 // [m]
}

// bins holds samples by their size.
type bins [binCount]bin

const (
	binBits     = 5                      // leading bits of the fraction that tell bins apart: 32 bins an octave
	binShift    = 52 - binBits           // of the bits of a floating-point number
	binCount    = 80 << binBits          // from 2^-40 to 2^40 m: tolerance of a millimetre's domain to beyond any coordinate
	binSmallest = (1023 - 40) << binBits // number of the first bin, counted from zero
)

// put files a sample worth so much at its size.
func (b *bins) put(h, amount, worth float64) {
	i := int(math.Float64bits(h)>>binShift) - binSmallest
	c := &b[max(0, min(binCount-1, i))]
	c.amount += amount
	c.uncut += worth
	if c.smallest == 0 || h < c.smallest {
		c.smallest = h
	}
}

// integral holds samples of the size field, so that the number of nodes is known for any coarsest size.
type integral struct {
	areas, lengths bins
	largest        float64 // size anywhere, without the cap [m]
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

// area samples a triangle, cutting its longest side until the size is even enough. The mean of 1/size² is that at the centroid with the
// second-order term of a size that grows evenly: the variance of a triangle along any direction is about a 72nd of its squared sides.
func (in *integral) area(f *sizeField, ax, ay, bx, by, cx, cy float64, depth int) {
	la := (bx-cx)*(bx-cx) + (by-cy)*(by-cy)
	lb := (cx-ax)*(cx-ax) + (cy-ay)*(cy-ay)
	lc := (ax-bx)*(ax-bx) + (ay-by)*(ay-by)
	longest := max(la, lb, lc) // squared
	h, growth := f.sample((ax+bx+cx)/3, (ay+by+cy)/3, longest)
	amount := ((bx-ax)*(cy-ay) - (by-ay)*(cx-ax)) / 2
	if vary := sampleVariation * h; depth == 0 || growth*growth*longest < vary*vary || amount < sampleLeast*h*h {
		spread := growth * growth / (h * h) * (la + lb + lc) / 72
		in.areas.put(h, amount, amount/(h*h)*(1+3*min(spread, 1)))
		in.largest = max(in.largest, h)
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
	h, growth := f.sample(mx, my, l*l)
	if depth == 0 || growth*l < sampleVariation*h {
		in.lengths.put(h, l, l/h)
		in.largest = max(in.largest, h)
		return
	}
	in.length(f, ax, ay, mx, my, depth-1)
	in.length(f, mx, my, bx, by, depth-1)
}

// nodes is the number of nodes expected for a coarsest size: half the triangles, and half the outline's nodes besides.
func (in *integral) nodes(coarsest float64) float64 {
	triangles, edges := 0.0, 0.0
	for i := range binCount {
		if a := &in.areas[i]; a.smallest < coarsest {
			triangles += max(a.uncut, a.amount/(coarsest*coarsest))
		} else {
			triangles += a.amount / (coarsest * coarsest)
		}
		if l := &in.lengths[i]; l.smallest < coarsest {
			edges += max(l.uncut, l.amount/coarsest)
		} else {
			edges += l.amount / coarsest
		}
	}
	return nodesPerIdeal*triangles*2/math.Sqrt(3) + edges/2 + 1
}

// coarsestFor finds the coarsest size that gives so many nodes. Where the growth alone asks for more, it is the largest size
// of the field: nothing is coarsened.
func (in *integral) coarsestFor(nodes float64) float64 {
	hi := in.largest
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
