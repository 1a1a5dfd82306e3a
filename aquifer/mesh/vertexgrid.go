package mesh

import "math"

// vertexGrid finds vertices within the tolerance of a place, by cells two tolerances wide.
type vertexGrid struct {
	tol   float64
	cells map[[2]int64][]int32 // looked up only, never walked through
}

// init empties the grid.
func (g *vertexGrid) init(tol float64) {
	g.tol = tol
	g.cells = make(map[[2]int64][]int32)
}

// cell is the cell of a place.
func (g *vertexGrid) cell(x, y float64) [2]int64 {
	return [2]int64{int64(math.Floor(x / (2 * g.tol))), int64(math.Floor(y / (2 * g.tol)))}
}

// put files a vertex.
func (g *vertexGrid) put(v int32, x, y float64) {
	c := g.cell(x, y)
	g.cells[c] = append(g.cells[c], v)
}

// near gives the nearest vertex within the tolerance, or -1.
func (g *vertexGrid) near(p []vertex, x, y float64) (v int32, distance float64) {
	v, distance = -1, g.tol
	lo, hi := g.cell(x-g.tol, y-g.tol), g.cell(x+g.tol, y+g.tol)
	for i := lo[0]; i <= hi[0]; i++ {
		for j := lo[1]; j <= hi[1]; j++ {
			for _, w := range g.cells[[2]int64{i, j}] {
				if d := math.Hypot(p[w].x-x, p[w].y-y); d < distance || d == distance && v < 0 {
					v, distance = w, d
				}
			}
		}
	}
	if v < 0 {
		return -1, 0
	}
	return v, distance
}
