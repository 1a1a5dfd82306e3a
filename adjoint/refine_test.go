package adjoint_test

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/wells"
)

// problem is a site whose changes are known.
type problem struct {
	name  string
	site  *aquifer.Site
	wells []wells.Well
	rows  []wells.Receptor
	exact []float64 // change of each row
}

// benchmarkProblem is benchmark k of the check values.
func benchmarkProblem(k int) problem {
	b, m := benchmarks()[k], motions(2)[1]
	p := problem{name: b.name[:3], site: b.site(m), wells: b.wells(m)}
	for i, at := range b.points {
		p.rows = append(p.rows, wells.Receptor{ID: fmt.Sprintf("P%d", i+1), Kind: wells.PointLevel, At: m.at(at.x, at.y)})
		p.exact = append(p.exact, exactAt(k, at.x, at.y))
	}
	return p
}

// referenceProblem is a site with independent answers.
func referenceProblem(t testing.TB, name string) problem {
	site, ws, rs, slopes := referenceSite(t, filepath.Join(sharedData(t), "reference-sites", name))
	p := problem{name: name, site: site, wells: ws, rows: rs}
	for _, row := range slopes {
		sum := 0.0
		for w, q := range ratesOf(ws) {
			sum += row[w] * q
		}
		p.exact = append(p.exact, sum)
	}
	return p
}

// worst is the largest relative error of the changes on a mesh.
func (p problem) worst(s *adjoint.State) float64 {
	v := 0.0
	for i, e := range p.exact {
		v = math.Max(v, math.Abs(s.Rows[i].Change/e-1))
	}
	return v
}

func (p problem) refine(t testing.TB, o adjoint.RefineOptions) *adjoint.Refined {
	t.Helper()
	r, err := adjoint.Refine(context.Background(), p.site, p.wells, p.rows, ratesOf(p.wells), o)
	if err != nil {
		t.Fatalf("%s: %v", p.name, err)
	}
	return r
}

// The accuracy wanted is met, as measured by closed forms and independent answers.
func TestRefinementMeetsTheAccuracy(t *testing.T) {
	for _, p := range []problem{benchmarkProblem(0), benchmarkProblem(1), benchmarkProblem(2), benchmarkProblem(3), referenceProblem(t, "S1"), referenceProblem(t, "S2")} {
		for _, accuracy := range []float64{adjoint.DefaultAccuracy, 0.001} {
			if !longRun() && accuracy < adjoint.DefaultAccuracy && (p.name == "BM1" || p.name == "S2") {
				continue
			}
			r := p.refine(t, adjoint.RefineOptions{Accuracy: accuracy})
			got := p.worst(r.State)
			t.Logf("%s: %.1f %% wanted, %.4f %% reached with %d nodes in %d meshes", p.name, 100*accuracy, 100*got, len(r.Field.Model.Mesh.X), len(r.Rounds))
			if !r.Met || !(got <= accuracy) {
				t.Errorf("%s: %.1f %% wanted, met %v, the worst change is off by %.4f %%", p.name, 100*accuracy, r.Met, 100*got)
			}
		}
	}
}

func TestRefinementKeepsToItsBudget(t *testing.T) {
	p := benchmarkProblem(3)
	r := p.refine(t, adjoint.RefineOptions{Accuracy: 1e-5, MaxNodes: 4000})
	if r.Met || !r.Budget {
		t.Errorf("met %v, budget %v", r.Met, r.Budget)
	}
	for _, x := range r.Rounds {
		if x.Nodes > 5000 { // the nodes expected are good to a quarter
			t.Errorf("%d nodes for a budget of 4000", x.Nodes)
		}
	}
	if _, err := adjoint.Refine(context.Background(), p.site, p.wells, p.rows, ratesOf(p.wells), adjoint.RefineOptions{Accuracy: math.NaN()}); err == nil {
		t.Error("an accuracy that is not a number passes")
	}
	ctx, cancel := context.WithCancel(context.Background())
	_, err := adjoint.Refine(ctx, p.site, p.wells, p.rows, ratesOf(p.wells), adjoint.RefineOptions{Accuracy: 1e-4, Progress: func(int, int, float64) { cancel() }})
	if !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
}

