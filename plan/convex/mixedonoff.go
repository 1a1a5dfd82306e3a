package convex

import (
	"fmt"
	"math"
)

// OnOff adds a column that is one where the given column runs and zero where it is off, with the two rows that link them:
//
//	x - Upper y <= 0,   x - Lower y >= 0,   y in {0, 1}
//
// and lists the column as zero or within its bounds where these leave zero out. It returns the index of the new column, which costs
// nothing yet and may be given a cost (of starting, of standing by) and used in further rows: y1 + y2 <= 1 excludes, y1 - y2 = 0
// runs together. Both bounds must be finite; otherwise the fault is in a *DataError and the problem is as it was. It panics when there is no such column.
func OnOff(p *MixedProblem, column int) (binary int, err error) {
	p.mustColumn(column)
	x := p.columns[column]
	var faults faultList
	if !finite(x.Lower) || !finite(x.Upper) {
		faults.add(NotFinite, partColumn, column, x.Name, x.Upper,
			fmt.Sprintf("bounds %v and %v: a column that is switched needs two finite ones", x.Lower, x.Upper))
	}
	if p.hessian != nil {
		faults.add(BadHessian, partProblem, 0, "", 0, "a problem with a quadratic cost takes no further columns")
	}
	if err := faults.err(); err != nil {
		return -1, err
	}
	binary = p.appendColumn(Column{Name: x.Name + " on", Upper: 1})
	p.Integer = append(p.Integer, binary)
	if (x.Lower > 0 || x.Upper < 0) && !holds(p.SemiContinuous, column) {
		p.SemiContinuous = append(p.SemiContinuous, column)
	}
	row := func(name string, bound, lower, upper float64) error {
		a := make([]float64, p.Columns())
		a[column], a[binary] = 1, -bound
		_, err := p.AddRow(Row{Name: name, Coefficients: a, Lower: lower, Upper: upper})
		return err
	}
	if err := row(x.Name+" at most", x.Upper, math.Inf(-1), 0); err != nil {
		return -1, err
	}
	if err := row(x.Name+" at least", x.Lower, 0, math.Inf(1)); err != nil {
		return -1, err
	}
	return binary, nil
}

// CountOn adds the row least <= sum of the given columns <= most: how many of the wells with these indicators may run. It returns
// the index of the row. It panics when there is no such column.
func CountOn(p *MixedProblem, name string, binaries []int, least, most float64) (row int, err error) {
	a := make([]float64, p.Columns())
	for _, j := range binaries {
		p.mustColumn(j)
		a[j] = 1
	}
	return p.AddRow(Row{Name: name, Coefficients: a, Lower: least, Upper: most})
}

func holds(list []int, v int) bool {
	for _, w := range list {
		if w == v {
			return true
		}
	}
	return false
}

// appendColumn adds a column with no entries in the rows and returns its index.
func (p *Problem) appendColumn(c Column) int {
	n, m := len(p.columns), len(p.rowName)
	a := make([][]float64, m)
	for i := range a {
		a[i] = make([]float64, n+1)
		copy(a[i], p.row(i))
	}
	p.columns = append(p.columns, c)
	p.a = a
	return n
}
