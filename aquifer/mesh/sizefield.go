package mesh

import "math"

// source is a place that wants small triangles.
type source struct {
	x, y   float64
	size   float64 // wanted edge length there [m]
	growth float64 // of the edge length per distance from it [-]
}

const (
	leafSources   = 10   // sources that a quadtree leaf evaluates one by one
	leafVariation = 0.25 // a leaf across which the size varies by less than this share keeps its best source only
	fieldDepth    = 40   // levels of the quadtree: 10,000 km down to 10 µm
)

// sizeField is h(x) = min(coarsest, min over sources of size + growth dist), each source with a growth of its own. A quadtree holds in
// each leaf the sources that can be the smallest somewhere in it.
type sizeField struct {
	coarsest, growth float64 // growth is the largest of any source
	limit            float64 // sizes above it were not looked into; +Inf none [m]
	x, y, side       float64 // lower left corner and side of the root
	cells            []fieldCell
	lists            []source
	scratch          []nearSource // while the tree is made: a stack of kept sources
}

// nearSource is a source that a cell keeps.
type nearSource struct {
	source
	least float64 // no less than this anywhere in the cell [m]
}

// fieldCell is a quadtree cell: an inner one with four children in a row, or a leaf with a list.
type fieldCell struct {
	child    int32 // first child; -1 for a leaf
	from, to int32 // list of a leaf
}

// newSizeField builds the quadtree over a box. Sizes above the limit are not told apart.
func newSizeField(sources []source, limit, x0, y0, x1, y1 float64) *sizeField {
	side := max(x1-x0, y1-y0) * 1.001
	growth := 0.0
	for _, s := range sources {
		growth = max(growth, s.growth)
	}
	f := &sizeField{coarsest: limit, growth: growth, limit: limit, x: x0, y: y0, side: side}
	f.cells = append(make([]fieldCell, 0, 8*len(sources)), fieldCell{child: -1})
	f.lists = make([]source, 0, 8*len(sources))
	f.scratch = make([]nearSource, 0, 8*len(sources))
	for _, s := range sources {
		f.scratch = append(f.scratch, nearSource{source: s})
	}
	f.split(0, 0, x0+side/2, y0+side/2, side/2, 0)
	f.scratch = nil
	return f
}

// split fills cell c, whose centre and half side are given, from the sources of its parent, which are f.scratch[from:]. What it
// keeps for its own children goes on top and is taken off again.
func (f *sizeField) split(c int32, from int, cx, cy, half float64, depth int) {
	r := half * math.Sqrt2
	to := len(f.scratch)
	upper, best := f.limit, -1 // upper bounds the size anywhere in the cell
	for i := from; i < to; i++ {
		s := f.scratch[i]
		if s.least > upper { // in the parent's cell, so here too
			continue
		}
		dx, dy := s.x-cx, s.y-cy
		d := math.Sqrt(dx*dx + dy*dy)
		if u := s.size + s.growth*(d+r); u < upper {
			upper, best = u, len(f.scratch)
		}
		s.least = s.size + s.growth*max(0, d-r)
		if s.least <= upper {
			f.scratch = append(f.scratch, s)
		}
	}
	kept := f.scratch[to:]
	if best >= 0 {
		if b := kept[best-to]; 2*f.growth*r < leafVariation*(upper-b.growth*r) {
			kept[0], kept = b, kept[:1]
		}
	}
	n := 0
	for _, s := range kept {
		if s.least <= upper {
			kept[n] = s
			n++
		}
	}
	f.scratch = f.scratch[:to+n]
	if n <= leafSources || depth == fieldDepth {
		f.cells[c].from = int32(len(f.lists))
		for _, s := range f.scratch[to:] {
			f.lists = append(f.lists, s.source)
		}
		f.cells[c].to = int32(len(f.lists))
		f.scratch = f.scratch[:to]
		return
	}
	child := int32(len(f.cells))
	f.cells[c].child = child
	f.cells = append(f.cells, fieldCell{child: -1}, fieldCell{child: -1}, fieldCell{child: -1}, fieldCell{child: -1})
	q := half / 2
	f.split(child, to, cx-q, cy-q, q, depth+1)
	f.split(child+1, to, cx+q, cy-q, q, depth+1)
	f.split(child+2, to, cx-q, cy+q, q, depth+1)
	f.split(child+3, to, cx+q, cy+q, q, depth+1)
	f.scratch = f.scratch[:to]
}

// leaf finds the leaf that holds (x, y) and its half side.
func (f *sizeField) leaf(x, y float64) (cell *fieldCell, half float64) {
	half = f.side / 2
	cx, cy := f.x+half, f.y+half
	cell = &f.cells[0]
	for cell.child >= 0 {
		c := cell.child
		half /= 2
		if x > cx {
			c++
			cx += half
		} else {
			cx -= half
		}
		if y > cy {
			c += 2
			cy += half
		} else {
			cy -= half
		}
		cell = &f.cells[c]
	}
	return cell, half
}

// size is the smallest size that the sources of a leaf give at (x, y), or the limit.
func (f *sizeField) size(cell *fieldCell, x, y float64) float64 {
	h := f.limit
	for i := range f.lists[cell.from:cell.to] {
		s := &f.lists[int(cell.from)+i]
		dx, dy := s.x-x, s.y-y
		d2, less := dx*dx+dy*dy, h-s.size
		if less > 0 && s.growth*s.growth*d2 < less*less { // saves most of the square roots
			h = s.size + s.growth*math.Sqrt(d2)
		}
	}
	return h
}

// free is the size at (x, y) without the cap, up to the limit.
func (f *sizeField) free(x, y float64) float64 {
	cell, _ := f.leaf(x, y)
	return f.size(cell, x, y)
}

// sample is the size at (x, y) without the cap, and how fast it may grow within something there of a given squared length.
func (f *sizeField) sample(x, y, length2 float64) (h, growth float64) {
	cell, half := f.leaf(x, y)
	h = f.size(cell, x, y)
	if length2 > 4*half*half {
		return h, f.growth
	}
	for i := range f.lists[cell.from:cell.to] {
		growth = max(growth, f.lists[int(cell.from)+i].growth)
	}
	return h, growth
}

// at is the size wanted at (x, y) [m].
func (f *sizeField) at(x, y float64) float64 { return min(f.coarsest, f.free(x, y)) }
