package convex

import (
	"math"
	"testing"
)

// Responses between two canals [m per m³/d], closed form (two-stream strip with images), three wells at two springs.
var (
	springP1 = []float64{2.712079621525e-4, 3.842560390817e-4, 2.069615201665e-4}
	springP2 = []float64{1.469348697956e-4, 4.305805866293e-4, 2.910185545674e-4}
)

// tenDigits is half a unit in the last of ten printed digits, relative to the value.
const tenDigits = 5e-10

func threeWells(cost []float64, limit float64) []Column {
	c := make([]Column, 3)
	for j := range c {
		c[j] = Column{Cost: cost[j], Upper: limit}
	}
	return c
}

func check(t *testing.T, what string, got, want, half float64) {
	t.Helper()
	if !(math.Abs(got-want) <= half) {
		t.Errorf("%s: %.12g, want %.12g within %g", what, got, want, half)
	}
}

// TestMostYieldTwoSprings: total 1221.986123, both springs bind. Half a unit of the last printed digit throughout.
func TestMostYieldTwoSprings(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 2500), atMost(0.30, springP1...), atMost(0.25, springP2...))
	s := mustOptimal(t, p, Options{})
	check(t, "total", s.Objective, 1221.986123, 5e-7)
	check(t, "Q1", s.X[0], 733.050625, 5e-7)
	check(t, "Q2", s.X[1], 0, 0)
	check(t, "Q3", s.X[2], 488.935498, 5e-7)
	check(t, "price of the first spring", s.RowPrice[0], 2969.775953, 5e-7)
	check(t, "price of the second spring", s.RowPrice[1], 1324.213347, 5e-7)
	check(t, "limits at their prices", 0.30*s.RowPrice[0]+0.25*s.RowPrice[1], s.Objective, tenDigits*s.Objective)
	if s.PrimalDegenerate || s.DualDegenerate {
		t.Error("called degenerate")
	}
}

func TestMostYieldCapped(t *testing.T) {
	p := mustProblem(t, Maximise, threeWells([]float64{1, 1, 1}, 600), atMost(0.30, springP1...), atMost(0.25, springP2...))
	s := mustOptimal(t, p, Options{})
	check(t, "total", s.Objective, 1156.112576, 5e-7)
	check(t, "Q1", s.X[0], 600, 0)
	check(t, "Q2", s.X[1], 0, 0)
	check(t, "Q3", s.X[2], 556.112576, 5e-7)
	check(t, "slack of the first spring", 0.30-s.RowValue[0], 0.02218132, 5e-9)
	check(t, "price of the first spring", s.RowPrice[0], 0, 0)
	check(t, "price of the second spring", s.RowPrice[1], 3436.207019, 5e-7)
	check(t, "price of the first well's cap", s.ReducedCost[0], 0.49510137, 5e-9)
}

func TestLeastDrawdownForDemand(t *testing.T) {
	p := mustProblem(t, Minimise, threeWells(springP1, 600), equal(1000, 1, 1, 1))
	s := mustOptimal(t, p, Options{})
	check(t, "drawdown", s.Objective, 0.23266010, 5e-9)
	for j, want := range []float64{400, 0, 600} {
		check(t, "rate", s.X[j], want, 1e-9)
	}
}

