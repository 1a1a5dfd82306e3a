package main

import (
	"reflect"

	"springbound/plan"
)

// whereSchemaName and whereSchemaVersion stand in every where.json.
const (
	whereSchemaName    = "springbound/where"
	whereSchemaVersion = 1
)

// whereDocument is where.json.
var whereDocument = plan.Document{
	Name: whereSchemaName, Version: whereSchemaVersion, Title: "Places for a further well",
	Description: "Metre and day. null is not known, not asked for, or without an end where a comment says so.",
	Units: map[string]string{
		"room":                                         "in unit",
		"price_per_unit_of_change":                     "m³/d per unit",
		"area_where_the_rate_fits_m2":                  "m²",
		"value_m3_per_d_per_m3_per_d":                  "m³/d more from all wells per m³/d of the further well",
		"value_by_easing_limits_m3_per_d_per_m3_per_d": "m³/d more from all wells per m³/d of the further well",
	},
	Words: map[string][]string{
		"whereResult.rates_kept": {"plan", "present", "others"},
		"whereLimit.unit":        {"m", "m3/d", "1"},
	},
}

// whereSchema returns the JSON schema (draft 2020-12) of where.json.
func whereSchema() []byte { return whereDocument.Schema(reflect.TypeFor[whereResult]()) }
