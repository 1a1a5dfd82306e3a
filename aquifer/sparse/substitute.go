package sparse

// The kernels of substitution. l points at column-major entries of a supernode, ld apart; y and x hold rows of
// panelWidth entries. Each has a portable form that gives the same bits. The forms for one right-hand side make the same operations on each entry in the same order.

// forwardTriangle solves with the w x w triangle at l.
func forwardTriangle(x, l []float64, ld, w int) {
	if !wide {
		forwardTrianglePlain(x, l, ld, w)
		return
	}
	_, _ = x[w*panelWidth-1], l[(w-1)*ld+w-1]
	forwardTriangleAVX(&x[0], &l[0], ld, w)
}

func forwardTrianglePlain(x, l []float64, ld, w int) {
	for j := range w {
		xj := (*[panelWidth]float64)(x[j*panelWidth:])
		pivot := l[j*ld+j]
		for c := range xj {
			xj[c] /= pivot
		}
		for i := j + 1; i < w; i++ {
			subtract((*[panelWidth]float64)(x[i*panelWidth:]), xj, l[j*ld+i])
		}
	}
}

// backwardTriangle solves with the transposed w x w triangle at l.
func backwardTriangle(x, l []float64, ld, w int) {
	if !wide {
		backwardTrianglePlain(x, l, ld, w)
		return
	}
	_, _ = x[w*panelWidth-1], l[(w-1)*ld+w-1]
	backwardTriangleAVX(&x[0], &l[0], ld, w)
}

func backwardTrianglePlain(x, l []float64, ld, w int) {
	for j := w - 1; j >= 0; j-- {
		xj := (*[panelWidth]float64)(x[j*panelWidth:])
		for i := j + 1; i < w; i++ {
			subtract(xj, (*[panelWidth]float64)(x[i*panelWidth:]), l[j*ld+i])
		}
		pivot := l[j*ld+j]
		for c := range xj {
			xj[c] /= pivot
		}
	}
}

func subtract(y, x *[panelWidth]float64, v float64) {
	y[0] -= float64(v * x[0])
	y[1] -= float64(v * x[1])
	y[2] -= float64(v * x[2])
	y[3] -= float64(v * x[3])
	y[4] -= float64(v * x[4])
	y[5] -= float64(v * x[5])
	y[6] -= float64(v * x[6])
	y[7] -= float64(v * x[7])
}

// forwardRows subtracts Σk l[i+ld k] x[k], k < w, from m rows y[i]. y has room for m rounded up to a multiple of four
// rows, l may be read as far; the rows beyond m are spoilt.
func forwardRows(y, l []float64, ld int, x []float64, m, w int) {
	if !wide {
		forwardRowsPlain(y, l, ld, x, m, w)
		return
	}
	m = (m + 3) &^ 3
	_, _, _ = y[m*panelWidth-1], l[(w-1)*ld+m-1], x[w*panelWidth-1]
	forwardAVX(&y[0], &l[0], ld, &x[0], m, w)
}

func forwardRowsPlain(y, l []float64, ld int, x []float64, m, w int) {
	for i := range m {
		yi := (*[panelWidth]float64)(y[i*panelWidth:])
		for k := range w {
			subtract(yi, (*[panelWidth]float64)(x[k*panelWidth:]), l[k*ld+i])
		}
	}
}

// backwardRows subtracts Σi l[i+ld j] y[i], i < m, from w rows x[j]. l may be read as if w were four.
func backwardRows(x, l []float64, ld int, y []float64, m, w int) {
	if !wide {
		backwardRowsPlain(x, l, ld, y, m, w)
		return
	}
	_, _, _ = x[w*panelWidth-1], l[3*ld+m-1], y[m*panelWidth-1]
	if w == 4 {
		backwardAVX(&x[0], &l[0], ld, &y[0], m)
		return
	}
	var four [4 * panelWidth]float64
	copy(four[:], x[:w*panelWidth])
	backwardAVX(&four[0], &l[0], ld, &y[0], m)
	copy(x[:w*panelWidth], four[:])
}

