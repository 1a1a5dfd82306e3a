package adjoint_test

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"sort"
	"strconv"
	"testing"

	"github.com/paulmach/orb"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/wells"
)

// What is promised of the estimates, over many of them.
const (
	medianLow, medianHigh = 0.8, 1.25 // of estimate over true error
	factorWithin          = 3.0       // 90 % of them lie within this factor
	shareWithin           = 0.9
	shareOfFew            = 0.8 // the same for slopes of three sites: differences that cancel to a ten-thousandth weigh more among few
)

// effectivity gathers estimates over true errors, and bounds over them.
type effectivity struct{ ratios, bounds []float64 }

// add takes one estimate; a true error that is less than rounding of the exact value is left out.
func (e *effectivity) add(estimate, bound, wrong, rounding float64) {
	if math.Abs(wrong) <= rounding {
		return
	}
	e.ratios = append(e.ratios, estimate/wrong)
	e.bounds = append(e.bounds, bound/math.Abs(wrong))
}

// check holds them against what is promised and logs them. Bounds are held where they were given.
func (e *effectivity) check(t *testing.T, name string, bounded bool, share float64) {
	t.Helper()
	within, n := 0, len(e.ratios)
	for _, r := range e.ratios {
		if r > 1/factorWithin && r < factorWithin {
			within++
		}
	}
	sort.Float64s(e.ratios)
	sort.Float64s(e.bounds)
	q := func(v []float64, share float64) float64 { return v[int(share*float64(n-1))] }
	median := q(e.ratios, 0.5)
	t.Logf("%s: %d estimates over true errors: 5 %% %.3f, 25 %% %.3f, median %.3f, 75 %% %.3f, 95 %% %.3f; %.1f %% within a factor of 3", name, n,
		q(e.ratios, 0.05), q(e.ratios, 0.25), median, q(e.ratios, 0.75), q(e.ratios, 0.95), 100*float64(within)/float64(n))
	if !(median >= medianLow && median <= medianHigh) {
		t.Errorf("%s: the median of estimate over true error is %.3f", name, median)
	}
	if !(float64(within) >= share*float64(n)) {
		t.Errorf("%s: %d of %d estimates within a factor of 3", name, within, n)
	}
	if !bounded {
		return
	}
	t.Logf("%s: bound over true error: least %.2f, median %.2f, 95 %% %.1f", name, e.bounds[0], q(e.bounds, 0.5), q(e.bounds, 0.95))
	if !(e.bounds[0] >= 1) {
		t.Errorf("%s: a bound is exceeded: %.3f of the true error", name, e.bounds[0])
	}
}

// polygonRadius is the radius of the circle that an inscribed polygon of n corners acts as: the mean of the logarithm of its distance from the
// centre is less than that of its corners by (pi/n)²/3, but for the fourth power.
func polygonRadius(radius float64, n int) float64 {
	return radius * (1 - math.Pi*math.Pi/(3*float64(n*n)))
}

// islandDrawdown is the image form of section 7 of the check values for a well at (a, 0) in a disc.
func islandDrawdown(x, y, a, radius, rate, t float64) float64 {
	// |R² - z a| / (R |z - a|) with real a
	return rate / (2 * math.Pi * t) * math.Log(math.Hypot(radius*radius-x*a, y*a)/(radius*math.Hypot(x-a, y)))
}

// leakyDrawdown is de Glee's form of section 2 of the check values for a well in the middle of a disc.
func leakyDrawdown(r, radius, rate, t, c float64) float64 {
	b := math.Sqrt(t * c)
	k0 := func(x float64) float64 { // integral of exp(-x cosh u), trapezoidal rule: converges geometrically
		sum, step := math.Exp(-x)/2, 0.01
		for u := step; x*math.Cosh(u) < 700+x; u += step {
			sum += math.Exp(-x * math.Cosh(u))
		}
		return sum * step
	}
	i0 := func(x float64) float64 { // power series
		sum, term := 1.0, 1.0
		for k := 1.0; term > 1e-17*sum; k++ {
			term *= x * x / (4 * k * k)
			sum += term
		}
		return sum
	}
	return rate / (2 * math.Pi * t) * (k0(r/b) - i0(r/b)*k0(radius/b)/i0(radius/b))
}

