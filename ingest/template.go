package ingest

import (
	"fmt"
	"slices"
	"strings"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Names of the template's sheets. All but the first are reserved: the reader
// never takes them for studies.
const (
	studiesSheet   = "studies"
	planSheet      = "plan"
	guideSheet     = "guide"
	judgementSheet = "judgement"
	listsSheet     = "lists"
)

// templateRows is the last row down to which the template's cells know their
// drop-downs and limits. (Other programs may cut longer ranges when they save.)
const templateRows = 1001

// templateDate keeps the bytes the same in every run.
const templateDate = "2025-01-01T00:00:00Z"

// Template returns an empty workbook (.xlsx) for a measure, to be filled in by
// hand: the sheet "studies" with the columns of the kinds of numbers asked for, or
// of the measure's most usual kind if there are none; "plan" with every setting;
// "guide"; "judgement"; and the hidden "lists" of the drop-downs. The same call
// gives the same bytes. The error is a *KindError if the measure is not made from
// such numbers.
func Template(m effect.Measure, kinds ...Kind) ([]byte, error) {
	fields, err := templateFields(m, kinds)
	if err != nil {
		return nil, err
	}
	f := excelize.NewFile()
	defer f.Close()
	t := &templateWriter{f: f, measure: m, fields: fields}
	t.do(f.SetSheetName("Sheet1", studiesSheet))
	for _, name := range []string{planSheet, guideSheet, judgementSheet, listsSheet} {
		_, err := f.NewSheet(name)
		t.do(err)
	}
	t.styles()
	t.writeStudies()
	t.writePlan()
	t.writeGuide()
	t.writeJudgement()
	t.do(f.SetSheetVisible(listsSheet, false))
	t.do(f.SetDocProps(&excelize.DocProperties{Title: t.title(), Creator: "steelyard", LastModifiedBy: "steelyard", Created: templateDate, Modified: templateDate}))
	if t.err != nil {
		return nil, fmt.Errorf("the template cannot be written: %w", t.err)
	}
	buffer, err := f.WriteToBuffer()
	if err != nil {
		return nil, fmt.Errorf("the template cannot be written: %w", err)
	}
	return buffer.Bytes(), nil
}

// templateWriter writes the sheets and keeps the first error.
type templateWriter struct {
	f       *excelize.File
	measure effect.Measure
	fields  []review.Field
	lists   int // columns of the sheet "lists" in use
	err     error

	heading, header, wrap, text int // styles
}

func (t *templateWriter) do(err error) {
	if t.err == nil {
		t.err = err
	}
}

func (t *templateWriter) title() string {
	if t.measure == effect.Unspecified {
		return "Results of studies"
	}
	return "Results of studies: " + t.measure.String()
}

func (t *templateWriter) styles() {
	style := func(s *excelize.Style) int {
		id, err := t.f.NewStyle(s)
		t.do(err)
		return id
	}
	t.heading = style(&excelize.Style{Font: &excelize.Font{Bold: true, Size: 13}})
	t.header = style(&excelize.Style{
		Font:      &excelize.Font{Bold: true},
		Alignment: &excelize.Alignment{Horizontal: "center", Vertical: "center", WrapText: true},
		Border:    []excelize.Border{{Type: "bottom", Style: 1, Color: "000000"}},
	})
	t.wrap = style(&excelize.Style{Alignment: &excelize.Alignment{WrapText: true, Vertical: "top"}})
	const asTyped = 49 // the built-in format "@", which keeps 2016-03 and 0.8, 1.2 as typed
	t.text = style(&excelize.Style{NumFmt: asTyped, Alignment: &excelize.Alignment{WrapText: true, Vertical: "top"}})
}

// row writes texts from column A on; blank ones leave their cell alone.
func (t *templateWriter) row(sheet string, row int, texts ...string) {
	for i, text := range texts {
		if text != "" {
			t.do(t.f.SetCellStr(sheet, cellAt(i+1, row), text))
		}
	}
}

func cellAt(col, row int) string { return fmt.Sprintf("%s%d", review.ColumnLetters(col), row) }

// column sets the width of a column and, unless it is 0, its style.
func (t *templateWriter) column(sheet string, col int, width float64, style int) {
	name := review.ColumnLetters(col)
	t.do(t.f.SetColWidth(sheet, name, name, width))
	if style != 0 {
		t.do(t.f.SetColStyle(sheet, name, style))
	}
}

// headerRow writes a header into row 1 and keeps it in view, with the columns
// before it.
func (t *templateWriter) headerRow(sheet string, columns int, texts ...string) {
	t.row(sheet, 1, texts...)
	t.do(t.f.SetCellStyle(sheet, "A1", cellAt(len(texts), 1), t.header))
	panes := &excelize.Panes{Freeze: true, XSplit: columns, YSplit: 1, TopLeftCell: cellAt(columns+1, 2), ActivePane: "bottomLeft"}
	if columns > 0 {
		panes.ActivePane = "bottomRight"
	}
	t.do(t.f.SetPanes(sheet, panes))
}

// comment explains a cell.
func (t *templateWriter) comment(sheet, cell, text string) {
	const perLine, lineHeight = 38, 17
	height := uint(lineHeight * (2 + len(text)/perLine))
	t.do(t.f.AddComment(sheet, excelize.Comment{Cell: cell, Author: "steelyard", Text: text, Width: 280, Height: height}))
}

// dropDown offers choices in the cells of a range; open lets other texts stand
// after a question.
func (t *templateWriter) dropDown(sheet, cells string, choices []string, open bool) {
	t.lists++
	list := review.ColumnLetters(t.lists)
	for i, text := range choices {
		t.do(t.f.SetCellStr(listsSheet, cellAt(t.lists, i+1), text))
	}
	v := excelize.NewDataValidation(true)
	v.SetSqref(cells)
	v.SetSqrefDropList(fmt.Sprintf("%s!$%s$1:$%s$%d", listsSheet, list, list, len(choices)))
	if open {
		v.SetError(excelize.DataValidationErrorStyleWarning, "Not in the list", "The list has the usual words. Keep another one?")
	} else {
		v.SetError(excelize.DataValidationErrorStyleStop, "Not in the list", "Choose one of the list.")
	}
	t.do(t.f.AddDataValidation(sheet, v))
}

// writeStudies writes the sheet to be filled in.
func (t *templateWriter) writeStudies() {
	names := make([]string, len(t.fields))
	for i, f := range t.fields {
		names[i] = f.String()
	}
	t.headerRow(studiesSheet, 1, names...)
	t.do(t.f.SetRowHeight(studiesSheet, 1, 32))
	for i, f := range t.fields {
		help := helpFor(f, t.measure)
		t.comment(studiesSheet, cellAt(i+1, 1), help.text+" Example: "+help.example)
		width, style := 11.0, 0
		if !f.Numeric() {
			width, style = 15, t.text
		}
		if slices.Contains([]review.Field{review.StudyName, review.OutcomeField, review.SourceField, review.NoteField, review.Accept}, f) {
			width = 24
		}
		t.column(studiesSheet, i+1, width, style)
		t.do(t.f.SetCellStyle(studiesSheet, cellAt(i+1, 1), cellAt(i+1, 1), t.header))
		cells := cellAt(i+1, 2) + ":" + cellAt(i+1, templateRows)
		switch {
		case help.choices != nil:
			t.dropDown(studiesSheet, cells, help.choices, help.open)
		case help.limit != noLimit:
			t.numberRange(cells, help.limit)
		}
	}
}

// numberRange lets the spreadsheet program refuse numbers that cannot be right.
// Whole numbers are only asked for, as counts corrected for clusters are not.
func (t *templateWriter) numberRange(cells string, l limit) {
	const decimal, whole = excelize.DataValidationTypeDecimal, excelize.DataValidationTypeWhole
	const between, above, least = excelize.DataValidationOperatorBetween, excelize.DataValidationOperatorGreaterThan, excelize.DataValidationOperatorGreaterThanOrEqual
	v := excelize.NewDataValidation(true)
	v.SetSqref(cells)
	message, style := "", excelize.DataValidationErrorStyleStop
	switch l {
	case positive:
		t.do(v.SetRange(0, 0, decimal, above))
		message = "A number above 0 belongs here."
	case wholeFromZero:
		t.do(v.SetRange(0, 0, whole, least))
		message, style = "A count belongs here, 0 or a whole number above it. Keep this one?", excelize.DataValidationErrorStyleWarning
	case wholeFromOne:
		t.do(v.SetRange(1, 0, whole, least))
		message, style = "A number of people belongs here, 1 or a whole number above it. Keep this one?", excelize.DataValidationErrorStyleWarning
	case openUnit:
		t.do(v.SetRange(0.0001, 0.9999, decimal, between))
		message = "A fraction between 0 and 1 belongs here: 95% is 0.95."
	case closedUnit:
		t.do(v.SetRange(0, 1, decimal, between))
		message = "A number from 0 to 1 belongs here."
	case correlation:
		t.do(v.SetRange(-1, 1, decimal, between))
		message = "A number between -1 and 1 belongs here."
	default:
		t.do(v.SetRange(-1e15, 1e15, decimal, between))
		message = "A number belongs here."
	}
	v.SetError(style, "Is this right?", message)
	t.do(t.f.AddDataValidation(studiesSheet, v))
}

// exampleRun is shown in the plan behind a "#", which keeps it from running.
const exampleRun = "without high risk of bias: risk of bias is not high"

// writePlan writes every setting, its value left blank so that the default holds;
// the measure is the template's.
func (t *templateWriter) writePlan() {
	t.headerRow(planSheet, 0, "setting", "value", "outcome", "reason", "default", "meaning", "date")
	for col, width := range []float64{20, 34, 24, 34, 38, 70, 12} {
		t.column(planSheet, col+1, width, t.text)
	}
	t.do(t.f.SetCellStyle(planSheet, "A1", "G1", t.header))
	t.comment(planSheet, "G1", "When it was agreed: year-month-day. A threshold agreed after results were seen is flagged.")
	t.comment(planSheet, "B1", "Leave a value blank for the default. A flag of the call wins over this sheet.")
	t.comment(planSheet, "C1", "Blank for all outcomes. For one outcome, copy the row and write the outcome's name here.")
	t.comment(planSheet, "D1", "Why this was chosen, and when. It is kept with the answer.")
	row := 2
	for _, s := range review.Settings() {
		value, reason := "", ""
		if s.Name == review.SettingMeasure && t.measure != effect.Unspecified {
			value, reason = t.measure.String(), "the template was made for it"
		}
		t.row(planSheet, row, s.Name, value, "", reason, settingDefault(s), settingMeaning(s))
		if s.Values != nil {
			t.dropDown(planSheet, cellAt(2, row), s.Values, false)
		}
		row++
	}
	t.row(planSheet, row, "# "+planRun, exampleRun, "", "", "", "a planned sensitivity analysis, NAME: FILTER or NAME: setting = value; without the # it is run. Any number of such rows may follow")
}

func settingDefault(s review.Setting) string {
	if s.Default != "" && s.Unless != "" {
		return s.Default + "; " + s.Unless
	}
	return s.Default + s.Unless
}

func settingMeaning(s review.Setting) string {
	switch {
	case s.Unit != "":
		return s.Meaning + "; " + s.Unit
	case s.Values != nil:
		return s.Meaning + ": " + strings.Join(s.Values, ", ")
	}
	return s.Meaning
}
