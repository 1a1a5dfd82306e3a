package sparse_test

import (
	"context"
	"fmt"

	"springbound/aquifer/sparse"
)

// Three nodes in a row, joined by conductances of 2 and 4 m²/d; the first is held at level zero through 1 m²/d. Water that
// enters at the last, 4 m³/d, raises the heads to 4, 6 and 7 m.
func Example() {
	ctx := context.Background()
	pattern, slots := sparse.NewPattern(3, []int32{0, 1}, []int32{1, 2})
	values := make([]float64, len(pattern.Index))
	for k, conductance := range []float64{2, 4} {
		values[slots.Pair[k]] -= conductance
		values[slots.Diagonal[k]] += conductance
		values[slots.Diagonal[k+1]] += conductance
	}
	values[slots.Diagonal[0]]++

	symbolic, err := sparse.Analyse(ctx, pattern, []float64{0, 10, 20}, []float64{0, 0, 0}, sparse.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	factor, err := symbolic.Factor(ctx, values)
	if err != nil {
		fmt.Println(err)
		return
	}
	heads := []float64{0, 0, 4}
	if err := factor.Solve(ctx, heads, 1); err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.6f\n", heads)

	unit := sparse.SparseVector{Index: []int32{2}, Value: []float64{1}}
	influence, err := factor.SolveSelected(ctx, []sparse.SparseVector{unit}, []int32{0, 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.6f\n", influence)
	// Output:
	// [4.000000 6.000000 7.000000]
	// [[1.000000 1.500000]]
}
