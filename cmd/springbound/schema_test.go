package main

import (
	"encoding/json"
	"fmt"
	"reflect"
	"slices"
	"sort"
	"strings"
	"testing"
)

// schemaFaults checks a value against the parts of JSON schema that the published ones use.
func schemaFaults(root, schema map[string]any, v any, at string) (faults []string) {
	if ref, is := schema["$ref"].(string); is {
		return schemaFaults(root, root["$defs"].(map[string]any)[strings.TrimPrefix(ref, "#/$defs/")].(map[string]any), v, at)
	}
	if want, is := schema["const"]; is && want != v {
		return []string{fmt.Sprintf("%s is %v, not %v", at, v, want)}
	}
	if words, is := schema["enum"].([]any); is && !slices.Contains(words, v) {
		return []string{fmt.Sprintf("%s is %v, not one of %v", at, v, words)}
	}
	if want := schema["type"]; want != nil {
		options, several := want.([]any)
		if !several {
			options = []any{want}
		}
		name := "null"
		switch v.(type) {
		case string:
			name = "string"
		case bool:
			name = "boolean"
		case float64:
			name = "number"
		case []any:
			name = "array"
		case map[string]any:
			name = "object"
		}
		if x, is := v.(float64); !slices.Contains(options, any(name)) && !(is && x == float64(int64(x)) && slices.Contains(options, any("integer"))) {
			return []string{fmt.Sprintf("%s is %T, not %v", at, v, want)}
		}
	}
	switch v := v.(type) {
	case []any:
		for i, x := range v {
			faults = append(faults, schemaFaults(root, schema["items"].(map[string]any), x, fmt.Sprintf("%s[%d]", at, i))...)
		}
	case map[string]any:
		properties := schema["properties"].(map[string]any)
		for _, key := range schema["required"].([]any) {
			if _, there := v[key.(string)]; !there {
				faults = append(faults, at+"."+key.(string)+" is missing")
			}
		}
		var keys []string
		for key := range v {
			keys = append(keys, key)
		}
		sort.Strings(keys)
		for _, key := range keys {
			if inner, known := properties[key].(map[string]any); known {
				faults = append(faults, schemaFaults(root, inner, v[key], at+"."+key)...)
			} else {
				faults = append(faults, at+"."+key+" is not known")
			}
		}
	}
	return faults
}

// Every number of where.json has a unit, and the schema holds for what the command writes, with a value for the aim and without, and not
// for spoilt files.
func TestSchemaHoldsForWhere(t *testing.T) {
	used := map[string]bool{}
	var walk func(of reflect.Type)
	walk = func(of reflect.Type) {
		for i := range of.NumField() {
			f := of.Field(i)
			key, inner := f.Tag.Get("json"), f.Type
			for inner.Kind() == reflect.Slice || inner.Kind() == reflect.Pointer {
				inner = inner.Elem()
			}
			used[key], used[of.Name()+"."+key] = true, true
			if _, known := whereDocument.UnitOf(key); inner.Kind() == reflect.Float64 && !known {
				t.Errorf("%s.%s: key %q says no unit", of.Name(), f.Name, key)
			}
			if inner.Kind() == reflect.Struct {
				walk(inner)
			}
		}
	}
	walk(reflect.TypeFor[whereResult]())
	for key := range whereDocument.Units {
		if !used[key] {
			t.Errorf("no number has the key %q", key)
		}
	}
	for key := range whereDocument.Words {
		if !used[key] {
			t.Errorf("no field %q", key)
		}
	}
	var schema map[string]any
	if err := json.Unmarshal(whereSchema(), &schema); err != nil {
		t.Fatal(err)
	}
	small := "[mesh]\nnodes = 600\n"
	yield := twoCanals(turns(1)[0])
	yield.toml += small
	room := twoCanals(turns(1)[0])
	room.toml = strings.Replace(room.toml, "aim = \"most-yield\"\n", "aim = \"most-headroom\"\ndemand = \"800 m3/d\"\n", 1) + small
	for name, d := range map[string]draft{"yield": yield, "headroom": room} {
		files, _ := whereFiles(t, exitDone, d.write(t), "--rate", "2 L/s", "--keep", "others")
		read := func() (v map[string]any) {
			if err := json.Unmarshal(files["where.json"], &v); err != nil {
				t.Fatal(err)
			}
			return v
		}
		if faults := schemaFaults(schema, schema, read(), ""); len(faults) > 0 {
			t.Errorf("%s: %q", name, faults)
		}
		for what, spoil := range map[string]func(v map[string]any){
			"key more":      func(v map[string]any) { v["more"] = 1 },
			"key less":      func(v map[string]any) { delete(v, "solves") },
			"inner less":    func(v map[string]any) { delete(v["confirmation"].(map[string]any), "done") },
			"wrong type":    func(v map[string]any) { v["spacing_m"] = "200 m" },
			"wrong word":    func(v map[string]any) { v["rates_kept"] = "all" },
			"other version": func(v map[string]any) { v["version"] = 2.0 },
			"null list":     func(v map[string]any) { v["places"] = nil },
		} {
			v := read()
			spoil(v)
			if faults := schemaFaults(schema, schema, v, ""); len(faults) != 1 {
				t.Errorf("%s, %s: %q", name, what, faults)
			}
		}
	}
}
