package mesh

import "math"

// markSharp finds the corners where two segments meet at less than sharpAngleDeg, in the metric of the wedge between them.
func (c *carved) markSharp() {
	var wedges []wedge
	cosSharp := math.Cos(sharpAngleDeg * math.Pi / 180)
	for t := range c.t {
		for k := int32(0); k < 3; k++ {
			if c.t[t].s[prev3[k]] < 0 { // edge v[k] -> v[k+1] starts a wedge at v[k]
				continue
			}
			if w, ok := c.wedgeAt(4*int32(t)+prev3[k], cosSharp); ok {
				c.setSharp(w.s, w.corner)
				c.setSharp(w.o, w.corner)
				wedges = append(wedges, w)
			}
		}
	}
	if c.metrics != nil {
		c.scaleShells(wedges)
		c.markMixed()
	}
}

// wedge is a sharp corner between two segments.
type wedge struct {
	corner int32
	s, o   int32   // segments, counter-clockwise
	ratio  float64 // metric length per length along o, over that along s
}

// wedgeAt looks from the constrained edge h = (a, b) counter-clockwise round a to the next one; ok when they are sharp.
func (c *carved) wedgeAt(h int32, cosSharp float64) (w wedge, ok bool) {
	a, b := c.ends(h)
	first := c.t[h>>2].s[h&3]
	t := h >> 2
	for range c.t {
		k := c.corner(t, a)
		d := c.t[t].v[prev3[k]]
		out := 4*t + next3[k] // edge d -> a
		if s := c.t[t].s[out&3]; s >= 0 {
			region := c.t[t].region
			if s == first || c.cosine(region, a, b, d) <= cosSharp || c.orientV(a, b, d) <= 0 {
				return w, false
			}
			return wedge{a, first, s, c.stretch(region, a, d) / c.stretch(region, a, b)}, true
		}
		t = c.t[t].n[out&3] >> 2
	}
	return w, false
}

// stretch is the metric length of a-b per length.
func (m *triangulation) stretch(region, a, b int32) float64 {
	x, y := m.vector(region, a, b)
	return math.Hypot(x, y) / m.distance(a, b)
}

// scaleShells gives the segments of each sharp corner shell scales whose ratios fit every wedge between them. A chain of wedges
// can always be fitted; where sharp wedges fill the whole turn, the last one may not be.
func (c *carved) scaleShells(wedges []wedge) {
	at := make(map[[2]int32][]int32, 2*len(wedges)) // wedges of a segment at a corner; looked up only
	for i, w := range wedges {
		at[[2]int32{w.s, w.corner}] = append(at[[2]int32{w.s, w.corner}], int32(i))
		at[[2]int32{w.o, w.corner}] = append(at[[2]int32{w.o, w.corner}], int32(i))
	}
	done := make(map[[2]int32]bool, 2*len(wedges))
	for _, w := range wedges {
		stack := []int32{w.s}
		done[[2]int32{w.s, w.corner}] = true
		for len(stack) > 0 {
			s := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			for _, i := range at[[2]int32{s, w.corner}] {
				o, ratio := wedges[i].o, wedges[i].ratio
				if o == s {
					o, ratio = wedges[i].s, 1/ratio
				}
				if !done[[2]int32{o, w.corner}] {
					done[[2]int32{o, w.corner}] = true
					*c.shellScale(o, w.corner) = *c.shellScale(s, w.corner) * ratio
					stack = append(stack, o)
				}
			}
		}
	}
}

// shellScale is the shell scale of segment s at its end a.
func (c *carved) shellScale(s, a int32) *float64 {
	if c.bases[s].p == a {
		return &c.bases[s].scaleP
	}
	return &c.bases[s].scaleQ
}

// setSharp marks the end a of a base segment.
func (c *carved) setSharp(s, a int32) {
	if c.bases[s].p == a {
		c.bases[s].sharpP = true
	} else {
		c.bases[s].sharpQ = true
	}
}

// markMixed finds the segments that end where regions of different metrics meet.
func (c *carved) markMixed() {
	first := make([]int32, len(c.p)) // region first seen at a vertex, plus one
	mixed := make([]bool, len(c.p))
	for t := range c.t {
		for _, v := range c.t[t].v {
			if first[v] == 0 {
				first[v] = c.t[t].region + 1
			}
			mixed[v] = mixed[v] || c.metrics[first[v]-1] != c.metrics[c.t[t].region]
		}
	}
	for i := range c.bases {
		c.bases[i].mixed = mixed[c.bases[i].p] || mixed[c.bases[i].q]
	}
}
