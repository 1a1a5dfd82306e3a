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

// sizeField is h(x) = min(coarsest, min over sources of size + growth dist), each source with a growth of its own. A quadtree holds in each leaf the sources that can
// be the smallest somewhere in it.
type sizeField struct {
	coarsest, growth float64 // growth is the largest of any source
	x, y, side       float64 // lower left corner and side of the root
	cells            []fieldCell
	lists            []source
	scratch          []source // while the tree is made: a stack of kept sources
}

// fieldCell is a quadtree cell: an inner one with four children in a row, or a leaf with a list.
type fieldCell struct {
	child    int32 // first child; -1 for a leaf
	from, to int32 // list of a leaf
}

// newSizeField builds the quadtree over a box.
func newSizeField(sources []source, x0, y0, x1, y1 float64) *sizeField {
	side := max(x1-x0, y1-y0) * 1.001
	growth := 0.0
	for _, s := range sources {
		growth = max(growth, s.growth)
	}
	f := &sizeField{coarsest: math.Inf(1), growth: growth, x: x0, y: y0, side: side}
	f.cells = append(f.cells, fieldCell{child: -1})
	f.scratch = append(make([]source, 0, 8*len(sources)), sources...)
	f.split(0, 0, x0+side/2, y0+side/2, side/2, 0)
	f.scratch = nil
	return f
}

// split fills cell c, whose centre and half side are given, from the sources of its parent, which are f.scratch[from:]. What it
// keeps for its own children goes on top and is taken off again.
func (f *sizeField) split(c int32, from int, cx, cy, half float64, depth int) {
	r := half * math.Sqrt2
	to := len(f.scratch)
	upper, best := math.Inf(1), source{} // upper bounds the size anywhere in the cell
	for _, s := range f.scratch[from:to] {
		dx, dy := s.x-cx, s.y-cy
		if u := s.size + s.growth*(math.Sqrt(dx*dx+dy*dy)+r); u < upper {
			upper, best = u, s
		}
	}
	for i := from; i < to; i++ {
		s := f.scratch[i]
		dx, dy := s.x-cx, s.y-cy
		if s.size+s.growth*max(0, math.Sqrt(dx*dx+dy*dy)-r) <= upper {
			f.scratch = append(f.scratch, s)
		}
	}
	if 2*f.growth*r < leafVariation*(upper-best.growth*r) && len(f.scratch) > to+1 {
		f.scratch = append(f.scratch[:to], best)
	}
	if len(f.scratch) <= to+leafSources || depth == fieldDepth {
		f.cells[c].from = int32(len(f.lists))
		f.lists = append(f.lists, f.scratch[to:]...)
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

// free is the size at (x, y) without the cap.
func (f *sizeField) free(x, y float64) float64 {
	c := int32(0)
	half := f.side / 2
	cx, cy := f.x+half, f.y+half
	for f.cells[c].child >= 0 {
		c = f.cells[c].child
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
	}
	h := math.Inf(1)
	cell := &f.cells[c]
	for i := cell.from; i < cell.to; i++ {
		s := &f.lists[i]
		dx, dy := s.x-x, s.y-y
		h = min(h, s.size+s.growth*math.Sqrt(dx*dx+dy*dy))
	}
	return h
}

// at is the size wanted at (x, y) [m].
func (f *sizeField) at(x, y float64) float64 { return min(f.coarsest, f.free(x, y)) }
