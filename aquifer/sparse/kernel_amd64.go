package sparse

// wide tells that the processor and the operating system have AVX. The assembly multiplies and subtracts in separate
// instructions, in the order of the portable code, so both give the same bits.
var wide = hasAVX()

func hasAVX() bool {
	const osxsave, avx, xmmYmm = 1 << 27, 1 << 28, 6
	largest, _, _, _ := cpuid(0)
	if largest < 1 {
		return false
	}
	_, _, c, _ := cpuid(1)
	return c&osxsave != 0 && c&avx != 0 && xgetbv()&xmmYmm == xmmYmm
}

func cpuid(leaf uint32) (a, b, c, d uint32)

func xgetbv() uint32

//go:noescape
func updateAVX(c *float64, ldc int, a *float64, lda int, b *float64, m, depth int)

//go:noescape
func forwardAVX(y, l *float64, ld int, x *float64, m, depth int)

//go:noescape
func backwardAVX(x, l *float64, ld int, y *float64, m int)

//go:noescape
func gatherAVX(y, x *float64, rows *int32, m int)

//go:noescape
func scatterAVX(x, y *float64, rows *int32, m int)

//go:noescape
func forwardTriangleAVX(x, l *float64, ld, w int)

//go:noescape
func backwardTriangleAVX(x, l *float64, ld, w int)
