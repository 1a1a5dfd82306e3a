package main

import (
	"math"
	"strings"
	"testing"

	"springbound/plan"
)

// accuracyCheck is the line on the mesh's errors.
func accuracyCheck(t *testing.T, r *plan.Report) plan.Check {
	t.Helper()
	for _, c := range r.Checks {
		if strings.HasPrefix(c.Name, "Error of the mesh") {
			return c
		}
	}
	t.Fatal("no check of the mesh's errors")
	return plan.Check{}
}

// A mesh that the project fixes is left as it is: its errors stand beside the figures, and they are those against a mesh of a quarter of the size.
func TestErrorsOfAFixedMeshAreStated(t *testing.T) {
	coarse := planned(t, valley(turn{cos: 1, dx: 400000, dy: 4000000}, 0, coarseMesh).write(t), 0)
	if line := accuracyCheck(t, coarse); line.Result != "fail" || !strings.Contains(line.Detail, "the project fixes the mesh") {
		t.Errorf("a coarse mesh: %+v", line)
	}
	if !coarse.ModelValid || coarse.Mesh.AccuracyMet || len(coarse.Mesh.Rounds) != 1 {
		t.Errorf("valid %v, accuracy met %v, %d rounds", coarse.ModelValid, coarse.Mesh.AccuracyMet, len(coarse.Mesh.Rounds))
	}
	fine := planned(t, valley(turn{cos: 1, dx: 400000, dy: 4000000}, 0, "nodes = 30000\n").write(t), 0)
	for i, r := range coarse.Receptors {
		change := 0.0 // of the coarse plan, with the sensitivities of the fine mesh
		for w, s := range fine.Sensitivities.Values[i] {
			change += s * coarse.Wells[w].Rate
		}
		d := r.Discretisation
		if d == nil || d.Bound == nil {
			t.Fatalf("%s: no errors", r.ID)
		}
		made := r.Change - change
		// A factor of three either way, as estimates on meshes far from the limit of small triangles are trusted; the fine mesh's own
		// error is a hundredth of it.
		if ratio := d.Error / made; !(ratio > 1.0/3 && ratio < 3) {
			t.Errorf("%s: estimated %.3g, made %.3g", r.ID, d.Error, made)
		}
		if !(*d.Bound >= math.Abs(made)) {
			t.Errorf("%s: bound %.3g, made %.3g", r.ID, *d.Bound, made)
		}
	}
	for i, row := range coarse.SensitivityErrorBounds.Values {
		for w, bound := range row {
			if e := coarse.SensitivityErrors.Values[i][w]; !(bound >= math.Abs(e)) {
				t.Errorf("%s, %s: bound %.3g of an error of %.3g", coarse.Receptors[i].ID, coarse.Wells[w].ID, bound, e)
			}
		}
	}
	if got := len(coarse.SensitivityErrorBounds.Values); got != len(coarse.Receptors) {
		t.Errorf("bounds of the sensitivities of %d receptors, of %d", got, len(coarse.Receptors))
	}
	if got := len(coarse.SensitivityErrors.Values); got != len(coarse.Receptors) {
		t.Errorf("errors of the sensitivities of %d receptors, of %d", got, len(coarse.Receptors))
	}
}

// Where an accuracy is asked for the mesh is refined until it is met, and the plan made again on it.
func TestMeshIsRefinedForTheAccuracyAsked(t *testing.T) {
	r := planned(t, valley(turn{cos: 1, dx: 400000, dy: 4000000}, 0, "nodes = 100\nfinest = \"400 m\"\ngrowth = 0.9\naccuracy = \"0.5 %\"\n").write(t), 0)
	rounds := r.Mesh.Rounds
	if len(rounds) < 2 || !r.Mesh.AccuracyMet || accuracyCheck(t, r).Result != "pass" {
		t.Fatalf("rounds %+v, met %v, %+v", rounds, r.Mesh.AccuracyMet, accuracyCheck(t, r))
	}
	if first, last := rounds[0], rounds[len(rounds)-1]; !(first.Worst > 0.005) || !(last.Worst <= 0.005) || last.Nodes != r.Mesh.Nodes {
		t.Errorf("from %+v to %+v, in the end %d nodes", first, last, r.Mesh.Nodes)
	}
	fine := planned(t, valley(turn{cos: 1, dx: 400000, dy: 4000000}, 0, "nodes = 30000\n").write(t), 0)
	for i := range r.Wells {
		// Limits hold to half a per cent on both meshes, and a rate that a limit holds moves by as much; another half for the trade between
		// the two wells.
		if a, b := r.Wells[i].Rate, fine.Wells[i].Rate; math.Abs(a-b) > 0.01*math.Max(a, b) {
			t.Errorf("%s: %.1f m³/d, on a fine mesh %.1f", r.Wells[i].ID, a, b)
		}
	}
}
