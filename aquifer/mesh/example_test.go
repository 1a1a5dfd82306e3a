package mesh_test

import (
	"context"
	"errors"
	"fmt"

	"github.com/paulmach/orb"

	"springbound/aquifer/mesh"
)

// A rectangle with a river across it and one well.
func ExampleBuild() {
	d := mesh.Domain{
		Outer:  orb.Ring{{0, 0}, {5000, 0}, {5000, 3000}, {0, 3000}},
		Lines:  []mesh.Line{{Name: "Aller", Path: orb.LineString{{0, 1000}, {5000, 2000}}, Size: 100}},
		Points: []mesh.Point{{Name: "well W1", At: orb.Point{2500, 500}, Size: 5}},
	}
	m, err := mesh.Build(context.Background(), d, mesh.Options{Nodes: 5000})
	if err != nil {
		fmt.Println(err)
		return
	}
	well := m.PointNode[0]
	fmt.Println("enough nodes:", len(m.X) >= 5000)
	fmt.Println("angle kept:", m.Quality.MinAngleDeg >= 25)
	fmt.Println("well at", m.X[well], m.Y[well])
	fmt.Println("regions:", len(m.Regions))
	// Output:
	// enough nodes: true
	// angle kept: true
	// well at 2500 500
	// regions: 2
}

// All problems come at once.
func ExampleValidate() {
	d := mesh.Domain{
		Outer:  orb.Ring{{0, 0}, {100, 0}, {100, 100}, {0, 100}},
		Holes:  []orb.Ring{{{80, 40}, {120, 40}, {120, 60}}},
		Points: []mesh.Point{{Name: "well W1", At: orb.Point{10, 10}}, {Name: "well W2", At: orb.Point{10, 10}}},
	}
	var problems *mesh.DomainError
	if errors.As(mesh.Validate(d, 0), &problems) {
		for _, p := range problems.Problems {
			fmt.Println(p.Text)
		}
	}
	// Output:
	// hole 1 crosses the outline at (100, 40)
	// well W1 and well W2 lie at the same place, (10, 10): 0 m apart, tolerance 1.41e-06 m
}