func TestRefinementDoesNotDependOnWorkers(t *testing.T) {
	p := benchmarkProblem(1)
	var all [2]*adjoint.Refined
	for k := range all {
		all[k] = p.refine(t, adjoint.RefineOptions{Accuracy: 0.002, Start: aquifer.Options{Workers: k + 1}})
	}
	if !reflect.DeepEqual(all[0].Rounds, all[1].Rounds) || !reflect.DeepEqual(all[0].Errors, all[1].Errors) || !reflect.DeepEqual(all[0].Field.Model.Mesh.X, all[1].Field.Model.Mesh.X) {
		t.Error("one and two workers give different bytes")
	}
}

// curve is the error over the nodes for one way to refine.
type curve struct {
	way           string
	nodes, errors []float64
}

// needs is how many nodes the curve takes to an error, straight between its points in logarithms and beyond its ends.
func (c curve) needs(wanted float64) float64 {
	k := 0
	for k < len(c.nodes)-2 && !(c.errors[k+1] <= wanted) {
		k++
	}
	slope := math.Log(c.nodes[k+1]/c.nodes[k]) / math.Log(c.errors[k+1]/c.errors[k])
	return c.nodes[k] * math.Pow(wanted/c.errors[k], slope)
}

func (p problem) family(t testing.TB, way string, build func(level int, site *aquifer.Site) (*aquifer.Model, error), levels int) curve {
	t.Helper()
	c := curve{way: way}
	site := *p.site
	site.Nodes, site.Outlines = adjoint.Requests(p.wells, p.rows)
	for level := range levels {
		m, err := build(level, &site)
		if err != nil {
			t.Fatal(err)
		}
		f, err := adjoint.NewField(m, p.wells, p.rows)
		if err != nil {
			t.Fatal(err)
		}
		s, err := f.Changes(context.Background(), ratesOf(p.wells))
		if err != nil {
			t.Fatal(err)
		}
		c.nodes, c.errors = append(c.nodes, float64(len(m.Mesh.X))), append(c.errors, p.worst(s))
	}
	return c
}

// curves measures refinement for the receptors, of all triangles of the same first mesh, of a mesh of even edge lengths, and of the default
// mesh by its number of nodes.
func (p problem) curves(t testing.TB) []curve {
	ctx := context.Background()
	goal := curve{way: "for the receptors"}
	for _, accuracy := range []float64{0.01, 0.005, 0.002, 0.001, 0.0005} {
		r := p.refine(t, adjoint.RefineOptions{Accuracy: accuracy})
		goal.nodes, goal.errors = append(goal.nodes, float64(len(r.Field.Model.Mesh.X))), append(goal.errors, p.worst(r.State))
	}
	return []curve{goal,
		p.family(t, "same mesh, all bisected", func(level int, site *aquifer.Site) (*aquifer.Model, error) {
			return aquifer.BuildBisected(ctx, site, aquifer.Options{Nodes: 1000, Growth: 0.4}, level)
		}, 4),
		p.family(t, "even edge lengths", func(level int, site *aquifer.Site) (*aquifer.Model, error) {
			n := 1000 << (2 * level)
			size := math.Sqrt(2 * math.Abs(area(site)) / (math.Sqrt(3) * float64(n)))
			return aquifer.Build(ctx, site, aquifer.Options{Growth: 1, Finest: size, Coarsest: size})
		}, 4),
		p.family(t, "default mesh", func(level int, site *aquifer.Site) (*aquifer.Model, error) {
			return aquifer.Build(ctx, site, aquifer.Options{Nodes: 15000 << (2 * level)})
		}, 2),
	}
}

func area(s *aquifer.Site) float64 {
	sum := 0.0
	for _, ring := range s.Extent {
		for i := range ring {
			a, b := ring[i], ring[(i+1)%len(ring)]
			sum += ((a[0]-ring[0][0])*(b[1]-ring[0][1]) - (b[0]-ring[0][0])*(a[1]-ring[0][1])) / 2
		}
	}
	return sum
}

