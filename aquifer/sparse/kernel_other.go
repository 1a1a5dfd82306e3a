//go:build !amd64

package sparse

const wide = false

func updateAVX(c *float64, ldc int, a *float64, lda int, b *float64, m, depth int) {}

func forwardAVX(y, l *float64, ld int, x *float64, m, depth int) {}

func backwardAVX(x, l *float64, ld int, y *float64, m int) {}
