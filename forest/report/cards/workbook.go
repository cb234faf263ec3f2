package cards

import (
	"fmt"
	"slices"

	"github.com/xuri/excelize/v2"

	"steelyard/forest/words"
	"steelyard/meta/review"
	"steelyard/meta/synthesis"
)

// Names of the sheets.
const (
	cardsSheet   = "panel"
	numbersSheet = "numbers"
)

// fixedDate keeps the bytes the same in every run.
const fixedDate = "2025-01-01T00:00:00Z"

// Workbook returns the cards of a synthesis as a workbook (.xlsx), the same bytes for
// the same results: the sheet "panel" holds the words of each card with the panel's own
// ratings, "numbers" the absolute effects at full precision, a row for each outcome and
// baseline. Everything from the sheet is written as text, never as a formula.
func Workbook(s *synthesis.Synthesis) ([]byte, error) {
	f := excelize.NewFile()
	defer f.Close()
	w := &writer{f: f}
	w.do(f.SetSheetName("Sheet1", cardsSheet))
	_, err := f.NewSheet(numbersSheet)
	w.do(err)
	w.styles()
	w.cards(s)
	w.numbers(s)
	w.print()
	w.do(f.SetDocProps(&excelize.DocProperties{Title: "Panel cards", Creator: "steelyard", LastModifiedBy: "steelyard", Created: fixedDate, Modified: fixedDate}))
	if w.err != nil {
		return nil, fmt.Errorf("writing the workbook of cards: %w", w.err)
	}
	buffer, err := f.WriteToBuffer()
	if err != nil {
		return nil, fmt.Errorf("writing the workbook of cards: %w", err)
	}
	return buffer.Bytes(), nil
}

// writer fills the workbook and keeps the first error.
type writer struct {
	f                    *excelize.File
	row                  int // of the sheet of cards, the next to be written
	title, head, wrapped int // styles
	err                  error
}

func (w *writer) do(err error) {
	if w.err == nil {
		w.err = err
	}
}

func (w *writer) styles() {
	style := func(s *excelize.Style) int {
		id, err := w.f.NewStyle(s)
		w.do(err)
		return id
	}
	face := func(bold bool, size float64) *excelize.Font {
		return &excelize.Font{Family: "Arial", Size: size, Bold: bold}
	}
	wrap := &excelize.Alignment{WrapText: true, Vertical: "top"}
	w.title = style(&excelize.Style{Font: face(true, 13)})
	w.head = style(&excelize.Style{Font: face(true, 10), Alignment: wrap, Border: []excelize.Border{{Type: "bottom", Style: 1, Color: "1A1A1A"}}})
	w.wrapped = style(&excelize.Style{Font: face(false, 10), Alignment: wrap})
	for i, width := range cardWidths {
		col := review.ColumnLetters(i + 1)
		w.do(w.f.SetColWidth(cardsSheet, col, col, width))
	}
	w.do(w.f.SetColWidth(numbersSheet, "A", "B", 26))
	w.do(w.f.SetColWidth(numbersSheet, "C", "Z", 15))
}

// cardWidths are the widths of the columns of the cards: the digits of the usual size
// that each holds.
var cardWidths = []float64{24, 84, 34, 44}

// The height of a line in points, and how many letters of running text stand, at the
// least, where a width counts one digit.
const (
	lineHeight  = 13.
	letterShare = 1.1
)

// line writes texts into the next row of the cards, which is made as high as the
// tallest of them needs: not every program finds that out by itself.
func (w *writer) line(style int, texts ...string) {
	w.row++
	lines := 1
	for i, text := range texts {
		w.text(cardsSheet, i+1, w.row, text)
		lines = max(lines, words.Lines(text, letterShare*cardWidths[i]))
	}
	if style != w.title {
		w.do(w.f.SetRowHeight(cardsSheet, w.row, min(400, lineHeight*float64(lines)+2)))
	}
	w.do(w.f.SetCellStyle(cardsSheet, cell(1, w.row), cell(4, w.row), style))
}

// print sets how the sheets are printed: lying, each as wide as a page.
func (w *writer) print() {
	fit, orientation, paper, across, down := true, "landscape", 9, 1, 0
	for _, sheet := range []string{cardsSheet, numbersSheet} {
		w.do(w.f.SetSheetProps(sheet, &excelize.SheetPropsOptions{FitToPage: &fit}))
		w.do(w.f.SetPageLayout(sheet, &excelize.PageLayoutOptions{Orientation: &orientation, Size: &paper, FitToWidth: &across, FitToHeight: &down}))
		w.do(w.f.SetHeaderFooter(sheet, &excelize.HeaderFooterOptions{OddFooter: "&R&8page &P of &N"}))
	}
}

