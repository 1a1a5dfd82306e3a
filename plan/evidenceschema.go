package plan

import "reflect"

// evidenceDocument is audit.json.
var evidenceDocument = Document{
	Name: EvidenceName, Version: EvidenceVersion, Title: "The evidence for a pumping plan",
	Description: "Metre and day. Pumping is positive out of the aquifer; a change is the value without pumping minus the value. null is not known or not done, never zero.",
	Units: map[string]string{
		"figure":                          "in unit",
		"allowed":                         "in unit",
		"scale":                           "in unit",
		"richardson":                      "in unit",
		"change_without":                  "in unit",
		"adjoint_in_unit_per_m3_per_d":    "in unit per m³/d",
		"difference_in_unit_per_m3_per_d": "in unit per m³/d",
		"observed_order":                  "power of the edge length",
		"grid_convergence_index_percent":  "per cent of scale",
		"factor":                          "ratio",
		"values":                          "in unit",
	},
	Words: map[string][]string{
		"EvidenceLine.result":  {pass, failed, notDone},
		"Evidence.plan_status": {StatusOptimal, StatusInfeasible, StatusNotConverged, StatusNumericalFailure, StatusGivenRates},
		"DifferenceLine.unit":  {"m", "m3/d", "1"},
		"ConvergenceLine.unit": {"m", "m3/d", "1"},
		"BoundaryChange.unit":  {"", "m", "m3/d", "1"},
	},
}

// EvidenceSchema returns the JSON schema (draft 2020-12) of audit.json.
func EvidenceSchema() []byte { return evidenceDocument.Schema(reflect.TypeFor[Evidence]()) }
