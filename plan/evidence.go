package plan

import (
	"bytes"
	"encoding/json"
	"fmt"
	"reflect"
	"strings"
)

// EvidenceName and EvidenceVersion stand in every audit.json.
const (
	EvidenceName    = "springbound/audit"
	EvidenceVersion = 1
)

// Evidence is the record of an audit: what was checked, how, what was found and what is allowed. It is written as audit.json, and
// audit.txt and audit.xlsx are made from it alone. Every number carries its unit in its key, or the key beside it names the unit; null is
// 'not known' or 'not done', never zero.
type Evidence struct {
	Schema  string `json:"schema"`  // "springbound/audit"
	Version int    `json:"version"` // of the record
	Program string `json:"program"` // program and its version

	Title       string  `json:"title"`
	Reference   string  `json:"reference"`
	PreparedFor string  `json:"prepared_for"`
	PreparedBy  string  `json:"prepared_by"`
	Headline    string  `json:"headline"`
	PlanStatus  string  `json:"plan_status"`
	Plan        string  `json:"plan_headline"`
	TotalRate   float64 `json:"total_rate_m3_per_d"`
	Passed      int     `json:"passed"`
	Failed      int     `json:"failed"`
	NotDone     int     `json:"not_done"`

	Lines       []EvidenceLine    `json:"lines"`
	Balances    []EvidenceBalance `json:"balances"`
	Differences []DifferenceLine  `json:"differences"` // adjoint sensitivities beside re-solves
	Meshes      []EvidenceMesh    `json:"meshes"`      // coarsest first
	Convergence []ConvergenceLine `json:"convergence"`
	Capture     []Capture         `json:"capture"`
	Boundaries  []BoundaryLine    `json:"boundaries"`
	Inward      []InwardStretch   `json:"inward_flow"`
	HandFormula *HandFormula      `json:"hand_formula"`
	Settings    []EvidenceSetting `json:"settings"`
	Inputs      []InputFile       `json:"inputs"`
}

// EvidenceLine is one check.
type EvidenceLine struct {
	Number   int      `json:"number"`
	Check    string   `json:"check"`
	How      string   `json:"how"`
	Figure   *float64 `json:"figure"`  // null: nothing to measure
	Allowed  *float64 `json:"allowed"` // largest figure that passes; null likewise
	Unit     string   `json:"unit"`    // of both
	Reason   string   `json:"reason"`  // why that much is allowed
	Result   string   `json:"result"`  // pass, fail, not done
	Sentence string   `json:"sentence"`
	Remedy   string   `json:"remedy"` // what to do when it fails
}

// EvidenceBalance is a state's water balance by feature, recomputed and as the model books it.
type EvidenceBalance struct {
	State      string                `json:"state"`
	In         float64               `json:"in_m3_per_d"`
	Out        float64               `json:"out_m3_per_d"`
	Worst      float64               `json:"largest_nodal_residual_m3_per_d"`
	WorstPlace string                `json:"largest_nodal_residual_place"`
	Lines      []EvidenceBalanceLine `json:"lines"`
}

// EvidenceBalanceLine is one feature's flow into and out of the aquifer.
type EvidenceBalanceLine struct {
	Feature  string  `json:"feature"`
	Kind     string  `json:"kind"`
	In       float64 `json:"in_m3_per_d"`
	Out      float64 `json:"out_m3_per_d"`
	ModelIn  float64 `json:"model_in_m3_per_d"`
	ModelOut float64 `json:"model_out_m3_per_d"`
}

// DifferenceLine sets an adjoint sensitivity beside the difference of two full solves.
type DifferenceLine struct {
	Receptor   string   `json:"receptor"`
	Well       string   `json:"well"`
	Unit       string   `json:"unit"`
	Adjoint    float64  `json:"adjoint_in_unit_per_m3_per_d"`
	Difference *float64 `json:"difference_in_unit_per_m3_per_d"` // null: a feature switches within the smallest step
	Step       float64  `json:"step_m3_per_d"`                   // change of the well's rate
	Error      *float64 `json:"error_share"`                     // of the receptor's largest sensitivity
	Allowed    float64  `json:"allowed_share"`
	Note       string   `json:"note"`
}

