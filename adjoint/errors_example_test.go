package adjoint_test

import (
	"context"
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/wells"
)

// A well between two canals and a spring's place that is watched: the mesh is refined until the change there is good to half a per cent, and
// the estimate says how far it is off.
func ExampleRefine() {
	m := motion{cos: 1}
	ws := []wells.Well{pumped("W1", m.at(700, 600), 0.2, 1000)}
	rs := []wells.Receptor{{ID: "P1", Kind: wells.PointLevel, At: m.at(1200, 1000)}}
	r, err := adjoint.Refine(context.Background(), benchmarks()[3].site(m), ws, rs, []float64{1000}, adjoint.RefineOptions{})
	if err != nil {
		fmt.Println(err)
		return
	}
	e := r.Errors.Rows[0]
	fmt.Printf("%.3f m, met: %v\n", r.State.Rows[0].Change, r.Met)
	fmt.Println("error within half a per cent:", math.Abs(e.ChangeError) <= adjoint.DefaultAccuracy*e.Size)
	fmt.Println("bound above the estimate:", e.ChangeBound >= math.Abs(e.ChangeError))
	// Output:
	// 0.271 m, met: true
	// error within half a per cent: true
	// bound above the estimate: true
}
