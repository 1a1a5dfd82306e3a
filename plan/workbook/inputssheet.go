package workbook

const inputsEnd = 13

// Columns of the wells' table that Plan's levels refer to.
const (
	inputOwn       = 10
	inputLinear    = 11
	inputTurbulent = 12
)

// fillInputs writes what the plan was made from: assumptions, wells, observations, balances, mesh and files.
func (b *book) fillInputs() {
	s := b.inputs
	s.setWidths(1, 15, 18, 13, 13, 11, 11, 11, 11, 11, 12, 12, 12, 28)
	s.page = pageSetup{landscape: true, wide: 1, freezeRow: changedRow + 2}
	row := b.assumptionTable(firstRow)
	row = b.wellTable(row + 1)
	row = b.observationTable(row + 1)
	row = b.balanceTables(row + 1)
	row = b.noFlowTable(row + 1)
	row = b.meshTable(row + 1)
	b.fileTable(row + 1)
}

func (b *book) assumptionTable(row int) int {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Assumptions: what each number is and where it comes from")
	if len(b.report.Assumptions) == 0 {
		s.nothing(row, inputsEnd, "The report lists none.")
		return row + 1
	}
	s.heads(row, 1, "Input", "", "Value as used", "", "Lowest", "", "Highest", "", "Basis", "Source", "", "", "")
	for _, j := range [][2]int{{1, 2}, {3, 4}, {5, 6}, {7, 8}, {10, inputsEnd}} {
		s.merge(row, j[0], j[1])
	}
	for _, a := range b.report.Assumptions {
		row++
		s.across(row, 1, 2, a.What, line)
		s.across(row, 3, 4, a.Value, line)
		s.across(row, 5, 6, orWords(a.Low, notStated), line)
		s.across(row, 7, 8, orWords(a.High, notStated), line)
		s.text(row, 9, orWords(a.Basis, notStated), line)
		s.across(row, 10, inputsEnd, orWords(a.Source, notStated), line)
	}
	return row + 1
}

func orWords(s, otherwise string) string {
	if s == "" {
		return otherwise
	}
	return s
}

func (b *book) wellTable(row int) int {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Wells")
	s.heads(row, 1, "Well", "Name", ">x\nm", ">y\nm", ">Radius\nm", ">Present rate\nm³/d", ">Recent rate\nm³/d", ">Licensed rate\nm³/d", ">Requested rate\nm³/d",
		">Own drawdown per rate\nd/m²", ">Linear loss B\nd/m²", ">Turbulent loss C\nd²/m⁵", "Source")
	unknown := with(figures(exactFormat), func(l *look) { l.ink = inkMuted })
	b.inputWells = row + 1
	for _, w := range b.report.Wells {
		row++
		s.text(row, 1, w.ID, strong)
		s.text(row, 2, w.Name, line)
		s.value(row, 3, w.X, figures("#,##0.0"))
		s.value(row, 4, w.Y, figures("#,##0.0"))
		s.value(row, 5, w.RadiusM, figures("0.000"))
		for k, x := range []*float64{w.Present, w.Recent, w.Licensed, w.Requested} {
			if x == nil {
				s.text(row, 6+k, notKnown, unknown)
			} else {
				s.value(row, 6+k, *x, figures(rateFormat(*x)))
			}
		}
		s.value(row, inputOwn, w.OwnPerRate, figures(lossFormat(w.OwnPerRate)))
		s.value(row, inputLinear, w.LinearLoss, figures(lossFormat(w.LinearLoss)))
		s.value(row, inputTurbulent, w.QuadraticLoss, figures(lossFormat(w.QuadraticLoss)))
		s.text(row, inputsEnd, orWords(w.Source, notStated), line)
	}
	return row + 1
}

func lossFormat(x float64) string {
	if x == 0 {
		return "0"
	}
	return "0.00E+00"
}

func (b *book) observationTable(row int) int {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Observations against the state under present pumping")
	if len(b.report.Observations) == 0 {
		s.nothing(row, inputsEnd, "Not calibrated: no observation was given to compare the model with.")
		return row + 1
	}
	s.heads(row, 1, "Observation", "Kind", ">Observed", ">Modelled", ">Modelled less observed", "Unit", "Date", "Source", "", "", "", "", "")
	s.merge(row, 8, inputsEnd)
	for _, o := range b.report.Observations {
		row++
		f := figures(unitFormat(o.Unit, nil, o.Observed, o.Modelled))
		s.text(row, 1, o.ID, line)
		s.text(row, 2, kindWords(o.Kind), line)
		s.value(row, 3, o.Observed, f)
		s.value(row, 4, o.Modelled, f)
		s.formula(row, 5, s.ref(s, row, 4).minus(s.ref(s, row, 3)), f)
		s.text(row, 6, unitWords(o.Unit), line)
		s.text(row, 7, o.Date, line)
		s.across(row, 8, inputsEnd, o.Source, line)
	}
	return row + 1
}

