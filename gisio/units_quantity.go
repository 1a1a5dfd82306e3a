package gisio

import (
	"math"
	"strconv"
	"strings"
)

// QuantityError says why a text is no quantity of the wanted kind. Found, Allowed and Hint are plain sentences' parts.
type QuantityError struct {
	Found   string
	Allowed string
	Hint    string
}

// Error puts the parts into one sentence.
func (e *QuantityError) Error() string {
	s := "found " + e.Found
	if strings.HasPrefix(e.Found, "in the ") {
		s = "found a value " + e.Found
	}
	if e.Allowed != "" {
		s += "; allowed: " + e.Allowed
	}
	if e.Hint != "" {
		s += "; " + e.Hint
	}
	return printable(s)
}

// ParseQuantity reads a number with its unit, such as "18 L/s", and returns the value in the kind's inside unit together with
// the unit that was written. The number is written with a point; thousands separators and decimal commas are refused. A plain
// number takes no unit; every other kind needs one. The error is a *QuantityError.
func ParseQuantity(text string, kind Kind) (float64, Unit, error) {
	number, unitText := splitQuantity(text)
	if number == "" {
		return 0, Unit{}, &QuantityError{quoted(text), quantityAllowed(kind), "start with the number"}
	}
	v, err := parsePointNumber(number)
	if err != nil {
		return 0, Unit{}, err
	}
	if kind == Plain {
		if unitText != "" {
			return 0, Unit{}, &QuantityError{quoted(text), "a number without a unit", "leave " + quoted(unitText) + " out"}
		}
		return v, Inside(Plain), nil
	}
	if unitText == "" {
		return 0, Unit{}, &QuantityError{quoted(text) + ", without a unit", quantityAllowed(kind), ""}
	}
	u, err := FindUnit(unitText, kind)
	if err != nil {
		return 0, Unit{}, err
	}
	return u.In(v), u, nil
}

// In converts a value from the unit to the inside unit. A factor that is one over a whole number, such as that of mm, divides by
// that number, so that 350 mm is 0.35 m to the last digit.
func (u Unit) In(v float64) float64 {
	if whole := math.Round(1 / u.Factor); u.Factor < 1 && 1/whole == u.Factor {
		return v / whole
	}
	return v * u.Factor
}

// Out converts a value from the inside unit to the unit.
func (u Unit) Out(v float64) float64 {
	if whole := math.Round(1 / u.Factor); u.Factor < 1 && 1/whole == u.Factor {
		return v * whole
	}
	return v / u.Factor
}

// shownDigits is how many digits a converted value is shown with in lists: more would show the rounding of the conversion.
const shownDigits = 12

// show writes an inside value for people to read.
func (u Unit) show(inside float64) string {
	short, err := strconv.ParseFloat(strconv.FormatFloat(inside, 'g', shownDigits, 64), 64)
	if err != nil {
		return u.Format(inside)
	}
	return u.Format(short)
}

// Format writes an inside value in the unit with its name, in the fewest digits that read back to the same value.
func (u Unit) Format(inside float64) string {
	s := strconv.FormatFloat(u.Out(inside), 'g', -1, 64)
	if abs := math.Abs(u.Out(inside)); abs >= 1e-4 && abs < 1e15 || abs == 0 {
		s = strconv.FormatFloat(u.Out(inside), 'f', -1, 64)
	}
	if u.Name == "" || u.Name == "-" {
		return s
	}
	return s + " " + u.Name
}
