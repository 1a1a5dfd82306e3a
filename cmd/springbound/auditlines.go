package main

import (
	"context"
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/plan"
)

// levelsApart is how far a prescribed head may be from its record [m]: a millimetre, which no survey gives.
const levelsApart = 1e-3

func thiem(h *plan.HandFormula) float64 {
	return h.Rate * math.Log(h.Far/h.Near) / (2 * math.Pi * h.Transmissivity)
}

func relative(got, want float64) float64 {
	if got == want {
		return 0
	}
	return math.Abs(got-want) / math.Abs(want)
}

// booking is a state whose water is booked anew.
type booking struct {
	name   string
	model  *aquifer.Model
	ledger *aquifer.Ledger
	sinks  []aquifer.Sink
	heads  []float64
	b      *aquifer.Booked
}

// bookings lists the state without pumping and that at the plan, of every operating state.
func (a *audit) bookings(ctx context.Context) ([]booking, error) {
	m := a.j.field.Model
	ledger := m.Ledger(1)
	out := []booking{{name: "without pumping", model: m, ledger: ledger, heads: a.state.Base}, {name: "at the plan", model: m, ledger: ledger, heads: a.state.Heads, sinks: a.j.field.Sinks(a.rates)}}
	for _, s := range a.j.otherStates() {
		rates := ratesInState(a.report, s.index)
		state, err := s.field.Changes(ctx, rates)
		if err != nil {
			return nil, err
		}
		ledger := s.field.Model.Ledger(a.j.project.States[s.index].RechargeFactor / defaultFactor(a.j.project))
		out = append(out, booking{name: "without pumping, " + s.name, model: s.field.Model, ledger: ledger, heads: state.Base},
			booking{name: "at the plan, " + s.name, model: s.field.Model, ledger: ledger, heads: state.Heads, sinks: s.field.Sinks(rates)})
	}
	return out, nil
}

// balance books the water of every state anew, at every node and by every feature.
func (a *audit) balance(ctx context.Context) error {
	states, err := a.bookings(ctx)
	if err != nil {
		return err
	}
	a.booked = states
	through, levels := 0.0, 0.0
	for i := range states {
		s := &states[i]
		s.b = s.ledger.Book(s.heads, s.sinks)
		through = math.Max(through, math.Max(s.b.In, s.b.Out))
		levels = math.Max(levels, s.b.LevelsApart)
	}
	nodal, feature, whole, worst := 0.0, 0.0, 0.0, "every feature agrees"
	for _, s := range states {
		nodal = math.Max(nodal, math.Abs(s.b.Residual[s.b.Worst]))
		whole = math.Max(whole, math.Abs(s.b.In-s.b.Out))
		e := plan.EvidenceBalance{State: s.name, In: s.b.In, Out: s.b.Out, Worst: math.Abs(s.b.Residual[s.b.Worst]), WorstPlace: a.j.placeText(s.model.At(s.b.Worst))}
		model := s.model.Balance(s.heads, s.sinks)
		for _, f := range append(s.b.Features, s.b.Wells) {
			line := plan.EvidenceBalanceLine{Feature: f.Feature, Kind: string(f.Kind), In: f.In, Out: f.Out}
			for _, x := range append(model.Features, model.Wells) {
				if x.Kind == f.Kind && x.Index == f.Index {
					line.ModelIn, line.ModelOut = x.In, x.Out
				}
			}
			if line.Kind == "" {
				line.Kind = "wells"
			}
			if d := math.Max(math.Abs(line.In-line.ModelIn), math.Abs(line.Out-line.ModelOut)); d > feature {
				feature = d
				if d > balanceTolerance*through {
					worst = fmt.Sprintf("%s %s differs by %.4g m³/d %s", line.Kind, line.Feature, d, s.name)
				}
			}
			e.Lines = append(e.Lines, line)
		}
		a.e.Balances = append(a.e.Balances, e)
	}
	for i := range a.booked {
		a.booked[i].ledger, a.booked[i].b = nil, nil // large, and done with
	}
	l := plan.EvidenceLine{Check: "Water balance of every node and feature, recomputed", Unit: "share of the throughflow",
		How:    "flows between nodes from the gradient of head and each zone's transmissivity, control volumes, recharge, leakage, rivers, springs and edges from their records; nothing is taken from the solved matrix",
		Reason: "rounding of a direct solve; a wrong or forgotten term shows powers of ten above it", Remedy: "do not use any result: a term of the model is wrong near the place named; send the project files to the makers of the program"}
	l.Sentence = fmt.Sprintf("Of a throughflow of %.0f m³/d, the worst node keeps %.1e m³/d and the whole %.1e m³/d; %s; prescribed heads are within %.2g m of their records.", through, nodal, whole, worst, levels)
	if !(levels <= levelsApart) {
		l.Result = plan.Fail
	}
	figure := math.Max(nodal, math.Max(feature, whole))
	if !(through > atRest) {
		l.Unit, l.Reason = "m³/d", "the water is at rest: nothing but rounding moves"
		a.add(l, figure, atRest)
		return nil
	}
	a.add(l, figure/through, balanceTolerance)
	return nil
}

