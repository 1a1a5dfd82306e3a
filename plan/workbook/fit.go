package workbook

import (
	"math"
	"strconv"
	"strings"
)

// fitWidths widens columns where a head's longest word or a number would not fit: a cut word is hard to read, and a number that
// does not fit shows as ####.
func (s *sheet) fitWidths() {
	joined := map[[2]int]bool{}
	for _, m := range s.merges {
		for c := m[1]; c <= m[3]; c++ {
			joined[[2]int{m[0], c}] = true
		}
	}
	for r := range s.rows {
		for c := range s.rows[r] {
			cell := &s.rows[r][c]
			if joined[[2]int{r + 1, c + 1}] {
				continue
			}
			var need float64
			switch {
			case cell.kind == numberCell && cell.look.size == textSize:
				need = textPixels(shownNumber(cell.number, cell.look.format), *cell.look) + numberSlack
			case cell.kind == wordCell && cell.look.fill == fillHead:
				for _, word := range strings.Fields(cell.words) {
					need = math.Max(need, textPixels(word, *cell.look))
				}
				need = math.Min(need+float64(cell.look.indent)*indentPixels+paddingPixels+headGap, widestHeadWord)
			}
			if digits := math.Ceil(need/digitPixels*2) / 2; digits > s.width(c+1) {
				s.setWidths(c+1, digits)
			}
		}
	}
}

const (
	numberSlack    = paddingPixels + 8 // a figure more may come from an edit
	indentPixels   = 10.0
	headGap        = 6.0   // between two heads
	widestHeadWord = 160.0 // longer words are broken
)

// shownNumber writes a number about as a spreadsheet shows it; only its length matters.
func shownNumber(x float64, format string) string {
	places := 0
	if _, part, found := strings.Cut(format, "."); found {
		places = len(part) - len(strings.TrimLeft(part, "0"))
	}
	switch {
	case format == exactFormat || format == "":
		return strconv.FormatFloat(x, 'g', 10, 64)
	case strings.Contains(format, "E+00"):
		return strconv.FormatFloat(x, 'E', places, 64)
	case strings.HasSuffix(format, "%"):
		return strconv.FormatFloat(x*shareOfPercent, 'f', places, 64) + "%"
	}
	text := strconv.FormatFloat(x, 'f', places, 64)
	if strings.HasPrefix(format, "#,##0") {
		text += strings.Repeat(",", int(math.Max(0, math.Floor(math.Log10(math.Max(1, math.Abs(x)))/3))))
	}
	return text
}
