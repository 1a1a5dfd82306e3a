package adjoint_test

import (
	"context"
	"math"
	"testing"

	"springbound/adjoint"
	"springbound/aquifer"
)

// A state with less recharge is the site built anew with that recharge: the same heads, rows and balance. It takes no factorisation of
// its own and no solve but the one of its heads.
func TestInStateIsTheSiteWithThatRecharge(t *testing.T) {
	const factor = 0.6
	ctx := context.Background()
	o := aquifer.Options{Nodes: 2500}
	site, ws, rs := everything(motion{cos: 1}, 0)
	field := build(t, site, ws, rs, o)
	before, solves := field.Model.Factorisations, field.Model.Solves()
	state, err := field.InState(factor)
	if err != nil {
		t.Fatal(err)
	}
	base, err := state.Base(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if state.Model.Factorisations != 0 || state.Model.Solves() != 1 || field.Model.Factorisations != before || field.Model.Solves() != solves {
		t.Errorf("%d factorisations and %d solves for the state's heads", state.Model.Factorisations, state.Model.Solves())
	}
	dry, ws, rs := everything(motion{cos: 1}, 0)
	dry.Background.Recharge = constant(dry.Background.Recharge.Best * factor)
	apart := build(t, dry, ws, rs, o)
	rates := ratesOf(ws)
	want, err := apart.Changes(ctx, rates)
	if err != nil {
		t.Fatal(err)
	}
	got, err := state.Changes(ctx, rates)
	if err != nil {
		t.Fatal(err)
	}
	largest := 0.0
	for n := range base {
		largest = math.Max(largest, math.Abs(want.Base[n]))
	}
	for n := range base { // both are direct solves with one matrix; the right-hand sides differ in their last digit
		if !(math.Abs(base[n]-want.Base[n]) <= 1e-9*largest) || !(math.Abs(got.Heads[n]-want.Heads[n]) <= 1e-9*largest) {
			t.Fatalf("node %d: %.12g and %.12g, want %.12g and %.12g", n, base[n], got.Heads[n], want.Base[n], want.Heads[n])
		}
	}
	lin, err := state.Sensitivities(ctx, nil, adjoint.Options{Capture: true})
	if err != nil {
		t.Fatal(err)
	}
	first, err := field.Sensitivities(ctx, nil, adjoint.Options{})
	if err != nil {
		t.Fatal(err)
	}
	moved := 0
	for i, row := range got.Rows {
		size := math.Max(math.Abs(want.Rows[i].Base), math.Abs(want.Rows[i].Change))
		if !(math.Abs(row.Base-want.Rows[i].Base) <= 1e-9*size) || !(math.Abs(row.Change-want.Rows[i].Change) <= 1e-9*size) {
			t.Errorf("row %d: %.12g less %.12g, want %.12g less %.12g", i, row.Base, row.Change, want.Rows[i].Base, want.Rows[i].Change)
		}
		if first.Rows[i].Base != row.Base {
			moved++
		}
		for w := range ws {
			if lin.Rows[i].Slope[w] != first.Rows[i].Slope[w] { // one matrix, one right-hand side
				t.Errorf("row %d: slopes %v and %v", i, lin.Rows[i].Slope, first.Rows[i].Slope)
				break
			}
		}
	}
	if moved != len(got.Rows) {
		t.Errorf("recharge moved %d of %d rows", moved, len(got.Rows))
	}
	a, b := state.Model.Balance(got.Heads, state.Sinks(rates)), apart.Model.Balance(want.Heads, apart.Sinks(rates))
	if !(math.Abs(a.In-b.In) <= 1e-9*b.In) || !(math.Abs(a.In-a.Out) <= 1e-9*a.In) {
		t.Errorf("in %v, out %v; built anew %v", a.In, a.Out, b.In)
	}
}
