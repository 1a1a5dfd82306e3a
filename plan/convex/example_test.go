package convex_test

import (
	"context"
	"fmt"
	"math"

	"springbound/plan/convex"
)

// Two wells share a quota, and a spring must not fall by more than 0.3 m.
func ExampleSolve() {
	none := math.Inf(-1)
	p, err := convex.NewProblem(convex.Maximise, []convex.Column{
		{Name: "W1", Cost: 1, Upper: 900},
		{Name: "W2", Cost: 1, Upper: 900},
	})
	if err != nil {
		panic(err)
	}
	for _, r := range []convex.Row{
		{Name: "spring", Coefficients: []float64{0.0005, 0.0002}, Lower: none, Upper: 0.3},
		{Name: "quota", Coefficients: []float64{1, 1}, Lower: none, Upper: 1200},
	} {
		if _, err := p.AddRow(r); err != nil {
			panic(err)
		}
	}
	s, err := convex.Solve(context.Background(), p, convex.Options{})
	if err != nil {
		panic(err)
	}
	fmt.Printf("%v %.0f m³/d: W1 %.0f, W2 %.0f\n", s.Status, s.Objective, s.X[0], s.X[1])
	fmt.Printf("one more metre at the spring is worth %.0f m³/d, more quota %.0f\n", s.RowPrice[0], s.RowPrice[1])
	fmt.Println("certified:", convex.Certify(p, s).Accepted)
	// Output:
	// optimal 1140 m³/d: W1 240, W2 900
	// one more metre at the spring is worth 2000 m³/d, more quota 0
	// certified: true
}

// A demand that the spring does not allow.
func ExampleConflict() {
	p, err := convex.NewProblem(convex.Minimise, []convex.Column{{Name: "W1", Cost: 1, Upper: 900}})
	if err != nil {
		panic(err)
	}
	for _, r := range []convex.Row{
		{Name: "spring", Coefficients: []float64{0.0005}, Lower: math.Inf(-1), Upper: 0.3},
		{Name: "wetland", Coefficients: []float64{0.0001}, Lower: math.Inf(-1), Upper: 0.3},
		{Name: "demand", Coefficients: []float64{1}, Lower: 700, Upper: math.Inf(1)},
	} {
		if _, err := p.AddRow(r); err != nil {
			panic(err)
		}
	}
	c, err := convex.Conflict(context.Background(), p, []int{0, 1, 2})
	if err != nil {
		panic(err)
	}
	for _, b := range c.Rows {
		fmt.Println(p.Row(b.Index).Name, b.Side)
	}
	r, err := convex.LeastRelaxation(context.Background(), p, []convex.Relaxable{
		{Row: 0, UpperWeight: 1}, {Row: 2, LowerWeight: 1},
	})
	if err != nil {
		panic(err)
	}
	fmt.Printf("alone: spring by %.2f m, demand by %.0f m³/d\n", r.Rows[0].AloneAmount, r.Rows[1].AloneAmount)
	// Output:
	// spring upper
	// demand lower
	// alone: spring by 0.05 m, demand by 100 m³/d
}
