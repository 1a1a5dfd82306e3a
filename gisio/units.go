package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Kind is the kind of a quantity; it fixes which units may be written and the unit that is used inside.
type Kind int

// The kinds of quantity, each with the unit used inside.
const (
	Plain          Kind = iota // a number without a unit [-]
	Rate                       // flow or pumping rate [m³/d]
	HourVolume                 // most water in an hour [m³/h]
	DayVolume                  // most water in a day [m³/d]
	YearVolume                 // most water in a year of 365.25 days [m³/yr]
	DepthRate                  // recharge [m/d]
	Length                     // length, level or radius [m]
	Transmissivity             // [m²/d]
	Conductivity               // hydraulic conductivity, conductance of an edge per length [m/d]
	Resistance                 // leakage or bed resistance [d]
	Conductance                // conductance of a spring [m²/d]
	LineFlux                   // flow per length of an edge [m²/d]
	LinearLoss                 // drawdown per running rate [d/m²]
	QuadraticLoss              // drawdown per running rate squared [d²/m⁵]
	Gradient                   // slope of the head [-]
	Share                      // part of a whole [-]
	LimitValue                 // whatever unit fits the receptor
	kindCount
)

// Factors that are exact by definition. The constants are exact rationals: each factor below is rounded once.
const (
	foot          = 0.3048         // international foot [m]
	inch          = foot / 12      // [m]
	gallonUS      = 3.785411784e-3 // [m³]
	gallonImp     = 4.54609e-3     // [m³]
	acreFoot      = 43560 * foot3  // [m³]
	foot3         = foot * foot * foot
	daysPerYear   = 365.25 // [d]
	secondsPerDay = 86400  // [s]
	minutesPerDay = 1440   // [min]
)

// Unit is one unit of one kind.
type Unit struct {
	Name   string  // as it is written behind a number: "L/s"
	Word   string  // as it ends a key: "L_per_s"
	Kind   Kind    // what it measures
	Factor float64 // value inside = value in this unit x Factor
}

var kindNames = [kindCount]string{"a plain number", "a rate", "a volume per hour", "a volume per day", "a volume per year",
	"a depth of water per time", "a length", "a transmissivity", "a hydraulic conductivity", "a resistance", "a conductance",
	"a flow per length", "a linear well loss", "a quadratic well loss", "a gradient", "a share", "a limit's value"}

// String says what the kind is, with its article: "a rate".
func (k Kind) String() string { return kindNames[k] }

