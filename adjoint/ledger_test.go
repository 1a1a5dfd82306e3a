package adjoint_test

import (
	"context"
	"math"
	"testing"

	"springbound/aquifer"
)

// bookedTolerance is what is left of a nodal balance, and of a feature's flow against the model's own, as a share of the throughflow: rounding of
// a direct solve. A lost or wrong term is larger by many powers of ten.
const bookedTolerance = 1e-9

// The ledger, which takes no number from the matrix, finds every node in balance and every feature's flow as the model does, on a site with every
// kind of feature; and it sees a single wrong coupling and every dropped term.
func TestLedgerBalancesEveryNode(t *testing.T) {
	ctx := context.Background()
	m := motions(2)[1]
	site, ws, rs := everything(m, 20)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 6000})
	ledger := f.Model.Ledger(1)
	throughflow := 0.0
	for _, rates := range [][]float64{make([]float64, len(ws)), ratesOf(ws)} {
		s, err := f.Changes(ctx, rates)
		if err != nil {
			t.Fatal(err)
		}
		if len(rates) > 0 && rates[0] > 0 {
			t.Logf("%d entries off", len(s.State.Off))
		}
		sinks := f.Sinks(rates)
		b := ledger.Book(s.Heads, sinks)
		throughflow = math.Max(b.In, b.Out)
		if worst := math.Abs(b.Residual[b.Worst]) / throughflow; !(worst <= bookedTolerance) {
			t.Errorf("at %v a node keeps %.2e of the throughflow", f.Model.At(b.Worst), worst)
		} else {
			t.Logf("worst node %.2e of the throughflow, whole %.2e, levels %.1e", worst, (b.In-b.Out)/throughflow, b.LevelsApart)
		}
		own := f.Model.Balance(s.Heads, sinks)
		for _, x := range own.Features {
			found := false
			for _, y := range b.Features {
				if x.Kind == y.Kind && x.Index == y.Index {
					found = true
					if d := math.Max(math.Abs(x.In-y.In), math.Abs(x.Out-y.Out)); !(d <= bookedTolerance*throughflow) {
						t.Errorf("%s %s: model in %.6f out %.6f, ledger in %.6f out %.6f", x.Kind, x.Feature, x.In, x.Out, y.In, y.Out)
					}
				}
			}
			if !found {
				t.Errorf("the ledger does not know %s %s", x.Kind, x.Feature)
			}
		}
		if len(own.Features) != len(b.Features) {
			t.Errorf("%d features in the model, %d in the ledger", len(own.Features), len(b.Features))
		}
	}
}

// The same under another recharge, that of a drought: the records times its factor.
func TestLedgerUnderAnotherRecharge(t *testing.T) {
	site, ws, rs := everything(motions(1)[0], 20)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 3000})
	dry, err := f.InState(0.4)
	if err != nil {
		t.Fatal(err)
	}
	s, err := dry.Changes(context.Background(), ratesOf(ws))
	if err != nil {
		t.Fatal(err)
	}
	b := dry.Model.Ledger(0.4).Book(s.Heads, dry.Sinks(s.Rates))
	if worst := math.Abs(b.Residual[b.Worst]) / math.Max(b.In, b.Out); !(worst <= bookedTolerance) {
		t.Errorf("a node keeps %.2e of the throughflow", worst)
	}
	if b = dry.Model.Ledger(1).Book(s.Heads, dry.Sinks(s.Rates)); !(math.Abs(b.Residual[b.Worst]) > 1e-6*b.In) {
		t.Error("the wrong recharge is not seen")
	}
}

func TestLedgerSeesPlantedFaults(t *testing.T) {
	ctx := context.Background()
	m := motions(1)[0]
	for _, c := range []struct {
		name  string
		alter func(aquifer.Terms)
	}{
		{"one coupling", func(x aquifer.Terms) { x.ScaleCoupling(m.at(3000, 1900), 1.01) }},
		{"recharge", func(x aquifer.Terms) { x.Drop(aquifer.RechargeFeature, "background") }},
		{"river", func(x aquifer.Terms) { x.Drop(aquifer.RiverFeature, "Aln") }},
		{"lake", func(x aquifer.Terms) { x.Drop(aquifer.LakeFeature, "tarn") }},
		{"leakage", func(x aquifer.Terms) { x.Drop(aquifer.LeakageFeature, "leaky") }},
		{"spring", func(x aquifer.Terms) { x.Drop(aquifer.SpringFeature, "rill") }},
		{"head-dependent edge", func(x aquifer.Terms) { x.Drop(aquifer.EdgeFeature, "fan") }},
		{"prescribed flux", func(x aquifer.Terms) { x.Drop(aquifer.EdgeFeature, "upland") }},
	} {
		site, ws, rs := everything(m, 20)
		f := build(t, site, ws, rs, aquifer.Options{Nodes: 4000, Alter: c.alter})
		s, err := f.Changes(ctx, ratesOf(ws))
		if err != nil {
			t.Fatal(err)
		}
		b := f.Model.Ledger(1).Book(s.Heads, f.Sinks(s.Rates))
		if worst := math.Abs(b.Residual[b.Worst]) / math.Max(b.In, b.Out); !(worst > 100*bookedTolerance) {
			t.Errorf("%s: the worst node keeps %.2e of the throughflow: not seen", c.name, worst)
		} else {
			t.Logf("%s: %.2e", c.name, worst)
		}
	}
}