// exactAt is the closed form of benchmark k at a point.
func exactAt(k int, x, y float64) float64 {
	switch k {
	case 0:
		return leakyDrawdown(math.Hypot(x, y), polygonRadius(3000, 360), 1200, 600, 1500)
	case 1: // images of the rectangle: two canals turned, with mirrored wells of the other sign
		return 1000 * rectangleDrawdown(x, y, 800, 400, 2000, 1000, 500)
	case 2:
		return islandDrawdown(x, y, 400, polygonRadius(1000, 360), 600, 300)
	}
	return 1000 * twoCanals(x, y, 700, 600, 3000, 2000, 800)
}

// rectangleDrawdown sums the strip form between x = 0 and x = a over image wells of alternating sign beyond y = 0 and y = b.
func rectangleDrawdown(x, y, xi, eta, a, b, t float64) float64 {
	s := 0.0
	for m := -12; m <= 12; m++ {
		shift := 2 * b * float64(m)
		for _, image := range [2]struct{ eta, sign float64 }{{eta + shift, 1}, {-eta + shift, -1}} {
			c := math.Cosh(math.Pi * (y - image.eta) / a)
			s += image.sign * math.Log((c-math.Cos(math.Pi*(x+xi)/a))/(c-math.Cos(math.Pi*(x-xi)/a))) / (4 * math.Pi * t)
		}
	}
	return s
}

func TestClosedFormsAgainstPrinted(t *testing.T) {
	for k, b := range benchmarks() {
		for _, p := range b.points {
			got := exactAt(k, p.x, p.y)
			// eight digits are printed; a polygon of 360 corners lowers by 2.5e-5 Q/(2 pi T) in the middle, 8e-6 m, and by more near the rim
			tolerance := 1e-8
			if k == 0 || k == 2 {
				tolerance = 2e-5
			}
			if !(math.Abs(got-p.drawdown) <= tolerance) {
				t.Errorf("%s at (%v, %v): %.9f, printed %.8f", b.name, p.x, p.y, got, p.drawdown)
			}
		}
	}
}

// closedRounding is what the closed forms are good to, relative: that of the polygon's radius and the sums.
const closedRounding = 3e-7

func TestErrorsAgainstClosedForms(t *testing.T) {
	ctx := context.Background()
	var all effectivity
	for k, b := range benchmarks() {
		for _, m := range motions(2) {
			for _, nodes := range []int{1000, 4000} {
				f, s, _ := b.solve(t, m, aquifer.Options{Nodes: nodes})
				e, err := f.Errors(ctx, s, adjoint.ErrorOptions{})
				if err != nil {
					t.Fatal(err)
				}
				for i, p := range b.points {
					exact := exactAt(k, p.x, p.y)
					all.add(e.Rows[i].ChangeError, e.Rows[i].ChangeBound, s.Rows[i].Change-exact, closedRounding*exact)
				}
			}
		}
	}
	all.check(t, "closed forms", true, shareWithin)
}

// longRun tells whether the longer proofs were asked for.
func longRun() bool { return os.Getenv("SPRINGBOUND_LONG") == "1" }

func TestErrorsAgainstFinerMeshes(t *testing.T) {
	seeds, levels, nodes := uint64(3), 1, 1000
	if longRun() {
		seeds, levels, nodes = 20, 2, 2000
	}
	ctx := context.Background()
	var changes, slopes effectivity
	for seed := range seeds {
		site, ws, rs := randomSite(seed)
		site.Nodes, site.Outlines = adjoint.Requests(ws, rs)
		var es [2]*adjoint.Errors
		var ss [2]*adjoint.State
		var ls [2]*adjoint.Linear
		for times := range es {
			m, err := aquifer.BuildBisected(ctx, site, aquifer.Options{Nodes: nodes, Growth: 0.2}, levels*times)
			if err != nil {
				t.Fatal(err)
			}
			f, err := adjoint.NewField(m, ws, rs)
			if err != nil {
				t.Fatal(err)
			}
			if ss[times], err = f.Changes(ctx, ratesOf(ws)); err != nil {
				t.Fatal(err)
			}
			if ls[times], err = f.Sensitivities(ctx, ss[times], adjoint.Options{}); err != nil {
				t.Fatal(err)
			}
			if es[times], err = f.Errors(ctx, ss[times], adjoint.ErrorOptions{SlopeBounds: true}); err != nil {
				t.Fatal(err)
			}
		}
		// the finer mesh has four (long: sixteen) times the triangles; that its small error is taken off by the same method matters little
		for i, r := range es[0].Rows {
			exact := ss[1].Rows[i].Change - es[1].Rows[i].ChangeError
			changes.add(r.ChangeError, r.ChangeBound, ss[0].Rows[i].Change-exact, 1e-8*r.Size)
			for w := range ws {
				exact := ls[1].Rows[i].Slope[w] - es[1].Rows[i].SlopeError[w]
				slopes.add(r.SlopeError[w], r.SlopeBound[w], ls[0].Rows[i].Slope[w]-exact, 1e-8*math.Abs(exact))
			}
		}
	}
	changes.check(t, "changes", true, shareWithin)
	share := shareWithin
	if !longRun() {
		share = shareOfFew
	}
	slopes.check(t, "slopes", true, share)
}

