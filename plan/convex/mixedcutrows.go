package convex

import (
	"math"
	"sort"
)

// Numbers of the sums of rows.
const (
	sumLength    = 5   // rows in a sum
	gomoryMost   = 100 // tableau rows tried in one round
	gomoryWeight = 1e-11
)

// roundRows rounds each row, and sums of rows in which a continuous column between its bounds cancels.
func (k *cutter) roundRows() {
	for i := range k.rows {
		if i >= len(k.c.rows) {
			break
		}
		rows := []weighted{{i, 1}}
		used := map[int]bool{i: true}
		for len(rows) <= sumLength {
			if k.roundedSum(rows, true) {
				break
			}
			next, ok := k.cancelling(rows, used)
			if !ok {
				break
			}
			used[next.row] = true
			rows = append(rows, next)
		}
	}
}

// cancelling finds a row that takes the continuous column farthest from its bounds out of the sum.
func (k *cutter) cancelling(rows []weighted, used map[int]bool) (weighted, bool) {
	sum := k.a
	var columns []int
	for _, w := range rows {
		for _, e := range k.rows[w.row].entries {
			if sum[e.at] == 0 {
				columns = append(columns, e.at)
			}
			sum[e.at] += w.weight * e.value
		}
	}
	defer k.clear(columns)
	sort.Ints(columns)
	at, far := -1, wholeness
	for _, j := range columns {
		if k.c.whole[j] || math.Abs(sum[j]) <= cutNegligible || j == at {
			continue
		}
		t, ok := k.nearestBound(j, true)
		d := t.at / k.lp.t.s.col[j]
		if !ok {
			d = math.MaxFloat64
		}
		if d > far {
			at, far = j, d
		}
	}
	if at < 0 {
		return weighted{}, false
	}
	best, merit := weighted{}, math.Inf(1)
	for _, e := range k.c.touching[at] {
		r := k.rows[e.at]
		if used[e.at] {
			continue
		}
		slack := math.Min(r.upper-k.activity[e.at], k.activity[e.at]-r.lower) * k.lp.t.s.row[e.at]
		if m := math.Max(0, slack) + 1e-3*float64(len(r.entries)); m < merit {
			best, merit = weighted{e.at, -sum[at] / e.value}, m
		}
	}
	return best, finite(merit)
}

// gomory rounds the rows of the tableau that belong to whole columns with a fraction.
//
// Source: Gomory (1960), An algorithm for the mixed integer problem.
func (k *cutter) gomory(list []candidate) {
	sort.SliceStable(list, func(a, b int) bool { return math.Abs(list[a].part-0.5) < math.Abs(list[b].part-0.5) })
	e, s := k.lp.e, k.lp.t.s
	tried := 0
	for _, c := range list {
		j := c.column
		if !k.c.whole[j] || e.place[j] != Basic || tried >= gomoryMost {
			continue
		}
		tried++
		e.pivotRow(j)
		rows := make([]weighted, 0, len(e.rList))
		top := 0.0
		for t, i := range e.rList {
			y := e.w[t] * s.row[i] * s.col[j]
			top = math.Max(top, math.Abs(e.w[t]))
			if math.Abs(e.w[t]) > gomoryWeight {
				rows = append(rows, weighted{i, y})
			}
		}
		if !(top < 1e6) {
			continue // a nearly singular row: its rounding would pass for a fraction
		}
		k.roundedSum(rows, false, 1)
	}
}
