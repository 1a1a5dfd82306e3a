//go:build !amd64

package sparse

const wide = false

func updateAVX(c *float64, ldc int, a *float64, lda int, b *float64, m, depth int) {}

func forwardAVX(y, l *float64, ld int, x *float64, m, depth int) {}

func backwardAVX(x, l *float64, ld int, y *float64, m int) {}

func gatherAVX(y, x *float64, rows *int32, m int) {}

func scatterAVX(x, y *float64, rows *int32, m int) {}

func forwardTriangleAVX(x, l *float64, ld, w int) {}

func backwardTriangleAVX(x, l *float64, ld, w int) {}
