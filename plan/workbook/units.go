package workbook

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// daysPerYear turns a mean rate into a yearly volume and back [d].
const daysPerYear = 365.25

// A rateUnit is a unit that rates are shown in beside m³/d.
type rateUnit struct {
	key    string  // as it is asked for in the report
	shown  string  // as it is printed
	factor float64 // m³/d in one of it
	how    string  // how the factor comes about
}

const (
	gallonUS       = 3.785411784e-3   // exact by definition [m³]
	gallonImperial = 4.54609e-3       // exact by definition [m³]
	cubicFoot      = 0.028316846592   // exact by definition [m³]
	acreFoot       = 1233.48183754752 // 43 560 cubic feet of the international foot [m³]
	minutesPerDay  = 1440.0           // [1/d]
	secondsPerDay  = 86400.0          // [1/d]
	hoursPerDay    = 24.0             // [h]
	litresPerCube  = 1000.0           // [L/m³]
	megalitre      = 1000.0           // [m³]
	millionGallons = 1e6              // [gal]
	shareOfPercent = 100.0            // [%]
)

var rateUnits = []rateUnit{
	{"m3/d", "m³/d", 1, "the unit of all formulas"},
	{"m3/h", "m³/h", hoursPerDay, "24 h in a day"},
	{"m3/yr", "m³/yr", 1 / daysPerYear, "1 d in 365.25"},
	{"L/s", "L/s", secondsPerDay / litresPerCube, "86 400 s in a day, 1000 L in a m³"},
	{"L/min", "L/min", minutesPerDay / litresPerCube, "1440 min in a day, 1000 L in a m³"},
	{"L/h", "L/h", hoursPerDay / litresPerCube, "24 h in a day, 1000 L in a m³"},
	{"ML/d", "ML/d", megalitre, "1000 m³ in a ML"},
	{"ML/yr", "ML/yr", megalitre / daysPerYear, "1000 m³ in a ML, a year of 365.25 d"},
	{"kL/d", "kL/d", 1, "1 kL is 1 m³"},
	{"kL/yr", "kL/yr", 1 / daysPerYear, "1 kL is 1 m³, a year of 365.25 d"},
	{"Mm3/yr", "million m³/yr", 1e6 / daysPerYear, "a year of 365.25 d"},
	{"gpm_us", "US gal/min", gallonUS * minutesPerDay, "US gallon of 3.785411784 L"},
	{"gpm_imp", "imperial gal/min", gallonImperial * minutesPerDay, "imperial gallon of 4.54609 L"},
	{"mgd_us", "million US gal/d", gallonUS * millionGallons, "US gallon of 3.785411784 L"},
	{"ft3/s", "ft³/s", cubicFoot * secondsPerDay, "international foot of 0.3048 m"},
	{"acre_ft/yr", "acre-ft/yr", acreFoot / daysPerYear, "acre-foot of 1233.48183754752 m³, a year of 365.25 d"},
}

// shownUnit finds the unit that the report asks for; none asked for is m³/d.
func shownUnit(key string) (rateUnit, error) {
	if key == "" || key == "m³/d" {
		return rateUnits[0], nil
	}
	known := make([]string, len(rateUnits))
	for i, u := range rateUnits {
		if u.key == key {
			return u, nil
		}
		known[i] = u.key
	}
	return rateUnit{}, fmt.Errorf("the workbook cannot show rates in %q; it knows %s", key, strings.Join(known, ", "))
}

// unitWords prints a receptor's unit.
func unitWords(unit string) string {
	switch unit {
	case "m3/d":
		return "m³/d"
	case "1", "":
		return "–"
	}
	return unit
}

// rateFormat is the number format of a column of rates or volumes: three or four figures of its largest number.
func rateFormat(values ...float64) string {
	top := largest(values)
	switch {
	case top >= 10000 || top == 0:
		return "#,##0"
	case top >= 100:
		return "#,##0.0"
	case top >= 10:
		return "#,##0.00"
	}
	return decimals(figuresOf(top, 3))
}

// figuresOf is how many decimals show the given number of figures of x.
func figuresOf(x float64, figures int) int {
	if !(x > 0) {
		return 0
	}
	return max(0, figures-1-int(math.Floor(math.Log10(x))))
}

func decimals(n int) string {
	if n <= 0 {
		return "#,##0"
	}
	return "#,##0." + strings.Repeat("0", min(n, 15))
}

// Formats of quantities whose digits do not depend on the data.
const (
	levelFormat   = "#,##0.00"
	shareFormat   = "0.0%"
	exactFormat   = "General"
	scienceFormat = "0.000E+00"
	countFormat   = "#,##0"
)

// finestLevel is the size of a length below which a third decimal is shown [m].
const finestLevel = 0.1

// unitFormat is the format of a receptor's numbers in its unit: lengths to 0.01 m (0.001 m where a limit is below 0.1 m), flows to
// three or four figures, gradients to three figures.
func unitFormat(unit string, limits []float64, values ...float64) string {
	switch unit {
	case "m":
		for _, l := range limits {
			if l != 0 && math.Abs(l) < finestLevel {
				return "#,##0.000"
			}
		}
		return levelFormat
	case "m3/d":
		return rateFormat(values...)
	}
	return decimals(min(figuresOf(largest(values), 4), 8))
}

// priceFormat shows three or four figures of a price.
func priceFormat(price float64) string { return rateFormat(price) }

func largest(values []float64) float64 {
	var top float64
	for _, v := range values {
		if a := math.Abs(v); a > top && a <= math.MaxFloat64 {
			top = a
		}
	}
	return top
}

// groupSpace stands between groups of three digits in running text; a line does not break at it.
const groupSpace = "\u00a0"

// figureText writes a number in running text with about four figures and thousands apart.
func figureText(x float64) string {
	n := figuresOf(math.Abs(x), 4)
	if math.Abs(x) >= 100 {
		n = min(n, 1)
	}
	text := strconv.FormatFloat(x, 'f', min(n, 12), 64)
	whole, part, found := strings.Cut(text, ".")
	sign := ""
	if strings.HasPrefix(whole, "-") {
		sign, whole = "−", whole[1:]
	}
	for i := len(whole) - 3; i > 0; i -= 3 {
		whole = whole[:i] + groupSpace + whole[i:]
	}
	part = strings.TrimRight(part, "0")
	if !found || part == "" {
		return sign + whole
	}
	return sign + whole + "." + part
}