// lumpedField is 5 x 5 cells of 2 km, transmissivity 1000 m²/d, recharge 100 mm a year, a lake with head zero along the first row of
// cells (conductance 2T each). It returns the natural heads [m] and the fall of each head per Mm³ a year pumped in each cell, cells
// numbered row by row from the lake.
func lumpedField() (natural []float64, fall [][]float64) {
	const side, conductance, year = 5, 1000.0, 365.0
	n := side * side
	a := make([][]float64, n)
	for c := range a {
		a[c] = make([]float64, 2*n+1)
		row, col := c/side, c%side
		link := func(r, k int) {
			if r >= 0 && r < side && k >= 0 && k < side {
				a[c][c] += conductance
				a[c][r*side+k] -= conductance
			}
		}
		link(row-1, col)
		link(row+1, col)
		link(row, col-1)
		link(row, col+1)
		if row == 0 {
			a[c][c] += 2 * conductance
		}
		a[c][n+c] = 1e6 / year
		a[c][2*n] = 0.1 * 4e6 / year
	}
	for c := range a { // Gauss-Jordan; diagonally dominant, no pivoting needed
		for r := range a {
			if r == c {
				continue
			}
			f := a[r][c] / a[c][c]
			for k := range a[r] {
				a[r][k] -= f * a[c][k]
			}
		}
	}
	natural, fall = make([]float64, n), make([][]float64, n)
	for c := range a {
		natural[c] = a[c][2*n] / a[c][c]
		fall[c] = make([]float64, n)
		for q := range fall[c] {
			fall[c][q] = a[c][n+q] / a[c][c]
		}
	}
	return natural, fall
}

// TestLumpedTown is the plan after Bear (1979) pp. 505-509 as rebuilt in the check values: a town needs 7.0 Mm³ a year, a unit costs
// 1.00 and 0.50 per km of distance, heads in the two rows next to the lake are at least 0.64 and 0.95 m.
func TestLumpedTown(t *testing.T) {
	natural, fall := lumpedField()
	for row, want := range []float64{2.73972603, 7.12328767, 10.41095890, 12.60273973, 13.69863014} {
		check(t, "natural head", natural[5*row], want, 5e-9)
	}
	cases := []struct {
		name            string
		row, col        int // of the town, counted from the lake
		cost            float64
		price, priceTol float64
		reason          string
	}{
		{"rows from the lake", 3, 2, 7.0, 1.0, rounding, "all from the town's own cell"},
		{"rows from the far side", 1, 2, 12.41215090, 4.04907182, 5e-9, "printed"},
		{"lake on the left", 2, 3, 10.71641038, 4.56939229, 5e-9, "printed"},
		{"lake on the right", 2, 1, 10.71641038, 4.56939229, 5e-9, "printed, mirror image"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			columns := make([]Column, 25)
			ones := make([]float64, 25)
			for j := range columns {
				away := 2 * math.Hypot(float64(j/5-c.row), float64(j%5-c.col))
				columns[j] = Column{Cost: 1 + 0.5*away, Upper: inf}
				ones[j] = 1
			}
			p := mustProblem(t, Minimise, columns, atLeast(7, ones...))
			for cell := 0; cell < 10; cell++ {
				lowest := []float64{0.64, 0.95}[cell/5]
				if _, err := p.AddRow(atMost(natural[cell]-lowest, fall[cell]...)); err != nil {
					t.Fatal(err)
				}
			}
			s := mustOptimal(t, p, Options{})
			check(t, "cost ("+c.reason+")", s.Objective, c.cost, 5e-9)
			check(t, "price of the demand", s.RowPrice[0], c.price, c.priceTol)
			if c.row == 3 {
				check(t, "lowest head at 1 km", natural[2]-s.RowValue[3], 0.74572931, 5e-9)
				check(t, "lowest head at 3 km", natural[7]-s.RowValue[8], 1.01928878, 5e-9)
			}
		})
	}
}

func TestLumpedLargestSupply(t *testing.T) {
	natural, fall := lumpedField()
	columns := make([]Column, 25)
	for j := range columns {
		columns[j] = Column{Cost: 1, Upper: inf}
	}
	p := mustProblem(t, Maximise, columns)
	for cell := 0; cell < 10; cell++ {
		if _, err := p.AddRow(atMost(natural[cell]-[]float64{0.64, 0.95}[cell/5], fall[cell]...)); err != nil {
			t.Fatal(err)
		}
	}
	check(t, "largest supply", mustOptimal(t, p, Options{}).Objective, 7.664, 5e-4)
}
