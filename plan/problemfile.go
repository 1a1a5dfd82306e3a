package plan

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"strings"

	"springbound/plan/convex"
)

// ProblemFile is the programme that a report's rates or conflict come from, ready for any other solver: every aim written as one to be made
// small, names that the open MPS format can hold, and columns that say which wells run in place of ranges that leave zero out.
type ProblemFile struct {
	Model    *convex.Model // its objective at the optimum is the aim: a yield and a headroom with the sign turned
	Comments []string      // what it is, and what every column and row stands for
}

// Write writes the programme in the free MPS format, with QUADOBJ for a quadratic aim, below its comments.
func (f *ProblemFile) Write(w io.Writer) error {
	var head bytes.Buffer
	for _, line := range f.Comments {
		fmt.Fprintln(&head, "*", strings.Join(strings.Fields(line), " "))
	}
	if _, err := head.WriteTo(w); err != nil {
		return fmt.Errorf("plan: problem file: %w", err)
	}
	return convex.WriteMPS(w, f.Model)
}

// longestName is how long a name in a problem file may be: readers stop at 255 characters at the latest.
const longestName = 60

// fileNames hands out names of letters, digits, points, hyphens and underscores, each once.
type fileNames map[string]bool

func (taken fileNames) legal(kind, name string) string {
	clean := strings.Map(func(r rune) rune {
		switch {
		case r >= 'a' && r <= 'z', r >= 'A' && r <= 'Z', r >= '0' && r <= '9', r == '.', r == '-', r == '_':
			return r
		}
		return '_'
	}, kind+"_"+name)
	clean = clean[:min(len(clean), longestName)]
	out := clean
	for k := 2; taken[out]; k++ {
		out = fmt.Sprintf("%s_%d", clean, k)
	}
	taken[out] = true
	return out
}

// problemDraft collects the columns and rows of a problem file.
type problemDraft struct {
	columns []convex.Column
	whole   []int
	rows    []convex.Row
	hessian []convex.HessianEntry
	notes   []string
}

// problemFile writes down the programme of a round: g as it was solved, or with the choice of running wells m where there was one.
// sol is its solution, nil where there is none.
func (p *planner) problemFile(g *programme, m *mixedProgramme, sol *convex.Solution) (*ProblemFile, error) {
	d := &problemDraft{}
	p.draftColumns(d, g, m)
	p.draftRows(d, g, m)
	sign := 1.0
	if g.problem.Sense() == convex.Maximise {
		sign = -1
	}
	for j := range d.columns {
		d.columns[j].Cost = 0
		if j < g.problem.Columns() {
			d.columns[j].Cost = tidy(sign * g.problem.Column(j).Cost)
		}
	}
	for _, e := range g.problem.HessianEntries() {
		e.Value *= sign
		d.hessian = append(d.hessian, e)
	}
	problem, err := convex.NewProblem(convex.Minimise, d.columns)
	if err != nil {
		return nil, fmt.Errorf("plan: problem file: %w", err)
	}
	for _, r := range d.rows {
		if _, err := problem.AddRow(r); err != nil {
			return nil, fmt.Errorf("plan: problem file: %w", err)
		}
	}
	if len(d.hessian) > 0 {
		if err := problem.SetHessian(convex.Hessian{Entries: d.hessian}); err != nil {
			return nil, fmt.Errorf("plan: problem file: %w", err)
		}
	}
	f := &ProblemFile{Model: &convex.Model{Name: string(p.setup.Aim), Problem: problem, ObjectiveName: "aim", Integer: d.whole}}
	if sol != nil && p.curved != nil {
		f.Model.Constant = tidy(-p.aimValue - sign*sol.Objective)
	}
	f.Comments = append(p.problemWords(g, m, sol), d.notes...)
	return f, nil
}

// keep keeps the programme of a round where it was asked for.
func (p *planner) keep(g *programme, m *mixedProgramme, sol *convex.Solution) (err error) {
	if p.keepProblem {
		p.problem, err = p.problemFile(g, m, sol)
	}
	return err
}

