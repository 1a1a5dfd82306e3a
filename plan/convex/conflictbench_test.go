package convex

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// conflictSizes are the sizes of the benchmarks of explanations: wells x limits, and a demand of 1.2 times what there is.
var conflictSizes = []planningCase{{wells: 200, limits: 200, seed: 1}, {wells: 1000, limits: 200, seed: 1}}

// rangesAsRows rewrites a problem with free columns and a row for each range of a well, in front of the limits, as an explanation of a
// conflict takes it.
func rangesAsRows(t testing.TB, p *Problem) *Problem {
	columns := make([]Column, p.Columns())
	for j := range columns {
		columns[j] = Column{Lower: -inf, Upper: inf}
	}
	q := mustProblem(t, Minimise, columns)
	add := func(r Row) {
		if _, err := q.AddRow(r); err != nil {
			t.Fatal(err)
		}
	}
	for j := range columns {
		a := make([]float64, len(columns))
		a[j] = 1
		add(Row{Coefficients: a, Lower: p.Column(j).Lower, Upper: p.Column(j).Upper})
	}
	for i := range p.Rows() {
		add(p.Row(i))
	}
	return q
}

// everyRow lists all rows, and all of them as relaxable at the same weight.
func everyRow(p *Problem) (all []int, list []Relaxable) {
	for i := range p.Rows() {
		all = append(all, i)
		list = append(list, Relaxable{Row: i, LowerWeight: 1e-4, UpperWeight: 1})
	}
	return all, list
}

// conflictCase is a problem to explain.
type conflictCase struct {
	name string
	p    *Problem
}

func conflictCases(b *testing.B) (list []conflictCase) {
	for _, c := range conflictSizes {
		size := fmt.Sprintf("%dx%d", c.wells, c.limits)
		far, _ := tooMuch(b, c, 1.2)
		near := nearbyProblem(b, c.wells, c.limits, 1.001, c.seed)
		list = append(list, conflictCase{size + "/far", far}, conflictCase{size + "/near", near},
			conflictCase{size + "/near, ranges as rows", rangesAsRows(b, near)})
	}
	return list
}

func BenchmarkConflict(b *testing.B) {
	for _, c := range conflictCases(b) {
		all, _ := everyRow(c.p)
		b.Run(c.name, func(b *testing.B) {
			var set *ConflictSet
			for b.Loop() {
				set, _ = Conflict(context.Background(), c.p, all)
			}
			if set.Status != Infeasible || !set.Verified {
				b.Fatalf("%v, verified %v", set.Status, set.Verified)
			}
			b.ReportMetric(float64(set.Solves), "solves")
			b.ReportMetric(float64(len(set.Rows)+len(set.Bounds)), "members")
		})
	}
}

func BenchmarkLeastRelaxation(b *testing.B) {
	for _, c := range conflictCases(b) {
		_, list := everyRow(c.p)
		b.Run(c.name, func(b *testing.B) {
			var r *Relaxation
			for b.Loop() {
				r, _ = LeastRelaxation(context.Background(), c.p, list)
			}
			if r.Status != Optimal {
				b.Fatal(r.Status)
			}
			b.ReportMetric(r.Total, "total")
		})
	}
}

// nearbyProblem has a limit beside each well, or beside each few, so that nearly all of them bind, and a demand of times the largest yield.
func nearbyProblem(t testing.TB, wells, limits int, times float64, seed uint64) *Problem {
	rng := rand.New(rand.NewPCG(seed, 79))
	at, columns := make([][2]float64, wells), make([]Column, wells)
	for j := range at {
		at[j] = [2]float64{rng.Float64(), rng.Float64()}
		columns[j] = Column{Cost: 1, Upper: 1000 + 2000*rng.Float64()}
	}
	p := mustProblem(t, Maximise, columns)
	reach := 3 / math.Sqrt(float64(wells))
	for i := range limits {
		x, y := at[i%wells][0]+0.01*rng.Float64(), at[i%wells][1]+0.01*rng.Float64()
		a, full := make([]float64, wells), 0.0
		for j := range a {
			a[j] = math.Exp(-math.Hypot(x-at[j][0], y-at[j][1])/reach) / 1000
			full += a[j] * columns[j].Upper
		}
		if _, err := p.AddRow(atMost(full*(0.1+0.3*rng.Float64()), a...)); err != nil {
			t.Fatal(err)
		}
	}
	most := mustOptimal(t, p, Options{}).Objective
	if _, err := p.AddRow(atLeast(times*most, ones(wells)...)); err != nil {
		t.Fatal(err)
	}
	return p
}
