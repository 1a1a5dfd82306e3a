package gisio_test

import (
	"fmt"

	"springbound/gisio"
)

// Two triangles on a unit square, on which the head falls from 4 m in the west to 2 m in the east.
func ExampleContours() {
	x, y := []float64{0, 1, 1, 0}, []float64{0, 0, 1, 1}
	head := []float64{4, 2, 2, 4}
	contours, err := gisio.Contours(x, y, []int32{0, 1, 2, 0, 2, 3}, head, gisio.NiceLevels(2, 4, 1))
	for _, c := range contours {
		fmt.Println(c.Level, c.Lines[0].Points, c.Lines[0].Closed)
	}
	fmt.Println(err)
	// Output:
	// 3 [[0.5 0] [0.5 0.5] [0.5 1]] false
	// <nil>
}
