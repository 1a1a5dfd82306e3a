package mesh

import (
	"context"
	"fmt"
	"math"
)

// States of a triangle during refinement.
const (
	stateGood   uint8 = iota // satisfies the size and the angle, or cannot be helped
	stateQueued              // waits in the queue
	stateLater               // has no finished neighbour yet: waits until the front reaches it
)

const (
	// oversize: a triangle is too large when circumradius x sqrt(3) exceeds this many wanted lengths. An equilateral triangle
	// of the wanted size has 1; the value makes the mean edge length come out near the wanted one.
	oversize = 1.35
	// clearly is what remains of a limit when rounding cannot carry a value over it: a dozen operations, of 1e-16 each.
	clearly = 1 - 1e-12
	// mildOversize: up to here a triangle next to a segment may stay rather than have the segment cut.
	mildOversize = 1.7
	// offCentreShare keeps an off-centre a little inside the limit of the angle wanted (Ungor 2004).
	offCentreShare = 0.95
	// rightAngleSlack: an angle facing a segment counts as above 90 degrees when its cosine is below minus this; rounding of a
	// true right angle gives about 1e-16 per unit of coordinate over edge length.
	rightAngleSlack = 1e-9
	// shellTolerance: two vertices are on one shell about a corner when their distances agree to this share.
	shellTolerance = 1e-3
	// hopelessShare: below this share of the wanted length a short edge comes from the input's own sharpness, or from a corner
	// at which regions of different metrics ask for pieces of different length for ever; its triangles are left.
	hopelessShare = 1.0 / 16
	// gapLengths: pieces of a segment are at most so many widths of the gap beside it before sizes are taken from them.
	gapLengths = 4
	// gapMargin: the apex may stand so far beyond the edge's end, in edge lengths; pieces on both sides of a gap often end
	// exactly opposite each other.
	gapMargin = 0.01
	// finestPiece of a tolerance is the shortest piece that a segment is cut into.
	finestPiece = 1.0 / 64
)

// item is a triangle, or an edge of it, as it was when queued.
type item struct {
	h     int32
	stamp uint32
}

// fifo is a queue of items.
type fifo struct {
	items []item
	head  int
}

// push appends an item.
func (q *fifo) push(i item) { q.items = append(q.items, i) }

// pop takes the oldest item.
func (q *fifo) pop() (item, bool) {
	if q.head == len(q.items) {
		q.items, q.head = q.items[:0], 0
		return item{}, false
	}
	i := q.items[q.head]
	q.head++
	if q.head > 1<<14 && 2*q.head > len(q.items) { // give the used half back
		n := copy(q.items, q.items[q.head:])
		q.items, q.head = q.items[:n], 0
	}
	return i, true
}

// refiner adds vertices until no segment is encroached and every triangle has the wanted size and angle.
type refiner struct {
	*carved
	field    *sizeField // nil in the first stage: segments only
	coarser  float64    // sizes asked for along lines are taken so many times coarser now
	ratio2   float64    // largest (circumradius / shortest edge)² allowed
	apex     float64    // distance of an off-centre from the base's middle per base length
	maxNodes int
	tol      float64

	long      fifo // segments to be cut for their length
	encroach  fifo // segments encroached
	triangles fifo
	later     fifo
	budgetHit bool
	refused   int // segment cuts that rounding or the corner bound forbade
	work      int
}

// newRefiner prepares the refinement.
func newRefiner(c *carved, angleDeg, tol float64, maxNodes int) *refiner {
	b := 1 / (2 * math.Sin(angleDeg*math.Pi/180))
	return &refiner{carved: c, coarser: largestCoarser, ratio2: b * b, apex: offCentreShare * (b + math.Sqrt(b*b-0.25)), tol: tol, maxNodes: maxNodes}
}

// queueSegments puts all segments on the lists that they belong to.
func (r *refiner) queueSegments() {
	for t := range r.t {
		if r.t[t].v[0] >= 0 {
			r.checkEdges(int32(t))
		}
	}
}

// checkEdges queues the segments of a triangle that are too long or that its apex encroaches upon.
func (r *refiner) checkEdges(t int32) {
	tr := &r.t[t]
	if tr.s[0]&tr.s[1]&tr.s[2] < 0 { // all are: no segment on it
		return
	}
	for k := int32(0); k < 3; k++ {
		if tr.s[k] < 0 {
			continue
		}
		if r.encroached(t, k) || r.field == nil && r.crowded(t, k) {
			r.encroach.push(item{4*t + k, tr.stamp})
		}
		if (tr.n[k] < 0 || tr.n[k] > 4*t+k) && r.tooLong(4*t+k) {
			r.long.push(item{4*t + k, tr.stamp})
		}
	}
}

// encroached says whether the apex lies inside the diametral circle of edge k, in the metric of the triangle's region.
func (r *refiner) encroached(t, k int32) bool {
	tr := &r.t[t]
	ax, ay := r.vector(tr.region, tr.v[k], tr.v[next3[k]])
	bx, by := r.vector(tr.region, tr.v[k], tr.v[prev3[k]])
	dot := ax*bx + ay*by
	return dot < 0 && dot*dot > rightAngleSlack*rightAngleSlack*(ax*ax+ay*ay)*(bx*bx+by*by)
}

