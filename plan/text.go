package plan

import (
	"math"
	"strconv"
	"strings"

	"springbound/wells"
)

// plainNumber writes v with the given significant digits, never dropping whole units, with at least least and at most most
// decimals, a point as decimal mark and a space between groups of three digits.
func plainNumber(v float64, significant, least, most int) string {
	decimals := least
	if v != 0 {
		decimals = significant - 1 - int(math.Floor(math.Log10(math.Abs(v))))
	}
	decimals = min(max(decimals, least), most)
	text := strconv.FormatFloat(math.Abs(v), 'f', decimals, 64)
	whole, part, _ := strings.Cut(text, ".")
	for k := len(whole) - 3; k > 0; k -= 3 {
		whole = whole[:k] + " " + whole[k:]
	}
	if part != "" {
		whole += "." + part
	}
	if v < 0 && strings.Trim(whole, "0. ") != "" {
		whole = "-" + whole
	}
	return whole
}

func flowText(v float64) string    { return plainNumber(v, 2, 0, 4) + " m³/d" }
func lengthText(v float64) string  { return plainNumber(v, 2, 2, 6) + " m" }
func energyText(v float64) string  { return plainNumber(v, 2, 0, 4) + " kWh/d" }
func percentText(v float64) string { return plainNumber(100*v, 2, 0, 4) + " %" }

// amountText writes an amount in one of the units of rows: m, m3/d or 1.
func amountText(v float64, unit string) string {
	switch unit {
	case "m":
		return lengthText(v)
	case "m3/d":
		return flowText(v)
	}
	return plainNumber(v, 2, 0, 9)
}

// kindWord says what a kind's value and its change are called.
type kindWord struct{ value, change string }

var wordsOfKind = map[wells.Kind]kindWord{
	wells.PointLevel:    {"level", "drawdown"},
	wells.NeighbourWell: {"level", "drawdown"},
	wells.Wetland:       {"mean level", "mean drawdown"},
	wells.WetlandWorst:  {"lowest level", "largest drawdown"},
	wells.SpringFlow:    {"spring flow", "loss of spring flow"},
	wells.RiverReach:    {"flow to the river", "loss of river flow"},
	wells.EdgeFlow:      {"flow out through the edge", "loss of flow through the edge"},
	wells.SalineFront:   {"gradient", "fall of gradient"},
	wells.PumpingLevel:  {"level in the well", "drawdown in the well"},
}

// limitWords names a limit: 'drawdown at Fen wetland at most 0.30 m'.
func (s *setup) limitWords(l wells.Limit) string {
	r := s.Receptors[s.receptorIndex[l.Receptor]]
	words := wordsOfKind[r.Kind]
	what, amount := words.change, amountText(l.Value, r.Kind.Unit())
	if l.Quantity == wells.ShareOfBase {
		amount = percentText(l.Value)
	}
	if l.Entered != "" {
		amount = l.Entered
	}
	switch l.Quantity {
	case wells.Value:
		what = words.value
	case wells.ShareOfBase:
		amount += " of the undisturbed value"
	}
	var b strings.Builder
	b.WriteString(what + " at " + s.receptorName(l.Receptor))
	if l.Quantity != wells.Value && l.Counts == wells.Own {
		b.WriteString(" by own wells")
	}
	b.WriteString(map[wells.Sense]string{wells.AtMost: " at most ", wells.AtLeast: " at least "}[l.Sense] + amount)
	if l.Quantity != wells.Value {
		b.WriteString(map[wells.Baseline]string{wells.PresentPumping: " against present pumping",
			wells.OthersAtLicence: " against existing users at their licences"}[l.Baseline])
	}
	if l.Reserve > 0 {
		b.WriteString(" with a reserve of " + percentText(l.Reserve))
	}
	return b.String()
}

// levelWords names the lowest level in a well as a limit.
func (s *setup) levelWords(i int) string {
	lowest, reason := lowestLevel(s.Wells[i])
	return "level in well " + s.Wells[i].ID + " at least " + lengthText(*lowest) + " (" + reason + ")"
}

// boundWords names what a bound stands for.
func (s *setup) boundWords(b *bound) string {
	if b.limit >= 0 {
		return s.limitWords(s.Limits[b.limit])
	}
	return s.levelWords(b.target.well)
}

// quotaWords names a quota as a limit.
func (s *setup) quotaWords(q *quota) string {
	return "pumped by " + q.name + " at most " + plainNumber(q.entered, 2, 0, 4) + " m³ " + q.basis
}

// list joins names as in 'W1, W2 and W3'.
func list(names []string) string {
	switch len(names) {
	case 0:
		return ""
	case 1:
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " and " + names[len(names)-1]
}
