package plan

import (
	"encoding/json"
	"fmt"
	"reflect"
	"strings"
)

// SchemaName and SchemaVersion stand in every plan.json.
const (
	SchemaName    = "springbound/plan"
	SchemaVersion = 1
)

// unitSuffixes are the ends of keys that name a unit, longer ones before the shorter ones that they end with.
var unitSuffixes = []struct{ suffix, unit string }{
	{"_m3_per_d_per_m", "m³/d per m"},
	{"_kwh_per_m3", "kWh/m³"},
	{"_kwh_per_d", "kWh/d"},
	{"_kw", "kW"},
	{"_m3_per_yr", "m³ in a year of 365.25 days"},
	{"_m3_per_d", "m³/d"},
	{"_d_per_yr", "days a year"},
	{"_m2_per_d", "m²/d"},
	{"_d2_per_m5", "d²/m⁵"},
	{"_d_per_m2", "d/m²"},
	{"_h_per_d", "h/d"},
	{"_m3", "m³"},
	{"_deg", "degrees"},
	{"_share", "share"},
	{"_m", "m"},
}

// unitByContext are the keys whose unit stands beside them or follows from the aim.
var unitByContext = map[string]string{
	"level_shadow_price":    "change of the aim (m³/d, share of headroom, saved kWh/d, saved sum of squares) per m by which the lowest level is lowered",
	"shadow_price":          "change of the aim (m³/d, share of headroom, saved kWh/d, saved sum of squares) per unit by which the limit or bound is loosened",
	"demand_shadow_price":   "change of the aim (m³/d, share of headroom, kWh/d, sum of squares) per m³/d of demand",
	"tighter_price":         "change of the aim (m³/d, share of headroom, saved kWh/d, saved sum of squares) per unit of the limit",
	"looser_price":          "change of the aim (m³/d, share of headroom, saved kWh/d, saved sum of squares) per unit of the limit",
	"tighter_to":            "value of the limit, in its unit",
	"looser_to":             "value of the limit, in its unit",
	"value_no_pumping":      "in unit",
	"value_others_recent":   "in unit",
	"value_others_licensed": "in unit",
	"value":                 "in unit",
	"change":                "in unit",
	"change_own":            "in unit",
	"change_others":         "in unit",
	"change_resolved":       "in unit",
	"change_allowed":        "in the receptor's unit",
	"limit":                 "in unit",
	"headroom":              "in unit",
	"by":                    "in unit",
	"alone":                 "in unit",
	"estimated_error":       "in unit, of a level in m",
	"error_bound":           "in unit, of a level in m",
	"observed":              "in unit",
	"modelled":              "in unit",
	"values":                "in the row's unit, per m³/d for sensitivities",
}

// withoutUnit are the keys of pure numbers.
var withoutUnit = map[string]string{
	"share":               "share",
	"share_by_well":       "share",
	"growth":              "ratio of neighbouring sizes less one",
	"recharge_factor":     "multiplies every recharge",
	"balance_error":       "share",
	"superposition_error": "share",
	"linear_residual":     "share",
	"reciprocity_error":   "share",
	"capture_sum_error":   "share",
	"primal_violation":    "share",
	"dual_violation":      "share",
	"dual_gap":            "share",
	"sum_of_squares":      "sum of squared shares of the largest rates",
}

// UnitOf returns the unit of a number's key in plan.json; false when the key says none.
func UnitOf(key string) (unit string, known bool) {
	if unit, known = unitByContext[key]; known {
		return unit, true
	}
	if unit, known = withoutUnit[key]; known {
		return unit, true
	}
	for _, s := range unitSuffixes {
		if strings.HasSuffix(key, s.suffix) {
			return s.unit, true
		}
	}
	return "", false
}

// wordsOfKey are the keys that hold one of a few words, by type and key.
var wordsOfKey = map[string][]string{
	"Report.status":        {StatusOptimal, StatusInfeasible, StatusNotConverged, StatusNumericalFailure, StatusGivenRates},
	"Report.period":        {"steady"},
	"WellResult.mode":      {"decided", "fixed", "off"},
	"WellResult.at_bound":  {"", "min", "max"},
	"StateWell.mode":       {"decided", "fixed", "off"},
	"StateWell.at_bound":   {"", "min", "max"},
	"ReceptorResult.unit":  {"m", "m3/d", "1"},
	"LimitResult.unit":     {"m", "m3/d", "1"},
	"LimitResult.quantity": {"change", "value", "share_of_base"},
	"LimitResult.sense":    {"at_most", "at_least"},
	"LimitResult.baseline": {"no_pumping", "present", "others_at_licence"},
	"LimitResult.counts":   {"cumulative", "own"},
	"QuotaResult.basis":    {"per hour", "per day", "per year"},
	"Check.result":         {pass, failed, notDone},
	"ConflictMember.unit":  {"m", "m3/d", "1"},
}