// mostPoints bounds the points whose influence is solved for to compare pairs: 60 make 1770 pairs.
const mostPoints = 60

// negligibleInfluence is the influence, as a share of the largest, below which a pair is not compared: rounding is all that it holds.
const negligibleInfluence = 1e-9

// reciprocity compares the drawdown at b by a unit rate at a with that at a by a unit rate at b, for wells and receptors' points.
func (a *audit) reciprocity(ctx context.Context) error {
	f := a.j.field
	var nodes []int32
	var names []string
	seen := map[int32]bool{}
	take := func(n int32, name string) {
		if !seen[n] && f.Model.Unknown(n) >= 0 && len(nodes) < mostPoints {
			seen[n] = true
			nodes, names = append(nodes, n), append(names, name)
		}
	}
	for w := range f.Wells {
		take(f.Node(w), f.Wells[w].ID)
	}
	for _, x := range f.FixedFunctionals() {
		if q := x.Quantity; len(q.Nodes) == 1 && q.Weights[0] == 1 {
			take(q.Nodes[0], x.Name)
		}
	}
	l := plan.EvidenceLine{Check: "Reciprocity", Unit: "share", How: "drawdown at b by a unit rate at a beside that at a by a unit rate at b, for wells and receptors' points, one solve a point",
		Reason: "equal in any confined aquifer; rounding of two solves", Remedy: "do not use sensitivities: the matrix or the adjoint solves are wrong"}
	if len(nodes) < 2 {
		l.Result, l.Sentence = plan.NotDone, "There are fewer than two points."
		a.e.Add(l)
		return nil
	}
	fs := make([]adjoint.Functional, len(nodes))
	for i, n := range nodes {
		fs[i] = adjoint.Functional{Name: names[i], Quantity: f.Model.HeadAt(n)}
	}
	solved, err := adjoint.Solve(ctx, f.Model, a.state.State, fs, nodes, nil, nil)
	if err != nil {
		return err
	}
	largest, worst, pair, pairs := 0.0, 0.0, "", 0
	for i := range nodes {
		largest = math.Max(largest, solved.At[i][i])
	}
	for i := range nodes {
		for k := i + 1; k < len(nodes); k++ {
			ab, ba := solved.At[i][k], solved.At[k][i]
			size := math.Max(math.Abs(ab), math.Abs(ba))
			if size <= negligibleInfluence*largest {
				continue
			}
			pairs++
			if d := math.Abs(ab-ba) / size; !(d <= worst) {
				worst, pair = d, names[i]+" and "+names[k]
			}
		}
	}
	l.Sentence = fmt.Sprintf("%d pairs of %d points; the largest difference is that of %s.", pairs, len(nodes), orNone(pair))
	a.add(l, worst, reciprocityTolerance)
	return nil
}

func orNone(s string) string {
	if s == "" {
		return "none"
	}
	return s
}

// superposition compares, at the plan, the sum of the wells' contributions with the change of a full solve.
func (a *audit) superposition(context.Context) error {
	l := plan.EvidenceLine{Check: "Superposition at the plan", Unit: "share of the largest change", How: "every receptor's and bore's change as the sum of sensitivity x rate, beside the change of a full solve at the plan",
		Reason: "equal where no feature switches; what rounding leaves on ill-conditioned sites", Remedy: "do not use contributions and prices: a sensitivity is wrong, or the model is not linear"}
	if a.j.field.Switching {
		l.Result, l.Sentence = plan.NotDone, "A feature switches, so that changes are no sum of the wells' parts; sensitivities are checked at the plan's state."
		a.e.Add(l)
		return nil
	}
	difference, largest := map[string]float64{}, map[string]float64{}
	far, at := 0.0, ""
	for i, row := range a.rows {
		sum := 0.0
		for w, q := range a.rates {
			sum += row.Slope[w] * q
		}
		solved := a.state.Rows[i].Change
		d := math.Abs(sum - solved)
		difference[row.Unit], largest[row.Unit] = math.Max(difference[row.Unit], d), math.Max(largest[row.Unit], math.Max(math.Abs(sum), math.Abs(solved)))
		if size := math.Max(math.Abs(sum), math.Abs(solved)); size > 0 && d/size > far {
			far, at = d/size, a.receptorWords(i)
		}
	}
	worst := 0.0
	for _, unit := range []string{"m", "m3/d", "1"} {
		if largest[unit] > 0 {
			worst = math.Max(worst, difference[unit]/largest[unit])
		}
	}
	l.Sentence = fmt.Sprintf("%d quantities; against its own change the farthest is %s, by %.1e.", len(a.rows), orNone(at), far)
	a.add(l, worst, plan.SuperpositionTolerance)
	return nil
}
