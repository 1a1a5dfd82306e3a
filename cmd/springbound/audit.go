package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"

	"springbound/adjoint"
	"springbound/plan"
	"springbound/plan/workbook"
	"springbound/wells"
)

// runAudit makes the plan and the evidence for it.
func runAudit(ctx context.Context, c solving, s streams) error {
	j, err := newJob(ctx, c, s)
	if err != nil {
		return err
	}
	defer j.progress.clear()
	e, err := j.evidence(ctx, auditOptions{workers: c.Workers, mostNodes: mostRefinedNodes})
	if err != nil {
		return err
	}
	data, err := plan.MarshalEvidence(e)
	if err != nil {
		return err
	}
	book, err := workbook.WriteEvidence(e)
	if err != nil {
		return err
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	dir := c.Out
	if dir == "" {
		dir = filepath.Join(j.project.Dir, "out-audit")
	}
	if err := writeOutputs(dir, []outputFile{{"audit.json", data}, {"audit.txt", evidenceText(e)}, {"audit.xlsx", book}}); err != nil {
		return err
	}
	j.progress.clear()
	if c.JSON {
		if _, err := s.out.Write(data); err != nil {
			return fmt.Errorf("cannot print the result: %w", err)
		}
	} else {
		printEvidence(s.out, e, dir)
	}
	if e.Failed > 0 {
		return &noPlanError{fmt.Sprintf("%d of %d checks fail; the files say what to do", e.Failed, len(e.Lines))}
	}
	return nil
}

// auditOptions steer an audit.
type auditOptions struct {
	workers   int // processors to use; 0: all
	mostNodes int // of the finest mesh of the refinement study
}

// audit is the work on one plan's evidence.
type audit struct {
	auditOptions
	j      *job
	e      *plan.Evidence
	report *plan.Report
	rates  []float64
	state  *adjoint.State
	rows   []plan.Row // at the plan, in the order of state.Rows
	booked []booking  // by operating state: without pumping, at the plan
}

// evidence makes the plan and checks it and the model behind it, each by other means than those that it was made with.
func (j *job) evidence(ctx context.Context, o auditOptions) (*plan.Evidence, error) {
	a := &audit{auditOptions: o, j: j}
	j.withoutFirm, j.keepProblem = true, true
	var err error
	if a.report, err = j.makePlan(ctx); err != nil {
		return nil, err
	}
	if a.state, err = j.complete(ctx, a.report); err != nil {
		return nil, err
	}
	a.rates = ratesOf(a.report)
	response, err := j.Linearise(ctx, a.rates)
	if err != nil {
		return nil, err
	}
	a.rows = response.Rows
	a.begin()
	for _, step := range []struct {
		name string
		run  func(context.Context) error
	}{
		{"water balance", a.balance}, {"reciprocity", a.reciprocity}, {"differences", a.differences}, {"superposition", a.superposition},
		{"refined meshes", a.convergence}, {"hand formula", a.handFormula}, {"boundaries", a.boundaries}, {"salt water", a.saltWater},
		{"confined condition", a.confinedLine}, {"optimum", a.optimum}, {"second method", a.secondMethod}, {"files", a.files},
	} {
		if err := ctx.Err(); err != nil {
			return nil, fmt.Errorf("stopped before the check of %s: %w", step.name, err)
		}
		j.progress.report("checking: "+step.name, 0, 1)
		if err := step.run(ctx); err != nil {
			return nil, err
		}
	}
	a.e.Conclude()
	return a.e, nil
}

// begin fills the headings.
func (a *audit) begin() {
	r, p := a.report, a.j.project
	a.e = &plan.Evidence{Program: r.Program, Title: r.Title, Reference: r.Reference, PreparedFor: r.PreparedFor, PreparedBy: r.PreparedBy,
		PlanStatus: r.Status, Plan: r.Headline, TotalRate: r.TotalRate, Capture: r.Capture, HandFormula: r.HandFormula, Inputs: r.Inputs}
	set := func(name, value string) {
		a.e.Settings = append(a.e.Settings, plan.EvidenceSetting{Name: name, Value: value})
	}
	set("program", r.Program)
	set("aim", r.Aim)
	set("mesh of the plan", fmt.Sprintf("%d nodes, %d triangles, smallest angle %.1f degrees", r.Mesh.Nodes, r.Mesh.Triangles, r.Mesh.MinAngle))
	set("edge length at wells, springs and receptors", fmt.Sprintf("%.4g m, growing by %.3g per distance to %.4g m", r.Mesh.FinestM, r.Mesh.Growth, r.Mesh.CoarsestM))
	set("accuracy asked of the mesh", fmt.Sprintf("%.3g %%%s", 100*a.accuracy(), statedWords(p.Mesh.Accuracy > 0)))
	if len(r.States) > 1 {
		set("operating state", r.State+": the default one; water balance, salt water, confined condition and optimum are checked for every state, the other checks look at this one")
	}
	set("coordinates", r.Plane)
	set("vertical datum", r.Datum)
}

func statedWords(stated bool) string {
	if stated {
		return ", as stated in [mesh]"
	}
	return ", not stated in [mesh], so the default"
}

// accuracy is the relative error asked of the mesh, by default half a per cent: far below what transmissivity and recharge are known to.
func (a *audit) accuracy() float64 {
	if v := a.j.project.Mesh.Accuracy; v > 0 {
		return v
	}
	return adjoint.DefaultAccuracy
}

// add appends a line that compares a figure with what is allowed.
func (a *audit) add(l plan.EvidenceLine, figure, allowed float64) {
	l.Figure, l.Allowed = finiteOrNil(figure), &allowed
	if l.Result == "" {
		l.Result = plan.Verdict(figure, allowed)
	}
	a.e.Add(l)
}

// fromCheck appends lines for checks that the plan's own report holds, found by the beginning of their names.
func (a *audit) fromCheck(l plan.EvidenceLine, names ...string) {
	l.Result = plan.NotDone
	var words []string
	for _, c := range a.report.Checks {
		for _, n := range names {
			if !strings.HasPrefix(c.Name, n) {
				continue
			}
			words = append(words, c.Name+": "+c.Detail)
			if c.Result == plan.Fail || l.Result == plan.NotDone {
				l.Result = c.Result
			}
		}
	}
	l.Sentence = strings.Join(words, ". ")
	if len(words) == 0 {
		l.Sentence = "The plan's report holds no such check."
	}
	l.Sentence = sentence(l.Sentence)
	a.e.Add(l)
}

// sentence begins with a capital and ends with a point.
func sentence(s string) string {
	if s == "" {
		return s
	}
	s = strings.ToUpper(s[:1]) + s[1:]
	if !strings.HasSuffix(s, ".") {
		s += "."
	}
	return s
}

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

// receptorWords names a row's receptor, or the well whose level it is.
func (a *audit) receptorWords(i int) string {
	if r := a.rows[i]; r.Receptor != "" {
		return r.Receptor
	}
	return "level in " + a.rows[i].Well
}

// limited tells which receptors carry a limit.
func (a *audit) limited() map[string]bool {
	out := map[string]bool{}
	for _, l := range a.j.project.Limits {
		out[l.Receptor] = true
	}
	return out
}

// wellLevel is the level in a running well's bore, with every loss, at heads h [m].
func wellLevel(f *adjoint.Field, w int, h, rates []float64) float64 {
	var well wells.Well = f.Wells[w]
	return h[f.Node(w)] - f.Below(w)*rates[w] - well.Loss(rates[w])
}
