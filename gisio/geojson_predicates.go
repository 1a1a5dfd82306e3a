package gisio

import (
	"math"
	"math/big"

	"github.com/paulmach/orb"
)

// orientationBound is the error bound of the rounded determinant relative to the sum of its two products
// (J. R. Shewchuk 1997, Adaptive Precision Floating-Point Arithmetic and Fast Robust Geometric Predicates, ccwerrboundA).
const orientationBound = (3 + 16*0x1p-53) * 0x1p-53

// Products of differences between these magnitudes neither underflow nor overflow, nor do their rounding errors.
const (
	smallestSafeProduct = 0x1p-900
	largestSafeProduct  = 0x1p900
)

// orientation gives the exact sign of the turn a, b, c: 1 to the left, -1 to the right, 0 straight. The points must be finite.
func orientation(a, b, c orb.Point) int {
	if a == b || b == c || c == a {
		return 0
	}
	abx, aby := b[0]-a[0], b[1]-a[1]
	acx, acy := c[0]-a[0], c[1]-a[1]
	left, right := abx*acy, aby*acx
	sum := math.Abs(left) + math.Abs(right)
	det := left - right
	if sum > smallestSafeProduct && sum < largestSafeProduct {
		if math.Abs(det) > orientationBound*sum {
			return sign(det)
		}
		if exactDifference(b[0], a[0], abx) && exactDifference(b[1], a[1], aby) &&
			exactDifference(c[0], a[0], acx) && exactDifference(c[1], a[1], acy) &&
			safeOrZero(left, abx, acy) && safeOrZero(right, aby, acx) {
			if left != right {
				return sign(det)
			}
			return sign(math.FMA(abx, acy, -left) - math.FMA(aby, acx, -right))
		}
	}
	return orientationRational(a, b, c)
}

// exactDifference tells whether d = x - y was free of rounding (two-sum, Knuth).
func exactDifference(x, y, d float64) bool {
	yv := x - d
	xv := d + yv
	return (x-xv)+(yv-y) == 0
}

// safeOrZero tells whether the rounding error of the product p = x y is representable.
func safeOrZero(p, x, y float64) bool {
	return x == 0 || y == 0 || math.Abs(p) > smallestSafeProduct
}

func orientationRational(a, b, c orb.Point) int {
	r := func(x float64) *big.Rat { return new(big.Rat).SetFloat64(x) }
	sub := func(x, y float64) *big.Rat { return new(big.Rat).Sub(r(x), r(y)) }
	left := new(big.Rat).Mul(sub(b[0], a[0]), sub(c[1], a[1]))
	right := new(big.Rat).Mul(sub(b[1], a[1]), sub(c[0], a[0]))
	return left.Cmp(right)
}

func sign(x float64) int {
	switch {
	case x > 0:
		return 1
	case x < 0:
		return -1
	}
	return 0
}

// before is the order of points by x, then y.
func before(p, q orb.Point) bool { return p[0] < q[0] || p[0] == q[0] && p[1] < q[1] }

// contact says how two segments meet.
type contact int

const (
	contactNone    contact = iota
	contactCross           // in one point inside both
	contactTouch           // in one point that is an end of at least one
	contactOverlap         // along a piece of some length
)

// segmentContact gives exactly how the segments a-b and c-d, both of some length, meet. The point is given for
// contactTouch; for contactOverlap it is one end of the common piece.
func segmentContact(a, b, c, d orb.Point) (contact, orb.Point) {
	oc, od := orientation(a, b, c), orientation(a, b, d)
	if oc == 0 && od == 0 {
		if before(b, a) {
			a, b = b, a
		}
		if before(d, c) {
			c, d = d, c
		}
		low, high := a, b
		if before(low, c) {
			low = c
		}
		if before(d, high) {
			high = d
		}
		switch {
		case low == high:
			return contactTouch, low
		case before(low, high):
			return contactOverlap, low
		}
		return contactNone, orb.Point{}
	}
	if oc*od > 0 {
		return contactNone, orb.Point{}
	}
	oa, ob := orientation(c, d, a), orientation(c, d, b)
	switch {
	case oa*ob > 0:
		return contactNone, orb.Point{}
	case oc == 0:
		return contactTouch, c
	case od == 0:
		return contactTouch, d
	case oa == 0:
		return contactTouch, a
	case ob == 0:
		return contactTouch, b
	}
	return contactCross, orb.Point{}
}

// place of a point against a ring.
type side int

const (
	outside side = iota
	onRing
	inside
)

// sideOfRing gives exactly where p lies against a closed ring (crossing number of the ray towards +x).
func sideOfRing(p orb.Point, ring []orb.Point) side {
	in := false
	for i := 1; i < len(ring); i++ {
		a, b := ring[i-1], ring[i]
		if a[1] > b[1] {
			a, b = b, a
		}
		if p[1] < a[1] || p[1] > b[1] {
			continue
		}
		if a[1] == b[1] {
			if p[0] >= math.Min(a[0], b[0]) && p[0] <= math.Max(a[0], b[0]) {
				return onRing
			}
			continue
		}
		switch turn := orientation(a, b, p); {
		case turn == 0:
			return onRing
		case turn > 0 && p[1] < b[1]:
			in = !in
		}
	}
	if in {
		return inside
	}
	return outside
}

// leftTurning tells whether a simple closed ring runs counterclockwise, by the turn at its first point in order of
// x, then y, where the ring is convex. A ring that lies on one line counts as not.
func leftTurning(ring []orb.Point) bool {
	n := len(ring) - 1
	low := 0
	for i := 1; i < n; i++ {
		if before(ring[i], ring[low]) {
			low = i
		}
	}
	return orientation(ring[(low+n-1)%n], ring[low], ring[(low+1)%n]) > 0
}
