package plan

import (
	"context"
	"encoding/json"
	"math"
	"reflect"
	"strings"
	"testing"

	"springbound/wells"
)

// Every number of curve.json has a unit in the schema, and no other unit is listed.
func TestEveryNumberOfACurveHasAUnit(t *testing.T) {
	used := map[string]bool{}
	eachField(reflect.TypeFor[CurveReport](), map[reflect.Type]bool{}, func(owner string, f reflect.StructField) {
		key := keyOf(f)
		used[key], used[owner+"."+key] = true, true
		if _, known := curveDocument.UnitOf(key); holdsNumber(f.Type) && !known {
			t.Errorf("%s.%s: key %q says no unit", owner, f.Name, key)
		}
	})
	for key := range curveDocument.Units {
		if !used[key] {
			t.Errorf("no number has the key %q", key)
		}
	}
	for key := range curveDocument.Words {
		if !used[key] {
			t.Errorf("no field %q", key)
		}
	}
}

// The schema holds for curves of a limit, a quota and the demand, and not for spoilt ones.
func TestSchemaHoldsForCurves(t *testing.T) {
	var schema map[string]any
	if err := json.Unmarshal(CurveSchema(), &schema); err != nil {
		t.Fatal(err)
	}
	s := canalStrip(MostYield, 2500)
	s.limit("L1", "P1", 0.30)
	s.limit("L2", "P2", 0.25, func(l *wells.Limit) { l.Reserve = 0.1 })
	s.brief.Quotas = []Quota{{Name: "Q", Wells: []string{"W1"}, PerYear: number(1e5)}}
	s.brief.Demand = number(600)
	for _, of := range []string{"L1", "L2", "Q", "demand"} {
		r, err := Curve(context.Background(), s.brief, s.table, of, nil, number(curveEnd(of)))
		if err != nil {
			t.Fatalf("%s: %v", of, err)
		}
		data, err := json.Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		read := func() (v map[string]any) {
			if err := json.Unmarshal(data, &v); err != nil {
				t.Fatal(err)
			}
			return v
		}
		if faults := validate(schema, schema, read(), ""); len(faults) > 0 || len(r.Points) < 2 || math.IsNaN(r.To) {
			t.Errorf("%s: %q, %d points", of, faults, len(r.Points))
		}
		for name, spoil := range map[string]func(v map[string]any){
			"key more":      func(v map[string]any) { v["more"] = 1 },
			"key less":      func(v map[string]any) { delete(v, "exact") },
			"wrong type":    func(v map[string]any) { v["present"] = "0.3 m" },
			"wrong word":    func(v map[string]any) { v["unit"] = "cm" },
			"other schema":  func(v map[string]any) { v["schema"] = SchemaName },
			"other version": func(v map[string]any) { v["version"] = 2 },
			"null list":     func(v map[string]any) { v["points"] = nil },
		} {
			v := read()
			spoil(v)
			if faults := validate(schema, schema, v, ""); len(faults) != 1 {
				t.Errorf("%s, %s: %q", of, name, faults)
			}
		}
	}
	if text := string(CurveSchema()); !strings.Contains(text, "urn:springbound:curve:1") || text != string(CurveSchema()) {
		t.Error(text[:200])
	}
}

// curveEnd is a last value that suits what a curve is drawn against.
func curveEnd(of string) float64 {
	switch of {
	case "Q":
		return 3e5
	case "demand":
		return 1300
	}
	return 0.6
}