// Two sites with independent answers: sensitivities of the points to the wells.
func TestErrorsOfReferenceSites(t *testing.T) {
	ctx := context.Background()
	dir := sharedData(t)
	var all, chs effectivity
	for _, name := range []string{"S1", "S2"} {
		site, ws, rs, exact := referenceSite(t, filepath.Join(dir, "reference-sites", name))
		f := build(t, site, ws, rs, aquifer.Options{Nodes: 2000, Growth: 0.2})
		s, err := f.Changes(ctx, ratesOf(ws))
		if err != nil {
			t.Fatal(err)
		}
		lin, err := f.Sensitivities(ctx, s, adjoint.Options{})
		if err != nil {
			t.Fatal(err)
		}
		e, err := f.Errors(ctx, s, adjoint.ErrorOptions{SlopeBounds: true})
		if err != nil {
			t.Fatal(err)
		}
		for i := range e.Rows {
			change := 0.0
			for w := range ws {
				change += exact[i][w] * s.Rates[w]
				all.add(e.Rows[i].SlopeError[w], e.Rows[i].SlopeBound[w], lin.Rows[i].Slope[w]-exact[i][w], 2e-5*exact[i][w]) // what the answers are good to, with a margin
			}
			chs.add(e.Rows[i].ChangeError, e.Rows[i].ChangeBound, s.Rows[i].Change-change, 2e-5*change)
			if wrong := math.Abs(s.Rows[i].Change - change); !(wrong <= e.Rows[i].ChangeBound) {
				t.Errorf("%s, %s: the change is off by %.3e m, the bound is %.3e m", name, rs[i].ID, wrong, e.Rows[i].ChangeBound)
			}
		}
	}
	chs.check(t, "reference sites, changes", true, shareWithin)
	all.check(t, "reference sites", true, shareWithin)
}

