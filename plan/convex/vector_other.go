//go:build !amd64

package convex

// wide is false: only the portable code runs here.
var wide = false

func dotWide(x, y []float64) float64 { return dotPlain(x, y) }

func addScaledWide(dst []float64, f float64, x []float64) { addScaledPlain(dst, f, x) }

func addScaled4Wide(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64) {
	addScaled4Plain(dst, f0, f1, f2, f3, x0, x1, x2, x3)
}

func extremesWide(row, col []float64) (low, high float64) { return extremesPlain(row, col) }

func noteColumnsWide(row []float64, factor float64, small, large []float64) {
	noteColumnsPlain(row, factor, small, large)
}
