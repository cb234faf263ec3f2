package agree

import (
	"fmt"
	"slices"

	"github.com/xuri/excelize/v2"

	"steelyard/meta/effect"
	"steelyard/meta/review"
)

// Names of the sheets of the workbook.
const (
	studiesSheet = "studies"
	listSheet    = "disagreements"
	planSheet    = "plan"
)

// column is a column of the agreed sheet.
type column struct {
	field  review.Field
	header string
}

// Workbook returns a workbook to settle the disagreements in. Its sheet of studies has
// every row of both extractions; a cell in which they differ holds both texts, with a
// bar between them, until somebody types the right one over it. It is read like any
// sheet: unsettled numbers are errors of their rows. A second sheet lists what is to be
// settled, large differences first; a third holds the plan of the first, if it has one.
func (c *Comparison) Workbook(plan *review.Plan) ([]byte, error) {
	w := &writer{f: excelize.NewFile(), columns: c.columns()}
	w.do(w.f.SetSheetName("Sheet1", studiesSheet))
	bold, err := w.f.NewStyle(&excelize.Style{Font: &excelize.Font{Bold: true}})
	w.do(err)
	w.open, err = w.f.NewStyle(&excelize.Style{Fill: excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{"#F0E442"}}, Border: []excelize.Border{
		{Type: "left", Style: 2}, {Type: "right", Style: 2}, {Type: "top", Style: 2}, {Type: "bottom", Style: 2}}})
	w.do(err)
	for i, col := range w.columns {
		w.text(studiesSheet, i+1, 1, col.header)
	}
	_, err = w.f.NewSheet(listSheet)
	w.do(err)
	for i, head := range []string{"cell", "study", "outcome", "column", "first sheet", "second sheet", "what"} {
		w.text(listSheet, i+1, 1, head)
	}
	for _, sheet := range []string{studiesSheet, listSheet} {
		w.do(w.f.SetRowStyle(sheet, 1, 1, bold))
	}
	w.list = 2
	for i := range c.Pairs {
		w.pair(i+2, &c.Pairs[i])
	}
	row := len(c.Pairs) + 2
	for _, part := range []struct {
		rows []*review.Study
		what string
	}{{c.OnlyFirst, "in the first sheet only"}, {c.OnlySecond, "in the second sheet only"}} {
		for _, s := range part.rows {
			w.row(row, s)
			w.entry(fmt.Sprintf("A%d", row), s, Cell{}, part.what)
			row++
		}
	}
	w.plan(plan)
	if w.err != nil {
		return nil, fmt.Errorf("writing the workbook: %w", w.err)
	}
	buffer, err := w.f.WriteToBuffer()
	if err != nil {
		return nil, fmt.Errorf("writing the workbook: %w", err)
	}
	return buffer.Bytes(), nil
}

// columns returns the columns of both extractions: who, when and what first, then those
// of the first in their order, then what the second has besides.
func (c *Comparison) columns() []column {
	all := []column{{review.StudyName, "study"}}
	has := func(have func(*review.Study) bool) bool {
		return slices.ContainsFunc(c.First.Studies, func(s review.Study) bool { return have(&s) }) ||
			slices.ContainsFunc(c.Second.Studies, func(s review.Study) bool { return have(&s) })
	}
	for _, own := range []struct {
		field review.Field
		have  func(*review.Study) bool
	}{
		{review.StudyID, func(s *review.Study) bool { return s.ID != "" }},
		{review.DateField, func(s *review.Study) bool { return s.Date.Year != 0 }},
		{review.OutcomeField, func(s *review.Study) bool { return s.Outcome != "" }},
		{review.MeasureField, func(s *review.Study) bool { return s.Measure != effect.Unspecified }},
		{review.BetterField, func(s *review.Study) bool { return s.Better != review.BetterUnknown }},
	} {
		if has(own.have) {
			all = append(all, column{own.field, own.field.String()})
		}
	}
	for _, x := range []*review.Extraction{c.First, c.Second} {
		for i := range x.Studies {
			all = withColumnsOf(all, &x.Studies[i])
		}
	}
	return all
}

