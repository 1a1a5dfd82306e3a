package workbook

import (
	"strings"

	"github.com/xuri/excelize/v2"
)

// A pageSetup is how a sheet prints. Margins and widths are chosen for the narrower of A4 and Letter in each direction.
type pageSetup struct {
	landscape    bool
	wide         int   // pages across; 1 fits the whole width on one page, 0 prints at a scale that reads well and runs over
	groupEnds    []int // last columns of groups that start a new page; a common scale is then found for all groups
	titleRows    [2]int
	titleColumns int
	freezeRow    int // rows above stay in view
	freezeColumn int // columns left of it stay in view
	rowBreaks    []int
	lastRow      int // of what is printed; 0 prints all
	lastColumn   int
}

// Inches: A4 is 8.27 x 11.69, Letter 8.5 x 11; the printable widths leave the side margins off the narrower one.
const (
	sideMargin     = 0.55
	topMargin      = 0.85
	bottomMargin   = 0.85
	edgeMargin     = 0.4
	portraitWidth  = 8.27 - 2*sideMargin
	landscapeWidth = 11 - 2*sideMargin
	pixelsPerInch  = 96.0
	scaleSlack     = 0.96 // programs differ by a few per cent in column widths
	runningScale   = 62   // per cent, for tables that run over several pages across
	largestScale   = 90   // per cent
	smallestScale  = 10   // per cent, of the format
	paperA4        = 9
)

// standingLine is printed at the foot of each page.
const standingLine = "Planning aid: steady, confined, single layer. Not a licence assessment.\nMust be reviewed and signed by a qualified person under local rules."

// maxHeader keeps a page head well within the 255 characters that the format allows.
const maxHeader = 70

func headerText(s string) string {
	r := []rune(strings.ReplaceAll(cleanText(s), "\n", " "))
	if len(r) > maxHeader {
		r = append(r[:maxHeader-1], '…')
	}
	text := strings.ReplaceAll(string(r), "&", "&&")
	if len(r) > 0 && r[0] >= '0' && r[0] <= '9' {
		return " " + text // else the digits would be read as part of the font's size
	}
	return text
}

func pointer[T any](v T) *T { return &v }

// scale finds the largest scale at which every group of columns, with the repeated ones before it, fits the width.
func (s *sheet) scale() uint {
	width := func(from, to int) float64 {
		var digits float64
		for c := from; c <= to; c++ {
			digits += s.width(c)
		}
		return digits * digitPixels / pixelsPerInch
	}
	room := portraitWidth
	if s.page.landscape {
		room = landscapeWidth
	}
	scale := float64(largestScale)
	first := 1
	for _, last := range s.page.groupEnds {
		w := width(first, last)
		if first > 1 {
			w += width(1, s.page.titleColumns)
		}
		scale = min(scale, room/w*100*scaleSlack)
		first = last + 1
	}
	return uint(max(smallestScale, scale))
}

// setUp writes everything about the sheet that stands before its rows in the file.
func (s *sheet) setUp(f *excelize.File) error {
	fit := s.page.wide > 0
	if err := f.SetSheetProps(s.name, &excelize.SheetPropsOptions{FitToPage: &fit}); err != nil {
		return err
	}
	return f.SetSheetView(s.name, -1, &excelize.ViewOptions{ShowGridLines: pointer(false), ZoomScale: pointer(90.0)})
}

// finish writes everything that stands behind the rows.
func (s *sheet) finish(f *excelize.File, report string) error {
	layout := &excelize.PageLayoutOptions{Size: pointer(paperA4), Orientation: pointer("portrait")}
	if s.page.landscape {
		layout.Orientation = pointer("landscape")
	}
	if s.page.wide > 0 {
		layout.FitToWidth, layout.FitToHeight = pointer(s.page.wide), pointer(0)
	} else {
		scale := uint(runningScale)
		if len(s.page.groupEnds) > 0 {
			scale = s.scale()
		}
		layout.AdjustTo = &scale
		layout.PageOrder = pointer("downThenOver")
	}
	if err := f.SetPageLayout(s.name, layout); err != nil {
		return err
	}
	if err := f.SetPageMargins(s.name, &excelize.PageLayoutMarginsOptions{Left: pointer(sideMargin), Right: pointer(sideMargin),
		Top: pointer(topMargin), Bottom: pointer(bottomMargin), Header: pointer(edgeMargin), Footer: pointer(edgeMargin)}); err != nil {
		return err
	}
	head := `&L&"Arial,Regular"&8` + headerText(report) + `&R&"Arial,Regular"&8` + headerText(s.name) + `, page &P of &N`
	foot := `&L&"Arial,Regular"&8` + standingLine
	if err := f.SetHeaderFooter(s.name, &excelize.HeaderFooterOptions{OddHeader: head, OddFooter: foot,
		ScaleWithDoc: pointer(false), AlignWithMargins: pointer(true)}); err != nil {
		return err
	}
	return f.ProtectSheet(s.name, &excelize.SheetProtectionOptions{SelectLockedCells: true, SelectUnlockedCells: true,
		FormatColumns: true, FormatRows: true, FormatCells: true})
}
