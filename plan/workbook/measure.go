package workbook

import (
	"math"
	"strings"
	"unicode"
)

// Widths of text are estimated so that wrapped lines get the height they need in every program: a stored height is obeyed by
// all, an automatic one only by some, and never for joined cells.
const (
	defaultWidth  = 10.0 // of a column, in digits of the workbook's standard font
	digitPixels   = 8.0  // of a digit of the standard font, Arial 11, at 96 dots an inch
	paddingPixels = 7.0  // inside a cell, both sides
	pixelsPerEm   = 96.0 / 72.0
	lineFactor    = 1.28 // line height over font size
	boldFactor    = 1.08 // width of bold text over plain
	safeFactor    = 1.04 // allowance for the difference between programs
	rowPadding    = 3.0  // points
	highestRow    = 405  // points; the format ends at 409
)

// runeEm is the width of a character as a share of the font size, for the proportions of Arial.
func runeEm(r rune) float64 {
	switch {
	case strings.ContainsRune("ijl|'ı", r):
		return 0.23
	case strings.ContainsRune(" ftI.,:;!/\\[]", r):
		return 0.28
	case strings.ContainsRune("()-r", r):
		return 0.34
	case strings.ContainsRune("ckszvxyJ", r):
		return 0.50
	case strings.ContainsRune("mM", r):
		return 0.84
	case strings.ContainsRune("W%@—…▲●○◐", r):
		return 0.95
	case r == 'w':
		return 0.73
	case unicode.Is(unicode.Han, r), unicode.Is(unicode.Hiragana, r), unicode.Is(unicode.Katakana, r), unicode.Is(unicode.Hangul, r):
		return 1.0
	case unicode.IsUpper(r):
		return 0.70
	case r > 0x2000:
		return 0.75
	}
	return 0.56
}

// textPixels is the estimated width of a text in one line.
func textPixels(s string, l look) float64 {
	var em float64
	for _, r := range s {
		if l.font == fontEven {
			em += 0.61
		} else {
			em += runeEm(r)
		}
	}
	if l.bold {
		em *= boldFactor
	}
	return em * l.size * pixelsPerEm * safeFactor
}

// linesOf is the number of lines that a text takes when it is wrapped within a width [pixels].
func linesOf(s string, l look, width float64) int {
	lines := 0
	space := textPixels(" ", l)
	for _, paragraph := range strings.Split(s, "\n") {
		lines++
		var used float64
		for _, word := range strings.Split(paragraph, " ") {
			w := textPixels(word, l)
			if used > 0 && used+space+w > width {
				lines++
				used = 0
			}
			if used > 0 {
				used += space
			}
			used += w
			for used > width {
				lines++
				used -= width
			}
		}
	}
	return lines
}

// rowHeight is the height that a row's wrapped cells need [points].
func (s *sheet) rowHeight(row int, joined map[int]int) float64 {
	var height float64
	for i := range s.rows[row-1] {
		c := &s.rows[row-1][i]
		if c.kind != wordCell {
			continue
		}
		lines := 1
		if c.look.wrap {
			last := i + 1
			if to, ok := joined[i+1]; ok {
				last = to
			}
			var digits float64
			for k := i + 1; k <= last; k++ {
				digits += s.width(k)
			}
			lines = linesOf(c.words, *c.look, digits*digitPixels-paddingPixels-float64(c.look.indent)*indentPixels)
		}
		height = math.Max(height, float64(lines)*c.look.size*lineFactor+rowPadding)
	}
	return math.Min(height, highestRow)
}