// withColumnsOf adds the columns of a row that are not there yet.
func withColumnsOf(all []column, s *review.Study) []column {
	add := func(col column) {
		if !slices.ContainsFunc(all, func(have column) bool { return have.header == col.header }) {
			all = append(all, col)
		}
	}
	for _, n := range s.Numbers {
		add(column{n.Field, n.Field.String()})
	}
	for _, r := range s.Remarks {
		add(column{review.NoField, r.Header})
	}
	return all
}

// writer fills the workbook and keeps the first error.
type writer struct {
	f       *excelize.File
	columns []column
	list    int // next row of the list
	open    int // style of a cell to be settled
	err     error
}

func (w *writer) do(err error) {
	if w.err == nil {
		w.err = err
	}
}

func cellName(col, row int) string { return review.ColumnLetters(col) + fmt.Sprint(row) }

// text writes text that stays text.
func (w *writer) text(sheet string, col, row int, text string) {
	if text != "" {
		w.do(w.f.SetCellStr(sheet, cellName(col, row), text))
	}
}

// row writes a row of the agreed sheet.
func (w *writer) row(row int, s *review.Study) {
	for i, col := range w.columns {
		if n, ok := s.Number(col.field); ok && col.field != review.NoField {
			w.do(w.f.SetCellFloat(studiesSheet, cellName(i+1, row), n.Value, n.Decimals(), 64))
			continue
		}
		w.text(studiesSheet, i+1, row, own(s, col))
	}
}

// own returns the text of a row under a column that holds no number.
func own(s *review.Study, col column) string {
	switch col.field {
	case review.StudyName:
		return s.Name
	case review.StudyID:
		return s.ID
	case review.DateField:
		return s.Date.String()
	case review.OutcomeField:
		return s.Outcome
	case review.MeasureField:
		if s.Measure == effect.Unspecified {
			return ""
		}
		return s.Measure.String()
	case review.BetterField:
		return s.Better.String()
	}
	r, _ := s.Remark(col.header)
	return r.Text
}

// pair writes two rows as one: where they differ both texts stand in the cell, except
// that a rounded number gives way to the fuller one.
func (w *writer) pair(row int, p *Pair) {
	w.row(row, p.First)
	for _, cell := range p.Cells {
		col := slices.IndexFunc(w.columns, func(c column) bool { return c.header == cell.Header }) + 1
		if col == 0 {
			continue
		}
		at := cellName(col, row)
		if cell.Kind == Rounding {
			fuller, _ := p.First.Number(cell.Field)
			if n, _ := p.Second.Number(cell.Field); n.Decimals() > fuller.Decimals() {
				fuller = n
			}
			w.do(w.f.SetCellFloat(studiesSheet, at, fuller.Value, fuller.Decimals(), 64))
			w.entry(at, p.First, cell, "rounding: the fuller one is taken")
			continue
		}
		w.do(w.f.SetCellStr(studiesSheet, at, orBlank(cell.First)+" | "+orBlank(cell.Second)))
		w.do(w.f.SetCellStyle(studiesSheet, at, at, w.open))
		what := "to be settled"
		if p.Large {
			what = "to be settled; it changes the effect by more than the tolerance"
		}
		w.entry(at, p.First, cell, what)
	}
}

// entry lists a cell to be looked at.
func (w *writer) entry(at string, s *review.Study, cell Cell, what string) {
	for i, text := range []string{studiesSheet + "!" + at, s.Name, s.Outcome, cell.Header, cell.First, cell.Second, what} {
		w.text(listSheet, i+1, w.list, text)
	}
	w.list++
}

// plan writes the settings and the planned runs that a plan sheet gave.
func (w *writer) plan(plan *review.Plan) {
	given := plan.Given(review.FromSheet)
	if len(given)+len(plan.Runs) == 0 {
		return
	}
	_, err := w.f.NewSheet(planSheet)
	w.do(err)
	rows := [][]string{{"setting", "value", "outcome", "reason"}}
	for _, g := range given {
		rows = append(rows, []string{g.Setting, g.Value.Text, g.Outcome, g.Value.Reason})
	}
	for _, r := range plan.Runs {
		rows = append(rows, []string{"run", r.Place.Text, r.Outcome, ""})
	}
	for i, row := range rows {
		for j, text := range row {
			w.text(planSheet, j+1, i+1, text)
		}
	}
}
