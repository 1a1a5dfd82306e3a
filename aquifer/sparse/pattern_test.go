package sparse

import (
	"slices"
	"testing"
)

func TestNewPatternSortsAndJoins(t *testing.T) {
	p, slots := NewPattern(4, []int32{3, 0, 1, 2, 0}, []int32{1, 2, 3, 0, 0})
	if want := []int{0, 2, 4, 5, 6}; !slices.Equal(p.Ptr, want) {
		t.Errorf("column starts %v, want %v", p.Ptr, want)
	}
	if want := []int32{0, 2, 1, 3, 2, 3}; !slices.Equal(p.Index, want) {
		t.Errorf("rows %v, want %v", p.Index, want)
	}
	if want := []int32{3, 1, 3, 1, 0}; !slices.Equal(slots.Pair, want) {
		t.Errorf("pair slots %v, want %v", slots.Pair, want)
	}
	if want := []int32{0, 2, 4, 5}; !slices.Equal(slots.Diagonal, want) {
		t.Errorf("diagonal slots %v, want %v", slots.Diagonal, want)
	}
	p.check()
}

func TestWrongPatternsPanic(t *testing.T) {
	wrong := map[string]func(){
		"index out of range": func() { NewPattern(2, []int32{0}, []int32{2}) },
		"negative index":     func() { NewPattern(2, []int32{-1}, []int32{1}) },
		"lengths differ":     func() { NewPattern(2, []int32{0}, nil) },
		"no diagonal":        func() { (&Pattern{N: 1, Ptr: []int{0, 0}}).check() },
		"rows descend":       func() { (&Pattern{N: 3, Ptr: []int{0, 3, 4, 5}, Index: []int32{0, 2, 1, 1, 2}}).check() },
		"starts descend":     func() { (&Pattern{N: 2, Ptr: []int{0, 3, 2}, Index: []int32{0, 1}}).check() },
	}
	for name, do := range wrong {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			do()
		})
	}
}

func TestMulVecEqualsDense(t *testing.T) {
	p := jitteredMesh(7, 5, 1, 3)
	n := p.Pattern.N
	x := randomVector(2*n, 1)
	got := make([]float64, 2*n)
	p.MulBlock(got, x, 2)
	dense := denseOf(p.Matrix)
	for c := range 2 {
		for i := range n {
			sum, scale := 0.0, 0.0
			for j := range n {
				sum += dense.At(i, j) * x[c*n+j]
				scale += max(dense.At(i, j)*x[c*n+j], -dense.At(i, j)*x[c*n+j])
			}
			// Sums of fewer than ten terms in different order: ten roundings of the sum of magnitudes.
			if d := got[c*n+i] - sum; !(max(d, -d) <= 10*0x1p-53*scale) {
				t.Errorf("row %d of column %d: %v, want %v", i, c, got[c*n+i], sum)
			}
		}
	}
}
