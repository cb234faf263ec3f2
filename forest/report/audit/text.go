package audit

import (
	"maps"
	"slices"
	"strings"
	"unicode"

	"github.com/xuri/excelize/v2"

	"steelyard/forest/words"
)

// clean removes what text must not carry into a workbook: control characters and
// marks that turn the direction of writing.
func clean(text string) string {
	return strings.Map(func(r rune) rune {
		switch {
		case r == '\n':
			return r
		case unicode.IsControl(r), r >= 0x202A && r <= 0x202E, r >= 0x2066 && r <= 0x2069, r == 0x200E, r == 0x200F:
			return -1
		}
		return r
	}, text)
}

// note hangs a note on a cell, under what its note says already.
func (s *sheet) note(c cell, text string) {
	if s.notes == nil {
		s.notes = map[cell]string{}
	}
	before, have := s.notes[c]
	if !have {
		s.noted = append(s.noted, c)
		s.notes[c] = clean(text)
		return
	}
	s.notes[c] = before + "\n" + clean(text)
}

// hangNotes writes the notes.
func (s *sheet) hangNotes() {
	for _, c := range s.noted {
		text := s.notes[c]
		lines := len(text)/38 + 2 + strings.Count(text, "\n")
		s.book.do(s.book.f.AddComment(s.name, excelize.Comment{
			Author: "steelyard", Cell: c.local(), Width: 260, Height: uint(18 * lines),
			Paragraph: []excelize.RichTextRun{{Text: text, Font: &excelize.Font{Family: "Arial", Size: 9}}},
		}))
	}
}

// page is how a finished sheet is shown and printed.
type page struct {
	widths   []float64 // of the columns from A on; 0 keeps the usual
	rest     float64   // width of the columns after them; 0 keeps the usual
	frozen   cell      // first cell that scrolls; the zero cell freezes nothing
	repeated int       // rows repeated on each printed page
	columns  int       // printed columns; 0 prints all
	last     int       // last printed row
	upright  bool
	whole    bool // on one printed page
}

// finish sets the sheet's widths, panes and print set-up.
func (s *sheet) finish(p page) {
	f, b := s.book.f, s.book
	for i, w := range p.widths {
		if w > 0 {
			b.do(f.SetColWidth(s.name, letters(i+1), letters(i+1), w))
		}
	}
	widest := 0
	for _, row := range s.rows {
		widest = max(widest, len(row))
	}
	if p.rest > 0 && widest > len(p.widths) {
		b.do(f.SetColWidth(s.name, letters(len(p.widths)+1), letters(widest), p.rest))
	}
	if p.frozen.sheet != nil {
		pane := "bottomLeft"
		if p.frozen.col > 1 {
			pane = "bottomRight"
		}
		b.do(f.SetPanes(s.name, &excelize.Panes{Freeze: true, XSplit: p.frozen.col - 1, YSplit: p.frozen.row - 1, TopLeftCell: p.frozen.local(), ActivePane: pane}))
	}
	orientation, paper, across, down := "landscape", 9, 1, 0
	if p.upright {
		orientation = "portrait"
	}
	if p.whole {
		down = 1
	}
	fit := true
	b.do(f.SetSheetProps(s.name, &excelize.SheetPropsOptions{FitToPage: &fit}))
	b.do(f.SetPageLayout(s.name, &excelize.PageLayoutOptions{Orientation: &orientation, Size: &paper, FitToWidth: &across, FitToHeight: &down}))
	margin, deep := 0.5, 0.7
	b.do(f.SetPageMargins(s.name, &excelize.PageLayoutMarginsOptions{Left: &margin, Right: &margin, Top: &margin, Bottom: &deep}))
	b.do(f.SetHeaderFooter(s.name, &excelize.HeaderFooterOptions{OddFooter: "&L&8" + strings.ReplaceAll(s.name, "&", "&&") + "&R&8page &P of &N"}))
	grid := false
	b.do(f.SetSheetView(s.name, 0, &excelize.ViewOptions{ShowGridLines: &grid}))
	s.hangNotes()
	s.heighten(p)
	s.printed(p, widest)
}

// lineHeight is the height of a line of text in points.
const lineHeight = 13

// letterShare is how many letters of running text stand, at the least, where a column's
// width counts one digit of the usual size.
const letterShare = 1.1

// heighten gives rows of wrapped texts the height that these need, which programs do
// not find out by themselves when they open a workbook.
func (s *sheet) heighten(p page) {
	lines := map[int]int{}
	for _, c := range s.tall {
		width := p.rest
		if c.col <= len(p.widths) && p.widths[c.col-1] > 0 {
			width = p.widths[c.col-1]
		}
		if width == 0 {
			width = 9
		}
		lines[c.row] = max(lines[c.row], words.Lines(s.get(c.col, c.row).Text, letterShare*width))
	}
	for _, row := range slices.Sorted(maps.Keys(lines)) {
		if lines[row] > 1 {
			s.book.do(s.book.f.SetRowHeight(s.name, row, min(400, float64(lineHeight*lines[row]+2))))
		}
	}
}

// printed names the rows that repeat on each page and the columns that are printed.
func (s *sheet) printed(p page, widest int) {
	b := s.book
	if p.repeated > 0 {
		b.do(b.f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", Scope: s.name,
			RefersTo: block{s.at(1, 1), s.at(1, p.repeated)}.rows()}))
	}
	if p.columns > 0 && p.columns < widest {
		b.do(b.f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Area", Scope: s.name,
			RefersTo: block{s.at(1, 1), s.at(p.columns, max(1, p.last))}.absolute()}))
	}
}
