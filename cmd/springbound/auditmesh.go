package main

import (
	"context"
	"fmt"
	"math"

	"springbound/adjoint"
	"springbound/aquifer"
	"springbound/plan"
)

const (
	// mostRefinedNodes bounds the finest mesh of the refinement study: about 1.3 gigabytes and ten seconds.
	mostRefinedNodes = 1000000
	// meshOrder is the order that the method has where heads are smooth; a larger one is an accident of three meshes, and is not counted on.
	meshOrder = 2
	// slowestOrder is the observed order below which three meshes say little; the safety factor is then that of two meshes (Eça & Hoekstra 2014, J.
	// Comput. Phys. 262).
	slowestOrder = 0.5
	// safetyOfThree and safetyOfTwo are the factors of the grid convergence index (Roache 1994, J. Fluids Eng. 116; ASME V&V 20).
	safetyOfThree, safetyOfTwo = 1.25, 3
	// meshRounding is the difference of two meshes, as a share of the figure, that rounding explains.
	meshRounding = 1e-9
)

// convergence computes the plan's figures on three meshes, each with half the edge length of the one before.
func (a *audit) convergence(ctx context.Context) error {
	l := plan.EvidenceLine{Check: "Mesh: grid convergence index of every receptor's change and every running well's level", Unit: "per cent",
		How:    "the plan's rates on three meshes, edge length halved from one to the next: observed order, Richardson's value, index with a safety factor of 1.25, or 3 where no order shows (Roache 1994; ASME V&V 20)",
		Reason: "the accuracy asked of the mesh, " + fmt.Sprintf("%.3g %%", 100*a.accuracy()) + statedWords(a.j.project.Mesh.Accuracy > 0) + "; per cent of the change, of a level per cent of the drawdown in the bore",
		Remedy: "ask for more nodes or a smaller finest size in [mesh], and plan again"}
	fields, ofPlan, err := a.meshes(ctx, &l)
	if err != nil {
		return err
	}
	a.e.Convergence = convergenceLines(fields, ofPlan)
	worst, at, behaviour := 0.0, "none", map[string]int{}
	var order []string
	for _, c := range a.e.Convergence {
		if behaviour[c.Behaviour]++; behaviour[c.Behaviour] == 1 {
			order = append(order, c.Behaviour)
		}
		if c.Index == nil {
			continue
		}
		if !(*c.Index <= worst) {
			worst, at = *c.Index, c.What+" "+c.ID
		}
	}
	l.Sentence += fmt.Sprintf("%d figures on meshes of %d, %d and %d nodes; the largest index is that of %s:", len(a.e.Convergence), a.e.Meshes[0].Nodes, a.e.Meshes[1].Nodes, a.e.Meshes[2].Nodes, at)
	for k, b := range order {
		mark := ","
		if k == 0 {
			mark = ""
		}
		l.Sentence += fmt.Sprintf("%s %d %s", mark, behaviour[b], b)
	}
	l.Sentence += "."
	a.add(l, worst, 100*a.accuracy())
	return nil
}

// meshFigures are the plan's figures on one mesh.
type meshFigures struct {
	ids    []string
	whats  []string
	units  []string
	values []float64
	scales []float64
}

// meshes computes the figures on three meshes, coarsest first, and says which one is the plan's. Where refined ones would not fit it goes the other
// way.
func (a *audit) meshes(ctx context.Context, l *plan.EvidenceLine) ([]*meshFigures, int, error) {
	o := a.j.modelOptions(a.workers)
	nodes := len(a.j.field.Model.Mesh.X)
	here := a.figures(a.j.field, a.state)
	mine := plan.EvidenceMesh{Nodes: nodes, How: "the plan's mesh", OfPlan: true, Finished: true}
	if nodes*16 <= a.mostNodes {
		a.e.Meshes = []plan.EvidenceMesh{mine}
		all := []*meshFigures{here}
		for times := 1; times <= 2; times++ {
			a.j.progress.report("checking: refined meshes", times-1, 2)
			m, err := a.j.field.Model.Bisected(ctx, o, times)
			if err != nil {
				return nil, 0, err
			}
			f, err := a.figuresOn(ctx, m)
			if err != nil {
				return nil, 0, err
			}
			all = append(all, f)
			a.e.Meshes = append(a.e.Meshes, plan.EvidenceMesh{Nodes: len(m.Mesh.X), How: fmt.Sprintf("every triangle cut into four, %d times over", times), Finished: true})
		}
		return all, 0, nil
	}
	l.Sentence = fmt.Sprintf("Cutting every triangle twice would make about %d nodes, more than %d: not done; two coarser meshes stand in for it. ", nodes*16, a.mostNodes)
	a.e.Meshes = []plan.EvidenceMesh{{}, {}, mine}
	all := []*meshFigures{nil, nil, here}
	o.Finest, o.Coarsest, o.Growth = a.j.field.Model.FinestSize, a.j.field.Model.Mesh.Quality.Coarsest, a.j.growth()
	for k, scale := range []float64{4, 2} {
		o.Scale = scale
		m, err := aquifer.Build(ctx, &a.j.project.Site, o)
		if err != nil {
			return nil, 0, err
		}
		if all[k], err = a.figuresOn(ctx, m); err != nil {
			return nil, 0, err
		}
		a.e.Meshes[k] = plan.EvidenceMesh{Nodes: len(m.Mesh.X), How: fmt.Sprintf("every size and growth times %.0f", scale), Finished: true}
	}
	return all, 2, nil
}

