package mesh

// Outcomes of a walk.
const (
	walkInside  = iota // the triangle holds the point, maybe on its border
	walkBlocked        // a segment or the outside lies between; the handle is that edge, seen from the near side
	walkLost           // the walk did not end within its steps, which needs a start outside its triangle
)

// walk goes from (x0, y0), which lies in triangle t, straight towards (x, y). With stop it ends at the first segment that is
// crossed. All turns are decided by exact orientation tests (straight walk; Devillers, Pion & Teillaud 2002).
func (m *triangulation) walk(t int32, x0, y0, x, y float64, stop bool) (int32, int) {
	h, in := m.firstExit(t, x0, y0, x, y)
	if in {
		return t, walkInside
	}
	if h < 0 {
		return t, walkLost
	}
	for range len(m.t) + 3 {
		tr := &m.t[h>>2]
		k := h & 3
		g := tr.n[k]
		if g < 0 || (stop && tr.s[k] >= 0) {
			return h, walkBlocked
		}
		t = g >> 2
		tr = &m.t[t]
		j := g & 3
		v := &m.p[tr.v[j]]
		// The apex left of the ray: leave over the edge right of it, and the other way round.
		k = prev3[j] // edge v[j] -> v[j+1]
		if orient(x0, y0, x, y, v.x, v.y) > 0 {
			k = next3[j] // edge v[j+2] -> v[j]
		}
		a, b := &m.p[tr.v[next3[k]]], &m.p[tr.v[prev3[k]]]
		if orient(a.x, a.y, b.x, b.y, x, y) >= 0 {
			return t, walkInside
		}
		h = 4*t + k
	}
	return t, walkLost
}

// firstExit finds the edge over which the ray from (x0, y0) to (x, y) leaves triangle t.
func (m *triangulation) firstExit(t int32, x0, y0, x, y float64) (h int32, in bool) {
	tr := &m.t[t]
	in = true
	h = -1
	for k := int32(0); k < 3; k++ {
		a, b := &m.p[tr.v[next3[k]]], &m.p[tr.v[prev3[k]]]
		if orient(a.x, a.y, b.x, b.y, x, y) >= 0 {
			continue
		}
		in = false
		if h < 0 || orient(x0, y0, x, y, a.x, a.y) <= 0 && orient(x0, y0, x, y, b.x, b.y) >= 0 {
			h = 4*t + k
		}
	}
	return h, in
}

// find locates (x, y) by a visibility walk that ignores segments; used while the triangulation is convex.
func (m *triangulation) find(t int32, x, y float64) int32 {
	turn := int32(0)
	for range 4*len(m.t) + 16 {
		tr := &m.t[t]
		moved := false
		for i := int32(0); i < 3; i++ {
			k := (i + turn) % 3
			a, b := &m.p[tr.v[next3[k]]], &m.p[tr.v[prev3[k]]]
			if tr.n[k] >= 0 && orient(a.x, a.y, b.x, b.y, x, y) < 0 {
				t = tr.n[k] >> 2
				moved = true
				break
			}
		}
		if !moved {
			return t
		}
		turn = (turn + 1) % 3 // a fixed change of the first edge tried, so that a walk cannot circle in a constrained mesh
	}
	return -1
}