func backwardRowsPlain(x, l []float64, ld int, y []float64, m, w int) {
	for j := range w {
		sum := (*[panelWidth]float64)(x[j*panelWidth:])
		for i, v := range l[j*ld : j*ld+m] {
			subtract(sum, (*[panelWidth]float64)(y[i*panelWidth:]), v)
		}
	}
}

// gatherRows copies the listed rows of x side by side into y.
func gatherRows(y, x []float64, rows []int32) {
	if len(rows) == 0 {
		return
	}
	_, _ = y[len(rows)*panelWidth-1], x[int(rows[len(rows)-1])*panelWidth+panelWidth-1]
	if wide {
		gatherAVX(&y[0], &x[0], &rows[0], len(rows))
		return
	}
	for i, row := range rows {
		copy(y[i*panelWidth:(i+1)*panelWidth], x[int(row)*panelWidth:])
	}
}

// scatterRows puts rows that stand side by side in y back into the listed rows of x.
func scatterRows(x, y []float64, rows []int32) {
	if len(rows) == 0 {
		return
	}
	_, _ = y[len(rows)*panelWidth-1], x[int(rows[len(rows)-1])*panelWidth+panelWidth-1]
	if wide {
		scatterAVX(&x[0], &y[0], &rows[0], len(rows))
		return
	}
	for i, row := range rows {
		copy(x[int(row)*panelWidth:int(row+1)*panelWidth], y[i*panelWidth:])
	}
}

// forwardOne does triangle and rows for one right-hand side: x holds the w columns and the rows below.
func forwardOne(x, l []float64, ld, w int) {
	for j := range w {
		x[j] /= l[j*ld+j]
		for i := j + 1; i < w; i++ {
			x[i] -= float64(l[j*ld+i] * x[j])
		}
	}
	y := x[w:]
	if w < 4 {
		for j := range w {
			v := x[j]
			for i, f := range l[j*ld+w : j*ld+len(x)] {
				y[i] -= float64(f * v)
			}
		}
		return
	}
	x0, x1, x2, x3 := x[0], x[1], x[2], x[3]
	l0, l1, l2, l3 := l[4:len(x)], l[ld+4:ld+len(x)], l[2*ld+4:2*ld+len(x)], l[3*ld+4:3*ld+len(x)]
	y = y[:len(l0)]
	l1, l2, l3 = l1[:len(l0)], l2[:len(l0)], l3[:len(l0)]
	for i, f := range l0 {
		y[i] = y[i] - float64(f*x0) - float64(l1[i]*x1) - float64(l2[i]*x2) - float64(l3[i]*x3)
	}
}

// backwardOne does rows and triangle for one right-hand side.
func backwardOne(x, l []float64, ld, w int) {
	y := x[w:]
	if w < 4 {
		for j := range w {
			sum := x[j]
			for i, f := range l[j*ld+w : j*ld+len(x)] {
				sum -= float64(f * y[i])
			}
			x[j] = sum
		}
	} else {
		x0, x1, x2, x3 := x[0], x[1], x[2], x[3]
		l0, l1, l2, l3 := l[4:len(x)], l[ld+4:ld+len(x)], l[2*ld+4:2*ld+len(x)], l[3*ld+4:3*ld+len(x)]
		y = y[:len(l0)]
		l1, l2, l3 = l1[:len(l0)], l2[:len(l0)], l3[:len(l0)]
		for i, v := range y {
			x0 -= float64(l0[i] * v)
			x1 -= float64(l1[i] * v)
			x2 -= float64(l2[i] * v)
			x3 -= float64(l3[i] * v)
		}
		x[0], x[1], x[2], x[3] = x0, x1, x2, x3
	}
	for j := w - 1; j >= 0; j-- {
		for i := j + 1; i < w; i++ {
			x[j] -= float64(l[j*ld+i] * x[i])
		}
		x[j] /= l[j*ld+j]
	}
}
