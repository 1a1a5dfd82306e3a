package workbook

import (
	"math"
	"strconv"
	"strings"
)

// A term is a numeric formula text together with the value that it has now. Both grow side by side, operation by operation, so
// the number stored in a cell is what the cell's formula gives, in the same order of operations.
type term struct {
	text  string
	value float64
	bond  int // how tightly the outermost operation binds: bondSum, bondProduct, bondAtom
}

const (
	bondSum = iota + 1
	bondProduct
	bondAtom
)

// within returns the term's text, in parentheses where its outermost operation binds less than least.
func (t term) within(least int) string {
	if t.bond >= least {
		return t.text
	}
	return "(" + t.text + ")"
}

// number returns a literal.
func number(x float64) term {
	text := strconv.FormatFloat(x, 'f', -1, 64) // no exponent: not every program's formula reader takes one
	if x < 0 {
		return term{text, x, bondSum}
	}
	return term{text, x, bondAtom}
}

func (t term) plus(u term) term {
	return term{t.within(bondSum) + "+" + u.within(bondProduct), t.value + u.value, bondSum}
}

func (t term) minus(u term) term {
	return term{t.within(bondSum) + "-" + u.within(bondProduct), t.value - u.value, bondSum}
}

func (t term) times(u term) term {
	return term{t.within(bondProduct) + "*" + u.within(bondAtom), t.value * u.value, bondProduct}
}

func (t term) over(u term) term {
	return term{t.within(bondProduct) + "/" + u.within(bondAtom), t.value / u.value, bondProduct}
}

func call(name string, value float64, arguments ...string) term {
	return term{name + "(" + strings.Join(arguments, ",") + ")", value, bondAtom}
}

func absolute(t term) term { return call("ABS", math.Abs(t.value), t.text) }
func logarithm(t term) term {
	return call("LN", math.Log(t.value), t.text)
}
func circle() term { return call("PI", math.Pi) }

// roundDigits is the number of decimals that differences of nearly equal numbers are rounded to: a billionth of a metre or of a
// m³/d means nothing here, and the last bits of a solver's answer must not print as -0.00. Gradients get roundDigitsGradient.
const (
	roundDigits         = 9
	roundDigitsGradient = 15
)

// rounded returns ROUND(t, digits); the added zero turns a negative zero into zero.
func rounded(t term, digits int) term {
	scale := math.Pow(10, float64(digits))
	return term{"ROUND(" + t.text + "," + strconv.Itoa(digits) + ")+0", math.Round(t.value*scale)/scale + 0, bondSum}
}

// A span is a block of cells in one row or column with the values they hold; empty cells and texts count as zero, as in the
// spreadsheet's own sums.
type span struct {
	text   string
	values []float64
}

// sumProduct returns SUMPRODUCT over spans of one direction and length.
func sumProduct(spans ...span) term {
	var sum float64
	texts := make([]string, len(spans))
	for k, s := range spans {
		if len(s.values) != len(spans[0].values) {
			panic("workbook: spans of unequal length")
		}
		texts[k] = s.text
	}
	for i := range spans[0].values {
		product := 1.0
		for _, s := range spans {
			product *= s.values[i]
		}
		sum += product
	}
	return call("SUMPRODUCT", sum, texts...)
}

// sumOf returns SUM over spans.
func sumOf(spans ...span) term {
	var sum float64
	texts := make([]string, len(spans))
	for k, s := range spans {
		texts[k] = s.text
		for _, v := range s.values {
			sum += v
		}
	}
	return call("SUM", sum, texts...)
}

// A condition is a comparison and whether it is true now.
type condition struct {
	text  string
	holds bool
}

func less(a, b term) condition { return condition{a.text + "<" + b.text, a.value < b.value} }
func atMost(a, b term) condition {
	return condition{a.text + "<=" + b.text, a.value <= b.value}
}
func more(a, b term) condition  { return condition{a.text + ">" + b.text, a.value > b.value} }
func equal(a, b term) condition { return condition{a.text + "=" + b.text, a.value == b.value} }

// choose returns IF(c, a, b) for numbers.
func choose(c condition, a, b term) term {
	value := b.value
	if c.holds {
		value = a.value
	}
	return call("IF", value, c.text, a.text, b.text)
}

// A phrase is a formula text that gives words, with the words it gives now.
type phrase struct {
	text  string
	value string
}

// words returns a literal; only the package's own words come here, never a name from the report.
func words(s string) phrase { return phrase{`"` + strings.ReplaceAll(s, `"`, `""`) + `"`, s} }

// chooseWords returns IF(c, a, b) for words.
func chooseWords(c condition, a, b phrase) phrase {
	value := b.value
	if c.holds {
		value = a.value
	}
	return phrase{"IF(" + c.text + "," + a.text + "," + b.text + ")", value}
}

// A wordSpan is a block of cells that hold words.
type wordSpan struct {
	text   string
	values []string
}

// countWord returns the sum of COUNTIF(span, word) over the spans.
func countWord(word string, spans ...wordSpan) term {
	total := number(0)
	for k, s := range spans {
		n := 0
		for _, v := range s.values {
			if v == word {
				n++
			}
		}
		one := call("COUNTIF", float64(n), s.text, words(word).text)
		if k == 0 {
			total = one
		} else {
			total = total.plus(one)
		}
	}
	return total
}

// sumWhere returns SUMIFS(amounts, group, word, amounts, sign) with sign ">0" or "<0".
func sumWhere(amounts span, group wordSpan, word, sign string) term {
	var sum float64
	for i, v := range amounts.values {
		if group.values[i] == word && (sign == ">0" && v > 0 || sign == "<0" && v < 0) {
			sum += v
		}
	}
	return call("SUMIFS", sum, amounts.text, group.text, words(word).text, amounts.text, words(sign).text)
}