// problemWords says what the programme is.
func (p *planner) problemWords(g *programme, m *mixedProgramme, sol *convex.Solution) []string {
	out := []string{"The programme of a pumping plan, aim " + string(p.setup.Aim) + "; rates in m3/d, pumping positive."}
	switch {
	case sol == nil:
		out = append(out, "It has no solution: no rates keep every limit. The aim is left out.")
	case p.setup.Aim == MostYield:
		out = append(out, "The aim is to be made small: minus the total rate, m3/d.")
	case p.setup.Aim == MostHeadroom:
		out = append(out, "The aim is to be made small: minus the share of every limit that is kept free.")
	case p.setup.Aim == ClosestToRequests:
		out = append(out, "The aim is to be made small: the sum of ((rate - requested)/largest rate) squared. Its constant stands, with the sign turned, as the right-hand side of the row aim.")
	case p.curved.quadratic():
		out = append(out, "The aim is to be made small: the pumping energy, kWh/d.")
	default:
		out = append(out, "The aim is to be made small: the pumping energy, kWh/d. With turbulent losses it is cubic: this is the last quadratic problem, which touches it to second order at the plan.",
			"Its constant stands, with the sign turned, as the right-hand side of the row aim.")
	}
	if len(p.cuts) > 0 {
		out = append(out, "Limits on rows that are not linear are there as the tangents that the plan was found with.")
	}
	if m != nil {
		out = append(out, "Columns between markers are whole numbers: 1 where a well runs, 0 where it stands still.")
	}
	return out
}

// draftColumns writes down the rates, the share kept free and which wells run.
func (p *planner) draftColumns(d *problemDraft, g *programme, m *mixedProgramme) {
	s, taken := p.setup, fileNames{}
	add := func(kind, name, words string, c convex.Column) {
		c.Name = taken.legal(kind, name)
		d.columns = append(d.columns, c)
		d.notes = append(d.notes, "column "+c.Name+": "+words)
	}
	for k, i := range s.decided {
		c := g.problem.Column(k)
		if m != nil {
			if c = m.Column(k); s.switched(i) {
				c.Lower, c.Upper = math.Min(0, c.Lower), math.Max(0, c.Upper)
			}
		}
		add("well", s.Wells[i].ID, "rate of well "+s.Wells[i].ID+", m3/d", c)
	}
	if g.share >= 0 {
		add("headroom", "share", "share of every limit that is kept free", g.problem.Column(g.share))
	}
	if m == nil {
		return
	}
	for j := g.problem.Columns(); j < m.Columns(); j++ {
		d.whole = append(d.whole, len(d.columns))
		c := m.Column(j)
		add("choice", c.Name, c.Name+": 1, or 0", c)
	}
	for _, j := range m.SemiContinuous {
		if i := s.decided[j]; m.indicator[i] < 0 {
			x, y := m.Column(j), len(d.columns)
			d.whole = append(d.whole, y)
			add("choice", s.Wells[i].ID+" runs", s.Wells[i].ID+" runs: 1, or 0", convex.Column{Upper: 1})
			for _, end := range []struct {
				name         string
				rate         float64
				lower, upper float64
			}{{"largest", x.Upper, math.Inf(-1), 0}, {"least", x.Lower, 0, math.Inf(1)}} {
				a := make([]float64, y+1)
				a[j], a[y] = 1, -end.rate
				d.rows = append(d.rows, convex.Row{Name: s.Wells[i].ID + " within its " + end.name + " rate when it runs", Coefficients: a, Lower: end.lower, Upper: end.upper})
			}
		}
	}
}

// draftRows writes down limits, levels, quotas, the demand and the rules about running wells, in front of those that columns brought.
func (p *planner) draftRows(d *problemDraft, g *programme, m *mixedProgramme) {
	s, taken := p.setup, fileNames{"aim": true}
	linking := d.rows
	d.rows = nil
	add := func(kind, name string, r convex.Row) {
		a := make([]float64, len(d.columns))
		copy(a, r.Coefficients)
		words := r.Name
		r.Name, r.Coefficients = taken.legal(kind, name), a
		d.rows = append(d.rows, r)
		d.notes = append(d.notes, "row "+r.Name+": "+words)
	}
	from := g.problem
	if m != nil {
		from = m.Problem
	}
	for i := 0; i < from.Rows(); i++ {
		r := from.Row(i)
		if i >= len(g.owners) {
			add("rule", r.Name, r)
			continue
		}
		switch o := g.owners[i]; o.kind {
		case ofQuota:
			add("quota", s.quotas[o.index].name+" "+s.quotas[o.index].basis, r)
		case ofDemand:
			add("demand", "total", r)
		default:
			b := p.bounds[o.index]
			if b.limit >= 0 {
				add("limit", s.Limits[b.limit].ID, r)
			} else {
				add("level", s.Wells[b.target.well].ID, r)
			}
		}
	}
	for _, r := range linking {
		add("rule", r.Name, r)
	}
}
