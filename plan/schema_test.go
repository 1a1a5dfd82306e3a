package plan

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"sort"
	"strings"
	"testing"

	"springbound/wells"
)

// Every number of the report has a key that says its unit, and every key of the lists is used.
func TestEveryNumberHasAUnit(t *testing.T) {
	used := map[string]bool{}
	eachField(reflect.TypeFor[Report](), map[reflect.Type]bool{}, func(owner string, f reflect.StructField) {
		key := keyOf(f)
		if key == "" || key != strings.ToLower(key) {
			t.Errorf("%s.%s: key %q", owner, f.Name, key)
		}
		used[owner+"."+key] = true
		if !holdsNumber(f.Type) {
			return
		}
		used[key] = true
		if _, known := UnitOf(key); !known {
			t.Errorf("%s.%s: key %q says no unit", owner, f.Name, key)
		}
	})
	for _, list := range []map[string]string{unitByContext, withoutUnit} {
		for key := range list {
			if !used[key] {
				t.Errorf("no number has the key %q", key)
			}
		}
	}
	for key := range wordsOfKey {
		if !used[key] {
			t.Errorf("no field %q", key)
		}
	}
	if _, known := UnitOf("rate"); known {
		t.Error("a key without a unit is accepted")
	}
}

// eachField walks the fields of a type and of the types that it holds.
func eachField(t reflect.Type, seen map[reflect.Type]bool, visit func(owner string, f reflect.StructField)) {
	if seen[t] {
		return
	}
	seen[t] = true
	for i := 0; i < t.NumField(); i++ {
		f := t.Field(i)
		visit(t.Name(), f)
		inner := f.Type
		for inner.Kind() == reflect.Slice || inner.Kind() == reflect.Pointer {
			inner = inner.Elem()
		}
		if inner.Kind() == reflect.Struct {
			eachField(inner, seen, visit)
		}
	}
}

// reports are one of each status that Make and Evaluate end with.
func reports(t *testing.T) []*Report {
	t.Helper()
	good := canalStrip(MostYield, 2500)
	good.limit("L1", "P1", 0.30)
	good.limit("L2", "P2", 0, func(l *wells.Limit) { l.State = "peak" })
	good.level(0, 40, 30, 1.8e-3, 1.8e-4, 1.2e-4)
	good.brief.Quotas = []Quota{{Name: "Q", Wells: []string{"W1"}, PerYear: number(1e5)}}
	planned := good.plan(t)
	good.brief.Demand = number(9000)
	response, err := good.table.Linearise(t.Context(), []float64{1, 2, 3})
	if err != nil {
		t.Fatal(err)
	}
	given, err := Evaluate(good.brief, response, []float64{1, 2, 3})
	if err != nil {
		t.Fatal(err)
	}
	return []*Report{planned, good.plan(t), given, {Schema: SchemaName, Version: SchemaVersion, Status: StatusOptimal, Period: "steady"}}
}

// The schema holds for written reports, and not for ones with a key more, a key less, a wrong type or a wrong word.
func TestSchemaHoldsForReports(t *testing.T) {
	var schema map[string]any
	if err := json.Unmarshal(Schema(), &schema); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(Schema(), Schema()) {
		t.Error("two calls differ")
	}
	for k, r := range reports(t) {
		data, err := Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		read := func() map[string]any {
			var v map[string]any
			if err := json.Unmarshal(data, &v); err != nil {
				t.Fatal(err)
			}
			return v
		}
		if faults := validate(schema, schema, read(), ""); len(faults) > 0 {
			t.Errorf("report %d (%s): %q", k, r.Status, faults)
		}
		for name, spoil := range map[string]func(v map[string]any){
			"key more":   func(v map[string]any) { v["more"] = 1 },
			"key less":   func(v map[string]any) { delete(v, "audit") },
			"inner less": func(v map[string]any) { delete(v["audit"].(map[string]any), "dual_gap") },
			"wrong type": func(v map[string]any) { v["total_rate_m3_per_d"] = "12" },
			"wrong word": func(v map[string]any) { v["status"] = "fine" },
			"null list":  func(v map[string]any) { v["wells"] = nil },
		} {
			v := read()
			spoil(v)
			if len(validate(schema, schema, v, "")) != 1 {
				t.Errorf("report %d, %s: %q", k, name, validate(schema, schema, v, ""))
			}
		}
	}
}