func (w *writer) text(sheet string, col, row int, text string) {
	if text != "" {
		w.do(w.f.SetCellStr(sheet, cell(col, row), text))
	}
}

func cell(col, row int) string { return fmt.Sprintf("%s%d", review.ColumnLetters(col), row) }

// cards writes the words of every card.
func (w *writer) cards(s *synthesis.Synthesis) {
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Result == nil || o.Panel == nil {
			w.line(w.title, o.Name)
			w.line(w.wrapped, "No result", o.Problem)
			w.row++
			continue
		}
		w.card(words.PanelCard(s, o))
	}
	w.line(w.head, "Cautions")
	for _, caution := range s.Cautions {
		w.line(w.wrapped, "", caution)
	}
}

func (w *writer) card(card words.Card) {
	w.line(w.title, card.Title)
	w.line(w.wrapped, "Pooled", card.Pooled)
	for _, sentence := range card.Sentences {
		w.line(w.wrapped, "In one line", sentence)
	}
	for _, fact := range card.Facts {
		w.line(w.wrapped, fact.Label, fact.Text)
	}
	if t := card.Absolute; t != nil {
		w.line(w.head, t.Heads...)
		for _, row := range t.Rows {
			w.line(w.wrapped, row...)
		}
	}
	if len(card.Large) > 0 {
		w.line(w.head, "Large enough to matter?")
	}
	for _, fact := range card.Large {
		w.line(w.wrapped, fact.Label, fact.Text)
	}
	w.line(w.head, "domain", "numbers", "panel's rating", "panel's reason")
	for _, d := range append(slices.Clone(card.Domains), card.Certainty) {
		numbers := ""
		for i, number := range d.Numbers {
			if i > 0 {
				numbers += "\n"
			}
			numbers += number
		}
		w.line(w.wrapped, d.Domain, numbers, d.Rating, d.Reason)
	}
	for _, remark := range card.Remarks {
		w.line(w.wrapped, "", remark)
	}
	w.row++
}

// numberHeads are the columns of the sheet of numbers.
var numberHeads = []string{"outcome", "baseline", "baseline risk", "treated risk", "treated low", "treated high",
	"difference per 1000", "difference low", "difference high", "number needed", "threshold low per 1000", "threshold high per 1000",
	"probability lower", "probability trivial", "probability higher", "information size", "share reached"}

// numbers writes the absolute effects, each number as a number.
func (w *writer) numbers(s *synthesis.Synthesis) {
	for i, head := range numberHeads {
		w.text(numbersSheet, i+1, 1, head)
	}
	w.do(w.f.SetCellStyle(numbersSheet, "A1", cell(len(numberHeads), 1), w.head))
	row := 2
	for i := range s.Outcomes {
		o := &s.Outcomes[i]
		if o.Panel == nil {
			continue
		}
		for j := range o.Panel.Rows {
			r := &o.Panel.Rows[j]
			if r.Absolute == nil {
				continue
			}
			w.text(numbersSheet, 1, row, o.Name)
			w.text(numbersSheet, 2, row, r.Baseline.Name)
			for col, value := range numbersOf(r) {
				w.do(w.f.SetCellFloat(numbersSheet, cell(col, row), value, -1, 64))
			}
			row++
		}
	}
	w.do(w.f.SetPanes(numbersSheet, &excelize.Panes{Freeze: true, YSplit: 1, TopLeftCell: "A2", ActivePane: "bottomLeft"}))
}

// numbersOf returns the numbers of a row by their column; what there is none of is left
// out.
func numbersOf(r *synthesis.PanelRow) map[int]float64 {
	a := r.Absolute
	values := map[int]float64{
		3: a.Baseline, 4: a.Treated.Value, 5: a.Treated.Low, 6: a.Treated.High,
		7: 1000 * a.Difference.Value, 8: 1000 * a.Difference.Low, 9: 1000 * a.Difference.High,
	}
	if n := r.Needed; n != nil && a.Difference.Value != 0 {
		values[10] = n.Value
	}
	if z := r.Zone; z != nil {
		if z.Per1000 != nil && z.Low != nil {
			values[11] = z.Per1000.Low
		}
		if z.Per1000 != nil && z.High != nil {
			values[12] = z.Per1000.High
		}
		for _, region := range z.Regions {
			switch {
			case region.Name == "trivial":
				values[14] = region.Posterior
			case region.High == z.Limits.Low:
				values[13] = region.Posterior
			default:
				values[15] = region.Posterior
			}
		}
	}
	if i := r.Information; i != nil {
		values[16] = i.Total()
		if i.People > 0 {
			values[17] = i.Share()
		}
	}
	return values
}
