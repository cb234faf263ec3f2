// Package workbook makes the invented demo workbook.
package workbook

import (
	"fmt"

	"github.com/xuri/excelize/v2"
)

// notice is what every reader of the workbook must see.
const notice = "Everything here is invented for trying out steelyard: brindle extract, Vane syndrome, the trials, the people named and all numbers do not exist."

// fixedDate keeps the bytes the same in every run.
const fixedDate = "2025-01-01T00:00:00Z"

// Names of the sheets.
const (
	trialsSheet    = "trials"
	planSheet      = "plan"
	judgementSheet = "judgement"
	guideSheet     = "guide"
)

// Bytes returns the workbook, the same bytes every time.
func Bytes() ([]byte, error) {
	f := excelize.NewFile()
	defer f.Close()
	b := &builder{f: f}
	b.do(f.SetSheetName("Sheet1", trialsSheet))
	b.newSheet(planSheet)
	b.newSheet(judgementSheet)
	b.newSheet(guideSheet)
	b.styles()
	b.writeTrials()
	b.writePlan()
	b.writeJudgements()
	b.writeGuide()
	b.do(f.SetDocProps(&excelize.DocProperties{
		Title: "Brindle extract in Vane syndrome (invented)", Subject: "invented demonstration data", Description: notice,
		Creator: "steelyard", LastModifiedBy: "steelyard", Created: fixedDate, Modified: fixedDate,
	}))
	if b.err != nil {
		return nil, b.err
	}
	buffer, err := f.WriteToBuffer()
	if err != nil {
		return nil, err
	}
	return buffer.Bytes(), nil
}

// builder writes cells and keeps the first error.
type builder struct {
	f                   *excelize.File
	err                 error
	title, header, wrap int // styles
}

func (b *builder) do(err error) {
	if b.err == nil {
		b.err = err
	}
}

func (b *builder) newSheet(name string) {
	_, err := b.f.NewSheet(name)
	b.do(err)
}

func (b *builder) styles() {
	style := func(s *excelize.Style) int {
		id, err := b.f.NewStyle(s)
		b.do(err)
		return id
	}
	b.title = style(&excelize.Style{Font: &excelize.Font{Bold: true, Size: 13}})
	b.header = style(&excelize.Style{
		Font:      &excelize.Font{Bold: true},
		Alignment: &excelize.Alignment{Horizontal: "center", Vertical: "center", WrapText: true},
		Border:    []excelize.Border{{Type: "bottom", Style: 1, Color: "000000"}},
	})
	b.wrap = style(&excelize.Style{Alignment: &excelize.Alignment{WrapText: true, Vertical: "top"}})
}

// row writes values from column A on; nil leaves a cell blank.
func (b *builder) row(sheet string, row int, values ...any) {
	for i, value := range values {
		if value == nil || value == "" {
			continue
		}
		cell, err := excelize.CoordinatesToCellName(i+1, row)
		b.do(err)
		b.do(b.f.SetCellValue(sheet, cell, value))
	}
}

// Rows of the sheet "trials".
const (
	groupRow  = 4
	headerRow = 5
)

// merged are the cells of the header that are merged, groups over their columns
// and single headers over both rows.
var merged = [][2]string{{"A4", "A5"}, {"B4", "B5"}, {"C4", "C5"}, {"D4", "G4"}, {"H4", "K4"}, {"L4", "N4"}, {"O4", "O5"}, {"P4", "P5"}, {"Q4", "Q5"}, {"R4", "R5"}}

func (b *builder) writeTrials() {
	b.row(trialsSheet, 1, "Brindle extract in Vane syndrome (invented)")
	b.row(trialsSheet, 2, notice)
	b.row(trialsSheet, groupRow, "Study", "Date", "Outcome", "Brindle", nil, nil, nil, "Without", nil, nil, nil, "Risk ratio", nil, nil,
		"Risk of bias", "Setting", "Source", "Note")
	b.row(trialsSheet, headerRow, nil, nil, nil, "Events", "Total", "Mean", "SD", "Events", "Total", "Mean", "SD", "Estimate", "95% CI low", "95% CI high")
	for _, m := range merged {
		b.do(b.f.MergeCell(trialsSheet, m[0], m[1]))
	}
	b.do(b.f.SetCellStyle(trialsSheet, "A1", "A1", b.title))
	b.do(b.f.SetCellStyle(trialsSheet, "A4", "R5", b.header))
	row := headerRow + 1
	for _, outcome := range []string{flare, symptom, harm} {
		for i := range trials {
			if values := trials[i].row(outcome); values != nil {
				b.row(trialsSheet, row, values...)
				row++
			}
		}
	}
	b.widths(trialsSheet, "A", 21, "B", 9, "C", 26, "O", 14, "P", 8, "Q", 18, "R", 44)
	b.freeze(trialsSheet, headerRow, 1)
}