// EvidenceMesh is one mesh of the refinement study.
type EvidenceMesh struct {
	Nodes    int    `json:"nodes"`
	How      string `json:"how"`
	OfPlan   bool   `json:"of_plan"` // the mesh that the plan was made on
	Finished bool   `json:"finished"`
}

// ConvergenceLine is one figure of the plan on three meshes.
type ConvergenceLine struct {
	What       string    `json:"what"`
	ID         string    `json:"id"`
	Unit       string    `json:"unit"`
	Values     []float64 `json:"values"` // coarsest mesh first, in unit
	Scale      float64   `json:"scale"`  // what per cent are of, in unit
	Order      *float64  `json:"observed_order"`
	Index      *float64  `json:"grid_convergence_index_percent"` // of the plan's mesh
	Richardson *float64  `json:"richardson"`                     // in unit
	Behaviour  string    `json:"behaviour"`
}

// BoundaryLine is the plan with one source of water taken away.
type BoundaryLine struct {
	Feature   string           `json:"feature"`
	Kind      string           `json:"kind"`
	Share     *float64         `json:"share"` // of the pumped water, with the source in place
	Outcome   string           `json:"outcome"`
	Before    float64          `json:"planned_total_m3_per_d"`
	After     *float64         `json:"planned_total_without_m3_per_d"`
	Receptors []BoundaryChange `json:"receptors"`
}

// BoundaryChange is a receptor's change at the same rates with and without the source.
type BoundaryChange struct {
	Receptor string   `json:"receptor"`
	Unit     string   `json:"unit"`
	With     float64  `json:"change"`
	Without  float64  `json:"change_without"`
	Factor   *float64 `json:"factor"`
	Limited  bool     `json:"limited"`
	Passed   []string `json:"limits_passed_without"` // limits kept with the source and passed without it
	Decides  bool     `json:"decides"`
}

// InwardStretch is where water comes in through a prescribed head.
type InwardStretch struct {
	State     string  `json:"state"`
	Edge      string  `json:"edge"`
	Saline    bool    `json:"saline"`
	NoPumping float64 `json:"inflow_no_pumping_m3_per_d"` // of the whole edge
	AtPlan    float64 `json:"inflow_m3_per_d"`
	Length    float64 `json:"length_m"`
	Place     string  `json:"place"`
}

// EvidenceSetting is something that the audit was run with.
type EvidenceSetting struct {
	Name  string `json:"name"`
	Value string `json:"value"`
}

// Add appends a line with the next number.
func (e *Evidence) Add(l EvidenceLine) {
	l.Number = len(e.Lines) + 1
	e.Lines = append(e.Lines, l)
}

// Conclude counts the results and writes the headline.
func (e *Evidence) Conclude() {
	e.Schema, e.Version = EvidenceName, EvidenceVersion
	e.Passed, e.Failed, e.NotDone = 0, 0, 0
	var bad []string
	for _, l := range e.Lines {
		switch l.Result {
		case pass:
			e.Passed++
		case failed:
			e.Failed++
			bad = append(bad, l.Check)
		default:
			e.NotDone++
		}
	}
	e.Headline = fmt.Sprintf("%d checks pass, %d fail, %d not done.", e.Passed, e.Failed, e.NotDone)
	if len(bad) > 0 {
		e.Headline += " To look at: " + strings.Join(bad, "; ") + "."
	}
}

// Verdict turns a comparison into a result; a figure that is not a number fails.
func Verdict(figure, allowed float64) string {
	if figure <= allowed {
		return pass
	}
	return failed
}

// The results of a check, as they stand in every record.
const (
	Pass    = pass
	Fail    = failed
	NotDone = notDone
)

// MarshalEvidence writes audit.json as Marshal writes plan.json: a number that is not finite is refused with its place.
func MarshalEvidence(e *Evidence) ([]byte, error) {
	if bad := nonFinite(reflect.ValueOf(e), ""); len(bad) > 0 {
		return nil, fmt.Errorf("plan: not finite, so not written: %s", strings.Join(bad, ", "))
	}
	var out bytes.Buffer
	encoder := json.NewEncoder(&out)
	encoder.SetEscapeHTML(false)
	encoder.SetIndent("", "  ")
	if err := encoder.Encode(withLists(reflect.ValueOf(*e)).Interface()); err != nil {
		return nil, fmt.Errorf("plan: the evidence cannot be written: %w", err)
	}
	return out.Bytes(), nil
}
