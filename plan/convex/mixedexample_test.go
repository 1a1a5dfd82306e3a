package convex_test

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// Three wells that are off or pump between 300 and 1000 m³/d, each with a cost of standing by, are to give 1200 m³/d at least; the
// first two may not run together.
func ExampleSolveMixed() {
	p, err := convex.NewProblem(convex.Minimise, []convex.Column{
		{Name: "Alder", Cost: 0.10, Lower: 300, Upper: 1000},
		{Name: "Birch", Cost: 0.12, Lower: 300, Upper: 1000},
		{Name: "Cedar", Cost: 0.20, Lower: 300, Upper: 1000},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	if _, err := p.AddRow(convex.Row{Name: "demand", Coefficients: []float64{1, 1, 1}, Lower: 1200, Upper: math.Inf(1)}); err != nil {
		fmt.Println(err)
		return
	}
	mixed := &convex.MixedProblem{Problem: p}
	var on []int
	for j := 0; j < 3; j++ {
		y, err := convex.OnOff(mixed, j)
		if err != nil {
			fmt.Println(err)
			return
		}
		if err := p.SetCost(y, 50); err != nil {
			fmt.Println(err)
			return
		}
		on = append(on, y)
	}
	if _, err := convex.CountOn(mixed, "Alder or Birch", on[:2], 0, 1); err != nil {
		fmt.Println(err)
		return
	}
	s, err := convex.SolveMixed(context.Background(), mixed, convex.MixedOptions{Proof: true})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%v: %.0f, of %.0f %.0f %.0f m³/d\n", s.Status, s.Objective, s.X[0], s.X[1], s.X[2])
	fmt.Printf("one more m³/d costs %.2f at this switching\n", s.Linear.RowPrice[0])
	fmt.Println("certified:", convex.CertifyMixed(mixed, s).Accepted)
	// Output:
	// optimal: 250, of 900 0 300 m³/d
	// one more m³/d costs 0.10 at this switching
	// certified: true
}
