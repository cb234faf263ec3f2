package ingest

import (
	"fmt"
	"strings"

	"steelyard/ingest/grid"
	"steelyard/meta/choice"
	"steelyard/meta/review"
)

// planDraft is a plan as read, with what was wrong in it and the columns it maps.
type planDraft struct {
	plan     *review.Plan
	findings []review.Finding
	columns  []request
}

// planColumns are the 1-based columns of a plan sheet, 0 where there is none.
type planColumns struct{ setting, value, outcome, reason, date int }

// Rows of a plan that are no settings.
const (
	planRun    = "run"    // a planned sensitivity analysis
	planColumn = "column" // a column of the sheet, as in --column
)

// readPlan reads the plan: the workbook's sheet "plan", or the book of the plan
// file beside a text file; without either it is all defaults.
func readPlan(book, planBook *grid.Book) *planDraft {
	d := &planDraft{plan: &review.Plan{}}
	source := book
	if book.Text {
		source = planBook
	}
	if source == nil {
		return d
	}
	for i := range source.Sheets {
		s := &source.Sheets[i]
		if source.Text || choice.Fold(s.Name) == "plan" {
			d.read(source.File, s)
			break
		}
	}
	return d
}

// planHeaderRows is how many rows are searched for the header of a plan.
const planHeaderRows = 20

// maxPlanRows is far above the settings of any review.
const maxPlanRows = 10_000

// read reads the rows of a plan sheet.
func (d *planDraft) read(file string, s *grid.Sheet) {
	if len(s.Rows) == 0 {
		return
	}
	for i := range s.Rows[:min(planHeaderRows, len(s.Rows))] {
		columns := planHeader(&s.Rows[i])
		if columns.setting == 0 || columns.value == 0 {
			continue
		}
		if rows := len(s.Rows) - i - 1; rows > maxPlanRows {
			d.find(review.Place{File: file, Sheet: s.Name}, "", fmt.Sprintf("the plan has %d rows, more than the limit of %d, and was not read; keep those that set something", rows, maxPlanRows))
			return
		}
		for j := i + 1; j < len(s.Rows); j++ {
			d.readRow(file, s, &s.Rows[j], columns)
		}
		return
	}
	d.find(review.Place{File: file, Sheet: s.Name}, "", "the plan has no header; write setting, value, outcome and reason above its rows")
}

func planHeader(row *grid.Row) planColumns {
	var c planColumns
	for i := range row.Cells {
		column := map[string]*int{"setting": &c.setting, "value": &c.value, "outcome": &c.outcome, "reason": &c.reason, "date": &c.date}[choice.Fold(tidy(headerText(row, i+1)))]
		if column != nil && *column == 0 {
			*column = i + 1
		}
	}
	return c
}

// readRow reads one row of a plan; a row without setting or value says nothing.
func (d *planDraft) readRow(file string, s *grid.Sheet, row *grid.Row, c planColumns) {
	text := func(col int) string { return tidy(row.Cell(col).Text) }
	setting, outcome := text(c.setting), text(c.outcome)
	cell := row.Cell(c.value)
	place := review.Place{File: file, Sheet: s.Name, Row: row.Number, Col: c.value, Text: cell.Text}
	if strings.HasPrefix(setting, "#") || (setting == "" && cell.Kind == grid.Blank) {
		return
	}
	switch {
	case setting == "":
		place.Col = c.setting
		d.find(place, outcome, "the row gives a value but names no setting; write the setting's name beside it")
		return
	case cell.Kind == grid.Blank:
		return
	case cell.Kind == grid.ErrorValue || cell.Kind == grid.Uncalculated:
		d.find(place, outcome, setting+": the cell holds no value that can be read ("+cell.Kind.String()+"); type the value")
		return
	}
	value := text(c.value)
	var err error
	switch choice.Fold(setting) {
	case planRun:
		err = d.addRun(value, outcome, place)
	case planColumn:
		err = d.addColumn(value)
	default:
		agreed, readable := planDate(row.Cell(c.date))
		if !readable {
			place.Col, place.Text = c.date, row.Cell(c.date).Text
			d.find(place, outcome, quote(place.Text)+" is not read as the date on which "+setting+" was agreed; type it as 2015, 2015-08 or 2015-08-31")
			return
		}
		err = d.plan.Set(setting, outcome, review.Value{Text: value, From: review.FromSheet, Place: place, Reason: text(c.reason), Date: agreed})
		if _, unknown := review.FindSetting(setting); unknown != nil {
			place.Col, place.Text = c.setting, row.Cell(c.setting).Text
			err = fmt.Errorf("%w, %s, %s", unknown, planRun, planColumn)
		}
	}
	if err != nil {
		d.find(place, outcome, err.Error())
	}
}

// planDate reads the date beside a setting or a judgement; a blank one is no date.
func planDate(cell grid.Cell) (date review.Date, readable bool) {
	if cell.Kind == grid.Blank {
		return review.Date{}, true
	}
	date, letter, ok := parseDate(tidy(cell.Text))
	return date, ok && letter == "" && date.Year >= firstYear && date.Year <= lastYear
}

func (d *planDraft) addRun(value, outcome string, place review.Place) error {
	run, err := review.ParseRun(value)
	if err != nil {
		return err
	}
	run.Outcome, run.Place = outcome, place
	d.plan.Runs = append(d.plan.Runs, run)
	return nil
}

func (d *planDraft) addColumn(value string) error {
	name, header, err := ParseColumn(value)
	if err != nil {
		return err
	}
	field, err := review.ParseField(name)
	if err != nil {
		return err
	}
	d.columns = append(d.columns, request{field: field, header: header})
	return nil
}

// find records an error of the plan. It refuses the outcome it is for, or all:
// to go on with a default in place of what was planned would mislead.
func (d *planDraft) find(place review.Place, outcome, message string) {
	d.findings = append(d.findings, review.Finding{Severity: review.Error, Rule: review.RulePlan, Place: place, Outcome: outcome, Message: message})
}
