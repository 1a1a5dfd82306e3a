package mesh

import "math"

// metric maps a region's plane so that its transmissivity becomes isotropic: x' = a x + b y, y' = b x + c y with
// determinant 1, the symmetric square root of T^-1 scaled to keep the area.
type metric struct {
	a, b, c float64
	plain   bool // the identity
}

// metricOf makes the map of a tensor; ok is false when the tensor is not finite and positive.
func metricOf(t Tensor) (metric, bool) {
	det := t.Txx*t.Tyy - t.Txy*t.Txy
	if !(det > 0 && t.Txx > 0 && t.Tyy > 0) || math.IsInf(det, 0) {
		return metric{}, false
	}
	if t.Txy == 0 && t.Txx == t.Tyy {
		return metric{1, 0, 1, true}, true
	}
	// With determinant 1, the inverse is the adjugate and sqrt(M) = (M + I)/sqrt(trace(M) + 2).
	s := math.Sqrt(det)
	xx, xy, yy := t.Tyy/s, -t.Txy/s, t.Txx/s
	d := math.Sqrt(xx + yy + 2)
	return metric{(xx + 1) / d, xy / d, (yy + 1) / d, false}, true
}

// to maps a point into the isotropic frame.
func (m *metric) to(x, y float64) (float64, float64) {
	return float64(m.a*x) + float64(m.b*y), float64(m.b*x) + float64(m.c*y)
}

// from maps back.
func (m *metric) from(x, y float64) (float64, float64) {
	return m.c*x - m.b*y, m.a*y - m.b*x
}

// inside is the in-circle test in the isotropic frame. Images are rounded, but each vertex has one image, and the images'
// orientation is required too; so flips strictly lower the surface lifted over the images and cannot go round for ever.
func (m *metric) inside(a, b, c *vertex, x, y float64) bool {
	if m.plain {
		return inCircle(a.x, a.y, b.x, b.y, c.x, c.y, x, y) > 0
	}
	ax, ay := m.to(a.x, a.y)
	bx, by := m.to(b.x, b.y)
	cx, cy := m.to(c.x, c.y)
	dx, dy := m.to(x, y)
	return orient(ax, ay, bx, by, cx, cy) > 0 && inCircle(ax, ay, bx, by, cx, cy, dx, dy) > 0
}
