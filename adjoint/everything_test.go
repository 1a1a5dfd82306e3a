package adjoint_test

import (
	"context"
	"math"
	"testing"

	"github.com/paulmach/orb"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/wells"
)

// everything is a site with every kind of feature: zones 1 : 1000, an anisotropic zone, leakage, a lake, two springs, a river, a hole, all
// kinds of edge, a well 1 m from the river, less than one cell, two wells 3 m apart, one on the outline.
func everything(m motion, raise float64) (*aquifer.Site, []wells.Well, []wells.Receptor) {
	level := func(v float64) *float64 { v += raise; return &v }
	square := func(x, y, a, b float64) orb.Polygon { return orb.Polygon{m.ring(x, y, x+a, y, x+a, y+b, x, y+b)} }
	site := &aquifer.Site{
		Extent:     orb.Polygon{m.ring(0, 0, 4000, 0, 4200, 1500, 4000, 3000, 0, 3000), m.ring(1500, 2400, 1500, 2600, 1800, 2600, 1800, 2400)},
		Background: aquifer.Zone{Transmissivity: constant(500), Recharge: constant(5e-4)},
		Edges: []aquifer.Edge{
			{Name: "sea", Kind: aquifer.PrescribedHead, Path: m.path(0, 3000, 0, 1200), Levels: []float64{2 + raise, 1 + raise}},
			{Name: "estuary", Kind: aquifer.PrescribedHead, Path: m.path(0, 1200, 0, 0), Levels: []float64{1 + raise}},
			{Name: "upland", Kind: aquifer.PrescribedFlux, Path: m.path(1000, 3000, 3000, 3000), Flux: 0.1},
			{Name: "fan", Kind: aquifer.HeadDependent, Path: m.path(4000, 0, 4200, 1500), Levels: []float64{9 + raise, 8 + raise}, Conductance: *constant(0.3)},
		},
		Zones: []aquifer.Zone{
			{Name: "clay", Area: orb.MultiPolygon{square(2600, -200, 2000, 1000)}, Transmissivity: constant(2)},
			{Name: "gravel", Area: orb.MultiPolygon{square(1200, 300, 900, 1100)}, Transmissivity: constant(2000)},
			{Name: "bedded", Area: orb.MultiPolygon{square(2300, 1600, 1200, 1200)}, Transmissivity: constant(300), Anisotropy: &aquifer.Anisotropy{Ratio: 9, AngleDeg: 30}},
			{Name: "leaky", Area: orb.MultiPolygon{square(200, 1700, 900, 900)}, LeakageResistance: constant(3000), SourceHead: level(7)},
		},
		Rivers:  []aquifer.River{{Name: "Aln", Path: m.path(3900, 1300, 2500, 1500, 700, 1350), WaterLevels: []float64{8 + raise, 6 + raise, 3 + raise}, Width: 6, BedResistance: *constant(3)}},
		Lakes:   []aquifer.Lake{{Name: "tarn", Area: square(3500, 2100, 300, 300), WaterLevel: 9 + raise, BedResistance: *constant(50)}},
		Springs: []aquifer.Spring{{Name: "holm", At: m.at(900, 700), OutletLevel: 2 + raise, Conductance: constant(150), EffectiveRadius: 2}, {Name: "rill", At: m.at(2000, 2100), OutletLevel: 3 + raise, Conductance: constant(80), EffectiveRadius: 1}},
	}
	low := level(-50)
	ws := []wells.Well{
		pumped("W1", m.at(1700, 800), 0.2, 900), pumped("W2", m.at(2400, 1492.7), 0.2, 400), pumped("W3", m.at(2900, 2200), 0.15, 300),
		pumped("W4", m.at(2903, 2200), 0.15, 200), pumped("W5", m.at(3300, 500), 0.2, 5), pumped("W6", m.at(2000, 0), 0.2, 200), pumped("R1", m.at(700, 2200), 0.3, -150),
	}
	ws[2].LowestLevel, ws[2].LinearLoss, ws[2].DutyHours = low, 1e-4, 16
	ws[0].Intake = low
	area := square(800, 1800, 400, 300)
	rs := []wells.Receptor{
		{ID: "point", Kind: wells.PointLevel, At: m.at(1000, 1500)},
		{ID: "at-well", Kind: wells.NeighbourWell, At: ws[1].At},
		{ID: "fen", Kind: wells.Wetland, Area: area},
		{ID: "fen-worst", Kind: wells.WetlandWorst, Area: area},
		{ID: "holm", Kind: wells.SpringFlow, Feature: "holm"},
		{ID: "aln", Kind: wells.RiverReach, Feature: "Aln"},
		{ID: "aln-middle", Kind: wells.RiverReach, Feature: "Aln", Reach: m.path(2600, 1485, 1500, 1416)},
		{ID: "sea", Kind: wells.EdgeFlow, Feature: "sea"},
		{ID: "fan", Kind: wells.EdgeFlow, Feature: "fan"},
		{ID: "front", Kind: wells.SalineFront, At: m.at(500, 600), To: m.at(200, 600)},
		{ID: "bore", Kind: wells.PumpingLevel, Feature: "W3"},
	}
	return site, ws, rs
}

