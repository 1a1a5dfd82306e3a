package convex

import (
	"context"
	"fmt"
	"os"
	"strings"
)

// Two wells share a demand of 1000 m³/d; the lift grows with each well's own rate and a little with the other's.
func ExampleProblem_SetHessian() {
	p, err := NewProblem(Minimise, []Column{{Name: "north", Cost: 20, Upper: 900}, {Name: "south", Cost: 21, Upper: 900}})
	if err != nil {
		fmt.Println(err)
		return
	}
	if err := p.SetHessian(Hessian{Dense: []float64{4e-3, 4e-4, 4e-4, 4e-3}}); err != nil {
		fmt.Println(err)
		return
	}
	if _, err := p.AddRow(Row{Name: "demand", Coefficients: []float64{1, 1}, Lower: 1000, Upper: 1000}); err != nil {
		fmt.Println(err)
		return
	}
	s, err := Solve(context.Background(), p, Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%v: %.1f and %.1f m³/d, one more costs %.4f\n", s.Status, s.X[0], s.X[1], s.RowPrice[0])
	fmt.Println("certified:", Certify(p, s).Accepted, "- second opinion:", SecondOpinion(context.Background(), p, s).Verdict)
	// Output:
	// optimal: 638.9 and 361.1 m³/d, one more costs 22.7000
	// certified: true - second opinion: agree
}

func ExampleReadMPS() {
	m, err := ReadMPS(strings.NewReader("NAME\nROWS\n N cost\n G demand\nCOLUMNS\n W1 cost 20 demand 1\nRHS\n R demand 100\nENDATA\n"))
	if err != nil {
		fmt.Println(err)
		return
	}
	if err := WriteMPS(os.Stdout, m); err != nil {
		fmt.Println(err)
	}
	// Output:
	// NAME
	// ROWS
	//  N cost
	//  G demand
	// COLUMNS
	//  W1 cost 20
	//  W1 demand 1
	// RHS
	//  right demand 100
	// BOUNDS
	// ENDATA
}
