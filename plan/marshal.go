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
	copied := *r
	fillEmpty(&copied)
	var out bytes.Buffer
	encoder := json.NewEncoder(&out)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", "  ")
	if err := encoder.Encode(&copied); err != nil {
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

// keyOf is the JSON key of a field.
func keyOf(f reflect.StructField) string {
	name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
	return name
}
