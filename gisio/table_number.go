package gisio

import "strings"

// decimalEvidence is what a number's separators say of the decimal mark.
type decimalEvidence int

const (
	noEvidence decimalEvidence = iota
	pointIsDecimal
	commaIsDecimal
)

// evidenceOf judges one number's text: a single mark that is not followed by exactly three digits, or stands behind the other mark,
// is the decimal mark; "1,234" leaves it open.
func evidenceOf(number string) decimalEvidence {
	points, commas := strings.Count(number, "."), strings.Count(number, ",")
	lastPoint, lastComma := strings.LastIndex(number, "."), strings.LastIndex(number, ",")
	switch {
	case points == 0 && commas == 0, points > 1 && commas > 1:
		return noEvidence
	case points > 0 && commas > 0:
		if lastPoint > lastComma {
			return pointIsDecimal
		}
		return commaIsDecimal
	case points > 1: // several thousands separators
		return commaIsDecimal
	case commas > 1:
		return pointIsDecimal
	case points == 1 && !couldBeGroup(number, lastPoint):
		return pointIsDecimal
	case commas == 1 && !couldBeGroup(number, lastComma):
		return commaIsDecimal
	}
	return noEvidence
}

// couldBeGroup tells whether the mark at i may be a thousands separator: one to three digits before it, the first no zero, and exactly
// three digits behind it at the number's end.
func couldBeGroup(number string, i int) bool {
	head := strings.TrimLeft(number[:i], "+-\u2212")
	return len(number)-i-1 == 3 && len(head) >= 1 && len(head) <= 3 && head[0] != '0' && onlyDigits(head) && onlyDigits(number[i+1:])
}

// onlyDigits tells whether a text is made of digits.
func onlyDigits(s string) bool {
	for _, c := range s {
		if c < '0' || c > '9' {
			return false
		}
	}
	return s != ""
}

// parseCellNumber reads a number whose decimal mark is known. Thousands separators are taken where nothing else can be meant: a
// blank or an apostrophe before groups of three digits, or the other mark where it stands more than once or before the decimal mark.
func parseCellNumber(number, decimal string) (float64, error) {
	bad := func(hint string) (float64, error) {
		return 0, &QuantityError{quoted(number), "a finite number", hint}
	}
	mantissa, exponent := number, ""
	if i := strings.IndexAny(number, "eE"); i >= 0 {
		mantissa, exponent = number[:i], number[i:]
	}
	whole, fraction, hasFraction := strings.Cut(mantissa, decimal)
	if strings.Contains(fraction, decimal) {
		if _, err := ungroup(mantissa, decimal, false); err == nil {
			return bad("the decimal mark of this table is " + quoted(decimal))
		}
		return bad("more than one decimal mark")
	}
	other := ","
	if decimal == "," {
		other = "."
	}
	if strings.ContainsAny(fraction, ",.'\u2019 \u202f\u2009\u00a0") {
		return bad("a separator behind the decimal mark")
	}
	sign := ""
	if t := strings.TrimLeft(whole, "+-\u2212"); t != whole {
		sign, whole = strings.Replace(whole[:len(whole)-len(t)], "\u2212", "-", 1), t
	}
	if strings.Contains(whole, other) {
		plain, err := ungroup(whole, other, !hasFraction)
		if err != nil {
			return 0, &QuantityError{quoted(number), "a number with " + quoted(decimal) + " as decimal mark", err.Error()}
		}
		whole = plain
	}
	for _, sep := range []string{" ", "\u00a0", "\u202f", "\u2009", "'", "\u2019"} {
		if strings.Contains(whole, sep) {
			plain, err := ungroup(whole, sep, false)
			if err != nil {
				return bad(err.Error())
			}
			whole = plain
		}
	}
	text := sign + whole
	if hasFraction {
		text += "." + fraction
	}
	return parsePointNumber(text + exponent)
}

// groupError says why separators cannot be read as thousands separators.
type groupError string

func (e groupError) Error() string { return string(e) }

// ungroup takes thousands separators out of a whole number; doubtful refuses a single one.
func ungroup(whole, sep string, doubtful bool) (string, error) {
	groups := strings.Split(whole, sep)
	for i, g := range groups {
		if !onlyDigits(g) || i > 0 && len(g) != 3 || i == 0 && len(g) > 3 {
			return "", groupError("a separator that does not part groups of three digits")
		}
	}
	if doubtful && len(groups) == 2 {
		return "", groupError(quoted(sep) + " may be a decimal mark or a thousands separator: write the number without it, or state decimal for the table")
	}
	return strings.Join(groups, ""), nil
}