// crowded says whether the apex stands so near the inner part of edge k that the pieces of the edge have to follow the gap; not
// at a sharp corner, where the gap closes.
func (r *refiner) crowded(t, k int32) bool {
	tr := &r.t[t]
	a, b, c := tr.v[next3[k]], tr.v[prev3[k]], tr.v[k]
	ex, ey := r.vector(tr.region, a, b)
	ux, uy := r.vector(tr.region, a, c)
	l2, along := ex*ex+ey*ey, ex*ux+ey*uy
	if !(along > -gapMargin*l2 && along < (1+gapMargin)*l2 && l2 > gapLengths*math.Abs(ex*uy-ey*ux)) {
		return false
	}
	return !r.acrossCorner(a, c) && !r.acrossCorner(b, c)
}

// relax empties the segment queues.
func (r *refiner) relax(ctx context.Context, limit int) error {
	for {
		if err := r.poll(ctx); err != nil {
			return err
		}
		i, ok := r.long.pop()
		if ok {
			if r.t[i.h>>2].stamp == i.stamp && r.room(limit) {
				r.divide(i.h)
			}
			continue
		}
		if i, ok = r.encroach.pop(); !ok {
			return nil
		}
		if r.t[i.h>>2].stamp == i.stamp && r.room(limit) {
			r.cutSegment(i.h)
		}
	}
}

// room says whether a vertex may be added within a limit.
func (r *refiner) room(limit int) bool {
	if len(r.p) < limit {
		return true
	}
	r.budgetHit = true
	return false
}

// poll looks at the context now and then.
func (r *refiner) poll(ctx context.Context) error {
	if r.work++; r.work%pollEvery == 0 && ctx.Err() != nil {
		return fmt.Errorf("mesh: stopped at %d nodes: %w", len(r.p), ctx.Err())
	}
	return nil
}

// run refines until all queues are empty.
func (r *refiner) run(ctx context.Context) error {
	for {
		if err := r.relax(ctx, r.maxNodes); err != nil {
			return err
		}
		i, ok := r.triangles.pop()
		central := false
		if !ok {
			if i, ok = r.later.pop(); !ok {
				return nil
			}
			central = true
		}
		t := i.h
		if tr := &r.t[t]; tr.stamp != i.stamp || tr.v[0] < 0 || tr.state == stateGood || (tr.state == stateLater) != central {
			continue
		}
		if !r.room(r.maxNodes) {
			r.t[t].state = stateGood
			continue
		}
		r.improve(t, central)
	}
}

// queueTriangles classifies all triangles.
func (r *refiner) queueTriangles() {
	for t := range r.t {
		if r.t[t].v[0] >= 0 {
			r.classify(int32(t))
		}
	}
}

// classify sets the state of a new triangle, queues it when bad, and wakes waiting neighbours when good.
func (r *refiner) classify(t int32) {
	tr := &r.t[t]
	switch r.glance(tr) {
	case looksGood:
		r.settle(t)
		return
	case unclear:
		s := r.shapeOf(t)
		if tooLarge, thin := r.faults(t, &s); !(tooLarge > 0) && !thin {
			r.settle(t)
			return
		}
	}
	tr.state = stateQueued
	r.triangles.push(item{t, tr.stamp})
}

// What a glance tells of a triangle.
const (
	unclear = iota
	looksGood
	looksLarge
)

// glance says whether a triangle is clearly good or clearly too large: what faults finds, without a division, for regions without a
// metric of their own.
func (r *refiner) glance(tr *triangle) int {
	if r.metrics != nil {
		return unclear
	}
	a, b, c := &r.p[tr.v[0]], &r.p[tr.v[1]], &r.p[tr.v[2]]
	ux, uy, vx, vy := b.x-a.x, b.y-a.y, c.x-a.x, c.y-a.y
	wx, wy := vx-ux, vy-uy
	u2, v2, w2 := ux*ux+uy*uy, vx*vx+vy*vy, wx*wx+wy*wy
	cross := ux*vy - uy*vx
	squares, product := 4*cross*cross, u2*v2*w2 // their ratio is the squared circumradius
	h := a.h + b.h + c.h                        // three times the size wanted
	limit := oversize * oversize / 27 * h * h * squares
	switch {
	case product > limit*(2-clearly):
		return looksLarge
	case product <= limit*clearly && product <= clearly*r.ratio2*min(u2, v2, w2)*squares:
		return looksGood
	}
	return unclear
}

// settle marks a triangle good and wakes the neighbours that waited for one.
func (r *refiner) settle(t int32) {
	tr := &r.t[t]
	tr.state = stateGood
	for k := range 3 {
		if e := tr.n[k]; e >= 0 && tr.s[k] < 0 && r.t[e>>2].state == stateLater {
			r.t[e>>2].state = stateQueued
			r.triangles.push(item{e >> 2, r.t[e>>2].stamp})
		}
	}
}

// afterInsertion examines the triangles made by the last insertion.
func (r *refiner) afterInsertion() {
	for _, t := range r.made {
		r.checkEdges(t)
	}
	if r.field == nil {
		return
	}
	for _, t := range r.made {
		r.classify(t)
	}
}
