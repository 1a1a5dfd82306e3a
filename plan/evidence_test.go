package plan

import (
	"context"
	"encoding/json"
	"math"
	"reflect"
	"strings"
	"testing"

	"springbound/plan/convex"
)

// evidenceUnits are the keys of the record whose unit stands beside them, and those of pure numbers.
var evidenceUnits = map[string]string{
	"figure": "in unit", "allowed": "in unit", "scale": "in unit", "richardson": "in unit", "change_without": "in unit",
	"adjoint_in_unit_per_m3_per_d": "in unit per m³/d", "difference_in_unit_per_m3_per_d": "in unit per m³/d",
	"observed_order": "power of the edge length", "grid_convergence_index_percent": "per cent", "factor": "ratio",
}

func TestEveryNumberOfTheEvidenceHasAUnit(t *testing.T) {
	eachField(reflect.TypeFor[Evidence](), map[reflect.Type]bool{}, func(owner string, f reflect.StructField) {
		key := keyOf(f)
		if key == "" || key != strings.ToLower(key) {
			t.Errorf("%s.%s: key %q", owner, f.Name, key)
		}
		if !holdsNumber(f.Type) {
			return
		}
		_, known := UnitOf(key)
		if _, here := evidenceUnits[key]; !known && !here {
			t.Errorf("%s.%s: key %q says no unit", owner, f.Name, key)
		}
	})
}

func TestEvidenceIsCountedAndWritten(t *testing.T) {
	e := &Evidence{Title: "Site"}
	x := 0.5
	e.Add(EvidenceLine{Check: "one", Result: Pass, Figure: &x})
	e.Add(EvidenceLine{Check: "two", Result: Fail})
	e.Add(EvidenceLine{Check: "three", Result: NotDone})
	e.Add(EvidenceLine{Check: "four", Result: Verdict(math.NaN(), 1)})
	e.Conclude()
	if e.Passed != 1 || e.Failed != 2 || e.NotDone != 1 || !strings.Contains(e.Headline, "two; four") || e.Lines[3].Number != 4 {
		t.Errorf("%+v", e)
	}
	data, err := MarshalEvidence(e)
	if err != nil {
		t.Fatal(err)
	}
	var back Evidence
	if err := json.Unmarshal(data, &back); err != nil || back.Schema != EvidenceName || len(back.Lines) != 4 {
		t.Errorf("%v %+v", err, back)
	}
	if strings.Contains(string(data), "\"balances\": null") {
		t.Error("a list is written as null")
	}
	x = math.Inf(1)
	if _, err := MarshalEvidence(e); err == nil || !strings.Contains(err.Error(), "lines[0].figure") {
		t.Errorf("a number that is not finite: %v", err)
	}
}

// The second method agrees on a programme of known optimum, and says where it stands back.
func TestSecondOpinionOnAProgramme(t *testing.T) {
	problem, err := convex.NewProblem(convex.Minimise, []convex.Column{{Name: "x", Cost: -1, Upper: 4}, {Name: "y", Cost: -2, Upper: 3}})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := problem.AddRow(convex.Row{Name: "sum", Coefficients: []float64{1, 1}, Lower: math.Inf(-1), Upper: 5}); err != nil {
		t.Fatal(err)
	}
	f := &ProblemFile{Model: &convex.Model{Problem: problem}}
	o, err := f.SecondOpinion(context.Background())
	if err != nil || o.Result != Pass || !(o.Difference <= o.Allowed) {
		t.Errorf("%v %+v", err, o)
	}
	f.Model.Integer = []int{0}
	if o, err = f.SecondOpinion(context.Background()); err != nil || o.Result != Pass || !strings.Contains(o.Sentence, "choice of running wells") || o.Aim != -8 {
		t.Errorf("%v %+v", err, o)
	}
	curved := problem.Clone()
	if err := curved.SetHessian(convex.Hessian{Entries: []convex.HessianEntry{{Row: 0, Column: 0, Value: 1}}}); err != nil {
		t.Fatal(err)
	}
	f.Model.Problem = curved
	if o, err = f.SecondOpinion(context.Background()); err != nil || o.Result != NotDone {
		t.Errorf("%v %+v", err, o)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	f.Model.Integer = nil
	if _, err = f.SecondOpinion(ctx); err == nil {
		t.Error("an interrupted opinion is no error")
	}
}
