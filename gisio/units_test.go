package gisio

import (
	"errors"
	"math"
	"strings"
	"testing"
)

// oneRounding allows for the roundings of a conversion: a factor and a product, half a unit in the last place each, and the same again
// for the expected value.
const oneRounding = 4 * 0x1p-53

func near(got, want, tolerance float64) bool { return math.Abs(got-want) <= tolerance*math.Abs(want) }

func TestConversions(t *testing.T) {
	for _, c := range []struct {
		text      string
		kind      Kind
		want      float64
		tolerance float64
		reason    string
	}{
		{"1 L/s", Rate, 86.4, oneRounding, "by definition"},
		{"1 gpm_us", Rate, 5.45099297, 0.5e-8 / 5.45, "printed to 8 decimals; US gallon = 3.785411784 L"},
		{"1 ft3/s", Rate, 2446.57554555, 0.5e-8 / 2446, "printed to 8 decimals"},
		{"1 mgd_us", Rate, 3785.411784, oneRounding, "US gallon = 231 cubic inches"},
		{"1 acre_ft/yr", Rate, 1233.48183755 / 365.25, 0.5e-8 / 1233, "acre-foot printed to 8 decimals"},
		{"0.29611299 acre_ft/yr", Rate, 1, 0.5e-8 / 0.296, "1 m3/d printed to 8 decimals"},
		{"0.18345281 gpm_us", Rate, 1, 0.5e-8 / 0.183, "1 m3/d printed to 8 decimals"},
		{"0.15275642 gpm_imp", Rate, 1, 0.5e-8 / 0.152, "1 m3/d printed to 8 decimals"},
		{"0.36525 ML/yr", Rate, 1, oneRounding, "a year of 365.25 d"},
		{"1000 L/min", Rate, 1440, oneRounding, "1440 minutes a day"},
		{"1000 L/h", Rate, 24, oneRounding, "24 hours a day"},
		{"2 ML/d", Rate, 2000, oneRounding, "by definition"},
		{"365.25 kL/yr", Rate, 1, oneRounding, "a year of 365.25 d"},
		{"7 kL/d", Rate, 7, 0, "the same unit"},
		{"3 m3/h", Rate, 72, oneRounding, "24 hours a day"},
		{"365.25 m3/yr", Rate, 1, oneRounding, "a year of 365.25 d"},
		{"0.36525 Mm3/yr", Rate, 1000, oneRounding, "a year of 365.25 d"},
		{"-5 m3/d", Rate, -5, 0, "recharge is negative"},
		{"\u22125 m3/d", Rate, -5, 0, "a typographic minus"},
		{"1 ft2/d", Transmissivity, 0.09290304, oneRounding, "foot = 0.3048 m"},
		{"1 gpd_us/ft", Transmissivity, 0.01241933, 0.5e-8 / 0.0124, "printed to 8 decimals"},
		{"0.005 m2/s", Transmissivity, 432, oneRounding, "86400 seconds a day"},
		{"3.52777778e-6 m/s", Conductivity, foot, 0.5e-14 / 3.5e-6, "1 ft/d printed to 9 digits"},
		{"1 cm/s", Conductivity, 864, oneRounding, "by definition"},
		{"1 ft", Length, 0.3048, 0, "by definition"},
		{"350 mm", Length, 0.35, 0, "division by a whole number rounds once"},
		{"12 in", Length, 0.3048, oneRounding, "twelve inches a foot"},
		{"35 cm", Length, 0.35, 0, "division by a whole number rounds once"},
		{"0.25 mm/d", DepthRate, 0.00025, 0, "division by a whole number rounds once"},
		{"365.25 mm/yr", DepthRate, 0.001, oneRounding, "a year of 365.25 d"},
		{"14.379921259842519 in/yr", DepthRate, 0.001, 2 * oneRounding, "365.25 mm in inches, rounded to a double"},
		{"2 yr", Resistance, 730.5, 0, "a year of 365.25 d"},
		{"1 h/m2", LinearLoss, 1 / 24.0, oneRounding, "24 hours a day"},
		{"86400 s/m2", LinearLoss, 1, oneRounding, "86400 seconds a day"},
		{"2073600 min2/m5", QuadraticLoss, 1, oneRounding, "1440 squared"},
		{"7464960000 s2/m5", QuadraticLoss, 1, oneRounding, "86400 squared"},
		{"1 s2/ft5", QuadraticLoss, 1 / (7464960000 * 0.00263072113), 1e-8, "foot to the fifth is 0.002630721132..., written to 9 digits"},
		{"1 L/s/m", Conductance, 86.4, oneRounding, "by definition"},
		{"1 L/s/km", LineFlux, 0.0864, oneRounding, "by definition"},
		{"5 %", Share, 0.05, 0, "division by a whole number rounds once"},
		{"3 1/1000", Gradient, 0.003, 0, "division by a whole number rounds once"},
		{"3 ‰", Gradient, 0.003, 0, "the same"},
		{"0.5 -", Gradient, 0.5, 0, "no unit"},
		{"1.2 Mm3", YearVolume, 1.2e6, oneRounding, "by definition"},
		{"1 acre_ft", YearVolume, 1233.48183755, 0.5e-8 / 1233, "printed to 8 decimals"},
		{"10 L/s", HourVolume, 36, oneRounding, "3600 seconds an hour"},
		{"18 l/s", Rate, 18 * 86.4, oneRounding, "a small l is a litre"},
		{"18 m³/day", Rate, 18, 0, "another spelling"},
		{"18 m^3 per day", Rate, 18, 0, "another spelling"},
		{"2 ac-ft/yr", Rate, 2 * 43560 * 0.3048 * 0.3048 * 0.3048 / 365.25, 4 * oneRounding, "acre-foot = 43560 cubic feet"},
		{"1e3 m3/d", Rate, 1000, 0, "an exponent"},
		{".5 m", Length, 0.5, 0, "no digit before the point"},
		{"4e-4", Plain, 4e-4, 0, "a plain number"},
	} {
		v, _, err := ParseQuantity(c.text, c.kind)
		if err != nil {
			t.Errorf("%s: %v", c.text, err)
		} else if !near(v, c.want, c.tolerance) {
			t.Errorf("%s is %v, want %v within %v (%s)", c.text, v, c.want, c.tolerance, c.reason)
		}
	}
}