func (b *book) balanceTables(row int) int {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Water balances")
	if len(b.report.Balances) == 0 {
		s.nothing(row, inputsEnd, "Not done: the report holds no water balance.")
		return row + 1
	}
	for _, w := range b.report.Balances {
		s.heads(row, 1, w.State, "", "Kind", ">Into the aquifer\nm³/d", ">Out of it\nm³/d")
		s.merge(row, 1, 2)
		first := row + 1
		for _, l := range w.Lines {
			row++
			f := figures(rateFormat(w.In, w.Out))
			s.across(row, 1, 2, l.Feature, line)
			s.text(row, 3, kindWords(l.Kind), line)
			s.value(row, 4, l.In, f)
			s.value(row, 5, l.Out, f)
		}
		row++
		f := totals(rateFormat(w.In, w.Out))
		s.across(row, 1, 3, "Sum", lineTotal)
		if row > first {
			s.formula(row, 4, sumOf(s.down(s, 4, first, row-1)), f)
			s.formula(row, 5, sumOf(s.down(s, 5, first, row-1)), f)
			b.agree("inflow of the balance: "+w.State, s.at(row, 4).number, w.In, 0)
			b.agree("outflow of the balance: "+w.State, s.at(row, 5).number, w.Out, w.In)
		} else {
			s.value(row, 4, w.In, f)
			s.value(row, 5, w.Out, f)
		}
		row++
		s.across(row, 1, 3, "Balance error, as a share of the throughflow", line)
		s.value(row, 4, w.Error, figures("0.0E+00"))
		s.blank(row, 5, line)
		row += 2
	}
	return row - 1
}

func (b *book) noFlowTable(row int) int {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Outline where nothing was said: taken as no flow")
	if len(b.report.NoFlow) == 0 {
		s.nothing(row, inputsEnd, "None.")
		return row + 1
	}
	s.heads(row, 1, "Stretch", "", ">Length\nm", ">Largest drawdown\nm")
	s.merge(row, 1, 2)
	for _, n := range b.report.NoFlow {
		row++
		s.across(row, 1, 2, n.From, line)
		s.value(row, 3, n.Length, figures(countFormat))
		s.value(row, 4, n.Drawdown, figures("0.000"))
	}
	return row + 1
}

func (b *book) meshTable(row int) int {
	s, m := b.inputs, b.report.Mesh
	row = s.sectionHead(row, inputsEnd, "Mesh")
	hit := "no"
	if m.BudgetHit {
		hit = "yes"
	}
	for _, l := range []struct {
		words  string
		value  float64
		format string
	}{{"Nodes", float64(m.Nodes), countFormat}, {"Triangles", float64(m.Triangles), countFormat}, {"Smallest angle, degrees", m.MinAngle, "0.0"},
		{"Triangles at sharp input", float64(m.SharpInput), countFormat}, {"Finest side, m", m.FinestM, decimals(figuresOf(m.FinestM, 3))},
		{"Coarsest side, m", m.CoarsestM, decimals(figuresOf(m.CoarsestM, 3))}, {"Growth of sides", m.Growth, "0.00"}} {
		s.across(row, 1, 2, l.words, line)
		s.value(row, 3, l.value, figures(l.format))
		row++
	}
	s.across(row, 1, 2, "Was the number of nodes at its limit", line)
	s.text(row, 3, hit, rightWords)
	row++
	for _, n := range m.Notes {
		row = s.paragraph(row, inputsEnd, n, wrapped)
	}
	return row
}

func (b *book) fileTable(row int) {
	s := b.inputs
	row = s.sectionHead(row, inputsEnd, "Files that the plan was made from")
	if len(b.report.Inputs) == 0 {
		s.nothing(row, inputsEnd, "The report lists none.")
		return
	}
	s.heads(row, 1, "File", "", "", "SHA-256", "", "", "", "", "", "")
	s.merge(row, 1, 3)
	s.merge(row, 4, 10)
	even := with(line, func(l *look) { l.font = fontEven })
	for _, f := range b.report.Inputs {
		row++
		s.across(row, 1, 3, f.File, line)
		s.across(row, 4, 10, f.SHA256, even)
	}
}