// The same where a spring has stopped on the way from no pumping to the rates.
func TestErrorsWhereASpringHasStopped(t *testing.T) {
	ctx := context.Background()
	b, m := benchmarks()[3], motions(2)[1]
	site, ws := b.site(m), b.wells(m)
	site.Background.Recharge = constant(1e-3) // 1.1 m above the canals at the spring; W1 takes half of it
	site.Springs = []aquifer.Spring{{Name: "holm", At: m.at(800, 600), OutletLevel: 1, Conductance: constant(100), EffectiveRadius: 0.2}}
	rs := []wells.Receptor{{ID: "holm", Kind: wells.SpringFlow, Feature: "holm"}, {ID: "west", Kind: wells.EdgeFlow, Feature: "west"}}
	for i, p := range [][2]float64{{1200, 1000}, {1900, 1300}, {500, 900}, {2500, 400}, {900, 800}} {
		rs = append(rs, wells.Receptor{ID: fmt.Sprintf("P%d", i+1), Kind: wells.PointLevel, At: m.at(p[0], p[1])})
	}
	site.Nodes, site.Outlines = adjoint.Requests(ws, rs)
	rates := ratesOf(ws)
	var ss [3]*adjoint.State
	var e *adjoint.Errors
	for times := range ss {
		m, err := aquifer.BuildBisected(ctx, site, aquifer.Options{Nodes: 1000, Growth: 0.3}, times)
		if err != nil {
			t.Fatal(err)
		}
		f, err := adjoint.NewField(m, ws, rs)
		if err != nil {
			t.Fatal(err)
		}
		f.Switching = true
		if ss[times], err = f.Changes(ctx, rates); err != nil {
			t.Fatal(err)
		}
		if times == 0 {
			if e, err = f.Errors(ctx, ss[0], adjoint.ErrorOptions{SlopeBounds: true}); err != nil {
				t.Fatal(err)
			}
		}
	}
	if len(ss[0].BaseState.Off) != 0 || len(ss[0].State.Off) == 0 {
		t.Fatalf("off without pumping %v, at the rates %v: the test wants one to stop", ss[0].BaseState.Off, ss[0].State.Off)
	}
	var all effectivity
	for i, r := range e.Rows[1:] { // the stopped spring's own row goes on below nothing by a formula whose C_eff is the mesh's
		i++
		exact := ss[2].Rows[i].Change + (ss[2].Rows[i].Change-ss[1].Rows[i].Change)/3
		all.add(r.ChangeError, r.ChangeBound, ss[0].Rows[i].Change-exact, 1e-8*r.Size)
	}
	all.check(t, "a stopped spring", true, shareWithin)
}

// sharedData finds the data folder beside the project; the test is skipped where it is absent.
func sharedData(t testing.TB) string {
	t.Helper()
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for ; dir != filepath.Dir(dir); dir = filepath.Dir(dir) {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			data := filepath.Join(dir, "..", "shared", "data")
			if _, err := os.Stat(data); err != nil {
				t.Skipf("the shared data folder %s is absent", data)
			}
			return data
		}
	}
	t.Fatal("no go.mod above the test")
	return ""
}

// referenceSite reads a site's plain inputs in its local plane and the sensitivities that are known: per control and well.
func referenceSite(t testing.TB, dir string) (*aquifer.Site, []wells.Well, []wells.Receptor, [][]float64) {
	t.Helper()
	must := func(err error) {
		if err != nil {
			t.Fatal(err)
		}
	}
	type collection struct {
		Features []struct {
			Properties map[string]any
			Geometry   struct{ Coordinates json.RawMessage }
		}
	}
	read := func(name string) (c collection) {
		data, err := os.ReadFile(filepath.Join(dir, name))
		must(err)
		must(json.Unmarshal(data, &c))
		return c
	}
	table := func(name string) [][]string {
		f, err := os.Open(filepath.Join(dir, name))
		must(err)
		defer f.Close()
		rows, err := csv.NewReader(f).ReadAll()
		must(err)
		return rows[1:]
	}
	number := func(s string) float64 {
		v, err := strconv.ParseFloat(s, 64)
		must(err)
		return v
	}
	site := &aquifer.Site{}
	must(json.Unmarshal(read("boundary_metric.geojson").Features[0].Geometry.Coordinates, &site.Extent))
	for _, z := range read("zones_metric.geojson").Features {
		var area orb.Polygon
		must(json.Unmarshal(z.Geometry.Coordinates, &area))
		site.Zones = append(site.Zones, aquifer.Zone{Name: z.Properties["id"].(string), Area: orb.MultiPolygon{area}, Transmissivity: constant(z.Properties["transmissivity_major_m2_per_d"].(float64))})
	}
	site.Background.Transmissivity = constant(1)
	for _, x := range read("features_metric.geojson").Features {
		id := x.Properties["id"].(string)
		switch x.Properties["kind"] {
		case "prescribed_head":
			e := aquifer.Edge{Name: id, Kind: aquifer.PrescribedHead, Levels: []float64{x.Properties["head_m"].(float64)}}
			must(json.Unmarshal(x.Geometry.Coordinates, &e.Path))
			site.Edges = append(site.Edges, e)
		case "head_dependent":
			e := aquifer.Edge{Name: id, Kind: aquifer.HeadDependent, Levels: []float64{x.Properties["outside_head_m"].(float64)}, Conductance: *constant(x.Properties["conductance_per_length_m_per_d"].(float64))}
			must(json.Unmarshal(x.Geometry.Coordinates, &e.Path))
			site.Edges = append(site.Edges, e)
		}
	}
	var ws []wells.Well
	for _, r := range table("wells.csv") {
		ws = append(ws, pumped(r[0], orb.Point{number(r[1]), number(r[2])}, number(r[5]), number(r[6])))
	}
	var rs []wells.Receptor
	for _, r := range table("controls.csv") {
		rs = append(rs, wells.Receptor{ID: r[0], Kind: wells.PointLevel, At: orb.Point{number(r[2]), number(r[3])}})
	}
	var exact [][]float64
	for _, r := range table(filepath.Join("expected", "sensitivities.csv")) {
		var row []float64
		for _, v := range r[1:] {
			row = append(row, number(v))
		}
		exact = append(exact, row)
	}
	return site, ws, rs, exact
}