// validate checks a value against the parts of JSON schema that Schema uses.
func validate(root, schema map[string]any, v any, at string) (faults []string) {
	if ref, is := schema["$ref"].(string); is {
		definition := root["$defs"].(map[string]any)[strings.TrimPrefix(ref, "#/$defs/")].(map[string]any)
		return validate(root, definition, v, at)
	}
	if options, is := schema["anyOf"].([]any); is {
		for _, o := range options {
			if faults = validate(root, o.(map[string]any), v, at); len(faults) == 0 {
				return nil
			}
		}
		return []string{at + " fits no alternative"}
	}
	if want, is := schema["const"]; is && want != v {
		return []string{fmt.Sprintf("%s is %v, not %v", at, v, want)}
	}
	if words, is := schema["enum"].([]any); is && !slices.Contains(words, v) {
		return []string{fmt.Sprintf("%s is %v, not one of %v", at, v, words)}
	}
	if !ofType(schema["type"], v) {
		return []string{fmt.Sprintf("%s is %T, not %v", at, v, schema["type"])}
	}
	switch v := v.(type) {
	case []any:
		for i, x := range v {
			faults = append(faults, validate(root, schema["items"].(map[string]any), x, fmt.Sprintf("%s[%d]", at, i))...)
		}
	case map[string]any:
		properties := schema["properties"].(map[string]any)
		for _, key := range schema["required"].([]any) {
			if _, there := v[key.(string)]; !there {
				faults = append(faults, at+"."+key.(string)+" is missing")
			}
		}
		keys := make([]string, 0, len(v))
		for key := range v {
			keys = append(keys, key)
		}
		sort.Strings(keys)
		for _, key := range keys {
			inner, known := properties[key].(map[string]any)
			if !known {
				faults = append(faults, at+"."+key+" is not known")
				continue
			}
			faults = append(faults, validate(root, inner, v[key], at+"."+key)...)
		}
	}
	return faults
}

func ofType(want, v any) bool {
	if options, is := want.([]any); is {
		return slices.ContainsFunc(options, func(o any) bool { return ofType(o, v) })
	}
	switch want {
	case nil:
		return true
	case "integer":
		x, is := v.(float64)
		return is && x == math.Trunc(x)
	case "null":
		return v == nil
	}
	name := map[reflect.Kind]string{reflect.String: "string", reflect.Bool: "boolean", reflect.Float64: "number", reflect.Slice: "array", reflect.Map: "object"}
	return v != nil && name[reflect.TypeOf(v).Kind()] == want
}

func TestMarshalRefusesWhatIsNotFinite(t *testing.T) {
	for key, spoil := range map[string]func(*Report, float64){
		"total_rate_m3_per_d": func(r *Report, v float64) { r.TotalRate = v },
		"demand_m3_per_d":     func(r *Report, v float64) { r.Demand = &v },
		"wells[1].drawdown_per_rate_by_well_d_per_m2[2]": func(r *Report, v float64) { r.Wells[1].DrawdownByWell = []float64{0, 0, v} },
		"receptors[0].limits[0].headroom_share":          func(r *Report, v float64) { r.Receptors[0].Limits[0].RoomShare = &v },
		"sensitivities.values[1][0]":                     func(r *Report, v float64) { r.Sensitivities.Values[1][0] = v },
		"audit.dual_gap":                                 func(r *Report, v float64) { r.Audit.DualGap = v },
		"hand_formula.transmissivity_m2_per_d":           func(r *Report, v float64) { r.HandFormula = &HandFormula{Transmissivity: v} },
		"balances[0].lines[0].out_m3_per_d":              func(r *Report, v float64) { r.Balances = []Balance{{Lines: []BalanceLine{{Out: v}}}} },
		"conflict.members[0].alone":                      func(r *Report, v float64) { r.Conflict = &Conflict{Members: []ConflictMember{{Alone: &v}}} },
	} {
		for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
			r := reports(t)[0]
			spoil(r, v)
			if _, err := Marshal(r); err == nil || !strings.Contains(err.Error(), key+" is ") {
				t.Errorf("%s = %v: error %v", key, v, err)
			}
		}
	}
}