// Nodes taken for an error by refinement for the receptors over those of refining everywhere. With SPRINGBOUND_WRITE=1 the measured curves are
// written to testdata/refinement.csv and drawn in testdata/refinement.svg.
func TestRefinementAgainstRefiningEverywhere(t *testing.T) {
	if !longRun() {
		t.Skip("minutes: set SPRINGBOUND_LONG=1")
	}
	table := []string{"site,way,nodes,worst_error_percent"}
	var drawn []curve
	for _, p := range []problem{benchmarkProblem(0), benchmarkProblem(1), benchmarkProblem(2), benchmarkProblem(3), referenceProblem(t, "S1"), referenceProblem(t, "S2")} {
		all := p.curves(t)
		for _, c := range all {
			for i := range c.nodes {
				table = append(table, fmt.Sprintf("%s,\"%s\",%.0f,%.5f", p.name, c.way, c.nodes[i], 100*c.errors[i]))
			}
		}
		for i, n := range all[0].nodes {
			line := fmt.Sprintf("%s: %.4f %% with %.0f nodes", p.name, 100*all[0].errors[i], n)
			for _, c := range all[1:] {
				line += fmt.Sprintf("; %s %.0f (%.2f)", c.way, c.needs(all[0].errors[i]), n/c.needs(all[0].errors[i]))
			}
			t.Log(line)
		}
		if p.name == "S2" {
			drawn = all
			last := len(all[0].nodes) - 1
			if share := all[0].nodes[last] / all[2].needs(all[0].errors[last]); !(share <= 1.0/3) {
				t.Errorf("S2 takes %.2f of the nodes of a mesh of even edge lengths", share)
			}
		}
	}
	if os.Getenv("SPRINGBOUND_WRITE") != "1" {
		return
	}
	if err := os.MkdirAll("testdata", 0o755); err != nil {
		t.Fatal(err)
	}
	for name, text := range map[string]string{"refinement.csv": strings.Join(table, "\n") + "\n", "refinement.svg": draw(drawn)} {
		if err := os.WriteFile(filepath.Join("testdata", name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// draw is a plot of curves with logarithmic axes.
func draw(curves []curve) string {
	const width, height, left, top = 640, 420, 70, 20
	x := func(nodes float64) float64 { return left + (width-left-190)*(math.Log10(nodes)-3)/2.5 }
	y := func(e float64) float64 { return top + (height-top-60)*(1-math.Log10(100*e))/4 } // 10 % to 0.001 %
	var b strings.Builder
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 %d %d" font-family="sans-serif" font-size="12">`+"\n", width, height)
	fmt.Fprintf(&b, `<rect width="%d" height="%d" fill="white"/>`+"\n", width, height)
	for i := range 5 {
		e := math.Pow(10, float64(-1-i))
		fmt.Fprintf(&b, `<path d="M%d %.1fH%d" stroke="#ccc"/><text x="%d" y="%.1f" text-anchor="end">%g %%</text>`+"\n", left, y(e), width-190, left-6, y(e)+4, 100*e)
	}
	for _, n := range []float64{1e3, 1e4, 1e5} {
		fmt.Fprintf(&b, `<path d="M%.1f %dV%d" stroke="#ccc"/><text x="%.1f" y="%d" text-anchor="middle">%.0f</text>`+"\n", x(n), top, height-60, x(n), height-44, n)
	}
	fmt.Fprintf(&b, `<text x="%d" y="%d" text-anchor="middle">nodes</text><text x="%d" y="%d">largest error of a receptor's change, site S2</text>`+"\n", (width-120)/2, height-22, left, top-6)
	for i, c := range curves {
		colour := []string{"#0b6e4f", "#b3541e", "#6b4c9a", "#555"}[i]
		dash := []string{"none", "8 4", "2 3", "10 3 2 3"}[i] // told apart in grey print too
		fmt.Fprintf(&b, `<polyline fill="none" stroke="%s" stroke-dasharray="%s" stroke-width="2" points="`, colour, dash)
		for k := range c.nodes {
			fmt.Fprintf(&b, "%.1f,%.1f ", x(c.nodes[k]), y(c.errors[k]))
		}
		fmt.Fprintf(&b, `"/><path d="M%d %dh28" stroke="%s" stroke-dasharray="%s" stroke-width="2"/><text x="%d" y="%d" fill="%s">%s</text>`+"\n",
			width-184, top+16+20*i, colour, dash, width-150, top+20+20*i, colour, c.way)
	}
	return b.String() + "</svg>\n"
}