// unitTable lists, for each kind, the unit used inside first.
var unitTable = [kindCount][]Unit{
	Rate: units(Rate,
		"m3/d", "m3_per_d", 1.0, "m3/h", "m3_per_h", 24.0, "m3/yr", "m3_per_yr", 1/daysPerYear,
		"L/s", "L_per_s", secondsPerDay/1e3, "L/min", "L_per_min", minutesPerDay/1e3, "L/h", "L_per_h", 24/1e3,
		"ML/d", "ML_per_d", 1e3, "ML/yr", "ML_per_yr", 1e3/daysPerYear, "kL/d", "kL_per_d", 1.0, "kL/yr", "kL_per_yr", 1/daysPerYear,
		"Mm3/yr", "Mm3_per_yr", 1e6/daysPerYear, "gpm_us", "gpm_us", gallonUS*minutesPerDay, "gpm_imp", "gpm_imp", gallonImp*minutesPerDay,
		"mgd_us", "mgd_us", gallonUS*1e6, "ft3/s", "ft3_per_s", foot3*secondsPerDay, "acre_ft/yr", "acre_ft_per_yr", acreFoot/daysPerYear),
	HourVolume: units(HourVolume,
		"m3/h", "m3_per_h", 1.0, "m3", "m3", 1.0, "L/s", "L_per_s", 3.6, "L/min", "L_per_min", 60/1e3, "L/h", "L_per_h", 1/1e3,
		"gpm_us", "gpm_us", gallonUS*60, "gpm_imp", "gpm_imp", gallonImp*60),
	DayVolume: units(DayVolume,
		"m3/d", "m3_per_d", 1.0, "m3", "m3", 1.0, "kL/d", "kL_per_d", 1.0, "kL", "kL", 1.0, "ML/d", "ML_per_d", 1e3, "ML", "ML", 1e3,
		"L/s", "L_per_s", secondsPerDay/1e3, "gpm_us", "gpm_us", gallonUS*minutesPerDay, "gpm_imp", "gpm_imp", gallonImp*minutesPerDay,
		"mgd_us", "mgd_us", gallonUS*1e6, "ft3/s", "ft3_per_s", foot3*secondsPerDay, "acre_ft", "acre_ft", acreFoot),
	YearVolume: units(YearVolume,
		"m3/yr", "m3_per_yr", 1.0, "m3", "m3", 1.0, "kL/yr", "kL_per_yr", 1.0, "kL", "kL", 1.0, "ML/yr", "ML_per_yr", 1e3, "ML", "ML", 1e3,
		"Mm3/yr", "Mm3_per_yr", 1e6, "Mm3", "Mm3", 1e6, "acre_ft/yr", "acre_ft_per_yr", acreFoot, "acre_ft", "acre_ft", acreFoot),
	DepthRate: units(DepthRate,
		"m/d", "m_per_d", 1.0, "mm/d", "mm_per_d", 1/1e3, "mm/yr", "mm_per_yr", 1/(1e3*daysPerYear), "m/yr", "m_per_yr", 1/daysPerYear,
		"in/yr", "in_per_yr", inch/daysPerYear, "ft/yr", "ft_per_yr", foot/daysPerYear),
	Length: units(Length, "m", "m", 1.0, "cm", "cm", 1/1e2, "mm", "mm", 1/1e3, "ft", "ft", foot, "in", "in", inch),
	Transmissivity: units(Transmissivity,
		"m2/d", "m2_per_d", 1.0, "m2/s", "m2_per_s", secondsPerDay*1.0, "ft2/d", "ft2_per_d", foot*foot, "gpd_us/ft", "gpd_us_per_ft", gallonUS/foot),
	Conductivity: units(Conductivity,
		"m/d", "m_per_d", 1.0, "m/s", "m_per_s", secondsPerDay*1.0, "cm/s", "cm_per_s", secondsPerDay/1e2, "ft/d", "ft_per_d", foot),
	Resistance: units(Resistance, "d", "d", 1.0, "yr", "yr", daysPerYear),
	Conductance: units(Conductance,
		"m2/d", "m2_per_d", 1.0, "m2/s", "m2_per_s", secondsPerDay*1.0, "ft2/d", "ft2_per_d", foot*foot, "L/s/m", "L_per_s_per_m", secondsPerDay/1e3,
		"gpm_us/ft", "gpm_us_per_ft", gallonUS*minutesPerDay/foot),
	LineFlux: units(LineFlux,
		"m2/d", "m2_per_d", 1.0, "m3/d/m", "m3_per_d_per_m", 1.0, "m3/d/km", "m3_per_d_per_km", 1/1e3, "L/s/km", "L_per_s_per_km", secondsPerDay/1e6,
		"m2/s", "m2_per_s", secondsPerDay*1.0, "ft2/d", "ft2_per_d", foot*foot),
	LinearLoss: units(LinearLoss,
		"d/m2", "d_per_m2", 1.0, "h/m2", "h_per_m2", 1/24.0, "min/m2", "min_per_m2", 1.0/minutesPerDay, "s/m2", "s_per_m2", 1.0/secondsPerDay,
		"s/ft2", "s_per_ft2", 1/(secondsPerDay*foot*foot), "ft/gpm_us", "ft_per_gpm_us", foot/(gallonUS*minutesPerDay)),
	QuadraticLoss: units(QuadraticLoss,
		"d2/m5", "d2_per_m5", 1.0, "h2/m5", "h2_per_m5", 1/(24.0*24.0), "min2/m5", "min2_per_m5", 1.0/(minutesPerDay*minutesPerDay),
		"s2/m5", "s2_per_m5", 1.0/(secondsPerDay*secondsPerDay), "s2/ft5", "s2_per_ft5", 1/(secondsPerDay*secondsPerDay*foot3*foot*foot),
		"ft/gpm_us2", "ft_per_gpm_us2", foot/(gallonUS*minutesPerDay*gallonUS*minutesPerDay)),
	Gradient: units(Gradient, "-", "m_per_m", 1.0, "%", "percent", 1/1e2, "1/1000", "per_thousand", 1/1e3),
	Share:    units(Share, "-", "share", 1.0, "%", "percent", 1/1e2),
}

// units builds the units of a kind from name, word, factor triples.
func units(kind Kind, triples ...any) []Unit {
	var us []Unit
	for i := 0; i+2 < len(triples); i += 3 {
		us = append(us, Unit{triples[i].(string), triples[i+1].(string), kind, triples[i+2].(float64)})
	}
	return us
}

