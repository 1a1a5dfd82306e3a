package aquifer

import (
	"math"

	"springbound/aquifer/mesh"
)

// buildVolumes computes, for every triangle, the conductance of each edge for the triangle's own tensor and the part of
// each node's control volume.
//
// Conductance of the edge opposite vertex k, with i, j the other two: C_k = -area grad(phi_i)·T grad(phi_j), which is
// T cot(angle k)/2 for isotropic T (Bank & Rose 1987). Areas are those of the perpendicular bisectors in the metric of the
// inverse tensor, area preserved; where an obtuse angle faces a line or the outline they are thirds of the triangle, so that
// no control volume is negative on either side of a line.
func (m *Model) buildVolumes() {
	n := len(m.Mesh.Triangles) / 3
	m.conductance = make([]float64, 3*n)
	m.area = make([]float64, 3*n)
	for t := 0; t < n; t++ {
		r := &m.regions[m.Mesh.Region[t]]
		m.triangleVolumes(t, r.tensor, r.mean)
	}
}

func (m *Model) triangleVolumes(t int, tensor mesh.Tensor, mean float64) {
	var ex, ey [3]float64 // edge opposite vertex k, from k+1 to k+2
	for k := 0; k < 3; k++ {
		a, b := m.Mesh.Triangles[3*t+(k+1)%3], m.Mesh.Triangles[3*t+(k+2)%3]
		ex[k], ey[k] = m.Mesh.X[b]-m.Mesh.X[a], m.Mesh.Y[b]-m.Mesh.Y[a]
	}
	area := (ex[0]*ey[1] - ey[0]*ex[1]) / 2
	// rot(e) = (-ey, ex); grad(phi_k) = rot(e_k)/(2 area)
	product := func(i, j int) float64 {
		return tensor.Txx*ey[i]*ey[j] - tensor.Txy*(ey[i]*ex[j]+ex[i]*ey[j]) + tensor.Tyy*ex[i]*ex[j]
	}
	c := m.conductance[3*t : 3*t+3]
	obtuse := -1
	for k := 0; k < 3; k++ {
		c[k] = -product((k+1)%3, (k+2)%3) / (4 * area)
		if c[k] < 0 {
			obtuse = k
		}
	}
	part := m.area[3*t : 3*t+3]
	if obtuse >= 0 && m.Mesh.Constraint[t]>>obtuse&1 == 1 {
		part[0], part[1], part[2] = area/3, area/3, area/3
		return
	}
	// In the metric M = mean T^-1 the squared length of e is product(e, e)/mean, since rot(e)'T rot(e) = det(T) e'T^-1 e.
	// Part at vertex i: (|e_ij|² cot k + |e_ik|² cot j)/8 with cot k = 2 C_k/mean.
	var length2 [3]float64
	for k := 0; k < 3; k++ {
		length2[k] = product(k, k) / mean
	}
	for i := 0; i < 3; i++ {
		j, k := (i+1)%3, (i+2)%3
		part[i] = (length2[k]*c[k] + length2[j]*c[j]) / (4 * mean)
	}
}

// CountWrongSigns returns how many couplings between nodes are not conductances (negative beyond rounding): none where T is isotropic
// and no line is encroached. Each is the sum over the edge's two triangles, measured against the largest of its parts.
func (m *Model) CountWrongSigns() int {
	count := 0
	for t := 0; t < len(m.Mesh.Triangles)/3; t++ {
		for k := 0; k < 3; k++ {
			c, o, size := m.conductance[3*t+k], m.Mesh.Neighbours[3*t+k], math.Abs(m.conductance[3*t+k])
			if o >= 0 {
				if int(o) < t {
					continue
				}
				for l := 0; l < 3; l++ {
					if m.Mesh.Neighbours[3*o+int32(l)] == int32(t) {
						c += m.conductance[3*int(o)+l]
						size = math.Max(size, math.Abs(m.conductance[3*int(o)+l]))
					}
				}
			}
			if !(c >= -signRounding*math.Max(size, m.regions[m.Mesh.Region[t]].mean)) {
				count++
			}
		}
	}
	return count
}

// signRounding is how far below zero rounding may put a coupling that is exactly zero (a right angle facing the edge),
// relative to the triangle's transmissivity: a cotangent is computed to a few hundred units of rounding in the worst angle kept.
const signRounding = 1e-12
