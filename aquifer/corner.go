package aquifer

import (
	"math"
	"slices"
)

// Corner is a node about which heads go as r^Exponent with r the distance from it, so that their gradient has no limit there: a re-entrant
// corner, an end of a prescribed head, a bend or an end of a border between transmissivities.
type Corner struct {
	Node      int32
	Exponent  float64 // above 0, below 1 [-]
	Triangles []int32 // those within cornerRings of it, ascending
}

const (
	// cornerRings is how many rings of triangles about a corner hold what its singularity does to the error: the terms fall with the distance
	// r from it as r^(2a-2) a decade, so that for a = 1/2 a sixth of them lies beyond.
	cornerRings = 6
	// mildExponent is from which exponent on a corner is none: the error then falls by 3.7 instead of 4.
	mildExponent = 0.95
	// exponentStep is the step in which exponents are looked for, less than they lie apart.
	exponentStep = 0.01
)

// sector is a part of the plane about a node with one transmissivity.
type sector struct{ angle, mean float64 }

// Corners lists the corners. The exponent is the least a for which r^a f(angle) solves the flow equation about the node, with f” = -a² f in every
// triangle, head and flux continuous between them, f = 0 at prescribed heads and f' = 0 at other outlines (Strang & Fix 1973, ch. 8). Where different
// anisotropic tensors meet, none is looked for.
func (m *Model) Corners() []Corner {
	var out []Corner
	for n := range int32(len(m.Mesh.X)) {
		if !m.onOutline[n] && m.uniformAround(n, n) {
			continue
		}
		fan, open := m.fan(n)
		var sectors []sector
		mixed := false
		for _, t := range fan {
			r := &m.regions[m.Mesh.Region[t]]
			mixed = mixed || r.tensor != m.regions[m.Mesh.Region[fan[0]]].tensor && (r.anisotropic || m.regions[m.Mesh.Region[fan[0]]].anisotropic)
			sectors = append(sectors, sector{m.angleAt(t, n, r.tensor), r.mean})
		}
		if mixed {
			continue
		}
		first, last := m.corner(fan[0], n), m.corner(fan[len(fan)-1], n)
		a := m.Mesh.Triangles[3*int(fan[0])+(first+1)%3]
		b := m.Mesh.Triangles[3*int(fan[len(fan)-1])+(last+2)%3]
		held := m.isPrescribed[n]
		if e := leastExponent(sectors, open, held && m.isPrescribed[a], held && m.isPrescribed[b]); e < mildExponent {
			out = append(out, Corner{n, e, m.rings(n, cornerRings)})
		}
	}
	return out
}

// fan lists the triangles about a node counter-clockwise; open: from one outline edge to another.
func (m *Model) fan(n int32) (fan []int32, open bool) {
	all := m.Mesh.NodeTriangles(n)
	start := all[0]
	for _, t := range all {
		if m.Mesh.Neighbours[3*int(t)+(m.corner(t, n)+2)%3] < 0 {
			start, open = t, true
		}
	}
	for t := start; ; {
		fan = append(fan, t)
		t = m.Mesh.Neighbours[3*int(t)+(m.corner(t, n)+1)%3]
		if t < 0 || t == start || len(fan) == len(all) {
			return fan, open
		}
	}
}

// leastExponent finds the least exponent below 1, or 1. A solution is carried through the sectors as (f, T f').
func leastExponent(sectors []sector, open, heldFirst, heldLast bool) float64 {
	through := func(a, f, g float64) (float64, float64) {
		for _, s := range sectors {
			sin, cos := math.Sincos(a * s.angle)
			f, g = f*cos+g*sin/(s.mean*a), g*cos-f*s.mean*a*sin
		}
		return f, g
	}
	mean := sectors[0].mean
	miss := func(a float64) float64 {
		if !open { // the same after one turn: the trace of the turn's matrix, whose determinant is 1, is 2
			f, _ := through(a, 1, 0)
			_, g := through(a, 0, mean)
			return f + g/mean - 2
		}
		f, g := 1.0, 0.0
		if heldFirst {
			f, g = 0, mean
		}
		f, g = through(a, f, g)
		if heldLast {
			return f
		}
		return g
	}
	low := exponentStep
	sign := miss(low) > 0
	for a := 2 * exponentStep; a < 1; a += exponentStep {
		if miss(a) > 0 == sign {
			low = a
			continue
		}
		high := a
		for range 30 { // to 1e-11
			mid := (low + high) / 2
			if miss(mid) > 0 == sign {
				low = mid
			} else {
				high = mid
			}
		}
		return high
	}
	return 1
}

// rings lists the triangles within so many rings of a node, ascending.
func (m *Model) rings(n int32, count int) []int32 {
	seen := map[int32]bool{}
	var out []int32
	front := []int32{n}
	reached := map[int32]bool{n: true}
	for range count {
		var next []int32
		for _, v := range front {
			for _, t := range m.Mesh.NodeTriangles(v) {
				if seen[t] {
					continue
				}
				seen[t] = true
				out = append(out, t)
				for _, w := range m.Mesh.Triangles[3*t : 3*t+3] {
					if !reached[w] {
						reached[w] = true
						next = append(next, w)
					}
				}
			}
		}
		front = next
	}
	slices.Sort(out)
	return out
}