// row returns the trial's row for an outcome, nil if the trial does not have it.
func (t *trial) row(outcome string) []any {
	head := []any{t.name, t.date, outcome}
	source := fmt.Sprintf("p. %d, table %d", t.page, map[string]int{flare: 2, symptom: 3, harm: 4}[outcome])
	tail := []any{t.riskOfBias, t.setting, source}
	var middle []any
	note := ""
	switch {
	case outcome == flare && t.flare.events1 < 0:
		middle = []any{nil, t.flare.total1, nil, nil, nil, t.flare.total2, nil, nil, t.ratio.estimate, t.ratio.low, t.ratio.high}
		note = "reports the ratio alone; counts asked for, no answer"
	case outcome == flare:
		middle = t.flare.cells()
	case outcome == harm:
		middle = t.harm.cells()
		if t.harm.events1+t.harm.events2 == 0 {
			note = "the report states that there was none in either arm"
		}
	case t.symptom.total1 == 0:
		return nil
	default:
		m := t.symptom
		middle = []any{nil, m.total1, m.mean1, m.sd1, nil, m.total2, m.mean2, m.sd2, nil, nil, nil}
		note = "people with a score at 24 weeks"
	}
	return append(append(append(head, middle...), tail...), note)
}

func (c counts) cells() []any {
	return []any{c.events1, c.total1, nil, nil, c.events2, c.total2, nil, nil, nil, nil, nil}
}

func (b *builder) writePlan() {
	b.row(planSheet, 1, "Plan of the invented review")
	b.row(planSheet, 3, "setting", "value", "outcome", "reason", "date")
	for i, values := range planRows {
		b.row(planSheet, 4+i, values...)
	}
	b.do(b.f.SetCellStyle(planSheet, "A1", "A1", b.title))
	b.do(b.f.SetCellStyle(planSheet, "A3", "E3", b.header))
	b.widths(planSheet, "A", 12, "B", 46, "C", 27, "D", 70, "E", 12)
	b.freeze(planSheet, 3, 0)
}

func (b *builder) writeJudgements() {
	b.row(judgementSheet, 1, "Judgements of the invented panel")
	b.row(judgementSheet, 2, notice)
	b.row(judgementSheet, 4, "outcome", "domain", "rating", "reason", "by", "date")
	for i, values := range judgementRows {
		b.row(judgementSheet, 5+i, values...)
	}
	b.do(b.f.SetCellStyle(judgementSheet, "A1", "A1", b.title))
	b.do(b.f.SetCellStyle(judgementSheet, "A4", "F4", b.header))
	b.widths(judgementSheet, "A", 27, "B", 17, "C", 11, "D", 88, "E", 26, "F", 12)
	b.freeze(judgementSheet, 4, 0)
}

func (b *builder) writeGuide() {
	for i, values := range guideRows {
		b.row(guideSheet, 1+i, values...)
	}
	b.do(b.f.SetCellStyle(guideSheet, "A1", "A1", b.title))
	b.do(b.f.SetCellStyle(guideSheet, "A4", "B4", b.header))
	b.do(b.f.SetCellStyle(guideSheet, "B1", "B1", b.wrap))
	b.widths(guideSheet, "A", 20, "B", 90)
}

// widths sets columns' widths, given as name and characters in turn.
func (b *builder) widths(sheet string, pairs ...any) {
	for i := 0; i+1 < len(pairs); i += 2 {
		column, width := pairs[i].(string), pairs[i+1].(int)
		b.do(b.f.SetColWidth(sheet, column, column, float64(width)))
	}
}

// freeze keeps the rows above and the columns left of the table in view.
func (b *builder) freeze(sheet string, rows, columns int) {
	corner, err := excelize.CoordinatesToCellName(columns+1, rows+1)
	b.do(err)
	pane := "bottomLeft"
	if columns > 0 {
		pane = "bottomRight"
	}
	b.do(b.f.SetPanes(sheet, &excelize.Panes{Freeze: true, XSplit: columns, YSplit: rows, TopLeftCell: corner, ActivePane: pane}))
}