func TestFormatReadsBack(t *testing.T) {
	for k := Rate; k < LimitValue; k++ {
		for _, u := range Units(k) {
			for _, v := range []float64{1, 0.3, -12.7, 123456.789, 1e-9, 0} {
				text := u.Format(u.In(v))
				if u.Name == "-" {
					text += " -"
				}
				got, back, err := ParseQuantity(text, k)
				if err != nil || back.Name != u.Name || !near(got, u.In(v), oneRounding) {
					t.Errorf("%v %s: wrote %q, read %v %s, %v", v, u.Name, text, got, back.Name, err)
				}
				if got, back, err := ParseQuantity("2 "+u.Word, k); err != nil || back != u || got != u.In(2) {
					t.Errorf("the word %s of %v is not read as its unit: %v", u.Word, k, err)
				}
			}
		}
	}
}

func TestQuantityMessages(t *testing.T) {
	for _, c := range []struct {
		text string
		kind Kind
		want string
	}{
		{"18", Rate, `found "18", without a unit; allowed: a rate in m3/d, m3/h, m3/yr, L/s, L/min, L/h, ML/d, ML/yr, kL/d, kL/yr, Mm3/yr, gpm_us, gpm_imp, mgd_us, ft3/s or acre_ft/yr`},
		{"18 m", Transmissivity, `found a value in the unit "m", which is for a length; allowed: a transmissivity in m2/d, m2/s, ft2/d or gpd_us/ft`},
		{"18 m2/dy", Transmissivity, `found a value in the unknown unit "m2/dy"; allowed: a transmissivity in m2/d, m2/s, ft2/d or gpd_us/ft; did you mean m2/d?`},
		{"18 gpd/ft", Transmissivity, `found a value in the unit "gpd/ft", which can mean more than one; allowed: a transmissivity in m2/d, m2/s, ft2/d or gpd_us/ft; write gpd_us/ft`},
		{"1,200 m", Length, `found "1,200"; allowed: a number with a decimal point and no thousands separator; a comma may mean either`},
		{"much", Length, `found "much"; allowed: a length in m, cm, mm, ft or in; start with the number`},
		{"nan m", Length, `found "nan m"; allowed: a length in m, cm, mm, ft or in; start with the number`},
		{"1e999 m", Length, `found "1e999"; allowed: a finite number`},
		{"5 m", Plain, `found "5 m"; allowed: a number without a unit; leave "m" out`},
	} {
		_, _, err := ParseQuantity(c.text, c.kind)
		if err == nil || err.Error() != c.want {
			t.Errorf("%s:\n got %v\nwant %s", c.text, err, c.want)
		}
		var q *QuantityError
		if !errors.As(err, &q) {
			t.Errorf("%s: error is a %T, want a *QuantityError", c.text, err)
		}
	}
}

func TestDoubtfulUnitsAreRefused(t *testing.T) {
	for text := range doubtfulUnits {
		for k := Rate; k < kindCount; k++ {
			if _, err := FindUnit(text, k); err == nil {
				t.Errorf("%q is taken as %v", text, k)
			}
		}
	}
	for _, text := range []string{"gpm", "gal", "MG", "mgd", "gal/d"} {
		if _, _, err := ParseQuantity("3 "+text, Rate); err == nil || !strings.Contains(err.Error(), "more than one") {
			t.Errorf("3 %s: %v, want a message that it can mean more than one", text, err)
		}
	}
}

func FuzzParseQuantity(f *testing.F) {
	for _, s := range []string{"18 L/s", "1 000,5 m", "3 1/1000", "−2 m3/d", "1e5", "1/1000", ". m", "5 %", "+", "1e", "12 'x", "0x1p-2 m", "1_0 m"} {
		f.Add(s, 1)
	}
	f.Fuzz(func(t *testing.T, text string, kind int) {
		if kind < 0 || kind >= int(kindCount) {
			return
		}
		v, u, err := ParseQuantity(text, Kind(kind))
		if err != nil {
			if s := err.Error(); strings.ContainsAny(s, "\n\r") {
				t.Errorf("%q: a message over several lines: %q", text, s)
			}
			return
		}
		if math.IsNaN(v) {
			t.Fatalf("%q gives %v", text, v)
		}
		if math.IsInf(v, 0) || Kind(kind) == Plain || u.Name == "-" || v != 0 && math.Abs(v) < 1e-290 {
			return
		}
		back, _, err := ParseQuantity(u.Format(v), Kind(kind))
		if err != nil || !near(back, v, oneRounding) {
			t.Errorf("%q: %v was written as %q and read as %v, %v", text, v, u.Format(v), back, err)
		}
	})
}
