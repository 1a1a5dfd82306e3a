package mesh

import "math"

// Error bounds of the floating-point filters, Shewchuk (1997), ccwerrboundA and iccerrboundA; unit roundoff 2^-53.
const (
	roundoff      = 1.0 / (1 << 53)
	orientBound   = (3 + 16*roundoff) * roundoff
	inCircleBound = (10 + 96*roundoff) * roundoff
	// quickBound is for the square of the sum of the three squared distances: a third of it is no less than the permanent, and the
	// added part is far more than its own rounding.
	quickBound = (1 + 1e-12) * inCircleBound / 3
)

// orient is positive when a, b, c turn counter-clockwise, negative when clockwise, zero when they are in line. The sign is
// exact: a floating-point filter first, expansions where it is undecided (Shewchuk 1997, section 4.3).
func orient(ax, ay, bx, by, cx, cy float64) float64 {
	l := float64((ax - cx) * (by - cy))
	r := float64((ay - cy) * (bx - cx))
	det := l - r
	bound := orientBound * (math.Abs(l) + math.Abs(r))
	if det > bound || -det > bound {
		return det
	}
	return orientExact(ax, ay, bx, by, cx, cy)
}

// inCircle is positive when d lies inside the circle through the counter-clockwise a, b, c, negative outside, zero on it. The
// sign is exact (Shewchuk 1997, section 4.4).
func inCircle(ax, ay, bx, by, cx, cy, dx, dy float64) float64 {
	adx, ady := ax-dx, ay-dy
	bdx, bdy := bx-dx, by-dy
	cdx, cdy := cx-dx, cy-dy

	bc, cb := float64(bdx*cdy), float64(cdx*bdy)
	ca, ac := float64(cdx*ady), float64(adx*cdy)
	ab, ba := float64(adx*bdy), float64(bdx*ady)
	al := float64(adx*adx) + float64(ady*ady)
	bl := float64(bdx*bdx) + float64(bdy*bdy)
	cl := float64(cdx*cdx) + float64(cdy*cdy)

	det := float64(al*(bc-cb)) + float64(bl*(ca-ac)) + float64(cl*(ab-ba))
	permanent := float64((math.Abs(bc)+math.Abs(cb))*al) + float64((math.Abs(ca)+math.Abs(ac))*bl) +
		float64((math.Abs(ab)+math.Abs(ba))*cl)
	bound := inCircleBound * permanent
	if det > bound || -det > bound {
		return det
	}
	return inCircleExact(ax, ay, bx, by, cx, cy, dx, dy)
}

// orientExact evaluates the determinant of orient by expansions.
func orientExact(ax, ay, bx, by, cx, cy float64) float64 {
	acx, bcy := difference(ax, cx), difference(by, cy)
	acy, bcx := difference(ay, cy), difference(bx, cx)
	var l, r [8]float64
	var d [16]float64
	return top(subtract(multiply(acx.terms(), bcy.terms(), l[:0]), multiply(acy.terms(), bcx.terms(), r[:0]), d[:0]))
}

// inCircleExact evaluates the determinant of inCircle by expansions.
func inCircleExact(ax, ay, bx, by, cx, cy, dx, dy float64) float64 {
	adx, ady := difference(ax, dx), difference(ay, dy)
	bdx, bdy := difference(bx, dx), difference(by, dy)
	cdx, cdy := difference(cx, dx), difference(cy, dy)
	a := lifted(adx, ady, bdx, bdy, cdx, cdy)
	b := lifted(bdx, bdy, cdx, cdy, adx, ady)
	c := lifted(cdx, cdy, adx, ady, bdx, bdy)
	return top(add(add(a, b, nil), c, nil))
}

// lifted is (ax² + ay²)(bx cy - cx by) as an expansion.
func lifted(ax, ay, bx, by, cx, cy pair) []float64 {
	var s1, s2, m1, m2 [8]float64
	var square, minor [16]float64
	sq := add(multiply(ax.terms(), ax.terms(), s1[:0]), multiply(ay.terms(), ay.terms(), s2[:0]), square[:0])
	mi := subtract(multiply(bx.terms(), cy.terms(), m1[:0]), multiply(cx.terms(), by.terms(), m2[:0]), minor[:0])
	return multiply(sq, mi, nil)
}
