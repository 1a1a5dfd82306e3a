package plan

import (
	"context"
	"fmt"
	"math"
)

// lines is a response in the order of the brief: one row a receptor and one a well, nil where the response has none, with slopes
// in the order of the brief's wells.
type lines struct {
	at       []float64
	receptor []*Row
	well     []*Row
	heads    []float64 // nil when not known
}

// align brings a response into the brief's order. Rows of other operating states and realisations are left out.
func (s *setup) align(r *Response) (*lines, error) {
	var faults problemList
	order := make([]int, len(s.Wells))
	for i := range order {
		order[i] = -1
	}
	for k, id := range r.Wells {
		i, known := s.wellIndex[id]
		switch {
		case !known:
			faults.addf("the response has a well %q that the brief has not", id)
		case order[i] >= 0:
			faults.addf("the response has the well %q twice", id)
		default:
			order[i] = k
		}
	}
	for i, k := range order {
		if k < 0 {
			faults.addf("the response lacks the well %q", s.Wells[i].ID)
		}
	}
	if len(r.At) != len(r.Wells) || (r.WellHeads != nil && len(r.WellHeads) != len(r.Wells)) {
		faults.addf("the response has %d wells, %d rates and %d heads", len(r.Wells), len(r.At), len(r.WellHeads))
	}
	if err := faults.err(); err != nil {
		return nil, err
	}
	l := &lines{at: reordered(&faults, r.At, order, "response: rate"), receptor: make([]*Row, len(s.Receptors)), well: make([]*Row, len(s.Wells))}
	if r.WellHeads != nil {
		l.heads = reordered(&faults, r.WellHeads, order, "response: head")
	}
	for k := range r.Rows {
		s.alignRow(&faults, l, &r.Rows[k], order)
	}
	return l, faults.err()
}

func (s *setup) alignRow(faults *problemList, l *lines, row *Row, order []int) {
	if !s.isState(row.State) || row.Realisation != 0 {
		return
	}
	what := fmt.Sprintf("response row %q", row.Receptor)
	place, known := (**Row)(nil), false
	if row.Receptor != "" {
		var i int
		if i, known = s.receptorIndex[row.Receptor]; known {
			place = &l.receptor[i]
			if want := s.Receptors[i].Kind.Unit(); row.Unit != want {
				faults.addf("%s is in %q, not in %q", what, row.Unit, want)
			}
		}
	} else {
		what = fmt.Sprintf("response row of well %q", row.Well)
		var i int
		if i, known = s.wellIndex[row.Well]; known {
			place = &l.well[i]
		}
	}
	switch {
	case !known:
		faults.addf("%s is about nothing in the brief", what)
		return
	case *place != nil:
		faults.addf("%s stands there twice", what)
		return
	case len(row.Slope) != len(order):
		faults.addf("%s has %d slopes for %d wells", what, len(row.Slope), len(order))
		return
	}
	faults.number(row.Base, "%s: the base", what)
	faults.number(row.Change, "%s: the change", what)
	copied := *row
	copied.Slope = reordered(faults, row.Slope, order, what+": slope")
	*place = &copied
}

func reordered(faults *problemList, values []float64, order []int, what string) []float64 {
	out := make([]float64, len(order))
	for i, k := range order {
		out[i] = values[k]
		faults.number(values[k], "%s %d", what, k)
	}
	return out
}

// target is the row that a limit is about: a receptor's or a well's own.
type target struct {
	receptor int // -1: none
	well     int // the well's own row when receptor is -1
}

func (l *lines) row(t target) *Row {
	if t.receptor >= 0 {
		return l.receptor[t.receptor]
	}
	return l.well[t.well]
}

// tangent is a linear function that touches a row's change at some rates: constant + slope·rates.
type tangent struct {
	constant float64
	slope    []float64
	base     float64 // the row's value without pumping: it moves with the worst place
}

func (t tangent) at(rates []float64) float64 { return t.constant + dot(t.slope, rates) }

// oracle answers for the change of any row at any rates. It asks the model as seldom as it can: never for a linear row, once for
// each set of rates otherwise. Without a model the tangents of the first response answer.
type oracle struct {
	setup *setup
	model Model
	known []*lines // known[0] is the first response
}

// linearise returns the response at the given rates.
func (o *oracle) linearise(ctx context.Context, rates []float64) (*lines, error) {
	for _, l := range o.known {
		if sameRates(l.at, rates) {
			return l, nil
		}
	}
	if o.model == nil {
		return o.known[0], nil
	}
	r, err := o.model.Linearise(ctx, append([]float64(nil), rates...))
	if err != nil {
		return nil, fmt.Errorf("plan: linearisation %d: %w", len(o.known)+1, err)
	}
	l, err := o.setup.align(r)
	if err != nil {
		return nil, err
	}
	if !sameRates(l.at, rates) {
		return nil, &DataError{Problems: []string{"the response holds at other rates than those asked for"}}
	}
	o.known = append(o.known, l)
	return l, nil
}

// tangent returns the linear function that equals the row's change at the given rates; for a linear row it does so everywhere.
func (o *oracle) tangent(ctx context.Context, t target, rates []float64) (tangent, error) {
	first := o.known[0].row(t)
	if first.Linear {
		return tangent{slope: first.Slope, base: first.Base}, nil
	}
	l, err := o.linearise(ctx, rates)
	if err != nil {
		return tangent{}, err
	}
	row := l.row(t)
	if row == nil {
		return tangent{}, &DataError{Problems: []string{"a later response lacks a row that the first one had"}}
	}
	return tangent{constant: row.Change - dot(row.Slope, l.at), slope: row.Slope, base: row.Base}, nil
}

// tangentOf returns the tangent of the change that a bound is about, at the rates of its counted wells. For a bound on a value the
// change is counted against the first response's value without pumping, so that edge - change is the room at any place.
func (o *oracle) tangentOf(ctx context.Context, b *bound, rates []float64) (tan tangent, counted []float64, err error) {
	counted = restrict(rates, b.counted)
	if tan, err = o.tangent(ctx, b.target, counted); err != nil {
		return tan, nil, err
	}
	if b.value {
		tan.constant += o.known[0].row(b.target).Base - tan.base
	}
	return o.setup.withLoss(b, tan, counted), counted, nil
}

// withLoss adds the tangent of the turbulent loss that is part of a bound.
func (s *setup) withLoss(b *bound, tan tangent, rates []float64) tangent {
	if b.bore < 0 || rates[b.bore] == 0 {
		return tan
	}
	w, rate := s.Wells[b.bore], rates[b.bore]
	loss := quadraticLoss(w, rate)
	slope := 2 * loss / rate // of C Q|Q|
	tan.constant += loss - slope*rate
	tan.slope = append([]float64(nil), tan.slope...)
	tan.slope[b.bore] += slope
	return tan
}

func sameRates(a, b []float64) bool {
	for i, v := range a {
		if v != b[i] {
			return false
		}
	}
	return true
}

// restrict keeps the rates of the counted wells and sets the others to zero.
func restrict(rates []float64, counted []bool) []float64 {
	out := make([]float64, len(rates))
	for i, c := range counted {
		if c {
			out[i] = rates[i]
		}
	}
	return out
}

// rateScale is the largest rate that a well can have in the plan, in absolute value [m³/d].
func (s *setup) rateScale(i int) float64 {
	if s.column[i] >= 0 {
		return math.Max(math.Abs(s.Wells[i].Min), math.Abs(s.Wells[i].Max))
	}
	return math.Abs(s.standing[i])
}
