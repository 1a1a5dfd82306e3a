package convex

// matrix is the scaled constraint matrix: dense columns first, then helper columns with one entry each. The entry of row i and dense
// column j is a[i][j] rowScale[i] colScale[j], which is not stored: the factors are powers of two, so that multiplying sums by them
// gives the same bits as multiplying entries.
type matrix struct {
	rows, dense, cols  int
	a                  [][]float64 // rows x dense, of the problem itself
	rowScale, colScale []float64
	unitRow            []int     // row of the entry of column dense+u
	unitValue          []float64 // its value
}

// column writes column j into dst (rows long).
func (m *matrix) column(j int, dst []float64) {
	if j >= m.dense {
		clear(dst)
		dst[m.unitRow[j-m.dense]] = m.unitValue[j-m.dense]
		return
	}
	f := m.colScale[j]
	for i, row := range m.a {
		dst[i] = row[j] * (m.rowScale[i] * f)
	}
}

// combineRows writes the sum of w[t] times row list[t] into dst (cols long). byRow is scratch, rows long and zero; it is returned zero.
func (m *matrix) combineRows(dst []float64, list []int, w, byRow []float64) {
	clear(dst)
	d := dst[:m.dense]
	var row [4]int
	var f [4]float64
	fill := 0
	for t, i := range list {
		if w[t] == 0 {
			continue
		}
		row[fill], f[fill] = i, w[t]*m.rowScale[i]
		if fill++; fill == 4 {
			addScaled4(d, f[0], f[1], f[2], f[3], m.a[row[0]], m.a[row[1]], m.a[row[2]], m.a[row[3]])
			fill = 0
		}
	}
	for t := 0; t < fill; t++ {
		addScaled(d, f[t], m.a[row[t]])
	}
	multiply(d, d, m.colScale)
	if len(m.unitRow) == 0 {
		return
	}
	for t, i := range list {
		byRow[i] += w[t]
	}
	for u, i := range m.unitRow {
		dst[m.dense+u] = m.unitValue[u] * byRow[i]
	}
	for _, i := range list {
		byRow[i] = 0
	}
}

// times writes A x into dst (rows long). work is scratch, cols long.
func (m *matrix) times(dst, x, work []float64) {
	y := work[:m.dense]
	multiply(y, x[:m.dense], m.colScale)
	for i, row := range m.a {
		dst[i] = dot(row, y) * m.rowScale[i]
	}
	for u, i := range m.unitRow {
		dst[i] += m.unitValue[u] * x[m.dense+u]
	}
}
