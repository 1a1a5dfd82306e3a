package plan

import "reflect"

// curveDocument is curve.json.
var curveDocument = Document{
	Name: CurveSchemaName, Version: CurveSchemaVersion, Title: "The aim against one limit",
	Description: "Values of the limit are in unit, those of the aim in aim_unit. null is no plan.",
	Units: map[string]string{
		"present": "in unit",
		"from":    "in unit",
		"to":      "in unit",
		"limit":   "in unit",
		"aim":     "in aim_unit",
		"slope":   "in aim_unit per unit",
	},
	Words: map[string][]string{
		"CurveReport.unit":     {"m", "m3/d", "1", "m3"},
		"CurveReport.aim_unit": {"m3/d", "1"},
		"CurveReport.per":      {"", "per hour", "per day", "per year"},
		"CurveReport.aim":      {string(MostYield), string(MostHeadroom)},
	},
}

// CurveSchema returns the JSON schema (draft 2020-12) of curve.json.
func CurveSchema() []byte { return curveDocument.Schema(reflect.TypeFor[CurveReport]()) }
