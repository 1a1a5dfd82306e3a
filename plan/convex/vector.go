package convex

// dot returns x'y over the length of x, in a fixed order of summation with four partial sums.
func dot(x, y []float64) float64 {
	y = y[:len(x)]
	var s0, s1, s2, s3 float64
	i := 0
	for ; i+4 <= len(x); i += 4 {
		s0 += x[i] * y[i]
		s1 += x[i+1] * y[i+1]
		s2 += x[i+2] * y[i+2]
		s3 += x[i+3] * y[i+3]
	}
	for ; i < len(x); i++ {
		s0 += x[i] * y[i]
	}
	return (s0 + s1) + (s2 + s3)
}

// addScaled adds f x to dst over the length of dst.
func addScaled(dst []float64, f float64, x []float64) {
	x = x[:len(dst)]
	for i := range dst {
		dst[i] += f * x[i]
	}
}

// addScaled4 adds f0 x0 + f1 x1 + f2 x2 + f3 x3 to dst over the length of dst.
func addScaled4(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64) {
	n := len(dst)
	x0, x1, x2, x3 = x0[:n], x1[:n], x2[:n], x3[:n]
	for i := range dst {
		dst[i] += (f0*x0[i] + f1*x1[i]) + (f2*x2[i] + f3*x3[i])
	}
}
