package convex

import (
	"context"
	"errors"
	"testing"
)

// Slopes and curves of a quadratic programme are not made of straight pieces: the functions for linear ones refuse it.
func TestRangesRefuseAQuadraticObjective(t *testing.T) {
	p, err := NewProblem(Minimise, []Column{{Name: "x", Cost: -1, Upper: 5}})
	if err != nil {
		t.Fatal(err)
	}
	if err := p.SetHessian(Hessian{Diagonal: []float64{1}}); err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	s, err := Solve(ctx, p, Options{})
	if err != nil {
		t.Fatal(err)
	}
	side := SideOf{Column: true, Index: 0, Side: UpperSide}
	for name, call := range map[string]func() error{
		"PriceRange":      func() error { _, err := PriceRange(ctx, p, s, side); return err },
		"Parametric":      func() error { _, err := Parametric(ctx, p, s, side, 1, 2); return err },
		"ParametricAlong": func() error { _, err := ParametricAlong(ctx, p, s, []Move{{side, 1}}, 0, 1); return err },
		"Nearest":         func() error { _, err := Nearest(ctx, p, s, []float64{0}, nil); return err },
	} {
		if err := call(); !errors.Is(err, ErrQuadratic) {
			t.Errorf("%s: %v", name, err)
		}
	}
}