// Without exchange the terms over the triangles make up the whole difference between the meshes.
func TestTermsSumToTheDifference(t *testing.T) {
	ctx := context.Background()
	f, s, _ := benchmarks()[1].solve(t, motions(2)[1], aquifer.Options{Nodes: 1500})
	finer, err := f.Model.Finer(ctx, nil, 0)
	if err != nil {
		t.Fatal(err)
	}
	node := f.Model.RequestNode[1]
	sys := finer.System(s.State, nil)
	take := func(n int32, rate float64) (coarse, fine []float64) {
		b, x := make([]float64, f.Model.Unknowns()), [][]float64{make([]float64, finer.Unknowns())}
		b[f.Model.Unknown(n)] = rate
		rhs := [][]float64{make([]float64, finer.Unknowns())}
		rhs[0][finer.Unknown(n)] = rate
		if err := s.State.SolveFree(ctx, b, 1); err != nil {
			t.Fatal(err)
		}
		coarse = f.Model.Spread(b)
		for k, v := range finer.Prolong(coarse) {
			if u := finer.Unknown(int32(k)); u >= 0 {
				x[0][u] = v
			}
		}
		for range 3 { // to rounding, near enough
			if _, _, err := sys.Improve(ctx, x, rhs, aquifer.SolvedFinely, 0); err != nil {
				t.Fatal(err)
			}
		}
		return coarse, finer.Spread(x[0])
	}
	sc, sf := take(f.Node(0), 1000)
	zc, zf := take(node, 1)
	sum, size := 0.0, 0.0
	for _, v := range finer.Terms(sys, sc, zc, finer.Difference(sc, sf), finer.Difference(zc, zf)).Triangle {
		sum += v
		size += math.Abs(v)
	}
	// three rounds of cycles leave 1e-9 of the first residual
	if d := sf[node] - sc[node]; !(math.Abs(sum-d) <= 1e-6*size) {
		t.Errorf("the terms sum to %.9e m, the meshes differ by %.9e m", sum, d)
	}
}

func TestErrorsDoNotDependOnWorkers(t *testing.T) {
	ctx := context.Background()
	site, ws, rs := everything(motions(2)[1], 0)
	f := build(t, site, ws, rs, aquifer.Options{Nodes: 2000})
	s, err := f.Changes(ctx, ratesOf(ws))
	if err != nil {
		t.Fatal(err)
	}
	var all [2]*adjoint.Errors
	for k := range all {
		if all[k], err = f.Errors(ctx, s, adjoint.ErrorOptions{Workers: k + 1}); err != nil {
			t.Fatal(err)
		}
	}
	if !reflect.DeepEqual(all[0], all[1]) {
		t.Error("one and two workers give different bytes")
	}
	for i, e := range all[0].Rows {
		for _, v := range append([]float64{e.BaseError, e.ChangeError, e.ChangeBound, e.Size}, e.SlopeError...) {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Errorf("row %d: %+v", i, e)
			}
		}
	}
}

func TestErrorsCanBeInterrupted(t *testing.T) {
	f, s, _ := benchmarks()[1].solve(t, motions(1)[0], aquifer.Options{Nodes: 500})
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := f.Errors(ctx, s, adjoint.ErrorOptions{}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
	if _, err := f.Errors(context.Background(), s, adjoint.ErrorOptions{Accuracy: math.NaN()}); err == nil {
		t.Error("an accuracy that is not a number passes")
	}
}