func build(t testing.TB, site *aquifer.Site, ws []wells.Well, rs []wells.Receptor, o aquifer.Options) *adjoint.Field {
	t.Helper()
	site.Nodes, site.Outlines = adjoint.Requests(ws, rs)
	model, err := aquifer.Build(context.Background(), site, o)
	if err != nil {
		t.Fatal(err)
	}
	f, err := adjoint.NewField(model, ws, rs)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func ratesOf(ws []wells.Well) []float64 {
	q := make([]float64, len(ws))
	for i, w := range ws {
		q[i] = w.FixedRate
	}
	return q
}

// Identities of the adjoint, as promised.
const (
	differenceTolerance  = 1e-8  // adjoint against a re-solve with one rate changed, relative
	reciprocityTolerance = 1e-10 // relative
	captureTolerance     = 1e-9  // sum of a well's shares less 1
	balanceTolerance     = 1e-9  // of the throughflow
)

// step is the change of one rate for differences [m³/d]: recharge, so that heads rise and no feature switches. The model is linear then, and a
// large step only lifts the difference above the rounding of heads.
const step = -1e7

func TestSensitivitiesEqualResolves(t *testing.T) {
	ctx := context.Background()
	for k, m := range motions(2) {
		site, ws, rs := everything(m, 0)
		f := build(t, site, ws, rs, aquifer.Options{Nodes: 8000})
		rates := ratesOf(ws)
		at, err := f.Changes(ctx, rates)
		if err != nil {
			t.Fatal(err)
		}
		lin, err := f.Sensitivities(ctx, at, adjoint.Options{Capture: true})
		if err != nil {
			t.Fatal(err)
		}
		if !(lin.Reciprocity <= reciprocityTolerance) {
			t.Errorf("placing %d: reciprocity error %.2e", k, lin.Reciprocity)
		}
		worst := 0.0
		for w := range ws {
			moved := append([]float64(nil), rates...)
			moved[w] += step
			s, err := f.Changes(ctx, moved)
			if err != nil {
				t.Fatal(err)
			}
			for i, row := range lin.Rows {
				if !row.Linear {
					continue
				}
				got := (s.Rows[i].Change - at.Rows[i].Change) / step
				size := math.Abs(row.Slope[w])
				rel := math.Abs(got-row.Slope[w]) / size
				worst = math.Max(worst, rel)
				if !(rel <= differenceTolerance) {
					t.Errorf("placing %d, row %d, well %s: adjoint %.12e, difference %.12e: off by %.1e", k, i, ws[w].ID, row.Slope[w], got, rel)
				}
			}
			share := 0.0
			for _, c := range lin.Capture {
				share += c.Share[w]
			}
			if !(math.Abs(share-1) <= captureTolerance) {
				t.Errorf("placing %d: the capture of %s sums to %.12f", k, ws[w].ID, share)
			}
		}
		for _, state := range [][]float64{at.Base, at.Heads} {
			sinks := f.Sinks(rates)
			if &state[0] == &at.Base[0] {
				sinks = nil
			}
			if b := f.Model.Balance(state, sinks); !(math.Abs(b.Error()) <= balanceTolerance) {
				t.Errorf("placing %d: balance error %.2e of the throughflow", k, b.Error())
			}
		}
		t.Logf("placing %d: %d nodes, worst difference %.1e, reciprocity %.1e, wrong signs %d", k, len(f.Model.Mesh.X), worst, lin.Reciprocity, f.Model.CountWrongSigns())
	}
}

// The tangent of the worst place is the slope of the largest drawdown where the place does not move.
func TestWorstPlaceTangent(t *testing.T) {
	ctx := context.Background()
	site, ws, rs := everything(motion{cos: 1}, 0)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 8000})
	rates := ratesOf(ws)
	at, err := f.Changes(ctx, rates)
	if err != nil {
		t.Fatal(err)
	}
	if err := f.Tangents(ctx, at.Rows); err != nil {
		t.Fatal(err)
	}
	const row, small = 3, 1e-3 // the worst place of the fen stays for a thousandth of a cubic metre a day
	for w := range ws {
		moved := append([]float64(nil), rates...)
		moved[w] += 1000
		s, err := f.Changes(ctx, moved)
		if err != nil {
			t.Fatal(err)
		}
		// The largest of linear functions is convex: no tangent lies above it.
		if bound := at.Rows[row].Change + 1000*at.Rows[row].Slope[w]; s.Rows[row].Change < bound-1e-9*math.Abs(bound) {
			t.Errorf("well %d: change %.9f lies below the tangent %.9f", w, s.Rows[row].Change, bound)
		}
		moved[w] = rates[w] + small
		if s, err = f.Changes(ctx, moved); err != nil {
			t.Fatal(err)
		}
		got := (s.Rows[row].Change - at.Rows[row].Change) / small
		// heads near 10 m carry rounding of about 1e-14 m, a thousandth of a rate turns that into 1e-11 d/m²
		if math.Abs(got-at.Rows[row].Slope[w]) > 1e-9 {
			t.Errorf("well %d: slope %.6e, difference %.6e", w, at.Rows[row].Slope[w], got)
		}
	}
}

