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

// Every number of audit.json has a unit in the schema, and no other unit is listed.
func TestEveryNumberOfTheEvidenceHasAUnit(t *testing.T) {
	used := map[string]bool{}
	eachField(reflect.TypeFor[Evidence](), map[reflect.Type]bool{}, func(owner string, f reflect.StructField) {
		key := keyOf(f)
		if key == "" || key != strings.ToLower(key) {
			t.Errorf("%s.%s: key %q", owner, f.Name, key)
		}
		used[key], used[owner+"."+key] = true, true
		if _, known := evidenceDocument.UnitOf(key); holdsNumber(f.Type) && !known {
			t.Errorf("%s.%s: key %q says no unit", owner, f.Name, key)
		}
	})
	for key := range evidenceDocument.Units {
		if !used[key] {
			t.Errorf("no number has the key %q", key)
		}
	}
	for key := range evidenceDocument.Words {
		if !used[key] {
			t.Errorf("no field %q", key)
		}
	}
}

// The schema holds for a record, and not for spoilt ones.
func TestSchemaHoldsForEvidence(t *testing.T) {
	var schema map[string]any
	if err := json.Unmarshal(EvidenceSchema(), &schema); err != nil {
		t.Fatal(err)
	}
	x := 0.5
	e := &Evidence{PlanStatus: StatusOptimal, Convergence: []ConvergenceLine{{Unit: "m", Values: []float64{1, 2, 3}, Order: &x}}, Differences: []DifferenceLine{{Unit: "m3/d"}},
		Boundaries: []BoundaryLine{{Share: &x, Receptors: []BoundaryChange{{Unit: "1"}}}}, HandFormula: &HandFormula{}, Inward: []InwardStretch{{}}, Meshes: []EvidenceMesh{{}},
		Balances: []EvidenceBalance{{Lines: []EvidenceBalanceLine{{}}}}, Capture: []Capture{{}}, Settings: []EvidenceSetting{{}}, Inputs: []InputFile{{}}}
	e.Add(EvidenceLine{Result: Pass, Figure: &x})
	e.Conclude()
	data, err := MarshalEvidence(e)
	if err != nil {
		t.Fatal(err)
	}
	read := func() (v map[string]any) {
		if err := json.Unmarshal(data, &v); err != nil {
			t.Fatal(err)
		}
		return v
	}
	if faults := validate(schema, schema, read(), ""); len(faults) > 0 {
		t.Errorf("%q", faults)
	}
	for name, spoil := range map[string]func(v map[string]any){
		"key more":     func(v map[string]any) { v["more"] = 1 },
		"key less":     func(v map[string]any) { delete(v, "boundaries") },
		"wrong type":   func(v map[string]any) { v["total_rate_m3_per_d"] = "12" },
		"wrong word":   func(v map[string]any) { v["lines"].([]any)[0].(map[string]any)["result"] = "fine" },
		"null list":    func(v map[string]any) { v["meshes"] = nil },
		"other schema": func(v map[string]any) { v["schema"] = SchemaName },
	} {
		v := read()
		spoil(v)
		if faults := validate(schema, schema, v, ""); len(faults) != 1 {
			t.Errorf("%s: %q", name, faults)
		}
	}
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
