package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sort"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/plan"
)

const (
	// mostQuantities bounds the rows whose sensitivities are checked, those with limits first.
	mostQuantities = 20
	// everyWell is up to how many wells are all checked; beyond, mostContributors and as many spread over the table as spreadWells.
	everyWell        = 16
	mostContributors = 12
	spreadWells      = 4
	// differenceTolerance is the error allowed of a sensitivity, as a share of the row's largest, with the whole step: changes of two full
	// solves agree to about 1e-9 on ill-conditioned meshes, and a wrong term misses by far more.
	differenceTolerance = 1e-6
	// loosestDifference bounds what a small step may leave: a smaller step lifts the share of rounding in proportion.
	loosestDifference = 1e-3
)

// differenceSteps are the changes of rate tried, as shares of all that is pumped: less first, since heads then rise and nothing stops; a
// smaller one, and one to the other side, where a feature switches or a worst place moves on the way. Between switches the model is linear, so
// that a difference is no approximation whatever its step.
var differenceSteps = []float64{-1, -1e-2, -1e-4, 1e-4}

// differences compares adjoint sensitivities with the change of a full solve after one well's rate is changed.
func (a *audit) differences(ctx context.Context) error {
	l := plan.EvidenceLine{Check: "Adjoint sensitivities against differences", Unit: "share of the receptor's largest sensitivity",
		How:    "one full solve a well with its rate changed: the receptor's change divided by the step, beside the sensitivity of the adjoint solve",
		Reason: "between switches a difference is exact, so that only the rounding of two full solves is left, the more the smaller the step", Remedy: "do not use sensitivities, contributions and prices"}
	rows, chosen := a.quantities(), a.contributors()
	if len(rows) == 0 || len(chosen) == 0 {
		l.Result, l.Sentence = plan.NotDone, "There is no receptor or no well."
		a.e.Add(l)
		return nil
	}
	size := 1.0
	for _, q := range a.rates {
		size = math.Max(size, math.Abs(q))
	}
	for _, w := range a.j.field.Wells {
		size = math.Max(size, w.Max)
	}
	worst, excess, at, compared, left := 0.0, 0.0, "none", 0, 0
	allowed := differenceTolerance
	for k, w := range chosen {
		a.j.progress.report("checking: differences", k, len(chosen))
		lines, err := a.moved(ctx, w, size, rows)
		if err != nil {
			return err
		}
		a.e.Differences = append(a.e.Differences, lines...)
		for _, line := range lines {
			if line.Error == nil {
				left++
				continue
			}
			compared++
			if x := *line.Error / line.Allowed; !(x <= excess) {
				worst, excess, allowed, at = *line.Error, x, line.Allowed, line.Receptor+" by "+line.Well
			}
		}
	}
	l.Sentence = fmt.Sprintf("%d sensitivities of %d receptors and levels to %d wells; the farthest is %s.", compared, len(rows), len(chosen), at)
	if left > 0 {
		l.Sentence += fmt.Sprintf(" %d are not compared: a feature switches or a worst place moves within the smallest step.", left)
	}
	if compared == 0 {
		l.Result = plan.NotDone
		a.e.Add(l)
		return nil
	}
	a.add(l, worst, allowed)
	return nil
}

// moved settles the plan's rates with one of them changed, and compares each row at the largest step at which everything that it hangs on acts as at
// the plan.
func (a *audit) moved(ctx context.Context, w int, size float64, rows []int) ([]plan.DifferenceLine, error) {
	out := make([]plan.DifferenceLine, len(rows))
	for k, i := range rows {
		out[k] = plan.DifferenceLine{Receptor: a.receptorWords(i), Well: a.j.field.Wells[w].ID, Unit: a.rows[i].Unit, Adjoint: a.rows[i].Slope[w],
			Allowed: loosestDifference, Note: "a feature switches or the worst place moves within the smallest step"}
	}
	missing := len(rows)
	for _, part := range differenceSteps {
		if missing == 0 {
			break
		}
		rates := append([]float64(nil), a.rates...)
		rates[w] += part * size
		s, err := a.j.field.Changes(ctx, rates)
		var none *aquifer.NoSteadyState
		if errors.As(err, &none) {
			continue
		}
		if err != nil {
			return nil, err
		}
		if !a.sameFeatures(s) {
			continue
		}
		for k, i := range rows {
			if out[k].Difference == nil && s.Rows[i].Place == a.state.Rows[i].Place {
				a.difference(&out[k], i, rates[w]-a.rates[w], size, s)
				missing--
			}
		}
	}
	return out, nil
}

// sameFeatures tells whether the same features act as at the plan.
func (a *audit) sameFeatures(s *adjoint.State) bool {
	x, y := s.State.Off, a.state.State.Off
	if len(x) != len(y) {
		return false
	}
	for i := range x {
		if x[i] != y[i] {
			return false
		}
	}
	return true
}

// difference compares one sensitivity.
func (a *audit) difference(line *plan.DifferenceLine, i int, step, size float64, moved *adjoint.State) {
	largest := 0.0
	for _, s := range a.rows[i].Slope {
		largest = math.Max(largest, math.Abs(s))
	}
	d := (moved.Rows[i].Change - a.state.Rows[i].Change) / step
	e := 0.0
	if d != line.Adjoint {
		e = math.Abs(d-line.Adjoint) / math.Max(largest, math.Abs(d))
	}
	line.Difference, line.Error, line.Note, line.Step = &d, &e, "", step
	line.Allowed = math.Min(loosestDifference, differenceTolerance*size/math.Abs(step))
}

// quantities lists the rows to check: receptors with limits, other receptors, levels in wells.
func (a *audit) quantities() []int {
	limited := a.limited()
	rank := func(i int) int {
		switch r := a.rows[i].Receptor; {
		case r != "" && limited[r]:
			return 0
		case r != "":
			return 1
		}
		return 2
	}
	var out []int
	for i := range a.rows {
		out = append(out, i)
	}
	sort.SliceStable(out, func(x, y int) bool { return rank(out[x]) < rank(out[y]) })
	return out[:min(len(out), mostQuantities)]
}

// contributors lists the wells to check: all, or the largest contributors of the rows in turn and some spread over the table.
func (a *audit) contributors() []int {
	n := len(a.rates)
	chosen := map[int]bool{}
	if n <= everyWell {
		for w := range n {
			chosen[w] = true
		}
	} else {
		for rank := 0; rank < 2; rank++ {
			for _, i := range a.quantities() {
				if w := a.contributor(i, rank); len(chosen) < mostContributors {
					chosen[w] = true
				}
			}
		}
		for k := range spreadWells {
			chosen[k*(n-1)/(spreadWells-1)] = true
		}
	}
	var out []int
	for w := range n {
		if chosen[w] {
			out = append(out, w)
		}
	}
	return out
}

// contributor is the well with the rank-th largest contribution to a row.
func (a *audit) contributor(i, rank int) int {
	order := make([]int, len(a.rates))
	for w := range order {
		order[w] = w
	}
	part := func(w int) float64 { return math.Abs(a.rows[i].Slope[w] * a.rates[w]) }
	sort.SliceStable(order, func(x, y int) bool { return part(order[x]) > part(order[y]) })
	return order[rank]
}