func (a *audit) figuresOn(ctx context.Context, m *aquifer.Model) (*meshFigures, error) {
	f, err := adjoint.NewField(m, a.j.project.Wells, a.j.project.Receptors)
	if err != nil {
		return nil, err
	}
	s, err := f.Changes(ctx, a.rates)
	if err != nil {
		return nil, err
	}
	return a.figures(f, s), nil
}

// figures are every receptor's change and every running well's level.
func (a *audit) figures(f *adjoint.Field, s *adjoint.State) *meshFigures {
	g := &meshFigures{}
	put := func(what, id, unit string, value, scale float64) {
		g.whats, g.ids, g.units = append(g.whats, what), append(g.ids, id), append(g.units, unit)
		g.values, g.scales = append(g.values, value), append(g.scales, scale)
	}
	for i, row := range s.Rows {
		if row.Receptor < 0 {
			continue
		}
		scale := 0.0
		for w, q := range a.rates {
			scale += math.Abs(a.rows[i].Slope[w] * q)
		}
		put("change at", f.Receptors[row.Receptor].ID, a.rows[i].Unit, row.Change, scale)
	}
	for w, q := range a.rates {
		if q != 0 {
			level := wellLevel(f, w, s.Heads, a.rates)
			put("level in well", f.Wells[w].ID, "m", level, a.drawdownSize(w, s.Base[f.Node(w)]-level))
		}
	}
	return g
}

// drawdownSize is the drawdown in a bore; where wells work against each other there, the sum of their parts.
func (a *audit) drawdownSize(w int, drawdown float64) float64 {
	r, size := &a.report.Wells[w], 0.0
	for k, d := range r.DrawdownByWell {
		size += math.Abs(d * a.rates[k])
	}
	return math.Max(math.Abs(drawdown), size)
}

// convergenceLines judges every figure. Scales are those of the plan's mesh.
func convergenceLines(all []*meshFigures, ofPlan int) []plan.ConvergenceLine {
	var out []plan.ConvergenceLine
	for i := range all[0].values {
		c := plan.ConvergenceLine{What: all[0].whats[i], ID: all[0].ids[i], Unit: all[0].units[i], Values: []float64{all[0].values[i], all[1].values[i], all[2].values[i]},
			Scale: all[ofPlan].scales[i]}
		judgeConvergence(&c, ofPlan)
		out = append(out, c)
	}
	return out
}

// judgeConvergence finds observed order, Richardson's value and the grid convergence index of one figure on meshes that halve in size, for the
// coarsest (0) or the finest (2) of them. With c, m, f the values from coarse to fine and R = (m - f)/(c - m):
//
//	0 < R < 1   order p = -log2 R, value f - (m - f)/(2^p - 1)
//	R < 0       the values swing; the index is three times the largest difference
//	R >= 1      differences grow; likewise, of the whole way
func judgeConvergence(c *plan.ConvergenceLine, ofPlan int) {
	first, second := c.Values[0]-c.Values[1], c.Values[1]-c.Values[2]
	largest := math.Max(math.Abs(first), math.Abs(second))
	if !(c.Scale > 0) {
		c.Behaviour = "nothing to compare with: no change"
		return
	}
	index := func(distance, safety float64) {
		v := 100 * safety * math.Abs(distance) / c.Scale
		c.Index = finiteOrNil(v)
	}
	switch ratio := second / first; {
	case largest <= meshRounding*c.Scale:
		c.Behaviour = "too small to tell"
		index(largest, safetyOfTwo)
	case ratio < 0 || second == 0 || first == 0:
		c.Behaviour = "swings"
		index(largest, safetyOfTwo)
	case !(ratio < 1):
		c.Behaviour = "does not settle yet"
		index(math.Abs(first)+math.Abs(second), safetyOfTwo)
	default:
		p := -math.Log2(ratio)
		c.Order = finiteOrNil(p)
		used := math.Exp2(math.Min(p, meshOrder))
		limit := c.Values[2] - second/(used-1)
		c.Richardson = finiteOrNil(limit)
		c.Behaviour = "settles"
		distance, safety := first*used/(used-1), float64(safetyOfThree)
		if ofPlan == 2 {
			distance = second / (used - 1)
		}
		if p < slowestOrder {
			safety, c.Behaviour = safetyOfTwo, "settles slowly"
		}
		index(distance, safety)
	}
}
