package convex_test

import (
	"context"
	"fmt"

	"springbound/plan/convex"
)

// twoWells is the largest yield of two wells of at most 10 and 8 units of which a spring bears 12.
func twoWells() (*convex.Problem, *convex.Solution) {
	p, err := convex.NewProblem(convex.Maximise, []convex.Column{{Name: "west", Cost: 1, Upper: 10}, {Name: "east", Cost: 1, Upper: 8}})
	if err != nil {
		panic(err)
	}
	if _, err := p.AddRow(convex.Row{Name: "spring", Coefficients: []float64{1, 2}, Lower: 0, Upper: 12}); err != nil {
		panic(err)
	}
	s, err := convex.Solve(context.Background(), p, convex.Options{})
	if err != nil {
		panic(err)
	}
	return p, s
}

// The west well spares the spring and runs at its cap; what more the spring may bear goes to the east well, half a unit for each, until that
// is at its cap too.
func ExamplePriceRange() {
	p, s := twoWells()
	r, err := convex.PriceRange(context.Background(), p, s, convex.SideOf{Index: 0, Side: convex.UpperSide})
	if err != nil {
		panic(err)
	}
	fmt.Printf("worth %.2f a unit from %.0f to %.0f\n", r.Right, r.From, r.To)
	fmt.Println("then binds: the", r.Above.Binds)
	// Output:
	// worth 0.50 a unit from 10 to 26
	// then binds: the upper bound of column 1
}

func ExampleParametric() {
	p, s := twoWells()
	c, err := convex.Parametric(context.Background(), p, s, convex.SideOf{Index: 0, Side: convex.UpperSide}, 0, 40)
	if err != nil {
		panic(err)
	}
	for _, b := range c.Points {
		fmt.Printf("limit %2.0f: yield %2.0f, then %.1f a unit\n", b.At, b.Value, b.Slope)
	}
	// Output:
	// limit  0: yield  0, then 1.0 a unit
	// limit 10: yield 10, then 0.5 a unit
	// limit 26: yield 18, then 0.0 a unit
	// limit 40: yield 18, then 0.0 a unit
}

// Two wells that a limit sees alike may share the yield in any way; the plan nearest to the present rates is taken.
func ExampleNearest() {
	p, err := convex.NewProblem(convex.Maximise, []convex.Column{{Cost: 1, Upper: 10}, {Cost: 1, Upper: 10}})
	if err != nil {
		panic(err)
	}
	if _, err := p.AddRow(convex.Row{Coefficients: []float64{1, 1}, Lower: 0, Upper: 12}); err != nil {
		panic(err)
	}
	s, err := convex.Solve(context.Background(), p, convex.Options{})
	if err != nil {
		panic(err)
	}
	tie, err := convex.Nearest(context.Background(), p, s, []float64{2, 4}, nil)
	if err != nil {
		panic(err)
	}
	fmt.Printf("%.0f, the only optimum: %v\n", tie.Solution.X, tie.Unique)
	// Output:
	// [5 7], the only optimum: false
}