func TestOneFactorisationAndSolvesCounted(t *testing.T) {
	ctx := context.Background()
	site, ws, rs := everything(motion{cos: 1}, 0)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 3000})
	lin, err := f.Sensitivities(ctx, nil, adjoint.Options{Capture: true})
	if err != nil {
		t.Fatal(err)
	}
	if f.Model.Factorisations != 1 {
		t.Errorf("%d factorisations, want 1", f.Model.Factorisations)
	}
	// 11 receptors, 2 well levels and 8 outlets; the bore of W3, the springs' and the edges' flows and the whole river are shared
	if want := 11 + 2 + 8 - 1 - 4; lin.Distinct != want {
		t.Errorf("%d distinct functionals, want %d", lin.Distinct, want)
	}
	if f.Model.Solves() != lin.Distinct+1 {
		t.Errorf("%d solves for %d distinct functionals, want one more", f.Model.Solves(), lin.Distinct)
	}
}

func TestRaisingEveryLevelChangesNoDrawdown(t *testing.T) {
	ctx := context.Background()
	var changes [2][]float64
	for k, raise := range []float64{0, 100} {
		site, ws, rs := everything(motion{cos: 1}, raise)
		f := build(t, site, ws, rs, aquifer.Options{Nodes: 3000})
		s, err := f.Changes(ctx, ratesOf(ws))
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range s.Rows {
			changes[k] = append(changes[k], r.Change)
		}
	}
	for i := range changes[0] {
		// heads of 100 m carry rounding of 1e-13 m a solve; flows multiply it by conductances up to 1e4 m²/d
		if d := math.Abs(changes[0][i] - changes[1][i]); d > 1e-9*math.Max(1, math.Abs(changes[0][i])) {
			t.Errorf("row %d: change %.12f, with every level raised %.12f", i, changes[0][i], changes[1][i])
		}
	}
}

// Scaling: with prescribed heads only, sensitivities go as 1/T and answer to neither recharge nor levels.
func TestSensitivitiesScaleWithTransmissivity(t *testing.T) {
	ctx := context.Background()
	b := benchmarks()[2]
	var slope [2][]float64
	for k, factor := range []float64{1, 8} {
		site := b.site(motion{cos: 1})
		site.Background.Transmissivity = constant(300 * factor)
		site.Background.Recharge = constant(1e-3 * float64(k))
		site.Edges[0].Levels = []float64{2 + 5*float64(k)}
		ws := b.wells(motion{cos: 1})
		f := build(t, site, ws, []wells.Receptor{{ID: "P", Kind: wells.PointLevel, At: orb.Point{200, 300}}}, aquifer.Options{Nodes: 2000})
		lin, err := f.Sensitivities(ctx, nil, adjoint.Options{})
		if err != nil {
			t.Fatal(err)
		}
		slope[k] = lin.Rows[0].Slope
	}
	if rel := slope[0][0] / (8 * slope[1][0]); math.Abs(rel-1) > 1e-12 { // a power of two scales every product exactly
		t.Errorf("slope ratio %.15f, want 1", rel)
	}
}
