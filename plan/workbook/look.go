package workbook

import "github.com/xuri/excelize/v2"

// A look is everything about a cell's appearance; equal looks share one style of the file.
type look struct {
	bold, italic bool
	size         float64
	ink, fill    string
	pattern      int // fill pattern, 0 is solid
	format       string
	wrap         bool
	across       string // left, right, center
	upright      string // top, center, bottom
	top, bottom  int    // border styles
	box          bool   // thin border all round
	unlocked     bool
	indent       int
	font         string
}

// The colours are few and keep their order of darkness in a grey print.
const (
	inkDark   = "1E2B2F"
	inkMuted  = "5C6B70"
	fillHead  = "DCE6E4"
	fillEdit  = "FFF2B8"
	fillWarn  = "F3C9BE"
	fillReach = "E4E4DF"
	lineGrey  = "9AA7A9"
	fontPlain = "Arial"
	fontEven  = "Courier New"
)

const (
	borderHair = 7
	borderThin = 1
	borderMid  = 2
)

const (
	textSize = 10
	headSize = 9
)

var (
	plain   = look{size: textSize, ink: inkDark, upright: "top"}
	wrapped = with(plain, func(l *look) { l.wrap = true })
	muted   = with(wrapped, func(l *look) { l.ink = inkMuted })
	title   = with(plain, func(l *look) { l.size = 18; l.bold = true; l.upright = "center" })
	under   = with(plain, func(l *look) { l.ink = inkMuted })
	banner  = with(plain, func(l *look) { l.ink = inkMuted; l.italic = true; l.upright = "center" })
	section = with(plain, func(l *look) { l.size = 12; l.bold = true; l.bottom = borderMid; l.upright = "bottom" })
	head    = with(wrapped, func(l *look) {
		l.bold, l.fill, l.bottom, l.upright, l.across, l.indent, l.size = true, fillHead, borderThin, "bottom", "left", 1, headSize
	})
	headRight = with(head, func(l *look) { l.across, l.indent = "right", 0 })
	line      = with(wrapped, func(l *look) { l.bottom, l.across, l.indent = borderHair, "left", 1 })
	lineTotal = with(line, func(l *look) { l.bold = true; l.top, l.bottom = borderThin, borderThin })
	label     = with(wrapped, func(l *look) { l.bold = true })
	warnMark  = look{bold: true, fill: fillWarn, ink: inkDark}
	reachMark = look{bold: true, fill: fillReach, ink: inkDark}
)

func with(l look, change func(*look)) look {
	change(&l)
	return l
}

// figures is a number in a table's line.
func figures(format string) look {
	return with(line, func(l *look) { l.format, l.across, l.indent, l.wrap = format, "right", 0, false })
}

// strong is a line's name or its state.
var strong = with(line, func(l *look) { l.bold = true })

// rightWords are words in a table's line that stand like a number.
var rightWords = with(line, func(l *look) { l.across, l.indent = "right", 0 })

// totals is a number in a total's line.
func totals(format string) look {
	return with(lineTotal, func(l *look) { l.format, l.across, l.indent, l.wrap = format, "right", 0, false })
}

// editable is a cell that the reader may change.
func editable(format string) look {
	return with(figures(format), func(l *look) { l.fill, l.unlocked, l.bold, l.box = fillEdit, true, true, true })
}

// shared returns the one copy of a look that all its cells share.
func (b *book) shared(l look) *look {
	if p, ok := b.looks[l]; ok {
		return p
	}
	p := &l
	b.looks[l] = p
	return p
}

// style returns the file's number of a shared look.
func (b *book) style(p *look) (int, error) {
	if id, ok := b.styles[p]; ok {
		return id, nil
	}
	id, err := b.file.NewStyle(p.excel(true))
	if err != nil {
		return 0, err
	}
	b.styles[p] = id
	return id, nil
}

func (l look) excel(cell bool) *excelize.Style {
	s := &excelize.Style{Font: &excelize.Font{Bold: l.bold, Italic: l.italic, Color: l.ink}}
	if l.fill != "" {
		pattern := l.pattern
		if pattern == 0 {
			pattern = 1
		}
		s.Fill = excelize.Fill{Type: "pattern", Pattern: pattern, Color: []string{l.fill}}
	}
	if !cell {
		return s
	}
	s.Font.Size = l.size
	s.Font.Family = fontPlain
	if l.font != "" {
		s.Font.Family = l.font
	}
	s.Alignment = &excelize.Alignment{WrapText: l.wrap, Horizontal: l.across, Vertical: l.upright, Indent: l.indent}
	s.Protection = &excelize.Protection{Locked: !l.unlocked}
	if l.format != "" {
		format := l.format
		s.CustomNumFmt = &format
	}
	edge := func(side string, style int) {
		if style > 0 {
			s.Border = append(s.Border, excelize.Border{Type: side, Color: lineGrey, Style: style})
		}
	}
	if l.box {
		for _, side := range []string{"left", "right", "top", "bottom"} {
			edge(side, borderThin)
		}
		return s
	}
	edge("top", l.top)
	edge("bottom", l.bottom)
	return s
}
