package workbook

import (
	"fmt"
	"strings"

	"springbound/plan"
)

// priceBothText is a price in words; where tightening and loosening differ both are said.
func (b *book) priceBothText(x *plan.PriceRange, price float64, unit string) string {
	if x != nil && x.Tighter != nil && x.Looser != nil && figureText(*x.Tighter) != figureText(*x.Looser) {
		return fmt.Sprintf("tighter %s, looser %s %s per %s", figureText(*x.Tighter), figureText(*x.Looser), aimUnit(b.report.Aim), unit)
	}
	return b.priceText(price, unit)
}

// rangeText says over which values of a limit its prices hold, and what comes then: '0.178 to 0.461 m; below: W1 stands still; above: W3
// stands still'. scale and unit turn the limit's value into what is shown; empty when nothing is known.
func rangeText(x *plan.PriceRange, at, scale float64, unit string) string {
	if x == nil {
		return ""
	}
	low, lowThen, high, highThen := x.TighterTo, x.TighterThen, x.LooserTo, x.LooserThen
	if (high != nil && *high < at) || (low != nil && *low > at) {
		low, lowThen, high, highThen = high, highThen, low, lowThen
	}
	show := func(v *float64) string { return figureText(*v * scale) }
	text := ""
	switch {
	case low != nil && high != nil:
		text = joinFilled(" ", show(low)+" to "+show(high), unit)
	case low != nil:
		text = joinFilled(" ", "from "+show(low), unit) + " on"
	case high != nil:
		text = joinFilled(" ", "up to "+show(high), unit)
	default:
		return "for any value"
	}
	if low != nil && lowThen != "" {
		text += "; below: " + lowThen
	}
	if high != nil && highThen != "" {
		text += "; above: " + highThen
	}
	if x.HoldsFor != "" {
		text += " (for " + x.HoldsFor + ")"
	}
	return text
}

// limitRange is rangeText of a receptor's limit.
func limitRange(l plan.LimitResult) string {
	if l.Quantity == quantityShare {
		return rangeText(l.Range, l.Limit, shareOfPercent, "%")
	}
	return rangeText(l.Range, l.Limit, 1, strings.Trim(unitWords(l.Unit), "–"))
}

// holdsWords is a sentence about a range, for a line that has no other words; empty when nothing is known.
func holdsWords(x *plan.PriceRange, at, scale float64, unit string) string {
	text := rangeText(x, at, scale, unit)
	if text == "" {
		return ""
	}
	if strings.HasPrefix(x.HoldsFor, plan.PriceMoves) {
		return "The same limits hold " + text + "."
	}
	return "Price holds " + text + "."
}

// entered is what one m³/d of a quota is in m³ per its basis.
func entered(q plan.QuotaResult) float64 {
	if q.Limit > 0 {
		return q.Entered / q.Limit
	}
	return 1
}
