package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"springbound/plan"
)

// confinedLine takes over whether the head stays above the aquifer's top.
func (a *audit) confinedLine(context.Context) error {
	a.fromCheck(plan.EvidenceLine{Check: "Head above the top of the aquifer", How: "heads without pumping and at the plan, at every node and at the wells' faces, beside the stated top",
		Reason: "a confined model does not hold where the head is below the top: transmissivity falls and drawdown is understated",
		Remedy: "lower the rates near the place, state a limit there, or use a model that lets the aquifer drain"}, "Head above the top of the aquifer")
	return nil
}

// optimum takes over the certificate of the plan and the checks of its rates.
func (a *audit) optimum(context.Context) error {
	a.fromCheck(plan.EvidenceLine{Check: "The plan is the best one", How: "limits, prices and gap recomputed from the programme's data by code that shares nothing with the solver (duality)",
		Reason: "violations and gap of the size of rounding", Remedy: "do not use the plan; send the project files to the makers of the program"},
		"Plan is the best one", "No rates keep every limit", "No choice of running wells", "The choice of running wells")
	a.fromCheck(plan.EvidenceLine{Check: "Demand, least and largest rates, limits", How: "sums and rates of the plan beside demand, ranges, licences, levels and limits",
		Reason: "to rounding", Remedy: "do not use the plan: read which one is passed, and by how much, in the plan's own checks"},
		"Total meets the demand", "Rates are within", "Limits of receptors", "Licences and quotas", "Levels in wells")
	return nil
}

// sameTotal is the difference of two optimal totals that counts as none, relative: ten times the gap at which a search for running wells ends.
const sameTotal = 1e-6

// secondMethod has the plan's programme solved by another method.
func (a *audit) secondMethod(ctx context.Context) error {
	l := plan.EvidenceLine{Check: "The optimum by a second method", How: "the plan's programme solved by an interior-point method, which shares no step with the first one",
		Unit: "share", Reason: "each answer is certified to a tenth of this; prices carry violations into the aim", Remedy: "do not use the plan; one of the two methods is wrong"}
	if a.j.problem == nil {
		l.Result, l.Sentence = plan.NotDone, "The plan left no programme to solve again."
		a.e.Add(l)
		return nil
	}
	o, err := a.j.problem.SecondOpinion(ctx)
	if err != nil {
		return err
	}
	l.Result, l.Sentence = o.Result, o.Sentence
	if o.Result == plan.NotDone {
		a.e.Add(l)
		return nil
	}
	if r := a.report; r.Aim == string(plan.MostYield) && r.Status == plan.StatusOptimal && len(r.States) < 2 {
		l.Sentence += fmt.Sprintf(" The optimum is %.2f m³/d, the plan's total %.2f.", -o.Aim, r.TotalRate)
		if !(math.Abs(o.Aim+r.TotalRate) <= sameTotal*math.Max(1, r.TotalRate)) {
			l.Result = plan.Fail
		}
	}
	a.add(l, o.Difference, o.Allowed)
	return nil
}

// files reads every input again and compares its hash with that of the file that the plan was made from.
func (a *audit) files(ctx context.Context) error {
	l := plan.EvidenceLine{Check: "Files are those that were read", How: "SHA-256 of every input file, taken again", Unit: "files that differ",
		Reason: "a figure belongs to one set of files", Remedy: "run plan and audit again; keep a copy of the files with the report"}
	differ := []string{}
	for _, f := range a.e.Inputs {
		if err := ctx.Err(); err != nil {
			return err
		}
		data, err := os.ReadFile(filepath.Join(a.j.project.Dir, filepath.FromSlash(f.File)))
		sum := sha256.Sum256(data)
		if err != nil || hex.EncodeToString(sum[:]) != f.SHA256 {
			differ = append(differ, f.File)
		}
	}
	l.Sentence = fmt.Sprintf("%d files, hashes listed below; none has changed since it was read.", len(a.e.Inputs))
	if len(differ) > 0 {
		l.Sentence = "Changed while the audit ran: " + strings.Join(differ, ", ") + "."
	}
	a.add(l, float64(len(differ)), 0)
	return nil
}

// sameRate is how far a rate on file may be from the rate found again, as a share of the total: what the choice among equal plans and another
// processor's rounding leave.
const sameRate = 1e-6

// onFile compares this plan with the one that was written beside the project.
func (a *audit) onFile(context.Context) error {
	l := plan.EvidenceLine{Check: "The plan on file is this plan", How: "rates and hashes of out/plan.json beside the project, and those found again", Unit: "share of the total",
		Reason: "the same files give the same plan; another processor rounds otherwise", Remedy: "run springbound plan again, and replace what was printed from the old one"}
	data, err := os.ReadFile(filepath.Join(a.j.project.Dir, "out", "plan.json"))
	if errors.Is(err, os.ErrNotExist) {
		l.Result, l.Sentence = plan.NotDone, "There is no out/plan.json beside the project."
		a.e.Add(l)
		return nil
	}
	var old plan.Report
	if err == nil {
		err = json.Unmarshal(data, &old)
	}
	if err != nil {
		l.Result, l.Sentence = plan.Fail, sentence("out/plan.json cannot be read: "+err.Error())
		a.e.Add(l)
		return nil
	}
	rates := map[string]float64{}
	for _, w := range old.Wells {
		rates[w.ID] = w.Rate
	}
	apart, at := math.Abs(old.TotalRate-a.report.TotalRate), "the total"
	for w, q := range a.rates {
		id := a.report.Wells[w].ID
		was, ok := rates[id]
		if !ok {
			l.Result = plan.Fail
		}
		if d := math.Abs(q - was); d > apart {
			apart, at = d, "well "+id
		}
	}
	l.Sentence = fmt.Sprintf("The largest difference is that of %s, %.2g m³/d.", at, apart)
	if !slices.Equal(old.Inputs, a.report.Inputs) {
		l.Result = plan.Fail
		l.Sentence += " It was made from other files."
	}
	a.add(l, apart/math.Max(1, math.Abs(a.report.TotalRate)), sameRate)
	return nil
}

// handFormula takes over Thiem's formula at one well.
func (a *audit) handFormula(context.Context) error {
	l := plan.EvidenceLine{Check: "Hand formula at one well", How: "Thiem's difference of drawdown between two circles around a well in uniform ground, Q ln(r2/r1)/(2 pi T), beside the model's",
		Unit: "share", Reason: "exact in a uniform disc; the mesh and what lies beyond the disc leave up to this", Remedy: "look at transmissivity, zones and mesh around that well"}
	h := a.report.HandFormula
	if h == nil {
		a.fromCheck(l, "Hand formula")
		return nil
	}
	want := thiem(h)
	l.Sentence = fmt.Sprintf("Well %s, %.1f m³/d, T %.4g m²/d, from %.0f m to %.0f m: by hand %.4f m, in the model %.4f m.", h.Well, h.Rate, h.Transmissivity, h.Near, h.Far, want, h.ModelDrop)
	a.add(l, relative(h.ModelDrop, want), handTolerance)
	return nil
}