// Units returns the units of a kind, the one used inside first; a plain number has none.
func Units(kind Kind) []Unit {
	if kind == LimitValue {
		return limitUnits
	}
	return unitTable[kind]
}

// limitUnits are all units that a limit's value may carry: levels, rates, gradients, shares.
var limitUnits = func() []Unit {
	var us []Unit
	for _, k := range []Kind{Length, Rate, Gradient} {
		us = append(us, unitTable[k]...)
	}
	return us
}()

// Inside returns the unit of the kind that is used inside.
func Inside(kind Kind) Unit {
	if us := Units(kind); len(us) > 0 {
		return us[0]
	}
	return Unit{Kind: kind, Factor: 1}
}

// UnitNames lists the units of a kind for messages: "m, cm, mm, ft or in".
func UnitNames(kind Kind) string {
	us := Units(kind)
	names := make([]string, len(us))
	for i, u := range us {
		names[i] = u.Name
	}
	return orList(names)
}

// orList joins words with commas and a last "or".
func orList(words []string) string {
	switch n := len(words); n {
	case 0:
		return ""
	case 1:
		return words[0]
	default:
		return strings.Join(words[:n-1], ", ") + " or " + words[n-1]
	}
}

// quantityAllowed says how a quantity of the kind is written.
func quantityAllowed(kind Kind) string {
	if kind == Plain {
		return "a number"
	}
	return fmt.Sprintf("%s in %s", kind, UnitNames(kind))
}

// parsePointNumber reads a finite number written with a decimal point.
func parsePointNumber(s string) (float64, error) {
	if strings.ContainsRune(s, ',') {
		return 0, &QuantityError{quoted(s), "a number with a decimal point and no thousands separator", "a comma may mean either"}
	}
	v, err := strconv.ParseFloat(strings.Replace(s, "\u2212", "-", 1), 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) || strings.ContainsAny(s, "_xXpP") {
		return 0, &QuantityError{quoted(s), "a finite number", ""}
	}
	return v, nil
}

// splitQuantity cuts a text into its leading number and the unit behind it.
func splitQuantity(text string) (number, unit string) {
	s := strings.TrimSpace(text)
	if head, ok := strings.CutSuffix(s, perThousand); ok && head != "" {
		return strings.TrimSpace(head), perThousand
	}
	end := numberEnd(s)
	return strings.TrimSpace(s[:end]), strings.TrimSpace(s[end:])
}

// perThousand is the one unit that starts with a digit.
const perThousand = "1/1000"

// numberEnd finds where the number at the start of s ends: sign, digits with separators, exponent.
func numberEnd(s string) int {
	i := 0
	if strings.HasPrefix(s, "\u2212") {
		i = len("\u2212")
	} else if i < len(s) && (s[i] == '+' || s[i] == '-') {
		i++
	}
	start, digits := i, 0
	for i < len(s) {
		c := s[i]
		if c >= '0' && c <= '9' {
			digits++
			i++
			continue
		}
		sep := separatorAt(s[i:])
		if sep == 0 || (digits == 0 && c != '.') {
			break
		}
		if sep > 0 && c != '.' && (i+sep >= len(s) || s[i+sep] < '0' || s[i+sep] > '9') {
			break
		}
		i += sep
	}
	if digits == 0 {
		return 0
	}
	if i < len(s) && (s[i] == 'e' || s[i] == 'E') {
		j := i + 1
		if j < len(s) && (s[j] == '+' || s[j] == '-') {
			j++
		}
		k := j
		for k < len(s) && s[k] >= '0' && s[k] <= '9' {
			k++
		}
		if k > j {
			i = k
		}
	}
	if i == start {
		return 0
	}
	return i
}

// separatorAt returns the length of a decimal or thousands separator at the start of s, 0 when there is none.
func separatorAt(s string) int {
	for _, sep := range []string{".", ",", "'", "\u2019", " ", "\u00a0", "\u202f", "\u2009"} {
		if strings.HasPrefix(s, sep) {
			return len(sep)
		}
	}
	return 0
}

// quoted puts a text in quotes, shortened where it is long.
func quoted(s string) string {
	const longest = 60 // a message stays on a line or two
	if r := []rune(s); len(r) > longest {
		s = string(r[:longest]) + "..."
	}
	return strconv.Quote(s)
}
