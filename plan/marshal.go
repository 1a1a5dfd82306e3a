package plan

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"strings"
)

// Marshal writes a report as plan.json: indented, keys in the order of the fields, the same bytes for the same report. A number
// that is not finite is refused with the place where it stands; nothing is written then.
func Marshal(r *Report) ([]byte, error) {
	if bad := nonFinite(reflect.ValueOf(r), ""); len(bad) > 0 {
		return nil, fmt.Errorf("plan: not finite, so not written: %s", strings.Join(bad, ", "))
	}
	var out bytes.Buffer
	encoder := json.NewEncoder(&out)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", "  ")
	if err := encoder.Encode(withLists(reflect.ValueOf(*r)).Interface()); err != nil {
		return nil, fmt.Errorf("plan: the report cannot be written: %w", err)
	}
	return out.Bytes(), nil
}

// nonFinite lists the keys of numbers that are not finite, as in 'wells[2].rate_m3_per_d is NaN'.
func nonFinite(v reflect.Value, key string) []string {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			return nonFinite(v.Elem(), key)
		}
	case reflect.Float64:
		if math.IsNaN(v.Float()) || math.IsInf(v.Float(), 0) {
			return []string{fmt.Sprintf("%s is %v", key, v.Float())}
		}
	case reflect.Slice:
		var bad []string
		for i := 0; i < v.Len(); i++ {
			bad = append(bad, nonFinite(v.Index(i), fmt.Sprintf("%s[%d]", key, i))...)
		}
		return bad
	case reflect.Struct:
		var bad []string
		for i := 0; i < v.NumField(); i++ {
			bad = append(bad, nonFinite(v.Field(i), strings.TrimPrefix(key+"."+keyOf(v.Type().Field(i)), "."))...)
		}
		return bad
	}
	return nil
}

// withLists returns a copy in which a missing list is an empty one, so that lists are never written as null.
func withLists(v reflect.Value) reflect.Value {
	out := reflect.New(v.Type()).Elem()
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			out.Set(reflect.New(v.Type().Elem()))
			out.Elem().Set(withLists(v.Elem()))
		}
	case reflect.Slice:
		out.Set(reflect.MakeSlice(v.Type(), v.Len(), v.Len()))
		for i := 0; i < v.Len(); i++ {
			out.Index(i).Set(withLists(v.Index(i)))
		}
	case reflect.Struct:
		for i := 0; i < v.NumField(); i++ {
			out.Field(i).Set(withLists(v.Field(i)))
		}
	default:
		out.Set(v)
	}
	return out
}

// keyOf is the JSON key of a field.
func keyOf(f reflect.StructField) string {
	name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
	return name
}