// Document is a kind of JSON file with a published schema.
type Document struct {
	Name        string // "springbound/plan"
	Version     int
	Title       string
	Description string
	Units       map[string]string   // of keys that do not name theirs
	Words       map[string][]string // of keys that hold one of a few words, by type and key
}

// planDocument is plan.json.
var planDocument = Document{
	Name: SchemaName, Version: SchemaVersion, Title: "Pumping plan", Words: wordsOfKey,
	Description: "Metre and day. Pumping is positive out of the aquifer; a change is the value without pumping minus the value. null is not known or not stated, never zero.",
}

// Schema returns the JSON schema (draft 2020-12) of plan.json, made from the Report type: every key is required, no other is
// allowed, and each number's description is its unit. The bytes are always the same.
func Schema() []byte { return planDocument.Schema(reflect.TypeFor[Report]()) }

// Schema returns the JSON schema of a document that holds a value of the given type.
func (d Document) Schema(t reflect.Type) []byte {
	definitions := map[string]any{}
	root := d.object(t, definitions)
	root["$schema"] = "https://json-schema.org/draft/2020-12/schema"
	root["$id"] = fmt.Sprintf("urn:%s:%d", strings.ReplaceAll(d.Name, "/", ":"), d.Version)
	root["title"] = d.Title
	root["description"] = d.Description
	properties := root["properties"].(map[string]any)
	properties["schema"] = map[string]any{"const": d.Name}
	properties["version"] = map[string]any{"const": d.Version}
	root["$defs"] = definitions
	out, err := json.MarshalIndent(root, "", "  ")
	if err != nil {
		panic("plan: Schema: " + err.Error())
	}
	return append(out, '\n')
}

// UnitOf returns the unit of a number's key in the document; false when the key says none.
func (d Document) UnitOf(key string) (unit string, known bool) {
	if unit, known = d.Units[key]; known {
		return unit, true
	}
	return UnitOf(key)
}

// object describes a struct.
func (d Document) object(t reflect.Type, definitions map[string]any) map[string]any {
	properties, required := map[string]any{}, []string{}
	for i := 0; i < t.NumField(); i++ {
		f := t.Field(i)
		key := keyOf(f)
		required = append(required, key)
		property := d.typeSchema(f.Type, definitions)
		if unit, known := d.UnitOf(key); known && holdsNumber(f.Type) {
			property["description"] = unit
		}
		if words := d.Words[t.Name()+"."+key]; words != nil {
			property["enum"] = words
		}
		properties[key] = property
	}
	return map[string]any{"type": "object", "properties": properties, "required": required, "additionalProperties": false}
}

// typeSchema describes a field's type; structs become references.
func (d Document) typeSchema(t reflect.Type, definitions map[string]any) map[string]any {
	switch t.Kind() {
	case reflect.String:
		return map[string]any{"type": "string"}
	case reflect.Bool:
		return map[string]any{"type": "boolean"}
	case reflect.Int, reflect.Int32:
		return map[string]any{"type": "integer"}
	case reflect.Float64:
		return map[string]any{"type": "number"}
	case reflect.Slice:
		return map[string]any{"type": "array", "items": d.typeSchema(t.Elem(), definitions)}
	case reflect.Pointer:
		inner := d.typeSchema(t.Elem(), definitions)
		if t.Elem().Kind() == reflect.Struct {
			return map[string]any{"anyOf": []any{inner, map[string]any{"type": "null"}}}
		}
		inner["type"] = []string{inner["type"].(string), "null"}
		return inner
	case reflect.Struct:
		if _, known := definitions[t.Name()]; !known {
			definitions[t.Name()] = nil
			definitions[t.Name()] = d.object(t, definitions)
		}
		return map[string]any{"$ref": "#/$defs/" + t.Name()}
	}
	panic("plan: Schema: no rule for " + t.String())
}

// holdsNumber tells whether a field is a number, or lists of them.
func holdsNumber(t reflect.Type) bool {
	for t.Kind() == reflect.Slice || t.Kind() == reflect.Pointer {
		t = t.Elem()
	}
	return t.Kind() == reflect.Float64
}
