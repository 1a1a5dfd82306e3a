package convex

import "math"

// Dense vectors. The wide code (vector_amd64.s) multiplies and adds in separate instructions in the order of the portable code, so
// that both give the same bits.

// dot returns x'y over the length of x, in a fixed order of summation with eight partial sums.
func dot(x, y []float64) float64 {
	y = y[:len(x)]
	if wide && len(x) >= widest {
		return dotWide(x, y)
	}
	return dotPlain(x, y)
}

func dotPlain(x, y []float64) float64 {
	y = y[:len(x)]
	var s0, s1, s2, s3, t0, t1, t2, t3 float64
	i := 0
	for ; i+8 <= len(x); i += 8 {
		s0 += x[i] * y[i]
		s1 += x[i+1] * y[i+1]
		s2 += x[i+2] * y[i+2]
		s3 += x[i+3] * y[i+3]
		t0 += x[i+4] * y[i+4]
		t1 += x[i+5] * y[i+5]
		t2 += x[i+6] * y[i+6]
		t3 += x[i+7] * y[i+7]
	}
	s0, s1, s2, s3 = s0+t0, s1+t1, s2+t2, s3+t3
	for ; i < len(x); i++ {
		s0 += x[i] * y[i]
	}
	return (s0 + s1) + (s2 + s3)
}

// addScaled adds f x to dst over the length of dst.
func addScaled(dst []float64, f float64, x []float64) {
	x = x[:len(dst)]
	if wide && len(dst) >= widest {
		addScaledWide(dst, f, x)
		return
	}
	addScaledPlain(dst, f, x)
}

func addScaledPlain(dst []float64, f float64, x []float64) {
	x = x[:len(dst)]
	for i := range dst {
		dst[i] += f * x[i]
	}
}

// addScaled4 adds f0 x0 + f1 x1 + f2 x2 + f3 x3 to dst over the length of dst.
func addScaled4(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64) {
	n := len(dst)
	x0, x1, x2, x3 = x0[:n], x1[:n], x2[:n], x3[:n]
	if wide && n >= widest {
		addScaled4Wide(dst, f0, f1, f2, f3, x0, x1, x2, x3)
		return
	}
	addScaled4Plain(dst, f0, f1, f2, f3, x0, x1, x2, x3)
}

func addScaled4Plain(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64) {
	n := len(dst)
	x0, x1, x2, x3 = x0[:n], x1[:n], x2[:n], x3[:n]
	for i := range dst {
		dst[i] += (f0*x0[i] + f1*x1[i]) + (f2*x2[i] + f3*x3[i])
	}
}

// multiply sets dst to the products of the entries of x and y over the length of dst; dst may be x.
func multiply(dst, x, y []float64) {
	x, y = x[:len(dst)], y[:len(dst)]
	for i := range dst {
		dst[i] = x[i] * y[i]
	}
}

// extremes returns the smallest and the largest |row_j col_j| that is not zero.
func extremes(row, col []float64) (low, high float64) {
	col = col[:len(row)]
	if wide && len(row) >= widest {
		return extremesWide(row, col)
	}
	return extremesPlain(row, col)
}

func extremesPlain(row, col []float64) (low, high float64) {
	low = math.Inf(1)
	for j, v := range row {
		v = math.Abs(v) * col[j]
		if v > high {
			high = v
		}
		if v < low && v > 0 {
			low = v
		}
	}
	return low, high
}

// noteColumns keeps by column the smallest and the largest |row_j| factor that is not zero.
func noteColumns(row []float64, factor float64, small, large []float64) {
	small, large = small[:len(row)], large[:len(row)]
	if wide && len(row) >= widest {
		noteColumnsWide(row, factor, small, large)
		return
	}
	noteColumnsPlain(row, factor, small, large)
}

func noteColumnsPlain(row []float64, factor float64, small, large []float64) {
	small, large = small[:len(row)], large[:len(row)]
	for j, v := range row {
		v = math.Abs(v) * factor
		if v > large[j] {
			large[j] = v
		}
		if v < small[j] && v > 0 {
			small[j] = v
		}
	}
}

// widest is the least length for which the wide code is called: below, a call costs more than it saves.
const widest = 16

// allFinite tells that no entry is an infinity or not a number.
func allFinite(x []float64) bool {
	var s0, s1, s2, s3 float64 // each v - v is zero, or not a number
	i := 0
	for ; i+4 <= len(x); i += 4 {
		s0 += x[i] - x[i]
		s1 += x[i+1] - x[i+1]
		s2 += x[i+2] - x[i+2]
		s3 += x[i+3] - x[i+3]
	}
	for ; i < len(x); i++ {
		s0 += x[i] - x[i]
	}
	return (s0+s1)+(s2+s3) == 0
}
