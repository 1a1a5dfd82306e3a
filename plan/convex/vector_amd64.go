package convex

// wide tells that the processor and the operating system have AVX2.
var wide = hasAVX2()

func hasAVX2() bool {
	const osxsave, avx, avx2, xmmYmm = 1 << 27, 1 << 28, 1 << 5, 6
	largest, _, _, _ := cpuid(0)
	if largest < 7 {
		return false
	}
	_, _, c, _ := cpuid(1)
	if c&osxsave == 0 || c&avx == 0 || xgetbv()&xmmYmm != xmmYmm {
		return false
	}
	_, b, _, _ := cpuid(7)
	return b&avx2 != 0
}

func cpuid(leaf uint32) (a, b, c, d uint32)

func xgetbv() uint32

//go:noescape
func dotWide(x, y []float64) float64

//go:noescape
func addScaledWide(dst []float64, f float64, x []float64)

//go:noescape
func addScaled4Wide(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64)

//go:noescape
func extremesWide(row, col []float64) (low, high float64)

//go:noescape
func noteColumnsWide(row []float64, factor float64, small, large []float64)
