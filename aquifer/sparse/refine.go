package sparse

import "context"

// solveRefined solves and adds one step of iterative refinement: x += A⁻¹ (b − A x), in working precision (Skeel 1980:
// one step makes the solution componentwise backward stable).
func (f *Factor) solveRefined(ctx context.Context, block []float64, k int) error {
	n := f.symbolic.pattern.N
	right := append([]float64(nil), block...)
	if err := f.solvePlain(ctx, block, k); err != nil {
		return err
	}
	m := Matrix{Pattern: f.symbolic.pattern, Values: f.values}
	rest := make([]float64, n*k)
	m.MulBlock(rest, block, k)
	for i := range rest {
		rest[i] = right[i] - rest[i]
	}
	if err := f.solvePlain(ctx, rest, k); err != nil {
		return err
	}
	for i := range block {
		block[i] += rest[i]
	}
	return nil
}
