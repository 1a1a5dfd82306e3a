package convex

import "math"

// denseFactor is an LU factorisation with row exchanges of a k x k block. It is made once, for the final values of a basis, and
// shares nothing with the updated factor that led there.
type denseFactor struct {
	k    int
	lu   []float64
	perm []int
}

// singularPivot is the pivot, relative to the largest entry of the block, below which a column counts as a combination of others.
const singularPivot = 1e-11

// factorDense factors the block given row after row.
func factorDense(k int, entries []float64) *denseFactor {
	f := &denseFactor{k: k, lu: append([]float64(nil), entries...), perm: make([]int, k)}
	for i := range f.perm {
		f.perm[i] = i
	}
	for c := 0; c < k; c++ {
		p := c
		for i := c + 1; i < k; i++ {
			if math.Abs(f.lu[i*k+c]) > math.Abs(f.lu[p*k+c]) {
				p = i
			}
		}
		if p != c {
			f.perm[p], f.perm[c] = f.perm[c], f.perm[p]
			a, b := f.lu[p*k:p*k+k], f.lu[c*k:c*k+k]
			for j := range a {
				a[j], b[j] = b[j], a[j]
			}
		}
		f.eliminate(c)
	}
	return f
}

func (f *denseFactor) eliminate(c int) {
	k := f.k
	pivot := f.lu[c*k : c*k+k]
	for i := c + 1; i < k; i++ {
		row := f.lu[i*k : i*k+k]
		if row[c] == 0 {
			continue
		}
		row[c] /= pivot[c]
		addScaled(row[c+1:], -row[c], pivot[c+1:])
	}
}

// solve writes x with K x = b; x and b must differ.
func (f *denseFactor) solve(x, b []float64) {
	k := f.k
	for i := 0; i < k; i++ {
		x[i] = b[f.perm[i]] - dot(f.lu[i*k:i*k+i], x)
	}
	for i := k - 1; i >= 0; i-- {
		row := f.lu[i*k : i*k+k]
		x[i] = (x[i] - dot(row[i+1:], x[i+1:k])) / row[i]
	}
}

// solveTransposed writes y with K'y = c; y and c must differ.
func (f *denseFactor) solveTransposed(y, c []float64) {
	k := f.k
	w := append([]float64(nil), c[:k]...)
	for i := 0; i < k; i++ {
		row := f.lu[i*k : i*k+k]
		w[i] /= row[i]
		addScaled(w[i+1:], -w[i], row[i+1:])
	}
	for i := k - 1; i >= 0; i-- {
		addScaled(w[:i], -w[i], f.lu[i*k:i*k+i])
	}
	for i := 0; i < k; i++ {
		y[f.perm[i]] = w[i]
	}
}

// dependent finds rows and columns of the block, equally many, without which it is regular; none when it is regular. Elimination
// goes column by column with the largest remaining entry of the column as pivot.
func dependent(k int, entries []float64) (rows, cols []int) {
	a := append([]float64(nil), entries...)
	largest := 0.0
	for _, v := range a {
		largest = math.Max(largest, math.Abs(v))
	}
	used := make([]bool, k)
	for c := 0; c < k; c++ {
		p := -1
		for i := 0; i < k; i++ {
			if !used[i] && (p < 0 || math.Abs(a[i*k+c]) > math.Abs(a[p*k+c])) {
				p = i
			}
		}
		if !(math.Abs(a[p*k+c]) > singularPivot*largest) {
			cols = append(cols, c)
			continue
		}
		used[p] = true
		pivot := a[p*k : p*k+k]
		for i := 0; i < k; i++ {
			if f := a[i*k+c]; !used[i] && f != 0 {
				addScaled(a[i*k+c:i*k+k], -f/pivot[c], pivot[c:])
			}
		}
	}
	for i := range used {
		if !used[i] {
			rows = append(rows, i)
		}
	}
	return rows, cols
}
