package convex

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func TestHostileData(t *testing.T) {
	nan := math.NaN()
	cases := []struct {
		name   string
		column Column
		kinds  []Fault
		reason string
	}{
		{"cost NaN", Column{Cost: nan}, []Fault{NotFinite}, "no order"},
		{"cost infinite", Column{Cost: inf}, []Fault{NotFinite}, "no sum"},
		{"lower NaN", Column{Lower: nan}, []Fault{NotFinite}, "no order"},
		{"upper NaN", Column{Upper: nan}, []Fault{NotFinite}, "no order"},
		{"crossed", Column{Lower: 2, Upper: 1}, []Fault{BoundsCrossed}, "nothing between"},
		{"lower +Inf", Column{Lower: inf, Upper: inf}, []Fault{BoundsInfinite}, "nothing reaches it"},
		{"upper -Inf", Column{Lower: -inf, Upper: -inf}, []Fault{BoundsInfinite}, "nothing reaches it"},
		{"all at once", Column{Cost: nan, Lower: 2, Upper: 1}, []Fault{NotFinite, BoundsCrossed}, "both are told"},
		{"fine", Column{Cost: -1, Lower: -inf, Upper: inf}, nil, "free"},
	}
	for _, c := range cases {
		_, err := NewProblem(Minimise, []Column{c.column})
		checkFaults(t, c.name+" ("+c.reason+")", err, c.kinds)
		p := mustProblem(t, Minimise, []Column{{Name: "W1", Upper: 1}}, Row{Name: "spring", Coefficients: []float64{1}, Upper: 1})
		if c.column.Cost == c.column.Cost && finite(c.column.Cost) {
			checkFaults(t, c.name+" set", p.SetBounds(0, c.column.Lower, c.column.Upper), c.kinds)
			checkFaults(t, c.name+" set row", p.SetRowBounds(0, c.column.Lower, c.column.Upper), c.kinds)
		} else {
			checkFaults(t, c.name+" set cost", p.SetCost(0, c.column.Cost), []Fault{NotFinite})
		}
		if len(c.kinds) > 0 && (p.Column(0).Cost != 0 || p.Column(0).Upper != 1) {
			t.Errorf("%s: a refused change was made", c.name)
		}
	}
	p := mustProblem(t, Minimise, []Column{{Upper: 1}, {Upper: 1}})
	_, err := p.AddRow(Row{Coefficients: []float64{1}})
	checkFaults(t, "too few coefficients", err, []Fault{BadSize})
	_, err = p.AddRow(Row{Coefficients: []float64{nan, inf}, Lower: 1, Upper: 0})
	checkFaults(t, "coefficients", err, []Fault{NotFinite, NotFinite, BoundsCrossed})
	if p.Rows() != 0 {
		t.Error("a refused row was kept")
	}
	_, err = NewProblem(Sense(7), nil)
	checkFaults(t, "sense", err, []Fault{BadSense})
}

func checkFaults(t *testing.T, name string, err error, kinds []Fault) {
	t.Helper()
	if len(kinds) == 0 {
		if err != nil {
			t.Errorf("%s: %v", name, err)
		}
		return
	}
	var data *DataError
	if !errors.As(err, &data) {
		t.Errorf("%s: %v is no DataError", name, err)
		return
	}
	if len(data.Faults) != len(kinds) {
		t.Errorf("%s: %v", name, data)
		return
	}
	for k, f := range data.Faults {
		if f.Kind != kinds[k] {
			t.Errorf("%s: fault %d is %v", name, k, f)
		}
	}
	if !strings.HasPrefix(err.Error(), "convex: ") {
		t.Errorf("%s: message %q", name, err)
	}
}

func TestManyFaultsAreCut(t *testing.T) {
	_, err := NewProblem(Minimise, make([]Column, 80))
	if err != nil {
		t.Fatal(err)
	}
	columns := make([]Column, 80)
	for j := range columns {
		columns[j].Cost = math.NaN()
	}
	_, err = NewProblem(Minimise, columns)
	if !strings.HasSuffix(err.Error(), "and 30 more") {
		t.Errorf("%v", err)
	}
}

func TestCallerMistakesPanic(t *testing.T) {
	p := mustProblem(t, Minimise, []Column{{Upper: 1}})
	for name, f := range map[string]func(){
		"column":    func() { p.Column(1) },
		"row":       func() { p.Row(0) },
		"bounds":    func() { _ = p.SetBounds(-1, 0, 1) },
		"rowBounds": func() { _ = p.SetRowBounds(0, 0, 1) },
		"cost":      func() { _ = p.SetCost(3, 0) },
		"certify":   func() { Certify(p, &Solution{Status: Optimal}) },
	} {
		func() {
			defer func() {
				if r := recover(); r == nil || !strings.HasPrefix(r.(string), "convex: ") {
					t.Errorf("%s: %v", name, r)
				}
			}()
			f()
		}()
	}
}

func TestCloneSharesNothing(t *testing.T) {
	p := mustProblem(t, Maximise, []Column{{Cost: 1, Upper: 5}}, atMost(3, 1))
	q := p.Clone()
	if err := q.SetRowBounds(0, 0, 1); err != nil {
		t.Fatal(err)
	}
	if err := q.SetCost(0, 9); err != nil {
		t.Fatal(err)
	}
	if p.Row(0).Upper != 3 || p.Column(0).Cost != 1 {
		t.Error("the copy changed the original")
	}
}
