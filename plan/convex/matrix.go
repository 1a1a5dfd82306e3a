package convex

// matrix is the scaled constraint matrix: dense columns first, then helper columns with one entry each.
type matrix struct {
	rows, dense, cols int
	a                 []float64 // rows x dense, row after row
	unitRow           []int     // row of the entry of column dense+u
	unitValue         []float64 // its value
}

// row returns the dense part of row i.
func (m *matrix) row(i int) []float64 { return m.a[i*m.dense : i*m.dense+m.dense : i*m.dense+m.dense] }

// column writes column j into dst (rows long).
func (m *matrix) column(j int, dst []float64) {
	if j >= m.dense {
		clear(dst)
		dst[m.unitRow[j-m.dense]] = m.unitValue[j-m.dense]
		return
	}
	at := j
	for i := range dst {
		dst[i] = m.a[at]
		at += m.dense
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
		row[fill], f[fill] = i, w[t]
		if fill++; fill == 4 {
			addScaled4(d, f[0], f[1], f[2], f[3], m.row(row[0]), m.row(row[1]), m.row(row[2]), m.row(row[3]))
			fill = 0
		}
	}
	for t := 0; t < fill; t++ {
		addScaled(d, f[t], m.row(row[t]))
	}
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

// times writes A x into dst (rows long).
func (m *matrix) times(dst, x []float64) {
	for i := range dst {
		dst[i] = dot(m.row(i), x)
	}
	for u, i := range m.unitRow {
		dst[i] += m.unitValue[u] * x[m.dense+u]
	}
}
