package convex

import (
	"fmt"
	"math"
)

// Sense says whether the cost is to be made small or large.
type Sense int

// The two senses.
const (
	Minimise Sense = iota
	Maximise
)

// String returns the name of the sense.
func (s Sense) String() string {
	switch s {
	case Minimise:
		return "minimise"
	case Maximise:
		return "maximise"
	}
	return fmt.Sprintf("Sense(%d)", int(s))
}

// Column is one decision: its cost per unit and its bounds. A missing bound is an infinity of the right sign.
type Column struct {
	Name  string
	Cost  float64 // objective per unit of the column [-]
	Lower float64 // -Inf when there is none [-]
	Upper float64 // +Inf when there is none [-]
}

// Row is one limit: Lower <= Coefficients'x <= Upper. Equal bounds make an equation, two infinities a row that only reports.
type Row struct {
	Name         string
	Coefficients []float64 // one for each column [-]
	Lower        float64   // -Inf when there is none [-]
	Upper        float64   // +Inf when there is none [-]
}

// Problem is a linear or quadratic programme with dense rows. The only way to build one is NewProblem, so that every Problem holds
// finite costs and coefficients and bounds in order.
type Problem struct {
	sense    Sense
	columns  []Column
	rowName  []string
	rowLower []float64
	rowUpper []float64
	a        [][]float64 // coefficients by row, each len(columns) long
	unitRow  []int       // helper columns with a single entry, behind the dense ones: the row ...
	unitSign []float64   // ... and the entry, +1 or -1
	unit     []Column    // ... with cost and bounds
	hessian  *hessian    // of the dense columns, nil for a linear programme; never changed
}

// maxEntries caps rows x columns, so that a wrong size is an error and not an attempt to take all memory (8 bytes each).
const maxEntries = 1 << 31

// NewProblem makes a problem with the given columns and no rows. All faults of the data are reported at once in a *DataError.
func NewProblem(sense Sense, columns []Column) (*Problem, error) {
	var faults faultList
	if sense != Minimise && sense != Maximise {
		faults.add(BadSense, partProblem, 0, "", float64(sense), "the sense is neither minimise nor maximise")
	}
	for j, c := range columns {
		faults.checkCost(j, c.Name, c.Cost)
		faults.checkBounds(partColumn, j, c.Name, c.Lower, c.Upper)
	}
	if err := faults.err(); err != nil {
		return nil, err
	}
	return &Problem{sense: sense, columns: append([]Column(nil), columns...)}, nil
}

// AddRow appends a limit and returns its index. The coefficients are copied. Faults are reported in a *DataError and leave the
// problem as it was.
func (p *Problem) AddRow(r Row) (rowIndex int, err error) {
	i := len(p.rowName)
	var faults faultList
	if len(r.Coefficients) != len(p.columns) {
		faults.add(BadSize, partRow, i, r.Name, float64(len(r.Coefficients)),
			fmt.Sprintf("%d coefficients for %d columns", len(r.Coefficients), len(p.columns)))
	}
	if (i+1)*max(len(p.columns), 1) > maxEntries {
		faults.add(BadSize, partRow, i, r.Name, float64(i), "the problem is too large for dense storage")
	}
	if !allFinite(r.Coefficients) {
		for j, v := range r.Coefficients {
			if !finite(v) {
				faults.add(NotFinite, partRow, i, r.Name, v, fmt.Sprintf("coefficient of column %d is not a finite number", j))
			}
		}
	}
	faults.checkBounds(partRow, i, r.Name, r.Lower, r.Upper)
	if err := faults.err(); err != nil {
		return -1, err
	}
	p.a = append(p.a, append([]float64(nil), r.Coefficients...))
	p.rowName = append(p.rowName, r.Name)
	p.rowLower = append(p.rowLower, r.Lower)
	p.rowUpper = append(p.rowUpper, r.Upper)
	return i, nil
}

// SetBounds changes the bounds of column j. It panics when there is no such column.
func (p *Problem) SetBounds(j int, lower, upper float64) error {
	p.mustColumn(j)
	var faults faultList
	faults.checkBounds(partColumn, j, p.columns[j].Name, lower, upper)
	if err := faults.err(); err != nil {
		return err
	}
	p.columns[j].Lower, p.columns[j].Upper = lower, upper
	return nil
}

// SetCost changes the cost of column j. It panics when there is no such column.
func (p *Problem) SetCost(j int, cost float64) error {
	p.mustColumn(j)
	var faults faultList
	faults.checkCost(j, p.columns[j].Name, cost)
	if err := faults.err(); err != nil {
		return err
	}
	p.columns[j].Cost = cost
	return nil
}

// SetRowBounds changes the bounds of row i. It panics when there is no such row.
func (p *Problem) SetRowBounds(i int, lower, upper float64) error {
	p.mustRow(i)
	var faults faultList
	faults.checkBounds(partRow, i, p.rowName[i], lower, upper)
	if err := faults.err(); err != nil {
		return err
	}
	p.rowLower[i], p.rowUpper[i] = lower, upper
	return nil
}

// Sense returns the sense of the problem.
func (p *Problem) Sense() Sense { return p.sense }

// Columns returns the number of columns.
func (p *Problem) Columns() int { return len(p.columns) }

// Rows returns the number of rows.
func (p *Problem) Rows() int { return len(p.rowName) }

// Column returns column j. It panics when there is no such column.
func (p *Problem) Column(j int) Column {
	p.mustColumn(j)
	return p.columns[j]
}

// Row returns row i; its coefficients are a copy. It panics when there is no such row.
func (p *Problem) Row(i int) Row {
	p.mustRow(i)
	return Row{
		Name:         p.rowName[i],
		Coefficients: append([]float64(nil), p.row(i)...),
		Lower:        p.rowLower[i],
		Upper:        p.rowUpper[i],
	}
}

// Clone returns a copy that shares nothing with p.
func (p *Problem) Clone() *Problem {
	q := *p
	q.columns = append([]Column(nil), p.columns...)
	q.rowName = append([]string(nil), p.rowName...)
	q.rowLower = append([]float64(nil), p.rowLower...)
	q.rowUpper = append([]float64(nil), p.rowUpper...)
	q.a = make([][]float64, len(p.a))
	for i, row := range p.a {
		q.a[i] = append([]float64(nil), row...)
	}
	q.unitRow = append([]int(nil), p.unitRow...)
	q.unitSign = append([]float64(nil), p.unitSign...)
	q.unit = append([]Column(nil), p.unit...)
	return &q
}

// row returns the stored coefficients of row i.
func (p *Problem) row(i int) []float64 { return p.a[i] }

func (p *Problem) mustColumn(j int) {
	if j < 0 || j >= len(p.columns) {
		panic(fmt.Sprintf("convex: no column %d among %d", j, len(p.columns)))
	}
}

func (p *Problem) mustRow(i int) {
	if i < 0 || i >= len(p.rowName) {
		panic(fmt.Sprintf("convex: no row %d among %d", i, len(p.rowName)))
	}
}

func finite(v float64) bool { return math.Abs(v) <= math.MaxFloat64 }
